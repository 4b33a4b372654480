"""One block of trials: draw, add up, and keep the sums that every statistic needs.

A block is one Latin hypercube of 4,096 trials over all inputs.  Nothing of a block
is kept but its totals and sums of its parts, so memory does not grow with the
number of trials.
"""

from __future__ import annotations

from dataclasses import dataclass, replace

import numpy as np
from numpy.typing import NDArray

from contingency.quantities.curves import STEPS_PER_SCORE
from contingency.quantities.draws import BLOCK, Source, scores, strata
from contingency.quantities.percentiles import rank
from contingency.simulation.cost_model import CostModel
from contingency.simulation.events import DrawnEvents, draw_events

Array = NDArray[np.float64]
Mask = NDArray[np.bool_]

TILE = 32
"""Inputs handled in one call: long enough to leave the interpreter's lock to another
thread, short enough for the processor's cache.  Measured: 16 gains nothing from a
second thread, 64 falls out of the cache."""
NEAR_RANKS = 41
"""Half-width, in ranks of a block, of the window next to the target percentile: one
percent of the block.  A choice of ours: wide enough to average, narrow enough to be
called near."""
TENTH_SCORE = -1.2815515655446004
"""Normal score of the lowest tenth, ndtri(0.1)."""


@dataclass(frozen=True, kw_only=True, slots=True)
class BlockSums:
    """What is left of one block.

    Deviations: ``d`` = total minus the model's centre.  Every sum is over the
    block's trials.  Axes as in the cost model.
    """

    total: Array
    """(n,) total cost."""
    deviation: float
    near_count: float
    ranges: Array
    """(k, 3) sums of range value minus base: alone, times d, near the target."""
    systemic: Array
    """(k, s, 3) the same of range value times uplift."""
    events: Array
    """(e, 3) the same of the event's cost."""
    range_tails: Array
    """(k, 4) sum of d and count in the lowest tenth, then in the highest."""
    systemic_tails: Array
    cause_tails: Array
    event_tails: Array
    """(e, 4) without the event, then with it."""
    range_removal: Array
    """(k,) fall of the block's target percentile."""
    systemic_removal: Array
    event_removal: Array
    cause_removal: Array


class Workspace:
    """Arrays that one thread uses for block after block."""

    def __init__(self, model: CostModel) -> None:
        self.source = Source(model.seed)
        count = len(model.packages)
        self.value = np.empty((count, BLOCK))
        self.low = np.empty((model.varying, BLOCK), dtype=np.bool_)
        self.high = np.empty((model.varying, BLOCK), dtype=np.bool_)
        self.tile = np.empty((TILE, BLOCK))
        # Fixed packages have the same value in every trial.
        if count > model.varying:
            rows = self.value[model.varying :]
            model.ranges.read(np.zeros_like(rows), model.varying, rows)


def run_block(
    model: CostModel, block: int, work: Workspace, centre: float
) -> BlockSums:
    """Simulate one block.  `centre` is near the mean total, to keep sums small."""
    uplift, uplift_low, uplift_high = _draw_systemic(model, block, work)
    factor = 1.0 + model.patterns @ uplift  # (g, n)
    common = _draw_common(model, block, work)
    without_cause = _draw_ranges(model, block, work, common, factor)
    drawn = draw_events(model, block, work.source)

    by_pattern = _pattern_rows(model) @ work.value  # (g, n)
    total = np.einsum("gn,gn->n", by_pattern, factor) + drawn.cost.sum(axis=0)
    d = total - centre
    near = _near(total, model.target)
    quantile = _block_quantile(total[None, :], model.target)[0]

    acting_cost = _cost_under(model, by_pattern)  # (s, n)
    causes = common[len(common) - len(model.causes) :] if model.causes else common[:0]
    occurs = drawn.occurs.astype(np.float64)
    weights = np.stack([np.ones(BLOCK), d, near], axis=1)  # (n, 3)
    return BlockSums(
        total=total,
        deviation=float(d.sum()),
        near_count=float(near.sum()),
        ranges=work.value @ weights - model.base * weights.sum(axis=0),
        systemic=_systemic_sums(model, work, uplift, weights),
        events=drawn.cost @ weights,
        range_tails=_range_tails(work, d),
        systemic_tails=_tails(uplift_low, uplift_high, d),
        cause_tails=_tails(causes < TENTH_SCORE, causes > -TENTH_SCORE, d),
        event_tails=np.column_stack(
            [
                d.sum() - occurs @ d,
                BLOCK - occurs.sum(axis=1),
                occurs @ d,
                occurs.sum(axis=1),
            ]
        ),
        range_removal=quantile - _without_ranges(model, work, total, factor),
        systemic_removal=quantile
        - _block_quantile(total - uplift * acting_cost, model.target),
        event_removal=quantile - _block_quantile(total - drawn.cost, model.target),
        cause_removal=quantile - _block_quantile(total - without_cause, model.target),
    )


