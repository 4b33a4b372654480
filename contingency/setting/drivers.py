"""What drives the total: shares of variance, swings, effects of removal."""

from __future__ import annotations

from dataclasses import dataclass
from typing import Literal

import numpy as np
from numpy.typing import NDArray

from contingency.estimate.nouns import Estimate
from contingency.simulation.result import Simulation


@dataclass(frozen=True, kw_only=True, slots=True)
class Driver:
    """One input and what it does to the total cost."""

    id: str
    name: str
    kind: Literal["range", "cause", "systemic", "event"]
    variance_share: float
    """Fraction of the total's variance.  Ranges, systemic risks and events add up
    to 1; causes are another cut through the same variance and are never added."""
    mean_shift: float
    """Mean of what the input adds to the base, money."""
    swing: tuple[float, float]
    """Mean total in the input's lowest and highest tenth; for an event: not
    happening and happening.  Money."""
    removal_effect: float
    """Fall of the target percentile if the input were removed, money."""


def find_drivers(
    estimate: Estimate, simulation: Simulation, cause_share: NDArray[np.float64]
) -> tuple[Driver, ...]:
    """Return every input as a driver, the largest share of variance first.

    Common causes follow after all others: they cut through the same variance another
    way.  Fixed packages are no drivers.  Money in price-date money.

    Parameters
    ----------
    estimate : Estimate
        Names and causes.
    simulation : Simulation
        Covariances, swings and removals, price-date money.
    cause_share : (j,) array
        Each cause's share of the variance, from `ExactMoments`.

    Notes
    -----
    The share of a range, a systemic risk or an event is the covariance of what it
    adds with the total, over the variance; these shares add up to 1.  The share of a
    cause is Var(E[T | cause]) / Var(T) in closed form.  A cause's removal holds it at
    its middle; its mean shift is nought by definition.
    """
    variance = (
        float(
            simulation.range_covariance.sum()
            + simulation.systemic_covariance.sum()
            + simulation.event_covariance.sum()
        )
        or 1.0
    )
    inputs = [
        Driver(
            id=package.id,
            name=package.name,
            kind="range",
            variance_share=float(simulation.range_covariance[k]) / variance,
            mean_shift=float(simulation.range_mean[k]),
            swing=_pair(simulation.range_swing[k]),
            removal_effect=float(simulation.range_removal[k]),
        )
        for k, package in enumerate(estimate.packages)
        if package.cost.varies
    ]
    inputs += [
        Driver(
            id=risk.id,
            name=risk.name,
            kind="systemic",
            variance_share=float(simulation.systemic_covariance[:, s].sum()) / variance,
            mean_shift=float(simulation.systemic_mean[:, s].sum()),
            swing=_pair(simulation.systemic_swing[s]),
            removal_effect=float(simulation.systemic_removal[s]),
        )
        for s, risk in enumerate(estimate.systemic)
    ]
    inputs += [
        Driver(
            id=event.id,
            name=event.name,
            kind="event",
            variance_share=float(simulation.event_covariance[e]) / variance,
            mean_shift=float(simulation.event_mean[e]),
            swing=_pair(simulation.event_swing[e]),
            removal_effect=float(simulation.event_removal[e]),
        )
        for e, event in enumerate(estimate.open_events)
    ]
    causes = [
        Driver(
            id=cause.id,
            name=cause.name,
            kind="cause",
            variance_share=float(cause_share[j]),
            mean_shift=0.0,
            swing=_pair(simulation.cause_swing[j]),
            removal_effect=float(simulation.cause_removal[j]),
        )
        for j, cause in enumerate(estimate.causes)
    ]
    return (*sorted(inputs, key=_largest_first), *sorted(causes, key=_largest_first))


def _largest_first(driver: Driver) -> tuple[float, str]:
    """Sort by absolute share of variance, then by id."""
    return -abs(driver.variance_share), driver.id


def _pair(swing: NDArray[np.float64]) -> tuple[float, float]:
    """Return the two ends of a swing as plain numbers."""
    return float(swing[0]), float(swing[1])
