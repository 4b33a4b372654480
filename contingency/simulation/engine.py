"""The engine: blocks of trials until the target percentile is settled."""

from __future__ import annotations

from collections.abc import Callable, Iterator
from concurrent.futures import ThreadPoolExecutor
from dataclasses import dataclass
from threading import local

import numpy as np
from numpy.typing import NDArray
from threadpoolctl import threadpool_limits

from contingency.estimate.nouns import Estimate
from contingency.quantities.draws import BLOCK
from contingency.quantities.percentiles import block_interval
from contingency.simulation.blocks import BlockSums, run_blocks
from contingency.simulation.cost_model import CostModel, build_model
from contingency.simulation.drawing import Workspace, chunks
from contingency.simulation.exact import exact_mean
from contingency.simulation.result import Simulation

Array = NDArray[np.float64]
Progress = Callable[[int, int], None]
"""Called with trials done and the most that may be run."""
BlockRunner = Callable[[CostModel, float, range], Iterator[BlockSums]]
"""Runs the blocks of a range and yields them in order."""

GROWTH = 1.5
"""By how much the run grows when the target percentile has not settled; ours."""


def simulate(
    estimate: Estimate,
    *,
    threads: int = 1,
    progress: Progress | None = None,
    runner: BlockRunner | None = None,
    model: CostModel | None = None,
) -> Simulation:
    """Return the simulated total cost of an estimate and the sums of its parts.

    Blocks of 4,096 trials run until the 95 % interval of the target percentile is
    within the estimate's tolerance, at least `run.least` and at most `run.most`
    trials.  The result does not depend on the number of threads, nor on who
    runs the blocks.

    Parameters
    ----------
    estimate : Estimate
        Amounts in price-date money.
    threads : int
        Blocks that run at the same time.
    progress : callable, optional
        Called as ``progress(trials_done, trials_at_most)``.
    runner : callable, optional
        Runs blocks in another place, for example on a cluster.
    model : CostModel, optional
        The estimate as arrays, where the caller has built it already.

    Returns
    -------
    Simulation
        Money in the estimate's currency at its price date.

    References
    ----------
    McKay, Beckman and Conover (1979), doi:10.2307/1268522, for the sampling;
    ``docs/method.md`` for everything else.
    """
    model = model or build_model(estimate)
    centre = exact_mean(model)
    run = runner or _local_runner(threads)
    gathered = _Gathered(model, centre)
    least, most = estimate.run.least // BLOCK, estimate.run.most // BLOCK
    goal, settled = least, False
    # One thread inside each product, so that no sum depends on how it was cut.
    with threadpool_limits(limits=1, user_api="blas"):
        while not settled:
            for sums in run(model, centre, range(gathered.blocks, goal)):
                gathered.add(sums)
                if progress is not None:
                    progress(gathered.blocks * BLOCK, goal * BLOCK)
            settled = _is_settled(gathered.totals, model, estimate.run.tolerance)
            if goal >= most:
                break
            goal = min(most, int(np.ceil(goal * GROWTH)))
    return gathered.simulation(estimate, settled=settled)


def _local_runner(threads: int) -> BlockRunner:
    """Return a runner that uses threads of this process."""

    def run(model: CostModel, centre: float, blocks: range) -> Iterator[BlockSums]:
        pieces = chunks(model, blocks, threads)
        if threads <= 1 or len(pieces) <= 1:
            work = Workspace(model)
            for piece in pieces:
                yield from run_blocks(model, piece, work, centre)
            return
        own = local()

        def one(piece: range) -> list[BlockSums]:
            if not hasattr(own, "work"):
                own.work = Workspace(model)
            return list(run_blocks(model, piece, own.work, centre))

        with ThreadPoolExecutor(max_workers=threads) as pool:
            for sums in pool.map(one, pieces):
                yield from sums

    return run


def _is_settled(totals: list[Array], model: CostModel, tolerance: float) -> bool:
    """Whether the target percentile's interval is within the tolerance."""
    interval = block_interval(np.stack(totals), percent=model.target)
    return bool((interval.high - interval.low) / 2.0 <= tolerance * abs(interval.value))


