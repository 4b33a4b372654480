"""Sign: a typed sign-off of an estimate and its results, and how all of them stand."""

from __future__ import annotations

import datetime as dt
from collections.abc import Sequence
from dataclasses import dataclass
from hashlib import sha256
from pathlib import Path
from typing import TYPE_CHECKING

from contingency.errors import SignOffBlocked
from contingency.estimate.nouns import Estimate
from contingency.estimate.reading import read_estimate
from contingency.office.paths import writing
from contingency.office.reasons import failed_cross_checks, missing, open_majors, stops
from contingency.record import sign_off_file, sign_offs
from contingency.record.sign_off_file import Content, SignOff
from contingency.record.sign_offs import Role, RoleStanding
from contingency.version import VERSION

if TYPE_CHECKING:
    # Imported where they are used: `check` asks for sign-offs and must be quick.
    from contingency.report.page_front import TypedSignOff
    from contingency.simulation.engine import Progress


@dataclass(frozen=True, kw_only=True, slots=True)
class SignedEstimate:
    """A sign-off that was recorded, and what still stands in the way of an issue."""

    sign_off: SignOff
    standings: tuple[RoleStanding, ...]
    """All roles, after the sign-off."""
    open_points: tuple[str, ...]
    """What the issue would still be refused for, in words."""


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
    blocks = [*stops(study), *failed_cross_checks(study)]
    if blocks:
        raise SignOffBlocked(
            where=f"{estimate.project}, revision {estimate.revision}",
            found=" ".join(blocks),
            rule="Nobody can sign a report while a stop stands or a cross-check "
            "failed.",
            remedy="Settle what the message names, then sign; nothing was written.",
        )
    content = content_of(estimate, results=as_json(study.results()))
    with writing(folder):
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
        open_points=(*missing(standings), *open_majors(study)),
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
