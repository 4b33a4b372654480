"""What moved, and in which family: base amounts by package, events by their state."""

from __future__ import annotations

import math
from collections.abc import Mapping

from contingency.estimate.changes import BASE_FAMILIES, TREATMENT
from contingency.estimate.nouns import Change, CostRange, RiskEvent
from contingency.tracking.families import Family
from contingency.tracking.matching import Match, PackageUnit
from contingency.tracking.restating import is_price_line

Moves = Mapping[Family, float]
"""Money by family; the sum is the whole base change."""

CLOSED_TO = 1e-9
"""Part of the larger base below which a rest is the rounding of floats."""


def lines_about(match: Match, file: str, ids: tuple[str, ...]) -> tuple[Change, ...]:
    """Return the lines of changes.csv about a row, by its new or its old id."""
    names = {*ids, *(match.old_id(file, i) for i in ids)}
    return tuple(
        change
        for change in match.later.changes
        if change.file == file and (change.id in names or names & {*change.into})
    )


def base_moves(match: Match, unit: PackageUnit) -> Moves:
    """Return the base change of a unit by family; what no line explains is its own.

    A line without amount explains what the others leave.  Empty where nothing moved
    and no line says that it did.
    """
    change = unit.base_after - unit.base_before
    largest = max(abs(unit.base_after), abs(unit.base_before))
    moves: dict[Family, float] = {}
    rest_family = Family.UNEXPLAINED
    for line in lines_about(match, "packages", unit.ids):
        if line.family not in BASE_FAMILIES:
            continue
        if line.amount is None:
            rest_family = Family(line.family)
        else:
            family = Family(line.family)
            moves[family] = moves.get(family, 0.0) + line.amount
    rest = change - math.fsum(moves.values())
    appears = not unit.before or not unit.after
    if abs(rest) > CLOSED_TO * largest or (appears and not moves):
        moves[rest_family] = moves.get(rest_family, 0.0) + rest
    return moves


def event_family(
    match: Match, before: RiskEvent | None, after: RiskEvent | None
) -> Family | None:
    """Return the family of an event's movement; None where its draws stay the same.

    An event that left the register without being closed counts as closed.
    """
    was_open = before is not None and before.is_open
    is_open = after is not None and after.is_open
    event = after or before
    if event is None or not (was_open or is_open):
        return None
    if before is None or after is None or was_open != is_open:
        if event.id in match.event_successors:
            return Family.REASSESSED
        if is_open:
            return Family.NEW_EVENTS
        occurred = after is not None and after.status == "occurred"
        return Family.OCCURRED if occurred else Family.CLOSED_EVENTS
    if draws_alike(before, after, known=_common_events(match)):
        return None
    lines = lines_about(match, "events", (event.id,))
    declared = any(line.family == TREATMENT for line in lines)
    turned = before.use != after.use
    return Family.TREATMENT if turned or declared else Family.REASSESSED


def _common_events(match: Match) -> set[str]:
    """Return the ids of the events that both revisions have."""
    return {e.id for e in match.earlier.events} & {e.id for e in match.later.events}


def draws_alike(before: RiskEvent, after: RiskEvent, *, known: set[str]) -> bool:
    """Whether two states of an open event are simulated in the same way.

    Of the events that it excludes only those count that both revisions know: one that
    is new or gone brings the tie along.
    """
    return (
        before.kind == after.kind
        and before.happens == after.happens
        and before.probability_used == after.probability_used
        and before.frequency_used == after.frequency_used
        and figures(before.impact_used) == figures(after.impact_used)
        and before.requires == after.requires
        and known & {*before.excludes} == known & {*after.excludes}
    )


def figures(cost: CostRange) -> tuple[object, ...]:
    """Return what a range is simulated from."""
    ends = (cost.ends.low_percent, cost.ends.high_percent)
    return (cost.shape, cost.low, cost.likely, cost.high, ends, cost.outcomes)


def by_id(events: tuple[RiskEvent, ...]) -> dict[str, RiskEvent]:
    """Return events by id."""
    return {event.id: event for event in events}


def unused_lines(
    match: Match, units_moved: Mapping[str, Moves], differing: set[tuple[str, str]]
) -> tuple[Change, ...]:
    """Return the lines of changes.csv that explain nothing.

    Parameters
    ----------
    units_moved : mapping
        Base moves by key of the package unit.
    differing : set of (file, id)
        Rows of the difference list, files without their ending.
    """
    moved = {
        name
        for unit in match.units
        if units_moved.get(unit.key)
        for name in (*unit.ids, *(match.old_id("packages", i) for i in unit.ids))
    }
    return tuple(
        line
        for line in match.later.changes
        if not line.before
        and line.id
        and line.id not in moved
        and (line.file, line.id) not in differing
        and not (
            is_price_line(line) and match.earlier.price_date != match.later.price_date
        )
    )
