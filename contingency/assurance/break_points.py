"""How far one input must move, alone, before the request no longer holds.

The request is the target level itself, so the smallest adverse move takes it below
that level by a hair.  It counts as broken once it holds only a level ten points
lower: a choice of ours, printed with the table.
"""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass
from typing import Literal

import numpy as np
from numpy.typing import NDArray

from contingency.assurance.material import Material
from contingency.assurance.trial_set import TrialSet
from contingency.assurance.what_if import (
    most_dependence,
    with_chances,
    with_dependence,
)
from contingency.quantities.percentiles import rank
from contingency.setting.drivers import Driver

Array = NDArray[np.float64]

DRIVERS = 10
"""Drivers that are looked at."""
FURTHEST = 10.0
"""Largest factor that is tried."""
STEPS = 40
"""Halvings of an interval where each costs next to nothing."""
FEW_STEPS = 10
"""Halvings where each simulates again: to 0.1 % of the interval."""

Quantity = Literal[
    "uplift", "chance", "cost factor", "chances", "stretch", "dependence"
]


@dataclass(frozen=True, kw_only=True, slots=True)
class BreakPoint:
    """How far one input must move before the request holds only the lower level."""

    id: str
    """Id of the input; empty for a common judgement."""
    name: str
    kind: Literal["range", "systemic", "event", "judgement"]
    quantity: Quantity
    """What is moved.  stretch: times the distance of a range, or of every range, from
    its base; uplift: fraction added to a systemic risk in every trial; chance:
    probability of the event; cost factor: times the event's cost; chances: times
    every probability and frequency; dependence: the general dependence."""
    now: float
    """Value of the quantity in the estimate."""
    breaks_at: float | None
    """Value at which the request breaks; None where it cannot."""
    furthest: float
    """Largest value that was tried."""
    level_there: int
    """Level that the request still holds at `furthest`, whole percent, 0 to 100;
    the broken level where it breaks."""


def find_break_points(
    material: Material, trials: TrialSet, *, broken_percent: int
) -> tuple[BreakPoint, ...]:
    """Return the break points of the largest drivers and the common judgements.

    Parameters
    ----------
    material : Material
        Results of the issued run, price-date money.
    trials : TrialSet
        Its first blocks.
    broken_percent : int
        The request breaks once it holds only this level.
    """
    at = _Request(material, trials, broken_percent)
    largest = sorted(
        (d for d in material.drivers if d.kind != "cause"),
        key=lambda d: (-abs(d.variance_share), d.id),
    )[:DRIVERS]
    single = [at.of_driver(driver) for driver in largest]
    return (*single, *at.of_judgements())


