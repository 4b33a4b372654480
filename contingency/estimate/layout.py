"""Lay out a new estimate folder with commented files to begin with."""

from __future__ import annotations

import shutil
from contextlib import suppress
from importlib import resources
from pathlib import Path

from contingency.estimate.faults import FolderInUse, FolderNotMade

STARTER = (
    "estimate.toml",
    "packages.csv",
    "systemic.csv",
    "events.csv",
    "causes.csv",
)
"""The files of a new estimate, in the order in which a newcomer fills them in."""


def lay_out(folder: Path | str) -> list[Path]:
    """Write a new estimate folder that can be read as it is; return its files.

    The folder must not exist yet, or be empty.  It gets all of its files or none: they
    are written beside their place first.

    Parameters
    ----------
    folder : path
        The folder above it must exist.

    Raises
    ------
    FolderInUse
        folder-in-use.  There is something at that place already.
    FolderNotMade
        folder-not-made.  The operating system does not let us write there.

    Examples
    --------
    >>> import tempfile
    >>> from contingency.estimate.reading import read_estimate
    >>> with tempfile.TemporaryDirectory() as place:
    ...     files = lay_out(Path(place) / "rev-a")
    ...     estimate = read_estimate(Path(place) / "rev-a")
    >>> [file.name for file in files][:2]
    ['estimate.toml', 'packages.csv']
    >>> estimate.project
    'Alder Brook footbridge'
    """
    folder = Path(folder)
    try:
        if _is_in_use(folder):
            raise FolderInUse.at(
                str(folder),
                "There is something at that place already.",
                "Name a folder that does not exist yet; nothing was written.",
            )
        _write(folder)
    except (OSError, ValueError) as error:
        reason = str(getattr(error, "strerror", None) or error).lower()
        raise FolderNotMade.at(
            str(folder),
            f"The folder cannot be made ({reason}).",
            "Make the folder above it, or name another place; nothing was written.",
        ) from error
    return [folder / name for name in STARTER]


def _is_in_use(folder: Path) -> bool:
    """Whether a file, a link or a folder that holds anything is in the way."""
    if folder.is_dir():
        return any(folder.iterdir())
    return folder.exists() or folder.is_symlink()


def _write(folder: Path) -> None:
    """Put all files into the folder, or none."""
    is_new = not folder.exists()
    home = folder.resolve()
    waiting = (home.parent if is_new else home) / f".{home.name}.being-laid-out"
    waiting.mkdir()
    moved: list[Path] = []
    try:
        source = resources.files("contingency.estimate") / "starter"
        for name in STARTER:
            (waiting / name).write_bytes((source / name).read_bytes())
        if is_new:
            waiting.rename(home)
            return
        for name in STARTER:
            # Moving within one folder does not run out of space half-way.
            (waiting / name).rename(home / name)
            moved.append(home / name)
        waiting.rmdir()
    except BaseException:
        for path in moved:
            with suppress(OSError):
                path.unlink()
        shutil.rmtree(waiting, ignore_errors=True)
        raise
