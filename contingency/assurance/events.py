"""Checks of the register of risk events."""

from __future__ import annotations

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
from contingency.assurance.rows import chance_of
from contingency.assurance.settings import Settings, Threshold
from contingency.assurance.wording import money, percent
from contingency.estimate.nouns import Estimate, RiskEvent

GREY_BUDGET = Source(
    "Grey, S., The real risk to your project budget (broadleaf.com.au): so-called"
    " contingent risks are often given a probability of 100 %",
    "READ",
)

NEARLY_CERTAIN = Threshold(
    name="nearly_certain_percent",
    default=90,
    unit="% chance",
    grade="H",
    meaning="caution from",
    most=100,
)
LARGE_EVENT = Threshold(
    name="large_event_percent",
    default=25,
    unit="% of the contingency",
    grade="D",
    meaning="an event is large above",
)
FUNDED_EVENT = Threshold(
    name="funded_event_percent",
    default=25,
    unit="% of its mean cost",
    grade="D",
    meaning="an event is funded from",
    most=100,
)


@input_check(
    slug="certain-events",
    subject="systemic risks and events",
    title="Events that are certain",
    catches="Base cost or a range that is dressed up as an event.",
    rule=(
        "The chance of an open event, given any event that it requires, is 100 %"
        " (major) or at least the threshold (caution). Repeated events have a rate"
        " and are left out."
    ),
    thresholds=(NEARLY_CERTAIN,),
    severities=("major", "caution"),
    todo="Put the expected cost in the base and give the package a range.",
    sources=(GREY_BUDGET,),
)
def certain_events(estimate: Estimate, settings: Settings) -> Verdict:
    """Find open events that will happen, or nearly so."""
    once = [event for event in estimate.open_events if event.happens == "once"]
    if not once:
        return NotApplicable("No open event happens once.")
    hits: list[Hit] = []
    for event in once:
        chance = chance_of(event, estimate)
        if chance >= 1.0:
            message = f"{event.label} is certain, so it is part of the base."
            hits.append(Hit(severity="major", where=event.id, message=message))
        elif 100 * chance >= settings.number(NEARLY_CERTAIN):
            message = (
                f"{event.label} has a chance of {percent(chance)}; it is closer to a"
                " cost with a range than to an event."
            )
            hits.append(Hit(severity="caution", where=event.id, message=message))
    return hits


@input_check(
    slug="weightless-events",
    subject="systemic risks and events",
    title="Events without weight",
    catches="Rows of the register that cannot move the total.",
    rule="The chance of an open event is zero, or its cost is zero.",
    severities=("note",),
    todo="Estimate the event, or close it.",
    sources=(COMMON_PRACTICE,),
)
def weightless_events(estimate: Estimate, _settings: Settings) -> Verdict:
    """Find open events that cannot happen or cost nothing."""
    if not estimate.open_events:
        return NotApplicable("The estimate has no open events.")
    hits: list[Hit] = []
    for event in estimate.open_events:
        impact = event.impact_used
        if chance_of(event, estimate) == 0:
            message = f"{event.label} is open and cannot happen."
        elif not impact.varies and impact.distribution.mean == 0:
            message = f"{event.label} is open and costs nothing."
        else:
            continue
        hits.append(Hit(severity="note", where=event.id, message=message))
    return hits


@result_check(
    slug="rare-large-events",
    subject="systemic risks and events",
    title="Rare but large events",
    catches="The belief that a percentile pays for a rare event when it happens.",
    rule=(
        "Coverage of a threat: fall of the target level if the event were removed,"
        " over its mean cost if it happens. It fires where the mean cost is large"
        " against the contingency and the coverage is small. Where owner and held_by"
        " are both filled, it is a note that says who holds the rest."
    ),
    thresholds=(LARGE_EVENT, FUNDED_EVENT),
    severities=("major", "note"),
    todo=(
        "Decide who pays if it happens: insure it, hold a reserve above the project,"
        " or accept it. Write the holder under held_by and the owner under owner."
    ),
    sources=(
        Source(
            "GAO-20-195G: the curve shows only the risks identified; higher levels"
            " make some provision for others",
            "READ",
        ),
        Source(
            "AACE International RP 40R-08 and PGD 02: such risks belong in a"
            " management reserve",
            "MEMORY",
        ),
    ),
)
def rare_large_events(material: Material, settings: Settings) -> Verdict:
    """Find threats whose cost the funding level hardly pays."""
    threats = [e for e in material.estimate.open_events if e.kind == "threat"]
    contingency = material.target.contingency
    if not threats:
        return NotApplicable("No open threat.")
    if contingency <= 0:
        return NotApplicable("The contingency at the target is not positive.")
    removal = {d.id: d.removal_effect for d in material.drivers if d.kind == "event"}
    hits: list[Hit] = []
    for event in threats:
        impact = event.impact_used.distribution.mean
        if impact <= 0 or event.id not in removal:
            continue
        coverage = removal[event.id] / impact
        large = 100 * impact > settings.number(LARGE_EVENT) * contingency
        if large and 100 * coverage < settings.number(FUNDED_EVENT):
            hits.append(_rare_large(event, impact, coverage, material))
    return hits


def _rare_large(
    event: RiskEvent, impact: float, coverage: float, material: Material
) -> Hit:
    currency = material.estimate.currency
    held = bool(event.held_by and event.owner)
    rest = (
        f"The rest is held by {event.held_by}."
        if held
        else "Nobody is named who holds the rest."
    )
    return Hit(
        severity="note" if held else "major",
        where=event.id,
        message=(
            f"{event.label}: if it happens it costs about {money(impact, currency)},"
            f" {percent(impact / material.target.contingency)} of the contingency."
            f" {material.target.name} holds"
            f" {money(max(coverage, 0.0) * impact, currency)} of that"
            f" ({percent(max(coverage, 0.0))}). {rest}"
        ),
    )


CHECKS = (certain_events, weightless_events, rare_large_events)
