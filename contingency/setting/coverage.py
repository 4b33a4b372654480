"""How much of an event's cost the funding level pays for, should it happen."""

from __future__ import annotations

from dataclasses import dataclass

from contingency.estimate.nouns import Estimate, RiskEvent
from contingency.setting.drivers import Driver


@dataclass(frozen=True, kw_only=True, slots=True)
class EventCoverage:
    """One open threat and what the contingency at the target holds for it."""

    event: RiskEvent
    mean_impact: float
    """Mean cost of one occurrence, price-date money."""
    funded: float
    """Fall of the contingency at the target if the event were closed, money."""
    coverage: float
    """`funded` over `mean_impact`; not limited to 0 to 1."""
    is_thinly_funded: bool
    """Whether the impact is large and the coverage small."""


def event_coverage(
    estimate: Estimate,
    drivers: tuple[Driver, ...],
    *,
    contingency: float,
    large: float,
    thin: float,
) -> tuple[EventCoverage, ...]:
    """Return the coverage of every open threat that has an impact, in file order.

    Parameters
    ----------
    contingency : float
        Contingency at the target, price-date money.
    large : float
        Share of the contingency above which one occurrence counts as large.
    thin : float
        Share of the mean impact below which an event is not meaningfully funded.

    Notes
    -----
    Coverage is (C with the event − C without) / mean impact.  An event whose
    probability is below 1 − p adds on its own nothing at level p: a funding level
    pays for many middling events and for next to none of a rare large one.
    """
    effect = {d.id: d.removal_effect for d in drivers if d.kind == "event"}
    found = []
    for event in estimate.open_events:
        mean = event.impact_used.distribution.mean
        if event.kind != "threat" or mean <= 0.0:
            continue
        share = effect[event.id] / mean
        found.append(
            EventCoverage(
                event=event,
                mean_impact=mean,
                funded=effect[event.id],
                coverage=share,
                is_thinly_funded=mean > large * contingency > 0.0 and share < thin,
            )
        )
    return tuple(found)
