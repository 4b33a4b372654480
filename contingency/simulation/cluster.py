"""Blocks on several machines, by Dask distributed.  The figures do not change.

Needs the extra ``contingency[cluster]``.  A block is a pure function of the estimate
and the block's number, so a worker that is lost costs time and nothing else: Dask
runs its blocks again elsewhere.
"""

from __future__ import annotations

from collections.abc import Iterator
from contextlib import ExitStack, contextmanager
from typing import Any

from threadpoolctl import threadpool_limits

from contingency.errors import ClusterUnavailable
from contingency.simulation.blocks import BlockSums, run_block
from contingency.simulation.cost_model import CostModel
from contingency.simulation.drawing import Workspace
from contingency.simulation.engine import BlockRunner

HERE = "dask"
"""The word for a cluster of processes on this machine."""
PATIENCE = "10s"
"""How long to wait for a scheduler's answer."""


@contextmanager
def cluster(place: str) -> Iterator[BlockRunner]:
    """Connect to a Dask cluster; yield a runner that sends blocks to it.

    Parameters
    ----------
    place : str
        ``dask`` for processes on this machine, or the address of a scheduler.

    Raises
    ------
    ClusterUnavailable
        cluster-unavailable.  Dask is not installed, or no scheduler answers.
    """
    with _client(place) as client:
        yield runner_on(client)


def runner_on(client: Any) -> BlockRunner:  # noqa: ANN401  (distributed has no types)
    """Return a runner that sends blocks through a connected Dask client."""

    def run(model: CostModel, centre: float, blocks: range) -> Iterator[BlockSums]:
        remote = client.scatter(model, broadcast=True)
        futures = [
            client.submit(_one_block, remote, block, centre, pure=False)
            for block in blocks
        ]
        # In the order of the blocks, whatever the order in which they end.
        for future in futures:
            yield future.result()
            future.release()

    return run


def _one_block(model: CostModel, block: int, centre: float) -> BlockSums:
    """Run one block on a worker; one thread in each product, as everywhere."""
    with threadpool_limits(limits=1, user_api="blas"):
        return run_block(model, block, Workspace(model), centre)


@contextmanager
def _client(place: str) -> Iterator[Any]:
    """Connect to a scheduler, or start workers here; close what was opened."""
    try:
        import distributed
    except ImportError as error:
        raise ClusterUnavailable(
            where="--workers",
            found="Dask distributed is not installed.",
            rule="Blocks on several machines are run by Dask.",
            remedy="Install the extra: pip install 'contingency[cluster]'.",
        ) from error
    connect: Any = distributed.Client
    start: Any = distributed.LocalCluster
    with ExitStack() as opened:
        try:
            address: Any = place
            if place == HERE:
                address = opened.enter_context(
                    start(threads_per_worker=1, dashboard_address=None)
                )
            client = opened.enter_context(connect(address, timeout=PATIENCE))
        except (OSError, TimeoutError, ValueError) as error:
            raise ClusterUnavailable(
                where=f"--workers {place}",
                found=f"{error}.",
                rule=f"PLACE is `{HERE}` or the address of a running scheduler.",
                remedy="Start a scheduler with `dask scheduler` and give its address.",
            ) from error
        yield client
