"""Time of the engine, and memory of a whole study, against trials and inputs.

    python -m pytest tests/benchmarks/test_growth.py -m benchmark -s

Each cell is a process of its own, so that its peak of memory is its own.
"""

import subprocess
import sys

import pytest

from tests.benchmarks.models import as_folder, make_model

pytestmark = pytest.mark.benchmark

ONE_RUN = """\
import resource, sys, time
from contingency import read_estimate, run_study
from contingency.simulation import simulate

estimate = read_estimate(sys.argv[1])
start = time.perf_counter()
trials = simulate(estimate, threads=2).trials
seconds = time.perf_counter() - start
run_study(estimate, threads=2).results()
megabytes = resource.getrusage(resource.RUSAGE_SELF).ru_maxrss / 1024
print(trials, seconds, megabytes)
"""


@pytest.mark.parametrize("inputs", [100, 300, 1000])
def test_time_and_memory(inputs, tmp_path, capsys):
    """One line for each number of trials; a fifth of the inputs are events."""
    events = inputs // 5
    model = make_model(inputs - events, events)
    for trials in (65_536, 262_144, 1_048_576):
        folder = as_folder(model, tmp_path / str(trials), trials=trials)
        done = subprocess.run(
            [sys.executable, "-c", ONE_RUN, str(folder)],
            capture_output=True,
            text=True,
            check=True,
        )
        ran, seconds, megabytes = map(float, done.stdout.split())
        assert ran == trials
        with capsys.disabled():
            rate = 1e9 * seconds / (trials * inputs)
            print(
                f"\n  {inputs:5d} inputs {trials:9,d} trials {seconds:8.2f} s"
                f" {rate:6.1f} ns a value {megabytes:7.0f} MB",
                end="",
            )
