"""The acts of the office: sign, issue, seal, verify.  One function behind each command.

A typed sign-off is a record, a seal is a cryptographic signature; the two are kept
apart everywhere.  The clock, the private key and the folder of templates come in as
arguments.
"""

from __future__ import annotations

import datetime as dt
from collections.abc import Callable, Sequence
from dataclasses import dataclass
from hashlib import sha256
from pathlib import Path
from typing import TYPE_CHECKING

from contingency.errors import (
    BrokenSeal,
    IssueRefused,
    NotIssued,
    SignOffBlocked,
    UnusablePath,
)
from contingency.estimate.nouns import Estimate
from contingency.estimate.reading import read_estimate
from contingency.record import issue_note, register, sign_off_file, sign_offs
from contingency.record.chain import Entry, SignedBy
from contingency.record.durable import write_durably
from contingency.record.persons import same_person
from contingency.record.sign_off_file import Content, SignOff, SignOffs
from contingency.record.sign_offs import Role, RoleStanding
from contingency.version import VERSION

if TYPE_CHECKING:
    # Imported where they are used: `check` asks for sign-offs and must be quick.
    from contingency.report.page_front import TypedSignOff
    from contingency.simulation.engine import Progress
    from contingency.study import Study
    from contingency.verify.report import Limits
    from contingency.verify.verification import Verification

RESULTS = "results.json"

Say = Callable[[str], None]
"""Called with the name of the step that begins."""


@dataclass(frozen=True, kw_only=True, slots=True)
class SignedEstimate:
    """A sign-off that was recorded, and what still stands in the way of an issue."""

    sign_off: SignOff
    standings: tuple[RoleStanding, ...]
    """All roles, after the sign-off."""
    open_points: tuple[str, ...]
    """What the issue would still be refused for, in words."""


@dataclass(frozen=True, kw_only=True, slots=True)
class SealedReport:
    """A report with one seal more."""

    path: Path
    """The sealed copy."""
    role: str
    signer: str
    """Name in the certificate."""
    level: str
    """PAdES B-B or B-T."""
    is_test: bool
    """Made with a certificate for trying out."""
    typed_name: str
    """Who gave the typed sign-off of this role; empty if none is inside."""
    open_roles: tuple[str, ...]
    """Roles whose field is still empty."""

    @property
    def names_agree(self) -> bool:
        """Whether the certificate may be that of the person who signed off."""
        return not self.typed_name or same_person(self.typed_name, self.signer)


# --- Sign ---------------------------------------------------------------------------


def sign_estimate(
    folder: Path,
    *,
    role: str,
    name: str,
    position: str = "",
    comment: str = "",
    conditions: str = "",
    when: dt.datetime,
    threads: int = 1,
    progress: Progress | None = None,
) -> SignedEstimate:
    """Record a typed sign-off of an estimate and its results.

    The study is run, so that the sign-off is bound to the figures and not only to
    the files.

    Parameters
    ----------
    folder : Path
        The estimate.
    role, name, position, comment, conditions : str
        See `contingency.record.sign_offs.sign`.
    when : datetime
        With its offset from UTC.
    threads : int
        Blocks simulated at the same time; changes no figure.
    progress : callable, optional
        Called as ``progress(trials_done, trials_at_most)``.

    Raises
    ------
    UnusableEstimate
        unusable-estimate.
    SignOffBlocked
        sign-off-blocked.  A stop stands or a cross-check failed.
    NoSuchRole, OtherSignatory, SamePerson, SignOffOutOfTurn, BusyRecord, DamagedRecord
        See `contingency.record.sign_offs.sign`.
    """
    from contingency.results import as_json
    from contingency.study import run_study

    estimate = read_estimate(folder)
    study = run_study(estimate, threads=threads, progress=progress)
    blocks = [*_stops(study), *_failed_cross_checks(study)]
    if blocks:
        raise SignOffBlocked(
            where=f"{estimate.project}, revision {estimate.revision}",
            found=" ".join(blocks),
            rule="Nobody can sign a report while a stop stands or a cross-check "
            "failed.",
            remedy="Settle what the message names, then sign; nothing was written.",
        )
    content = content_of(estimate, results=as_json(study.results()))
    sign_off = sign_offs.sign(
        folder,
        role=role,
        name=name,
        position=position,
        comment=comment,
        conditions=conditions,
        when=when,
        roles=roles_of(estimate),
        content=content,
    )
    standings = sign_offs.standings(
        sign_off_file.read_sign_offs(folder), roles=roles_of(estimate), content=content
    )
    return SignedEstimate(
        sign_off=sign_off,
        standings=standings,
        open_points=(*_missing(standings), *_open_majors(study)),
    )


