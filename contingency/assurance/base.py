"""Checks of the base estimate: what is in it, and what is not."""

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
from contingency.assurance.ends import IMPOSSIBLE_DRAWS
from contingency.assurance.material import Material
from contingency.assurance.settings import Settings, Threshold, WordList
from contingency.assurance.wording import listed, money, percent, words_found
from contingency.estimate.nouns import Estimate, WorkPackage

FTA_STRIP = Source(
    "US Federal Transit Administration oversight procedure on cost risk: patent and"
    " latent contingency, money inside inflation included, is stripped before any"
    " modelling",
    "READ",
)
USACE_ETL = Source(
    "US Army Corps of Engineers ETL 1110-2-573, appendix G: the risk model works on"
    " cost without escalation and contingency, for all work-breakdown features",
    "READ",
)

ALLOWANCE_NAMES = WordList(
    name="allowance_words_in_names",
    default=(
        "allowance; provision; provisional; unmeasured; design development; rounding;"
        " risk; margin"
    ),
    grade="G",
    meaning="words looked for in names",
)
ALLOWANCE_BASIS = WordList(
    name="allowance_words_in_basis",
    default="contingency; allowance; unmeasured",
    grade="G",
    meaning="words looked for in the basis",
)
CONTINGENCY_NAMES = WordList(
    name="contingency_words_in_names",
    default=(
        "contingency; contingencies; escalation; management reserve; risk reserve;"
        " cost reserve; project reserve; profit on risk"
    ),
    grade="G",
    meaning="words looked for in names",
)
BASE_TOO_SURE = Threshold(
    name="base_enough_most_percent",
    default=50,
    unit="% chance",
    grade="H",
    meaning="major above",
    most=100,
)
BASE_TOO_RARE = Threshold(
    name="base_enough_least_percent",
    default=1,
    unit="% chance",
    grade="H",
    meaning="caution below",
    most=100,
)
COVERED = Threshold(
    name="covered_least_percent",
    default=98,
    unit="% of the request",
    grade="H",
    meaning="major below",
)
COVERED_MOST = Threshold(
    name="covered_most_percent",
    default=102,
    unit="% of the request",
    grade="H",
    meaning="major above",
    least=100,
)
FAMILIES = WordList(
    name="cost_families",
    default=(
        "owner/client; land/property/site access; utilities/services;"
        " third party/third parties; commissioning/testing/trials;"
        " tax/taxes/duties/customs; closure/decommissioning/removal/disposal"
    ),
    grade="H",
    meaning="families looked for, other words for one family after a stroke",
)


@input_check(
    slug="contingency-as-input",
    subject="base estimate",
    title="Contingency stacked on contingency",
    catches="A package that is itself contingency, a reserve or escalation.",
    rule=(
        "No package has one of the words in its name. Where holds_allowance = no"
        " says that the package is work, the finding is major instead of a stop."
    ),
    thresholds=(CONTINGENCY_NAMES,),
    severities=("stop", "major"),
    todo=(
        "Take the package out of packages.csv. If it is work with an unlucky name,"
        " write no under holds_allowance and say what it is."
    ),
    sources=(USACE_ETL, FTA_STRIP),
)
def contingency_as_input(estimate: Estimate, settings: Settings) -> Verdict:
    """Find packages that are an allowance for risk by name."""
    hits: list[Hit] = []
    for package in estimate.packages:
        found = words_found(package.name, settings.words(CONTINGENCY_NAMES))
        if not found or package.base == 0:
            continue
        hits.append(
            Hit(
                severity="major" if package.holds_allowance is False else "stop",
                where=package.id,
                message=(
                    f"{package.label}, {money(package.base, estimate.currency)}, is"
                    f" {found[0]} by its name. It cannot be both an input and the"
                    " answer."
                ),
            )
        )
    return hits


