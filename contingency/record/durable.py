"""Writing so that a crash leaves either the old file or the new one, never a part.

Every file that this room keeps passes through `write_durably`: a temporary file in
the same folder, forced to the disk, then renamed over the old name.  `held` keeps two
writers apart by a lock that the system releases when its holder dies, so that no
stale lock is ever left to be cleaned by hand.
"""

from __future__ import annotations

import os
import sys
from collections.abc import Callable, Iterator
from contextlib import contextmanager
from pathlib import Path

from contingency.errors import BusyRecord

Pause = Callable[[str], None]
"""Called with the name of the step about to be taken; tests kill the process there."""

CHUNK = 1 << 16
"""Bytes written between two pauses: small enough that a test can die in a file."""


def no_pause(step: str) -> None:
    """Go on at once: what every caller but a test passes as `pause`."""


def write_durably(path: Path, content: bytes, *, pause: Pause = no_pause) -> None:
    """Put `content` at `path`: after a crash the old content is there, or the new.

    Parameters
    ----------
    path : Path
        In a folder that exists.
    content : bytes
        Everything that the file will hold.
    pause : callable
        See `Pause`.
    """
    beside = path.with_name(f".{path.name}.next")
    write_through(beside, content, pause=pause)
    pause(f"rename {path.name}")
    beside.replace(path)
    pause(f"renamed {path.name}")
    settle_folder(path.parent)


def write_through(path: Path, content: bytes, *, pause: Pause = no_pause) -> None:
    """Write a new file and force it to the disk; not atomic by itself."""
    pause(f"open {path.name}")
    with path.open("wb") as file:
        for start in range(0, len(content), CHUNK):
            file.write(content[start : start + CHUNK])
            file.flush()
            pause(f"written {path.name}")
        os.fsync(file.fileno())
    pause(f"synced {path.name}")


def settle_folder(folder: Path) -> None:
    """Force the names in a folder to the disk; a rename is not durable before."""
    if sys.platform == "win32":  # folders cannot be opened there
        return
    handle = os.open(folder, os.O_RDONLY)
    try:
        os.fsync(handle)
    finally:
        os.close(handle)


@contextmanager
def held(lock: Path, *, what: str) -> Iterator[None]:
    """Hold the lock file at `lock`, or refuse at once if another process does.

    The file stays where it is; only the hold on it counts, and that ends with the
    process however it ends.

    Parameters
    ----------
    lock : Path
        Made if it is not there.
    what : str
        What the lock protects, for the message.

    Raises
    ------
    BusyRecord
        busy-record.  Another process holds it.
    """
    handle = os.open(lock, os.O_RDWR | os.O_CREAT, 0o666)
    try:
        try:
            _take(handle)
        except OSError:
            raise BusyRecord(
                where=what,
                found="another process is writing it at this moment.",
                rule="One process at a time may write a record.",
                remedy="Wait until the other command has ended, then try again.",
            ) from None
        yield
    finally:
        os.close(handle)


def _take(handle: int) -> None:
    """Take the lock without waiting; OSError if it is taken."""
    if sys.platform == "win32":
        import msvcrt

        msvcrt.locking(handle, msvcrt.LK_NBLCK, 1)
    else:
        import fcntl

        fcntl.flock(handle, fcntl.LOCK_EX | fcntl.LOCK_NB)