def sign_off_standings(
    folder: Path,
    estimate: Estimate,
    *,
    results: bytes = b"",
    when: dt.datetime,
) -> tuple[RoleStanding, ...]:
    """Return how each role stands, and note what is found lapsed for the first time.

    Parameters
    ----------
    folder : Path
        The estimate's; a lapse is noted in its sign_offs.json.
    estimate : Estimate
        As read from it.
    results : bytes
        results.json of a run made now; without it only the inputs are compared.
    when : datetime
        With its offset from UTC.

    Raises
    ------
    DamagedRecord, BusyRecord
        damaged-record, busy-record.
    """
    roles, content = roles_of(estimate), content_of(estimate, results=results)
    given = sign_offs.note_lapses(folder, roles=roles, content=content, when=when)
    return sign_offs.standings(given, roles=roles, content=content)


def typed_words(standings: Sequence[RoleStanding]) -> tuple[TypedSignOff, ...]:
    """Return sign-offs as a draft prints them; see `contingency.issued`."""
    from contingency.issued import typed_words as in_words

    return in_words(standings)


def roles_of(estimate: Estimate) -> tuple[Role, ...]:
    """Return the roles of an estimate in their order, the required ones included."""
    return sign_offs.roles_in_order(
        [
            Role(role=line.role, name=line.name, position=line.position)
            for line in estimate.sign_offs
        ]
    )


def content_of(estimate: Estimate, *, results: bytes) -> Content:
    """Return what a sign-off of an estimate and its results is bound to."""
    return Content(
        inputs=estimate.fingerprint,
        results=sha256(results).hexdigest() if results else "",
        tool=VERSION,
        files={
            source.name: sha256(source.content).hexdigest()
            for source in estimate.sources
        },
    )


# --- Issue --------------------------------------------------------------------------


def issue_estimate(
    folder: Path,
    *,
    records: Path | None = None,
    reason: str = "",
    when: dt.datetime,
    templates: Path | None = None,
    threads: int = 1,
    progress: Progress | None = None,
    say: Say | None = None,
) -> Entry:
    """Issue the final report of an estimate and add it to the register.

    Parameters
    ----------
    folder : Path
        The estimate.
    records : Path, optional
        Where register.jsonl and the folder `issued` lie; by default the folder that
        holds the estimate's, so that all revisions of a project share one register.
    reason : str
        Why a revision that was issued before is issued again.
    when : datetime
        With its offset from UTC.
    templates : Path, optional
        An organisation's own copy of `report_templates`.
    threads, progress
        As in `sign_estimate`.
    say : callable, optional
        See `Say`.

    Raises
    ------
    UnusableEstimate
        unusable-estimate.
    IssueRefused
        issue-refused.  Its `reasons` name all that stands in the way.
    AlreadyIssued, FolderInTheWay, BusyRecord, DamagedRecord
        See `contingency.record.register.issue`.
    """
    from contingency.results import as_json
    from contingency.study import run_study

    say = say or (lambda _step: None)
    estimate = read_estimate(folder)
    records = records or folder.resolve().parent
    register.refuse_taken(
        records, project=estimate.project, revision=estimate.revision, reason=reason
    )
    study = run_study(estimate, threads=threads, progress=progress)
    results = as_json(study.results())
    standings = sign_off_standings(folder, estimate, results=results, when=when)
    reasons = [
        *_missing(standings),
        *_stops(study),
        *_open_majors(study),
        *_failed_cross_checks(study),
    ]
    if reasons:
        raise IssueRefused(f"{estimate.project}, revision {estimate.revision}", reasons)

    def make(place: register.Place) -> register.IssuedFiles:
        say("Laying out the report")
        return _issued_files(study, results, standings, place, templates)

    entry = register.issue(
        records,
        project=estimate.project,
        revision=estimate.revision,
        reason=reason,
        when=when,
        make=make,
    )
    say("")
    return entry