@input_check(
    slug="allowance-in-base",
    subject="base estimate",
    title="Allowance for risk inside the base",
    catches="Contingency hidden in package values, so that risk is paid for twice.",
    rule=(
        "holds_allowance = yes; or one of the words in the name or in the basis"
        " where holds_allowance does not say no."
    ),
    thresholds=(ALLOWANCE_NAMES, ALLOWANCE_BASIS),
    severities=("major",),
    todo=(
        "Take the allowance out of the base. If the amount is measured work, write"
        " no under holds_allowance."
    ),
    sources=(
        FTA_STRIP,
        Source(
            "US state highway cost manual: reviewers remove buried contingency", "READ"
        ),
        Source("US CMS project, contingency analysis: none in base cost", "READ"),
    ),
)
def allowance_in_base(estimate: Estimate, settings: Settings) -> Verdict:
    """Find packages that seem to hold an allowance of their own."""
    hits: list[Hit] = []
    for package in estimate.packages:
        why = _allowance(package, settings)
        if why:
            message = f"{package.label} seems to carry its own allowance: {why}."
            hits.append(Hit(severity="major", where=package.id, message=message))
    return hits


def _allowance(package: WorkPackage, settings: Settings) -> str:
    """Return why a package seems to hold an allowance, or nothing."""
    if package.holds_allowance:
        return "holds_allowance says yes"
    if package.holds_allowance is False:
        return ""
    if words_found(package.name, settings.words(CONTINGENCY_NAMES)):
        return ""  # contingency-as-input says so
    in_name = words_found(package.name, settings.words(ALLOWANCE_NAMES))
    if in_name:
        return f'its name holds the word "{in_name[0]}"'
    in_basis = words_found(package.evidence.basis, settings.words(ALLOWANCE_BASIS))
    return f'its basis holds the word "{in_basis[0]}"' if in_basis else ""


@result_check(
    slug="base-on-the-curve",
    subject="base estimate",
    title="Where the base sits on the curve",
    catches="A base that is nearly impossible, or one that is generous already.",
    rule="Chance that the total does not exceed the base.",
    thresholds=(BASE_TOO_SURE, BASE_TOO_RARE),
    severities=("major", "caution"),
    todo=(
        "Where the chance is large, look for padding in the base and for ranges that"
        " only go down. Where it is small, look for dependence left out and for"
        " ranges that only go up."
    ),
    sources=(
        Source(
            "GAO-20-195G, survey of step 9: the cumulative probability of the point"
            " estimate is stated",
            "READ",
        ),
        Source(
            "Australian Department of Finance, Defining P50 and P80: its example has"
            " the base near P15",
            "READ",
        ),
    ),
)
def base_on_the_curve(material: Material, settings: Settings) -> Verdict:
    """Find a base that is too sure or too unlikely."""
    chance = material.chance_base_is_enough
    message = (
        "With the inputs given there is a chance of"
        f" {percent(chance, 1)} that the cost does not exceed the base."
    )
    if 100 * chance > settings.number(BASE_TOO_SURE):
        return [Hit(severity="major", message=message)]
    if 100 * chance < settings.number(BASE_TOO_RARE):
        return [Hit(severity="caution", message=message)]
    return []


@input_check(
    slug="spent-still-uncertain",
    subject="base estimate",
    title="Spent money that still varies",
    catches="Sunk cost inside a ranged amount, or finished work with a range.",
    rule=(
        "For packages with spent or progress: nothing varies at 100 % progress; work"
        " that has begun has an actual cost; less is spent than is expected in all;"
        " the range does not reach below what is spent, but for a small share of"
        " the draws."
    ),
    thresholds=(IMPOSSIBLE_DRAWS,),
    severities=("major",),
    todo="Bring spent, progress and the range of the package to the data date.",
    sources=(
        Source("GAO-20-195G, survey of step 12: actuals replace estimates", "READ"),
        Source(
            "New Zealand transport agency, cost estimation: fees come out once sunk",
            "READ",
        ),
        Source(
            "UK transport appraisal guidance, unit A1.2: sunk cost is excluded",
            "READ-title",
        ),
    ),
)
def spent_still_uncertain(estimate: Estimate, settings: Settings) -> Verdict:
    """Find packages whose actual cost and range do not fit together."""
    under_way = [p for p in estimate.packages if p.spent or p.progress]
    if not under_way:
        return NotApplicable("No package has spent or progress.")
    hits: list[Hit] = []
    for package in under_way:
        why = _does_not_fit(package, estimate.currency, settings)
        if why:
            message = f"{package.label}: {why}."
            hits.append(Hit(severity="major", where=package.id, message=message))
    return hits


