"""The engine against three other programs, side by side in one run.

    python -m pytest tests/benchmarks -m benchmark -s

Prints ratios, for seconds depend on the machine and on who else uses it.  Each round
runs all four one after the other; a ratio is taken within its round, and the median
over the rounds is printed.  Nothing is asserted of the times; that the programs
compute the same model is.
"""

import time
from statistics import median

import numpy as np
import pytest

from contingency import read_estimate
from contingency.setting.allocation import allocate, second_opinion
from contingency.setting.drivers import find_drivers
from contingency.setting.levels import (
    all_percentiles,
    chance_base_is_enough,
    funding_level,
)
from contingency.simulation import simulate
from contingency.simulation.cost_model import build_model
from tests.benchmarks.models import (
    as_folder,
    draw_and_sort,
    make_model,
    total_by_openturns,
    total_by_scipy,
)

TRIALS = 65_536
ROUNDS = 3
STREAMS = 300 + 1 + 80
"""Ranges, the general dependence, events: what the engine draws for the model."""

pytestmark = pytest.mark.benchmark


def with_all_statistics(estimate):
    """Simulate, then everything from levels to drivers; returns the totals."""
    model = build_model(estimate)
    simulation = simulate(estimate, threads=2, model=model)
    for level in estimate.contingency.levels:
        funding_level(simulation, level)
    percentiles = all_percentiles(simulation)
    chance_base_is_enough(simulation)
    target = estimate.contingency.target
    allocation = allocate(
        estimate, simulation, percent=target, total=percentiles[target - 1]
    )
    second_opinion(estimate, simulation, allocation)
    find_drivers(estimate, simulation, np.zeros(len(estimate.causes)))
    return simulation.total


def timed(function, *arguments):
    """Return seconds and result of one call."""
    start = time.perf_counter()
    result = function(*arguments)
    return time.perf_counter() - start, result


def test_the_engine_against_other_programs(tmp_path, capsys):
    """Three hundred packages, 80 events, 65,536 trials, two cores."""
    model = make_model()
    estimate = read_estimate(as_folder(model, tmp_path, trials=TRIALS))
    simulate(estimate.model_copy(update={"run": estimate.run}))  # libraries loaded
    rounds = []
    for _ in range(ROUNDS):
        fresh = read_estimate(tmp_path)  # no shape solved yet
        ours, total = timed(with_all_statistics, fresh)
        floor, _ = timed(draw_and_sort, STREAMS, TRIALS)
        openturns, its_total = timed(total_by_openturns, model, TRIALS)
        scipy, script_total = timed(total_by_scipy, model, TRIALS)
        rounds.append((ours, floor, openturns, scipy))
        for other in (its_total, script_total):
            error = other.std() * np.sqrt(2 / TRIALS)
            assert total.mean() == pytest.approx(other.mean(), abs=4 * error)
            assert total.std() == pytest.approx(other.std(), rel=0.03)
    with capsys.disabled():
        print("\n\n300 packages, 80 events, 65,536 trials, all statistics, two threads")
        print(f"  seconds, median of {ROUNDS}:")
        names = ("this engine", "draw and sort", "OpenTURNS", "scipy.stats")
        for name, seconds in zip(names, zip(*rounds, strict=True), strict=True):
            print(f"    {name:<14}{median(seconds):8.2f}")
        print("  ratios, median of the rounds:")
        print(
            f"    OpenTURNS / engine      {median(o / u for u, _, o, _ in rounds):6.1f}"
        )
        print(
            f"    scipy.stats / engine    {median(s / u for u, _, _, s in rounds):6.1f}"
        )
        print(
            f"    engine / draw and sort  {median(u / f for u, f, _, _ in rounds):6.1f}"
        )
