"""Checks against what an estimate of the same class usually shows."""

from __future__ import annotations

from contingency.assurance.declaration import (
    Hit,
    NotApplicable,
    Source,
    Verdict,
    input_check,
    result_check,
)
from contingency.assurance.material import Material
from contingency.assurance.rows import uncertain_packages
from contingency.assurance.settings import Settings, Threshold
from contingency.assurance.wording import percent
from contingency.estimate.nouns import Estimate

RP_18R = Source(
    "AACE International RP 18R-97, cost estimate classification; the figures of the"
    " classes are from memory",
    "READ-title",
)
RP_119R = Source(
    "AACE International RP 119R-21, abstract: published ranges do not replace an"
    " analysis",
    "READ",
)
OVERCONFIDENCE = Source(
    "Merkhofer, on bias in estimating (pmhut.com): people who are asked for ranges"
    " that hold 98 times in 100 miss far more often",
    "READ",
)
CLASSIC_OVERCONFIDENCE = Source(
    "Alpert and Raiffa; Capen (1976); Lichtenstein and others (1982)", "MEMORY"
)


def _upper(of_class: int, *, least: float, most: float) -> tuple[Threshold, Threshold]:
    """Return the usual upper side of an estimate class, its narrow and wide end."""
    return (
        Threshold(
            name=f"class_{of_class}_upper_least",
            default=least,
            unit="%",
            grade="G",
            meaning=f"class {of_class}: narrow upper side, 80 % interval",
        ),
        Threshold(
            name=f"class_{of_class}_upper_most",
            default=most,
            unit="%",
            grade="G",
            meaning=f"class {of_class}: wide upper side, 80 % interval",
        ),
    )


UPPER_SIDES = {
    5: _upper(5, least=30, most=100),
    4: _upper(4, least=20, most=50),
    3: _upper(3, least=10, most=30),
    2: _upper(2, least=5, most=20),
    1: _upper(1, least=3, most=15),
}
"""Narrow and wide upper side of each class, in percent; from memory of RP 18R-97."""

NARROW = tuple(side[0] for side in UPPER_SIDES.values())
WIDE = tuple(side[1] for side in UPPER_SIDES.values())

TIGHT = Threshold(
    name="tight_ranges_times_class",
    default=0.5,
    unit="times the narrow upper side of the class",
    grade="H",
    meaning="smallest half-width",
)
LOOSE = Threshold(
    name="wide_ranges_times_class",
    default=1.5,
    unit="times the wide upper side of the class",
    grade="H",
    meaning="largest half-width",
)
LEAST_CV = Threshold(
    name="least_variation_percent",
    default=5,
    unit="% of the mean",
    grade="H",
    meaning="smallest coefficient of variation before award",
)
BEFORE_AWARD = Threshold(
    name="before_award_from_class",
    default=3,
    unit="",
    grade="H",
    meaning="before award: class",
    least=1,
    most=5,
)

NO_CLASS = NotApplicable("No estimate class is written under [estimate].")


@input_check(
    slug="ranges-tight-for-class",
    subject="ranges",
    title="Ranges too tight for the class",
    catches="Overconfidence: ranges that would suit a much more mature estimate.",
    rule=(
        "Stated half-width of the packages, (high - low)/2 over the likely value,"
        " weighted by base, against the narrow upper side that is usual for the"
        " class."
    ),
    thresholds=(TIGHT, *NARROW),
    severities=("major",),
    todo=(
        "Ask again for the ends, with reasons for the worst case first; the"
        " robustness table shows the effect of ends that are passed one time in ten."
    ),
    sources=(RP_18R, OVERCONFIDENCE, CLASSIC_OVERCONFIDENCE),
)
def ranges_tight_for_class(estimate: Estimate, settings: Settings) -> Verdict:
    """Find whether the ranges are narrower than the maturity supports."""
    width, of_class = _half_width(estimate), estimate.estimate_class
    if of_class not in UPPER_SIDES:
        return NO_CLASS
    if width is None:
        return NotApplicable("No package has a low, a likely and a high.")
    usual = settings.number(UPPER_SIDES[of_class][0])
    if 100 * width >= settings.number(TIGHT) * usual:
        return []
    message = (
        f"The ranges are ± {percent(width, 1)} wide on average; an estimate of class"
        f" {of_class} usually has at least + {usual:g} % on the total, where ranges"
        " cancel out in part."
    )
    return [Hit(severity="major", message=message)]


