"""Checks of what contingency may pay for: contract, scope, exclusions."""

from __future__ import annotations

import re

from contingency.assurance.counted_twice import words_of
from contingency.assurance.declaration import (
    Hit,
    NotApplicable,
    Source,
    Verdict,
    input_check,
)
from contingency.assurance.settings import Settings, Threshold
from contingency.assurance.wording import counted, listed, percent
from contingency.estimate.nouns import Estimate

ACT_STEP_4 = Source(
    "ACT Treasury guidance, step 4: allocate retained and transferred risk", "READ"
)
FTA_CONTRACT = Source(
    "FTA oversight procedure: review of risk allocation in third-party contracts",
    "READ",
)
NZ_RETAINED = Source(
    "New Zealand review: transferred and retained risk against funding contingency",
    "READ",
)
DOE_430 = Source(
    "US Department of Energy G 430.1-1, chapter 11: not for scope additions, major"
    " schedule change, force majeure or budget cuts",
    "READ",
)
NSW_INTENT = Source(
    "New South Wales guidance: no contingency beyond the intent of the business case",
    "READ",
)
ARMY = Source(
    "US Army guide UFC 3-700: contingency is no prediction of scope change", "READ"
)

CONTRACT_CLASS = Threshold(
    name="contract_needed_to_class",
    default=2,
    unit="",
    grade="H",
    meaning="contract is needed up to class",
    least=1,
    most=5,
)
EXCLUDED_WORDS = Threshold(
    name="excluded_words",
    default=0.6,
    unit="of the words of an event's name",
    grade="H",
    meaning="an exclusion names the event from",
    most=1,
)
FEWEST_WORDS = 2
"""Titles with fewer words that say something are not compared: too much by chance."""


@input_check(
    slug="transferred-risk-funded",
    subject="systemic risks and events",
    title="Someone else's risk",
    catches="The owner's contingency paying for a risk that the contract passed on.",
    rule=(
        "No open event has contract = transferred: only what the owner retains is"
        " entered, and the rest is priced in a package."
    ),
    severities=("major",),
    todo="Close the event, or enter the retained part as shared or retained.",
    sources=(ACT_STEP_4, FTA_CONTRACT, NZ_RETAINED),
)
def transferred_risk_funded(estimate: Estimate, _settings: Settings) -> Verdict:
    """Find open events that the contract has transferred."""
    if not any(event.contract for event in estimate.open_events):
        return NotApplicable("No open event has anything under contract.")
    return [
        Hit(
            severity="major",
            where=event.id,
            message=(
                f"{event.label} is marked transferred"
                + (f" ({event.clause})" if event.clause else "")
                + " but still draws contingency."
            ),
        )
        for event in estimate.open_events
        if event.contract == "transferred"
    ]


@input_check(
    slug="contract-share-missing",
    subject="systemic risks and events",
    title="Allocation of a risk not stated",
    catches="Events of which nobody knows who pays under the contract.",
    rule=(
        "Once one event has something under contract, or the class is mature, each"
        " open event has; shared comes with retained_share; shared and transferred"
        " come with a clause."
    ),
    thresholds=(CONTRACT_CLASS,),
    severities=("major", "caution"),
    todo="Write retained, transferred or shared, the share and the clause.",
    sources=(ACT_STEP_4, FTA_CONTRACT),
)
def contract_share_missing(estimate: Estimate, settings: Settings) -> Verdict:
    """Find events whose allocation under the contract is not complete."""
    events, of_class = estimate.open_events, estimate.estimate_class
    begun = any(event.contract for event in events)
    mature = of_class is not None and of_class <= settings.number(CONTRACT_CLASS)
    if not events or not (begun or mature):
        return NotApplicable("No open event has anything under contract yet.")
    hits: list[Hit] = []
    silent = [event.id for event in events if event.contract is None]
    if silent:
        message = (
            f"Of {len(events)} open events {counted(len(silent), 'does', 'do')} not say"
            f" who carries the cost under the contract: {listed(silent)}."
        )
        hits.append(Hit(severity="major", rows=tuple(silent), message=message))
    hits += [
        Hit(
            severity="major",
            where=event.id,
            message=f"{event.label} is shared, but the retained share is not stated.",
        )
        for event in events
        if event.contract == "shared" and event.retained_share is None
    ]
    bare = [
        event.id
        for event in events
        if event.contract in ("shared", "transferred") and not event.clause
    ]
    if bare:
        message = (
            f"{counted(len(bare), 'event')} are shared or transferred without a clause"
            f" of the contract: {listed(bare)}."
        )
        hits.append(Hit(severity="caution", rows=tuple(bare), message=message))
    return hits


