"""The outside view: what similar projects came to, and where this one stands.

Two kinds: closed projects of one's own (history.csv), or a percentile table that
somebody published.  Neither is used before stage, money and scope are declared alike.
"""

from __future__ import annotations

import math
from collections.abc import Sequence
from dataclasses import dataclass
from typing import Literal

import numpy as np

from contingency.assurance.material import Material
from contingency.assurance.wording import counted
from contingency.estimate.modelled import FEWEST_PROJECTS, projects_like
from contingency.estimate.nouns import UpliftPart
from contingency.quantities.predictive import LognormalFit, fit_lognormal


@dataclass(frozen=True, kw_only=True, slots=True)
class OutsidePosition:
    """Where one amount of this project falls on the outside curve."""

    name: str
    """base, P50 or the target level."""
    amount: float
    """Total cost, price-date money."""
    ratio: float
    """Amount over base."""
    low_percent: float
    """Percent of similar projects that did not exceed the ratio; with a table, the
    last of its percentiles at or below the ratio, 0 where there is none."""
    high_percent: float
    """The same with a history; with a table, the next percentile, 100 beyond."""


@dataclass(frozen=True, kw_only=True, slots=True)
class OutsideView:
    """What similar projects came to, as final cost over the base estimate."""

    kind: Literal["history", "table"]
    source: str
    """The file or the publication, as printed."""
    comparable: tuple[str, str, str]
    """What is declared on stage, money and scope."""
    ratios: tuple[float, ...]
    """Final over estimate of each closed project, rising; empty with a table."""
    fit: LognormalFit | None
    """None with a table."""
    points: tuple[tuple[int, float], ...]
    """(whole percent, ratio): of the fit, P05 to P95; or of the table."""
    positions: tuple[OutsidePosition, ...]
    """Base, P50 and target of this project."""

    def ratio(self, percent: int) -> float | None:
        """Return the ratio at P`percent`; None beyond the ends of a table.

        Between the percentiles of a table the ratio is read by a straight line.
        """
        if self.fit is not None:
            return self.fit.quantile(percent)
        return table_ratio(self.points, percent)


@dataclass(frozen=True, kw_only=True, slots=True)
class OutsideAmount:
    """What the outside view says of this project at one percentile."""

    percent: int
    ratio: float
    """Final cost over base."""
    total: float
    """Ratio times this project's base, price-date money."""


def outside_amounts(
    view: OutsideView, *, base: float, percents: Sequence[int]
) -> tuple[OutsideAmount, ...]:
    """Return what the outside view says at some percentiles, in rising order.

    Percentiles beyond the ends of a table are left out.
    """
    found = ((percent, view.ratio(percent)) for percent in sorted(set(percents)))
    return tuple(
        OutsideAmount(percent=percent, ratio=ratio, total=ratio * base)
        for percent, ratio in found
        if ratio is not None
    )


def table_ratio(points: Sequence[tuple[int, float]], percent: int) -> float | None:
    """Return the ratio of a percentile table at P`percent`, by straight lines.

    >>> table_ratio([(50, 1.4), (80, 1.57)], 50)
    1.4
    >>> round(table_ratio([(50, 1.4), (80, 1.57)], 65), 3)
    1.485
    >>> table_ratio([(50, 1.4), (80, 1.57)], 90) is None
    True
    """
    percents = [point[0] for point in points]
    if not percents or not percents[0] <= percent <= percents[-1]:
        return None
    return float(np.interp(percent, percents, [point[1] for point in points]))


def uplift_left(parts: Sequence[UpliftPart]) -> float:
    """Return a published uplift for a mix of work, less what is managed away.

    The sum of share times uplift times what is left of it.  Fraction of the base.

    >>> plain = UpliftPart(kind="standard", share=0.7, upper=0.24)
    >>> odd = UpliftPart(kind="non-standard", share=0.3, upper=0.51)
    >>> round(uplift_left([plain, odd]), 3)
    0.321

    References
    ----------
    HM Treasury, Supplementary Green Book guidance on optimism bias, after Mott
    MacDonald (2002), Review of large public procurement in the UK.
    """
    return math.fsum(part.share * part.upper * (1.0 - part.managed) for part in parts)


def outside_view(material: Material) -> OutsideView | str:
    """Return the outside view of a study, or why there is none.

    Parameters
    ----------
    material : Material
        Results of the issued run, price-date money.

    Returns
    -------
    OutsideView or str
        A sentence where nothing is given, where it is not declared comparable, or
        where fewer than `FEWEST_PROJECTS` closed projects are left.
    """
    estimate = material.estimate
    rule = estimate.outside_rule
    if not estimate.history and not rule.percentiles:
        return "No closed projects and no published percentiles are given."
    if not rule.is_comparable:
        missing = [n for n in ("stage", "money", "scope") if not getattr(rule, n)]
        return (
            f"[outside_view] does not say how {' and '.join(missing)} are alike, so"
            " the comparison is not made."
        )
    declared = (rule.stage, rule.money, rule.scope)
    if rule.percentiles:
        points = tuple((percent, 1.0 + over) for percent, over in rule.percentiles)
        return OutsideView(
            kind="table",
            source=rule.source or "published percentiles",
            comparable=declared,
            ratios=(),
            fit=None,
            points=points,
            positions=_positions(material, points, None),
        )
    projects = projects_like(estimate.history, rule)
    if len(projects) < FEWEST_PROJECTS:
        return (
            f"history.csv has {counted(len(projects), 'project')} to compare with;"
            f" {FEWEST_PROJECTS} are needed."
        )
    fit = fit_lognormal([project.ratio for project in projects])
    points = tuple((percent, fit.quantile(percent)) for percent in range(5, 96, 5))
    return OutsideView(
        kind="history",
        source="history.csv" + (f", group {rule.group}" if rule.group else ""),
        comparable=declared,
        ratios=tuple(sorted(project.ratio for project in projects)),
        fit=fit,
        points=points,
        positions=_positions(material, points, fit),
    )


def _positions(
    material: Material, points: Sequence[tuple[int, float]], fit: LognormalFit | None
) -> tuple[OutsidePosition, ...]:
    """Return where base, P50 and target fall on the outside curve."""
    base = material.estimate.base
    amounts = {
        "base": base,
        "P50": material.percentile(50),
        material.target.name: material.target.total,
    }
    if base <= 0:
        return ()
    positions = []
    for name, amount in amounts.items():
        ratio = amount / base
        if fit is not None:
            low = high = 100 * fit.chance(ratio)
        else:
            reached = [p for p, at in points if at <= ratio]
            beyond = [p for p, at in points if at > ratio]
            low = max(reached, default=0)
            high = min(beyond, default=100)
        positions.append(
            OutsidePosition(
                name=name,
                amount=amount,
                ratio=ratio,
                low_percent=low,
                high_percent=high,
            )
        )
    return tuple(positions)
