"""Risk events of one block: which happen in which trial, and what they cost.

An event that happens once is one mixed distribution: with the uniform u below its
probability p it happens, and u / p, which is uniform again, is the place on its
impact curve.  One stratified stream therefore carries both, and a changed
probability moves the impacts as little as it can.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray
from scipy.special import ndtri

from contingency.quantities.draws import (
    BLOCK,
    Source,
    plain_uniforms,
    strata,
    uniforms,
)
from contingency.simulation.cost_model import CostModel, Repeated

Array = NDArray[np.float64]

_SMALLEST = 2.0**-53
Occurrences = tuple[NDArray[np.int64], Array]
"""Trials in which an event happens, and the place on its impact curve in each."""


@dataclass(frozen=True, kw_only=True, slots=True)
class DrawnEvents:
    """The events of one block; ``e`` events, ``n`` trials."""

    cost: Array
    """(e, n) money; negative for an opportunity, 0 where it does not happen."""
    occurs: NDArray[np.bool_]
    """(e, n)"""


def draw_events(model: CostModel, block: int, source: Source) -> DrawnEvents:
    """Return the events of one block in the order of the model."""
    count = len(model.events)
    drawn = DrawnEvents(
        cost=np.zeros((count, BLOCK)), occurs=np.zeros((count, BLOCK), dtype=np.bool_)
    )
    happening = _draw_units(model, block, source)
    repeated = {r.event: r for r in model.repeated}
    for event in model.event_order:
        parent = model.parents[event]
        allowed = None if parent is None else drawn.occurs[parent]
        if event in repeated:
            _repeat(model, repeated[event], block, source, allowed, drawn)
            continue
        trials, place = happening[event]
        if allowed is not None:
            kept = allowed[trials]
            happening[event] = trials[kept], place[kept]
        drawn.occurs[event, happening[event][0]] = True
    _cost_once(model, happening, drawn)
    return drawn


def _cost_once(
    model: CostModel, happening: dict[int, Occurrences], drawn: DrawnEvents
) -> None:
    """Cost all events that happen once, in one go over all their occurrences."""
    by_row = sorted(happening, key=lambda event: int(model.impact_row[event]))
    if not by_row:
        return
    counts = [happening[event][0].size for event in by_row]
    trials = np.concatenate([happening[event][0] for event in by_row])
    place = np.concatenate([happening[event][1] for event in by_row])
    cost = _impact(model, np.repeat(model.impact_row[by_row], counts), place)
    cost *= np.repeat([model.events[event].sign for event in by_row], counts)
    drawn.cost[np.repeat(by_row, counts), trials] = cost


def _draw_units(model: CostModel, block: int, source: Source) -> dict[int, Occurrences]:
    """Return for each event its trials, parents put aside, and places on the curve."""
    cells = strata(source, [unit.stream for unit in model.units], block)
    u = uniforms(cells)
    result = {}
    for row, unit in enumerate(model.units):
        for member in unit.members:
            first = int(np.floor(member.start * BLOCK))
            last = int(np.ceil(member.stop * BLOCK))
            at = u[row, first:last]
            kept = (at >= member.start) & (at < member.stop)
            place = (at[kept] - member.start) / (member.stop - member.start or 1.0)
            result[member.event] = (cells.trial[row, first:last][kept], place)
    return result


def _impact(model: CostModel, row: NDArray[np.int64], place: Array) -> Array:
    """Return the cost at places in [0, 1) of the impact curves `row`, ascending."""
    score = np.asarray(ndtri(np.clip(place, _SMALLEST, 1.0 - _SMALLEST)))
    cost = np.empty_like(score)
    model.impacts.read_each(score, row, cost)
    return cost


def _repeat(
    model: CostModel,
    repeated: Repeated,
    block: int,
    source: Source,
    allowed: NDArray[np.bool_] | None,
    drawn: DrawnEvents,
) -> None:
    """Draw an event that may happen several times; its count is stratified."""
    event = repeated.event
    cells = strata(source, [repeated.stream], block)
    times = np.empty(BLOCK, dtype=np.int64)
    times[cells.trial[0]] = np.searchsorted(
        repeated.chances, uniforms(cells)[0], side="right"
    )
    if allowed is not None:
        times[~allowed] = 0
    drawn.occurs[event] = times > 0
    for turn in range(1, int(times.max()) + 1):
        trials = np.flatnonzero(times >= turn)
        place = plain_uniforms(source.raw(f"{repeated.stream}/{turn}", block))
        row = np.full(trials.size, model.impact_row[event])
        cost = _impact(model, row, place[trials])
        drawn.cost[event, trials] += model.events[event].sign * cost
