"""The whole chain of revisions on one page: whether knowledge grows as money goes."""

from __future__ import annotations

import datetime as dt
from collections.abc import Mapping, Sequence
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from contingency.estimate.nouns import Estimate
from contingency.quantities.percentiles import percentile
from contingency.simulation.totals import simulate_totals

Array = NDArray[np.float64]

SHRINKS_BY = 0.01
"""A width that falls by less than this part of itself has not shrunk; a choice of
ours, of the size of the simulation's own noise."""


@dataclass(frozen=True, kw_only=True, slots=True)
class TrendPoint:
    """One revision, in money of its own price date."""

    revision: str
    gate: str
    data_date: dt.date
    price_date: dt.date
    estimate_class: int | None
    """1, most defined, to 5."""
    level: int
    """Target level, whole percent."""
    base: float
    contingency: float
    """At the target level."""
    mean: float
    p10: float
    p50: float
    p90: float
    """Totals."""
    chance_base_is_enough: float
    findings: Mapping[str, int] | None
    """Number of findings by severity, where the checks were run."""

    @property
    def total(self) -> float:
        """Base and contingency together."""
        return self.base + self.contingency

    @property
    def percent_of_base(self) -> float:
        """Contingency in percent of the base."""
        return 100.0 * self.contingency / self.base

    @property
    def width(self) -> float:
        """P10 to P90 of the total as a part of its P50."""
        return (self.p90 - self.p10) / self.p50 if self.p50 else 0.0


@dataclass(frozen=True, kw_only=True, slots=True)
class Trend:
    """The revisions of one estimate, the oldest first."""

    currency: str
    points: tuple[TrendPoint, ...]

    @property
    def remarks(self) -> tuple[str, ...]:
        """A sentence for each pair of revisions between which the width did not shrink.

        Range should narrow as definition improves; where it does not, somebody
        must be able to say why.
        """
        said = []
        for before, after in zip(self.points, self.points[1:], strict=False):
            if after.width <= before.width * (1.0 - SHRINKS_BY):
                continue
            moved = (
                "grew" if after.width > before.width * (1 + SHRINKS_BY) else "stayed"
            )
            sentence = (
                f"From revision {before.revision} to {after.revision} the width from "
                f"P10 to P90 {moved} from {100 * before.width:.1f} % to "
                f"{100 * after.width:.1f} % of the P50"
            )
            old, new = before.estimate_class, after.estimate_class
            if old is not None and new is not None and new < old:
                sentence += f", although the class improved from {old} to {new}"
            said.append(sentence + ".")
        return tuple(said)

    @property
    def changes_price_date(self) -> bool:
        """Whether the points are not all in money of one day."""
        return len({point.price_date for point in self.points}) > 1


def trend(
    chain: Sequence[Estimate],
    *,
    totals: Mapping[str, Array] | None = None,
    findings: Mapping[str, Mapping[str, int]] | None = None,
    threads: int = 1,
) -> Trend:
    """Return the chain of revisions, each by its own seed and trials.

    Parameters
    ----------
    chain : sequence of Estimate
        The oldest first, as `read_chain` gives it.
    totals : mapping of revision to (n,) array of money, optional
        Simulated totals that are known already.
    findings : mapping of revision to counts, optional
        Findings by severity, where the checks were run.
    threads : int
        Blocks simulated at the same time; changes no figure.
    """
    known = totals or {}
    points = []
    for estimate in chain:
        total = known.get(estimate.revision)
        if total is None:
            total = simulate_totals(estimate, threads=threads).ravel()
        points.append(_point(estimate, total, (findings or {}).get(estimate.revision)))
    return Trend(currency=chain[-1].currency, points=tuple(points))


def _point(
    estimate: Estimate, total: Array, findings: Mapping[str, int] | None
) -> TrendPoint:
    ordered = np.sort(total)
    target = estimate.contingency.target
    return TrendPoint(
        revision=estimate.revision,
        gate=estimate.gate,
        data_date=estimate.data_date,
        price_date=estimate.price_date,
        estimate_class=estimate.estimate_class,
        level=target,
        base=estimate.base,
        contingency=percentile(ordered, target) - estimate.base,
        mean=float(total.mean()),
        p10=percentile(ordered, 10),
        p50=percentile(ordered, 50),
        p90=percentile(ordered, 90),
        chance_base_is_enough=float(np.mean(total <= estimate.base)),
        findings=findings,
    )
