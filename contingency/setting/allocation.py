"""The split of the contingency by source and its allocation to packages."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from contingency.estimate.nouns import PROJECT_WIDE, Estimate
from contingency.simulation.result import Simulation

Array = NDArray[np.float64]


@dataclass(frozen=True, kw_only=True, slots=True)
class Split:
    """The contingency at one level, by source, price-date money, unrounded."""

    ranges: float
    systemic: float
    events: float

    @property
    def estimate_uncertainty(self) -> float:
        """Ranges and systemic risks together."""
        return self.ranges + self.systemic

    @property
    def contingency(self) -> float:
        """All sources together."""
        return self.ranges + self.systemic + self.events


@dataclass(frozen=True, kw_only=True, slots=True)
class PackageAllocation:
    """What one package draws from the contingency, price-date money, unrounded."""

    package: str
    """Id; `project-wide` for events without packages."""
    name: str
    group: str
    base: float
    ranges: float
    systemic: float
    events: float
    contingency: float
    """ranges + systemic + events = expected + margin."""
    expected: float
    """Mean of the package's deviation from its base."""
    margin: float
    """Its part of the distance between the level and the mean."""
    variance_share: float
    """Covariance with the total over the total's variance; may be negative."""


@dataclass(frozen=True, kw_only=True, slots=True)
class GroupSubtotal:
    """Subtotal of the packages with one heading."""

    group: str
    base: float
    ranges: float
    systemic: float
    events: float
    contingency: float
    expected: float
    margin: float
    variance_share: float


@dataclass(frozen=True, kw_only=True, slots=True)
class Allocation:
    """The contingency at one level, by package."""

    percent: int
    rows: tuple[PackageAllocation, ...]
    """Packages in file order; `project-wide` last, if any event is project-wide."""
    groups: tuple[GroupSubtotal, ...]
    """In file order; packages without a group and project-wide have their own line."""
    split: Split
    expected: float
    margin: float


@dataclass(frozen=True, kw_only=True, slots=True)
class SecondOpinion:
    """The conditional-mean (Euler) allocation beside the covariance allocation."""

    split: Split
    contingency: tuple[float, ...]
    """One amount for each row of the allocation, same order; closes the same way."""


@dataclass(frozen=True, kw_only=True, slots=True)
class _Parts:
    """One figure for each part: rows (k + 1 of them, project-wide last) by source."""

    ranges: Array
    systemic: Array
    events: Array

    @property
    def all(self) -> Array:
        """(k + 1, 3) the sources side by side."""
        return np.column_stack([self.ranges, self.systemic, self.events])


def allocate(
    estimate: Estimate, simulation: Simulation, *, percent: int, total: float
) -> Allocation:
    """Return the contingency at one level, by package and by source.

    Each part c (package and source) carries its mean and its share, by covariance, of
    the distance between the level and the mean ([1]_)::

        allocation_c = E[c] + (Q_p(T) - E[T]) Cov(c, T) / Var(T)

    The parts add up to ``Q_p(T) - B`` at every level.  Negative amounts stand as they
    are: a part that offsets the others draws less than nothing.

    Parameters
    ----------
    estimate : Estimate
        Names, groups and shares of events.
    simulation : Simulation
        Means and covariances of the parts, price-date money.
    percent : int
        The level, whole percent.
    total : float
        Total cost at the level, price-date money.

    Returns
    -------
    Allocation
        Price-date money, unrounded.

    References
    ----------
    .. [1] Tasche, D. (2007). Euler allocation: theory and practice.
       arXiv:0708.2542.  (Section numbers from memory, so none are given.)
    """
    mean = _parts(
        estimate,
        simulation.range_mean,
        simulation.systemic_mean,
        simulation.event_mean,
    ).all
    share = _variance_shares(estimate, simulation).all
    margin = total - simulation.base - float(mean.sum())
    amounts = mean + margin * share
    names = [(p.id, p.name, p.group, p.base) for p in estimate.packages]
    if any(s.package == PROJECT_WIDE for e in estimate.open_events for s in e.shares):
        names.append((PROJECT_WIDE, "Project-wide", "", 0.0))
    rows = tuple(
        PackageAllocation(
            package=package,
            name=name,
            group=group,
            base=base,
            ranges=float(amounts[row, 0]),
            systemic=float(amounts[row, 1]),
            events=float(amounts[row, 2]),
            contingency=float(amounts[row].sum()),
            expected=float(mean[row].sum()),
            margin=float(margin * share[row].sum()),
            variance_share=float(share[row].sum()),
        )
        for row, (package, name, group, base) in enumerate(names)
    )
    return Allocation(
        percent=percent,
        rows=rows,
        groups=_subtotals(rows),
        split=_split(amounts),
        expected=float(mean.sum()),
        margin=margin,
    )


