"""Checks of what makes costs move together."""

from __future__ import annotations

import math

from contingency.assurance.declaration import (
    COMMON_PRACTICE,
    Hit,
    NotApplicable,
    Source,
    Verdict,
    input_check,
    result_check,
)
from contingency.assurance.material import Material
from contingency.assurance.rows import ranges_are_linked, uncertain_packages
from contingency.assurance.settings import Settings, Threshold
from contingency.assurance.wording import counted, money, percent
from contingency.estimate.nouns import Estimate

MOST_INDEPENDENT = Threshold(
    name="most_independent_packages",
    default=5,
    unit="uncertain packages",
    grade="H",
    meaning="most packages that may be independent",
)
WEAK_MAJOR = Threshold(
    name="weak_dependence_major",
    default=0.1,
    unit="",
    grade="H",
    meaning="major below an average correlation of",
    most=1,
)
WEAK_CAUTION = Threshold(
    name="weak_dependence_caution",
    default=0.2,
    unit="(compared after rounding to one decimal)",
    grade="L",
    meaning="caution below an average correlation of",
    most=1,
)
STRONG = Threshold(
    name="strong_dependence",
    default=0.7,
    unit="",
    grade="H",
    meaning="caution above an average correlation of",
    most=1,
)
REPAIR = Threshold(
    name="correlation_repair",
    default=0.05,
    unit="",
    grade="H",
    meaning="major where a correlation changes by more than",
    most=2,
)
COMPARED = 0.25
"""Correlation of the comparison in the message: the GAO guide of 2009, from memory."""

DEFAULTS = (
    Source("Book, S. A. (1999), Why correlation matters: default of 0.2", "MEMORY"),
    Source("GAO-09-3SP (2009): default of 0.25", "MEMORY"),
    Source(
        "Joint Agency Cost Schedule Risk and Uncertainty Handbook: 0.3 where nothing"
        " is known",
        "MEMORY",
    ),
)


@input_check(
    slug="no-dependence",
    subject="dependence",
    title="No dependence at all",
    catches="Independence by default, which makes a total look safer than it is.",
    rule=(
        "More uncertain packages than the threshold, and no general dependence, no"
        " cause shared by two packages and no correlation. A stop where"
        " general_dependence is not written; where 0 is written on purpose, a major"
        " finding that a signed justification answers."
    ),
    thresholds=(MOST_INDEPENDENT,),
    severities=("stop", "major"),
    todo=(
        "Write general_dependence under [ranges], or name the common causes in"
        " causes.csv. If the costs truly do not move together, write 0 and answer"
        " this finding with the reason."
    ),
    sources=(
        Source("GAO-20-195G, survey of step 9", "READ"),
        Source(
            "Australian national guidance on public private partnerships:"
            " disregarding interdependence is a frequent error that understates risk",
            "READ",
        ),
        Source("Coleman and Gupta (1994), on correlation in cost risk", "READ"),
    ),
)
def no_dependence(estimate: Estimate, settings: Settings) -> Verdict:
    """Find whether many ranges are simulated as if they were independent."""
    count = len(uncertain_packages(estimate))
    if count < 2:
        return NotApplicable("Fewer than two packages have a range.")
    if ranges_are_linked(estimate) or count <= settings.number(MOST_INDEPENDENT):
        return []
    # Share of the total's sigma hidden if n equal costs truly have correlation
    # 0.2: 1 - 1/sqrt(1 + (n - 1) 0.2), closed form.
    hidden = 1.0 - (1.0 + (count - 1) * 0.2) ** -0.5
    written = estimate.general_dependence is not None
    return [
        Hit(
            severity="major" if written else "stop",
            message=(
                f"{counted(count, 'uncertain package')} are simulated as if they moved"
                " independently"
                + (
                    ", because general_dependence = 0 is written."
                    if written
                    else "; no dependence is written down."
                )
                + " If costs of equal size truly had a correlation of 0.2, this would"
                f" hide {percent(hidden)} of the spread that they add to the total."
            ),
        )
    ]


@result_check(
    slug="weak-dependence",
    subject="dependence",
    title="Weak overall dependence",
    catches="Some dependence, but far less than published defaults.",
    rule=(
        "Average correlation of package costs that the spread of their sum implies."
        " The upper threshold is compared after rounding, because a copula"
        " correlation of 0.2 gives skewed costs a little less than 0.2."
    ),
    thresholds=(WEAK_MAJOR, WEAK_CAUTION),
    severities=("major", "caution"),
    todo="Raise general_dependence, or name the causes that packages share.",
    sources=DEFAULTS,
)
def weak_dependence(material: Material, settings: Settings) -> Verdict:
    """Find whether package costs move together less than is usual."""
    implied = material.implied_average_correlation
    if implied is None:
        return NotApplicable("Fewer than two packages have a range.")
    grave = implied < settings.number(WEAK_MAJOR)
    if not grave and round(implied, 1) >= settings.number(WEAK_CAUTION):
        return []
    currency, target = material.estimate.currency, material.target
    message = (
        "On average package costs move together with a correlation of"
        f" {implied:.2f}; published defaults are 0.2 to 0.3. At {COMPARED} the"
        f" contingency at {target.name} would be about"
        f" {money(_contingency_at(material, COMPARED), currency)} instead of"
        f" {money(target.contingency, currency)}."
    )
    return [Hit(severity="major" if grave else "caution", message=message)]


