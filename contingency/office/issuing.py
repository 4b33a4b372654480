"""Issue: the final report, refused with every reason or entered in the register."""

from __future__ import annotations

import datetime as dt
from collections.abc import Callable, Sequence
from pathlib import Path
from typing import TYPE_CHECKING

from contingency.errors import IssueRefused
from contingency.estimate.reading import read_estimate
from contingency.office.paths import writing
from contingency.office.reasons import failed_cross_checks, missing, open_majors, stops
from contingency.office.signing import sign_off_standings
from contingency.record import issue_note, register, sign_off_file
from contingency.record.chain import Entry, SignedBy
from contingency.record.sign_off_file import SignOffs
from contingency.record.sign_offs import RoleStanding
from contingency.version import VERSION

if TYPE_CHECKING:
    from contingency.simulation.engine import Progress
    from contingency.study import Study

RESULTS = "results.json"

Say = Callable[[str], None]
"""Called with the name of the step that begins."""


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
    with writing(records):
        register.refuse_taken(
            records, project=estimate.project, revision=estimate.revision, reason=reason
        )
    study = run_study(estimate, threads=threads, progress=progress)
    results = as_json(study.results())
    standings = sign_off_standings(folder, estimate, results=results, when=when)
    reasons = [
        *missing(standings),
        *stops(study),
        *open_majors(study),
        *failed_cross_checks(study),
    ]
    if reasons:
        raise IssueRefused(f"{estimate.project}, revision {estimate.revision}", reasons)

    def make(place: register.Place) -> register.IssuedFiles:
        say("Laying out the report")
        return _issued_files(study, results, standings, place, templates)

    with writing(records):
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