def event_amounts(simulation: Simulation, allocation: Allocation) -> Array:
    """Return (e,) what each open event draws from the contingency, in file order.

    By the same rule as the allocation to packages, of which it is another cut:
    price-date money, unrounded; the amounts sum to the split's events.
    """
    variance = float(
        simulation.range_covariance.sum()
        + simulation.systemic_covariance.sum()
        + simulation.event_covariance.sum()
    )
    share = simulation.event_covariance / (variance or 1.0)
    return np.asarray(simulation.event_mean + allocation.margin * share)


def second_opinion(
    estimate: Estimate, simulation: Simulation, allocation: Allocation
) -> SecondOpinion:
    """Return the conditional-mean allocation at the simulation's target.

    Each part carries its mean over the trials next to the target percentile
    (Tasche 2007, Euler allocation of a quantile).  What those trials miss of the
    level, because they are near it and not at it, follows the covariances, so that
    this allocation closes as well.

    Raises
    ------
    ValueError
        If `allocation` is for another level than the simulation's target.
    """
    if allocation.percent != simulation.target:
        msg = f"the trials near P{simulation.target} say nothing of another level"
        raise ValueError(msg)
    near = _parts(
        estimate,
        simulation.range_near,
        simulation.systemic_near,
        simulation.event_near,
    ).all
    share = _variance_shares(estimate, simulation).all
    missed = allocation.split.contingency - float(near.sum())
    amounts = near + missed * share
    return SecondOpinion(
        split=_split(amounts),
        contingency=tuple(amounts[: len(allocation.rows)].sum(axis=1).tolist()),
    )


def _variance_shares(estimate: Estimate, simulation: Simulation) -> _Parts:
    """Return each part's covariance with the total over the total's variance."""
    covariance = _parts(
        estimate,
        simulation.range_covariance,
        simulation.systemic_covariance,
        simulation.event_covariance,
    )
    variance = float(covariance.all.sum()) or 1.0
    return _Parts(
        ranges=covariance.ranges / variance,
        systemic=covariance.systemic / variance,
        events=covariance.events / variance,
    )


def _parts(estimate: Estimate, ranges: Array, systemic: Array, events: Array) -> _Parts:
    """Lay figures of packages, systemic risks and events on the allocation's rows."""
    row = {package.id: k for k, package in enumerate(estimate.packages)}
    row[PROJECT_WIDE] = len(estimate.packages)
    by_package = np.zeros(len(row))
    for figure, event in zip(events.tolist(), estimate.open_events, strict=True):
        for share in event.shares:
            by_package[row[share.package]] += share.fraction * figure
    return _Parts(
        ranges=np.append(ranges, 0.0),
        systemic=np.append(systemic.sum(axis=1), 0.0),
        events=by_package,
    )


def _split(amounts: Array) -> Split:
    """Return the sums over packages."""
    ranges, systemic, events = amounts.sum(axis=0).tolist()
    return Split(ranges=ranges, systemic=systemic, events=events)


def _subtotals(rows: tuple[PackageAllocation, ...]) -> tuple[GroupSubtotal, ...]:
    """Return one line for each heading; rows without one stand for themselves."""
    by_group: dict[str, list[PackageAllocation]] = {}
    for row in rows:
        by_group.setdefault(row.group or row.name, []).append(row)
    return tuple(
        GroupSubtotal(
            group=group,
            base=sum(r.base for r in members),
            ranges=sum(r.ranges for r in members),
            systemic=sum(r.systemic for r in members),
            events=sum(r.events for r in members),
            contingency=sum(r.contingency for r in members),
            expected=sum(r.expected for r in members),
            margin=sum(r.margin for r in members),
            variance_share=sum(r.variance_share for r in members),
        )
        for group, members in by_group.items()
    )
