"""The effect of each family: the average over all orders, or one plain sequence.

The order in which families are substituted changes what each of them seems to do,
never their sum.  The average over all orders is the Shapley value ([1]_): the one
division that adds up, treats families alike that act alike, gives nothing to a
family that moves nothing, and is the same for a sum as for its parts.

References
----------
.. [1] Shapley, L. S. (1953). A value for n-person games. In Kuhn, H. W. and Tucker,
   A. W. (eds), Contributions to the Theory of Games II, 307-317. Princeton University
   Press. doi:10.1515/9781400881970-018  (from memory)
"""

from __future__ import annotations

from collections.abc import Callable, Mapping, Sequence
from itertools import combinations
from math import comb
from typing import Literal

import numpy as np
from numpy.typing import NDArray

from contingency.tracking.families import Family

Array = NDArray[np.float64]
On = frozenset[Family]
Order = Literal["average", "sequence"]
Value = Callable[[On], Array]

MOST_AVERAGED = 12
"""Families whose orders are all averaged: 4,096 mixtures.  A choice of ours.  Beyond
it each family takes each place once forwards and once backwards."""


def effects(families: Sequence[Family], value: Value, order: Order) -> list[Array]:
    """Return the effect of each family; they sum to value(all) − value(none).

    Parameters
    ----------
    families : sequence
        In published order.
    value : callable
        Value of the mixture in which these families are as in the later revision.
    order : "average" or "sequence"
        Average over all orders, or the published order alone.
    """
    known: dict[On, Array] = {}

    def at(on: On) -> Array:
        if on not in known:
            known[on] = value(on)
        return known[on]

    if order == "sequence":
        return _along([tuple(families)], families, at)
    if len(families) > MOST_AVERAGED:
        return _along(balanced_orders(families), families, at)
    return _over_all_orders(families, at)


def _over_all_orders(families: Sequence[Family], at: Value) -> list[Array]:
    """Return Shapley values: each subset weighs as many orders as lead through it."""
    count = len(families)
    result = []
    for family in families:
        others = [f for f in families if f is not family]
        total: Array | float = 0.0
        for size in range(count):
            weight = 1.0 / (count * comb(count - 1, size))
            for chosen in combinations(others, size):
                on = frozenset(chosen)
                total = total + weight * (at(on | {family}) - at(on))
        result.append(np.asarray(total))
    return result


def balanced_orders(families: Sequence[Family]) -> list[tuple[Family, ...]]:
    """Return orders in which each family takes each place as often: 2m of them.

    Every rotation of the published order, and its reverse.
    """
    turned = [(*families[i:], *families[:i]) for i in range(len(families))]
    return [*turned, *(order[::-1] for order in turned)]


def _along(
    orders: Sequence[tuple[Family, ...]], families: Sequence[Family], at: Value
) -> list[Array]:
    """Return the average effect of each family over the orders given."""
    total: Mapping[Family, list[Array]] = {family: [] for family in families}
    for order in orders:
        on: On = frozenset()
        for family in order:
            total[family].append(at(on | {family}) - at(on))
            on |= {family}
    return [np.mean(total[family], axis=0) for family in families]
