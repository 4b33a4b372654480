"""Compare two revisions: everything that changed, and what it did to the money."""

from __future__ import annotations

import datetime as dt
from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from contingency.errors import NotRevisions, OtherCurrency
from contingency.estimate.nouns import Change, Estimate
from contingency.quantities.rounding import round_amount, round_parts
from contingency.setting.curve import CumulativeCurve, cumulative_curve
from contingency.simulation.totals import simulate_totals
from contingency.tracking.averaging import MOST_AVERAGED, Order
from contingency.tracking.bridge import Bridge, IssuedFigures, build_bridge
from contingency.tracking.difference import Difference, differences
from contingency.tracking.families import Family
from contingency.tracking.matching import Match, match
from contingency.tracking.moves import base_moves, unused_lines
from contingency.tracking.risks import RiskMovement, risk_movements

Array = NDArray[np.float64]


@dataclass(frozen=True, kw_only=True, slots=True)
class Revision:
    """What names a revision."""

    revision: str
    data_date: dt.date
    price_date: dt.date
    estimate_class: int | None
    gate: str
    fingerprint: str


@dataclass(frozen=True, kw_only=True, slots=True)
class PrintedStep:
    """A step in whole steps of money, so that the column adds up on paper."""

    base: float
    contingency: float

    @property
    def total(self) -> float:
        """Base and contingency together."""
        return self.base + self.contingency


@dataclass(frozen=True, kw_only=True)
class Comparison:
    """Two revisions of one estimate compared."""

    project: str
    currency: str
    earlier: Revision
    later: Revision
    bridge: Bridge
    differences: tuple[Difference, ...]
    risks: tuple[RiskMovement, ...]
    unused: tuple[Change, ...]
    """Lines of changes.csv that explain no difference."""
    is_restated: bool
    """Whether the earlier revision was brought to another price date."""
    lacks_factor: bool
    """Whether the price dates differ and no line of changes.csv gives a factor."""

    @property
    def is_empty(self) -> bool:
        """Whether nothing that moves the money differs."""
        return not self.bridge.steps

    @property
    def closes(self) -> bool:
        """Whether the steps lead from old to new, to the rounding of floats."""
        base, contingency = self.bridge.residual
        return max(abs(base), abs(contingency)) <= 1e-9 * abs(self.bridge.after.total)

    @property
    def unexplained_base(self) -> float:
        """Base change without a reason, amounts of both signs added up, money."""
        step = self.bridge.step(Family.UNEXPLAINED)
        return sum(abs(row.base) for row in step.rows) if step else 0.0

    @property
    def method(self) -> str:
        """How the contingency effects were computed, as printed."""
        bridge = self.bridge
        count = sum(step.family not in _AT_THE_ENDS for step in bridge.steps)
        if bridge.order == "sequence":
            how = "one after another in the order of the table"
        elif count > MOST_AVERAGED:
            how = (
                f"one after another, and the effects averaged over {2 * count} orders "
                "in which each family takes each place as often"
            )
        else:
            how = (
                "one after another, and the effects averaged over all orders "
                "(Shapley value)"
            )
        return (
            "The inputs of the earlier revision were replaced by those of the later "
            f"one, family by family, {how}. Both draw from the same streams (seed "
            f"{bridge.seed}, {bridge.blocks} blocks of 4,096 trials), so that chance "
            "moves them alike. Restatement to another price date comes first; the "
            "level comes last and alone."
        )

    def curves(self) -> tuple[CumulativeCurve, CumulativeCurve]:
        """Return both cumulative curves, each in its own revision's money."""
        return (
            cumulative_curve(self.bridge.before_total),
            cumulative_curve(self.bridge.after_total),
        )

    def printed_end(self, step: float, *, is_after: bool) -> tuple[float, float]:
        """Return base and contingency of one end, in whole steps of `step` money."""
        end = self.bridge.after if is_after else self.bridge.before
        return round_amount(end.base, step), round_amount(end.contingency, step)

    def printed(self, step: float) -> tuple[PrintedStep, ...]:
        """Return the steps in whole steps of `step` money.

        Old figures rounded, plus these, are the new figures rounded, in both columns.
        """
        before, after = (self.printed_end(step, is_after=x) for x in (False, True))
        columns = []
        for column, name in enumerate(("base", "contingency")):
            parts = [getattr(s, name) for s in self.bridge.steps]
            change = after[column] - before[column]
            columns.append(closed_parts(parts, step=step, total=change))
        return tuple(
            PrintedStep(base=base, contingency=contingency)
            for base, contingency in zip(*columns, strict=True)
        )


