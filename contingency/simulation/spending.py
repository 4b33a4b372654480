"""When money is spent: windows, profiles, financial years, growth of prices.

Formulas: ``docs/method.md``, section "Money by year".
"""

from __future__ import annotations

import datetime as dt
from calendar import isleap
from collections.abc import Callable, Iterable
from dataclasses import dataclass
from math import ceil, floor, fsum

import numpy as np
from numpy.typing import NDArray

from contingency.estimate.nouns import PROJECT_WIDE, Estimate, RiskEvent, WorkPackage

Array = NDArray[np.float64]

POINTS = 5
"""Points of Gauss and Legendre's rule in each piece: exact for the profiles, and for
their product with the growth of prices off by less than 1e-9 (held by a test)."""
_NODES, _WEIGHTS = np.polynomial.legendre.leggauss(POINTS)

PROFILES: dict[str, Callable[[Array], Array]] = {
    "even": np.ones_like,
    "early": lambda u: 2.0 * (1.0 - u),
    "late": lambda u: 2.0 * u,
    "bell": lambda u: 6.0 * u * (1.0 - u),
}
"""Density of the money over the place in its window, 0 to 1.  Choices of ours."""


@dataclass(frozen=True, kw_only=True, eq=False)
class Spending:
    """When one unit of money is spent; ``m`` points in time."""

    time: Array
    """(m,) years after the price date; nought before it."""
    weight: Array
    """(m,) parts of the unit; they sum to 1."""
    year: NDArray[np.int64]
    """(m,) calendar year in which the financial year of the point begins."""

    def by_year(self, years: range) -> Array:
        """Return (y,) parts of the unit spent in each year."""
        return self._summed(self.weight, years)

    def growth_by_year(self, years: range, rate: float) -> Array:
        """Return (y,) what prices add to the unit in each year at a yearly `rate`."""
        grown = self.weight * np.expm1(self.time * np.log1p(rate))
        return self._summed(grown, years)

    def growth(self, rate: Array) -> Array:
        """Return (n,) what prices add to the unit at each of (n,) yearly rates."""
        added = np.zeros_like(rate)
        yearly = np.log1p(rate)
        for time, weight in zip(self.time, self.weight, strict=True):
            added += weight * np.expm1(time * yearly)
        return added

    def _summed(self, amounts: Array, years: range) -> Array:
        sums = np.bincount(
            self.year - years.start, weights=amounts, minlength=len(years)
        )
        return np.asarray(sums, dtype=np.float64)


@dataclass(frozen=True, kw_only=True, slots=True)
class Calendar:
    """Moments in years: 2027.5 is the middle of 2027, of whatever length."""

    price: float
    """Last moment of the price date."""
    data: float
    """Last moment of the data date."""
    data_day: float
    """First moment of the data date."""
    month: int
    """Month in which a financial year begins, 1 to 12."""

    def begins(self, year: int) -> float:
        """Return the first moment of the financial year that begins in `year`."""
        # Not by a date of that year: years past the calendar are asked for too.
        like = dt.date(2000 if isleap(year) else 2001, self.month, 1)
        return year + (like.timetuple().tm_yday - 1) / (365 + isleap(year))

    def year_of(self, moment: float) -> int:
        """Return the calendar year in which the financial year of a moment begins."""
        year = floor(moment)
        return year if moment >= self.begins(year) else year - 1


def begin_of(day: dt.date) -> float:
    """Return the first moment of a day, years."""
    return day.year + (day.timetuple().tm_yday - 1) / (365 + isleap(day.year))


def end_of(day: dt.date) -> float:
    """Return the last moment of a day, years; that of 31 December is a whole year."""
    return day.year + day.timetuple().tm_yday / (365 + isleap(day.year))


def calendar_of(estimate: Estimate) -> Calendar:
    """Return the calendar of an estimate."""
    return Calendar(
        price=end_of(estimate.price_date),
        data=end_of(estimate.data_date),
        data_day=begin_of(estimate.data_date),
        month=estimate.financial_year_starts or 1,
    )


@dataclass(frozen=True, kw_only=True, slots=True)
class SpendingPlan:
    """When the money of an estimate is spent."""

    calendar: Calendar
    spent: dict[str, Spending]
    """By package: what is spent already."""
    to_come: dict[str, Spending]
    """By package: what it has yet to spend."""
    project: Spending
    """What all packages with a window have yet to spend."""
    events: dict[str, Spending]
    """By open event, where it has a window."""
    years: range
    """Calendar years in which the financial years of the plan begin."""

    def of_event(self, event: RiskEvent, package: str) -> Spending:
        """Return when an event's cost on one package is spent."""
        own = self.events.get(event.id)
        return own if own is not None else self.to_come.get(package, self.project)


def spending_plan(estimate: Estimate) -> SpendingPlan | None:
    """Return when money is spent; None where no package has a window."""
    windowed = [p for p in estimate.packages if p.start and p.finish]
    if not windowed:
        return None
    calendar = calendar_of(estimate)
    maker = _Maker(calendar)
    to_come = {p.id: maker.to_come(p) for p in windowed}
    project = _mixed([(still_to_spend(p), to_come[p.id]) for p in windowed])
    last = max(end_of(p.finish) for p in windowed if p.finish)
    spent = {p.id: maker.spent(p) for p in estimate.packages}
    events = {
        event.id: maker.event(event, last)
        for event in estimate.open_events
        if event.window_start or event.window_finish
    }
    used = [*to_come.values(), *events.values()]
    used += [spent[p.id] for p in estimate.packages if p.spent]
    return SpendingPlan(
        calendar=calendar,
        spent=spent,
        to_come={p.id: to_come.get(p.id, project) for p in estimate.packages},
        project=project,
        events=events,
        years=range(
            min(int(one.year.min()) for one in used),
            max(int(one.year.max()) for one in used) + 1,
        ),
    )


