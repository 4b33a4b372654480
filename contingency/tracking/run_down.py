"""What contingency will be needed later, if all goes as planned.

The estimate is carried forward to a day.  Of each package only what its spending
window leaves still varies, in the same proportion; of each event only the chance that
is left of its window, given that it has not happened so far.  What has no window, or
one that has passed, stays as it is.
"""

from __future__ import annotations

import datetime as dt
from collections.abc import Callable

from contingency.estimate.nouns import (
    CostRange,
    Estimate,
    RiskEvent,
    ShapeName,
    WorkPackage,
)

PROFILES: dict[str, Callable[[float], float]] = {
    "even": lambda u: u,
    "early": lambda u: 1.0 - (1.0 - u) ** 2,
    "late": lambda u: u * u,
    "bell": lambda u: u * u * (3.0 - 2.0 * u),
}
"""Share of the cost that is spent when the share u of the window has passed: the
integrals of the densities in `contingency.simulation.spending`."""


def carried_forward(estimate: Estimate, day: dt.date) -> Estimate:
    """Return the estimate as it would stand on a later day, all going as planned.

    Bases stay, so that the contingency of the result is what will be needed then.
    """
    since = estimate.data_date
    passed = {
        event.id: _window_passed(event, since, day) for event in estimate.open_events
    }
    return estimate.model_copy(
        update={
            "packages": tuple(
                _package(p, 1.0 - spent_between(p, since, day))
                for p in estimate.packages
            ),
            "events": tuple(
                _event(e, estimate, passed) if e.is_open else e for e in estimate.events
            ),
        }
    )


def last_day(estimate: Estimate) -> dt.date | None:
    """Return the last day of any window after the data date, or None."""
    days = [p.finish for p in estimate.packages if p.finish and p.start]
    days += [e.window_finish for e in estimate.open_events if e.window_finish]
    later = [day for day in days if day > estimate.data_date]
    return max(later, default=None)


def without_window(estimate: Estimate) -> tuple[str, ...]:
    """Return the ids of varying packages and open events that no window carries on."""
    since = estimate.data_date
    packages = [
        p.id
        for p in estimate.packages
        if p.cost.varies
        and not (p.start and p.finish and p.finish > since and p.start < p.finish)
    ]
    events = [
        e.id
        for e in estimate.open_events
        if not (e.window_finish and e.window_finish > since)
    ]
    return (*packages, *events)


def spent_between(package: WorkPackage, since: dt.date, day: dt.date) -> float:
    """Return the share of what is left on the first day that is spent by the second."""
    start, finish = package.start, package.finish
    if start is None or finish is None or finish <= since or start >= finish:
        return 0.0
    profile = PROFILES[package.spend or "even"]
    before = profile(_share(start, finish, since))
    after = profile(_share(start, finish, day))
    return (after - before) / (1.0 - before)


def _share(start: dt.date, finish: dt.date, day: dt.date) -> float:
    """Return the share of a window that has passed on a day, 0 to 1."""
    return min(max((day - start).days / (finish - start).days, 0.0), 1.0)


def _window_passed(event: RiskEvent, since: dt.date, day: dt.date) -> float:
    """Return the share of what is left of an event's window that passes, 0 to 1."""
    finish = event.window_finish
    if finish is None or finish <= since:
        return 0.0
    start = max(event.window_start or since, since)
    if start >= finish:
        return 1.0 if day >= finish else 0.0
    return _share(start, finish, day)


def _event(event: RiskEvent, estimate: Estimate, passed: dict[str, float]) -> RiskEvent:
    """Return an open event with the chance that is left of it."""
    left = 1.0 - passed[event.id]
    prefix = "after_" if event.use == "after" else ""
    if event.happens == "repeatedly":
        frequency = (event.frequency_used or 0.0) * left
        return event.model_copy(update={f"{prefix}frequency": frequency})
    # Given that neither it nor what excludes it has happened so far.
    happened = sum(
        (other.probability_used or 0.0) * passed[other.id]
        for other in estimate.open_events
        if other.id == event.id or other.id in event.excludes
    )
    if happened == 0.0:
        return event
    chance = (event.probability_used or 0.0) * left
    chance = chance / (1.0 - happened) if happened < 1.0 else 0.0
    return event.model_copy(update={f"{prefix}probability": chance})


def _package(package: WorkPackage, left: float) -> WorkPackage:
    """Return a package of which only a part still varies around its base."""
    if left == 1.0:
        return package
    return package.model_copy(
        update={"cost": drawn_in(package.cost, package.base, left)}
    )


def drawn_in(cost: CostRange, base: float, left: float) -> CostRange:
    """Return a range with every figure drawn in towards the base.

    Each figure keeps the part `left` of its distance to the base.
    """

    def towards(money: float | None) -> float | None:
        return None if money is None else base + left * (money - base)

    def outcome(first: float, second: float) -> tuple[float, float]:
        if cost.shape is ShapeName.POINTS:
            return first, base + left * (second - base)
        return base + left * (first - base), second

    if left == 0.0:
        return CostRange(shape=ShapeName.FIXED, likely=base)
    return cost.model_copy(
        update={
            "low": towards(cost.low),
            "likely": towards(cost.likely),
            "high": towards(cost.high),
            "outcomes": tuple(outcome(*pair) for pair in cost.outcomes),
        }
    )
