"""Checks of the register of events as a whole: alive, reviewed, two-sided."""

from __future__ import annotations

import datetime as dt

from contingency.assurance.declaration import (
    COMMON_PRACTICE,
    Hit,
    NotApplicable,
    Source,
    Verdict,
    input_check,
)
from contingency.assurance.settings import Settings, Threshold
from contingency.assurance.wording import counted, listed
from contingency.estimate.nouns import Estimate

GAO_UPDATE = Source(
    "GAO cost guide, page on updating a risk and uncertainty analysis: risks retire,"
    " change and appear",
    "READ",
)
NSW_REVIEW = Source(
    "New South Wales guidance on contingency: calculated anew as the risk profile"
    " changes",
    "READ",
)
GAO_BOTH = Source("GAO-20-195G: threats and opportunities", "READ")

REVIEW_AGE = Threshold(
    name="register_review_days",
    default=90,
    unit="days",
    grade="H",
    meaning="caution above",
)
FEW_EVENTS = Threshold(
    name="fewest_events",
    default=5,
    unit="events",
    grade="H",
    meaning="fewest events on a large project",
)
LARGE_PROJECT = Threshold(
    name="large_project_packages",
    default=20,
    unit="packages",
    grade="H",
    meaning="a project is large from",
)
BOXES = Threshold(
    name="scoring_boxes",
    default=5,
    unit="different probabilities",
    grade="H",
    meaning="most that look like scoring boxes",
)
BOXED_EVENTS = Threshold(
    name="scoring_boxes_events",
    default=15,
    unit="events",
    grade="H",
    meaning="looks at more than",
)

NO_OPEN_EVENTS = NotApplicable("The estimate has no open events.")


@input_check(
    slug="dead-risks",
    subject="systemic risks and events",
    title="Dead risks still alive",
    catches="Events that can no longer happen and are still paid for.",
    rule="The window of an open event ends before the data date.",
    severities=("major",),
    todo="Close the event, so that the release shows in the bridge, or correct it.",
    sources=(GAO_UPDATE, NSW_REVIEW),
)
def dead_risks(estimate: Estimate, _settings: Settings) -> Verdict:
    """Find open events whose window has closed."""
    if not estimate.open_events:
        return NO_OPEN_EVENTS
    return [
        Hit(
            severity="major",
            where=event.id,
            message=(
                f"The window of {event.label} closed on {event.window_finish}, before"
                f" the data date {estimate.data_date}, but the event is open."
            ),
        )
        for event in estimate.open_events
        if event.window_finish is not None and event.window_finish < estimate.data_date
    ]


@input_check(
    slug="occurred-events",
    subject="systemic risks and events",
    title="Events that have happened",
    catches="The cost of an event that happened and reached neither base nor forecast.",
    rule="Status occurred: such an event is not simulated, so its cost is in the base.",
    severities=("note",),
    todo="Confirm that the forecast cost is in the base of the packages it hit.",
    sources=(GAO_UPDATE,),
)
def occurred_events(estimate: Estimate, _settings: Settings) -> Verdict:
    """List the events whose cost must be in the base by now."""
    occurred = [event for event in estimate.events if event.status == "occurred"]
    if not occurred:
        return NotApplicable("No event has the status occurred.")
    message = (
        f"{counted(len(occurred), 'event')} happened and"
        f" {'is' if len(occurred) == 1 else 'are'} no longer simulated:"
        f" {listed(event.label for event in occurred)}."
    )
    return [Hit(severity="note", rows=tuple(e.id for e in occurred), message=message)]


@input_check(
    slug="register-not-reviewed",
    subject="systemic risks and events",
    title="Register not reviewed",
    catches="Events that nobody has looked at for months.",
    rule=(
        "Days from reviewed_on to the data date; and next_review lies before the data"
        " date."
    ),
    thresholds=(REVIEW_AGE,),
    severities=("caution",),
    todo="Review these events with their owners and write the date.",
    sources=(GAO_UPDATE, NSW_REVIEW),
)
def register_not_reviewed(estimate: Estimate, settings: Settings) -> Verdict:
    """Find open events whose review is overdue."""
    dated = [e for e in estimate.open_events if e.reviewed_on or e.next_review]
    if not dated:
        return NotApplicable("No open event has a date of review.")
    today, allowed = estimate.data_date, dt.timedelta(settings.number(REVIEW_AGE))
    late = [
        event
        for event in dated
        if (event.next_review is not None and event.next_review < today)
        or (event.reviewed_on is not None and today - event.reviewed_on > allowed)
    ]
    if not late:
        return []
    message = (
        f"{counted(len(late), 'open event')} had no review for more than"
        f" {allowed.days} days on the data date or missed the next one:"
        f" {listed(event.id for event in late)}."
    )
    return [Hit(severity="caution", rows=tuple(e.id for e in late), message=message)]


