"""Issuing: a report enters the register once, whole, and never changes again.

    records/
      register.jsonl         one line per issue, a hash chain (`chain.py`)
      issued/C/              the files of the first issue of revision C, read-only
      issued/C-2/            a corrected issue of the same revision

The order of steps is what makes a crash harmless:

1. Take the lock; clear up what an earlier crash left (step 5 undone, or a half).
2. Ask the caller for the files; they may carry the number of their line.
3. Write them into a hidden folder beside the final one and force them to the disk.
4. Replace the register by itself and the new line.  **From here on it is issued.**
5. Give the folder its final name.

A crash before step 4 leaves the register as it was and a hidden folder, which the
next issue removes.  A crash after it leaves the register complete and a folder under
its hidden name, which the next issue renames.
"""

from __future__ import annotations

import datetime as dt
import re
import shutil
from collections.abc import Callable, Mapping
from dataclasses import dataclass
from hashlib import sha256
from pathlib import Path

from contingency.errors import AlreadyIssued, DamagedRecord, FolderInTheWay
from contingency.record.chain import (
    Entry,
    Register,
    SignedBy,
    read_register,
    written_line,
)
from contingency.record.durable import (
    Pause,
    held,
    no_pause,
    settle_folder,
    write_durably,
    write_through,
)

FILE = "register.jsonl"
ISSUED = "issued"

_HALF = ".half"
"""End of the hidden name of a folder that is being filled."""


@dataclass(frozen=True, kw_only=True, slots=True)
class Place:
    """Where in the register an issue will stand; known before its files are made."""

    number: int
    """Line of the register, from 1."""
    previous: str
    """SHA-256 of the line before."""
    revision: str
    issue: int
    reason: str
    issued_at: dt.datetime
    folder: str
    """From the folder of the register, with `/`."""


@dataclass(frozen=True, kw_only=True, slots=True)
class IssuedFiles:
    """What is issued: the files, and what the register says of them."""

    files: Mapping[str, bytes]
    """Content by plain name: no folders."""
    report: str
    """Name of the PDF among them."""
    results: str
    """Name of the results among them."""
    inputs: str
    """Fingerprint of the estimate."""
    tool: str
    """Version of the program."""
    sign_offs: tuple[SignedBy, ...] = ()


def issue(
    records: Path,
    *,
    project: str,
    revision: str,
    reason: str = "",
    when: dt.datetime,
    make: Callable[[Place], IssuedFiles],
    pause: Pause = no_pause,
) -> Entry:
    """Issue a revision: write its files read-only and add its line to the register.

    Parameters
    ----------
    records : Path
        Folder of the register; it must exist.
    project, revision : str
        As on the cover.  One folder of records serves one project.
    reason : str
        Why a revision that was issued before is issued again.
    when : datetime
        Time of the issue, with its offset from UTC.
    make : callable
        Makes the files, given the place of the issue in the register.  Whatever it
        raises is passed on, and nothing is issued.
    pause : callable
        For tests.

    Returns
    -------
    Entry
        The new line.

    Raises
    ------
    AlreadyIssued
        already-issued.  The revision is in the register and no reason is given.
    FolderInTheWay
        folder-in-the-way.  A folder stands there that is in no line.
    DamagedRecord
        damaged-record.  The chain of the register is broken.
    BusyRecord
        busy-record.  Another process is issuing.
    """
    if when.tzinfo is None:
        raise ValueError(f"{when} has no offset from UTC")
    with held(records / f".{FILE}.lock", what=str(records / FILE)):
        pause("locked")
        content = _register_bytes(records)
        register = _unbroken(read_register(content), records)
        clear_up(records, register)
        place = _place(records, register, project, revision, reason, when)
        made = make(place)
        entry = _entry(place, made, project)
        half = records / _half_name(place.folder)
        try:
            _fill(half, made.files, pause)
        except BaseException:
            shutil.rmtree(half, ignore_errors=True)
            raise
        line = written_line(entry)
        write_durably(records / FILE, content + line, pause=pause)
        pause("in the register")
        half.replace(records / place.folder)
        pause("folder named")
        settle_folder(records / ISSUED)
    return entry


def refuse_taken(records: Path, *, project: str, revision: str, reason: str) -> None:
    """Clear up after a crash, and refuse at once what `issue` would refuse later.

    Raises
    ------
    AlreadyIssued, FolderInTheWay, DamagedRecord, BusyRecord
        As `issue`.
    """
    with held(records / f".{FILE}.lock", what=str(records / FILE)):
        found = _unbroken(read_register(_register_bytes(records)), records)
        clear_up(records, found)
        never = dt.datetime.min.replace(tzinfo=dt.UTC)
        _place(records, found, project, revision, reason, never)


def clear_up(records: Path, register: Register) -> None:
    """Finish or remove what a crash left; only under the lock of the register."""
    (records / f".{FILE}.next").unlink(missing_ok=True)
    folders = {_half_name(entry.folder): entry for entry in register.entries}
    for half in sorted((records / ISSUED).glob(f".*{_HALF}")):
        entry = folders.get(f"{ISSUED}/{half.name}")
        if entry and not (records / entry.folder).exists():
            half.replace(records / entry.folder)
        else:
            shutil.rmtree(half)
    if (records / ISSUED).is_dir():
        settle_folder(records / ISSUED)


