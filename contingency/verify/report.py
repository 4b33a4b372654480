"""A report taken apart: files, seals, register, figures computed again, the page.

Nothing but the PDF is needed.  It is treated as hostile: everything that parses it
runs in a process of its own with a limit on memory and time, no name inside it is
used as a path, and nothing in it is run.
"""

from __future__ import annotations

import datetime as dt
import json
from collections.abc import Callable, Sequence
from dataclasses import dataclass
from hashlib import sha256
from typing import Any

from contingency.errors import DamagedRecord, RecordError
from contingency.record.apart import Apart
from contingency.record.attachments import LARGEST_PDF, Attachment
from contingency.record.certificates import read_trusted
from contingency.record.chain import Entry, Register, entry_of, read_register
from contingency.record.issue_note import NAME as NOTE
from contingency.record.issue_note import IssueNote, read_note
from contingency.record.manifest import check_manifest
from contingency.record.seal_check import SealsCheck, seals_from
from contingency.record.sign_off_file import FILE as SIGN_OFFS
from contingency.record.sign_off_file import SignOffs, parse_sign_offs
from contingency.verify import wording
from contingency.verify.comparison import Comparison, compare_results
from contingency.verify.printed import PrintedCheck, check_printed, figures_to_print
from contingency.verify.recomputation import Recomputed, Remaking, recompute
from contingency.verify.verification import (
    Line,
    RegisterCheck,
    RemadeCheck,
    TypedCheck,
    Verification,
)

RESULTS = "results.json"


@dataclass(frozen=True, kw_only=True, slots=True)
class Limits:
    """How long and how large the parts of a verification may become."""

    read_seconds: float = 120.0
    """For taking out the files, and for reading the pages."""
    seal_seconds: float = 900.0
    """For looking at the seals: minutes for a large report."""
    compute_seconds: float = 3600.0
    megabytes: int = 8192
    """Addresses that the other process may reserve; what it uses is far less."""


@dataclass(frozen=True, kw_only=True, slots=True)
class _Asked:
    """What the reader wants to know, and by what it is judged."""

    when: dt.datetime
    register: bytes | None
    roots: tuple[bytes, ...]
    """DER of the trusted certificates."""
    make_again: bool
    threads: int
    limits: Limits
    say: Callable[[str], None]


class _Parts:
    """What has been found so far about one report."""

    def __init__(self, pdf: bytes, attachments: Sequence[Attachment]) -> None:
        self.pdf = pdf
        self.attachments = tuple(attachments)
        self.files = {file.name: file.content for file in attachments}
        self.inputs = {
            file.name: file.content
            for file in attachments
            if file.relationship == "Source"
        }
        self.lines: list[Line] = []

    @property
    def results(self) -> dict[str, Any] | None:
        """The results inside the report, or None where they are no JSON object."""
        try:
            found = json.loads(self.files.get(RESULTS, b""))
        except (ValueError, RecursionError):
            return None
        return found if isinstance(found, dict) else None

    @property
    def results_digest(self) -> str:
        return sha256(self.files.get(RESULTS, b"")).hexdigest()

    def stated(self, key: str) -> str:
        """Return what the results say of the estimate; empty where they do not."""
        estimate = (self.results or {}).get("estimate")
        found = estimate.get(key) if isinstance(estimate, dict) else None
        return found if isinstance(found, str) else ""


def verify_report(
    pdf: bytes,
    *,
    when: dt.datetime,
    register: bytes | None = None,
    trusted: Sequence[bytes] = (),
    make_again: bool = True,
    threads: int = 2,
    limits: Limits | None = None,
    say: Callable[[str], None] | None = None,
    apart: Apart | None = None,
) -> Verification:
    """Return what holds of a report.

    Parameters
    ----------
    pdf : bytes
        The report, from wherever it came.
    when : datetime
        Moment at which certificates are judged, with its offset from UTC.
    register : bytes, optional
        A register.jsonl; without it that part is not checked.
    trusted : sequence of bytes
        PEM or DER files of certificates that the reader trusts.
    make_again : bool
        Whether the pages are made again too, which takes as long as a report.
    threads : int
        Blocks simulated at the same time; changes no figure.
    limits : Limits, optional
        Time and memory.
    say : callable, optional
        Called with the name of the step that begins.
    apart : Apart, optional
        A process to use, which is left running; without it one is started.

    Raises
    ------
    UnreadableReport
        unreadable-report.  The PDF cannot be taken apart at all.
    TookTooLong
        took-too-long.  Taking the files out ran into a limit.
    UnfitCertificate
        unfit-certificate.  A file of trusted certificates cannot be read.
    """
    asked = _Asked(
        when=when,
        register=register,
        roots=tuple(der for content in trusted for der in _der(content)),
        make_again=make_again,
        threads=threads,
        limits=limits or Limits(),
        say=say or (lambda _step: None),
    )
    if apart is not None:
        return _verified(pdf, apart, asked)
    with Apart(megabytes=asked.limits.megabytes) as own:
        return _verified(pdf, own, asked)


