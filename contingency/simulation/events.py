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
    event, trial, score = _happenings(model, block, source)
    drawn.occurs[event, trial] = True
    repeated = {r.event: r for r in model.repeated}
    for row in model.event_order:
        parent = model.parents[row]
        allowed = None if parent is None else drawn.occurs[parent]
        if row in repeated:
            _repeat(model, repeated[row], block, source, allowed, drawn)
        elif allowed is not None:
            drawn.occurs[row] &= allowed
    if any(parent is not None for parent in model.parents):
        kept = drawn.occurs[event, trial]
        event, trial, score = event[kept], trial[kept], score[kept]
    cost = np.empty_like(score)
    model.impacts.read_each(score, model.impact_row[event], cost)
    cost *= model.signs[event]
    drawn.cost[event, trial] = cost
    return drawn


def _happenings(
    model: CostModel, block: int, source: Source
) -> tuple[NDArray[np.int64], NDArray[np.int64], Array]:
    """Return event, trial and impact score wherever an event's own choice comes out.

    One (m,) array each, in the order of the impact curves; parents are put aside.
    """
    cells = strata(source, [unit.stream for unit in model.units], block)
    places = model.places
    offset = cells.offset.reshape(-1)[places.cell]
    trial = cells.trial.reshape(-1)[places.cell]
    score = places.second * offset
    score += places.first
    score *= offset
    score += places.constant
    at = (places.exact_lower + (offset[places.exact] - 1.0)) / places.exact_width
    score[places.exact] = ndtri(np.clip(at, _SMALLEST, 1.0 - _SMALLEST))
    inside = (at >= 0.0) & (at < 1.0)
    if inside.all():
        return places.event, trial, score
    # A stratum that the probability cuts in two belongs to the event in part only.
    kept = np.ones(score.size, dtype=np.bool_)
    kept[places.exact] = inside
    return places.event[kept], trial[kept], score[kept]


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
        score = np.asarray(ndtri(place[trials]))
        cost = np.empty_like(score)
        row = np.full(trials.size, model.impact_row[event])
        model.impacts.read_each(score, row, cost)
        drawn.cost[event, trials] += model.signs[event] * cost