def files_at_fault(records: Path, entry: Entry) -> tuple[str, ...]:
    """Return in words which files of an issue are missing or differ from its line."""
    faults = []
    for name, digest in sorted(entry.files.items()):
        path = records / entry.folder / name
        if not is_plain_name(name) or not path.is_file():
            faults.append(f"{name} is missing")
        elif sha256(path.read_bytes()).hexdigest() != digest:
            faults.append(f"{name} differs")
    return tuple(faults)


def folder_name(revision: str, issue: int) -> str:
    """Return the name of the folder of an issue, safe on any file system.

    >>> folder_name("C", 1), folder_name("C", 2), folder_name("0.2 / draft", 1)
    ('C', 'C-2', '0.2-draft')
    """
    plain = re.sub(r"[^A-Za-z0-9._]+", "-", revision).strip("-._") or "revision"
    return plain[:80] if issue == 1 else f"{plain[:80]}-{issue}"


def is_plain_name(name: str) -> bool:
    """Return whether a file name is letters, digits, spaces and `._-` only.

    >>> is_plain_name("results.json"), is_plain_name("../results.json")
    (True, False)
    """
    return bool(re.fullmatch(r"[A-Za-z0-9][A-Za-z0-9 ._-]{0,119}", name))


def _register_bytes(records: Path) -> bytes:
    path = records / FILE
    return path.read_bytes() if path.exists() else b""


def _unbroken(register: Register, records: Path) -> Register:
    if register.holds:
        return register
    first = register.faults[0]
    raise DamagedRecord(
        where=f"{records / FILE}, line {first.line}",
        found=first.what,
        rule="A register is a chain of lines that only grows.",
        remedy="Bring back the register as it was; nothing is added to a broken one.",
    )


def _place(
    records: Path,
    register: Register,
    project: str,
    revision: str,
    reason: str,
    when: dt.datetime,
) -> Place:
    earlier = register.issues_of(revision)
    if earlier and not reason.strip():
        last = earlier[-1]
        raise AlreadyIssued(
            where=f"{records / FILE}, line {last.number}",
            found=f"revision {revision} of {last.project} was issued on "
            f"{last.issued_at[:10]}.",
            rule="An issued revision is never overwritten; a correction is a new "
            "issue of it, with a reason.",
            remedy="Give the reason, or a new revision; the reports of another project "
            f"than {project} belong in a folder of their own."
            if last.project != project
            else "Give the reason, or raise the revision in estimate.toml.",
        )
    name = _free_name(register, revision, len(earlier) + 1)
    if (records / ISSUED / name).exists():
        raise FolderInTheWay(
            where=str(records / ISSUED / name),
            found="the folder is there, but no line of the register speaks of it.",
            rule="Issued folders are made by an issue only, and never overwritten.",
            remedy="Move the folder away, then issue again.",
        )
    return Place(
        number=len(register.entries) + 1,
        previous=register.last,
        revision=revision,
        issue=len(earlier) + 1,
        reason=reason.strip() if earlier else "",
        issued_at=when.replace(microsecond=0),
        folder=f"{ISSUED}/{name}",
    )


def _free_name(register: Register, revision: str, issue: int) -> str:
    """Name of the folder; two revisions whose names become alike count on."""
    taken = {entry.folder.casefold() for entry in register.entries}
    count = issue
    while f"{ISSUED}/{folder_name(revision, count)}".casefold() in taken:
        count += 1
    return folder_name(revision, count)


def _half_name(folder: str) -> str:
    return f"{ISSUED}/.{folder.removeprefix(f'{ISSUED}/')}{_HALF}"


def _entry(place: Place, made: IssuedFiles, project: str) -> Entry:
    odd = [name for name in made.files if not is_plain_name(name)]
    if odd or not {made.report, made.results} <= {*made.files}:
        raise ValueError(f"cannot issue files of these names: {odd or made.report}")
    digests = {
        name: sha256(content).hexdigest()
        for name, content in sorted(made.files.items())
    }
    return Entry(
        number=place.number,
        previous=place.previous,
        project=project,
        revision=place.revision,
        issue=place.issue,
        reason=place.reason,
        issued_at=place.issued_at.isoformat(),
        tool=made.tool,
        inputs=made.inputs,
        results=digests[made.results],
        report=made.report,
        pdf=digests[made.report],
        pdf_bytes=len(made.files[made.report]),
        folder=place.folder,
        files=digests,
        sign_offs=made.sign_offs,
    )


def _fill(half: Path, files: Mapping[str, bytes], pause: Pause) -> None:
    """Write all files of an issue, read-only, and force them to the disk."""
    pause("make folder")
    half.mkdir(parents=True)
    for name, content in sorted(files.items()):
        write_through(half / name, content, pause=pause)
        (half / name).chmod(0o444)
    settle_folder(half)
    settle_folder(half.parent)
    pause("folder filled")