def _issued_files(
    study: Study,
    results: bytes,
    standings: Sequence[RoleStanding],
    place: register.Place,
    templates: Path | None,
) -> register.IssuedFiles:
    from contingency.issued import issued_pdf
    from contingency.publish import REPORT, tables

    given = [line.sign_off for line in standings if line.sign_off]
    pdf = issued_pdf(
        study,
        results=results,
        sign_offs=sign_off_file.written_sign_offs(SignOffs(given=tuple(given))),
        note=issue_note.written_note(place, project=study.estimate.project),
        created=place.issued_at,
        templates=templates,
    )
    return register.IssuedFiles(
        files={REPORT: pdf, RESULTS: results, **tables(study)},
        report=REPORT,
        results=RESULTS,
        inputs=study.estimate.fingerprint,
        tool=VERSION,
        sign_offs=tuple(
            SignedBy(role=one.role, name=one.name, signed_at=one.signed_at.isoformat())
            for one in given
        ),
    )


def _missing(standings: Sequence[RoleStanding]) -> list[str]:
    return [line.sentence for line in standings if line.standing != "in force"]


def _stops(study: Study) -> list[str]:
    return [
        f"A stop stands: {_finding(finding.check, finding.where)}."
        for finding in study.findings
        if finding.severity == "stop"
    ]


def _open_majors(study: Study) -> list[str]:
    return [
        f"A major finding has no answer: {_finding(finding.check, finding.where)}."
        for finding in study.findings
        if finding.severity != "stop" and finding.needs_attention
    ]


def _failed_cross_checks(study: Study) -> list[str]:
    check = study.cross_check
    failed = [
        *(["mean"] * (not check.mean.passed)),
        *(["standard deviation"] * (not check.standard_deviation.passed)),
        *(f"P{level.percent:02d}" for level in check.levels if not level.passed),
    ]
    return [f"A cross-check failed: {name}." for name in failed]


def _finding(check: str, where: str) -> str:
    return f"{check}, {where}" if where else check


# --- Seal ---------------------------------------------------------------------------


def seal_report(
    path: Path,
    *,
    role: str,
    certificate: bytes,
    password: bytes,
    when: dt.datetime,
    out: Path | None = None,
    time_stamps: str = "",
) -> SealedReport:
    """Put a digital seal into the field of a role; write a sealed copy.

    The issued file stays as it is.  The copy goes beside it under a name that ends
    in `-sealed.pdf`; sealing that copy again adds to it.

    Parameters
    ----------
    path : Path
        An issued report, or a sealed copy of one.
    role : str
        Whose field is filled.
    certificate : bytes
        A PKCS#12 file.
    password : bytes
        Of that file.
    when : datetime
        Claimed time of the seal, with its offset from UTC.
    out : Path, optional
        Where the copy goes.
    time_stamps : str
        Address of a time-stamp server: then the seal has level B-T.

    Raises
    ------
    WrongPassword, UnfitCertificate
        wrong-password, unfit-certificate.
    NotIssued
        not-issued.  The PDF is a draft.
    BrokenSeal
        broken-seal.  The file was changed after an earlier seal.
    NoSealField, AlreadySealed, NoTimeStamp, UnreadableReport
        See `contingency.record.seals.seal`.
    UnusablePath
        unusable-path.  The file cannot be read, or another one is in the way.
    """
    from contingency.record.attachments import read_attachments
    from contingency.record.certificates import open_certificate
    from contingency.record.seal_check import check_seals
    from contingency.record.seals import seal, time_stamp_server

    opened = open_certificate(certificate, password=password, when=when)
    pdf = _bytes_of(path)
    inside = {file.name: file.content for file in read_attachments(pdf)}
    if issue_note.read_note(inside.get(issue_note.NAME, b"")) is None:
        raise NotIssued(
            where=str(path),
            found="it carries no note of an issue: it is a draft.",
            rule="Only an issued report is sealed.",
            remedy="Issue the report with `contingency issue`, and seal the PDF in the "
            "issued folder.",
        )
    _refuse_broken(path, check_seals(pdf, when=when, second_word=False).are_intact)
    sealed = seal(
        pdf,
        role=role,
        certificate=opened,
        when=when,
        time_stamps=time_stamp_server(time_stamps) if time_stamps else None,
    )
    after = check_seals(sealed, when=when, second_word=False)
    _refuse_broken(path, after.are_intact)
    where = out or _sealed_name(path)
    _write_sealed(where, sealed)
    return SealedReport(
        path=where,
        role=role,
        signer=opened.name,
        level=after.seals[-1].level,
        is_test=opened.is_test,
        typed_name=_typed_name(inside.get(sign_off_file.FILE, b""), role),
        open_roles=after.open_roles,
    )


