"""Systemic uplifts that a history or a rated model gives, instead of a low and a high.

The distribution becomes a curve through percentiles, as if somebody had written it
under `points`; so it is simulated, checked and printed like any other.
"""

from __future__ import annotations

import math
from collections.abc import Callable
from dataclasses import dataclass, field

from contingency.estimate.nouns import (
    ClosedProject,
    CostRange,
    OutsideRule,
    RatedModel,
    ShapeName,
)
from contingency.quantities.predictive import fit_lognormal, model_quantile

PERCENTS = (1, 5, 10, 20, 30, 40, 50, 60, 70, 80, 90, 95, 99)
"""Percentiles that the curve goes through; ours, close enough that a curve between
them is off by less than a thousandth of the spread."""
FEWEST_PROJECTS = 8
"""Closed projects without which nothing is fitted; a choice of the project's brief."""


@dataclass(frozen=True, kw_only=True, slots=True)
class Models:
    """What a systemic risk may take its uplift from."""

    history: tuple[ClosedProject, ...] = ()
    rule: OutsideRule = field(default_factory=OutsideRule)
    rated: RatedModel | None = None

    def uplift(self, model: str) -> CostRange | str:
        """Return the uplift of `history` or `ratings`, or why there is none."""
        if model == "ratings":
            if self.rated is None:
                return "There is no ratings.toml that can be read."
            return rated_uplift(self.rated)
        projects = projects_like(self.history, self.rule)
        if not self.rule.is_comparable:
            return "[outside_view] does not declare stage, money and scope."
        if len(projects) < FEWEST_PROJECTS:
            return (
                "history.csv has too few projects to compare with:"
                f" {len(projects)} of {FEWEST_PROJECTS}."
            )
        return history_uplift(projects)


def projects_like(
    history: tuple[ClosedProject, ...], rule: OutsideRule
) -> tuple[ClosedProject, ...]:
    """Return the closed projects of the group that is compared with."""
    return tuple(p for p in history if not rule.group or p.group == rule.group)


def history_uplift(projects: tuple[ClosedProject, ...]) -> CostRange:
    """Return the uplift, fractions, that closed projects predict for one more.

    Final cost less what ranges and events cover, over the estimate, less 1.
    """
    fit = fit_lognormal([project.net_ratio for project in projects])
    return _curve(lambda percent: fit.quantile(percent) - 1.0)


def rated_uplift(model: RatedModel) -> CostRange:
    """Return the uplift, fractions, that a rated model predicts."""
    return _curve(lambda percent: rated_quantile(model, percent))


def rated_quantile(model: RatedModel, percent: float) -> float:
    """Return the uplift that a rated model predicts is not exceeded, by `percent`."""
    predicted = model_quantile(
        model.expected, model.residual_spread, percent, degrees=model.degrees
    )
    return math.expm1(predicted) if model.form == "log" else predicted


def _curve(quantile: Callable[[float], float]) -> CostRange:
    return CostRange(
        shape=ShapeName.POINTS,
        outcomes=tuple((float(percent), quantile(percent)) for percent in PERCENTS),
    )
