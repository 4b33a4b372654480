"""Blocks on a Dask cluster give the same bytes, also when a worker is lost."""

import os
import signal
from dataclasses import fields

import distributed
import numpy as np
import pytest

from contingency.errors import ClusterUnavailable
from contingency.quantities.draws import BLOCK
from contingency.simulation import simulate
from contingency.simulation.cluster import cluster, runner_on
from tests.simulation.estimates import a_bit_of_everything

# Dask tells of a lost worker by log and by warning; that is what is tested here.
pytestmark = [pytest.mark.slow, pytest.mark.filterwarnings("ignore")]

MODEL = a_bit_of_everything(trials=64 * BLOCK)


@pytest.fixture(scope="module")
def here():
    """The run of this process."""
    return simulate(MODEL)


def assert_same(one, other):
    """Every field of two simulations is equal to the bit."""
    for field in fields(one):
        a, b = getattr(one, field.name), getattr(other, field.name)
        assert np.array_equal(a, b), field.name


def test_a_local_cluster_gives_the_same_bytes(here):
    """The word `dask` starts workers on this machine."""
    with cluster("dask") as runner:
        assert_same(here, simulate(MODEL, runner=runner))


def test_a_worker_killed_in_the_middle_costs_nothing_but_time(here):
    """One of two workers is killed after the first blocks have come back."""
    with (
        distributed.LocalCluster(
            n_workers=2, threads_per_worker=1, dashboard_address=None
        ) as two,
        distributed.Client(two) as client,
    ):
        killed = []

        def kill_one(done, most):
            del most
            if done >= 4 * BLOCK and not killed:
                worker = next(iter(two.workers.values()))
                os.kill(worker.pid, signal.SIGKILL)
                killed.append(worker.pid)

        result = simulate(MODEL, runner=runner_on(client), progress=kill_one)

    assert killed
    assert_same(here, result)


def test_a_scheduler_that_does_not_answer_is_told_clearly():
    """No address of a scheduler: the message says what to do."""
    with pytest.raises(ClusterUnavailable) as told, cluster("no scheduler"):
        pass

    assert "scheduler" in told.value.remedy
