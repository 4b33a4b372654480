"""Drawdown: what is left of the contingency against what is still needed.

What is spent no longer varies and events that are closed or have occurred are not
simulated, so the contingency of a revision at its target is what the remaining work
and the open events need.  It is set against the balance of the account.
"""

from __future__ import annotations

import datetime as dt
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from contingency.errors import NoAccount
from contingency.estimate.nouns import Estimate
from contingency.quantities.percentiles import percentile
from contingency.setting.account import Account, account_of, minimum_on
from contingency.simulation.totals import simulate_totals
from contingency.tracking.run_down import carried_forward, last_day, without_window

Array = NDArray[np.float64]

MOST_POINTS = 24
"""Days of the forecast at most; a choice of ours."""
FORECAST_BLOCKS = 4
"""Blocks of each day of the forecast: 16,384 trials with common random numbers, of
which only the difference to today counts."""


@dataclass(frozen=True, kw_only=True, slots=True)
class ForecastPoint:
    """One day of the run-down, money."""

    day: dt.date
    need: float
    """Contingency that will be needed at the target level."""
    minimum: float | None
    """Least that must be left by the minimum curve; None where it says nothing."""
    milestone: str
    """Name of the milestone on that day, or blank."""


@dataclass(frozen=True, kw_only=True)
class Drawdown:
    """The contingency account of one revision on its data date, money."""

    project: str
    revision: str
    currency: str
    level: int
    """Target level, whole percent."""
    account: Account
    need: float
    """Contingency needed at the target for remaining work and open events."""
    need_90: float
    """The same at P90."""
    need_95: float
    """The same at P95."""
    minimum: float | None
    """Least that must be left on the data date; None where no curve says so."""
    forecast: tuple[ForecastPoint, ...]
    """Today first; empty where nothing has a window."""
    without_window: tuple[str, ...]
    """Ids of packages and events that stay in the forecast in full."""
    not_drawn: tuple[str, ...]
    """Labels of events that occurred and that no draw names."""
    drawn_not_occurred: tuple[str, ...]
    """Labels of events that were drawn for and have not occurred, nor were treated."""

    @property
    def balance(self) -> float:
        """What is left in the account."""
        return self.account.balance

    @property
    def surplus(self) -> float:
        """Balance beyond the need; negative where it falls short."""
        return self.balance - self.need

    @property
    def ratio(self) -> float | None:
        """Balance over need; None where nothing is needed any more."""
        return self.balance / self.need if self.need > 0.0 else None

    @property
    def is_below_minimum(self) -> bool:
        """Whether the balance is under the minimum curve."""
        return self.minimum is not None and self.balance < self.minimum

    @property
    def releasable(self) -> float:
        """What could be released and still cover P90 of what remains; at least 0."""
        return max(0.0, self.balance - max(self.need_90, self.minimum or 0.0))


def drawdown(
    estimate: Estimate, *, total: Array | None = None, threads: int = 1
) -> Drawdown:
    """Return the contingency account of a revision against what is still needed.

    Parameters
    ----------
    estimate : Estimate
        With entries of drawdown.csv; price-date money.
    total : (n,) array of money, optional
        Simulated totals, where they are known.
    threads : int
        Blocks simulated at the same time; changes no figure.

    Raises
    ------
    NoAccount
        no-account.  The estimate has no entries.
    """
    account = account_of(estimate)
    if account is None:
        raise NoAccount(
            where=f"{estimate.project}, revision {estimate.revision}",
            found="The folder has no drawdown.csv with entries.",
            rule="An account begins with the contingency that was approved.",
            remedy="Add drawdown.csv with an entry of kind opening; docs/inputs.md "
            "has its columns.",
        )
    if total is None:
        total = simulate_totals(estimate, threads=threads).ravel()
    ordered = np.sort(total)
    target = estimate.contingency.target
    need = percentile(ordered, target) - estimate.base
    events = {entry.event for entry in estimate.account if entry.kind == "drawn"}
    return Drawdown(
        project=estimate.project,
        revision=estimate.revision,
        currency=estimate.currency,
        level=target,
        account=account,
        need=need,
        need_90=percentile(ordered, 90) - estimate.base,
        need_95=percentile(ordered, 95) - estimate.base,
        minimum=minimum_on(estimate.account_rule, estimate.data_date),
        forecast=_forecast(estimate, need, threads),
        without_window=without_window(estimate),
        not_drawn=tuple(
            event.label
            for event in estimate.events
            if event.status == "occurred" and event.id not in events
        ),
        drawn_not_occurred=tuple(
            event.label
            for event in estimate.events
            if event.id in events
            and event.status != "occurred"
            and event.use != "after"
        ),
    )


def _forecast(
    estimate: Estimate, need: float, threads: int
) -> tuple[ForecastPoint, ...]:
    """Return the need on the days to come, today's first.

    Today's need is the one that is reported; later ones differ from it as they do in
    fewer trials that all days share.
    """
    days = _days(estimate)
    if not days:
        return ()
    rule = estimate.account_rule
    named = {point.on: point.name for point in rule.minimum}
    now = _need(estimate, threads)
    needs = {estimate.data_date: need}
    for day in days:
        needs[day] = need + _need(carried_forward(estimate, day), threads) - now
    return tuple(
        ForecastPoint(
            day=day,
            need=amount,
            minimum=minimum_on(rule, day),
            milestone=named.get(day, ""),
        )
        for day, amount in needs.items()
    )


def _need(estimate: Estimate, threads: int) -> float:
    """Return the contingency at the target in the trials of the forecast."""
    total = simulate_totals(estimate, blocks=FORECAST_BLOCKS, threads=threads)
    ordered = np.sort(total, axis=None)
    return percentile(ordered, estimate.contingency.target) - estimate.base


def _days(estimate: Estimate) -> list[dt.date]:
    """Return the days of the forecast: quarters or years, and milestones."""
    end = last_day(estimate)
    if end is None:
        return []
    milestones = {p.on for p in estimate.account_rule.minimum}
    months = 3
    days = _period_ends(estimate.data_date, end, months)
    while len(days) > MOST_POINTS - len(milestones) and months < 12:
        months *= 2
        days = _period_ends(estimate.data_date, end, months)
    wanted = {*days, end, *(m for m in milestones if m > estimate.data_date)}
    return sorted(day for day in wanted if day > estimate.data_date)


def _period_ends(first: dt.date, last: dt.date, months: int) -> list[dt.date]:
    """Return the last days of calendar periods between two days."""
    ends = []
    for year in range(first.year, last.year + 1):
        for month in range(months, 13, months):
            after = dt.date(year + month // 12, month % 12 + 1, 1)
            ends.append(after - dt.timedelta(days=1))
    return [day for day in ends if first < day < last]
