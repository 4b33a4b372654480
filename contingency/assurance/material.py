"""What a result check may look at: the estimate and all that was computed."""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING

from contingency.estimate.nouns import Estimate

if TYPE_CHECKING:
    # For the type checker only: `contingency check` must not load the engine.
    from contingency.assurance.robustness import Robustness
    from contingency.setting.allocation import Allocation, SecondOpinion
    from contingency.setting.drivers import Driver
    from contingency.setting.levels import FundingLevel
    from contingency.simulation.cross_check import CrossCheck
    from contingency.simulation.result import Simulation


@dataclass(frozen=True, kw_only=True, slots=True)
class YearAmounts:
    """One financial year of the funding table, money; constant and outturn apart."""

    year: str
    """As printed: 2026/27 or 2027."""
    starts: int
    """Calendar year in which it starts."""
    base: float
    """Price-date money."""
    contingency: float
    """Price-date money."""
    event_contingency: float
    """The part of `contingency` that events draw, price-date money."""
    escalation: float
    """Price growth on base and contingency."""
    total: float
    """Outturn money: base, contingency and escalation."""


@dataclass(frozen=True, kw_only=True)
class Material:
    """Everything that is known about one estimate's contingency before the checks.

    Fields of the same names in `contingency.study.Study` carry the same values.
    """

    estimate: Estimate
    simulation: Simulation
    mean: float
    standard_deviation: float
    chance_base_is_enough: float
    percentiles: tuple[float, ...]
    """Total at P01 to P99, price-date money."""
    levels: tuple[FundingLevel, ...]
    target: FundingLevel
    allocation: Allocation
    """At the target."""
    second_opinion: SecondOpinion
    drivers: tuple[Driver, ...]
    implied_average_correlation: float | None
    correlation_repair: tuple[float, str, str] | None
    cross_check: CrossCheck
    funding: tuple[YearAmounts, ...] = ()
    """Years of the funding table; empty where none was computed."""
    robustness: Robustness | None = None
    """What the number rests on; None where it was not asked for."""

    def percentile(self, percent: int) -> float:
        """Return the total at P`percent`, price-date money; 1 to 99."""
        return self.percentiles[percent - 1]
