"""A table of amounts in whole steps that adds up along rows, groups and columns.

Parts of one sum are rounded by largest remainders (`contingency.quantities.rounding`).
A table with two directions asks for more: the printed table is the closest one, in the
sum of all differences, whose rows, groups and columns all add up.  That is controlled
rounding ([1]_, [2]_): a flow in whole numbers through a network whose arcs are the
cells and the sums.  With one row it is the method of largest remainders again.

References
----------
.. [1] Bacharach, M. (1966). Matrix rounding problems. Management Science 12(9),
   732-742. doi:10.1287/mnsc.12.9.732  (from memory)
.. [2] Cox, L. H. (1987). A constructive procedure for unbiased controlled rounding.
   Journal of the American Statistical Association 82(398), 520-524.
   doi:10.1080/01621459.1987.10478456  (from memory)
"""

from __future__ import annotations

from collections.abc import Hashable
from dataclasses import dataclass, field

import numpy as np
from numpy.typing import NDArray
from scipy.optimize import linprog
from scipy.sparse import coo_array

from contingency.errors import PartsDoNotClose

Array = NDArray[np.float64]
Steps = NDArray[np.int64]

REACH = 2
"""Whole numbers on either side of the wanted amount that an arc may take; a closing
table with less than one step everywhere exists (Bacharach), so two are ample."""
FURTHER = 1e3
"""Weight of a step that takes an amount a whole step or more away from the wanted one:
more than many amounts can gain that are rounded to the nearer side."""
TIE = 1e-3
"""Weight that decides ties in favour of the earlier line, in steps."""


def closed_table(
    exact: Array, groups: Steps, *, total: int, rows: Steps | None = None
) -> Steps:
    """Return the whole-number table nearest to `exact` that adds up every way.

    Parameters
    ----------
    exact : (r, c) array
        Unrounded amounts, in steps.
    groups : (r,) array of int
        Group of each row, 0 to the number of groups less one.
    total : int
        What all cells must add up to.
    rows : (r,) array of int, optional
        What each row must add up to; without it, rows are rounded with the rest.

    Returns
    -------
    (r, c) array of int
        Cells, whose sums over rows, over groups and over columns are nearest to the
        unrounded sums: less than one step away from them wherever that is possible.

    Raises
    ------
    PartsDoNotClose
        parts-do-not-close.  `total` or `rows` are steps away from the sums of `exact`.

    Examples
    --------
    >>> exact = np.array([[1.4, 1.4], [1.4, 1.3]])
    >>> closed_table(exact, np.zeros(2, int), total=6)
    array([[1, 2],
           [2, 1]])
    """
    flow = _Flow()
    r, c = exact.shape
    for j in range(c):
        flow.add("out", ("column", j), exact[:, j].sum())
    for g in range(int(groups.max()) + 1):
        inside = exact[groups == g]
        for j in range(c):
            flow.add(("column", j), ("block", g, j), inside[:, j].sum())
        flow.add(("group", g), "in", inside.sum())
    cells = [
        [
            flow.add(("block", int(groups[i]), j), ("row", i), exact[i, j])
            for j in range(c)
        ]
        for i in range(r)
    ]
    for i in range(r):
        wanted = None if rows is None else int(rows[i])
        flow.add(("row", i), ("group", int(groups[i])), exact[i].sum(), wanted)
    flow.add("in", "out", exact.sum(), total)
    solved = flow.solve()
    return np.array([[solved[arc] for arc in line] for line in cells], dtype=np.int64)


@dataclass(frozen=True, kw_only=True, slots=True)
class _Arc:
    start: Hashable
    end: Hashable
    wanted: float
    fixed: int | None

    @property
    def lowest(self) -> int:
        """Smallest whole amount that the arc may take."""
        return _floor(self.wanted) - REACH if self.fixed is None else self.fixed

    @property
    def pieces(self) -> range:
        """Whole amounts from which one more step can be taken."""
        steps = 2 * REACH + 1 if self.fixed is None else 0
        return range(self.lowest, self.lowest + steps)

    def cost(self, piece: int) -> float:
        """Return what one more step costs; steps further away weigh ever more."""
        change = abs(piece + 1 - self.wanted) - abs(piece - self.wanted)
        if _floor(self.wanted) <= piece < -_floor(-self.wanted):
            return change
        return change * FURTHER * max(1.0, abs(piece + 0.5 - self.wanted)) ** 2


@dataclass
class _Flow:
    """A flow in whole numbers that stays as near as it can to wanted amounts."""

    arcs: list[_Arc] = field(default_factory=list)

    def add(
        self, start: Hashable, end: Hashable, wanted: float, fixed: int | None = None
    ) -> int:
        """Add an arc with an amount wanted on it or a fixed one; return its number."""
        self.arcs.append(_Arc(start=start, end=end, wanted=float(wanted), fixed=fixed))
        return len(self.arcs) - 1

    def solve(self) -> list[int]:
        """Return the whole amount on every arc.

        Each arc is cut into pieces of one step whose costs rise, so the linear
        programme is a flow with convex costs and its corners are whole numbers.
        """
        nodes = {
            node: i
            for i, node in enumerate(
                dict.fromkeys(
                    node for arc in self.arcs for node in (arc.start, arc.end)
                )
            )
        }
        balance = np.zeros(len(nodes))
        for arc in self.arcs:
            balance[nodes[arc.start]] += arc.lowest
            balance[nodes[arc.end]] -= arc.lowest
        owners = [i for i, arc in enumerate(self.arcs) for _ in arc.pieces]
        costs = [arc.cost(piece) for arc in self.arcs for piece in arc.pieces]
        n = len(costs)
        starts = [nodes[self.arcs[i].start] for i in owners]
        ends = [nodes[self.arcs[i].end] for i in owners]
        matrix = coo_array(
            (
                np.r_[np.ones(n), -np.ones(n)],
                (np.r_[starts, ends], np.r_[np.arange(n), np.arange(n)]),
            ),
            shape=(len(nodes), n),
        ).tocsr()
        ties = TIE * np.array(owners) / len(self.arcs)
        answer = linprog(  # type: ignore[call-overload]  # the stubs know no sparse A_eq
            np.array(costs) + ties,
            A_eq=matrix,
            b_eq=-balance,
            bounds=(0, 1),
            method="highs-ds",
        )
        if not answer.success:
            raise PartsDoNotClose(
                where="table of amounts",
                found="No table in whole steps near the unrounded one adds up.",
                rule="Totals that are given lie within a step of the unrounded sums.",
                remedy="Report this with the estimate folder: it is an error of ours.",
            )
        amounts = np.array([arc.lowest for arc in self.arcs], dtype=np.int64)
        np.add.at(amounts, owners, np.rint(answer.x).astype(np.int64))
        return [int(amount) for amount in amounts]


def _floor(steps: float) -> int:
    """Return the whole number below, forgiving the last bits of a float."""
    nearest = round(steps)
    if abs(steps - nearest) < 1e-9 * max(1.0, abs(steps)):
        return int(nearest)
    return int(np.floor(steps))
