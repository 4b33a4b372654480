"""The whole job for one estimate: simulate, set, check.  Returns a Study."""

from __future__ import annotations

from dataclasses import dataclass, fields, replace
from typing import TYPE_CHECKING, Any

from contingency.assurance.findings import CheckOutcome, Finding
from contingency.assurance.material import Material
from contingency.assurance.robustness import what_it_rests_on
from contingency.assurance.run import run_checks
from contingency.estimate.nouns import Estimate, Level
from contingency.results import results_of
from contingency.setting.allocation import allocate, second_opinion
from contingency.setting.drivers import find_drivers
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

if TYPE_CHECKING:
    import pandas as pd


@dataclass(frozen=True, kw_only=True)
class Study(Material):
    """Everything that is known about one estimate's contingency.

    The material that the checks looked at, and what they found in it.
    """

    findings: tuple[Finding, ...]
    checks_run: tuple[CheckOutcome, ...]

    def results(self) -> dict[str, Any]:
        """Return the results contract, ready for JSON (docs/results.md)."""
        return results_of(self, self.findings, self.checks_run)

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
    threads: int = 1,
    progress: Progress | None = None,
    runner: BlockRunner | None = None,
) -> Study:
    """Return everything that is known about an estimate's contingency.

    Parameters
    ----------
    estimate : Estimate
        As read by `read_estimate`; price-date money.
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
    >>> study = run_study(read_estimate("example_estimates/footbridge/rev-b"))
    ... # doctest: +SKIP
    """
    model = build_model(estimate)
    simulation = simulate(
        estimate, threads=threads, progress=progress, runner=runner, model=model
    )
    material = _material(estimate, simulation, exact_moments(model))
    material = replace(material, robustness=what_it_rests_on(material))
    findings, checks_run = run_checks(material)
    known = {f.name: getattr(material, f.name) for f in fields(material)}
    return Study(**known, findings=findings, checks_run=checks_run)


def _material(
    estimate: Estimate, simulation: Simulation, exact: ExactMoments
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
        cross_check=cross_check(estimate, simulation, exact, percents),
    )


def _frame(rows: tuple[Any, ...]) -> pd.DataFrame:
    """Return frozen rows as a table, one column a field."""
    import pandas as pd

    names = [field.name for field in fields(rows[0])] if rows else []
    return pd.DataFrame(
        [[getattr(row, n) for n in names] for row in rows], columns=names
    )