@input_check(
    slug="ranges-wide-for-class",
    subject="ranges",
    title="Ranges too wide for the class",
    catches="Ranges that hold contingency twice, or a class that is claimed too early.",
    rule=(
        "The same half-width against the wide upper side that is usual for the class."
    ),
    thresholds=(LOOSE, *WIDE),
    severities=("caution",),
    todo="Check whether the ranges hold events, or whether the class is right.",
    sources=(RP_18R,),
)
def ranges_wide_for_class(estimate: Estimate, settings: Settings) -> Verdict:
    """Find whether the ranges are wider than the maturity asks for."""
    width, of_class = _half_width(estimate), estimate.estimate_class
    if of_class not in UPPER_SIDES:
        return NO_CLASS
    if width is None:
        return NotApplicable("No package has a low, a likely and a high.")
    usual = settings.number(UPPER_SIDES[of_class][1])
    if 100 * width <= settings.number(LOOSE) * usual:
        return []
    message = (
        f"The ranges are ± {percent(width)} wide on average; an estimate of class"
        f" {of_class} usually has at most + {usual:g} % on the total."
    )
    return [Hit(severity="caution", message=message)]


@result_check(
    slug="curve-too-steep",
    subject="simulation",
    title="Curve too steep for the class",
    catches="The confidence of a late stage claimed at an early one.",
    rule="P90 over P50 of the total, against the narrow upper side of the class.",
    thresholds=NARROW,
    severities=("major",),
    todo="Look for missing dependence, systemic risks and events, and tight ranges.",
    sources=(RP_18R, RP_119R),
)
def curve_too_steep(material: Material, settings: Settings) -> Verdict:
    """Find whether the upper side is smaller than the class usually has."""
    of_class, upper = material.estimate.estimate_class, _upper_side(material)
    if of_class not in UPPER_SIDES:
        return NO_CLASS
    if upper is None:
        return NotApplicable("P50 of the total is not positive.")
    usual = settings.number(UPPER_SIDES[of_class][0])
    if 100 * upper >= usual:
        return []
    message = (
        f"For an estimate of class {of_class} the upper side is usually + {usual:g} %"
        f" or more; here P90 is {percent(upper, 1)} above P50."
    )
    return [Hit(severity="major", message=message)]


@result_check(
    slug="curve-too-flat",
    subject="simulation",
    title="Curve too flat for the class",
    catches="Risk counted twice, or a class that is claimed too early.",
    rule="P90 over P50 of the total, against the wide upper side of the class.",
    thresholds=WIDE,
    severities=("caution",),
    todo="Look for causes that appear twice, or correct the class.",
    sources=(RP_18R, RP_119R),
)
def curve_too_flat(material: Material, settings: Settings) -> Verdict:
    """Find whether the upper side is larger than the class usually has."""
    of_class, upper = material.estimate.estimate_class, _upper_side(material)
    if of_class not in UPPER_SIDES:
        return NO_CLASS
    if upper is None:
        return NotApplicable("P50 of the total is not positive.")
    usual = settings.number(UPPER_SIDES[of_class][1])
    if 100 * upper <= usual:
        return []
    message = (
        f"For an estimate of class {of_class} the upper side is usually + {usual:g} %"
        f" or less; here P90 is {percent(upper, 1)} above P50."
    )
    return [Hit(severity="caution", message=message)]


@result_check(
    slug="narrow-curve",
    subject="simulation",
    title="Little spread before award",
    catches="A total that is said to be known better than any price yet received.",
    rule=(
        "Coefficient of variation of the total, for estimates of the class before"
        " award and earlier ones."
    ),
    thresholds=(LEAST_CV, BEFORE_AWARD),
    severities=("caution",),
    todo="Look for missing dependence, systemic risks and events, and tight ranges.",
    sources=(RP_119R,),
)
def narrow_curve(material: Material, settings: Settings) -> Verdict:
    """Find whether an early estimate has next to no spread."""
    of_class = material.estimate.estimate_class
    if of_class is None:
        return NO_CLASS
    if of_class < settings.number(BEFORE_AWARD):
        return NotApplicable(f"The estimate has class {of_class}.")
    if material.mean <= 0:
        return NotApplicable("The mean of the total is not positive.")
    variation = material.standard_deviation / material.mean
    if 100 * variation >= settings.number(LEAST_CV):
        return []
    message = (
        f"The standard deviation of the total is {percent(variation, 1)} of its mean,"
        f" in an estimate of class {of_class}."
    )
    return [Hit(severity="caution", message=message)]


def _half_width(estimate: Estimate) -> float | None:
    """Return the stated half-width over the likely value, weighted by base."""
    widths: list[tuple[float, float]] = []
    for package in uncertain_packages(estimate):
        low, high = package.cost.low, package.cost.high
        likely = package.base if package.cost.likely is None else package.cost.likely
        if low is not None and high is not None and likely > 0 and package.base > 0:
            widths.append((package.base, (high - low) / (2 * likely)))
    if not widths:
        return None
    return sum(w * half for w, half in widths) / sum(w for w, _ in widths)


def _upper_side(material: Material) -> float | None:
    """Return how far P90 lies above P50, as a fraction of P50."""
    middle = material.percentile(50)
    return material.percentile(90) / middle - 1 if middle > 0 else None


CHECKS = (
    ranges_tight_for_class,
    ranges_wide_for_class,
    curve_too_steep,
    curve_too_flat,
    narrow_curve,
)
