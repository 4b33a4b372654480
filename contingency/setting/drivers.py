"""What drives the total: shares of variance, swings, effects of removal."""

from __future__ import annotations

from dataclasses import dataclass
from typing import Literal


@dataclass(frozen=True, kw_only=True, slots=True)
class Driver:
    """One input and what it does to the total cost."""

    id: str
    name: str
    kind: Literal["range", "cause", "systemic", "event"]
    variance_share: float
    """Fraction of the total's variance.  Ranges, systemic risks and events add up
    to 1; causes are another cut through the same variance and are never added."""
    mean_shift: float
    """Mean of what the input adds to the base, money."""
    swing: tuple[float, float]
    """Mean total in the input's lowest and highest tenth; for an event: not
    happening and happening.  Money."""
    removal_effect: float
    """Fall of the target percentile if the input were removed, money."""
