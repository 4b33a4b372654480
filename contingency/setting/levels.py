"""Funding levels: how much money holds, and how surely."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from contingency.estimate.nouns import Level
from contingency.quantities.percentiles import block_interval, percentile
from contingency.simulation.result import Simulation

Array = NDArray[np.float64]


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


def funding_level(simulation: Simulation, level: Level) -> FundingLevel:
    """Return the smallest total that the level's share of trials do not exceed.

    Parameters
    ----------
    simulation : Simulation
        Totals in price-date money.
    level : Level
        Whole percent, purpose and holder.

    Returns
    -------
    FundingLevel
        In price-date money.

    References
    ----------
    Hyndman and Fan (1996), definition 1, doi:10.1080/00031305.1996.10473566; the
    interval by Woodruff (1952) over the blocks, doi:10.1080/01621459.1952.10483443.
    """
    blocks = simulation.total.reshape(simulation.blocks, simulation.block)
    interval = block_interval(blocks, percent=level.percent)
    contingency = interval.value - simulation.base
    return FundingLevel(
        percent=level.percent,
        purpose=level.purpose,
        holder=level.holder,
        total=interval.value,
        contingency=contingency,
        percent_of_base=percent_of(contingency, simulation.base),
        low=interval.low,
        high=interval.high,
    )


def all_percentiles(simulation: Simulation) -> tuple[float, ...]:
    """Return total cost at P01 to P99, price-date money."""
    ordered = np.sort(simulation.total)
    return tuple(percentile(ordered, percent) for percent in range(1, 100))


def chance_base_is_enough(simulation: Simulation) -> float:
    """Return the share of trials that do not exceed the base, 0 to 1."""
    return float(np.mean(simulation.total <= simulation.base))


def percent_of(part: float, whole: float) -> float:
    """Return `part` in percent of `whole`; nought of a whole of nought."""
    return 100.0 * part / whole if whole else 0.0
