"""What a result check may look at: the estimate and all that was computed."""

from __future__ import annotations

import datetime as dt
from dataclasses import dataclass
from typing import TYPE_CHECKING

from contingency.estimate.nouns import Estimate

if TYPE_CHECKING:
    # For the type checker only: `contingency check` must not load the engine.
    from contingency.assurance.robustness import Robustness
    from contingency.setting.allocation import Allocation, SecondOpinion
    from contingency.setting.drivers import Driver
    from contingency.setting.funding import Outturn, YearAmounts
    from contingency.setting.levels import FundingLevel
    from contingency.simulation.cross_check import CrossCheck
    from contingency.simulation.result import Simulation


@dataclass(frozen=True, kw_only=True, slots=True)
class RevisionChange:
    """What the checks must know of the way from the last revision.

    Money of this revision's price date, but for what was before.
    """

    previous: str
    """The last revision."""
    price_date_before: dt.date
    base_before: float
    contingency_before: float
    level_before: int
    """Target of the last revision, whole percent."""
    class_before: int | None
    percentiles_before: tuple[float, ...]
    """Total of the last revision at P01 to P99."""
    balance_before: float | None
    """Contingency account on the last data date; None where none was kept."""
    base_after: float
    contingency_after: float
    at_old_level: float
    """Contingency that this revision would have at the last one's target."""
    class_after: int | None
    base_residual: float
    contingency_residual: float
    """What no step of the bridge explains."""
    unexplained: tuple[tuple[str, float], ...]
    """Packages whose base moved without a reason, and by how much."""
    lacks_factor: bool
    """Whether the price dates differ and no factor is given."""
    retired: tuple[str, ...]
    """Ids of the events that were closed or occurred."""
    figures_differ: bool
    """Whether anything that moves the money differs."""
    unused_lines: tuple[int, ...]
    """Lines of changes.csv that explain nothing."""


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
    """Years of the funding table; empty where no package has a window."""
    outturn: Outturn | None = None
    """How sure the funding table is in outturn money; None without the table."""
    change: RevisionChange | None = None
    """The way from the last revision; None where there is none."""
    robustness: Robustness | None = None
    """What the number rests on; None where it was not asked for."""

    def percentile(self, percent: int) -> float:
        """Return the total at P`percent`, price-date money; 1 to 99."""
        return self.percentiles[percent - 1]
