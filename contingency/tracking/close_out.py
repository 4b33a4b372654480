"""Close-out: where the final cost fell on the curve of each revision."""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from contingency.errors import NotFinished
from contingency.estimate.nouns import Estimate
from contingency.quantities.percentiles import percentile
from contingency.simulation.totals import simulate_totals
from contingency.tracking.matching import match

Array = NDArray[np.float64]


@dataclass(frozen=True, kw_only=True, slots=True)
class Outcome:
    """How one revision stands to the final cost, in money of the last price date."""

    revision: str
    gate: str
    estimate_class: int | None
    base: float
    """Base, restated."""
    level: int
    funded: float
    """Total at the target level, restated."""
    final: float
    """Final cost."""
    chance: float
    """Share of the trials that do not exceed the final cost, 0 to 1: the percentile at
    which it fell."""
    within: tuple[tuple[int, bool], ...]
    """For each funded level whether its total was enough."""

    @property
    def overrun(self) -> float:
        """Final cost over base, less one."""
        return self.final / self.base - 1.0

    @property
    def was_enough(self) -> bool:
        """Whether the funded total was."""
        return self.final <= self.funded


@dataclass(frozen=True, kw_only=True, slots=True)
class CloseOut:
    """A finished project against all of its revisions."""

    project: str
    currency: str
    final: float
    """Money of the last revision's price date."""
    outcomes: tuple[Outcome, ...]
    """The oldest first, the last revision left out."""

    def history_rows(self) -> list[dict[str, object]]:
        """Return a row of history.csv for each gate: base at the gate and final cost.

        Both amounts are in the money of one price date, as history.csv asks for.
        """
        return [
            {
                "id": f"{self.project} {outcome.revision}",
                "name": self.project,
                "estimate": round(outcome.base, 2),
                "final": round(outcome.final, 2),
                "notes": f"{outcome.gate}; fell at P{100 * outcome.chance:.0f}".lstrip(
                    "; "
                ),
            }
            for outcome in self.outcomes
        ]


def final_cost(last: Estimate) -> float:
    """Return the final cost of a finished project, money of its price date.

    Raises
    ------
    NotFinished
        not-finished.  A package is not spent in full, or an event is still open.
    """
    unspent = [p.label for p in last.packages if p.base not in {p.spent or 0.0, 0.0}]
    open_ = [event.label for event in last.open_events]
    if unspent or open_:
        names = [*unspent, *open_]
        more = f" and {len(names) - 3} more" if len(names) > 3 else ""
        raise NotFinished(
            where=f"{last.project}, revision {last.revision}",
            found=f"Still to be spent or open: {', '.join(names[:3])}{more}.",
            rule="A project is finished when every package has spent its base and no "
            "event is open.",
            remedy="Close the revision with the final account, or state a final cost.",
        )
    return last.base


def close_out(
    chain: Sequence[Estimate],
    *,
    final: float | None = None,
    totals: Mapping[str, Array] | None = None,
    threads: int = 1,
) -> CloseOut:
    """Return where the final cost fell on each revision's curve.

    Parameters
    ----------
    chain : sequence of Estimate
        The oldest first; the last one is the final account.
    final : float, optional
        Final cost in money of the last price date; without it the base of the last
        revision, in which then nothing may be open.
    totals : mapping of revision to (n,) array of money, optional
        Simulated totals that are known already, each in its own money and only used
        where the price date is that of the last revision.

    Raises
    ------
    NotFinished
        not-finished.  No final cost is given and the last revision is not final.
    """
    last = chain[-1]
    cost = final_cost(last) if final is None else final
    outcomes = []
    for place, revision in enumerate(chain[:-1]):
        now, is_restated = brought_forward(revision, chain[place + 1 :])
        total = None if is_restated else (totals or {}).get(revision.revision)
        if total is None:
            total = simulate_totals(now, threads=threads).ravel()
        outcomes.append(_outcome(now, total, cost))
    return CloseOut(
        project=last.project,
        currency=last.currency,
        final=cost,
        outcomes=tuple(outcomes),
    )


def brought_forward(
    estimate: Estimate, after: Sequence[Estimate]
) -> tuple[Estimate, bool]:
    """Return a revision in money of the last one after it, and whether that moved it.

    The factors stand in changes.csv of each revision on the way.
    """
    moved = False
    for later in after:
        pair = match(estimate, later)
        moved |= pair.factors.move_anything
        estimate = pair.earlier.model_copy(update={"price_date": later.price_date})
    return estimate, moved


def _outcome(estimate: Estimate, total: Array, final: float) -> Outcome:
    ordered = np.sort(total)
    rule = estimate.contingency
    percents = sorted({rule.target, *(level.percent for level in rule.levels)})
    return Outcome(
        revision=estimate.revision,
        gate=estimate.gate,
        estimate_class=estimate.estimate_class,
        base=estimate.base,
        level=rule.target,
        funded=percentile(ordered, rule.target),
        final=final,
        chance=float(np.mean(total <= final)),
        within=tuple((p, final <= percentile(ordered, p)) for p in percents),
    )