@dataclass(slots=True)
class _Sums:
    """Running sums of one kind of input."""

    parts: Array
    tails: Array
    removal: Array


class _Gathered:
    """Sums over the blocks so far, added in the order of the blocks."""

    def __init__(self, model: CostModel, centre: float) -> None:
        self._model, self._centre = model, centre
        self.totals: list[Array] = []
        self._deviation = self._near_count = 0.0
        k, s = len(model.packages), len(model.systemic)
        e, j = len(model.events), len(model.causes)
        self._ranges = _Sums(np.zeros((k, 3)), np.zeros((k, 4)), np.zeros(k))
        self._systemic = _Sums(np.zeros((k, s, 3)), np.zeros((s, 4)), np.zeros(s))
        self._events = _Sums(np.zeros((e, 3)), np.zeros((e, 4)), np.zeros(e))
        self._causes = _Sums(np.zeros(0), np.zeros((j, 4)), np.zeros(j))

    @property
    def blocks(self) -> int:
        """Blocks added so far."""
        return len(self.totals)

    def add(self, sums: BlockSums) -> None:
        """Add the next block."""
        self.totals.append(sums.total)
        self._deviation += sums.deviation
        self._near_count += sums.near_count
        for mine, parts, tails, removal in (
            (self._ranges, sums.ranges, sums.range_tails, sums.range_removal),
            (
                self._systemic,
                sums.systemic,
                sums.systemic_tails,
                sums.systemic_removal,
            ),
            (self._events, sums.events, sums.event_tails, sums.event_removal),
            (self._causes, 0.0, sums.cause_tails, sums.cause_removal),
        ):
            mine.parts += parts
            mine.tails += tails
            mine.removal += removal

    def simulation(self, estimate: Estimate, *, settled: bool) -> Simulation:
        """Return the result, packages, risks and events back in file order."""
        model = self._model
        k, s, e = model.package_place, model.systemic_place, model.event_place
        trials = self.blocks * BLOCK
        ranges = self._statistics(self._ranges.parts[k])
        systemic = self._statistics(self._systemic.parts[k][:, s])
        events = self._statistics(self._events.parts[e])
        mean = self._centre + self._deviation / trials
        return Simulation(
            packages=tuple(p.id for p in estimate.packages),
            systemic=tuple(risk.id for risk in estimate.systemic),
            events=tuple(event.id for event in estimate.open_events),
            causes=model.causes,
            base=estimate.base,
            seed=model.seed,
            block=BLOCK,
            blocks=self.blocks,
            settled=settled,
            tolerance=estimate.run.tolerance,
            target=model.target,
            total=np.concatenate(self.totals),
            range_mean=ranges[0],
            range_covariance=ranges[1],
            range_near=ranges[2],
            systemic_mean=systemic[0],
            systemic_covariance=systemic[1],
            systemic_near=systemic[2],
            event_mean=events[0],
            event_covariance=events[1],
            event_near=events[2],
            range_swing=self._swing(self._ranges.tails[k], mean),
            systemic_swing=self._swing(self._systemic.tails[s], mean),
            event_swing=self._swing(self._events.tails[e], mean),
            cause_swing=self._swing(self._causes.tails, mean),
            range_removal=self._ranges.removal[k] / self.blocks,
            systemic_removal=self._systemic.removal[s] / self.blocks,
            event_removal=self._events.removal[e] / self.blocks,
            cause_removal=self._causes.removal / self.blocks,
            correlation_repair=model.dependence.repair,
        )

    def _statistics(self, sums: Array) -> tuple[Array, Array, Array]:
        """Return mean, covariance with the total, and mean near the target."""
        trials = self.blocks * BLOCK
        mean = sums[..., 0] / trials
        covariance = sums[..., 1] / trials - mean * (self._deviation / trials)
        return mean, covariance, sums[..., 2] / self._near_count

    def _swing(self, tails: Array, mean: float) -> Array:
        """Return (r, 2) mean totals; the mean itself where a tail has no trial."""
        swing = np.full((tails.shape[0], 2), mean)
        for side in (0, 1):
            total, count = tails[:, 2 * side], tails[:, 2 * side + 1]
            some = count > 0
            swing[some, side] = self._centre + total[some] / count[some]
        return swing
