"""Outturn totals: the same draws as the run, each amount at the prices of its time.

Formulas: ``docs/method.md``, section "Money by year".  Escalation is added to the
total of a trial and is no part of it, so that the contingency at price-date money
cannot move.
"""

from __future__ import annotations

from concurrent.futures import ThreadPoolExecutor
from threading import local

import numpy as np
from numpy.typing import NDArray
from threadpoolctl import threadpool_limits

from contingency.estimate.nouns import Estimate
from contingency.quantities.curves import Curves
from contingency.quantities.draws import BLOCK, Source, scores, strata
from contingency.simulation.cost_model import CostModel, build_model
from contingency.simulation.drawing import DrawnBlock, Workspace, draw_block
from contingency.simulation.spending import Spending, SpendingPlan, price_mix

Array = NDArray[np.float64]
_Course = tuple[Spending, str]


def series_in_use(estimate: Estimate) -> tuple[str, ...]:
    """Return the ids of the price series that a package names, sorted."""
    return tuple(sorted({p.prices for p in estimate.packages if p.prices}))


def simulate_outturn(
    estimate: Estimate, plan: SpendingPlan, *, blocks: int, threads: int = 1
) -> Array:
    """Return the outturn total in every trial of a run.

    Parameters
    ----------
    estimate : Estimate
        Amounts in price-date money.
    plan : SpendingPlan
        When the money is spent.
    blocks : int
        Blocks of the run; the trials are those of `simulate`, draw by draw.
    threads : int
        Blocks that run at the same time; changes no figure.

    Returns
    -------
    (b, n) array of money
        ``b`` blocks of ``n`` = 4,096 trials, money of the years of spending.
    """
    model = build_model(estimate)
    run = _OutturnRun(estimate, plan, model)
    own = local()

    def one(block: int) -> Array:
        if not hasattr(own, "work"):
            own.work = Workspace(model)
        return run.total(draw_block(model, block, own.work), block, own.work.source)

    with threadpool_limits(limits=1, user_api="blas"):
        if threads <= 1 or blocks <= 1:
            return np.stack([one(block) for block in range(blocks)])
        with ThreadPoolExecutor(max_workers=threads) as pool:
            return np.stack(list(pool.map(one, range(blocks))))


class _OutturnRun:
    """What stays the same from block to block."""

    def __init__(
        self, estimate: Estimate, plan: SpendingPlan, model: CostModel
    ) -> None:
        self._plan = plan
        self._model = model
        self._mix = price_mix(estimate)
        shapes = {s.id: s.rate.distribution for s in estimate.price_series}
        used = series_in_use(estimate)
        self._rates = Curves([shapes[name] for name in used])
        self._used = [used[i] for i in self._rates.order]

    def total(self, drawn: DrawnBlock, block: int, source: Source) -> Array:
        """Return the (n,) outturn totals of one block, money."""
        rates = self._drawn_rates(block, source)
        total = drawn.total(self._model)
        for (course, series), money in self._escalating(drawn).items():
            total = total + money * course.growth(rates[series])
        return total

    def _drawn_rates(self, block: int, source: Source) -> dict[str, Array]:
        """Return the yearly rates of each series in use, (n,) fractions."""
        score = scores(strata(source, [f"prices/{s}" for s in self._used], block))
        rates = np.empty_like(score)
        self._rates.read(score, 0, rates)
        return dict(zip(self._used, rates, strict=True))

    def _escalating(self, drawn: DrawnBlock) -> dict[_Course, Array]:
        """Return the (n,) price-date money that follows each course and series."""
        money: dict[_Course, Array] = {}

        def add(course: Spending, package: str, amount: Array | float) -> None:
            for series, share in self._mix[package]:
                place = money.setdefault((course, series), np.zeros(BLOCK))
                place += share * amount

        factor = drawn.factor(self._model)
        for row, package in enumerate(self._model.packages):
            spent = package.spent or 0.0
            rest = drawn.value[row] * factor[row] - spent
            if spent:
                add(self._plan.spent[package.id], package.id, spent)
            add(self._plan.to_come[package.id], package.id, rest)
        for row, event in enumerate(self._model.events):
            for share in event.shares:
                course = self._plan.of_event(event, share.package)
                add(course, share.package, share.fraction * drawn.events.cost[row])
        return money
