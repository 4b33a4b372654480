"""The distribution of the total as it is drawn: cumulative curve and density."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

Array = NDArray[np.float64]


@dataclass(frozen=True, kw_only=True, slots=True)
class CumulativeCurve:
    """Points of the empirical distribution function of the total."""

    cost: Array
    """(q,) total cost, price-date money, rising."""
    chance: Array
    """(q,) fraction of the trials that do not exceed it, 0 to 1, rising."""


@dataclass(frozen=True, kw_only=True, slots=True)
class Histogram:
    """Counts of the total in bins of one width."""

    edges: Array
    """(b + 1,) price-date money, rising."""
    share: Array
    """(b,) fraction of the trials in each bin."""
    left_out: float
    """Fraction of the trials below the first or above the last edge."""


def cumulative_curve(total: Array, *, points: int = 400) -> CumulativeCurve:
    """Return at most `points` trials, evenly spaced in rank, as points of the curve.

    Parameters
    ----------
    total : (n,) array of money
        Total cost in each trial, in any order.
    """
    ordered = np.sort(total)
    n = ordered.size
    ranks = np.unique(np.linspace(1, n, min(points, n)).round().astype(np.int64))
    return CumulativeCurve(cost=ordered[ranks - 1], chance=ranks / n)


def histogram(total: Array, *, bins: int = 60, beyond: float = 0.001) -> Histogram:
    """Return the histogram of the total between two far quantiles.

    Parameters
    ----------
    total : (n,) array of money
        Total cost in each trial, in any order.
    beyond : float
        Fraction of the trials that may lie outside on either side, so that one
        extreme trial does not press all others into a few bins.
    """
    ordered = np.sort(total)
    n = ordered.size
    cut = int(n * beyond)
    low, high = ordered[cut], ordered[n - 1 - cut]
    if high <= low:
        # A total without spread: one bin around the amount.
        width = max(abs(low) * 1e-3, 1.0)
        low, high = low - width / 2, low + width / 2
        bins = 1
    counts, edges = np.histogram(ordered, bins=bins, range=(low, high))
    return Histogram(
        edges=edges, share=counts / n, left_out=float(1.0 - counts.sum() / n)
    )


def chance_of_holding(total: Array, amount: float) -> float:
    """Return the fraction of trials that do not exceed `amount`, 0 to 1."""
    return float(np.mean(total <= amount))
