"""One block of trials: add up the draws, and keep the sums that every statistic needs.

A block is one Latin hypercube of 4,096 trials over all inputs.  Nothing of a block
is kept but its totals and sums of its parts, so memory does not grow with the
number of trials.
"""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from contingency.quantities.draws import BLOCK, scores
from contingency.quantities.percentiles import rank
from contingency.simulation.cost_model import CostModel
from contingency.simulation.drawing import (
    TENTH_SCORE,
    Mask,
    Workspace,
    draw_ranges,
    draw_systemic,
    pattern_rows,
    tiles,
)
from contingency.simulation.events import draw_events

Array = NDArray[np.float64]

NEAR_RANKS = 41
"""Half-width, in ranks of a block, of the window next to the target percentile: one
percent of the block.  A choice of ours: wide enough to average, narrow enough to be
called near."""


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


def run_blocks(
    model: CostModel, blocks: range, work: Workspace, centre: float
) -> Iterator[BlockSums]:
    """Simulate blocks in a row; see `run_block`."""
    work.fetch(blocks)
    for block in blocks:
        yield run_block(model, block, work, centre)


def run_block(
    model: CostModel, block: int, work: Workspace, centre: float
) -> BlockSums:
    """Simulate one block.  `centre` is near the mean total, to keep sums small."""
    uplift, uplift_low, uplift_high = draw_systemic(model, block, work)
    factor = 1.0 + model.patterns @ uplift  # (g, n)
    common = scores(work.cells("common", block))
    without_cause = draw_ranges(model, block, work, common, factor)
    drawn = draw_events(model, block, work.source, work.cells("units", block))

    by_pattern = pattern_rows(model) @ work.value  # (g, n)
    total = np.einsum("gn,gn->n", by_pattern, factor) + drawn.cost.sum(axis=0)
    d = total - centre
    near = _near(total, model.target)
    quantile = _block_quantile(total[None, :], model.target)[0]

    acting_cost = _cost_under(model, by_pattern)  # (s, n)
    causes = common[len(common) - len(model.causes) :] if model.causes else common[:0]
    occurs = drawn.occurs.astype(np.float64)
    weights = np.stack([np.ones(BLOCK), d, near])  # (3, n)
    ranges = _range_sums(model, work, uplift, factor, total, weights)
    return BlockSums(
        total=total,
        deviation=float(d.sum()),
        near_count=float(near.sum()),
        ranges=ranges.parts - model.base * weights.sum(axis=1),
        systemic=ranges.systemic,
        events=_products(drawn.cost, weights),
        range_tails=ranges.tails,
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
        range_removal=quantile - ranges.without,
        systemic_removal=quantile
        - _block_quantile(total - uplift * acting_cost, model.target),
        event_removal=quantile - _block_quantile(total - drawn.cost, model.target),
        cause_removal=quantile - _block_quantile(total - without_cause, model.target),
    )


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


@dataclass(frozen=True, kw_only=True, slots=True)
class _RangeSums:
    """What is summed over the trials of each range."""

    parts: Array
    """(k, 3) range value: alone, times d, near the target."""
    systemic: Array
    """(k, s, 3) the same of range value times uplift."""
    tails: Array
    """(k, 4) as in `BlockSums`; a fixed package has empty ones."""
    without: Array
    """(k,) the block's target percentile with the range fixed at its base."""


def _range_sums(
    model: CostModel,
    work: Workspace,
    uplift: Array,
    factor: Array,
    total: Array,
    weights: Array,
) -> _RangeSums:
    """Return every sum over the ranges, tile by tile: values are read once."""
    count, risks = len(model.packages), len(model.systemic)
    sums = _RangeSums(
        parts=np.empty((count, 3)),
        systemic=np.zeros((count, risks, 3)),
        tails=np.zeros((count, 4)),
        without=np.empty(count),
    )
    # (n, s, 3) -> (n, 3 s): one matrix product for all risks and weights
    columns = uplift.T[:, :, None] * weights.T[:, None, :]
    columns = columns.reshape(BLOCK, 3 * risks)
    for rows in tiles(count):
        value = work.value[rows]
        sums.parts[rows] = _products(value, weights)
        if risks:
            sums.systemic[rows] = (value @ columns).reshape(-1, risks, 3)
        sums.without[rows] = _without(model, work, rows, total, factor)
        varying = slice(rows.start, min(rows.stop, model.varying))
        if varying.start < varying.stop:
            sums.tails[varying] = _range_tails(work, varying, weights)
    sums.systemic[~model.acts] = 0.0
    return sums


def _products(rows: Array, columns: Array) -> Array:
    """Return (r, c) sums over the trials of (r, n) rows times (c, n) columns.

    Column by column: a product with few columns is slower than as many with one.
    """
    return np.stack([rows @ column for column in columns], axis=1)


def _tails(low: Mask, high: Mask, d: Array) -> Array:
    """Return (r, 4): sum of `d` and count where low, then where high."""
    both = np.stack([d, np.ones(BLOCK)])
    below, above = low.astype(np.float64), high.astype(np.float64)
    return np.hstack([_products(below, both), _products(above, both)])


def _range_tails(work: Workspace, rows: slice, weights: Array) -> Array:
    """Return (r, 4) tails of some varying ranges."""
    both = weights[1::-1]
    as_number = work.tile[: rows.stop - rows.start]
    sides = []
    for side in (work.low, work.high):
        as_number[:] = side[rows]
        sides.append(_products(as_number, both))
    return np.hstack(sides)


def _without(
    model: CostModel, work: Workspace, rows: slice, total: Array, factor: Array
) -> Array:
    """Return (r,) the target percentile with each of some ranges at its base."""
    value = work.value[rows]
    moved = work.tile[: value.shape[0]]
    place = rank(BLOCK, model.target) - 1
    if not model.systemic:
        # The base is the same in every trial: it comes back after the ranking.
        np.subtract(total, value, out=moved)
        moved.partition(place, axis=1)
        return np.asarray(moved[:, place] + model.base[rows, 0])
    np.subtract(value, model.base[rows], out=moved)
    moved *= factor[model.pattern_of[rows]]
    np.subtract(total, moved, out=moved)
    moved.partition(place, axis=1)
    return moved[:, place].copy()