@dataclass(frozen=True, kw_only=True, slots=True)
class DrawnBlock:
    """One block with every trial of every input kept; axes as in the cost model."""

    value: Array
    """(k, n) range values, money."""
    uplift: Array
    """(s, n) systemic uplifts, fractions."""
    events: DrawnEvents

    def factor(self, model: CostModel) -> Array:
        """Return the (k, n) factor of all systemic risks on each package."""
        return np.asarray((1.0 + model.patterns @ self.uplift)[model.pattern_of])

    def total(self, model: CostModel) -> Array:
        """Return the (n,) total cost, money."""
        by_pattern = _pattern_rows(model) @ self.value  # (g, n)
        factor = 1.0 + model.patterns @ self.uplift
        estimate = np.einsum("gn,gn->n", by_pattern, factor)
        return np.asarray(estimate + self.events.cost.sum(axis=0))


def draw_block(model: CostModel, block: int, work: Workspace) -> DrawnBlock:
    """Return one block trial by trial, and none of its sums: for what-if questions.

    The draws are those of `run_block` to the last bit.
    """
    uplift, _, _ = _draw_systemic(model, block, work)
    common = _draw_common(model, block, work)
    factor = 1.0 + model.patterns @ uplift
    # What each cause adds is not asked for; the common scores act all the same.
    _draw_ranges(replace(model, causes=()), block, work, common, factor)
    return DrawnBlock(
        value=work.value.copy(),
        uplift=uplift,
        events=draw_events(model, block, work.source),
    )


def _draw_systemic(
    model: CostModel, block: int, work: Workspace
) -> tuple[Array, Mask, Mask]:
    """Return (s, n) uplifts and whether each is in its lowest or highest tenth."""
    names = [f"systemic/{name}" for name in model.systemic]
    score = scores(strata(work.source, names, block))
    low, high = score < TENTH_SCORE, score > -TENTH_SCORE
    uplift = np.empty_like(score)
    model.uplifts.read(score, 0, uplift)
    return uplift, low, high


def _draw_common(model: CostModel, block: int, work: Workspace) -> Array:
    """Return the (f, n) common scores behind the ranges."""
    return scores(strata(work.source, model.dependence.common, block))


def _draw_ranges(
    model: CostModel, block: int, work: Workspace, common: Array, factor: Array
) -> Array:
    """Fill `work` with the range values and their tails.

    Returns (j, n): what each common cause adds to the total over its middle.
    """
    dependence = model.dependence
    weights = dependence.weights
    common = common * STEPS_PER_SCORE
    joint = None
    if dependence.root is not None:
        joint = _joint_scores(model, dependence.root, block, work)
    first_cause = weights.shape[1] - len(model.causes)
    added = np.zeros((len(model.causes), BLOCK))
    for first in range(0, model.varying, TILE):
        rows = slice(first, min(first + TILE, model.varying))
        score = work.tile[: rows.stop - rows.start]
        if joint is None:
            _tile_scores(model, block, work, rows, common, score)
        else:
            score[:] = joint[rows]
        np.less(score, TENTH_SCORE * STEPS_PER_SCORE, out=work.low[rows])
        np.greater(score, -TENTH_SCORE * STEPS_PER_SCORE, out=work.high[rows])
        middle = [
            (j, score - weights[rows, first_cause + j, None] * common[first_cause + j])
            for j in range(len(model.causes))
            if joint is None and weights[rows, first_cause + j].any()
        ]
        value = work.value[rows]
        model.ranges.read_steps(score, first, value)
        for j, score_without in middle:
            without = np.empty_like(value)
            model.ranges.read_steps(score_without, first, without)
            np.subtract(value, without, out=without)
            without *= factor[model.pattern_of[rows]]
            added[j] += without.sum(axis=0)
    return added


