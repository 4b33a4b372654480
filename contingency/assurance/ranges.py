"""Checks of the ranges: their form and what their ends mean."""

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
)
from contingency.assurance.rows import ranged_rows, skew_ratio, uncertain_packages
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


@input_check(
    slug="ends-undefined",
    subject="ranges",
    title="Low and high without a stated meaning",
    catches=(
        "A low and a high that one person meant as limits and another as"
        " percentiles. The same figures then give different contingencies."
    ),
    rule=(
        "Every row with a low and a high has `ends`, in its own row or under"
        " [ranges]. There is no default."
    ),
    severities=("stop",),
    todo=(
        "Ask the person who gave the range how often the cost may fall outside it,"
        " and write limits, P05-P95, P10-P90 or P15-P85 under `ends`."
    ),
    sources=(
        Source(
            "Joint Agency Cost Schedule Risk and Uncertainty Handbook: eliciting and"
            " interpreting bounds",
            "READ-title",
        ),
    ),
)
def ends_undefined(estimate: Estimate, _settings: Settings) -> Verdict:
    """Find rows whose low and high have no stated meaning."""
    rows = [row for row in ranged_rows(estimate) if not row.range.ends_stated]
    if not rows:
        return []
    # Widening of a symmetric triangle whose stated ends are P5, P10 or P15:
    # 1 / (1 - sqrt(2 q)), closed form.
    factors = [1.0 / (1.0 - np.sqrt(2.0 * q)) for q in (0.05, 0.10, 0.15)]
    return [
        Hit(
            severity="stop",
            rows=tuple(row.id for row in rows),
            message=(
                f"Nothing says what low and high mean for"
                f" {counted(len(rows), 'row')} ({listed(row.id for row in rows)});"
                " they were read as limits. If a symmetric range was meant as P05 to"
                f" P95, its true half-width is {factors[0]:.2f} times the stated one;"
                f" as P10 to P90 {factors[1]:.2f} times; as P15 to P85"
                f" {factors[2]:.2f} times."
            ),
        )
    ]


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


CHECKS = (ends_undefined, copied_ranges, mirrored_ranges, ranges_lean_down)
