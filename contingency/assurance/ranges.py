"""Checks of the ranges side by side: alike, mirrored, leaning, too many."""

from __future__ import annotations

from collections import defaultdict
from collections.abc import Iterable
from dataclasses import dataclass

import numpy as np

from contingency.assurance.declaration import (
    Hit,
    NotApplicable,
    Source,
    Verdict,
    input_check,
    result_check,
)
from contingency.assurance.material import Material
from contingency.assurance.rows import (
    ranges_are_linked,
    skew_ratio,
    uncertain_packages,
)
from contingency.assurance.settings import Settings, Threshold
from contingency.assurance.wording import counted, listed, percent
from contingency.estimate.nouns import Estimate, WorkPackage

GAO_STEP_8 = Source(
    "US Government Accountability Office, Cost Estimating and Assessment Guide"
    " (GAO-20-195G), survey of step 8",
    "READ",
)
GAO_ASYMMETRY = Source(
    "GAO-20-195G: distributions of elements may be asymmetric, and most likely"
    " values do not add up to the most likely total",
    "READ",
)
FLYVBJERG_2006 = Source(
    "Flyvbjerg, B. (2006), From Nobel Prize to project management: getting risks"
    " right, Project Management Journal 37(3)",
    "READ-title",
)

RP_41R = Source(
    "AACE International RP 41R-08, Risk analysis and contingency determination using"
    " range estimating: attention to items able to move the total by 0.5 %, usually"
    " 20 or fewer",
    "MEMORY",
)
HOLLMANN_2007 = Source(
    "Hollmann, J. K. (2007), The Monte-Carlo challenge: a better approach, first page:"
    " line-by-line simulation as it is often mispractised",
    "READ",
)
GREY_WEAKNESSES = Source(
    "Grey, S., Weaknesses of common project cost risk modelling methods"
    " (broadleaf.com.au), introduction",
    "READ",
)

COPIED_CAUTION = Threshold(
    name="copied_ranges_caution_percent",
    default=50,
    unit="% of the base",
    grade="H",
    meaning="caution from",
    most=100,
)
COPIED_MAJOR = Threshold(
    name="copied_ranges_major_percent",
    default=80,
    unit="% of the base",
    grade="H",
    meaning="major from",
    most=100,
)
COPIED_FEWEST = Threshold(
    name="copied_ranges_fewest_packages",
    default=3,
    unit="packages",
    grade="H",
    meaning="fewest packages with one range",
    least=2,
)
MIRRORED_SHARE = Threshold(
    name="mirrored_ranges_percent",
    default=60,
    unit="% of the ranged base",
    grade="H",
    meaning="largest share with mirror-image ranges",
    most=100,
)
MIRRORED_BAND = Threshold(
    name="mirrored_ranges_band",
    default=0.1,
    unit="either side of 1",
    grade="H",
    meaning="ratio of upside to downside read as a mirror image",
    most=1,
)
LEAST_SKEW = Threshold(
    name="least_median_skew",
    default=1.0,
    unit="times the downside",
    grade="L",
    meaning="smallest median upside",
)

MOST_RANGES = Threshold(
    name="most_unlinked_ranges",
    default=30,
    unit="packages",
    grade="H",
    meaning="most ranges without a link",
)
SMALL_SHARE = Threshold(
    name="small_range_percent",
    default=0.5,
    unit="% of the variance",
    grade="G",
    meaning="a range is small below",
    most=100,
)
MOST_SMALL = Threshold(
    name="small_ranges_percent",
    default=50,
    unit="% of the ranges",
    grade="H",
    meaning="largest share of small ranges",
    most=100,
)
FEWEST_RANGES = Threshold(
    name="small_ranges_fewest",
    default=20,
    unit="ranges",
    grade="G",
    meaning="looks at more than",
)


