"""Every check there is, in the order in which they run and are printed."""

from __future__ import annotations

from contingency.assurance import (
    dependence,
    events,
    evidence,
    holding,
    level,
    ranges,
    systemic,
    trials,
)
from contingency.assurance.answers import STALE_ANSWERS
from contingency.assurance.declaration import AnyCheck, Check
from contingency.assurance.settings import Threshold, WordList

CHECKS: tuple[AnyCheck, ...] = (
    *ranges.CHECKS,
    *evidence.CHECKS,
    *dependence.CHECKS,
    *systemic.CHECKS,
    *events.CHECKS,
    *trials.CHECKS,
    *level.CHECKS,
    *holding.CHECKS,
)
"""All checks but the one of the answers, which runs last."""


def all_checks() -> tuple[Check, ...]:
    """Return every check in the order of the report, the one of the answers last."""
    return (*CHECKS, STALE_ANSWERS)


def all_settings() -> tuple[Threshold | WordList, ...]:
    """Return every setting that [assurance] may hold, in the order of the checks."""
    found = {one.name: one for check in all_checks() for one in check.thresholds}
    return tuple(found.values())
