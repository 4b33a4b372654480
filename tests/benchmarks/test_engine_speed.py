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
    """Return seconds, processor seconds of all threads, and result of one call."""
    start, used = time.perf_counter(), time.process_time()
    result = function(*arguments)
    return time.perf_counter() - start, time.process_time() - used, result


def test_the_engine_against_other_programs(tmp_path, capsys):
    """Three hundred packages, 80 events, 65,536 trials, two cores."""
    model = make_model()
    simulate(
        read_estimate(as_folder(model, tmp_path, trials=TRIALS))
    )  # loads libraries
    fresh = [read_estimate(tmp_path) for _ in range(ROUNDS)]  # no curve solved yet
    programs = {
        "this engine": lambda: with_all_statistics(fresh.pop()),
        "draw and sort": lambda: draw_and_sort(STREAMS, TRIALS),
        "OpenTURNS": lambda: total_by_openturns(model, TRIALS),
        "scipy.stats": lambda: total_by_scipy(model, TRIALS),
    }
    seconds = {name: [] for name in programs}
    work = {name: [] for name in programs}
    for _ in range(ROUNDS):
        total = {}
        for name, program in programs.items():
            wall, processor, total[name] = timed(program)
            seconds[name].append(wall)
            work[name].append(processor)
        ours = total["this engine"]
        for name in ("OpenTURNS", "scipy.stats"):
            error = ours.std() * np.sqrt(2 / TRIALS)
            assert ours.mean() == pytest.approx(total[name].mean(), abs=4 * error)
            assert ours.std() == pytest.approx(total[name].std(), rel=0.03)

    def ratio(above, below):
        pairs = zip(seconds[above], seconds[below], strict=True)
        return median(a / b for a, b in pairs)

    with capsys.disabled():
        print("\n\n300 packages, 80 events, 65,536 trials, all statistics, two threads")
        print(f"  median of {ROUNDS} rounds         seconds   processor seconds")
        for name in programs:
            print(
                f"    {name:<24}{median(seconds[name]):7.2f}{median(work[name]):14.2f}"
            )
        print("  ratios of seconds, median of the rounds")
        print(f"    OpenTURNS / engine      {ratio('OpenTURNS', 'this engine'):7.1f}")
        print(f"    scipy.stats / engine    {ratio('scipy.stats', 'this engine'):7.1f}")
        print(
            f"    engine / draw and sort  {ratio('this engine', 'draw and sort'):7.1f}"
        )
