"""A second route to the total: plain Monte Carlo on scipy's own distributions.

Shares no code with the engine: it reads the nouns of the estimate anew, solves
percentile ends by other means, draws from another generator, takes every value from
a frozen distribution of `scipy.stats`, and adds up trial by trial.  Slow and simple
on purpose.
"""

from __future__ import annotations

from collections.abc import Callable
from typing import Any

import numpy as np
from numpy.typing import NDArray
from scipy import optimize, stats
from scipy.interpolate import CubicHermiteSpline, PchipInterpolator

from contingency.estimate.nouns import CostRange, Estimate, RiskEvent, ShapeName

Array = NDArray[np.float64]
Quantile = Callable[[Array], Array]

MOST_TRIALS = 65_536
LEAST_TRIALS = 8_192
DRAWS = 1_000_000
"""Quantiles that one run may take, so that a large estimate does not wait; ours."""


def second_route_total(estimate: Estimate) -> Array:
    """Return (m,) total cost by plain Monte Carlo, price-date money, unsorted."""
    inputs = len(estimate.packages) + len(estimate.events) + len(estimate.systemic)
    m = int(np.clip(DRAWS // max(inputs, 1), LEAST_TRIALS, MOST_TRIALS))
    random = np.random.Generator(np.random.PCG64DXSM([estimate.run.seed, 2]))
    cost = _package_costs(estimate, random, m)
    total = np.zeros(m)
    uplift = {package: np.ones(m) for package in cost}
    for risk in estimate.systemic:
        drawn = quantile_of(risk.uplift)(random.random(m))
        for package in risk.packages:
            uplift[package] += drawn
    for package, values in cost.items():
        total += values * uplift[package]
    return total + _event_costs(estimate, random, m)


def _package_costs(
    estimate: Estimate, random: np.random.Generator, m: int
) -> dict[str, Array]:
    """Return each package's cost, joined by a Gaussian copula."""
    general = estimate.general_dependence or 0.0
    score = _joint_scores(estimate, random, m, general)
    return {
        package.id: quantile_of(package.cost)(stats.norm.cdf(score[:, column]))
        for column, package in enumerate(estimate.packages)
    }


def _joint_scores(
    estimate: Estimate, random: np.random.Generator, m: int, general: float
) -> Array:
    """Return (m, k) correlated normal scores from one covariance matrix."""
    k = len(estimate.packages)
    correlation = np.full((k, k), general)
    loads = np.zeros((k, len(estimate.causes)))
    cause = [c.id for c in estimate.causes]
    for row, package in enumerate(estimate.packages):
        for load in package.loads:
            loads[row, cause.index(load.cause)] = load.weight
    correlation += loads @ loads.T
    row_of = {package.id: row for row, package in enumerate(estimate.packages)}
    for pair in estimate.correlations:
        a, b = row_of[pair.a], row_of[pair.b]
        wanted = 2.0 * np.sin(np.pi * pair.correlation / 6.0)
        correlation[a, b] = correlation[b, a] = wanted
    np.fill_diagonal(correlation, 1.0)
    # An eigenvalue root, so that a singular correlation is no obstacle.
    values, vectors = np.linalg.eigh(correlation)
    root = vectors * np.sqrt(np.maximum(values, 0.0))
    length = np.sqrt(np.square(root).sum(axis=1, keepdims=True))
    independent = stats.norm.ppf(random.random((m, k)))
    return np.asarray(independent @ (root / length).T)


def _event_costs(estimate: Estimate, random: np.random.Generator, m: int) -> Array:
    """Return (m,) the cost of all open events."""
    events = {event.id: event for event in estimate.open_events}
    chosen = _chosen(list(events.values()), random, m)
    times: dict[str, NDArray[np.int64]] = {}

    def times_of(event: RiskEvent) -> NDArray[np.int64]:
        if event.id not in times:
            count = chosen[event.id]
            if event.requires in events:
                count = np.where(times_of(events[event.requires]) > 0, count, 0)
            times[event.id] = count
        return times[event.id]

    total = np.zeros(m)
    for event in events.values():
        count = times_of(event)
        quantile = quantile_of(event.impact_used)
        for turn in range(1, int(count.max(initial=0)) + 1):
            happens = np.flatnonzero(count >= turn)
            total[happens] += event.sign * quantile(random.random(happens.size))
    return total


def _chosen(
    events: list[RiskEvent], random: np.random.Generator, m: int
) -> dict[str, NDArray[np.int64]]:
    """Return how often each event would happen if nothing else had to."""
    chosen: dict[str, NDArray[np.int64]] = {}
    for event in events:
        if event.id in chosen:
            continue
        if event.happens == "repeatedly":
            law = stats.poisson(event.frequency_used or 0.0)
            chosen[event.id] = np.asarray(law.ppf(random.random(m)), dtype=np.int64)
            continue
        group = [event, *(other for other in events if other.id in event.excludes)]
        chances = [float(member.probability_used or 0.0) for member in group]
        edges = np.cumsum([0.0, *chances])
        u = random.random(m)
        for member, start, stop in zip(group, edges[:-1], edges[1:], strict=True):
            chosen[member.id] = ((u >= start) & (u < stop)).astype(np.int64)
    return chosen


def quantile_of(given: CostRange) -> Quantile:
    """Return the quantile function of a range, from scipy.stats alone."""
    low, likely, high = given.low, given.likely, given.high
    if given.shape is ShapeName.DISCRETE:
        return _discrete(given.outcomes)
    if given.shape is ShapeName.POINTS:
        return _points(given.outcomes)
    if given.shape is ShapeName.FIXED or low is None or high is None or low == high:
        constant = likely if likely is not None else low
        return lambda p: np.full_like(p, constant)
    ends = None
    if given.ends.low_percent is not None and given.ends.high_percent is not None:
        ends = (given.ends.low_percent / 100, given.ends.high_percent / 100)
    if given.shape in (ShapeName.NORMAL, ShapeName.LOGNORMAL):
        if ends is None:
            msg = f"{given.shape} needs percentile ends"
            raise ValueError(msg)
        return _unbounded(given.shape, low, likely, high, ends)
    if given.shape is ShapeName.UNIFORM:
        likely = None
    return _bounded(given.shape, low, likely, high, ends)


def _discrete(outcomes: tuple[tuple[float, float], ...]) -> Quantile:
    values, chances = (np.array(column) for column in zip(*outcomes, strict=True))
    law = stats.rv_discrete(values=(np.arange(values.size), chances / chances.sum()))
    return lambda p: values[np.asarray(law.ppf(p), dtype=np.int64)]


def _points(outcomes: tuple[tuple[float, float], ...]) -> Quantile:
    percents, values = (np.array(column) for column in zip(*outcomes, strict=True))
    score = stats.norm.ppf(percents / 100)
    secant = np.diff(values) / np.diff(score)
    slopes = PchipInterpolator(score, values).derivative()(score)
    # Beyond the outermost points the curve is the straight line to their neighbours.
    slopes[0], slopes[-1] = secant[0], secant[-1]
    curve = CubicHermiteSpline(score, values, slopes)
    slope = curve.derivative()

    def quantile(p: Array) -> Array:
        z = stats.norm.ppf(p)
        inner = np.clip(z, score[0], score[-1])
        return np.asarray(curve(inner) + slope(inner) * (z - inner))

    return quantile


def _unbounded(
    shape: ShapeName,
    low: float,
    likely: float | None,
    high: float,
    ends: tuple[float, float],
) -> Quantile:
    z_low, z_high = stats.norm.ppf(ends[0]), stats.norm.ppf(ends[1])
    if shape is ShapeName.NORMAL:
        spread = (high - low) / (z_high - z_low)
        return stats.norm(low - spread * z_low, spread).ppf
    shift = 0.0
    if likely is not None:

        def miss(log_spread: float) -> float:
            law = stats.lognorm(log_spread)
            mode = np.exp(-(log_spread**2))
            at_low, at_high = law.ppf(ends[0]), law.ppf(ends[1])
            return float(
                (high - likely) * (mode - at_low) - (likely - low) * (at_high - mode)
            )

        log_spread = float(optimize.brentq(miss, 1e-4, -z_low - 1e-9, xtol=1e-14))
        law = stats.lognorm(log_spread)
        scale = (high - low) / (law.ppf(ends[1]) - law.ppf(ends[0]))
        shift = low - scale * law.ppf(ends[0])
    else:
        log_spread = float(np.log(high / low) / (z_high - z_low))
        scale = low / np.exp(log_spread * z_low)
    return stats.lognorm(log_spread, loc=shift, scale=scale).ppf


def _bounded(
    shape: ShapeName,
    low: float,
    likely: float | None,
    high: float,
    ends: tuple[float, float] | None,
) -> Quantile:
    def law(a: float, b: float) -> tuple[Any, tuple[float, ...]]:
        """Return a distribution of scipy and its parameters."""
        width = b - a
        if shape is ShapeName.UNIFORM or likely is None:
            return stats.uniform, (a, width)
        place = (likely - a) / width
        if shape is ShapeName.TRIANGULAR:
            return stats.triang, (place, a, width)
        return stats.beta, (1 + 4 * place, 5 - 4 * place, a, width)

    def quantile_between(a: float, b: float) -> Quantile:
        family, parameters = law(a, b)
        return _quantile(family(*parameters))

    if ends is None:
        return quantile_between(low, high)
    if likely is None:
        step = (high - low) / (ends[1] - ends[0])
        start = low - step * ends[0]
        return quantile_between(start, start + step)
    width, given = high - low, np.array([low, high])

    def limits(outward: Array) -> tuple[float, float]:
        """Return limits that lie outside the likely value, whatever is tried."""
        step = width * np.exp(outward)
        return min(low, likely) - float(step[0]), max(high, likely) + float(step[1])

    def miss(outward: Array) -> Array:
        family, parameters = law(*limits(outward))
        return np.asarray(family.cdf(given, *parameters) - ends)

    solved = optimize.least_squares(miss, [-1.5, -1.5], xtol=1e-14, ftol=1e-14)
    return quantile_between(*limits(solved.x))


def _quantile(law: Any) -> Quantile:  # noqa: ANN401  (a frozen distribution)
    """Return the quantile function of a frozen distribution."""
    return lambda p: np.asarray(law.ppf(p), dtype=np.float64)
