"""The rows of an estimate as the checks look at them."""

from __future__ import annotations

import math
from collections import Counter
from dataclasses import dataclass
from typing import Literal

import numpy as np

from contingency.estimate.nouns import (
    CostRange,
    Estimate,
    Evidence,
    RiskEvent,
    WorkPackage,
)


@dataclass(frozen=True, kw_only=True, slots=True)
class RangedRow:
    """One row with a range: a package, a systemic risk or an open event."""

    id: str
    label: str
    kind: Literal["range", "systemic", "event"]
    range: CostRange
    evidence: Evidence


def ranged_rows(estimate: Estimate) -> list[RangedRow]:
    """Return every row that is simulated: packages, systemic risks, open events."""
    packages = [
        RangedRow(
            id=p.id, label=p.label, kind="range", range=p.cost, evidence=p.evidence
        )
        for p in estimate.packages
    ]
    systemic = [
        RangedRow(
            id=s.id, label=s.label, kind="systemic", range=s.uplift, evidence=s.evidence
        )
        for s in estimate.systemic
    ]
    events = [
        RangedRow(
            id=e.id,
            label=e.label,
            kind="event",
            range=e.impact_used,
            evidence=e.evidence,
        )
        for e in estimate.open_events
    ]
    return packages + systemic + events


def uncertain_packages(estimate: Estimate) -> list[WorkPackage]:
    """Return the packages whose range has any spread, in file order."""
    return [package for package in estimate.packages if package.cost.varies]


def skew_ratio(cost: CostRange) -> float:
    """Return how far a range reaches up for each unit that it reaches down.

    (high - likely) / (likely - low) where all three are given; else the same with
    the range's own P10, P50 and P90.  Infinite where it cannot fall.
    """
    low, likely, high = cost.low, cost.likely, cost.high
    if low is None or likely is None or high is None:
        tenths = cost.distribution.quantile(np.array([0.1, 0.5, 0.9]))
        low, likely, high = (float(value) for value in tenths)
    down = likely - low
    return (high - likely) / down if down > 0 else math.inf


def linked_by_causes(estimate: Estimate) -> set[str]:
    """Return the ids of the packages that share a common cause with another one."""
    loaded = Counter(
        load.cause
        for package in estimate.packages
        for load in package.loads
        if load.weight != 0
    )
    return {
        package.id
        for package in estimate.packages
        if any(load.weight != 0 and loaded[load.cause] > 1 for load in package.loads)
    }


def ranges_are_linked(estimate: Estimate) -> bool:
    """Return whether anything at all makes two ranges move together."""
    return bool(
        estimate.general_dependence
        or linked_by_causes(estimate)
        or any(pair.correlation != 0 for pair in estimate.correlations)
    )


def chance_of(event: RiskEvent, estimate: Estimate) -> float:
    """Return the chance that `event` happens at least once, 0 to 1.

    For an event that requires another, the chances along the chain multiplied; a
    required event that has occurred counts as certain.
    """
    if event.happens == "repeatedly":
        own = 1.0 - math.exp(-(event.frequency_used or 0.0))
    else:
        own = event.probability_used or 0.0
    if event.requires is None:
        return own
    parent = next((e for e in estimate.events if e.id == event.requires), None)
    if parent is None or not parent.is_open:
        return own
    return own * chance_of(parent, estimate)
