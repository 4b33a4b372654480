"""The totals alone are the engine's totals."""

import numpy as np
import pytest

from contingency.estimate.nouns import Run
from contingency.simulation.engine import simulate
from contingency.simulation.totals import simulate_totals
from tests.assurance.builder import sound_estimate

RUNS = (
    Run(seed=1, tolerance=0.01, least=16_384, most=16_384),
    Run(seed=2, tolerance=1e-9, least=8_192, most=20_480),
    Run(seed=3, tolerance=0.004, least=8_192, most=65_536),
)


@pytest.mark.parametrize("run", RUNS)
def test_totals_and_their_number_are_those_of_the_engine(run):
    """To the last bit, settled or not, with one thread and with two."""
    estimate = sound_estimate(run=run)
    whole = simulate(estimate)

    for threads in (1, 2):
        totals = simulate_totals(estimate, threads=threads)
        assert totals.shape == (whole.blocks, whole.block)
        assert np.array_equal(totals.ravel(), whole.total)


def test_a_given_number_of_blocks_is_the_beginning_of_the_same_run():
    """Blocks are found by their number."""
    estimate = sound_estimate()

    totals = simulate_totals(estimate, blocks=2)

    assert np.array_equal(totals, simulate_totals(estimate)[:2])
