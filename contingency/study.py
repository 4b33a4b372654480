"""The whole job for one estimate: simulate, set, check.  Returns a Study."""

from __future__ import annotations

from dataclasses import dataclass

from contingency.assurance.findings import CheckOutcome, Finding
from contingency.estimate.nouns import Estimate
from contingency.setting.allocation import Allocation, SecondOpinion
from contingency.setting.drivers import Driver
from contingency.setting.levels import FundingLevel
from contingency.simulation.cross_check import CrossCheck
from contingency.simulation.result import Simulation


@dataclass(frozen=True, kw_only=True)
class Study:
    """Everything that is known about one estimate's contingency."""

    estimate: Estimate
    simulation: Simulation
    mean: float
    standard_deviation: float
    chance_base_is_enough: float
    percentiles: tuple[float, ...]
    """Total at P01 to P99, price-date money."""
    levels: tuple[FundingLevel, ...]
    """The funded levels, in the order of estimate.toml."""
    target: FundingLevel
    allocation: Allocation
    """At the target."""
    second_opinion: SecondOpinion
    drivers: tuple[Driver, ...]
    """Largest absolute share of variance first; causes after all others."""
    implied_average_correlation: float | None
    """Of package costs; None with fewer than two uncertain packages."""
    correlation_repair: tuple[float, str, str] | None
    """Largest change made to a correlation and the pair, or None."""
    cross_check: CrossCheck
    findings: tuple[Finding, ...]
    checks_run: tuple[CheckOutcome, ...]
