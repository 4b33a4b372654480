"""How events are tied to one another: what requires and excludes what."""

from __future__ import annotations

from collections.abc import Iterator
from itertools import combinations
from math import fsum

from contingency.estimate.fault_list import Problem, instead, listed, shown
from contingency.estimate.faults import (
    ExcludesIncomplete,
    ExcludesOccurred,
    ExcludesRepeated,
    ExcludesTooLikely,
    IdUnknown,
    RequiresCircle,
    RequiresClosed,
    RequiresExcluded,
    SelfReference,
)
from contingency.estimate.nouns import RiskEvent
from contingency.estimate.rows import Row
from contingency.estimate.tables import Table

MOST_PAIRS_NAMED = 3
"""Missing pairs of one group that a message names."""


def tie(table: Table, events: tuple[RiskEvent, ...]) -> tuple[RiskEvent, ...]:
    """Return the events, each with all others of its group of exclusive events.

    Notes what is wrong with `requires` and `excludes`, of rows with faults too.
    """
    rows: dict[str, Row] = {}
    for row in table.rows:
        if row.cell("id"):
            rows.setdefault(row.cell("id"), row)
    groups = _groups(table, rows)
    _check_requires(table, rows, groups)
    for group in {id(group): group for group in groups.values()}.values():
        _check_group(group, rows, events)
    return tuple(
        event.model_copy(
            update={"excludes": tuple(m for m in groups[event.id] if m != event.id)}
        )
        if event.id in groups
        else event
        for event in events
    )


def _is_open(row: Row) -> bool:
    """Whether the event of the row is simulated."""
    return row.cell("status") in {"", "open"}


def _check_requires(
    table: Table, rows: dict[str, Row], groups: dict[str, list[str]]
) -> None:
    """Note conditions that do not exist, cannot come true or lead in a circle."""
    known = table.known_ids
    in_known_circle: set[str] = set()
    for event_id, row in rows.items():
        parent = row.cell("requires")
        if not parent:
            continue
        if parent == event_id:
            found = f"The event requires itself, {shown(parent)}."
            remedy = "Name the event that must have happened before."
            row.refuse("requires", Problem(SelfReference, found, remedy))
        elif known is not None and parent not in known:
            found = f"events.csv has no event {shown(parent)}."
            remedy = instead(parent, known, "Write the id of one event.")
            row.refuse("requires", Problem(IdUnknown, found, remedy))
        else:
            _check_ancestors(event_id, rows, groups, in_known_circle)


def _check_ancestors(
    event_id: str,
    rows: dict[str, Row],
    groups: dict[str, list[str]],
    in_known_circle: set[str],
) -> None:
    """Note an ancestor that is closed, excluded, or the event itself."""
    row = rows[event_id]
    chain = [event_id, *_ancestors(event_id, rows)]
    if chain[-1] == event_id and not in_known_circle & set(chain):
        in_known_circle |= set(chain)
        found = f"{' requires '.join(chain[:8])}."
        remedy = "Leave requires blank for the event that comes first."
        row.refuse("requires", Problem(RequiresCircle, found, remedy))
    parent = rows.get(chain[1])
    if parent and _is_open(row) and parent.cell("status") == "closed":
        found = f"The event is open; {chain[1]}, which it requires, is closed."
        remedy = "Close this event too, or reopen the other one."
        row.refuse("requires", Problem(RequiresClosed, found, remedy))
    group = groups.get(event_id, [])
    excluded = next((a for a in chain[1:] if a in group and a != event_id), None)
    if excluded:
        found = f"{event_id} requires {excluded} and excludes it."
        remedy = "Remove one of the two ties."
        row.refuse("requires", Problem(RequiresExcluded, found, remedy))


def _ancestors(event_id: str, rows: dict[str, Row]) -> Iterator[str]:
    """Yield what an event requires, what that requires, and so on, each once."""
    passed: set[str] = set()
    row = rows.get(event_id)
    while row is not None:
        parent = row.cell("requires")
        if not parent or parent in passed:
            return
        passed.add(parent)
        yield parent
        row = rows.get(parent)


