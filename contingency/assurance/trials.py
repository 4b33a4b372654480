"""Checks of the simulation itself."""

from __future__ import annotations

from contingency.assurance.declaration import (
    Hit,
    Source,
    Verdict,
    input_check,
    result_check,
)
from contingency.assurance.material import Material
from contingency.assurance.settings import Settings, Threshold
from contingency.assurance.wording import money, percent
from contingency.estimate.nouns import Estimate

UNSETTLED_TOTAL = Threshold(
    name="half_width_percent_of_total",
    default=0.5,
    unit="% of the total",
    grade="D",
    meaning="widest half of the 95 % interval",
    most=100,
)
UNSETTLED_CONTINGENCY = Threshold(
    name="half_width_percent_of_contingency",
    default=5,
    unit="% of the contingency",
    grade="D",
    meaning="widest half of the 95 % interval",
    most=100,
)


@result_check(
    slug="unsettled-percentile",
    subject="simulation",
    title="Unsettled percentile",
    catches="Too few trials: the level moves with the seed.",
    rule=(
        "Half-width of the 95 % interval of the target level, as a share of the total"
        " and of the contingency; and whether the run reached its own tolerance."
    ),
    thresholds=(UNSETTLED_TOTAL, UNSETTLED_CONTINGENCY),
    severities=("major", "caution"),
    todo="Raise the most trials under [simulation], or round the figure.",
    sources=(
        Source("Australian Government guidance note 3A: 5,000 to 10,000", "READ-2nd"),
        Source(
            "US Federal Highway Administration (2008), slides on cost estimate"
            " reviews: 10,000 and more",
            "READ",
        ),
    ),
)
def unsettled_percentile(material: Material, settings: Settings) -> Verdict:
    """Find whether the target level is known well enough."""
    target, currency = material.target, material.estimate.currency
    half = (target.high - target.low) / 2
    of_total = half / abs(target.total) if target.total else 0.0
    of_contingency = half / target.contingency if target.contingency > 0 else 0.0
    known = (
        f"{target.name} is known only to ± {money(half, currency)} from"
        f" {material.simulation.trials:,} trials"
    )
    if 100 * of_total > settings.number(UNSETTLED_TOTAL) or (
        100 * of_contingency > settings.number(UNSETTLED_CONTINGENCY)
    ):
        message = (
            f"{known}: {percent(of_total, 2)} of the total and"
            f" {percent(of_contingency, 1)} of the contingency."
        )
        return [Hit(severity="major", message=message)]
    if not material.simulation.settled:
        message = (
            f"{known}; the run ended at its largest number of trials before it"
            f" reached the tolerance of {percent(material.simulation.tolerance, 2)}."
        )
        return [Hit(severity="caution", message=message)]
    return []


@result_check(
    slug="cross-check-failed",
    subject="simulation",
    title="Cross-check failed",
    catches="Errors of the model or of the program.",
    rule=(
        "The base of the simulation is the sum of the packages; mean and standard"
        " deviation agree with their closed forms within four standard errors; every"
        " funded level agrees with a second route that shares no code, within the"
        " joint 99.99 % interval."
    ),
    severities=("stop",),
    todo=(
        "Do not use the figures. Run again with another seed; if it fails again,"
        " report it with the estimate folder."
    ),
    sources=(
        Source(
            "GAO-20-195G: errors are looked for and estimates cross-checked", "READ"
        ),
    ),
)
def cross_check_failed(material: Material, _settings: Settings) -> Verdict:
    """Find whether two ways of computing one figure disagree."""
    check, currency = material.cross_check, material.estimate.currency
    apart: list[str] = []
    gap = material.simulation.base - material.estimate.base
    if abs(gap) > 1e-9 * max(abs(material.estimate.base), 1.0):
        apart.append(f"the base by {money(gap, currency)}")
    for name, moment in (
        ("the mean", check.mean),
        ("the standard deviation", check.standard_deviation),
    ):
        if not moment.passed:
            apart.append(
                f"{name} by {money(moment.simulated - moment.exact, currency)}"
                f" ({money(moment.allowed, currency)} is allowed)"
            )
    apart += [
        f"P{level.percent:02d} by"
        f" {money(level.simulated - level.second_route, currency)}"
        for level in check.levels
        if not level.passed
    ]
    if not apart:
        return []
    message = f"Two ways of computing one figure disagree: {'; '.join(apart)}."
    return [Hit(severity="stop", message=message)]


@input_check(
    slug="not-repeatable",
    subject="simulation",
    title="A number that nobody can make again",
    catches="Results without a record of exactly what went in.",
    rule="The estimate was read from files and has a fingerprint of all of them.",
    severities=("stop",),
    todo="Read the estimate from its folder with read_estimate.",
    sources=(
        Source(
            "GAO-20-195G, chapter on documentation: someone unfamiliar could recreate"
            " or update the estimate",
            "READ",
        ),
        Source("UK review of quality assurance of analytical models", "READ-title"),
        Source("UK Government Actuary, review of department spreadsheets", "READ"),
    ),
)
def not_repeatable(estimate: Estimate, _settings: Settings) -> Verdict:
    """Find estimates whose inputs are not pinned by a fingerprint."""
    if estimate.fingerprint and estimate.sources:
        return []
    message = "The inputs have no fingerprint, so the result cannot be made again."
    return [Hit(severity="stop", message=message)]


CHECKS = (not_repeatable, unsettled_percentile, cross_check_failed)
