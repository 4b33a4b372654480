"""Percentiles of trials, and what their intervals promise."""

from fractions import Fraction
from math import ceil

import numpy as np
import pytest
from scipy.special import ndtri
from scipy.stats import binom, t

from contingency.errors import TooFewTrials
from contingency.quantities.percentiles import (
    binomial_interval,
    block_interval,
    interval_ranks,
    percentile,
    rank,
    rank_coverage,
)


@pytest.mark.parametrize("n", [1, 7, 99, 100, 4096, 65_536, 1_000_000])
def test_the_rank_is_the_one_of_whole_numbers(n):
    """The rank is n p rounded up, worked out in fractions."""
    for percent in range(1, 100):
        assert rank(n, percent) == ceil(Fraction(n * percent, 100))


def test_a_percentile_is_a_total_that_some_trial_reached():
    """Definition 1: no blend, and at least the share asked for lies at or below."""
    totals = np.sort(np.random.default_rng(5).lognormal(size=997))
    for percent in range(1, 100):
        value = percentile(totals, percent)

        assert value in totals
        assert np.mean(totals <= value) >= percent / 100
        assert np.mean(totals < value) < percent / 100


@pytest.mark.parametrize("n", [100, 1000, 20_000])
@pytest.mark.parametrize("percent", [20, 50, 80, 90])
def test_ranks_cut_off_at_most_half_at_either_end(n, percent):
    """One rank further in on either side, and that side holds more than 2.5 %."""
    found = interval_ranks(n, percent)
    below = binom.cdf(found.low - 1, n, percent / 100)
    above = binom.sf(found.high - 1, n, percent / 100)

    assert below <= 0.025 < binom.cdf(found.low, n, percent / 100)
    assert above <= 0.025 < binom.sf(found.high - 2, n, percent / 100)
    assert found.coverage == pytest.approx(1.0 - below - above)


def test_coverage_of_ranks_is_a_sum_of_binomial_chances():
    """The chance between two ranks, term by term."""
    terms = binom.pmf(np.arange(72, 89), 100, 0.8)

    assert rank_coverage(72, 89, 100, 0.8) == pytest.approx(terms.sum(), rel=1e-12)


def test_too_few_trials_leave_no_interval():
    """Twenty trials say too little about a P95, and one block about anything."""
    with pytest.raises(TooFewTrials, match="20 trials leave no interval"):
        interval_ranks(20, 95)
    with pytest.raises(TooFewTrials, match="One block"):
        block_interval(np.arange(10.0)[None, :], 50)


def test_the_binomial_interval_is_two_trials():
    """Its ends are the order statistics of the ranks."""
    totals = np.arange(1.0, 1001.0) ** 2

    found = binomial_interval(totals, 80)

    assert (found.low, found.value, found.high) == (775.0**2, 800.0**2, 825.0**2)


def test_the_block_interval_is_woodruffs():
    """Shares below the percentile, Student's t, back through the trials."""
    blocks = np.random.default_rng(7).normal(size=(20, 500))
    ordered = np.sort(blocks.ravel())

    found = block_interval(blocks, 70, confidence=0.9)

    q = ordered[6999]
    shares = np.mean(blocks <= q, axis=1)
    half = t.ppf(0.95, 19) * np.std(shares, ddof=1) / np.sqrt(20)
    assert found.value == q
    # The other share, below q, differs by one trial of one block.
    assert np.mean(ordered <= found.low) == pytest.approx(0.7 - half, abs=5e-4)
    assert np.mean(ordered <= found.high) == pytest.approx(0.7 + half, abs=5e-4)
    assert block_interval(blocks, 70, confidence=0.9, ordered=ordered) == found


def test_the_interval_reaches_over_a_gap_that_the_trials_meet_exactly():
    """Half of every block in one cluster, half in the other: P50 lies between."""
    low = np.linspace(0.0, 1.0, 50)
    blocks = np.tile(np.concatenate([low, 100.0 + low]), (16, 1))

    found = block_interval(blocks, 50)

    assert found.value == 1.0
    assert found.low <= 1.0
    assert found.high >= 100.0


def test_a_percentile_inside_a_large_step_is_sure():
    """Far more trials on one value than any doubt about the share: no width."""
    rng = np.random.default_rng(3)
    blocks = np.where(rng.random((16, 1000)) < 0.5, 7.0, rng.normal(20.0, 1.0))

    found = block_interval(blocks, 20)

    assert (found.low, found.value, found.high) == (7.0, 7.0, 7.0)


def test_ties_count_from_both_sides():
    """Zeros and ones, nearly half and half: the P50 is 1, and 0 is as likely.

    Every trial is at or below 1, which would look sure; the shares below 1 differ.
    """
    zeros = [47, 52] * 8
    blocks = np.array([[0.0] * count + [1.0] * (100 - count) for count in zeros])

    found = block_interval(blocks, 50)

    assert (found.low, found.value, found.high) == (0.0, 1.0, 1.0)


def test_nothing_varies():
    """One value everywhere is its own percentile, with nothing around it."""
    found = block_interval(np.full((4, 8), 3.0), 80)

    assert (found.low, found.value, found.high) == (3.0, 3.0, 3.0)


SEEDS = 400
TRIALS = 1024


def hypercubes(rng, inputs):
    """Sixteen replicated Latin hypercubes: (16, inputs, TRIALS) uniforms."""
    cells = rng.permuted(
        np.broadcast_to(np.arange(TRIALS), (16, inputs, TRIALS)), axis=2
    )
    return (cells + rng.random(cells.shape)) / TRIALS


def smooth(rng):
    """A sum of three normals: the total has no gap."""
    return ndtri(hypercubes(rng, 3)).sum(axis=1)


EITHER = 1.0 - np.sqrt(0.8)


def gap_at_the_level(rng):
    """A normal, and two events of which neither happens with a chance of 0.8."""
    u = hypercubes(rng, 3)
    happens = (u[:, 0] < EITHER) | (u[:, 1] < EITHER)
    return ndtri(u[:, 2]) + 100.0 * happens


def steps_at_the_level(rng):
    """Three discrete costs, 125 totals; exactly 0.8 of the chance up to one of them."""
    u = hypercubes(rng, 3)
    return (np.floor(5.0 * u) * np.array([[1.0], [7.0], [31.0]])).sum(axis=1)


@pytest.mark.parametrize(
    ("model", "percent", "exact"),
    [
        (smooth, 50, 0.0),
        (smooth, 80, np.sqrt(3.0) * ndtri(0.8)),
        (smooth, 90, np.sqrt(3.0) * ndtri(0.9)),
        (gap_at_the_level, 80, 50.0),
    ],
    ids=["smooth P50", "smooth P80", "smooth P90", "gap at P80"],
)
def test_the_interval_holds_the_exact_value_as_often_as_it_says(model, percent, exact):
    """Over 400 seeds between 92.5 % and 97.5 % of the time, also with a gap."""
    held = 0
    for seed in range(SEEDS):
        found = block_interval(model(np.random.default_rng(seed)), percent)
        held += found.low <= exact <= found.high

    assert 0.925 <= held / SEEDS <= 0.975


def test_the_interval_does_not_miss_a_step_at_the_level():
    """F = 0.8 exactly at the total 124: only a miss from above is possible there."""
    held = 0
    for seed in range(SEEDS):
        found = block_interval(steps_at_the_level(np.random.default_rng(seed)), 80)
        held += found.low <= 124.0 <= found.high

    assert held / SEEDS >= 0.95