def _tile_scores(
    model: CostModel,
    block: int,
    work: Workspace,
    rows: slice,
    common: Array,
    score: Array,
) -> None:
    """Fill (r, n) `score` with the scores of some ranges, counted in grid steps."""
    dependence = model.dependence
    weights = dependence.weights[rows]
    cells = strata(work.source, model.streams[rows], block)
    own = dependence.own[rows, 0]
    if np.all(own == own[0]):
        # Without loads all ranges have one weight: it goes into the polynomials.
        scores(cells, out=score, scale=float(own[0]) * STEPS_PER_SCORE)
    else:
        scores(cells, out=score, scale=STEPS_PER_SCORE)
        score *= dependence.own[rows]
    if weights.shape[1] == 1 and np.all(weights == weights[0]):
        score += weights[0] * common
    elif weights.shape[1]:
        score += weights @ common


def _joint_scores(model: CostModel, root: Array, block: int, work: Workspace) -> Array:
    """Return (v, n) scores under given pairs of correlations, in grid steps."""
    own = scores(strata(work.source, model.streams, block), scale=STEPS_PER_SCORE)
    return np.asarray(root @ own)


def _pattern_rows(model: CostModel) -> Array:
    """Return (g, k) ones where a package has the pattern."""
    count = model.patterns.shape[0]
    rows = np.arange(count)[:, None] == model.pattern_of
    return np.asarray(rows, dtype=np.float64)


def _cost_under(model: CostModel, by_pattern: Array) -> Array:
    """Return the (s, n) cost that each systemic risk acts on."""
    return np.asarray(model.patterns.T @ by_pattern)


def _near(total: Array, target: int) -> Array:
    """Return (n,) ones for the trials next to the block's target percentile."""
    centre = rank(BLOCK, target)
    half = min(NEAR_RANKS, centre - 1, BLOCK - centre)
    low, high = centre - half - 1, centre + half - 1
    ordered = np.partition(total, (low, high))
    inside = (total >= ordered[low]) & (total <= ordered[high])
    return np.asarray(inside, dtype=np.float64)


def _block_quantile(total: Array, target: int) -> Array:
    """Return the target percentile of each row of (r, n) totals."""
    place = rank(BLOCK, target) - 1
    return np.asarray(np.partition(total, place, axis=1)[:, place])


def _systemic_sums(
    model: CostModel, work: Workspace, uplift: Array, weights: Array
) -> Array:
    """Return (k, s, 3) sums of range value times uplift."""
    risks = len(model.systemic)
    if not risks:
        return np.zeros((len(model.packages), 0, 3))
    # (n, s, 3) -> (n, 3 s): one matrix product for all risks and weights
    columns = (uplift.T[:, :, None] * weights[:, None, :]).reshape(BLOCK, 3 * risks)
    sums = (work.value @ columns).reshape(-1, risks, 3)
    return np.where(model.acts[:, :, None], sums, 0.0)


def _tails(low: Mask, high: Mask, d: Array) -> Array:
    """Return (r, 4): sum of `d` and count where low, then where high."""
    below, above = low.astype(np.float64), high.astype(np.float64)
    return np.column_stack([below @ d, below.sum(axis=1), above @ d, above.sum(axis=1)])


def _range_tails(work: Workspace, d: Array) -> Array:
    """Return (k, 4) tails of the ranges; a fixed package has empty ones."""
    result = np.zeros((work.value.shape[0], 4))
    both = np.stack([d, np.ones(BLOCK)], axis=1)
    for first in range(0, work.low.shape[0], TILE):
        rows = slice(first, first + TILE)
        count = work.low[rows].shape[0]
        as_number = work.tile[:count]
        as_number[:] = work.low[rows]
        result[rows.start : rows.start + count, 0:2] = as_number @ both
        as_number[:] = work.high[rows]
        result[rows.start : rows.start + count, 2:4] = as_number @ both
    return result


def _without_ranges(
    model: CostModel, work: Workspace, total: Array, factor: Array
) -> Array:
    """Return (k,) the target percentile with each range fixed at its base."""
    result = np.empty(len(model.packages))
    for first in range(0, len(model.packages), TILE):
        rows = slice(first, first + TILE)
        value = work.value[rows]
        moved = work.tile[: value.shape[0]]
        if not model.systemic:
            # The base is the same in every trial: it comes back after the ranking.
            np.subtract(total, value, out=moved)
        else:
            np.subtract(value, model.base[rows], out=moved)
            moved *= factor[model.pattern_of[rows]]
            np.subtract(total, moved, out=moved)
        place = rank(BLOCK, model.target) - 1
        moved.partition(place, axis=1)
        result[first : first + value.shape[0]] = moved[:, place]
    if not model.systemic:
        result += model.base[:, 0]
    return result
