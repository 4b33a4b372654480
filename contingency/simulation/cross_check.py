"""The two cross-checks that every run carries.

(a) Mean and standard deviation of the total in closed form.  (b) A second route that
shares no code with the engine.  A run that fails either gives no report.
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray
from scipy.stats import binom, norm

from contingency.estimate.nouns import Estimate
from contingency.quantities.percentiles import percentile
from contingency.simulation.exact import ExactMoments
from contingency.simulation.result import Simulation
from contingency.simulation.second_route import second_route_total

Array = NDArray[np.float64]

STANDARD_ERRORS = 4.0
"""Standard errors within which the moments must agree (a choice of the method)."""
JOINT_ERROR = 1e-4
"""Chance of a false alarm over all levels: rarer than a real fault; ours."""
CURVE_ERROR = 1e-6
"""Relative error that tabulated curves may add (docs/method.md)."""


@dataclass(frozen=True, kw_only=True, slots=True)
class MomentCheck:
    """One moment, simulated and in closed form."""

    simulated: float
    exact: float
    allowed: float
    """Largest difference that passes: four standard errors."""

    @property
    def difference(self) -> float:
        """Simulated less exact."""
        return self.simulated - self.exact

    @property
    def passed(self) -> bool:
        """Whether the two agree."""
        return abs(self.difference) <= self.allowed


@dataclass(frozen=True, kw_only=True, slots=True)
class LevelCheck:
    """One funding level by the engine and by the second route."""

    percent: int
    simulated: float
    second_route: float
    allowed_low: float
    """Ends of the joint 99.99 % interval for the engine's value."""
    allowed_high: float

    @property
    def passed(self) -> bool:
        """Whether the two agree."""
        return self.allowed_low <= self.simulated <= self.allowed_high


@dataclass(frozen=True, kw_only=True, slots=True)
class CrossCheck:
    """Both cross-checks of one run."""

    mean: MomentCheck
    standard_deviation: MomentCheck
    levels: tuple[LevelCheck, ...]
    second_route_trials: int

    @property
    def passed(self) -> bool:
        """Whether everything agrees."""
        return (
            self.mean.passed
            and self.standard_deviation.passed
            and all(level.passed for level in self.levels)
        )


def cross_check(
    estimate: Estimate,
    simulation: Simulation,
    exact: ExactMoments,
    percents: Sequence[int],
) -> CrossCheck:
    """Return both cross-checks of a run.

    Parameters
    ----------
    estimate : Estimate
        What was simulated; the second route reads it anew.
    simulation : Simulation
        The run to be checked.
    exact : ExactMoments
        Mean and variance in closed form.
    percents : sequence of int
        The funded levels, whole percent.

    Returns
    -------
    CrossCheck
        Money in price-date money.

    Notes
    -----
    (a) The standard errors come from the spread of the blocks' means and variances;
    four of them are allowed.  (b) The second route's order statistics that bracket
    the level with a joint chance of 99.99 % over all levels (Bonferroni), widened by
    the engine's own error, must hold the engine's value.
    """
    total = second_route_total(estimate)
    blocks = simulation.total.reshape(simulation.blocks, simulation.block)
    return CrossCheck(
        mean=_moment(blocks.mean(axis=1), simulation.total.mean(), exact.mean),
        standard_deviation=_deviation(blocks, simulation.total, exact),
        levels=tuple(
            _level(np.sort(total), blocks, percent, len(percents))
            for percent in percents
        ),
        second_route_trials=int(total.size),
    )


def _moment(of_blocks: Array, simulated: float, exact: float) -> MomentCheck:
    """Return the check of a moment that is a mean over blocks."""
    error = float(of_blocks.std(ddof=1) / np.sqrt(of_blocks.size))
    # Stratified means can agree to the last digits: leave room for the tables.
    floor = CURVE_ERROR * abs(exact)
    return MomentCheck(
        simulated=float(simulated),
        exact=exact,
        allowed=STANDARD_ERRORS * error + floor,
    )


def _deviation(blocks: Array, total: Array, exact: ExactMoments) -> MomentCheck:
    """Return the check of the standard deviation, from the blocks' variances."""
    about = np.square(blocks - exact.mean).mean(axis=1)
    simulated = float(total.std())
    error = float(about.std(ddof=1) / np.sqrt(about.size))
    deviation = exact.standard_deviation
    room = STANDARD_ERRORS * error + exact.truncation
    allowed = room / (2.0 * deviation) if deviation else 0.0
    return MomentCheck(
        simulated=simulated,
        exact=deviation,
        allowed=allowed + CURVE_ERROR * (deviation + abs(exact.mean) * CURVE_ERROR),
    )


def _level(second: Array, blocks: Array, percent: int, count: int) -> LevelCheck:
    """Return the check of one level; `second` is sorted."""
    p, m = percent / 100, second.size
    simulated = percentile(np.sort(blocks, axis=None), percent)
    tail = JOINT_ERROR / (2 * count)
    at_or_below = (blocks <= simulated).mean(axis=1)
    own = norm.isf(tail) * float(at_or_below.std(ddof=1) / np.sqrt(blocks.shape[0]))
    below = p - binom.ppf(tail, m, p) / m
    above = binom.isf(tail, m, p) / m - p
    low = int(np.floor(m * (p - np.hypot(below, own)))) - 1
    high = int(np.ceil(m * (p + np.hypot(above, own)))) + 1
    slack = CURVE_ERROR * (float(second[-1] - second[0]) + abs(simulated))
    return LevelCheck(
        percent=percent,
        simulated=simulated,
        second_route=percentile(second, percent),
        allowed_low=float(second[max(low, 1) - 1]) - slack,
        allowed_high=float(second[min(high, m) - 1]) + slack,
    )