@input_check(
    slug="copied-ranges",
    subject="ranges",
    title="One range copied down the sheet",
    catches="The same plus and minus percentages pasted into many packages.",
    rule=(
        "Packages are grouped by shape, ends, low/likely and high/likely, rounded to"
        " 1 %; spent cost is left out of the ratios. The largest group's share of the"
        " base counts, if it holds enough packages and, where packages have"
        " groups, more than one group."
    ),
    thresholds=(COPIED_CAUTION, COPIED_MAJOR, COPIED_FEWEST),
    severities=("major", "caution"),
    todo=(
        "Give each package the range that its own definition and evidence support,"
        " or say why they are equally uncertain."
    ),
    sources=(GAO_STEP_8,),
)
def copied_ranges(estimate: Estimate, settings: Settings) -> Verdict:
    """Find the largest group of packages that share one relative range."""
    alike: dict[_RelativeRange, list[WorkPackage]] = defaultdict(list)
    for package in uncertain_packages(estimate):
        key = _relative_range(package)
        if key is not None:
            alike[key].append(package)
    if not alike:
        return NotApplicable("No package has a low, a likely and a high.")
    if estimate.base <= 0:
        return NotApplicable("The base is zero.")
    shared, largest = max(alike.items(), key=lambda item: _base_of(item[1]))
    share = _base_of(largest) / estimate.base
    groups = {package.group for package in largest}
    of_one_type = len(groups) == 1 and len(estimate.groups) > 1
    if (
        len(largest) < settings.number(COPIED_FEWEST)
        or of_one_type
        or 100 * share <= settings.number(COPIED_CAUTION)
    ):
        return []
    grave = 100 * share > settings.number(COPIED_MAJOR)
    return [
        Hit(
            severity="major" if grave else "caution",
            rows=tuple(package.id for package in largest),
            message=(
                f"{counted(len(largest), 'package')} worth {percent(share)} of the"
                f" base share one range ({shared}):"
                f" {listed(p.id for p in largest)}."
                " What makes them equally uncertain?"
            ),
        )
    ]


@input_check(
    slug="mirrored-ranges",
    subject="ranges",
    title="Mirror-image ranges",
    catches=(
        "Ranges that reach as far down as up, in a field where outcomes are skewed"
        " upwards."
    ),
    rule=(
        "Ratio of upside to downside of each package, (high - likely)/(likely - low),"
        " or from the range's own P10, P50 and P90 where it has no likely. Share of"
        " the ranged base with a ratio close to 1."
    ),
    thresholds=(MIRRORED_SHARE, MIRRORED_BAND),
    severities=("major",),
    todo=(
        "Ask for the reasons why cost could rise and why it could fall, separately,"
        " and set the two ends from them."
    ),
    sources=(GAO_ASYMMETRY, FLYVBJERG_2006),
)
def mirrored_ranges(estimate: Estimate, settings: Settings) -> Verdict:
    """Find whether most of the money has symmetric ranges."""
    packages = uncertain_packages(estimate)
    ranged = _base_of(packages)
    if ranged <= 0:
        return NotApplicable("No package with a base has a range.")
    band = settings.number(MIRRORED_BAND) + 1e-9
    mirrored = [p for p in packages if abs(skew_ratio(p.cost) - 1.0) <= band]
    share = _base_of(mirrored) / ranged
    if 100 * share <= settings.number(MIRRORED_SHARE):
        return []
    return [
        Hit(
            severity="major",
            rows=tuple(package.id for package in mirrored),
            message=(
                f"{percent(share)} of the ranged money, in"
                f" {counted(len(mirrored), 'package')}"
                f" ({listed(p.id for p in mirrored)}), is assumed as likely to fall as"
                " to rise."
            ),
        )
    ]


@input_check(
    slug="ranges-lean-down",
    subject="ranges",
    title="Ranges that lean towards savings",
    catches="Packages that can fall further than they can rise, taken together.",
    rule=(
        "Median over the packages, weighted by base, of (high - likely)/(likely - low)."
    ),
    thresholds=(LEAST_SKEW,),
    severities=("major",),
    todo=(
        "Check whether the base already holds an allowance, and whether the high ends"
        " were set by what was hoped for."
    ),
    sources=(GAO_ASYMMETRY, FLYVBJERG_2006),
)
def ranges_lean_down(estimate: Estimate, settings: Settings) -> Verdict:
    """Find whether the typical range reaches further down than up."""
    packages = [p for p in uncertain_packages(estimate) if p.base > 0]
    if not packages:
        return NotApplicable("No package with a base has a range.")
    ratios = np.array([skew_ratio(package.cost) for package in packages])
    weights = np.array([package.base for package in packages])
    order = np.argsort(ratios, kind="stable")
    reached = np.cumsum(weights[order])
    median = float(ratios[order][np.searchsorted(reached, reached[-1] / 2)])
    if median >= settings.number(LEAST_SKEW) - 1e-9:
        return []
    leaning = [p for p, ratio in zip(packages, ratios, strict=True) if ratio < 1]
    return [
        Hit(
            severity="major",
            rows=tuple(package.id for package in leaning),
            message=(
                f"Half of the ranged money reaches up at most {median:.2f} times as far"
                f" as it reaches down; {counted(len(leaning), 'package')} lean"
                f" downwards ({listed(p.id for p in leaning)})."
            ),
        )
    ]


