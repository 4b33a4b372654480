"""What one simulation leaves behind: totals of every trial, sums of every part."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

Array = NDArray[np.float64]


@dataclass(frozen=True, kw_only=True, slots=True)
class Simulation:
    """One run of an estimate.

    Money is in the estimate's currency at its price date.  Axes: ``n`` trials,
    ``k`` packages in the order of `packages`, ``s`` systemic risks in the order of
    `systemic`, ``e`` open events in the order of `events`, ``j`` common causes in
    the order of `causes`.
    """

    packages: tuple[str, ...]
    """Ids, in file order."""
    systemic: tuple[str, ...]
    events: tuple[str, ...]
    causes: tuple[str, ...]
    base: float
    """Base estimate, money."""
    seed: int
    block: int
    """Trials in one block."""
    blocks: int
    settled: bool
    """Whether the target percentile's interval met the tolerance."""
    tolerance: float
    target: int
    """Whole percent of the level that `near`, `removal` and stopping refer to."""

    total: Array
    """(n,) total cost of every trial, in trial order; blocks follow one another."""

    range_mean: Array
    """(k,) mean of range value minus base."""
    range_covariance: Array
    """(k,) covariance with the total."""
    range_near: Array
    """(k,) mean over the trials next to the target percentile."""
    systemic_mean: Array
    """(k, s) mean of range value times uplift; 0 where the risk does not act."""
    systemic_covariance: Array
    systemic_near: Array
    event_mean: Array
    """(e,) mean of the event's cost, negative for an opportunity."""
    event_covariance: Array
    event_near: Array

    range_swing: Array
    """(k, 2) mean total in the lowest and in the highest tenth of the range."""
    systemic_swing: Array
    """(s, 2)"""
    event_swing: Array
    """(e, 2) mean total without and with the event."""
    cause_swing: Array
    """(j, 2)"""
    range_removal: Array
    """(k,) fall of the target percentile if the range were fixed at its base."""
    systemic_removal: Array
    event_removal: Array
    cause_removal: Array
    """(j,) fall of the target percentile if the cause were held at its middle."""

    correlation_repair: tuple[float, str, str] | None
    """Largest change made to a correlation that was given, and the pair."""

    @property
    def trials(self) -> int:
        """Number of trials."""
        return int(self.total.size)
