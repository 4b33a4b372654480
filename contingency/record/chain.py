"""The register of issued reports as a chain of lines: written, read, checked.

One JSON line per issue.  Each line carries the digest of the line before it, as that
stands in the file, and a digest of its own content.  Whoever changes, drops, adds or
reorders lines breaks the chain from there on; what no chain can show by itself is
that its last lines are missing, so each issued report carries the number of its line
and the digest of the line before (`contingency.record.register`).
"""

from __future__ import annotations

import datetime as dt
import json
from collections.abc import Mapping
from dataclasses import dataclass, field, fields
from hashlib import sha256
from typing import Any

FORMAT = "contingency-register/1"

FIRST = "0" * 64
"""Stands for the digest of the line before in the first line."""

LARGEST_REGISTER = 64 * 2**20
"""Bytes of a register that are looked at; a line has about 2,000.  Own choice."""


@dataclass(frozen=True, kw_only=True, slots=True)
class SignedBy:
    """A sign-off as the register names it."""

    role: str
    name: str
    signed_at: str
    """ISO 8601, with its offset from UTC."""


@dataclass(frozen=True, kw_only=True, slots=True)
class Entry:
    """One line of the register: one issue of one revision."""

    number: int
    """Line of the register, from 1."""
    previous: str
    """SHA-256 of the line before, its line end left out; FIRST in the first."""
    project: str
    revision: str
    issue: int
    """1 for the first issue of the revision; each correction counts one up."""
    reason: str
    """Why the revision was issued again; empty for the first issue."""
    issued_at: str
    """ISO 8601, with its offset from UTC."""
    tool: str
    """Version of the program that made the report."""
    inputs: str
    """Fingerprint of the estimate."""
    results: str
    """SHA-256 of results.json."""
    report: str
    """Name of the PDF among the files."""
    pdf: str
    """SHA-256 of the PDF as issued, before any seal."""
    pdf_bytes: int
    """Its length: a sealed copy begins with exactly these bytes."""
    folder: str
    """Where the files lie, from the folder of the register, with `/`."""
    files: Mapping[str, str] = field(default_factory=dict)
    """SHA-256 of every file of the issue, by name."""
    sign_offs: tuple[SignedBy, ...] = ()


@dataclass(frozen=True, kw_only=True, slots=True)
class ChainFault:
    """One place where a register does not hold."""

    line: int
    """From 1."""
    what: str


@dataclass(frozen=True, kw_only=True, slots=True)
class Register:
    """A register as read: its entries, and where its chain is broken."""

    entries: tuple[Entry, ...] = ()
    """In file order; lines that cannot be read are left out and are faults."""
    faults: tuple[ChainFault, ...] = ()
    last: str = FIRST
    """SHA-256 of the last line: what the next line will carry as `previous`."""

    @property
    def holds(self) -> bool:
        """Whether the chain is unbroken."""
        return not self.faults

    def issues_of(self, revision: str) -> tuple[Entry, ...]:
        """Return all issues of one revision, earliest first."""
        return tuple(entry for entry in self.entries if entry.revision == revision)


def written_line(entry: Entry) -> bytes:
    """Return the line of one entry, with its line end: one form for one content."""
    data: dict[str, Any] = {
        column.name: getattr(entry, column.name) for column in fields(Entry)
    }
    data |= {
        "format": FORMAT,
        "files": dict(entry.files),
        "sign_offs": [
            {"role": s.role, "name": s.name, "signed_at": s.signed_at}
            for s in entry.sign_offs
        ],
    }
    data["digest"] = sha256(_one_form(data)).hexdigest()
    return _one_form(data) + b"\n"


def read_register(content: bytes) -> Register:
    """Return what a register holds and every place where its chain is broken.

    Nothing is repaired and nothing is raised: a broken register is an answer.
    """
    if not content:
        return Register()
    if len(content) > LARGEST_REGISTER:
        what = f"the file has {len(content):,} bytes, more than are looked at."
        return Register(faults=(ChainFault(line=1, what=what),))
    lines = content.split(b"\n")
    faults = []
    if lines.pop():
        faults.append(
            ChainFault(line=len(lines) + 1, what="the line is cut short; no line end.")
        )
    entries: list[Entry] = []
    before = FIRST
    for number, line in enumerate(lines, start=1):
        try:
            entry = _entry(line)
        except (ValueError, KeyError, TypeError, RecursionError) as fault:
            faults.append(ChainFault(line=number, what=f"it cannot be read: {fault}."))
        else:
            faults += [
                ChainFault(line=number, what=what)
                for what in _breaks(entry, number, before, entries)
            ]
            entries.append(entry)
        before = sha256(line).hexdigest()
    return Register(
        entries=tuple(entries),
        faults=tuple(sorted(faults, key=lambda fault: fault.line)),
        last=before,
    )


def entry_of(register: Register, pdf: bytes) -> Entry | None:
    """Return the entry whose report is `pdf`, or an earlier part of it, or None.

    A sealed copy begins with the report as issued: the digest in the register is
    that of these first bytes.  The longest match counts.
    """
    digest, reached, found = sha256(), 0, None
    view = memoryview(pdf)
    for entry in sorted(register.entries, key=lambda entry: entry.pdf_bytes):
        if not reached <= entry.pdf_bytes <= len(pdf):
            continue
        digest.update(view[reached : entry.pdf_bytes])
        reached = entry.pdf_bytes
        if digest.hexdigest() == entry.pdf:
            found = entry
    return found


def _breaks(entry: Entry, number: int, before: str, entries: list[Entry]) -> list[str]:
    """Say what does not fit between an entry and the lines before it."""
    found = []
    if entry.number != number:
        found.append(f"it says that it is line {entry.number}.")
    if entry.previous != before:
        found.append("it does not carry the digest of the line before it.")
    issues = 1 + sum(other.revision == entry.revision for other in entries)
    if entry.issue != issues:
        found.append(
            f"it is issue {issues} of revision {entry.revision} and says {entry.issue}."
        )
    if any(other.folder == entry.folder for other in entries):
        found.append(f"the folder {entry.folder} belongs to an earlier line.")
    return found


def _entry(line: bytes) -> Entry:
    """Read one line; anything that `written_line` would not write is refused."""
    data = json.loads(line)
    if not isinstance(data, dict):
        raise TypeError("it is no object")
    if data.pop("format") != FORMAT:
        raise ValueError("its format is another")
    data.pop("digest")
    files, sign_offs = data["files"], data["sign_offs"]
    entry = Entry(
        **{
            **data,
            "files": {str(k): str(v) for k, v in files.items()},
            "sign_offs": tuple(SignedBy(**row) for row in sign_offs),
        }
    )
    for column in fields(Entry):
        expected = {"int": int, "str": str}.get(str(column.type))
        if expected and type(getattr(entry, column.name)) is not expected:
            raise TypeError(f"{column.name} is {getattr(entry, column.name)!r}")
    _offset_known(entry.issued_at)
    if written_line(entry) != line + b"\n":
        raise ValueError("its digest is not that of its content")
    return entry


def _offset_known(moment: str) -> None:
    if dt.datetime.fromisoformat(moment).tzinfo is None:
        raise ValueError(f"{moment} has no offset from UTC")


def _one_form(data: Mapping[str, Any]) -> bytes:
    return json.dumps(
        data, sort_keys=True, separators=(",", ":"), ensure_ascii=False
    ).encode("utf-8", "strict")
