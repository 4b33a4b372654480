"""The earlier revision in money of the later one's price date."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass

from contingency.estimate.changes import PRICES
from contingency.estimate.nouns import (
    Change,
    CostRange,
    Estimate,
    RiskEvent,
    ShapeName,
    WorkPackage,
)


@dataclass(frozen=True, kw_only=True, slots=True)
class Factors:
    """What turns money of the earlier price date into money of the later one."""

    general: float
    """For everything without a factor of its own."""
    packages: Mapping[str, float]
    """By id of the later revision."""
    is_given: bool
    """Whether any line of changes.csv gives a factor."""

    @property
    def move_anything(self) -> bool:
        """Whether any factor differs from 1."""
        return any(factor != 1.0 for factor in (self.general, *self.packages.values()))


def factors_of(earlier: Estimate, later: Estimate) -> Factors:
    """Return the factors of changes.csv; all 1 where the price date is the same.

    A line with the id of a package is for that package, one without for the rest of
    the estimate: other packages, and the impacts of events.
    """
    if earlier.price_date == later.price_date:
        return Factors(general=1.0, packages={}, is_given=False)
    lines = [c for c in later.changes if is_price_line(c)]
    whole = [c.factor for c in lines if not c.id and c.factor is not None]
    return Factors(
        general=whole[-1] if whole else 1.0,
        packages={c.id: c.factor for c in lines if c.id and c.factor is not None},
        is_given=bool(lines),
    )


def is_price_line(change: Change) -> bool:
    """Whether a line of changes.csv carries a factor between two price dates."""
    return change.family == PRICES and change.factor is not None


def restated(estimate: Estimate, factors: Factors) -> Estimate:
    """Return the estimate with every amount in money of the later price date.

    Fractions, probabilities and frequencies stay as they are.
    """
    if not factors.move_anything:
        return estimate
    return estimate.model_copy(
        update={
            "packages": tuple(
                _package(p, factors.packages.get(p.id, factors.general))
                for p in estimate.packages
            ),
            "events": tuple(_event(e, factors.general) for e in estimate.events),
        }
    )


def _package(package: WorkPackage, factor: float) -> WorkPackage:
    spent = package.spent
    return package.model_copy(
        update={
            "base": package.base * factor,
            "spent": None if spent is None else spent * factor,
            "cost": scaled(package.cost, factor),
        }
    )


def _event(event: RiskEvent, factor: float) -> RiskEvent:
    def amount(money: float | None) -> float | None:
        return None if money is None else money * factor

    def impact(cost: CostRange | None) -> CostRange | None:
        return None if cost is None else scaled(cost, factor)

    return event.model_copy(
        update={
            "impact": impact(event.impact),
            "after_impact": impact(event.after_impact),
            "response_cost": amount(event.response_cost),
        }
    )


def scaled(cost: CostRange, factor: float) -> CostRange:
    """Return a range of money with every amount times `factor`."""

    def amount(money: float | None) -> float | None:
        return None if money is None else money * factor

    def outcome(first: float, second: float) -> tuple[float, float]:
        if cost.shape is ShapeName.POINTS:
            return first, second * factor
        return first * factor, second

    return cost.model_copy(
        update={
            "low": amount(cost.low),
            "likely": amount(cost.likely),
            "high": amount(cost.high),
            "outcomes": tuple(outcome(*pair) for pair in cost.outcomes),
        }
    )
