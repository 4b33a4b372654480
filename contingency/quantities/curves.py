"""Quantile curves over normal scores, made quick to evaluate many times.

A curve that is dear to evaluate is tabulated on a uniform grid of normal scores
and read by straight lines.  The knots are moved by a twelfth of their second
difference, so that the error of a straight line against a curve, which is
one-sided, has mean nought in each cell; what is left is at most a twelfth of
the largest second difference (``docs/method.md``, section "Tabulated curves").
Curves that are cheap are evaluated as they stand: a normal is a straight line, a
lognormal one exponential, a discrete outcome one search, a curve through points a
cubic.
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray
from scipy.interpolate import make_interp_spline
from scipy.special import ndtr

from contingency.quantities.shape_contract import ShapeByTails
from contingency.quantities.shapes import (
    BetaPert,
    Discrete,
    Fixed,
    Lognormal,
    Normal,
    Points,
    Shape,
    StandardKey,
    standard_shape,
)

Array = NDArray[np.float64]

STEPS_PER_SCORE = 256
"""Grid cells to one unit of normal score."""
LAST_SCORE = 10.0
"""The grid covers scores from -10 to 10; a score beyond has a chance below 1e-22."""
CELLS = int(2 * LAST_SCORE * STEPS_PER_SCORE)

_GRID = np.linspace(-LAST_SCORE, LAST_SCORE, CELLS + 1)


_BELOW, _ABOVE = ndtr(_GRID), ndtr(-_GRID)

_SPARSE = _GRID[::64]
"""Scores at which a beta-PERT is inverted, four to the unit."""


def knots(shape: Shape) -> Array:
    """Return the (CELLS + 1,) knots of a shape's table, in the shape's units."""
    if isinstance(shape, BetaPert):
        return np.asarray(smooth_knots([shape])[0])
    if isinstance(shape, ShapeByTails):
        exact = np.asarray(shape.at_tails(_BELOW, _ABOVE), dtype=np.float64)
    else:
        exact = np.asarray(shape.at_score(_GRID), dtype=np.float64)
    bend = np.zeros_like(exact)
    bend[1:-1] = np.diff(exact, 2)
    for score in shape.breaks:
        # Across a break the second difference is no curvature: leave these knots.
        cell = int(np.floor((score + LAST_SCORE) * STEPS_PER_SCORE))
        bend[max(cell, 0) : cell + 2] = 0.0
    return exact - bend / 12.0


def smooth_knots(shapes: Sequence[Shape]) -> Array:
    """Return (k, CELLS + 1) knots of shapes whose curves are dear and smooth.

    The inverse of the incomplete beta is dear and, over normal scores, smooth: a spline
    of degree five through every 64th knot is off by less than 1e-8 of the range.
    """
    values = np.array([shape.at_score(_SPARSE) for shape in shapes])
    exact = np.asarray(make_interp_spline(_SPARSE, values, k=5, axis=1)(_GRID))
    exact[:, 1:-1] -= np.diff(exact, 2, axis=1) / 12.0
    return exact


@dataclass(frozen=True, kw_only=True, slots=True)
class _Tables:
    """Knots of several curves; ``r`` rows of ``g`` = CELLS + 1 knots."""

    value: Array
    """(r * g,) the knots, row after row."""
    start: NDArray[np.int32]
    """(r, 1) index of each row's knot at score nought."""


