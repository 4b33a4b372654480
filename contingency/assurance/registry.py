"""Every check there is, in the order in which they run and are printed."""

from __future__ import annotations

from contingency.assurance import (
    base,
    boundaries,
    classes,
    counted_twice,
    dependence,
    ends,
    events,
    evidence,
    holding,
    level,
    phasing,
    prices,
    ranges,
    register,
    review,
    systemic,
    tracking,
    treatment,
    trials,
)
from contingency.assurance.answers import STALE_ANSWERS
from contingency.assurance.declaration import AnyCheck, Check, Subject
from contingency.assurance.settings import Threshold, WordList

SUBJECTS: tuple[Subject, ...] = (
    "base estimate",
    "ranges",
    "dependence",
    "systemic risks and events",
    "simulation",
    "level and presentation",
    "allocation and holding",
    "revisions and account",
    "answers",
)
"""The subjects in the order of the report."""

_DECLARED: tuple[AnyCheck, ...] = (
    *base.CHECKS,
    *prices.CHECKS,
    *ends.CHECKS,
    *ranges.CHECKS,
    *evidence.CHECKS,
    *dependence.CHECKS,
    *systemic.CHECKS,
    *counted_twice.CHECKS,
    *events.CHECKS,
    *register.CHECKS,
    *treatment.CHECKS,
    *boundaries.CHECKS,
    *trials.CHECKS,
    *classes.CHECKS,
    *level.CHECKS,
    *review.CHECKS,
    *holding.CHECKS,
    *phasing.CHECKS,
    *tracking.CHECKS,
)

CHECKS: tuple[AnyCheck, ...] = tuple(
    sorted(_DECLARED, key=lambda check: SUBJECTS.index(check.subject))
)
"""All checks but the one of the answers, which runs last; by subject."""


def all_checks() -> tuple[Check, ...]:
    """Return every check in the order of the report, the one of the answers last."""
    return (*CHECKS, STALE_ANSWERS)


def all_settings() -> tuple[Threshold | WordList, ...]:
    """Return every setting that [assurance] may hold, in the order of the checks."""
    found = {one.name: one for check in all_checks() for one in check.thresholds}
    return tuple(found.values())
