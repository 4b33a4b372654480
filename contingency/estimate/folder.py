"""The files of an estimate folder: found by name, read once, kept as they were."""

from __future__ import annotations

import codecs
import os
import stat
from collections.abc import Mapping
from pathlib import Path

from contingency.estimate.fault_list import (
    FILE_ORDER,
    FaultList,
    Place,
    Problem,
    listed,
    nearest,
    shown,
)
from contingency.estimate.faults import (
    FileEmpty,
    FileMisnamed,
    FileMissing,
    FileTooLarge,
    FileUnreadable,
    FolderNotFound,
    NotAFile,
    NotUtf8,
)
from contingency.estimate.nouns import SourceFile

REQUIRED = ("estimate.toml", "packages.csv")
"""Files without which there is no estimate."""

LARGEST_READ = 8 * 2**20
"""Bytes of a file that is interpreted.  A choice of ours: a row of a table takes
some 300 bytes, so this is well above twenty thousand rows."""
LARGEST_EVIDENCE = 32 * 2**20
"""Bytes of an evidence file.  A choice of ours: it travels inside the PDF."""

_OTHER_ENCODINGS = (
    (codecs.BOM_UTF32_LE, "UTF-32"),
    (codecs.BOM_UTF32_BE, "UTF-32"),
    (codecs.BOM_UTF16_LE, "UTF-16"),
    (codecs.BOM_UTF16_BE, "UTF-16"),
)
_SAVE_AS = "Save it as UTF-8 (in a spreadsheet: CSV UTF-8)."


class EstimateFolder:
    """An estimate folder that is there and can be listed."""

    def __init__(self, path: Path, names: frozenset[str], faults: FaultList) -> None:
        self.path = path
        self.faults = faults
        self._names = names
        self._read: dict[str, bytes] = {}
        self._held: Mapping[str, bytes] | None = None

    @classmethod
    def held(
        cls, files: Mapping[str, bytes], faults: FaultList, *, where: str
    ) -> EstimateFolder:
        """Return a folder that is held in memory: no name of it touches the disk."""
        folder = cls(Path(where), frozenset(files), faults)
        folder._held = files
        return folder

    @classmethod
    def open(cls, path: Path, faults: FaultList) -> EstimateFolder | None:
        """Return the folder at `path`; None, and a fault, where there is none."""
        try:
            names = frozenset(entry.name for entry in path.iterdir())
        except NotADirectoryError:
            found = "This is a file, not a folder."
        except FileNotFoundError:
            found = "There is no such folder."
        except (OSError, ValueError) as error:
            found = f"The folder cannot be listed ({_reason(error)})."
        else:
            return cls(path, names, faults)
        remedy = "Name the folder that holds estimate.toml and packages.csv."
        faults.add(Place(str(path)), Problem(FolderNotFound, found, remedy))
        return None

    @property
    def names(self) -> frozenset[str]:
        """Names of everything that lies in the folder."""
        return self._names

    def has(self, name: str) -> bool:
        """Whether something of that name lies in the folder."""
        return name in self._names

    def text(self, name: str) -> str | None:
        """Return the text of a file; None if it is not there or is no text.

        A missing required file and an unreadable one are noted as faults.
        """
        if not self.has(name):
            if name in REQUIRED:
                self._refuse_missing(name)
            return None
        content = self._bytes(name, Place(name), LARGEST_READ)
        if content is None:
            return None
        text = _decoded(content)
        if isinstance(text, tuple):
            line, problem = text
            self.faults.add(Place(name, line), problem)
            return None
        if not text.strip():
            remedy = "Fill it, or remove it if the estimate needs none."
            problem = Problem(FileEmpty, "The file is empty.", remedy)
            self.faults.add(Place(name), problem)
            return None
        return text

    def carry(self, name: str, place: Place | None = None) -> None:
        """Take a file along as it is; `place` names the cell that asks for it."""
        self._bytes(name, place or Place(name), LARGEST_EVIDENCE)

    def refuse_misnamed(self) -> None:
        """Note files that are not read only because their name is slightly off."""
        known = FILE_ORDER
        for name in sorted(self._names - set(known) - set(self._read)):
            if not name.lower().endswith((".csv", ".toml", ".csv.txt", ".toml.txt")):
                continue
            meant = _meant(name, known)
            if meant and not self.has(meant):
                found = f"A file of this name is not read; {meant} is."
                remedy = f"Rename it to {meant}, or move it out of the folder."
                problem = Problem(FileMisnamed, found, remedy)
                self.faults.add(Place(name), problem)

    @property
    def sources(self) -> tuple[SourceFile, ...]:
        """Every file that was read, byte for byte, sorted by name."""
        return tuple(
            SourceFile(name=name, content=content)
            for name, content in sorted(self._read.items())
        )

    def _refuse_missing(self, name: str) -> None:
        """Note that a required file is missing."""
        files = sorted(n for n in self._names if n.endswith((".csv", ".toml")))
        found = f"There is no {name} in the folder"
        found += f"; it holds {listed(files[:8], 'and')}." if files else "."
        remedy = "Add the file; `contingency start` lays out a folder to begin with."
        self.faults.add(Place(name), Problem(FileMissing, found, remedy))

    def _bytes(self, name: str, place: Place, largest: int) -> bytes | None:
        """Return the content of a file and keep it; None, and a fault, if unfit."""
        if name in self._read:
            return self._read[name]
        if self._held is not None:
            content = self._held[name]
            problem = _too_large(name, len(content), largest)
            if problem is None:
                self._read[name] = content
                return content
            self.faults.add(place, problem)
            return None
        path = self.path / name
        try:
            about = path.stat()
            problem = self._unfit(path, about, largest)
            if problem is None:
                with path.open("rb") as file:
                    # No more than was looked up, even if the file grows meanwhile.
                    self._read[name] = file.read(about.st_size)
                return self._read[name]
        except (OSError, ValueError) as error:
            found = f"The file {shown(name)} cannot be read ({_reason(error)})."
            remedy = "Close other programs that hold it, and check its permissions."
            problem = Problem(FileUnreadable, found, remedy)
        self.faults.add(place, problem)
        return None

    def _unfit(self, path: Path, about: os.stat_result, largest: int) -> Problem | None:
        """Return what keeps a file from being read, if anything."""
        remedy = f"Put the file {path.name} itself in the folder."
        if stat.S_ISDIR(about.st_mode):
            return Problem(NotAFile, f"{shown(path.name)} is a folder.", remedy)
        if not stat.S_ISREG(about.st_mode):
            found = f"{shown(path.name)} is a device or a pipe."
            return Problem(NotAFile, found, remedy)
        if path.is_symlink() and path.resolve().parent != self.path.resolve():
            found = f"{shown(path.name)} is a link that leads out of the folder."
            return Problem(NotAFile, found, remedy)
        return _too_large(path.name, about.st_size, largest)


