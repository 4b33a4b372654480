"""Checks of events before and after treatment."""

from __future__ import annotations

from contingency.assurance.declaration import (
    Hit,
    NotApplicable,
    Source,
    Verdict,
    input_check,
)
from contingency.assurance.settings import Settings
from contingency.assurance.wording import money
from contingency.estimate.nouns import CostRange, Estimate, RiskEvent

ANAO = Source(
    "Australian National Audit Office, major projects: contingency assigned to the"
    " treatment and to the residual risk",
    "READ",
)
ACT_TREASURY = Source(
    "ACT Treasury guidance: values after controls and treatments", "READ"
)
HMT_BIAS = Source(
    "HM Treasury, worked example on optimism bias: the cost of managing risk is added"
    " back",
    "READ",
)
NONE_AFTER = NotApplicable("No open event is used after treatment.")


@input_check(
    slug="treatment-not-funded",
    subject="systemic risks and events",
    title="Treatment counted but not funded",
    catches=(
        "Reduced risk values while nobody pays for the treatment, owns it or has a date"
        " for it."
    ),
    rule=(
        "An open event with use = after has response_cost, response_package,"
        " response_owner and response_due. A response that costs nothing has the"
        " cost 0."
    ),
    severities=("major",),
    todo="Fund the treatment in a package with owner and date, or write use = before.",
    sources=(ANAO, ACT_TREASURY, HMT_BIAS),
)
def treatment_not_funded(estimate: Estimate, _settings: Settings) -> Verdict:
    """Find reduced events whose treatment is not arranged."""
    treated = [event for event in estimate.open_events if event.use == "after"]
    if not treated:
        return NONE_AFTER
    hits: list[Hit] = []
    for event in treated:
        missing = _not_arranged(event)
        if missing:
            message = (
                f"{event.label} is counted as treated, but its treatment has no"
                f" {' and no '.join(missing)}."
            )
            hits.append(Hit(severity="major", where=event.id, message=message))
    return hits


def _not_arranged(event: RiskEvent) -> list[str]:
    missing = []
    if event.response_cost is None:
        missing.append("cost")
    if not event.response_package and event.response_cost != 0:
        missing.append("package that pays for it")
    if not (event.response_owner or event.owner):
        missing.append("owner")
    if event.response_due is None:
        missing.append("date")
    return missing


@input_check(
    slug="treatment-overdue",
    subject="systemic risks and events",
    title="Treatment overdue",
    catches="Values after a treatment that should be in place and may not be.",
    rule=(
        "An open event with use = after and a response_due before the data date. The"
        " robustness table shows the contingency with all events before treatment."
    ),
    severities=("major",),
    todo=(
        "Confirm in an answer that the treatment is in place, or write use = before"
        " until it is."
    ),
    sources=(ANAO,),
)
def treatment_overdue(estimate: Estimate, _settings: Settings) -> Verdict:
    """Find reduced events whose treatment was due before the data date."""
    treated = [event for event in estimate.open_events if event.use == "after"]
    if not treated:
        return NONE_AFTER
    return [
        Hit(
            severity="major",
            where=event.id,
            message=(
                f"The treatment of {event.label} was due on {event.response_due},"
                f" before the data date {estimate.data_date}."
            ),
        )
        for event in treated
        if event.response_due is not None and event.response_due < estimate.data_date
    ]


@input_check(
    slug="treatment-makes-worse",
    subject="systemic risks and events",
    title="Treatment that makes it worse",
    catches="Values before and after treatment that were exchanged.",
    rule=(
        "Expected cost, chance or frequency times mean cost, is larger after treatment"
        " for a threat, or smaller for an opportunity. Both states are compared,"
        " whichever is used."
    ),
    severities=("stop",),
    todo="Correct the values before and after treatment.",
    sources=(ANAO, ACT_TREASURY),
)
def treatment_makes_worse(estimate: Estimate, _settings: Settings) -> Verdict:
    """Find events whose expected cost moves the wrong way under treatment."""
    both: list[tuple[RiskEvent, float, float]] = []
    for event in estimate.open_events:
        before = _expected(event.probability, event.frequency, event.impact)
        after = _expected(
            event.after_probability, event.after_frequency, event.after_impact
        )
        if before is not None and after is not None:
            both.append((event, before, after))
    if not both:
        return NotApplicable("No open event has values before and after treatment.")
    currency = estimate.currency
    return [
        Hit(
            severity="stop",
            where=event.id,
            message=(
                f"The expected amount of {event.label} is {money(before, currency)}"
                f" before and {money(after, currency)} after treatment."
            ),
        )
        for event, before, after in both
        if event.sign * (after - before) > 1e-9 * abs(before)
    ]


def _expected(
    probability: float | None, frequency: float | None, impact: CostRange | None
) -> float | None:
    """Return chance or frequency times mean cost, money; None where not given."""
    weight = probability if probability is not None else frequency
    if weight is None or impact is None:
        return None
    return weight * impact.distribution.mean


@input_check(
    slug="treatment-paid-not-counted",
    subject="systemic risks and events",
    title="Treatment paid for but not counted",
    catches="A response in the base while the risk is still held at its full value.",
    rule=(
        "An open event with use = before, a response_cost above 0 in a"
        " response_package, and values after treatment."
    ),
    severities=("caution",),
    todo="Write use = after, or say why the response cannot be relied on yet.",
    sources=(ANAO, HMT_BIAS),
)
def treatment_paid_not_counted(estimate: Estimate, _settings: Settings) -> Verdict:
    """Find events that are held in full although their response is in the base."""
    if not estimate.open_events:
        return NotApplicable("The estimate has no open events.")
    return [
        Hit(
            severity="caution",
            where=event.id,
            message=(
                f"{event.response_package} pays"
                f" {money(event.response_cost, estimate.currency)} for the response to"
                f" {event.label}, which is counted before treatment."
            ),
        )
        for event in estimate.open_events
        if event.use == "before"
        and event.response_cost
        and event.response_package
        and (event.after_impact is not None or event.after_probability is not None)
    ]


CHECKS = (
    treatment_not_funded,
    treatment_overdue,
    treatment_makes_worse,
    treatment_paid_not_counted,
)
