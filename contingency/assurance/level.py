"""Checks of the level that is asked for and how the answer is presented."""

from __future__ import annotations

import numpy as np

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
from contingency.assurance.settings import Settings, Threshold
from contingency.assurance.wording import money, percent
from contingency.estimate.nouns import Estimate

GAO_LEVEL = Source(
    "GAO cost guide, page on cost contingency: decision-makers choose, and no level"
    " is best practice for all",
    "READ",
)
FINANCE_AU = Source(
    "Australian Department of Finance, Defining P50 and P80: one consistent level for"
    " all projects",
    "READ",
)
MUSKRAT = Source(
    "press on the Muskrat Falls inquiry: P50 used against advice, a risk amount not"
    " passed on",
    "READ-2nd",
)
ACT_AUDIT = Source(
    "press on the ACT Auditor-General's light rail report: contingency cut between"
    " drafts with thin records",
    "READ-2nd",
)
NAO_HEAD = Source(
    "head of the UK National Audit Office: optimism that seems designed to win"
    " approval",
    "READ",
)

LEVEL_STEP = Threshold(
    name="level_step",
    default=5,
    unit="percent",
    grade="H",
    meaning="usual levels are multiples of",
    least=1,
    most=50,
)
CAP_GAP = Threshold(
    name="cap_gap_percent",
    default=0.5,
    unit="% of the ceiling",
    grade="H",
    meaning="caution within",
    most=100,
)
SEED_PLACE = Threshold(
    name="lucky_seed_place",
    default=3,
    unit="of twenty",
    grade="H",
    meaning="fewest fresh seeds below the issued amount",
    most=20,
)
REQUEST_GAP = Threshold(
    name="request_gap_percent",
    default=0.5,
    unit="% of the total, if more than its interval and rounding",
    grade="H",
    meaning="largest gap",
    most=100,
)
DIGITS = Threshold(
    name="digits_half_widths",
    default=10,
    unit="rounding steps",
    grade="H",
    meaning="widest half of the interval",
)

COARSE = Threshold(
    name="coarse_rounding_percent",
    default=5,
    unit="% of the contingency",
    grade="H",
    meaning="largest rounding step",
    most=100,
)


@input_check(
    slug="level-without-authority",
    subject="level and presentation",
    title="Level without authority",
    catches="A level that is used because it always was.",
    rule="[contingency] names who set the level (set_by) and why (reason).",
    severities=("major",),
    todo=(
        "Name the policy or decision with the role that took it and its date under"
        " set_by, and the reason under reason."
    ),
    sources=(
        GAO_LEVEL,
        FINANCE_AU,
        Source(
            "US Weapon Systems Acquisition Reform Act of 2009: the level and the"
            " reason are disclosed",
            "MEMORY",
        ),
    ),
)
def level_without_authority(estimate: Estimate, _settings: Settings) -> Verdict:
    """Find whether someone with authority chose the level, for a reason."""
    rule = estimate.contingency
    missing = [
        words
        for words, text in (
            ("authority", rule.set_by.strip()),
            ("reason", rule.reason.strip()),
        )
        if not text
    ]
    if not missing:
        return []
    message = f"No {' and no '.join(missing)} is recorded for using {rule.target_name}."
    return [Hit(severity="major", message=message)]


@input_check(
    slug="odd-level",
    subject="level and presentation",
    title="An unusual level",
    catches="A level that was worked back from an amount: P63 instead of P60 or P65.",
    rule="The target is a multiple of the step.",
    thresholds=(LEVEL_STEP,),
    severities=("caution",),
    todo="Say in the reason which policy or decision names this very level.",
    sources=(MUSKRAT, ACT_AUDIT),
)
def odd_level(estimate: Estimate, settings: Settings) -> Verdict:
    """Find targets that no policy usually names."""
    rule = estimate.contingency
    if rule.target % settings.number(LEVEL_STEP) == 0:
        return []
    message = (
        f"The target {rule.target_name} is not a multiple of"
        f" {settings.number(LEVEL_STEP):g}; a reader will ask whether it was worked"
        " back from an amount."
    )
    return [Hit(severity="caution", message=message)]


