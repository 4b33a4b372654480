"""Checks of the systemic risks: what comes from how the project is set up."""

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
from contingency.assurance.settings import Settings, Threshold
from contingency.assurance.wording import counted, percent
from contingency.estimate.nouns import Estimate

RP_42R = Source(
    "AACE International RP 42R-08, Risk analysis and contingency determination"
    " using parametric estimating (draft): poor scope definition is often the"
    " greatest driver",
    "READ",
)
RP_119R = Source("AACE International RP 119R-21, abstract", "READ")
HOLLMANN_2007 = Source(
    "Hollmann, J. K. (2007), The Monte-Carlo challenge: a better approach, first page",
    "READ",
)
FTA_RISK = Source(
    "US Federal Transit Administration oversight procedures: a risk register alone"
    " is not enough, a model of the whole project is needed",
    "READ",
)

THIN_SHARE = Threshold(
    name="thin_systemic_percent",
    default=25,
    unit="% of the variance",
    grade="H",
    meaning="smallest share",
    most=100,
)
LEAST_OF_OUTSIDE = Threshold(
    name="least_of_outside_percent",
    default=50,
    unit="% of the outside P80",
    grade="H",
    meaning="caution where P80 allows less than",
    most=100,
)
EARLY_CLASS = Threshold(
    name="early_from_class",
    default=4,
    unit="",
    grade="H",
    meaning="early: class",
    least=1,
    most=5,
)


@input_check(
    slug="no-systemic-layer",
    subject="systemic risks and events",
    title="No systemic risks",
    catches=(
        "An analysis of line ranges and listed events only, with nothing for the"
        " definition of scope, new technology, complexity, team, market or the bias of"
        " the estimate."
    ),
    rule=(
        "systemic.csv has no rows, or every row is neutral: no spread and no uplift."
    ),
    severities=("major",),
    todo=(
        "Add the systemic risks that apply to systemic.csv with the evidence for"
        " their size, or answer why the project has none."
    ),
    sources=(RP_42R, HOLLMANN_2007, FTA_RISK),
)
def no_systemic_layer(estimate: Estimate, _settings: Settings) -> Verdict:
    """Find whether anything stands for how the project is defined and run."""
    at_work = [
        risk
        for risk in estimate.systemic
        if risk.uplift.varies or risk.uplift.distribution.mean != 0
    ]
    if at_work:
        return []
    found = (
        f"All {counted(len(estimate.systemic), 'systemic risk')} are neutral: no"
        " spread and no uplift."
        if estimate.systemic
        else "The estimate has no systemic risks."
    )
    return [
        Hit(
            severity="major",
            message=(
                f"{found} Nothing in the model stands for how well the project is"
                " defined, which past projects show to be among the largest drivers."
            ),
        )
    ]


@result_check(
    slug="thin-systemic-layer",
    subject="systemic risks and events",
    title="Systemic risks too small for the class",
    catches="An early estimate whose spread comes from its lines and events alone.",
    rule="Share of the variance from systemic risks, for estimates of an early class.",
    thresholds=(THIN_SHARE, EARLY_CLASS),
    severities=("caution",),
    todo="Look again at the size of the systemic risks and at its evidence.",
    sources=(RP_42R, RP_119R),
)
def thin_systemic_layer(material: Material, settings: Settings) -> Verdict:
    """Find whether an early estimate has hardly any systemic spread."""
    estimate = material.estimate
    if estimate.estimate_class is None:
        return NotApplicable("No estimate class is written under [estimate].")
    if estimate.estimate_class < settings.number(EARLY_CLASS):
        return NotApplicable(f"The estimate has class {estimate.estimate_class}.")
    if not estimate.systemic:
        return NotApplicable("The estimate has no systemic risks.")
    share = sum(d.variance_share for d in material.drivers if d.kind == "systemic")
    if 100 * share >= settings.number(THIN_SHARE):
        return []
    message = (
        f"Systemic risks make up {percent(share)} of the variance of an estimate of"
        f" class {estimate.estimate_class}."
    )
    return [Hit(severity="caution", message=message)]


@result_check(
    slug="outside-view-gap",
    subject="systemic risks and events",
    title="Gap to the outside view",
    catches="An inside view far from what similar projects came to.",
    rule=(
        "P80 of the total over base against the outside view: major below its P50,"
        " caution where it allows less than a share of its P80. P50 of the total above"
        " the outside P80 is a caution too. Without an outside view it is a note."
    ),
    thresholds=(LEAST_OF_OUTSIDE,),
    severities=("major", "caution", "note"),
    todo=(
        "Explain what makes this project unlike the others, or look for systemic risks"
        " and dependence left out. Without closed projects, add history.csv or"
        " published percentiles with [outside_view]."
    ),
    sources=(
        Source(
            "UK Department for Transport (2004), procedures for dealing with optimism"
            " bias, and its update of 2020",
            "READ-title",
        ),
        Source("Flyvbjerg, B. (2006), From Nobel Prize to project management", "READ"),
        Source("UK National Audit Office (2013), over-optimism", "READ"),
        Source("GAO-15-596, space launch system: no cross-check", "READ"),
    ),
)
def outside_view_gap(material: Material, settings: Settings) -> Verdict:
    """Find whether the model allows much less, or more, than others needed."""
    # Loaded here, for `contingency check` needs no statistics of histories.
    from contingency.assurance.outside_view import outside_view

    outside = outside_view(material)
    if isinstance(outside, str):
        return [Hit(severity="note", message=outside)]
    base = material.estimate.base
    middle, high = outside.ratio(50), outside.ratio(80)
    if base <= 0 or middle is None or high is None:
        return NotApplicable("The outside view has no P50 or no P80.")
    model_middle = material.percentile(50) / base - 1
    model_high = material.percentile(80) / base - 1
    message = (
        "Similar projects came to their base"
        f" {_signed(middle - 1)} at P50 and {_signed(high - 1)} at P80"
        f" ({outside.source}); this model allows {_signed(model_middle)} and"
        f" {_signed(model_high)}."
    )
    if model_high < middle - 1:
        return [Hit(severity="major", message=message)]
    least = settings.number(LEAST_OF_OUTSIDE) / 100
    if model_high < least * (high - 1) or model_middle > high - 1:
        return [Hit(severity="caution", message=message)]
    return []


def _signed(fraction: float) -> str:
    return f"{100 * fraction:+.0f} %"


CHECKS = (no_systemic_layer, thin_systemic_layer, outside_view_gap)
