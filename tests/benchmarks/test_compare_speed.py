"""Time and noise of comparing the two largest example revisions."""

import time
from pathlib import Path

import numpy as np
import pytest

from contingency.estimate.reading import read_estimate
from contingency.tracking.averaging import effects
from contingency.tracking.compare import compare
from contingency.tracking.matching import match
from contingency.tracking.mixtures import mixtures

EXAMPLE = Path(__file__).parents[2] / "example_estimates" / "island-power-link"
SEEDS = range(1_000, 1_024)


@pytest.mark.benchmark
def test_comparing_the_two_largest_revisions():
    """Goal of the project: under 15 seconds."""
    earlier, later = (read_estimate(EXAMPLE / f"rev-{r}") for r in "bc")
    start = time.perf_counter()
    found = compare(earlier, later)
    seconds = time.perf_counter() - start
    print(f"\n  {seconds:.1f} s, {len(found.bridge.steps)} steps")


@pytest.mark.benchmark
@pytest.mark.parametrize("order", ["average", "sequence"])
def test_noise_of_each_step(order):
    """Spread over seeds with common random numbers, against fresh seeds."""
    earlier, later = (read_estimate(EXAMPLE / f"rev-{r}") for r in "bc")
    pair, percent = match(earlier, later), earlier.contingency.target
    steps, ends = [], []
    for seed in SEEDS:
        mixed = mixtures(pair, seed=seed, blocks=16, percent=percent)
        ends.append(
            [
                mixed.value(frozenset())[0],
                mixed.value(frozenset(mixed.families))[0],
            ]
        )
        steps.append([e[0] for e in effects(mixed.families, mixed.value, order)])
    fresh = float(np.hypot(*np.std(ends, axis=0, ddof=1)))
    print(f"\n  {order}: {fresh:,.0f} with fresh seeds")
    for family, noise in zip(
        mixed.families, np.std(steps, axis=0, ddof=1), strict=True
    ):
        print(
            f"    {family.heading:35s} {noise:9,.0f}  {fresh / noise:5.1f} times less"
        )
