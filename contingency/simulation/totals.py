"""Only the totals of a simulation: for comparisons that ask nothing about the parts."""

from __future__ import annotations

from concurrent.futures import ThreadPoolExecutor
from threading import local

import numpy as np
from numpy.typing import NDArray
from threadpoolctl import threadpool_limits

from contingency.estimate.nouns import Estimate
from contingency.quantities.draws import BLOCK
from contingency.quantities.percentiles import block_interval
from contingency.simulation.cost_model import CostModel, build_model
from contingency.simulation.drawing import Workspace, draw_block
from contingency.simulation.engine import GROWTH

Array = NDArray[np.float64]


def simulate_totals(
    estimate: Estimate, *, blocks: int | None = None, threads: int = 1
) -> Array:
    """Return the simulated total cost in every trial, block by block.

    The totals are those of `simulate` to the last bit, and so is the number of blocks
    where none is given; what `simulate` gathers about the parts is left out.

    Parameters
    ----------
    estimate : Estimate
        Amounts in price-date money.
    blocks : int, optional
        Blocks of 4,096 trials; without it as many as `simulate` runs.
    threads : int
        Blocks that run at the same time; changes no figure.

    Returns
    -------
    (b, n) array of money
        ``b`` blocks of ``n`` = 4,096 trials, price-date money.
    """
    model = build_model(estimate)
    with threadpool_limits(limits=1, user_api="blas"):
        if blocks is not None:
            return np.stack(_run(model, range(blocks), threads))
        least, most = estimate.run.least // BLOCK, estimate.run.most // BLOCK
        goal = least
        totals: list[Array] = []
        while True:
            totals += _run(model, range(len(totals), goal), threads)
            found = block_interval(np.stack(totals), percent=model.target)
            half = (found.high - found.low) / 2.0
            if half <= estimate.run.tolerance * abs(found.value) or goal >= most:
                return np.stack(totals)
            goal = min(most, int(np.ceil(goal * GROWTH)))


def _run(model: CostModel, blocks: range, threads: int) -> list[Array]:
    """Return the totals of the blocks, in their order."""
    own = local()

    def one(block: int) -> Array:
        if not hasattr(own, "work"):
            own.work = Workspace(model)
        return draw_block(model, block, own.work).total(model)

    if threads <= 1 or len(blocks) <= 1:
        return [one(block) for block in blocks]
    with ThreadPoolExecutor(max_workers=threads) as pool:
        return list(pool.map(one, blocks))
