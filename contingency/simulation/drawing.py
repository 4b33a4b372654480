"""The draws of one block: scores, range values, uplifts and events, trial by trial."""

from __future__ import annotations

from dataclasses import dataclass, replace
from itertools import pairwise

import numpy as np
from numpy.typing import NDArray

from contingency.quantities.curves import STEPS_PER_SCORE
from contingency.quantities.draws import (
    BLOCK,
    Source,
    Space,
    Strata,
    raw_blocks,
    scores,
    strata_of,
)
from contingency.simulation.cost_model import CostModel
from contingency.simulation.events import DrawnEvents, draw_events

Array = NDArray[np.float64]
Mask = NDArray[np.bool_]

TILE = 64
"""Most inputs handled in one call: calls long enough that threads share the
interpreter's lock well, arrays short enough for the processor's cache.  Measured, with
two threads: 16 gains nothing from the second, 100 no more than 64."""
CHUNK = 4
"""Most blocks whose raw numbers are drawn at once: longer calls, and fewer."""
CHUNK_BYTES = 64 * 2**20
"""Most memory for them, for each thread."""
TENTH_SCORE = -1.2815515655446004
"""Normal score of the lowest tenth, ndtri(0.1)."""


def streams_of(model: CostModel) -> dict[str, tuple[str, ...]]:
    """Return the names of the stratified streams that a model draws, by kind."""
    return {
        "systemic": tuple(f"systemic/{name}" for name in model.systemic),
        "common": model.dependence.common,
        "ranges": model.streams,
        "units": tuple(unit.stream for unit in model.units),
    }


def tiles(count: int) -> list[slice]:
    """Return `count` rows in as few tiles as may be, all about as long."""
    pieces = -(-count // TILE)
    return [
        slice(count * i // pieces, count * (i + 1) // pieces) for i in range(pieces)
    ]


def chunks(model: CostModel, blocks: range, threads: int = 1) -> list[range]:
    """Return the blocks in pieces whose raw numbers are drawn together."""
    streams = max(1, sum(len(names) for names in streams_of(model).values()))
    most = CHUNK_BYTES // (4 * BLOCK * streams)
    size = max(1, min(CHUNK, most, -(-len(blocks) // threads)))
    return [blocks[i : i + size] for i in range(0, len(blocks), size)]


class Workspace:
    """Arrays that one thread uses for block after block."""

    def __init__(self, model: CostModel) -> None:
        self.source = Source(model.seed)
        kinds = streams_of(model)
        self._names = [name for names in kinds.values() for name in names]
        ends = np.cumsum([0, *map(len, kinds.values())]).tolist()
        self._rows = dict(zip(kinds, pairwise(ends), strict=True))
        self._fetched = range(0)
        self._raw = raw_blocks(self.source, (), self._fetched)
        most = {kind: len(names) for kind, names in kinds.items()}
        most["ranges"] = min(TILE, model.varying)
        self._space = Space(max(most.values()))
        count = len(model.packages)
        self.value = np.empty((count, BLOCK))
        self.low = np.empty((model.varying, BLOCK), dtype=np.bool_)
        self.high = np.empty((model.varying, BLOCK), dtype=np.bool_)
        self.tile = np.empty((TILE, BLOCK))
        # Fixed packages have the same value in every trial.
        if count > model.varying:
            rows = self.value[model.varying :]
            model.ranges.read(np.zeros_like(rows), model.varying, rows)

    def fetch(self, blocks: range) -> None:
        """Draw the raw numbers of all stratified streams for some blocks in a row."""
        self._raw = raw_blocks(self.source, self._names, blocks, into=self._raw)
        self._fetched = blocks

    def cells(self, kind: str, block: int, part: slice = slice(None)) -> Strata:
        """Return the strata of the streams of one kind, or of a part of them."""
        if block not in self._fetched:
            self.fetch(range(block, block + 1))
        rows = slice(*self._rows[kind])
        place = block - self._fetched.start
        return strata_of(
            self._raw.halves[place, rows][part],
            self._raw.fine[place, rows][part],
            self._space,
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
        by_pattern = pattern_rows(model) @ self.value  # (g, n)
        factor = 1.0 + model.patterns @ self.uplift
        estimate = np.einsum("gn,gn->n", by_pattern, factor)
        return np.asarray(estimate + self.events.cost.sum(axis=0))


def draw_block(model: CostModel, block: int, work: Workspace) -> DrawnBlock:
    """Return one block trial by trial, and none of its sums: for what-if questions.

    The draws are those of `run_block` to the last bit.
    """
    uplift, _, _ = draw_systemic(model, block, work)
    common = scores(work.cells("common", block))
    factor = 1.0 + model.patterns @ uplift
    # What each cause adds is not asked for; the common scores act all the same.
    draw_ranges(replace(model, causes=()), block, work, common, factor)
    return DrawnBlock(
        value=work.value.copy(),
        uplift=uplift,
        events=draw_events(model, block, work.source, work.cells("units", block)),
    )


def draw_systemic(
    model: CostModel, block: int, work: Workspace
) -> tuple[Array, Mask, Mask]:
    """Return (s, n) uplifts and whether each is in its lowest or highest tenth."""
    score = scores(work.cells("systemic", block))
    low, high = score < TENTH_SCORE, score > -TENTH_SCORE
    uplift = np.empty_like(score)
    model.uplifts.read(score, 0, uplift)
    return uplift, low, high


def draw_ranges(
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
    for rows in tiles(model.varying):
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
        model.ranges.read_steps(score, rows.start, value)
        for j, score_without in middle:
            without = np.empty_like(value)
            model.ranges.read_steps(score_without, rows.start, without)
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
    cells = work.cells("ranges", block, rows)
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
    own = np.empty((model.varying, BLOCK))
    for rows in tiles(model.varying):
        scores(work.cells("ranges", block, rows), own[rows], scale=STEPS_PER_SCORE)
    return np.asarray(root @ own)


def pattern_rows(model: CostModel) -> Array:
    """Return (g, k) ones where a package has the pattern."""
    count = model.patterns.shape[0]
    rows = np.arange(count)[:, None] == model.pattern_of
    return np.asarray(rows, dtype=np.float64)
