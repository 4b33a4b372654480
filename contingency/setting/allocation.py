"""The split of the contingency by source and its allocation to packages."""

from __future__ import annotations

from dataclasses import dataclass


@dataclass(frozen=True, kw_only=True, slots=True)
class Split:
    """The contingency at one level, by source, price-date money, unrounded."""

    ranges: float
    systemic: float
    events: float

    @property
    def estimate_uncertainty(self) -> float:
        """Ranges and systemic risks together."""
        return self.ranges + self.systemic

    @property
    def contingency(self) -> float:
        """All sources together."""
        return self.ranges + self.systemic + self.events


@dataclass(frozen=True, kw_only=True, slots=True)
class PackageAllocation:
    """What one package draws from the contingency, price-date money, unrounded."""

    package: str
    """Id; `project-wide` for events without packages."""
    name: str
    group: str
    base: float
    ranges: float
    systemic: float
    events: float
    contingency: float
    """ranges + systemic + events = expected + margin."""
    expected: float
    """Mean of the package's deviation from its base."""
    margin: float
    """Its part of the distance between the level and the mean."""
    variance_share: float
    """Covariance with the total over the total's variance; may be negative."""


@dataclass(frozen=True, kw_only=True, slots=True)
class GroupSubtotal:
    """Subtotal of the packages with one heading."""

    group: str
    base: float
    ranges: float
    systemic: float
    events: float
    contingency: float
    expected: float
    margin: float
    variance_share: float


@dataclass(frozen=True, kw_only=True, slots=True)
class Allocation:
    """The contingency at one level, by package."""

    percent: int
    rows: tuple[PackageAllocation, ...]
    """Packages in file order; `project-wide` last, if any event is project-wide."""
    groups: tuple[GroupSubtotal, ...]
    """In file order; packages without a group and project-wide have their own line."""
    split: Split
    expected: float
    margin: float


@dataclass(frozen=True, kw_only=True, slots=True)
class SecondOpinion:
    """The conditional-mean (Euler) allocation beside the covariance allocation."""

    split: Split
    contingency: tuple[float, ...]
    """One amount for each row of the allocation, same order; closes the same way."""
