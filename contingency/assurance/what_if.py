"""One change to an estimate at a time: what the questions of robustness change.

Each function returns the estimate with the change, or a sentence that says why the
question does not arise.  Identifiers stay, so the draws of every input stay too.
"""

from __future__ import annotations

from collections.abc import Callable

from contingency.errors import ContingencyError
from contingency.estimate.nouns import (
    CostRange,
    Ends,
    Estimate,
    RiskEvent,
    ShapeName,
)

Changed = Estimate | str

TWO_ENDED = frozenset(
    {
        ShapeName.PERT,
        ShapeName.TRIANGULAR,
        ShapeName.UNIFORM,
        ShapeName.NORMAL,
        ShapeName.LOGNORMAL,
    }
)
"""Shapes that have a low and a high."""


def with_ends(estimate: Estimate, percent: int) -> Changed:
    """Return every range with its ends read as P`percent` and its mirror.

    Ranges whose ends are further in already stay as they are, and so do ranges for
    which no curve has such ends.
    """
    wider = Ends(low_percent=percent, high_percent=100 - percent)

    def widen(given: CostRange) -> CostRange:
        if given.shape not in TWO_ENDED or not given.varies:
            return given
        if (given.ends.low_percent or 0) >= percent:
            return given
        return _if_possible(given, given.model_copy(update={"ends": wider}))

    changed = _with_ranges(estimate, widen)
    if changed == estimate:
        return f"No range has ends outside {wider}."
    return changed


def with_shape(estimate: Estimate, old: ShapeName, new: ShapeName) -> Changed:
    """Return every range of shape `old` read as shape `new`, with the same figures."""

    def swap(given: CostRange) -> CostRange:
        if given.shape != old or not given.varies:
            return given
        return _if_possible(given, given.model_copy(update={"shape": new}))

    changed = _with_ranges(estimate, swap)
    return f"No range has the shape {old}." if changed == estimate else changed


def with_dependence(estimate: Estimate, general: float) -> Changed:
    """Return the estimate with another general dependence; named causes stay.

    Where the loads on causes leave less room, the most that they leave is taken.
    """
    changed = min(general, most_dependence(estimate))
    if changed == (estimate.general_dependence or 0.0):
        return f"The general dependence is {changed:g}."
    return estimate.model_copy(update={"general_dependence": changed})


def most_dependence(estimate: Estimate) -> float:
    """Return the largest general dependence that the loads leave room for, 0 to 1."""
    loaded = [
        sum(load.weight**2 for load in package.loads) for package in estimate.packages
    ]
    return max(0.0, 1.0 - max(loaded, default=0.0))


def without_dependence(estimate: Estimate) -> Changed:
    """Return the estimate with independent ranges: no causes, no correlations."""
    if not estimate.causes and not estimate.correlations:
        return "There are no named causes and no correlations."
    bare = tuple(p.model_copy(update={"loads": ()}) for p in estimate.packages)
    return estimate.model_copy(
        update={
            "general_dependence": 0.0,
            "packages": bare,
            "causes": (),
            "correlations": (),
        }
    )


def without_systemic(estimate: Estimate) -> Changed:
    """Return the estimate without its systemic risks."""
    if not estimate.systemic:
        return "The estimate has no systemic risks."
    return estimate.model_copy(update={"systemic": ()})


def before_treatment(estimate: Estimate) -> Changed:
    """Return the estimate with every event at its values before treatment."""

    def turn(event: RiskEvent) -> RiskEvent:
        has = event.impact is not None
        return event.model_copy(update={"use": "before"}) if has else event

    changed = _with_events(estimate, turn)
    return "No open event is used after treatment." if changed == estimate else changed


def after_treatment(estimate: Estimate) -> Changed:
    """Return the estimate with every event at its values after treatment.

    Events without values after treatment keep those before.
    """

    def turn(event: RiskEvent) -> RiskEvent:
        weight = event.after_probability
        if event.happens == "repeatedly":
            weight = event.after_frequency
        if event.after_impact is None or weight is None:
            return event
        return event.model_copy(update={"use": "after"})

    changed = _with_events(estimate, turn)
    if changed == estimate:
        return "Every open event with values after treatment is used so."
    return changed


def with_chances(estimate: Estimate, factor: float) -> Changed:
    """Return every probability and frequency times `factor`.

    A probability stops at 1; events that exclude one another stop where their sum
    reaches 1, each by the same part.
    """
    if not estimate.open_events:
        return "The estimate has no open events."
    group_sum = {
        event.id: sum(
            other.probability_used or 0.0
            for other in estimate.open_events
            if other.id == event.id or other.id in event.excludes
        )
        for event in estimate.open_events
    }

    def turn(event: RiskEvent) -> RiskEvent:
        after = event.use == "after"
        if event.happens == "repeatedly":
            name = "after_frequency" if after else "frequency"
            changed = factor * (event.frequency_used or 0.0)
        else:
            name = "after_probability" if after else "probability"
            whole = group_sum[event.id]
            most = 1.0 / whole if whole > 0 else 1.0
            changed = min(factor, most) * (event.probability_used or 0.0)
        return event.model_copy(update={name: changed})

    return _with_events(estimate, turn)


def _if_possible(old: CostRange, new: CostRange) -> CostRange:
    """Return the new range if there is such a curve, else the old one."""
    try:
        _ = new.distribution
    except ContingencyError:
        return old
    return new


def _with_ranges(
    estimate: Estimate, change: Callable[[CostRange], CostRange]
) -> Estimate:
    """Return the estimate with `change` done to every range that is simulated."""

    def turn(event: RiskEvent) -> RiskEvent:
        name = "after_impact" if event.use == "after" else "impact"
        return event.model_copy(update={name: change(event.impact_used)})

    changed = _with_events(estimate, turn)
    return changed.model_copy(
        update={
            "packages": tuple(
                p.model_copy(update={"cost": change(p.cost)}) for p in estimate.packages
            ),
            "systemic": tuple(
                s.model_copy(update={"uplift": change(s.uplift)})
                for s in estimate.systemic
            ),
        }
    )


def _with_events(
    estimate: Estimate, change: Callable[[RiskEvent], RiskEvent]
) -> Estimate:
    """Return the estimate with `change` done to every open event."""
    events = tuple(change(e) if e.is_open else e for e in estimate.events)
    return estimate.model_copy(update={"events": events})