@input_check(
    slug="scope-as-risk",
    subject="systemic risks and events",
    title="Scope change dressed as risk",
    catches="Contingency used for additions, changes of policy or improvements.",
    rule=(
        "No open event has in_scope = no; once one event says yes or no, each open"
        " event does."
    ),
    severities=("major", "caution"),
    todo="Take the event out and carry it as a change of scope.",
    sources=(DOE_430, NSW_INTENT, ARMY),
)
def scope_as_risk(estimate: Estimate, _settings: Settings) -> Verdict:
    """Find open events that lie outside the approved scope."""
    events = estimate.open_events
    if all(event.in_scope is None for event in events):
        return NotApplicable("No open event has anything under in_scope.")
    hits = [
        Hit(
            severity="major",
            where=event.id,
            message=(
                f"{event.label} lies outside the approved scope, but draws contingency."
            ),
        )
        for event in events
        if event.in_scope is False
    ]
    silent = [event.id for event in events if event.in_scope is None]
    if silent:
        message = (
            f"Of {len(events)} open events {counted(len(silent), 'does', 'do')} not say"
            f" whether the approved scope covers the cause: {listed(silent)}."
        )
        hits.append(Hit(severity="caution", rows=tuple(silent), message=message))
    return hits


@input_check(
    slug="excluded-yet-funded",
    subject="systemic risks and events",
    title="Excluded and yet funded",
    catches="An event that the exclusions keep out and the register pays for.",
    rule="Share of the words of an open event's name that one exclusion holds.",
    thresholds=(EXCLUDED_WORDS,),
    severities=("major",),
    todo="Close the event, or narrow the exclusion.",
    sources=(DOE_430, NSW_INTENT),
)
def excluded_yet_funded(estimate: Estimate, settings: Settings) -> Verdict:
    """Find open events that an exclusion describes."""
    exclusions = estimate.statements.exclusions
    if not exclusions or not estimate.open_events:
        return NotApplicable("There are no exclusions, or no open events.")
    hits: list[Hit] = []
    for event in estimate.open_events:
        words = words_of(event.name)
        if len(words) < FEWEST_WORDS:
            continue
        for exclusion in exclusions:
            share = len(words & words_of(exclusion.text)) / len(words)
            if share >= settings.number(EXCLUDED_WORDS):
                message = (
                    f"Exclusion {exclusion.id} holds {percent(share)} of the words of"
                    f" {event.label}, which draws contingency."
                )
                hits.append(Hit(severity="major", where=event.id, message=message))
                break
    return hits


@input_check(
    slug="held-twice",
    subject="allocation and holding",
    title="Held in two places",
    catches="One risk that contingency and another budget both pay for.",
    rule="No exclusion names the id of an open event.",
    severities=("stop",),
    todo="Close the event, or take its id out of the exclusion.",
    sources=(
        Source(
            "US National Research Council (2001): no consistent policy on size or"
            " control of reserves",
            "READ",
        ),
        Source("FTA: allocated and unallocated contingency", "READ"),
    ),
)
def held_twice(estimate: Estimate, _settings: Settings) -> Verdict:
    """Find open events that an exclusion says are carried elsewhere."""
    exclusions = estimate.statements.exclusions
    if not exclusions or not estimate.open_events:
        return NotApplicable("There are no exclusions, or no open events.")
    return [
        Hit(
            severity="stop",
            where=event.id,
            message=(
                f"Exclusion {exclusion.id} says that {event.label} is carried"
                f" by {exclusion.carried_by or 'others'}, but it is funded here too."
            ),
        )
        for event in estimate.open_events
        for exclusion in exclusions
        if re.search(rf"(?<![\w-]){re.escape(event.id)}(?![\w-])", exclusion.text)
    ]


CHECKS = (
    transferred_risk_funded,
    contract_share_missing,
    scope_as_risk,
    excluded_yet_funded,
    held_twice,
)
