"""Percentiles of simulated totals and the intervals that the simulation leaves.

Formulas and sources: ``docs/method.md``, section "Percentiles and their intervals".
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray
from scipy.special import stdtrit

Array = NDArray[np.float64]


@dataclass(frozen=True, kw_only=True, slots=True)
class PercentileInterval:
    """A percentile of the trials and the interval around it, units of the total."""

    value: float
    low: float
    high: float


def rank(n: int, percent: int) -> int:
    """Return the rank, counted from 1, of the `percent` percentile of `n` trials.

    Whole numbers throughout: ``ceil(100 * 0.07)`` is 8, not 7.

    Parameters
    ----------
    n : int
        Number of trials.
    percent : int, 1 to 99

    Examples
    --------
    >>> rank(100, 7), rank(65_536, 80)
    (7, 52429)
    """
    return -(-n * percent // 100)


def percentile(ordered: Array, percent: int) -> float:
    """Return the smallest total that at least `percent` of the trials do not exceed.

    Definition 1 of [1]_, the inverse of the empirical distribution function: an
    amount that some trial really reached, never a blend of two.

    Parameters
    ----------
    ordered : (n,) array of money
        Totals in ascending order.
    percent : int, 1 to 99
        80 asks for the P80.

    References
    ----------
    .. [1] Hyndman, R. J. and Fan, Y. (1996). Sample quantiles in statistical
       packages. The American Statistician 50(4), 361-365.
       doi:10.1080/00031305.1996.10473566

    Examples
    --------
    >>> import numpy as np
    >>> percentile(np.arange(1.0, 101.0), 7)
    7.0
    """
    return float(ordered[rank(ordered.size, percent) - 1])


def block_interval(
    total_blocks: Array, percent: int, confidence: float = 0.95
) -> PercentileInterval:
    """Return a percentile of replicated Latin hypercube blocks and its interval."""
    blocks, per_block = total_blocks.shape
    n = blocks * per_block
    ordered = np.sort(total_blocks, axis=None)
    value = percentile(ordered, percent)
    upto = np.count_nonzero(total_blocks <= value, axis=1)
    below = np.count_nonzero(total_blocks < value, axis=1)
    spread = max(np.std(upto, ddof=1), np.std(below, ddof=1))
    half = stdtrit(blocks - 1, (1.0 + confidence) / 2.0) * spread * np.sqrt(blocks)
    low = int(np.floor(n * percent / 100 - half))
    high = int(np.ceil(n * percent / 100 + half)) + 1
    return PercentileInterval(
        value=value,
        low=float(ordered[max(low, 1) - 1]),
        high=float(ordered[min(high, n) - 1]),
    )