@input_check(
    slug="no-opportunities",
    subject="systemic risks and events",
    title="No opportunities",
    catches="A register of threats only.",
    rule="At least one open event is an opportunity.",
    severities=("note",),
    todo="Ask for savings that may or may not come, or say that none is seen.",
    sources=(GAO_BOTH,),
)
def no_opportunities(estimate: Estimate, _settings: Settings) -> Verdict:
    """Find registers without any opportunity."""
    if not estimate.open_events:
        return NO_OPEN_EVENTS
    if any(event.kind == "opportunity" for event in estimate.open_events):
        return []
    message = (
        f"All {counted(len(estimate.open_events), 'open event')} are threats; no"
        " saving is modelled."
    )
    return [Hit(severity="note", message=message)]


@input_check(
    slug="no-threats",
    subject="systemic risks and events",
    title="No threats",
    catches="A register of savings only, or an empty one.",
    rule="At least one open event is a threat.",
    severities=("caution",),
    todo="Ask what could go wrong, or say where such cost is carried.",
    sources=(GAO_BOTH,),
)
def no_threats(estimate: Estimate, _settings: Settings) -> Verdict:
    """Find registers without any threat."""
    if any(event.kind == "threat" for event in estimate.open_events):
        return []
    found = len(estimate.open_events)
    message = (
        f"All {counted(found, 'open event')} are opportunities."
        if found
        else "The estimate has no open events; nothing that may happen is modelled."
    )
    return [Hit(severity="caution", message=message)]


@input_check(
    slug="few-events",
    subject="systemic risks and events",
    title="Few events for a large project",
    catches="A register that was not thought through.",
    rule="Number of open events, where the project is large by its packages.",
    thresholds=(FEW_EVENTS, LARGE_PROJECT),
    severities=("caution",),
    todo="Go through the packages and interfaces one by one with those who will do it.",
    sources=(COMMON_PRACTICE,),
)
def few_events(estimate: Estimate, settings: Settings) -> Verdict:
    """Find large projects with next to no events."""
    size, count = len(estimate.packages), len(estimate.open_events)
    if size < settings.number(LARGE_PROJECT):
        return NotApplicable(f"The project has {counted(size, 'package')}.")
    if count >= settings.number(FEW_EVENTS):
        return []
    message = f"{counted(count, 'open event')} for {counted(size, 'package')}."
    return [Hit(severity="caution", message=message)]


@input_check(
    slug="scoring-boxes",
    subject="systemic risks and events",
    title="Probabilities from scoring boxes",
    catches="Probabilities read off a five-box matrix instead of being estimated.",
    rule="Number of different probabilities among many open events that happen once.",
    thresholds=(BOXES, BOXED_EVENTS),
    severities=("caution",),
    todo="Estimate the chance of the events that matter most one by one.",
    sources=(Source("papers that criticise scoring boxes", "MEMORY"),),
)
def scoring_boxes(estimate: Estimate, settings: Settings) -> Verdict:
    """Find registers with a handful of different probabilities."""
    once = [event for event in estimate.open_events if event.happens == "once"]
    if len(once) <= settings.number(BOXED_EVENTS):
        return NotApplicable(
            f"{counted(len(once), 'open event')} that"
            f" {'happens' if len(once) == 1 else 'happen'} once; it looks at more than"
            f" {settings.number(BOXED_EVENTS):g}."
        )
    different = {event.probability_used for event in once}
    if len(different) > settings.number(BOXES):
        return []
    message = (
        f"The probabilities of all {counted(len(once), 'open event')} come from"
        f" {counted(len(different), 'value')}:"
        f" {listed(f'{p:g}' for p in sorted(different, key=lambda p: p or 0) if p)}."
    )
    return [Hit(severity="caution", message=message)]


CHECKS = (
    dead_risks,
    occurred_events,
    register_not_reviewed,
    no_opportunities,
    no_threats,
    few_events,
    scoring_boxes,
)