def _does_not_fit(package: WorkPackage, currency: str, settings: Settings) -> str:
    """Return what is wrong between actual cost, progress and range, or nothing."""
    spent = package.spent or 0.0
    shape = package.cost.distribution
    if package.progress is not None and package.progress >= 1 and package.cost.varies:
        return (
            "the work is done, but its cost still has a standard deviation of"
            f" {money(shape.variance**0.5, currency)}"
        )
    if package.progress and not spent:
        return (
            f"{percent(package.progress)} of the work is done, but nothing is entered"
            f" as spent, so the whole {money(package.base, currency)} varies"
        )
    if spent > package.base and shape.mean <= spent * (1 + 1e-9):
        return (
            f"{money(spent, currency)} is spent of a base of"
            f" {money(package.base, currency)}, and nothing more is expected"
        )
    below = float(shape.cdf(np.array([spent * (1 - 1e-9)]))[0]) if spent else 0.0
    if 100 * below > settings.number(IMPOSSIBLE_DRAWS):
        return (
            f"{money(spent, currency)} is spent already, but {percent(below, 1)} of"
            " the draws cost less; only the rest can vary"
        )
    return ""


@input_check(
    slug="cost-not-covered",
    subject="base estimate",
    title="Part of the cost not looked at",
    catches="Risk assessed on construction only, or on more than is asked for.",
    rule="Base of all packages over request_base, the base of the whole request.",
    thresholds=(COVERED, COVERED_MOST),
    severities=("major",),
    todo="Add the packages that are missing, or exclude them with a reason.",
    sources=(
        USACE_ETL,
        Source("GAO-13-163T: sensitivity run on 30 miles of one segment", "READ"),
        Source(
            "Audit Office of New South Wales (2016), light rail: most of the increase"
            " came from mispricing and omissions",
            "READ",
        ),
    ),
)
def cost_not_covered(estimate: Estimate, settings: Settings) -> Verdict:
    """Find whether the packages make up the base of the request."""
    if not estimate.request_base:
        return NotApplicable("No request_base is written under [estimate].")
    share = estimate.base / estimate.request_base
    if settings.number(COVERED) <= 100 * share <= settings.number(COVERED_MOST):
        return []
    gap = estimate.request_base - estimate.base
    currency = estimate.currency
    return [
        Hit(
            severity="major",
            message=(
                f"The packages make up {percent(share, 1)} of the base of the request."
                + (
                    f" {money(gap, currency)} is not covered."
                    if gap > 0
                    else f" {money(-gap, currency)} is in the analysis but not in the"
                    " request."
                )
            ),
        )
    ]


@input_check(
    slug="cost-families-silent",
    subject="base estimate",
    title="Kinds of cost that nothing mentions",
    catches=(
        "Costs that are easily left out: of the owner, of land, of third parties, of"
        " commissioning, taxes, removal."
    ),
    rule=(
        "Each family has a word in the name or group of a package, or in the scope,"
        " the base statement, an assumption or an exclusion."
    ),
    thresholds=(FAMILIES,),
    severities=("caution",),
    todo=(
        "For each family add a package, or an exclusion that says why it is left out"
        " or does not apply."
    ),
    sources=(
        Source(
            "Audit Office of New South Wales (2020), follow-up: client costs left out",
            "READ-2nd",
        ),
        COMMON_PRACTICE,
    ),
)
def cost_families_silent(estimate: Estimate, settings: Settings) -> Verdict:
    """Find families of cost that the estimate neither holds nor excludes."""
    statements = estimate.statements
    text = " . ".join(
        [
            *(f"{package.name} . {package.group}" for package in estimate.packages),
            statements.scope,
            statements.base,
            *(assumption.text for assumption in statements.assumptions),
            *(exclusion.text for exclusion in statements.exclusions),
        ]
    )
    silent = [
        family.split("/")[0].strip()
        for family in settings.words(FAMILIES)
        if not words_found(text, [word.strip() for word in family.split("/")])
    ]
    if not silent:
        return []
    message = f"Nothing is said about: {listed(silent)}."
    return [Hit(severity="caution", message=message)]


CHECKS = (
    contingency_as_input,
    allowance_in_base,
    base_on_the_curve,
    spent_still_uncertain,
    cost_not_covered,
    cost_families_silent,
)
