"""The funding table: base and contingency by year, in both moneys.

Formulas: ``docs/method.md``, section "Money by year".
"""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import dataclass
from math import fsum

import numpy as np
from numpy.typing import NDArray

from contingency.estimate.nouns import Estimate
from contingency.quantities.percentiles import block_interval
from contingency.quantities.rounding import round_amount, round_parts
from contingency.setting.allocation import Allocation, event_amounts
from contingency.simulation.outturn import series_in_use, simulate_outturn
from contingency.simulation.result import Simulation
from contingency.simulation.spending import (
    Spending,
    SpendingPlan,
    already_spent,
    price_mix,
    spending_plan,
    still_to_spend,
)

Array = NDArray[np.float64]


@dataclass(frozen=True, kw_only=True, slots=True)
class YearAmounts:
    """One financial year of the funding table, money; constant and outturn apart.

    ``base + contingency + escalation = total``.
    """

    year: str
    """As printed: 2026/27 or 2027."""
    starts: int
    """Calendar year in which it starts."""
    base: float
    """Price-date money."""
    contingency: float
    """At the target level, price-date money."""
    event_contingency: float
    """The part of `contingency` that events draw, price-date money."""
    escalation_on_base: float
    """Growth of prices on the base, at the mean rates."""
    escalation_on_contingency: float
    """Growth of prices on the contingency, at the mean rates."""
    total: float
    """Outturn money: base, contingency and escalation."""

    @property
    def escalation(self) -> float:
        """Growth of prices on base and contingency."""
        return self.escalation_on_base + self.escalation_on_contingency


@dataclass(frozen=True, kw_only=True, slots=True)
class SeriesUsed:
    """One price series that a package names."""

    id: str
    name: str
    rate: float
    """Mean of the yearly rate, fraction: the rate of the funding table."""
    base: float
    """Base of its packages, price-date money."""


@dataclass(frozen=True, kw_only=True, slots=True)
class Outturn:
    """The funding table against the simulated outturn cost, outturn money."""

    percent: int
    """The target, whole percent."""
    funding: float
    """Outturn amount of the table."""
    chance_funding_is_enough: float
    """Share of the trials whose outturn cost does not exceed it, 0 to 1."""
    mean: float
    """Mean of the outturn cost."""
    level: float
    """The target percentile of the outturn cost."""
    low: float
    """Lower end of its 95 % interval."""
    high: float
    """Upper end of its 95 % interval."""
    series: tuple[SeriesUsed, ...]
    """In file order."""


@dataclass(frozen=True, kw_only=True, slots=True)
class Funding:
    """The funding table and how sure it is."""

    years: tuple[YearAmounts, ...]
    """One year after another, without a gap."""
    outturn: Outturn


def find_funding(
    estimate: Estimate,
    simulation: Simulation,
    allocation: Allocation,
    *,
    threads: int = 1,
) -> Funding | None:
    """Return the funding table at the target; None where no package has a window.

    The constant columns add up to the base and to the contingency of `allocation`.
    Escalation stands apart at the means of the price rates; how sure the sum is in
    outturn money follows from a second pass over the draws of the run, which is made
    only where a package names a price series.

    Parameters
    ----------
    estimate : Estimate
        Windows, profiles, price series; price-date money.
    simulation : Simulation
        The run; price-date money.
    allocation : Allocation
        The contingency at the target, by package; price-date money.
    threads : int
        Blocks of the second pass that run at the same time; changes no figure.

    References
    ----------
    GAO-20-195G, survey of step 9 (phase, and convert to budget-year money);
    GAO-09-3SP (percentiles of years are not added up).
    """
    plan = spending_plan(estimate)
    if plan is None:
        return None
    years = _years(estimate, simulation, allocation, plan)
    total = simulation.total.reshape(simulation.blocks, simulation.block)
    if series_in_use(estimate):
        total = simulate_outturn(
            estimate, plan, blocks=simulation.blocks, threads=threads
        )
    funding = fsum(year.total for year in years)
    interval = block_interval(total, percent=allocation.percent)
    outturn = Outturn(
        percent=allocation.percent,
        funding=funding,
        chance_funding_is_enough=float(np.mean(total <= funding)),
        mean=float(total.mean()),
        level=interval.value,
        low=interval.low,
        high=interval.high,
        series=_series(estimate),
    )
    return Funding(years=years, outturn=outturn)


