"""Funding levels: how much money holds, and how surely."""

from __future__ import annotations

from dataclasses import dataclass


@dataclass(frozen=True, kw_only=True, slots=True)
class FundingLevel:
    """One funding level and the interval that the simulation leaves around it."""

    percent: int
    """Chance that the amount is enough, in whole percent: 80 for P80."""
    purpose: str
    holder: str
    total: float
    """Total cost, price-date money."""
    contingency: float
    """Total minus base, price-date money."""
    percent_of_base: float
    """Contingency in percent of the base."""
    low: float
    """Lower end of the 95 % interval of the total."""
    high: float
    """Upper end of the 95 % interval of the total."""

    @property
    def name(self) -> str:
        """The level as it is printed: P80."""
        return f"P{self.percent:02d}"
