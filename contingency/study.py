"""The whole job for one estimate: simulate, set, check.  Returns a Study."""

from __future__ import annotations

from collections import Counter
from concurrent.futures import ThreadPoolExecutor
from dataclasses import dataclass, fields, replace
from functools import cached_property
from typing import TYPE_CHECKING, Any

import numpy as np
from numpy.typing import NDArray
from threadpoolctl import threadpool_limits

from contingency.assurance.findings import CheckOutcome, Finding
from contingency.assurance.material import Material, RevisionChange
from contingency.assurance.robustness import what_it_rests_on
from contingency.assurance.run import run_checks
from contingency.estimate.chain import carried_chain, previous_of
from contingency.estimate.nouns import Estimate, Level
from contingency.quantities.percentiles import percentile
from contingency.results import results_of
from contingency.setting.account import account_of
from contingency.setting.allocation import allocate, second_opinion
from contingency.setting.drivers import find_drivers
from contingency.setting.funding import find_funding
from contingency.setting.levels import (
    all_percentiles,
    chance_base_is_enough,
    funding_level,
)
from contingency.simulation.cost_model import build_model
from contingency.simulation.cross_check import cross_check
from contingency.simulation.engine import BlockRunner, Progress, simulate
from contingency.simulation.exact import ExactMoments, exact_moments
from contingency.simulation.result import Simulation
from contingency.simulation.second_route import second_route_total
from contingency.tracking.accounting import account_object
from contingency.tracking.compare import Comparison, compare
from contingency.tracking.comparing import summary_object
from contingency.tracking.drawdown import Drawdown
from contingency.tracking.drawdown import drawdown as find_drawdown
from contingency.tracking.families import Family
from contingency.tracking.trend import Trend
from contingency.tracking.trend import trend as find_trend

if TYPE_CHECKING:
    import pandas as pd


@dataclass(frozen=True, kw_only=True)
class Study(Material):
    """Everything that is known about one estimate's contingency.

    The material that the checks looked at, and what they found in it.
    """

    findings: tuple[Finding, ...]
    checks_run: tuple[CheckOutcome, ...]
    comparison: Comparison | None = None
    """With the previous revision, where one was given."""

    @cached_property
    def drawdown(self) -> Drawdown | None:
        """The contingency account against the need; None where none is kept.

        Computed when it is first asked for: its forecast takes some runs.
        """
        if not self.estimate.account:
            return None
        return find_drawdown(self.estimate, total=self.simulation.total)

    @cached_property
    def trend(self) -> Trend | None:
        """All revisions that travel with the estimate; None if it is the only one."""
        chain = carried_chain(self.estimate)
        if len(chain) < 2:
            return None
        mine = self.estimate.revision
        totals = {mine: self.simulation.total}
        if self.comparison is not None:
            totals[self.comparison.earlier.revision] = (
                self.comparison.bridge.before_total
            )
        if len({estimate.revision for estimate in chain}) < len(chain):
            totals = {}  # two revisions of one name: rather simulate again
        counts: dict[str, int] = Counter(finding.severity for finding in self.findings)
        return find_trend(chain, totals=totals, findings={mine: counts})

    def results(self) -> dict[str, Any]:
        """Return the results contract, ready for JSON (docs/results.md)."""
        results = results_of(self, self.findings, self.checks_run)
        changes = self.comparison
        results["changes"] = None if changes is None else summary_object(changes)
        account = account_of(self.estimate)
        results["account"] = (
            None if account is None else account_object(account, self.target)
        )
        return results

    def allocation_frame(self) -> pd.DataFrame:
        """Return the allocation by package, price-date money, unrounded."""
        return _frame(self.allocation.rows)

    def percentile_frame(self) -> pd.DataFrame:
        """Return total cost and contingency at P01 to P99, price-date money."""
        import pandas as pd

        frame = pd.DataFrame({"percent": range(1, 100), "total": self.percentiles})
        return frame.assign(contingency=frame["total"] - self.estimate.base)

    def driver_frame(self) -> pd.DataFrame:
        """Return the drivers, largest share of variance first, price-date money."""
        return _frame(self.drivers)

    def _repr_html_(self) -> str:
        """Return the answer and the allocation, as a notebook shows them."""
        from html import escape

        target = self.target
        title = escape(f"{self.estimate.project}, revision {self.estimate.revision}")
        answer = escape(
            f"Contingency at {target.name}: {target.contingency:,.0f} "
            f"{self.estimate.currency} on a base of {self.estimate.base:,.0f}"
        )
        table = self.allocation_frame().round(0).to_html(index=False)
        return f"<h3>{title}</h3><p>{answer}</p>{table}"


