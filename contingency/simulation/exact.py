"""Mean and variance of total cost in closed form, from the parts.

The first of the two cross-checks.  It uses the same distributions as the engine
but none of its draws.  ``docs/method.md``, section "Closed form", derives every line.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from contingency.quantities.hermite import (
    coefficients,
    covariance_matrix,
    truncation_bound,
)
from contingency.simulation.cost_model import CostModel

Array = NDArray[np.float64]


@dataclass(frozen=True, kw_only=True, slots=True)
class ExactMoments:
    """Mean and variance of total cost, and what they are made of; money."""

    mean: float
    variance: float
    truncation: float
    """What the series of the covariances may leave out of the variance, at most."""
    package_covariance: Array
    """(k, k) covariance of package costs, systemic uplift included, events not."""
    cause_share: Array
    """(j,) variance of the mean of the total given the cause, over the variance."""

    @property
    def standard_deviation(self) -> float:
        """Square root of the variance."""
        return float(np.sqrt(self.variance))

    @property
    def implied_average_correlation(self) -> float | None:
        """Average correlation of package costs; None with fewer than two uncertain.

        (Var(sum) - sum of s^2) / ((sum of s)^2 - sum of s^2).
        """
        variances = np.diag(self.package_covariance)
        deviations = np.sqrt(variances)
        if np.count_nonzero(deviations) < 2:
            return None
        cross = float(self.package_covariance.sum() - variances.sum())
        return cross / float(deviations.sum() ** 2 - variances.sum())


def exact_mean(model: CostModel) -> float:
    """Return the mean of total cost, money."""
    ranges = _package_means(model) @ _factor_means(model)
    return float(ranges + _event_means(model).sum())


def exact_moments(model: CostModel) -> ExactMoments:
    """Return mean and variance of total cost in closed form.

    Covariances of ranges under the Gaussian copula follow Mehler's formula with the
    Hermite coefficients of the quantile curves; systemic risks are independent of the
    ranges; events are joined by what they require and exclude only.
    """
    packages, cause_variance, truncation = _package_covariance(model)
    variance = float(packages.sum()) + float(_event_covariance(model).sum())
    return ExactMoments(
        mean=exact_mean(model),
        variance=variance,
        truncation=truncation,
        package_covariance=packages,
        cause_share=cause_variance / variance if variance else cause_variance,
    )


def _package_means(model: CostModel) -> Array:
    """Return (k,) means of the ranges."""
    return np.array([p.cost.distribution.mean for p in model.packages])


def _factor_means(model: CostModel) -> Array:
    """Return (k,) means of one plus the uplifts that act on a package."""
    means = np.array([shape.mean for shape in model.uplift_shapes])
    if not means.size:
        return np.ones(len(model.packages))
    return np.asarray(1.0 + model.acts @ means)


def _package_covariance(model: CostModel) -> tuple[Array, Array, float]:
    """Return covariances of the package costs X (1 + Y).

    (k, k) covariances, (j,) variances explained by causes, and what the series may
    leave out of the sum of the covariances.
    """
    count, v = len(model.packages), model.varying
    shapes = [p.cost.distribution for p in model.packages]
    mean = np.array([shape.mean for shape in shapes])
    joint = np.zeros((count, count))
    terms = coefficients(shapes[:v])
    correlation = model.dependence.correlation()
    variances = np.array([shape.variance for shape in shapes[:v]])
    joint[:v, :v] = covariance_matrix(terms, correlation, variances)
    left_out = truncation_bound(terms, correlation, variances)
    factor = _factor_means(model)
    uplift_variance = np.array([shape.variance for shape in model.uplift_shapes])
    acts = model.acts.astype(np.float64)
    shared = (acts * uplift_variance) @ acts.T if uplift_variance.size else 0.0
    # Cov(X F, Z G) = E[XZ] E[FG] - E[X]E[Z]E[F]E[G], X and Z independent of F and G.
    both = joint + np.outer(mean, mean)
    covariance = joint * np.outer(factor, factor) + both * shared
    weights = model.dependence.weights
    first = weights.shape[1] - len(model.causes)
    causes = np.zeros(len(model.causes))
    if model.dependence.root is None:
        order = np.arange(1, terms.shape[1] + 1)
        for j in range(len(model.causes)):
            powers = weights[:, first + j, None] ** order
            causes[j] = np.square((terms * powers * factor[:v, None]).sum(axis=0)).sum()
    truncation = float(factor[:v] @ left_out @ factor[:v])
    return covariance, causes, truncation


def _selections(model: CostModel, event: int) -> dict[int, tuple[int, float]]:
    """Return what must come out for an event: unit -> (event, chance), its own first.

    A unit is named by the row of its first event; a group of events that exclude one
    another is one unit.
    """
    unit_of = {m.event: u.members[0].event for u in model.units for m in u.members}
    chance = {m.event: m.stop - m.start for u in model.units for m in u.members}
    chance |= {r.event: float(-np.expm1(-r.frequency)) for r in model.repeated}
    result: dict[int, tuple[int, float]] = {}
    row: int | None = event
    while row is not None:
        result[unit_of.get(row, row)] = (row, chance[row])
        row = model.parents[row]
    return result


def _own_moments(model: CostModel) -> tuple[Array, Array]:
    """Return (e,) first and second moments of an event's own cost, parents granted.

    Once with chance p and impact X: p E[X] and p E[X^2].  A Poisson number of times:
    L E[X] and L E[X^2] + (L E[X])^2.
    """
    chance = {m.event: m.stop - m.start for u in model.units for m in u.members}
    frequency = {r.event: r.frequency for r in model.repeated}
    first = np.zeros(len(model.events))
    second = np.zeros(len(model.events))
    for row, event in enumerate(model.events):
        shape = event.impact_used.distribution
        square = shape.variance + shape.mean**2
        if row in frequency:
            first[row] = frequency[row] * shape.mean
            second[row] = frequency[row] * square + first[row] ** 2
        else:
            first[row] = chance[row] * shape.mean
            second[row] = chance[row] * square
        first[row] *= event.sign
    return first, second


def _event_means(model: CostModel) -> Array:
    """Return (e,) means of the events' costs."""
    first, _ = _own_moments(model)
    chains = [_selections(model, row) for row in range(len(model.events))]
    return np.array(
        [
            first[row] * _chance_of(chain, without={row})
            for row, chain in enumerate(chains)
        ]
    )


def _event_covariance(model: CostModel) -> Array:
    """Return (e, e) covariances of the events' costs."""
    first, second = _own_moments(model)
    means = _event_means(model)
    chains = [_selections(model, row) for row in range(len(model.events))]
    count = len(model.events)
    joint = np.zeros((count, count))
    for a in range(count):
        joint[a, a] = second[a] * _chance_of(chains[a], without={a})
        for b in range(a):
            if _clash(chains[a], chains[b]):
                continue
            union = chains[a] | chains[b]
            chance = _chance_of(union, without={a, b})
            joint[a, b] = joint[b, a] = first[a] * first[b] * chance
    return joint - np.outer(means, means)


def _clash(a: dict[int, tuple[int, float]], b: dict[int, tuple[int, float]]) -> bool:
    """Whether two chains ask one unit for different events."""
    return any(a[unit][0] != b[unit][0] for unit in a.keys() & b.keys())


def _chance_of(chain: dict[int, tuple[int, float]], *, without: set[int]) -> float:
    """Return the chance that all selections but those of `without` come out."""
    return float(
        np.prod([chance for row, chance in chain.values() if row not in without])
    )