@dataclass(frozen=True, kw_only=True, slots=True)
class _Amount:
    """Some price-date money and how it is spent."""

    column: int
    """0 for base, 1 for estimate uncertainty, 2 for events."""
    money: float
    package: str
    course: Spending


def _years(
    estimate: Estimate,
    simulation: Simulation,
    allocation: Allocation,
    plan: SpendingPlan,
) -> tuple[YearAmounts, ...]:
    """Return the rows of the table, unrounded."""
    mix = price_mix(estimate)
    rate = {s.id: s.rate.distribution.mean for s in estimate.price_series}
    constant = np.zeros((len(plan.years), 3))
    growth = np.zeros((len(plan.years), 3))
    for amount in _amounts(estimate, simulation, allocation, plan):
        by_year = amount.course.by_year(plan.years)
        constant[:, amount.column] += amount.money * by_year
        for series, share in mix[amount.package]:
            grown = amount.course.growth_by_year(plan.years, rate[series])
            growth[:, amount.column] += amount.money * share * grown
    rows = []
    for year, money, grown in zip(plan.years, constant, growth, strict=True):
        base, uncertainty, events = (float(column) for column in money)
        on_base, *on_contingency = (float(column) for column in grown)
        contingency, on_both = uncertainty + events, sum(on_contingency)
        rows.append(
            YearAmounts(
                year=_label(year, plan.calendar.month),
                starts=year,
                base=base,
                contingency=contingency,
                event_contingency=events,
                escalation_on_base=on_base,
                escalation_on_contingency=on_both,
                total=fsum((base, contingency, on_base, on_both)),
            )
        )
    return tuple(rows)


def _amounts(
    estimate: Estimate,
    simulation: Simulation,
    allocation: Allocation,
    plan: SpendingPlan,
) -> Iterator[_Amount]:
    """Give every amount of base and contingency that is not nought."""
    uncertainty = {row.package: row.ranges + row.systemic for row in allocation.rows}
    for package in estimate.packages:
        name, to_come = package.id, plan.to_come[package.id]
        for column, money, course in (
            (0, already_spent(package), plan.spent[name]),
            (0, still_to_spend(package), to_come),
            (1, uncertainty[name], to_come),
        ):
            if money:
                yield _Amount(column=column, money=money, package=name, course=course)
    drawn = event_amounts(simulation, allocation).tolist()
    for event, money in zip(estimate.open_events, drawn, strict=True):
        for share in event.shares:
            yield _Amount(
                column=2,
                money=share.fraction * money,
                package=share.package,
                course=plan.of_event(event, share.package),
            )


def _series(estimate: Estimate) -> tuple[SeriesUsed, ...]:
    """Return the price series in use, in file order."""
    used = series_in_use(estimate)
    return tuple(
        SeriesUsed(
            id=series.id,
            name=series.name,
            rate=series.rate.distribution.mean,
            base=fsum(p.base for p in estimate.packages if p.prices == series.id),
        )
        for series in estimate.price_series
        if series.id in used
    )


def _label(year: int, month: int) -> str:
    """Return a financial year as printed: 2027, or 2026/27 where it spans two."""
    return str(year) if month == 1 else f"{year}/{(year + 1) % 100:02d}"


def printed_funding(
    years: tuple[YearAmounts, ...], *, base: float, contingency: float, step: float
) -> tuple[YearAmounts, ...]:
    """Return the table in whole steps; it closes on paper in both directions.

    Parameters
    ----------
    years : tuple of YearAmounts
        Unrounded.
    base, contingency : float
        As printed: what their columns add up to, multiples of `step`.
    step : float
        Money.
    """
    columns = (
        round_parts([y.base for y in years], step=step, total=base),
        round_parts([y.contingency for y in years], step=step, total=contingency),
        round_parts([y.escalation_on_base for y in years], step=step),
        round_parts([y.escalation_on_contingency for y in years], step=step),
    )
    return tuple(
        YearAmounts(
            year=year.year,
            starts=year.starts,
            base=float(row[0]),
            contingency=float(row[1]),
            event_contingency=round_amount(year.event_contingency, step),
            escalation_on_base=float(row[2]),
            escalation_on_contingency=float(row[3]),
            total=fsum(row),
        )
        for year, row in zip(years, zip(*columns, strict=True), strict=True)
    )
