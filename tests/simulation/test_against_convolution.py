"""Percentiles of the engine against exact distributions of independent models."""

import numpy as np
import pytest
from scipy.special import stdtrit

from contingency.quantities.percentiles import block_interval
from contingency.simulation import simulate
from tests.simulation.convolution import exact_one_factor, exact_total
from tests.simulation.estimates import cost_range, estimate, event, package

RANGES = {
    "pert": cost_range(80, 100, 160),
    "triangular": cost_range(90, 95, 150, shape="triangular"),
    "uniform": cost_range(70, None, 130, shape="uniform"),
    "lognormal": cost_range(80, None, 150, shape="lognormal"),
    "normal": cost_range(80, None, 120, shape="normal"),
    "points": cost_range(
        shape="points", outcomes=((5, 92.0), (50, 104.0), (95, 140.0))
    ),
    "narrow": cost_range(99, 100, 104),
}
IMPACTS = {
    "small": cost_range(5, 10, 30),
    "large": cost_range(100, 150, 300),
    "level": cost_range(10, None, 30, shape="uniform"),
}


SEEDS = (1, 2, 3)
"""One draw in 370 is beyond three standard errors, and each model has 19 percentiles:
the middle of three runs is what must be within."""


def standard_errors_off(model, exact):
    """How many of its own standard errors each of P05 to P95 is from the exact one.

    The middle one of three runs under different seeds.
    """
    return np.median([_off(simulate(with_seed(model, s)), exact) for s in SEEDS], 0)


def with_seed(model, seed):
    """The same estimate under another seed."""
    return model.model_copy(update={"run": model.run.model_copy(update={"seed": seed})})


def _off(result, exact):
    blocks = result.total.reshape(result.blocks, result.block)
    quantile_of_t = stdtrit(result.blocks - 1, 0.975)
    off = []
    for percent in range(5, 100, 5):
        interval = block_interval(blocks, percent=percent)
        error = (interval.high - interval.low) / 2 / quantile_of_t
        off.append((interval.value - exact.percentile(percent)) / error)
    return np.array(off)


def held(off):
    """Whether the percentiles are where three standard errors of each allow."""
    return np.all(np.abs(off) < 3.0), np.round(off, 1)


@pytest.mark.parametrize(
    "names",
    [
        ("pert", "triangular", "uniform"),
        ("lognormal", "normal", "pert"),
        ("points", "narrow"),
        tuple(RANGES),
    ],
    ids=" ".join,
)
def test_independent_ranges(names):
    """Sums of ranges of several shapes."""
    ranges = [RANGES[name] for name in names]
    model = estimate(
        [package(n, r) for n, r in zip(names, ranges, strict=True)], trials=2**17
    )
    shapes = [r.distribution for r in ranges]
    exact = exact_total(shapes, low=0.0, high=2000.0)
    good, off = held(standard_errors_off(model, exact))

    assert good, off


def test_ranges_and_events():
    """Two ranges, two threats, an opportunity and a repeated event."""
    events = (
        event("R1", 0.35, IMPACTS["small"]),
        event("R2", 0.15, IMPACTS["large"]),
        event("R3", 0.40, IMPACTS["level"], kind="opportunity"),
        event("R4", None, IMPACTS["level"], happens="repeatedly", frequency=1.2),
    )
    model = estimate(
        [package("A", RANGES["pert"]), package("B", RANGES["lognormal"])],
        events,
        trials=2**17,
    )
    shape = {name: r.distribution for name, r in (RANGES | IMPACTS).items()}
    exact = exact_total(
        [shape["pert"], shape["lognormal"]],
        [
            (shape["small"], 0.35, 1),
            (shape["large"], 0.15, 1),
            (shape["level"], 0.40, -1),
        ],
        repeated=[(shape["level"], 1.2)],
        low=0.0,
        high=2000.0,
    )
    good, off = held(standard_errors_off(model, exact))

    assert good, off


@pytest.mark.parametrize("general", [0.2, 0.6])
def test_ranges_joined_by_one_factor(general):
    """Skewed ranges under general dependence, exact by conditioning on the factor."""
    names = ("pert", "triangular", "lognormal", "uniform")
    model = estimate(
        [package(name, RANGES[name]) for name in names],
        general_dependence=general,
        trials=2**17,
    )
    shapes = [RANGES[name].distribution for name in names]
    exact = exact_one_factor(shapes, general, low=0.0, high=1500.0)
    good, off = held(standard_errors_off(model, exact))

    assert good, off
