"""The 95 % intervals of the levels cover the exact values as often as they say."""

import numpy as np
import pytest

from contingency.quantities.percentiles import block_interval
from contingency.simulation import simulate
from tests.simulation.convolution import exact_total
from tests.simulation.estimates import cost_range, estimate, event, package

SEEDS = 400
PERCENTS = (50, 80, 90)
TRIALS = 32_768

PERT = cost_range(80, 100, 160)
LOGNORMAL = cost_range(80, None, 150, shape="lognormal")
IMPACT = cost_range(20, 40, 90)


def covered(model, exact, seeds=SEEDS):
    """Share of the seeds whose intervals hold the exact value, and mean widths."""
    hits = np.zeros((seeds, len(PERCENTS)), dtype=bool)
    widths = np.zeros((seeds, len(PERCENTS)))
    for seed in range(seeds):
        run = model.run.model_copy(update={"seed": seed})
        result = simulate(model.model_copy(update={"run": run}))
        blocks = result.total.reshape(result.blocks, result.block)
        for i, percent in enumerate(PERCENTS):
            interval = block_interval(blocks, percent=percent)
            hits[seed, i] = interval.low <= exact[percent] <= interval.high
            widths[seed, i] = interval.high - interval.low
    return hits.mean(axis=0), widths.mean(axis=0)


@pytest.mark.slow
def test_intervals_of_a_smooth_total(capsys):
    """Two skewed ranges and an event: between 92.5 and 97.5 % at P50, P80, P90."""
    model = estimate(
        [package("A", PERT), package("B", LOGNORMAL)],
        (event("R", 0.3, IMPACT),),
        trials=TRIALS,
    )
    exact = exact_total(
        [PERT.distribution, LOGNORMAL.distribution],
        [(IMPACT.distribution, 0.3, 1)],
        low=0.0,
        high=1000.0,
    )
    share, _ = covered(model, {p: exact.percentile(p) for p in PERCENTS})
    with capsys.disabled():
        print(f"\ncoverage of P50, P80, P90 over {SEEDS} seeds: {share}")

    # 2.3 standard errors of a share of 400 seeds to either side of 95 %.
    assert np.all((share >= 0.925) & (share <= 0.975))


@pytest.mark.slow
def test_two_events_whose_probability_sits_at_the_level(capsys):
    """Two large events leave P80 on a step of their joint chances, among others.

    Neither happens with a chance of 0.8; the curve is steep and flat by turns, and
    the exact value is the upper end of the ranges alone.
    """
    ranges = (cost_range(70, 100, 160), cost_range(60, 100, 150))
    large = cost_range(200, 260, 420)
    chance = 1.0 - np.sqrt(0.8)
    model = estimate(
        [package("A", ranges[0]), package("B", ranges[1])],
        (event("R", chance, large), event("S", chance, large)),
        trials=TRIALS,
    )
    exact = exact_total(
        [r.distribution for r in ranges],
        [(large.distribution, chance, 1)] * 2,
        low=0.0,
        high=1400.0,
    )
    share, width = covered(model, {p: exact.percentile(p) for p in PERCENTS})
    with capsys.disabled():
        print(f"\ntwo events at P80: coverage {share}, mean widths {np.round(width)}")

    assert np.all((share >= 0.925) & (share <= 0.975))
    assert width[1] > 5.0 * width[0]


@pytest.mark.slow
@pytest.mark.parametrize(("probability", "percent"), [(0.5, 50), (0.2, 80), (0.1, 90)])
def test_an_event_whose_probability_sits_at_the_level(capsys, probability, percent):
    """The curve has a gap at the level: the interval reaches over it.

    Without the event the total ends at 130; with it the total starts at 590.  Any
    amount between holds with the level's chance, so the interval must hold them all.
    """
    narrow, apart = cost_range(90, 100, 130), cost_range(500, 550, 600)
    model = estimate(
        [package("A", narrow)], (event("R", probability, apart),), trials=TRIALS
    )
    # Nearly every interval holds them, so fewer seeds tell as much.
    share, width = covered(model, dict.fromkeys(PERCENTS, 130.0), seeds=120)
    at = PERCENTS.index(percent)
    with capsys.disabled():
        print(f"\ngap at P{percent}: coverage {share[at]}, mean width {width[at]:.0f}")

    assert share[at] >= 0.925
    assert width[at] > 460.0