class _Request:
    """The request on the trials at hand, and what would break it."""

    def __init__(self, material: Material, trials: TrialSet, broken: int) -> None:
        self._trials, self._model = trials, trials.model
        self._estimate = material.estimate
        self._broken = broken
        self._total = trials.total.ravel()
        place = rank(self._total.size, material.target.percent) - 1
        level = float(np.partition(self._total, place)[place])
        asked = material.estimate.requested_total
        extra = 0.0 if asked is None else asked - material.target.total
        self._amount = level + extra

    def of_driver(self, driver: Driver) -> BreakPoint:
        """Return the break point of one driver."""
        if driver.kind == "range":
            return self._of_range(driver)
        if driver.kind == "systemic":
            return self._of_systemic(driver)
        return self._of_event(driver)

    def of_judgements(self) -> tuple[BreakPoint, ...]:
        """Return the break points of ranges, chances and dependence as a whole."""
        return (self._of_all_ranges(), self._of_all_chances(), self._of_dependence())

    def _of_range(self, driver: Driver) -> BreakPoint:
        row = next(i for i, p in enumerate(self._model.packages) if p.id == driver.id)
        base = self._model.base[row]
        apart = np.concatenate(
            [
                (d.value[row] - base) * d.factor(self._model)[row]
                for d in self._trials.drawn
            ]
        )
        return self._searched(
            driver.id,
            driver.name,
            "range",
            "stretch",
            (1.0, FURTHEST),
            lambda f: self._total + (f - 1.0) * apart,
        )

    def _of_systemic(self, driver: Driver) -> BreakPoint:
        column = self._model.systemic.index(driver.id)
        acting = np.concatenate(
            [self._model.acts[:, column] @ d.value for d in self._trials.drawn]
        )
        # A trial holds while x <= (amount - total) / cost acted on, so the break is
        # a quantile of that ratio: exact, and no search.
        room = np.sort((self._amount - self._total) / acting)
        breaks = float(room[room.size - rank(room.size, self._broken)])
        return BreakPoint(
            id=driver.id,
            name=driver.name,
            kind="systemic",
            quantity="uplift",
            now=0.0,
            breaks_at=breaks,
            furthest=breaks,
            level_there=self._broken,
        )

    def _of_event(self, driver: Driver) -> BreakPoint:
        row = next(i for i, e in enumerate(self._model.events) if e.id == driver.id)
        event = self._model.events[row]
        cost = np.concatenate([d.events.cost[row] for d in self._trials.drawn])
        chance = event.probability_used
        if event.happens == "once" and chance is not None and event.kind == "threat":
            return self._of_chance(driver, row, chance)
        if event.kind == "threat":
            # A repeated event: its cost is multiplied, for its rate has no end.
            return self._searched(
                driver.id,
                driver.name,
                "event",
                "cost factor",
                (1.0, FURTHEST),
                lambda f: self._total + (f - 1.0) * cost,
            )
        # An opportunity harms by failing to come: its cost factor falls to nought.
        return self._searched(
            driver.id,
            driver.name,
            "event",
            "cost factor",
            (1.0, 0.0),
            lambda f: self._total + (f - 1.0) * cost,
        )

    def _of_chance(self, driver: Driver, row: int, chance: float) -> BreakPoint:
        """Return the chance of a threat at which the request breaks.

        The request holds with (1 - p) times its level without the event plus p times
        its level with it.  Both are taken from the trials with and without.
        """
        occurs = np.concatenate([d.events.occurs[row] for d in self._trials.drawn])
        holds = self._total <= self._amount
        most = self._most_chance(row)
        if not occurs.any() or occurs.all():
            without, with_it = float(holds.mean()), float(holds.mean())
        else:
            without = float(holds[~occurs].mean())
            with_it = float(holds[occurs].mean())
        goal = self._broken / 100
        breaks: float | None = None
        if without > with_it:
            breaks = (without - goal) / (without - with_it)
        if breaks is not None and not chance <= breaks <= most:
            breaks = None if breaks > most else chance
        there = (1.0 - most) * without + most * with_it
        return BreakPoint(
            id=driver.id,
            name=driver.name,
            kind="event",
            quantity="chance",
            now=chance,
            breaks_at=breaks,
            furthest=most,
            level_there=self._broken if breaks is not None else int(100 * there),
        )

    def _most_chance(self, row: int) -> float:
        """Return the largest chance that events which exclude this one leave it."""
        event = self._model.events[row]
        others = sum(
            other.probability_used or 0.0
            for other in self._model.events
            if other.id in event.excludes
        )
        return max(1.0 - others, event.probability_used or 0.0)

    def _of_all_ranges(self) -> BreakPoint:
        base = self._model.base
        apart = np.concatenate(
            [
                ((d.value - base) * d.factor(self._model)).sum(axis=0)
                for d in self._trials.drawn
            ]
        )
        return self._searched(
            "",
            "All ranges: distance from the base",
            "judgement",
            "stretch",
            (1.0, FURTHEST),
            lambda f: self._total + (f - 1.0) * apart,
        )

    def _of_all_chances(self) -> BreakPoint:
        def total(factor: float) -> Array:
            changed = with_chances(self._estimate, factor)
            if isinstance(changed, str):
                return self._total
            return self._trials.total_of(changed).ravel()

        return self._searched(
            "",
            "All events: probability or frequency",
            "judgement",
            "chances",
            (1.0, FURTHEST),
            total,
            steps=FEW_STEPS,
        )

    def _of_dependence(self) -> BreakPoint:
        now = self._estimate.general_dependence or 0.0

        def total(general: float) -> Array:
            changed = with_dependence(self._estimate, general)
            if isinstance(changed, str):
                return self._total
            return self._trials.total_of(changed).ravel()

        return self._searched(
            "",
            "General dependence of the ranges",
            "judgement",
            "dependence",
            (now, most_dependence(self._estimate)),
            total,
            steps=FEW_STEPS,
        )

    def _searched(
        self,
        id_: str,
        name: str,
        kind: Literal["range", "event", "judgement"],
        quantity: Quantity,
        tried: tuple[float, float],
        total: Callable[[float], Array],
        *,
        steps: int = STEPS,
    ) -> BreakPoint:
        """Return the first value between two at which the request breaks."""
        now, furthest = tried
        there = self._level(total(furthest))
        breaks: float | None = None
        if there < self._broken / 100:
            held, broken = now, furthest
            for _ in range(steps):
                middle = (held + broken) / 2
                if self._level(total(middle)) < self._broken / 100:
                    broken = middle
                else:
                    held = middle
            breaks = broken
        return BreakPoint(
            id=id_,
            name=name,
            kind=kind,
            quantity=quantity,
            now=now,
            breaks_at=breaks,
            furthest=furthest,
            level_there=self._broken if breaks is not None else int(100 * there),
        )

    def _level(self, total: Array) -> float:
        """Return the share of trials in which the amount asked for is enough."""
        return float(np.mean(total <= self._amount))
