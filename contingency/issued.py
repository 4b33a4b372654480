"""The issued report as bytes: made once by the issue, made again by a verification.

Everything that goes into it besides study and templates travels inside it, so that
the same bytes can be made from the file alone.
"""

from __future__ import annotations

import datetime as dt
from collections.abc import Sequence
from pathlib import Path

from contingency.record import issue_note, sign_off_file
from contingency.record.sign_off_file import SignOff
from contingency.record.sign_offs import RoleStanding
from contingency.report.page_front import TypedSignOff
from contingency.report.pdf import write_report
from contingency.report.typesetting import AttachedFile
from contingency.report.wording import date, sentence
from contingency.study import Study


def issued_pdf(
    study: Study,
    *,
    results: bytes,
    sign_offs: bytes,
    note: bytes,
    created: dt.datetime,
    templates: Path | None,
) -> bytes:
    """Return the final report: no draft mark, sign-offs printed, fields for seals.

    Parameters
    ----------
    study : Study
        Price-date money.
    results : bytes
        results.json of the study.
    sign_offs : bytes
        sign_offs.json with the sign-offs in force; printed, and carried inside.
    note : bytes
        issue.json: the place in the register; carried inside.
    created : datetime
        Time of the issue, with its offset from UTC.
    templates : Path, optional
        An organisation's own copy of `report_templates`.

    Raises
    ------
    DamagedRecord
        damaged-record.  The sign-offs cannot be read.
    CrossCheckFailed, CharacterWithoutFont, TemplateFault, NoTextEngine
        See `contingency.report.pdf.write_report`.
    """
    given = sign_off_file.parse_sign_offs(sign_offs, where="sign-offs").given
    return write_report(
        study,
        templates=templates,
        created=created,
        draft=False,
        results=results,
        extra_attachments=[
            AttachedFile(
                name=sign_off_file.FILE,
                content=sign_offs,
                description="Typed sign-offs",
                relationship="Data",
            ),
            AttachedFile(
                name=issue_note.NAME,
                content=note,
                description="Place of this issue in the register",
                relationship="Data",
            ),
        ],
        typed=[
            _printed(one, f"Signed on {_day(one)} for these inputs and results.")
            for one in given
        ],
    )


def typed_words(standings: Sequence[RoleStanding]) -> tuple[TypedSignOff, ...]:
    """Return sign-offs as a draft prints them, those that have lapsed included."""
    return tuple(
        _printed(line.sign_off, _standing(line, line.sign_off))
        for line in standings
        if line.sign_off
    )


def _standing(line: RoleStanding, one: SignOff) -> str:
    if line.standing == "lapsed":
        noticed = f", noticed on {date(line.since.date())}" if line.since else ""
        changed = ", ".join(line.changed)
        return f"Signed on {_day(one)}; lapsed: {changed} changed since{noticed}."
    what = "inputs and results" if line.results_compared else "inputs"
    return f"Signed on {_day(one)} for these {what}."


def _printed(one: SignOff, stands: str) -> TypedSignOff:
    extra = [("Condition", one.conditions), ("Comment", one.comment)]
    return TypedSignOff(
        role=one.role,
        name=one.name,
        position=one.position,
        statements=(
            stands,
            *(f"{what}: {sentence(words)}" for what, words in extra if words),
        ),
    )


def _day(one: SignOff) -> str:
    return date(one.signed_at.date())