def _tabulate(shapes: Sequence[Shape]) -> _Tables:
    """Tabulate the shapes; those alike but for place and size share the work."""
    rows = np.empty((len(shapes), CELLS + 1))
    forms = [shape.standard_form() for shape in shapes]
    shared = _shared_knots([form[0] for form in forms if form is not None])
    for row, shape, form in zip(rows, shapes, forms, strict=True):
        if form is None:
            row[:] = knots(shape)
        else:
            key, location, scale = form
            row[:] = location + scale * shared[key]
    start = np.arange(len(shapes), dtype=np.int32)[:, None] * (CELLS + 1)
    return _Tables(value=rows.ravel(), start=start + CELLS // 2)


def _shared_knots(keys: Sequence[StandardKey]) -> dict[StandardKey, Array]:
    """Return the knots of each key's standard shape.

    From the key and not from a shape that has it, which differs by rounding from the
    next one: a row must not depend on its neighbours.
    """
    standard = {key: standard_shape(key) for key in dict.fromkeys(keys)}
    smooth = {k: s for k, s in standard.items() if isinstance(s, BetaPert)}
    found = {k: knots(s) for k, s in standard.items() if k not in smooth}
    if smooth:
        rows = smooth_knots(list(smooth.values()))
        found |= dict(zip(smooth, rows, strict=True))
    return found


class Curves:
    """Quantile curves of several shapes, sorted by the way they are evaluated.

    Axes: ``k`` curves in the order `order` of the shapes given, ``n`` scores.
    """

    def __init__(self, shapes: Sequence[Shape]) -> None:
        kinds = [_kind(shape) for shape in shapes]
        self.order = tuple(sorted(range(len(shapes)), key=lambda i: (kinds[i], i)))
        """Position in the shapes given of each curve."""
        ordered = [shapes[i] for i in self.order]
        counts = [kinds.count(kind) for kind in range(5)]
        edges = np.concatenate([[0], np.cumsum(counts)]).tolist()
        self._edges: list[int] = edges
        self._tables = _tabulate(ordered[: edges[1]])
        lognormals = [s for s in ordered if isinstance(s, Lognormal)]
        self._shift = _column([s.shift for s in lognormals])
        self._scale = _column([s.scale for s in lognormals])
        self._log_spread = _column([s.log_spread for s in lognormals]) / STEPS_PER_SCORE
        normals = [s for s in ordered if isinstance(s, Normal)]
        self._centre = _column([s.centre for s in normals])
        self._spread = _column([s.spread for s in normals]) / STEPS_PER_SCORE
        self._listed = [s for s in ordered if isinstance(s, (Discrete, Points))]
        self._constant = _column([s.mean for s in ordered if isinstance(s, Fixed)])

    def __len__(self) -> int:
        """Return the number of curves."""
        return self._edges[-1]

    @property
    def varying(self) -> int:
        """Number of curves with spread; the fixed ones come last."""
        return self._edges[4]

    def read(self, score: Array, first: int, out: Array) -> None:
        """Write to `out` curves `first`, `first` + 1, ... at (r, n) scores.

        `score` is used as workspace.
        """
        np.multiply(score, STEPS_PER_SCORE, out=score)
        self.read_steps(score, first, out)

    def read_steps(self, score: Array, first: int, out: Array) -> None:
        """Write to `out` the same, for scores counted in steps of the grid.

        Who makes many scores counts them in steps at once and saves a pass.
        """
        readers = (
            self._read_tables,
            self._read_lognormals,
            self._read_normals,
            self._read_listed,
            self._read_fixed,
        )
        last = first + score.shape[0]
        for kind, reader in enumerate(readers):
            start = max(first, self._edges[kind])
            stop = min(last, self._edges[kind + 1])
            if start < stop:
                rows = slice(start - self._edges[kind], stop - self._edges[kind])
                part = slice(start - first, stop - first)
                reader(score[part], rows, out[part])

    def read_each(self, score: Array, row: NDArray[np.int64], out: Array) -> None:
        """Write to `out` the curve `row[i]` at `score[i]`; all (m,), rows ascending.

        `score` is used as workspace.
        """
        tabled = int(np.searchsorted(row, self._edges[1]))
        np.multiply(score, STEPS_PER_SCORE, out=score)
        self._look_up(score[:tabled], self._tables.start[row[:tabled], 0], out[:tabled])
        for one in np.unique(row[tabled:]):
            first, last = np.searchsorted(row, [one, one + 1])
            self.read_steps(score[None, first:last], int(one), out[None, first:last])

    def _read_tables(self, score: Array, rows: slice, out: Array) -> None:
        self._look_up(score, self._tables.start[rows], out)

    def _look_up(self, score: Array, start: NDArray[np.int32], out: Array) -> None:
        tables = self._tables
        last = LAST_SCORE * STEPS_PER_SCORE
        if score.size and max(score.max(), -score.min()) >= last:
            np.clip(score, -last, last, out=score)
        np.floor(score, out=out)
        score -= out
        # By way of 32 bits, which is quicker than straight to 64.
        near = out.astype(np.int32)
        near += start
        cell = near.astype(np.int64)
        np.take(tables.value, cell, out=out, mode="clip")
        # At a row's last knot the next one is another row's; it counts nought times.
        rise = np.take(tables.value[1:], cell, mode="clip")
        rise -= out
        rise *= score
        out += rise

    def _read_lognormals(self, score: Array, rows: slice, out: Array) -> None:
        np.multiply(score, self._log_spread[rows], out=score)
        np.exp(score, out=out)
        out *= self._scale[rows]
        out += self._shift[rows]

    def _read_normals(self, score: Array, rows: slice, out: Array) -> None:
        np.multiply(score, self._spread[rows], out=out)
        out += self._centre[rows]

    def _read_listed(self, score: Array, rows: slice, out: Array) -> None:
        for shape, at, to in zip(self._listed[rows], score, out, strict=True):
            to[:] = shape.at_score(at / STEPS_PER_SCORE)

    def _read_fixed(self, score: Array, rows: slice, out: Array) -> None:
        del score
        out[:] = self._constant[rows]


def _column(values: list[float]) -> Array:
    """Return the values as a (k, 1) array."""
    return np.array(values, dtype=np.float64).reshape(-1, 1)


def _kind(shape: Shape) -> int:
    """Return the way a shape is evaluated: 0 for a table, 4 for a constant."""
    if isinstance(shape, Lognormal):
        return 1
    if isinstance(shape, Normal):
        return 2
    if isinstance(shape, (Discrete, Points)):
        return 3
    return 4 if isinstance(shape, Fixed) else 0
