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
    Strata,
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


def draw_events(
    model: CostModel, block: int, source: Source, cells: Strata | None = None
) -> DrawnEvents:
    """Return the events of one block in the order of the model.

    `cells` are the strata of the model's units, where they have been drawn already.
    """
    if cells is None:
        cells = strata(source, [unit.stream for unit in model.units], block)
    count = len(model.events)
    drawn = DrawnEvents(
        cost=np.zeros((count, BLOCK)), occurs=np.zeros((count, BLOCK), dtype=np.bool_)
    )
    happens = _happenings(model, cells)
    # Laid flat, for an assignment by one index is much faster than by two.
    occurs, cost = drawn.occurs.reshape(-1), drawn.cost.reshape(-1)
    occurs[happens.at] = True
    repeated = {r.event: r for r in model.repeated}
    for row in model.event_order:
        parent = model.parents[row]
        allowed = None if parent is None else drawn.occurs[parent]
        if row in repeated:
            _repeat(model, repeated[row], block, source, allowed, drawn)
        elif allowed is not None:
            drawn.occurs[row] &= allowed
    if any(parent is not None for parent in model.parents):
        happens = happens.where(occurs[happens.at])
    impact = np.empty_like(happens.score)
    model.impacts.read_each(happens.score, happens.curve, impact)
    impact *= happens.sign
    cost[happens.at] = impact
    return drawn


@dataclass(frozen=True, kw_only=True, slots=True)
class _Happenings:
    """Where an event's own choice comes out: ``m`` of them, by impact curve."""

    at: NDArray[np.int64]
    """(m,) event times 4,096 plus trial."""
    curve: NDArray[np.int64]
    """(m,) row of the impact curve, rising."""
    sign: Array
    """(m,) +1 for a threat, -1 for an opportunity."""
    score: Array
    """(m,) normal score of the impact."""

    def where(self, kept: NDArray[np.bool_]) -> _Happenings:
        """Return some of them."""
        return _Happenings(
            at=self.at[kept],
            curve=self.curve[kept],
            sign=self.sign[kept],
            score=self.score[kept],
        )


def _happenings(model: CostModel, cells: Strata) -> _Happenings:
    """Return what the events' own strata say; parents are put aside."""
    places = model.places
    at = cells.cell.reshape(-1)[places.cell]
    at += places.shift
    place = cells.place.reshape(-1)[places.cell]
    score = places.second * place
    score += places.first
    score *= place
    score += places.constant
    inner = places.exact_lower + place[places.exact] / BLOCK**2
    inner /= places.exact_width
    score[places.exact] = ndtri(np.clip(inner, _SMALLEST, 1.0 - _SMALLEST))
    happens = _Happenings(at=at, curve=places.curve, sign=places.sign, score=score)
    inside = (inner >= 0.0) & (inner < 1.0)
    if inside.all():
        return happens
    # A stratum that the probability cuts in two belongs to the event in part only.
    kept = np.ones(score.size, dtype=np.bool_)
    kept[places.exact] = inside
    return happens.where(kept)


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
    times[cells.cell[0]] = np.searchsorted(
        repeated.chances, uniforms(cells)[0], side="right"
    )
    if allowed is not None:
        times[~allowed] = 0
    drawn.occurs[event] = times > 0
    for turn in range(1, int(times.max()) + 1):
        trials = np.flatnonzero(times >= turn)
        place = plain_uniforms(source, f"{repeated.stream}/{turn}", block)
        score = np.asarray(ndtri(place[trials]))
        cost = np.empty_like(score)
        row = np.full(trials.size, model.impact_row[event])
        model.impacts.read_each(score, row, cost)
        drawn.cost[event, trials] += model.signs[event] * cost