def run_study(
    estimate: Estimate,
    *,
    previous: Estimate | None = None,
    threads: int = 1,
    progress: Progress | None = None,
    runner: BlockRunner | None = None,
) -> Study:
    """Return everything that is known about an estimate's contingency.

    Parameters
    ----------
    estimate : Estimate
        As read by `read_estimate`; price-date money.
    previous : Estimate, optional
        The revision before; without it the one that travels with the estimate.  The
        bridge between the two is then part of the study.
    threads : int
        Blocks simulated at the same time; changes no figure.
    progress : callable, optional
        Called as ``progress(trials_done, trials_at_most)``.
    runner : callable, optional
        Runs blocks in another place; changes no figure.

    Returns
    -------
    Study
        Price-date money.

    Raises
    ------
    UnusableEstimate
        unusable-estimate.  [assurance] or [[answers]] name something unknown.

    Examples
    --------
    >>> from contingency import read_estimate, run_study
    >>> study = run_study(read_estimate("example_estimates/buoy-tender-refit/rev-b"))
    >>> study.target.name, f"{study.target.contingency:,.0f}"
    ('P80', '1,644,220')
    """
    model = build_model(estimate)
    comparison = None
    previous = previous or previous_of(estimate)
    # One thread inside each product, so that no sum depends on how it was cut.
    with (
        threadpool_limits(limits=1, user_api="blas"),
        ThreadPoolExecutor(max_workers=1) as beside,
    ):
        # The second route needs nothing of the first, so it runs beside it.
        second = beside.submit(second_route_total, estimate)
        simulation = simulate(
            estimate, threads=threads, progress=progress, runner=runner, model=model
        )
        if previous is not None:
            comparison = compare(
                previous, estimate, threads=threads, later_total=simulation.total
            )
        exact = exact_moments(model)
        material = _material(estimate, simulation, exact, second.result())
    funding = find_funding(estimate, simulation, material.allocation, threads=threads)
    if funding is not None:
        material = replace(material, funding=funding.years, outturn=funding.outturn)
    if previous is not None and comparison is not None:
        material = replace(material, change=_change(previous, comparison))
    material = replace(material, robustness=what_it_rests_on(material))
    findings, checks_run = run_checks(material)
    known = {f.name: getattr(material, f.name) for f in fields(material)}
    return Study(
        **known, findings=findings, checks_run=checks_run, comparison=comparison
    )


def _material(
    estimate: Estimate,
    simulation: Simulation,
    exact: ExactMoments,
    second: NDArray[np.float64],
) -> Material:
    """Return all that follows from one simulation."""
    rule = estimate.contingency
    levels = tuple(funding_level(simulation, level) for level in rule.levels)
    asked = next((lv for lv in levels if lv.percent == rule.target), None)
    target = asked or funding_level(
        simulation, Level(percent=rule.target, purpose="Requested funding")
    )
    percents = sorted({target.percent, *(level.percent for level in levels)})
    allocation = allocate(
        estimate, simulation, percent=target.percent, total=target.total
    )
    return Material(
        estimate=estimate,
        simulation=simulation,
        mean=float(simulation.total.mean()),
        standard_deviation=float(simulation.total.std()),
        chance_base_is_enough=chance_base_is_enough(simulation),
        percentiles=all_percentiles(simulation),
        levels=levels,
        target=target,
        allocation=allocation,
        second_opinion=second_opinion(estimate, simulation, allocation),
        drivers=find_drivers(estimate, simulation, exact.cause_share),
        implied_average_correlation=exact.implied_average_correlation,
        correlation_repair=simulation.correlation_repair,
        cross_check=cross_check(estimate, simulation, exact, percents, second),
    )


def _change(previous: Estimate, found: Comparison) -> RevisionChange:
    """Return what the checks must know of the way from the last revision."""
    bridge = found.bridge
    unexplained = bridge.step(Family.UNEXPLAINED)
    account = account_of(previous)
    ordered = np.sort(bridge.before_total)
    base_gap, contingency_gap = bridge.residual
    return RevisionChange(
        previous=previous.revision,
        price_date_before=previous.price_date,
        base_before=bridge.before.base,
        contingency_before=bridge.before.contingency,
        level_before=bridge.before.percent,
        class_before=previous.estimate_class,
        percentiles_before=tuple(percentile(ordered, p) for p in range(1, 100)),
        balance_before=None if account is None else account.balance,
        base_after=bridge.after.base,
        contingency_after=bridge.after.contingency,
        at_old_level=bridge.at_old_level,
        class_after=found.later.estimate_class,
        base_residual=base_gap,
        contingency_residual=contingency_gap,
        unexplained=tuple((row.id, row.base) for row in unexplained.rows)
        if unexplained
        else (),
        lacks_factor=found.lacks_factor,
        retired=tuple(r.id for r in found.risks if r.movement in _RETIRED),
        figures_differ=any(s.family not in _CHANCE_OR_LEVEL for s in bridge.steps),
        unused_lines=tuple(line.line for line in found.unused),
    )


_RETIRED = {"closed", "occurred", "left out"}
_CHANCE_OR_LEVEL = {Family.METHOD, Family.SAMPLING, Family.LEVEL}


def _frame(rows: tuple[Any, ...]) -> pd.DataFrame:
    """Return frozen rows as a table, one column a field."""
    import pandas as pd

    names = [field.name for field in fields(rows[0])] if rows else []
    return pd.DataFrame(
        [[getattr(row, n) for n in names] for row in rows], columns=names
    )