def _groups(table: Table, rows: dict[str, Row]) -> dict[str, list[str]]:
    """Return, for every event with excludes, all events joined to it, in file order.

    Events of one group share one list.
    """
    joined: dict[str, set[str]] = {}
    for event_id, row in rows.items():
        for other in _excluded(row, table):
            joined.setdefault(event_id, set()).add(other)
            joined.setdefault(other, set()).add(event_id)
    position = {event_id: i for i, event_id in enumerate(rows)}
    groups: dict[str, list[str]] = {}
    for event_id in joined:
        if event_id in groups:
            continue
        found, waiting = {event_id}, [event_id]
        while waiting:
            fresh = joined[waiting.pop()] - found
            found |= fresh
            waiting += fresh
        group = sorted(found, key=lambda member: position.get(member, len(rows)))
        groups.update(dict.fromkeys(group, group))
    return groups


def _excluded(row: Row, table: Table) -> list[str]:
    """Return the events that the cell `excludes` names, and note wrong ones."""
    if not row.cell("excludes"):
        return []
    known = table.known_ids
    named = []
    for other in row.entries("excludes") or []:
        if other == row.cell("id"):
            found = f"The event excludes itself, {shown(other)}."
            remedy = "Name the other events that cannot happen together with it."
            row.refuse("excludes", Problem(SelfReference, found, remedy))
        elif known is not None and other not in known:
            found = f"events.csv has no event {shown(other)}."
            remedy = instead(other, known, "Write ids of events.")
            row.refuse("excludes", Problem(IdUnknown, found, remedy))
        else:
            named.append(other)
    return named


def _check_group(
    group: list[str], rows: dict[str, Row], events: tuple[RiskEvent, ...]
) -> None:
    """Note what keeps joined events from excluding one another."""
    members = {member: rows[member] for member in group if member in rows}
    excluded = {m: set(row.entries("excludes") or []) for m, row in members.items()}
    missing = [
        (a, b)
        for a, b in combinations(members, 2)
        if b not in excluded[a] and a not in excluded[b]
    ]
    if missing:
        pairs = [f"{a} and {b}" for a, b in missing[:MOST_PAIRS_NAMED]]
        more = len(missing) - len(pairs)
        found = f"{'; '.join(pairs)} are not said to exclude each other"
        found += f", nor are {more} other pairs." if more else "."
        first, second = missing[0]
        remedy = f"Add {second} to the excludes of {first}, or split the group."
        members[first].refuse("excludes", Problem(ExcludesIncomplete, found, remedy))
    occurred = [m for m, row in members.items() if row.cell("status") == "occurred"]
    for member, row in members.items():
        if row.cell("happens") == "repeatedly":
            found = (
                f"The event happens repeatedly and excludes {_others(group, member)}."
            )
            remedy = "Write once under happens, or remove the tie."
            row.refuse("happens", Problem(ExcludesRepeated, found, remedy))
        if occurred and _is_open(row):
            found = (
                f"The event is open; {occurred[0]}, which excludes it, has occurred."
            )
            remedy = "Close this event."
            row.refuse("status", Problem(ExcludesOccurred, found, remedy))
    _check_probabilities(members, events)


def _others(group: list[str], member: str) -> str:
    """Return the other members of a group, in words."""
    return listed([other for other in group if other != member], "and")


def _check_probabilities(
    members: dict[str, Row], events: tuple[RiskEvent, ...]
) -> None:
    """Note open events that exclude one another and are more than certain."""
    used = {
        event.id: event.probability_used
        for event in events
        if event.id in members and event.is_open
    }
    total = fsum(p for p in used.values() if p is not None)
    if total > 1 + 1e-12 * len(used):
        found = f"The probabilities of {listed(used, 'and')} sum to {total:.10g}."
        remedy = "Correct the probabilities, or remove an event from the group."
        first = members[next(iter(used))]
        first.refuse("excludes", Problem(ExcludesTooLikely, found, remedy))