def _verified(pdf: bytes, apart: Apart, asked: _Asked) -> Verification:
    say, limits = asked.say, asked.limits
    say("Taking the files out")
    parts = _Parts(pdf, _taken_out(pdf, apart, limits))
    manifest = check_manifest(parts.attachments)
    parts.lines.append(wording.files_line(manifest))
    note = read_note(parts.files.get(NOTE, b""))
    typed_signs = _typed_inside(parts)
    in_register = _register_check(parts, note, asked.register)
    say("Looking at the seals")
    entry = in_register.entry if in_register else None
    seals = _seals(parts, apart, asked, entry, typed_signs)
    typed = _typed_check(parts, typed_signs)
    parts.lines.append(wording.typed_line(typed))
    parts.lines.append(wording.register_line(in_register))
    say("Computing the figures again")
    computed, comparison = _computed_again(
        parts, apart, note if asked.make_again else None, asked
    )
    say("Reading the answer page")
    printed = _printed(parts, apart, computed, limits)
    remade = _remade(parts, computed, comparison)
    say("")
    return Verification(
        project=parts.stated("project"),
        revision=parts.stated("revision"),
        is_issued=note is not None,
        note=note,
        files=manifest,
        seals=seals,
        typed=typed,
        register=in_register,
        recomputed=comparison,
        printed=printed,
        remade=remade,
        lines=tuple(parts.lines),
    )


def _taken_out(pdf: bytes, apart: Apart, limits: Limits) -> list[Attachment]:
    if len(pdf) > LARGEST_PDF:
        # The same refusal as in the other process, without sending it there.
        from contingency.record.attachments import opened

        opened(pdf)
    answer, contents = apart.call(
        "contingency.record.attachments:attachments_apart",
        {},
        [pdf],
        seconds=limits.read_seconds,
    )
    return [
        Attachment(name=name, relationship=relationship, content=content)
        for (name, relationship), content in zip(answer["files"], contents, strict=True)
    ]


# --- Seals and typed sign-offs ------------------------------------------------------


def _seals(
    parts: _Parts,
    apart: Apart,
    asked: _Asked,
    entry: Entry | None,
    typed: SignOffs,
) -> SealsCheck | None:
    arguments = {
        "when": asked.when.isoformat(),
        "issued_bytes": entry.pdf_bytes if entry else None,
        "second_word": True,
    }
    try:
        try:
            check = _seals_apart(parts, apart, asked, arguments)
        except RecordError:
            # pyHanko's second look may take too long; ours alone does not.
            arguments["second_word"] = False
            check = _seals_apart(parts, apart, asked, arguments)
    except RecordError as fault:
        parts.lines.append(Line(what="seals", outcome="fails", words=fault.found))
        return None
    parts.lines += wording.seal_lines(check, typed)
    return check


def _seals_apart(
    parts: _Parts, apart: Apart, asked: _Asked, arguments: dict[str, Any]
) -> SealsCheck:
    answer, _ = apart.call(
        "contingency.record.seal_check:seals_apart",
        arguments,
        [parts.pdf, *asked.roots],
        seconds=asked.limits.seal_seconds,
    )
    return seals_from(answer)


def _typed_inside(parts: _Parts) -> SignOffs:
    try:
        return parse_sign_offs(parts.files[SIGN_OFFS], where="the report")
    except (KeyError, DamagedRecord):
        return SignOffs()


def _typed_check(parts: _Parts, typed: SignOffs) -> TypedCheck | None:
    if SIGN_OFFS not in parts.files:
        return None
    faults = [] if typed.given else [f"{SIGN_OFFS} in it cannot be read"]
    for one in typed.given:
        inputs = one.content.inputs == parts.stated("fingerprint")
        results = one.content.results == parts.results_digest
        if not (inputs and results):
            what = "results" if inputs else "inputs"
            faults.append(f'"{one.role}" by {one.name} is bound to other {what}')
    return TypedCheck(
        names=tuple(f"{one.role}: {one.name}" for one in typed.given),
        faults=tuple(faults),
    )