def _too_large(name: str, size: int, largest: int) -> Problem | None:
    """Return that a file is too large to be read, if it is."""
    if size <= largest:
        return None
    limit = largest // 2**20
    found = f"{shown(name)} has {size / 2**20:,.1f} MB; at most {limit} are read."
    remedy = "Remove what does not belong to the estimate, such as empty rows."
    return Problem(FileTooLarge, found, remedy)


def _decoded(content: bytes) -> str | tuple[int, Problem]:
    """Return UTF-8 text without its byte-order mark, or the line that is none."""
    for mark, encoding in _OTHER_ENCODINGS:
        if content.startswith(mark):
            found = f"The file is {encoding} text."
            return 1, Problem(NotUtf8, found, _SAVE_AS)
    nought = content.find(b"\0")
    if nought >= 0:
        line = content.count(b"\n", 0, nought) + 1
        found = "A byte of value nought (NUL) stands in the text."
        return line, Problem(NotUtf8, found, _SAVE_AS)
    body = content.removeprefix(codecs.BOM_UTF8)
    try:
        return body.decode("utf-8")
    except UnicodeDecodeError as error:
        line = body.count(b"\n", 0, error.start) + 1
        found = f"The byte {body[error.start]:#04x} is no UTF-8 text."
        return line, Problem(NotUtf8, found, _SAVE_AS)


def _meant(name: str, known: tuple[str, ...]) -> str | None:
    """Return the known name that a file name only just misses."""
    small = name.lower().removesuffix(".txt")
    return small if small in known else nearest(small, known, at_least=0.9)


def _reason(error: Exception) -> str:
    """Return the operating system's reason, in small letters, without paths."""
    strerror = getattr(error, "strerror", None)
    return str(strerror or error).lower()