def write_test_certificate(
    folder: Path, name: str, *, password: bytes, when: dt.datetime
) -> tuple[Path, Path]:
    """Make a certificate for trying out; return its two files, key first.

    Parameters
    ----------
    folder : Path
        Where they go; it must exist.
    name : str
        Whom it pretends to be of.
    password : bytes
        Under which the key is kept; not empty.
    when : datetime
        First moment of its validity, with its offset from UTC.

    Raises
    ------
    WrongPassword
        wrong-password.  The password is empty.
    UnusablePath
        unusable-path.  A file of that name is there already.
    """
    from contingency.record.certificates import TEST_ONLY, make_test_certificate

    made = make_test_certificate(name, password=password, when=when)
    stem = f"{TEST_ONLY.lower().replace(' ', '-')}-{register.folder_name(name, 1)}"
    paths = (folder / f"{stem}.p12", folder / f"{stem}.pem")
    for path in paths:
        if path.exists():
            raise _in_the_way(path)
    write_durably(paths[0], made.pkcs12)
    paths[0].chmod(0o600)
    write_durably(paths[1], made.pem)
    return paths


def _sealed_name(path: Path) -> Path:
    stem = path.stem.removesuffix("-sealed")
    return path.with_name(f"{stem}-sealed{path.suffix}")


def _write_sealed(path: Path, sealed: bytes) -> None:
    """Write the copy; only an earlier stage of itself may be replaced by it."""
    if path.exists() and not sealed.startswith(_bytes_of(path)):
        raise _in_the_way(path)
    try:
        write_durably(path, sealed)
    except OSError as fault:
        raise UnusablePath(
            where=str(path),
            found=f"{fault.strerror or fault}.",
            rule="The sealed copy needs a folder that can be written to.",
            remedy="Name another place with --out.",
        ) from fault


def _refuse_broken(path: Path, are_intact: bool) -> None:  # noqa: FBT001
    if not are_intact:
        raise BrokenSeal(
            where=str(path),
            found="the file was changed after it was issued or sealed.",
            rule="A seal is put on an untouched report only.",
            remedy="Look at it with `contingency verify`, and start again from the "
            "file in the issued folder.",
        )


def _typed_name(content: bytes, role: str) -> str:
    if not content:
        return ""
    given = sign_off_file.parse_sign_offs(content, where="the report").latest(role)
    return given.name if given else ""


# --- Verify -------------------------------------------------------------------------


def verify_file(
    path: Path,
    *,
    when: dt.datetime,
    register_file: Path | None = None,
    trusted: Sequence[Path] = (),
    make_again: bool = True,
    threads: int = 2,
    limits: Limits | None = None,
    say: Say | None = None,
) -> Verification:
    """Return what holds of a report; see `contingency.verify.report.verify_report`.

    Parameters
    ----------
    path : Path
        The PDF.
    when : datetime
        Moment at which certificates are judged, with its offset from UTC.
    register_file : Path, optional
        A register.jsonl.
    trusted : sequence of Path
        PEM or DER files of certificates that the reader trusts.
    make_again, threads, limits, say
        See `verify_report`.

    Raises
    ------
    UnusablePath
        unusable-path.  A file cannot be read.
    UnreadableReport, TookTooLong, UnfitCertificate
        See `verify_report`.
    """
    from contingency.verify.report import verify_report

    return verify_report(
        _bytes_of(path),
        when=when,
        register=_bytes_of(register_file) if register_file else None,
        trusted=[_bytes_of(one) for one in trusted],
        make_again=make_again,
        threads=threads,
        limits=limits,
        say=say,
    )


def _bytes_of(path: Path) -> bytes:
    try:
        return path.read_bytes()
    except OSError as fault:
        raise UnusablePath(
            where=str(path),
            found=f"{fault.strerror or fault}.",
            rule="The file must be there and readable.",
            remedy="Check the name and the permissions.",
        ) from fault


def _in_the_way(path: Path) -> UnusablePath:
    return UnusablePath(
        where=str(path),
        found="another file of that name is there.",
        rule="Nothing that is there is overwritten.",
        remedy="Name another place, or move the file away.",
    )
