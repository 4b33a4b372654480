"""What stands in the way of a sign-off or an issue, in words."""

from __future__ import annotations

from collections.abc import Sequence
from typing import TYPE_CHECKING

from contingency.record.sign_offs import RoleStanding

if TYPE_CHECKING:
    from contingency.study import Study


def missing(standings: Sequence[RoleStanding]) -> list[str]:
    """Return each role that has not signed, or whose sign-off has lapsed, in words."""
    return [line.sentence for line in standings if line.standing != "in force"]


def stops(study: Study) -> list[str]:
    """Return each stop that stands, in words."""
    return [
        f"A stop stands: {_finding(finding.check, finding.where)}."
        for finding in study.findings
        if finding.severity == "stop"
    ]


def open_majors(study: Study) -> list[str]:
    """Return each major finding without an answer, in words."""
    return [
        f"A major finding has no answer: {_finding(finding.check, finding.where)}."
        for finding in study.findings
        if finding.severity != "stop" and finding.needs_attention
    ]


def failed_cross_checks(study: Study) -> list[str]:
    """Return each figure on which two ways of computing it disagree, in words."""
    check = study.cross_check
    failed = [
        *(["mean"] * (not check.mean.passed)),
        *(["standard deviation"] * (not check.standard_deviation.passed)),
        *(f"P{level.percent:02d}" for level in check.levels if not level.passed),
    ]
    return [f"A cross-check failed: {name}." for name in failed]


def _finding(check: str, where: str) -> str:
    return f"{check}, {where}" if where else check