def _contingency_at(material: Material, correlation: float) -> float:
    """Return the contingency at the target if package costs had this correlation.

    The distance from the mean is scaled with the standard deviation of the total:
    a guide to the size of the effect, in money of the price date.
    """
    variances = [
        package.cost.distribution.variance for package in material.estimate.packages
    ]
    pairs = sum(v**0.5 for v in variances) ** 2 - sum(variances)
    variance = material.standard_deviation**2
    implied = material.implied_average_correlation or 0.0
    wider = max(variance + (correlation - implied) * pairs, 0.0)
    expected = material.mean - material.estimate.base
    if variance <= 0:
        return expected
    margin = material.target.total - material.mean
    return expected + margin * math.sqrt(wider / variance)


@result_check(
    slug="strong-dependence",
    subject="dependence",
    title="Very strong overall dependence",
    catches="Packages that all move as one, so that nothing ever cancels out.",
    rule="The same average correlation, against an upper threshold.",
    thresholds=(STRONG,),
    severities=("caution",),
    todo="Check whether one cause is loaded on everything, or counted twice.",
    sources=(COMMON_PRACTICE,),
)
def strong_dependence(material: Material, settings: Settings) -> Verdict:
    """Find whether package costs move together more than is credible."""
    implied = material.implied_average_correlation
    if implied is None:
        return NotApplicable("Fewer than two packages have a range.")
    if implied <= settings.number(STRONG):
        return []
    message = (
        "On average package costs move together with a correlation of"
        f" {implied:.2f}; published defaults are 0.2 to 0.3."
    )
    return [Hit(severity="caution", message=message)]


@result_check(
    slug="contradictory-correlations",
    subject="dependence",
    title="Correlations that contradict each other",
    catches="A set of correlations that no costs can have.",
    rule=(
        "Largest change that the nearest possible correlation matrix makes to a"
        " correlation of correlations.csv."
    ),
    thresholds=(REPAIR,),
    severities=("major", "note"),
    todo="Correct the pair that changes most, or name common causes instead.",
    sources=(
        Source(
            "Higham, N. J. (2002), Computing the nearest correlation matrix, IMA"
            " Journal of Numerical Analysis 22(3)",
            "READ-title",
        ),
    ),
)
def contradictory_correlations(material: Material, settings: Settings) -> Verdict:
    """Find whether the correlations had to be changed."""
    if not material.estimate.correlations:
        return NotApplicable("There is no correlations.csv.")
    if material.correlation_repair is None or material.correlation_repair[0] == 0:
        return []
    change, a, b = material.correlation_repair
    message = (
        "The correlations contradict each other; the nearest possible set changes"
        f" them by up to {abs(change):.3f}, for the pair {a} and {b}."
    )
    grave = abs(change) > settings.number(REPAIR)
    return [Hit(severity="major" if grave else "note", message=message)]


@input_check(
    slug="dependence-twice",
    subject="dependence",
    title="Dependence entered twice",
    catches="Correlations on top of drivers that the same packages share.",
    rule=(
        "correlations.csv has pairs while general_dependence is above 0, or while the"
        " two packages of a pair share a cause."
    ),
    severities=("major",),
    todo="Keep one of the two: common causes, or correlations.",
    sources=(
        Source(
            "Smith (2007), on functional and applied correlation (iceaaonline.com):"
            " shared inputs already correlate results",
            "READ",
        ),
    ),
)
def dependence_twice(estimate: Estimate, _settings: Settings) -> Verdict:
    """Find pairs with a correlation and a shared driver."""
    pairs = [pair for pair in estimate.correlations if pair.correlation != 0]
    if not pairs:
        return NotApplicable("There is no correlations.csv.")
    if estimate.general_dependence:
        message = (
            f"{counted(len(pairs), 'correlation')} and a general dependence of"
            f" {estimate.general_dependence:g} act on the same packages."
        )
        return [Hit(severity="major", message=message)]
    causes = {
        package.id: {load.cause for load in package.loads if load.weight != 0}
        for package in estimate.packages
    }
    return [
        Hit(
            severity="major",
            where=pair.a,
            message=(
                f"{pair.a} and {pair.b} have a correlation of {pair.correlation:g} and"
                f" share the cause {min(causes[pair.a] & causes[pair.b])}."
            ),
        )
        for pair in pairs
        if causes.get(pair.a, set()) & causes.get(pair.b, set())
    ]


CHECKS = (
    no_dependence,
    weak_dependence,
    strong_dependence,
    contradictory_correlations,
    dependence_twice,
)
