"""The two cross-checks that every run carries.

(a) Mean and standard deviation of the total in closed form.  (b) A second route that
shares no code with the engine.  A run that fails either gives no report.
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray
from scipy.stats import binom, norm, t

from contingency.estimate.nouns import Estimate, RiskEvent, ShapeName
from contingency.quantities.percentiles import percentile
from contingency.simulation.exact import ExactMoments
from contingency.simulation.result import Simulation
from contingency.simulation.second_route import second_route_total

Array = NDArray[np.float64]

STANDARD_ERRORS = 4.0
"""Standard errors within which the moments must agree (a choice of the method)."""
OUTSIDE = float(norm.sf(STANDARD_ERRORS))
"""Chance beyond them on one side; Student's t has the same for few blocks."""
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
    """Largest difference that passes: four standard errors, as for many blocks."""

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
    second: Array | None = None,
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
    second : (m,) array of money, optional
        Totals by the second route, where they are drawn already.

    Returns
    -------
    CrossCheck
        Money in price-date money.

    Notes
    -----
    (a) The standard errors come from the spread of the blocks' means and variances
    and from what one trial more or less on a step of an input would move; as many are
    allowed as Student's t needs for the chance that four have on the normal curve.
    Plain Monte Carlo's four are the most, for a Latin hypercube does no worse (Owen,
    A. B. (1997). SIAM J. Numer. Anal. 34(5), 1884-1910; from memory).  (b) The second
    route's order statistics that bracket the level with a joint chance of 99.99 % over
    all levels (Bonferroni), widened by the engine's own error, must hold the engine's
    value.
    """
    total = second_route_total(estimate) if second is None else second
    blocks = simulation.total.reshape(simulation.blocks, simulation.block)
    steps = _steps(estimate)
    return CrossCheck(
        mean=_mean(blocks, exact, float(np.hypot.reduce(steps))),
        standard_deviation=_deviation(
            blocks, exact, float(np.hypot.reduce(np.square(steps)))
        ),
        levels=tuple(
            _level(np.sort(total), blocks, percent, len(percents))
            for percent in percents
        ),
        second_route_trials=int(total.size),
    )


def _mean(blocks: Array, exact: ExactMoments, step: float) -> MomentCheck:
    """Return the check of the mean."""
    # Stratified means can agree to the last digits: leave room for the tables.
    floor = CURVE_ERROR * abs(exact.mean)
    return MomentCheck(
        simulated=float(blocks.mean()),
        exact=exact.mean,
        allowed=_room(blocks, step) + floor,
    )


def _deviation(blocks: Array, exact: ExactMoments, step: float) -> MomentCheck:
    """Return the check of the standard deviation, from the blocks' variances."""
    deviation = exact.standard_deviation
    room = _room(np.square(blocks - exact.mean), step) + exact.truncation
    allowed = room / (2.0 * deviation) if deviation else 0.0
    return MomentCheck(
        simulated=float(blocks.std()),
        exact=deviation,
        allowed=allowed + CURVE_ERROR * (deviation + abs(exact.mean) * CURVE_ERROR),
    )


def _room(values: Array, step: float) -> float:
    """Return how far the mean of `values`, a row for each block, may be off.

    `step` is what one trial more or less on a step moves, in the units of a value.
    """
    count, size = values.shape
    plain = STANDARD_ERRORS * float(values.std() / np.sqrt(count * (size - 1)))
    if count == 1:
        return plain
    between = float(values.mean(axis=1).std(ddof=1))
    stratified = np.hypot(between, step / size) / np.sqrt(count)
    return min(float(t.isf(OUTSIDE, count - 1) * stratified), plain)


def _steps(estimate: Estimate) -> Array:
    """Return the steps of the inputs' quantile curves, price-date money.

    A Latin hypercube gives an event of chance 0.2 in 4,096 trials 819 or 820
    occurrences.  Where by chance all blocks have the same, their spread does not
    show it.
    """
    bases = {package.id: package.base for package in estimate.packages}
    ranges = [(package.cost, 1.0) for package in estimate.packages] + [
        (risk.uplift, sum(bases[name] for name in risk.packages))
        for risk in estimate.systemic
    ]
    listed = [
        np.ptp([value for value, _ in spread.outcomes]) * scale
        for spread, scale in ranges
        if spread.shape is ShapeName.DISCRETE
    ]
    return np.array([*listed, *map(_step, estimate.open_events)], dtype=np.float64)


def _step(event: RiskEvent) -> float:
    """Return the step of an event: its root mean square cost, for each likely count."""
    impact = event.impact_used.distribution
    # The counts of a Poisson number lie within four standard deviations of its mean.
    counts = 1.0 + 8.0 * np.sqrt(event.frequency_used or 0.0)
    return float(np.sqrt((impact.mean**2 + impact.variance) * counts))


def _level(second: Array, blocks: Array, percent: int, count: int) -> LevelCheck:
    """Return the check of one level; `second` is sorted."""
    p, m = percent / 100, second.size
    simulated = percentile(np.sort(blocks, axis=None), percent)
    tail = JOINT_ERROR / (2 * count)
    at_or_below = (blocks <= simulated).mean(axis=1)
    own = norm.isf(tail) * float(np.sqrt(p * (1 - p) / (blocks.size - len(blocks))))
    if len(blocks) > 1:
        between = float(at_or_below.std(ddof=1) / np.sqrt(len(blocks)))
        own = min(own, float(t.isf(tail, len(blocks) - 1)) * between)
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