_AT_THE_ENDS = {Family.METHOD, Family.SAMPLING, Family.PRICES, Family.LEVEL}


def closed_parts(parts: Sequence[float], *, step: float, total: float) -> list[float]:
    """Return parts in whole steps that sum to `total`, a whole number of them."""
    if not parts:
        return []
    return [float(part) for part in round_parts(parts, step=step, total=total)]


def compare(
    earlier: Estimate,
    later: Estimate,
    *,
    order: Order = "average",
    issued: IssuedFigures | None = None,
    threads: int = 1,
    earlier_total: Array | None = None,
    later_total: Array | None = None,
) -> Comparison:
    """Return everything that changed between two revisions of one estimate.

    Parameters
    ----------
    earlier, later : Estimate
        Two revisions; `later.changes` say why rows differ.
    order : "average" or "sequence"
        Whether the effect of a family is averaged over all orders in which families
        can be substituted, or taken from the published order alone.
    issued : IssuedFigures, optional
        What was issued of the earlier revision; what this version makes of the same
        inputs is then a step of its own.
    threads : int
        Blocks simulated at the same time; changes no figure.
    earlier_total, later_total : (n,) arrays of money, optional
        Simulated totals of the two, where they are known; else they are simulated.

    Returns
    -------
    Comparison
        In money of the later revision's price date, but for the earlier position.

    Raises
    ------
    OtherCurrency
        other-currency.  The two are not in the same currency.
    NotRevisions
        not-revisions.  The two have no package in common.

    Notes
    -----
    ``docs/revisions.md`` has the formulas.
    """
    _refuse_other_currency(earlier, later)
    pair = match(earlier, later)
    _refuse_unrelated(pair)
    totals = (
        _simulated(earlier, threads) if earlier_total is None else earlier_total,
        _simulated(later, threads) if later_total is None else later_total,
    )
    bridge = build_bridge(pair, earlier, order=order, issued=issued, totals=totals)
    listed = differences(pair)
    moved = {unit.key: base_moves(pair, unit) for unit in pair.units}
    differing = {(d.file.rpartition(".")[0], d.id) for d in listed}
    return Comparison(
        project=later.project,
        currency=later.currency,
        earlier=_revision(earlier),
        later=_revision(later),
        bridge=bridge,
        differences=listed,
        risks=risk_movements(pair, bridge.steps),
        unused=unused_lines(pair, moved, differing),
        is_restated=pair.factors.move_anything,
        lacks_factor=earlier.price_date != later.price_date
        and not pair.factors.is_given,
    )


def _simulated(estimate: Estimate, threads: int) -> Array:
    return simulate_totals(estimate, threads=threads).ravel()


def _revision(estimate: Estimate) -> Revision:
    return Revision(
        revision=estimate.revision,
        data_date=estimate.data_date,
        price_date=estimate.price_date,
        estimate_class=estimate.estimate_class,
        gate=estimate.gate,
        fingerprint=estimate.fingerprint,
    )


def _refuse_other_currency(earlier: Estimate, later: Estimate) -> None:
    """Refuse two estimates in different currencies."""
    if earlier.currency != later.currency:
        raise OtherCurrency(
            where=f"revisions {earlier.revision} and {later.revision}",
            found=f"One is in {earlier.currency}, the other in {later.currency}.",
            rule="Revisions are compared in one currency.",
            remedy="Restate one of the two in the currency of the other.",
        )


def _refuse_unrelated(pair: Match) -> None:
    """Refuse two estimates that have nothing in common."""
    if not any(unit.before and unit.after for unit in pair.units):
        old, new = pair.relabelled, pair.later
        raise NotRevisions(
            where=f"{old.project} {old.revision} and {new.project} {new.revision}",
            found="The two have no package in common.",
            rule="Ids are permanent: the same id in two revisions is the same thing.",
            remedy="Name two revisions of one estimate, or declare new ids in "
            "changes.csv under before and into.",
        )