def already_spent(package: WorkPackage) -> float:
    """Return the part of the base that is spent, price-date money."""
    return min(package.spent or 0.0, package.base)


def still_to_spend(package: WorkPackage) -> float:
    """Return the part of the base that is yet to be spent, price-date money."""
    return package.base - already_spent(package)


def price_mix(estimate: Estimate) -> dict[str, tuple[tuple[str, float], ...]]:
    """Return by package the price series in use and the share that each carries.

    What is on no package has the mix of all packages, weighted by base; shares that
    are missing from one are without growth.
    """
    mix: dict[str, tuple[tuple[str, float], ...]] = {
        p.id: ((p.prices, 1.0),) if p.prices else () for p in estimate.packages
    }
    named = sorted({p.prices for p in estimate.packages if p.prices})
    mix[PROJECT_WIDE] = tuple(
        (
            name,
            fsum(p.base for p in estimate.packages if p.prices == name) / estimate.base,
        )
        for name in named
    )
    return mix


class _Maker:
    """Makes each distinct course of spending once."""

    def __init__(self, calendar: Calendar) -> None:
        self._calendar = calendar
        self._made: dict[tuple[float, float, float, float, str], Spending] = {}
        self._on_data_date = _at(calendar.data_day, calendar)

    def spent(self, package: WorkPackage) -> Spending:
        """Return when a package's money spent to date was spent."""
        if not package.start or not package.finish:
            return self._on_data_date
        start, finish = begin_of(package.start), end_of(package.finish)
        last = min(finish, self._calendar.data)
        return self._part(start, finish, start, last, package.spend or "even")

    def to_come(self, package: WorkPackage) -> Spending:
        """Return when a package with a window spends the rest."""
        if not package.start or not package.finish:
            return self._on_data_date
        start, finish = begin_of(package.start), end_of(package.finish)
        first = start if package.spent is None else max(start, self._calendar.data)
        return self._part(start, finish, first, finish, package.spend or "even")

    def event(self, event: RiskEvent, last: float) -> Spending:
        """Return when an event's cost is spent; `last` ends the project."""
        data = self._calendar.data
        start = begin_of(event.window_start) if event.window_start else data
        finish = end_of(event.window_finish) if event.window_finish else last
        return self._part(start, finish, max(start, data), finish, "even")

    def _part(
        self, start: float, finish: float, first: float, last: float, profile: str
    ) -> Spending:
        """Return the spending of a window between two moments."""
        if not first < last:
            return self._on_data_date
        key = (start, finish, first, last, profile)
        if key not in self._made:
            self._made[key] = _course(*key, self._calendar)
        return self._made[key]


def _course(
    start: float,
    finish: float,
    first: float,
    last: float,
    profile: str,
    calendar: Calendar,
) -> Spending:
    """Return the part from `first` to `last` of a window's spending as points."""
    years = [calendar.begins(y) for y in range(floor(first), ceil(last) + 1)]
    cuts = {first, last, *(c for c in (*years, calendar.price) if first < c < last)}
    ends = np.array(sorted(cuts))
    half = np.diff(ends)[:, None] / 2.0  # (pieces, 1)
    moment = ends[:-1, None] + half * (1.0 + _NODES)  # (pieces, points)
    weight = half * _WEIGHTS * PROFILES[profile]((moment - start) / (finish - start))
    begins = np.array([calendar.year_of(m) for m in ends[:-1]], dtype=np.int64)
    return Spending(
        time=np.maximum(moment - calendar.price, 0.0).ravel(),
        weight=(weight / fsum(weight.ravel())).ravel(),
        year=np.repeat(begins, POINTS),
    )


def _at(moment: float, calendar: Calendar) -> Spending:
    """Return the spending of everything at one moment."""
    return Spending(
        time=np.array([max(moment - calendar.price, 0.0)]),
        weight=np.ones(1),
        year=np.array([calendar.year_of(moment)], dtype=np.int64),
    )


def _mixed(parts: Iterable[tuple[float, Spending]]) -> Spending:
    """Return the spending of several amounts together; evenly if all are nought."""
    amounts = list(parts)
    whole = fsum(amount for amount, _ in amounts)
    shares = [a / whole if whole else 1.0 / len(amounts) for a, _ in amounts]
    courses = [course for _, course in amounts]
    time = np.concatenate([c.time for c in courses])
    year = np.concatenate([c.year for c in courses])
    parts_of = zip(shares, courses, strict=True)
    weight = np.concatenate([share * course.weight for share, course in parts_of])
    # Packages often share a window: equal points need their growth once only.
    points, place = np.unique(np.stack([time, year]), axis=1, return_inverse=True)
    return Spending(
        time=points[0],
        weight=np.asarray(np.bincount(place.reshape(-1), weights=weight), np.float64),
        year=points[1].astype(np.int64),
    )
