"""The movement of risks: opened, closed, occurred, assessed anew, treated."""

from __future__ import annotations

import datetime as dt
from collections.abc import Sequence
from dataclasses import dataclass
from typing import Literal

from contingency.estimate.nouns import RiskEvent
from contingency.tracking.bridge import Step
from contingency.tracking.families import Family
from contingency.tracking.matching import Match
from contingency.tracking.moves import event_family, lines_about

Movement = Literal[
    "opened",
    "closed",
    "occurred",
    "treated",
    "reassessed",
    "unchanged",
    "closed before",
    "occurred before",
    "left out",
]
"""What became of an event; "left out" is one that left the register unrecorded."""

_MOVEMENTS: dict[Family, Movement] = {
    Family.NEW_EVENTS: "opened",
    Family.CLOSED_EVENTS: "closed",
    Family.OCCURRED: "occurred",
    Family.TREATMENT: "treated",
    Family.REASSESSED: "reassessed",
}


@dataclass(frozen=True, kw_only=True, slots=True)
class RiskState:
    """An event as one revision has it, in the state that is used."""

    status: str
    chance: float | None
    """Probability, or expected number of occurrences where it happens repeatedly."""
    mean_impact: float | None
    """Mean cost of one occurrence, money of the later price date; negative for an
    opportunity; None where the event is not open."""
    use: str


@dataclass(frozen=True, kw_only=True, slots=True)
class RiskMovement:
    """One line of the table of risk movements."""

    id: str
    name: str
    kind: str
    movement: Movement
    old: RiskState | None
    new: RiskState | None
    chance_moved: bool
    impact_moved: bool
    contingency: float
    """Effect on the contingency, money; negative where money was released."""
    base: float
    """Base that moved because of it: its cost once it occurred, or its treatment."""
    reason: str
    by: str
    on: dt.date | None
    evidence: str
    """Basis that the register gives now."""

    @property
    def released(self) -> float:
        """Contingency that a closed event set free, money; 0 for others."""
        return -self.contingency if self.movement in {"closed", "left out"} else 0.0


def risk_movements(pair: Match, steps: Sequence[Step]) -> tuple[RiskMovement, ...]:
    """Return a line for every event of either revision, in file order.

    Closed and occurred events stay in the table for good.
    """
    effect = {
        row.id: row.contingency
        for step in steps
        for row in step.rows
        if row.file == "events"
    }
    old = {e.id: e for e in pair.earlier.events}
    new = {e.id: e for e in pair.later.events}
    return tuple(
        _movement(pair, old.get(name), new.get(name), effect.get(name, 0.0))
        for name in dict.fromkeys((*new, *old))
    )


def _movement(
    pair: Match, old: RiskEvent | None, new: RiskEvent | None, effect: float
) -> RiskMovement:
    event = new or old
    assert event is not None  # noqa: S101  (one of the two named it)
    lines = lines_about(pair, "events", (event.id,))
    before, after = _state(old), _state(new)
    dated = [line.on for line in lines if line.on]
    given = event.evidence.given_on
    return RiskMovement(
        id=event.id,
        name=event.name,
        kind=event.kind,
        movement=_kind_of_movement(pair, old, new),
        old=before,
        new=after,
        chance_moved=bool(before and after and before.chance != after.chance),
        impact_moved=bool(before and after and before.mean_impact != after.mean_impact),
        contingency=effect,
        base=_base_of(pair, event.id),
        reason=" ".join(dict.fromkeys(line.reason for line in lines)),
        by=", ".join(dict.fromkeys(line.by for line in lines)),
        on=dated[-1] if dated else given,
        evidence=event.evidence.basis,
    )


def _state(event: RiskEvent | None) -> RiskState | None:
    if event is None:
        return None
    impact: float | None = None
    if event.is_open:
        impact = event.sign * event.impact_used.distribution.mean
    chance = event.probability_used
    if event.happens == "repeatedly":
        chance = event.frequency_used
    return RiskState(
        status=event.status, chance=chance, mean_impact=impact, use=event.use
    )


def _kind_of_movement(
    pair: Match, old: RiskEvent | None, new: RiskEvent | None
) -> Movement:
    family = event_family(pair, old, new)
    if new is None:
        return "left out"
    if family is not None:
        return _MOVEMENTS[family]
    if new.status == "closed":
        return "closed before" if old is not None else "closed"
    if new.status == "occurred":
        return "occurred before" if old is not None else "occurred"
    return "unchanged"


def _base_of(pair: Match, event_id: str) -> float:
    """Return the base change that changes.csv puts down to an event, money."""
    total = 0.0
    base = {p.id: p.base for p in pair.later.packages}
    before = {p.id: p.base for p in pair.earlier.packages}
    for line in pair.later.changes:
        if line.event != event_id or line.file != "packages":
            continue
        if line.amount is not None:
            total += line.amount
            continue
        others = [
            other.amount or 0.0
            for other in pair.later.changes
            if other.file == "packages" and other.id == line.id and other is not line
        ]
        whole = base.get(line.id, 0.0) - before.get(line.id, 0.0)
        total += whole - sum(others)
    return total