@result_check(
    slug="total-fits-the-cap",
    subject="level and presentation",
    title="A total that just fits the ceiling",
    catches="Inputs or a level that were tuned until the total met a known budget.",
    rule="Distance of the total at the target from budget_cap.",
    thresholds=(CAP_GAP,),
    severities=("caution",),
    todo="Record how the ranges and the level were set before the total was known.",
    sources=(MUSKRAT, ACT_AUDIT, NAO_HEAD),
)
def total_fits_the_cap(material: Material, settings: Settings) -> Verdict:
    """Find totals that lie just at a ceiling known before the analysis."""
    cap = material.estimate.budget_cap
    if not cap:
        return NotApplicable("No budget_cap is written under [estimate].")
    gap = (material.target.total - cap) / cap
    if 100 * abs(gap) > settings.number(CAP_GAP):
        return []
    currency = material.estimate.currency
    message = (
        f"The total of {money(material.target.total, currency)} at"
        f" {material.target.name} lies within {percent(abs(gap), 2)} of the ceiling"
        f" of {money(cap, currency)} that was known before."
    )
    return [Hit(severity="caution", message=message)]


@result_check(
    slug="lucky-seed",
    subject="level and presentation",
    title="A lucky seed",
    catches="A seed that was tried out until the amount came out low.",
    rule=(
        "Number of fresh runs, of twenty, with a contingency below the issued one. An"
        " honest run as long as the fresh ones has fewer than three below it three"
        " times in twenty-one; a longer one more seldom."
    ),
    thresholds=(SEED_PLACE,),
    severities=("caution",),
    todo="Run again with a seed that was fixed beforehand, or with more trials.",
    sources=(NAO_HEAD, COMMON_PRACTICE),
)
def lucky_seed(material: Material, settings: Settings) -> Verdict:
    """Find whether the issued amount lies low among runs with other seeds."""
    if material.robustness is None:
        return NotApplicable("No runs with fresh seeds were made.")
    test = material.robustness.seeds
    if test.below >= settings.number(SEED_PLACE):
        return []
    currency = material.estimate.currency
    middle = float(np.median(test.contingencies))
    message = (
        f"Only {test.below} of {len(test.seeds)} fresh seeds give less than the issued"
        f" {money(test.issued, currency)}; half of them give"
        f" {money(middle, currency)} or more."
    )
    return [Hit(severity="caution", message=message)]


@result_check(
    slug="added-percentiles",
    subject="level and presentation",
    title="Added-up percentiles",
    catches="A request made of the package percentiles added up.",
    rule=(
        "requested_total, where one is written, against the total at the target and"
        " against the sum of the packages' own percentiles: a stop where it is that"
        " sum, major where it is neither, within the gap."
    ),
    thresholds=(REQUEST_GAP,),
    severities=("stop", "major"),
    todo="Ask for the total at the target level, or name the level that is asked for.",
    sources=(
        Source(
            "Smart (2014), doi:10.1080/1941658X.2014.922907, abstract: percentiles do"
            " not add up",
            "READ",
        ),
        Source("GAO-09-3SP: results of elements at a level do not add up", "READ"),
        Source("Book (2001), opening", "READ"),
    ),
)
def added_percentiles(material: Material, settings: Settings) -> Verdict:
    """Find requests that are not the level they claim to be."""
    asked, target = material.estimate.requested_total, material.target
    if asked is None:
        return NotApplicable(
            "No requested_total is written under [estimate]: the request is the level"
            " itself, from totals simulated jointly."
        )
    gap = _request_gap(material, settings)
    if abs(asked - target.total) <= gap:
        return []
    currency = material.estimate.currency
    summed = _sum_of_percentiles(material)
    reached = sum(asked >= total for total in material.percentiles)
    really = f"P{reached:02d}" if reached else "less than P01"
    is_sum = abs(asked - summed) <= gap
    message = (
        f"{money(asked, currency)} is asked for; {target.name} of the project is"
        f" {money(target.total, currency)}. The request is really {really}."
    )
    if is_sum:
        message += (
            f" The packages' own {target.name} added up give {money(summed, currency)},"
            " which is not a level of the project."
        )
    return [Hit(severity="stop" if is_sum else "major", message=message)]


def _request_gap(material: Material, settings: Settings) -> float:
    """Return how far a request may lie from the level, money."""
    target = material.target
    half = (target.high - target.low) / 2
    step = material.estimate.contingency.rounding
    return max(half, step, settings.number(REQUEST_GAP) / 100 * abs(target.total))