@input_check(
    slug="many-unlinked-ranges",
    subject="ranges",
    title="Too many ranges with nothing in common",
    catches="Hundreds of separate line ranges that cancel each other out on paper.",
    rule=(
        "Number of packages with a range, where no general dependence, no shared"
        " cause and no correlation links them."
    ),
    thresholds=(MOST_RANGES,),
    severities=("major",),
    todo="Group the packages, or link them by common causes.",
    sources=(RP_41R, HOLLMANN_2007, GREY_WEAKNESSES),
)
def many_unlinked_ranges(estimate: Estimate, settings: Settings) -> Verdict:
    """Find long lists of independent ranges."""
    packages = uncertain_packages(estimate)
    if ranges_are_linked(estimate) or len(packages) <= settings.number(MOST_RANGES):
        return []
    spreads = np.sqrt([p.cost.distribution.variance for p in packages])
    ratio = float(np.sqrt(np.sum(spreads**2)) / np.sum(spreads))
    message = (
        f"{counted(len(packages), 'range')} with nothing in common cancel out on"
        f" paper: together they spread {percent(ratio)} of the sum of their standard"
        " deviations."
    )
    return [Hit(severity="major", message=message)]


@result_check(
    slug="small-ranges",
    subject="ranges",
    title="Ranges too small to matter",
    catches="Effort spent on lines that cannot move the total.",
    rule=(
        "Share of the package ranges that make up less than the threshold of the"
        " variance, in estimates with many ranges."
    ),
    thresholds=(SMALL_SHARE, MOST_SMALL, FEWEST_RANGES),
    severities=("caution",),
    todo="Group the small packages and spend the effort on the large ones.",
    sources=(RP_41R,),
)
def small_ranges(material: Material, settings: Settings) -> Verdict:
    """Find whether most ranges hardly move the total."""
    drivers = [driver for driver in material.drivers if driver.kind == "range"]
    if len(drivers) <= settings.number(FEWEST_RANGES):
        return NotApplicable(
            f"{counted(len(drivers), 'package range')};"
            f" it looks at more than {settings.number(FEWEST_RANGES):g}."
        )
    small = [
        d.id
        for d in drivers
        if 100 * abs(d.variance_share) < settings.number(SMALL_SHARE)
    ]
    if 100 * len(small) <= settings.number(MOST_SMALL) * len(drivers):
        return []
    message = (
        f"{len(small)} of {counted(len(drivers), 'package range')} make up less than"
        f" {settings.number(SMALL_SHARE):g} % of the variance each: {listed(small)}."
    )
    return [Hit(severity="caution", rows=tuple(small), message=message)]


def _base_of(packages: Iterable[WorkPackage]) -> float:
    return sum(package.base for package in packages)


@dataclass(frozen=True, slots=True)
class _RelativeRange:
    """What makes two ranges alike: the ratios are those of the cost still to come."""

    shape: str
    ends: str
    low: float
    high: float

    def __str__(self) -> str:
        low, high = 100 * (self.low - 1), 100 * (self.high - 1)
        return f"{low:+.0f} % to {high:+.0f} %, {self.ends}"


def _relative_range(package: WorkPackage) -> _RelativeRange | None:
    """Return the relative range, or None where there are no three figures."""
    cost, spent = package.cost, package.spent or 0.0
    likely = package.base if cost.likely is None else cost.likely
    if cost.low is None or cost.high is None or likely - spent <= 0:
        return None
    return _RelativeRange(
        shape=cost.shape,
        ends=str(cost.ends),
        low=round((cost.low - spent) / (likely - spent), 2),
        high=round((cost.high - spent) / (likely - spent), 2),
    )


CHECKS = (
    copied_ranges,
    mirrored_ranges,
    ranges_lean_down,
    many_unlinked_ranges,
    small_ranges,
)
