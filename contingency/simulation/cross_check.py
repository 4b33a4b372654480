"""The two cross-checks that every run carries (results of both)."""

from __future__ import annotations

from dataclasses import dataclass


@dataclass(frozen=True, kw_only=True, slots=True)
class MomentCheck:
    """One moment, simulated and in closed form."""

    simulated: float
    exact: float
    allowed: float
    """Largest difference that passes: four standard errors."""

    @property
    def passed(self) -> bool:
        """Whether the two agree."""
        return abs(self.simulated - self.exact) <= self.allowed


@dataclass(frozen=True, kw_only=True, slots=True)
class LevelCheck:
    """One funding level by the engine and by the second route."""

    percent: int
    simulated: float
    second_route: float
    allowed_low: float
    """Ends of the joint 99.99 % interval for the engine's value."""
    allowed_high: float

    @property
    def passed(self) -> bool:
        """Whether the two agree."""
        return self.allowed_low <= self.simulated <= self.allowed_high


@dataclass(frozen=True, kw_only=True, slots=True)
class CrossCheck:
    """Both cross-checks of one run."""

    mean: MomentCheck
    standard_deviation: MomentCheck
    levels: tuple[LevelCheck, ...]
    second_route_trials: int

    @property
    def passed(self) -> bool:
        """Whether everything agrees."""
        return (
            self.mean.passed
            and self.standard_deviation.passed
            and all(level.passed for level in self.levels)
        )