def _sum_of_percentiles(material: Material) -> float:
    """Return the sum of the package ranges' own percentiles at the target, money."""
    level = np.array([material.target.percent / 100])
    return float(
        sum(
            package.cost.distribution.quantile(level)[0]
            for package in material.estimate.packages
        )
    )


@result_check(
    slug="no-spread",
    subject="level and presentation",
    title="One number without a range",
    catches="A point figure presented as an answer.",
    rule="The total has a standard deviation above zero.",
    severities=("stop",),
    todo="Give the packages ranges, or add the events that may happen.",
    sources=(
        Source(
            "US National Research Council (1999), appendix B: ranges at all stages;"
            " point figures mislead",
            "READ",
        ),
        Source("GAO-11-309: no risk analysis, so no range", "READ"),
    ),
)
def no_spread(material: Material, _settings: Settings) -> Verdict:
    """Find totals that never vary."""
    if material.standard_deviation > 0:
        return []
    message = (
        "Every trial gives the same total,"
        f" {money(material.target.total, material.estimate.currency)}: nothing varies,"
        " so there is no level to choose."
    )
    return [Hit(severity="stop", message=message)]


@input_check(
    slug="one-level-only",
    subject="level and presentation",
    title="Only one level shown",
    catches="A committee that sees one cut through the curve and not what lies beside.",
    rule="[contingency] lists at least two levels.",
    severities=("note",),
    todo="Add the delivery target below and the ceiling above, each with its holder.",
    sources=(
        Source("NAO, interview with its head: what does the range represent", "READ"),
    ),
)
def one_level_only(estimate: Estimate, _settings: Settings) -> Verdict:
    """Find requests that show no level beside the target."""
    shown = {level.percent for level in estimate.contingency.levels}
    shown.add(estimate.contingency.target)
    if len(shown) > 1:
        return []
    message = f"{estimate.contingency.target_name} is the only funded level shown."
    return [Hit(severity="note", message=message)]


@result_check(
    slug="too-many-digits",
    subject="level and presentation",
    title="More digits than are known",
    catches="Amounts shown more finely than the simulation knows them.",
    rule=(
        "Half-width of the 95 % interval of the target over the rounding step. One"
        " digit more than is known is let pass, so that the rows of a table add up."
    ),
    thresholds=(DIGITS,),
    severities=("note",),
    todo="Write a larger rounding under [contingency].",
    sources=(
        Source(
            "New Zealand prisons review (2006): three decimals made readers see more"
            " accuracy than there was",
            "READ",
        ),
    ),
)
def too_many_digits(material: Material, settings: Settings) -> Verdict:
    """Find roundings much finer than the interval of the target."""
    half = (material.target.high - material.target.low) / 2
    step = material.estimate.contingency.rounding
    if half <= settings.number(DIGITS) * step:
        return []
    currency = material.estimate.currency
    message = (
        f"Amounts are shown to the nearest {money(step, currency)}, but"
        f" {material.target.name} is known only to ± {money(half, currency)}."
    )
    return [Hit(severity="note", message=message)]


@result_check(
    slug="coarse-rounding",
    subject="level and presentation",
    title="Rounded away",
    catches="A rounding step so large that the printed contingency is another figure.",
    rule="Rounding step in percent of the contingency at the target.",
    thresholds=(COARSE,),
    severities=("major",),
    todo="Write a smaller rounding under [contingency].",
    sources=(COMMON_PRACTICE,),
)
def coarse_rounding(material: Material, settings: Settings) -> Verdict:
    """Find roundings that change the contingency they print."""
    step = material.estimate.contingency.rounding
    contingency = abs(material.target.contingency)
    if contingency == 0.0:
        return NotApplicable("The contingency is nought.")
    share = 100.0 * step / contingency
    if share <= settings.number(COARSE):
        return []
    currency = material.estimate.currency
    message = (
        f"Amounts are shown to the nearest {money(step, currency)}, {share:.0f} % of"
        f" a contingency of {money(contingency, currency)}."
    )
    return [Hit(severity="major", message=message)]


CHECKS = (
    level_without_authority,
    odd_level,
    total_fits_the_cap,
    lucky_seed,
    added_percentiles,
    no_spread,
    one_level_only,
    too_many_digits,
    coarse_rounding,
)