# --- The register -------------------------------------------------------------------


def _register_check(
    parts: _Parts, note: IssueNote | None, content: bytes | None
) -> RegisterCheck | None:
    if content is None:
        return None
    register = read_register(content)
    entry = entry_of(register, parts.pdf)
    faults = [f"line {fault.line}: {fault.what}" for fault in register.faults]
    if entry is None:
        faults.append("no line of it is of this report")
    else:
        faults += _misfits(entry, note, parts)
    return RegisterCheck(
        lines=len(register.entries),
        faults=tuple(faults),
        entry=entry,
        later_issue=_later_issue(register, entry),
    )


def _misfits(entry: Entry, note: IssueNote | None, parts: _Parts) -> list[str]:
    """Say what the line of this report says otherwise than the report itself."""
    found = []
    if note is None:
        found.append("the report carries no note of its issue")
    elif (note.number, note.previous) != (entry.number, entry.previous):
        found.append(
            f"the report was issued as line {note.number} of another register, or "
            "lines before it were changed"
        )
    if entry.inputs != parts.stated("fingerprint"):
        found.append(f"line {entry.number} is of other inputs")
    if entry.results != parts.results_digest:
        found.append(f"line {entry.number} is of other results")
    return found


def _later_issue(register: Register, entry: Entry | None) -> Entry | None:
    if entry is None:
        return None
    issues = register.issues_of(entry.revision)
    return issues[-1] if issues[-1].issue > entry.issue else None


# --- The figures --------------------------------------------------------------------


def _computed_again(
    parts: _Parts, apart: Apart, note: IssueNote | None, asked: _Asked
) -> tuple[Recomputed | None, Comparison | None]:
    what = "computed again"
    try:
        computed = recompute(
            apart,
            parts.inputs,
            remaking=_remaking(parts, note),
            threads=asked.threads,
            seconds=asked.limits.compute_seconds,
        )
    except RecordError as fault:
        parts.lines.append(Line(what=what, outcome="fails", words=fault.found))
        return None, None
    try:
        comparison = compare_results(
            parts.results or {}, computed.results, least=computed.least
        )
    except (ValueError, KeyError, TypeError, AttributeError, IndexError) as fault:
        words = f"{RESULTS} inside the report is no result of this program ({fault})."
        parts.lines.append(Line(what=what, outcome="fails", words=words[:200]))
        return computed, None
    parts.lines.append(wording.recomputed_line(comparison))
    return computed, comparison


def _remaking(parts: _Parts, note: IssueNote | None) -> Remaking | None:
    if note is None or not {RESULTS, SIGN_OFFS} <= set(parts.files):
        return None
    return Remaking(
        created=note.issued_at,
        results=parts.files[RESULTS],
        sign_offs=parts.files[SIGN_OFFS],
        note=parts.files[NOTE],
    )


def _remade(
    parts: _Parts, computed: Recomputed | None, comparison: Comparison | None
) -> RemadeCheck | None:
    check = None
    if computed and comparison and (computed.pdf or computed.pdf_fault):
        check = RemadeCheck(
            # A sealed copy begins with the report as issued.
            same_bytes=bool(computed.pdf) and parts.pdf.startswith(computed.pdf),
            fault=computed.pdf_fault,
        )
    parts.lines.append(wording.remade_line(check))
    return check


def _printed(
    parts: _Parts, apart: Apart, computed: Recomputed | None, limits: Limits
) -> PrintedCheck | None:
    what = "answer page"
    if computed is None:
        words = "The estimate inside the report was not read."
        parts.lines.append(Line(what=what, outcome="not checked", words=words))
        return None
    try:
        figures = figures_to_print(
            parts.results or {}, currency=computed.currency, step=computed.step
        )
        answer, _ = apart.call(
            "contingency.verify.printed:pages_apart",
            {},
            [parts.pdf],
            seconds=limits.read_seconds,
        )
    except RecordError as fault:
        parts.lines.append(Line(what=what, outcome="fails", words=fault.found))
        return None
    except (ValueError, KeyError, TypeError, AttributeError, IndexError):
        words = f"{RESULTS} inside the report holds no figures to compare."
        parts.lines.append(Line(what=what, outcome="fails", words=words))
        return None
    check = check_printed(answer["pages"], figures)
    parts.lines.append(wording.printed_line(check))
    return check


def _der(content: bytes) -> list[bytes]:
    from cryptography.hazmat.primitives.serialization import Encoding

    return [one.public_bytes(Encoding.DER) for one in read_trusted(content)]
