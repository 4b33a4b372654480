"""Files that the office reads and writes, and what the system says against it."""

from __future__ import annotations

from collections.abc import Iterator
from contextlib import contextmanager
from pathlib import Path

from contingency.errors import UnusablePath
from contingency.record.attachments import LARGEST_PDF


def bytes_of(path: Path) -> bytes:
    """Return what a file holds; of one that is too large, enough to see that it is."""
    try:
        with path.open("rb") as file:
            return file.read(LARGEST_PDF + 1)
    except OSError as fault:
        raise UnusablePath(
            where=str(path),
            found=f"{fault.strerror or fault}.",
            rule="The file must be there and readable.",
            remedy="Check the name and the permissions.",
        ) from fault


@contextmanager
def writing(folder: Path) -> Iterator[None]:
    """Turn what the system says against writing into an error of ours."""
    try:
        yield
    except OSError as fault:
        raise UnusablePath(
            where=str(folder),
            found=f"{fault.strerror or fault}.",
            rule="Records need a folder that is there and can be written to.",
            remedy="Check the folder, its permissions and the space left on the disk.",
        ) from fault


def in_the_way(path: Path) -> UnusablePath:
    """Return the error that something stands where a file would go."""
    return UnusablePath(
        where=str(path),
        found="another file of that name is there.",
        rule="Nothing that is there is overwritten.",
        remedy="Name another place, or move the file away.",
    )
