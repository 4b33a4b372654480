"""Replicated Latin hypercube against plain Monte Carlo of the same model."""

import numpy as np
import pytest

from contingency.simulation import simulate
from tests.simulation.estimates import cost_range, estimate, event, package

REPEATS = 200
TRIALS = 8_192

RANGES = (
    cost_range(80, 100, 160),
    cost_range(90, 95, 150, shape="triangular"),
    cost_range(80, None, 150, shape="lognormal"),
    cost_range(70, None, 130, shape="uniform"),
)
IMPACT = cost_range(20, 40, 90)


def plain(seed):
    """The same total from independent uniforms."""
    rng = np.random.default_rng([seed, 20260401])
    total = sum(r.distribution.quantile(rng.random(TRIALS)) for r in RANGES)
    happens = rng.random(TRIALS) < 0.3
    return total + happens * IMPACT.distribution.quantile(rng.random(TRIALS))


def statistics(total):
    """Mean, P50 and P80."""
    return total.mean(), np.quantile(total, 0.5), np.quantile(total, 0.8)


@pytest.mark.slow
def test_latin_hypercube_beats_plain_monte_carlo(capsys):
    """The mean of an additive model has at least 50 times less variance."""
    model = estimate(
        [package(n, r) for n, r in zip("ABCD", RANGES, strict=True)],
        (event("R", 0.3, IMPACT),),
        trials=TRIALS,
    )
    ours, theirs = [], []
    for seed in range(REPEATS):
        run = model.run.model_copy(update={"seed": seed})
        ours.append(statistics(simulate(model.model_copy(update={"run": run})).total))
        theirs.append(statistics(plain(seed)))
    ratio = np.var(theirs, axis=0) / np.var(ours, axis=0)
    with capsys.disabled():
        print(f"\nvariance, plain over ours: mean, P50, P80 = {np.round(ratio, 1)}")

    assert ratio[0] > 50.0
    assert np.all(ratio[1:] > 1.5)
