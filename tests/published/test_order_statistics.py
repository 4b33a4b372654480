"""Intervals for a percentile from the ranks of independent trials.

Source     Pennsylvania State University, STAT 415, lesson 19.2,
           https://online.stat.psu.edu/stat415/book/export/html/913; Real Statistics,
           https://real-statistics.com/order-statistics/confidence-intervals-order-statistics
Taken      26 observations and their 75th percentile 392.25 (read); the chance 0.264121
           that ranks 17 and 19 of 35 bracket the median (read). Chances of other ranks
           and the ranks for a P80 are binomial sums, worked out here; the sample sizes
           59 and 29 are Wilks' for a maximum (from memory).
Precision  the digits printed.
Errata     none known.
"""

from fractions import Fraction
from math import comb

import pytest

from contingency.errors import TooFewTrials
from contingency.quantities.percentiles import (
    binomial_interval,
    interval_ranks,
    percentile,
    rank_coverage,
)

OBSERVATIONS = [
    *(325, 325, 334, 339, 356, 356, 359, 359, 363, 364, 364, 366, 369),
    *(370, 373, 373, 374, 375, 389, 392, 393, 394, 397, 402, 403, 424),
]

P80_RANKS = {
    100: (72, 89, 0.96740),
    1_000: (775, 825, 0.95190),
    10_000: (7_921, 8_079, 0.95173),
    20_000: (15_889, 16_112, 0.95129),
}


@pytest.mark.parametrize(
    ("low", "high", "chance"),
    [(16, 24, 0.93408), (15, 25, 0.97908), (15, 24, 0.95869)],
)
def test_chances_for_the_75th_percentile_of_26(low, high, chance):
    """Three pairs of ranks around the 75th percentile."""
    assert rank_coverage(low, high, 26, 0.75) == pytest.approx(chance, abs=5e-6)


def test_ranks_17_and_19_of_35_around_the_median():
    """The printed chance, and the same in fractions of whole numbers."""
    exact = sum(Fraction(comb(35, k), 2**35) for k in (17, 18))

    assert rank_coverage(17, 19, 35, 0.5) == pytest.approx(0.264121, abs=5e-7)
    assert rank_coverage(17, 19, 35, 0.5) == pytest.approx(float(exact), rel=1e-13)


def test_the_75th_percentile_of_the_observations():
    """The source blends two observations; ours is one of them, the next one down.

    Rank 0.75 × 27 = 20.25 gives 392.25 there, a quarter of the way from the 20th to
    the 21st. Definition 1 gives rank 20, and 392 is an amount that was observed.
    """
    twentieth, next_one = OBSERVATIONS[19:21]

    assert twentieth + 0.25 * (next_one - twentieth) == 392.25
    assert percentile(OBSERVATIONS, 75) == 392.0


@pytest.mark.parametrize(("n", "expected"), P80_RANKS.items())
def test_ranks_around_a_p80(n, expected):
    """At most 2.5 % cut off at either end, for four numbers of trials."""
    found = interval_ranks(n, 80)

    assert (found.low, found.high) == expected[:2]
    assert found.coverage == pytest.approx(expected[2], abs=5e-6)


def test_the_interval_is_made_of_trials():
    """A hundred totals 1 to 100: the P80 and the totals of the two ranks."""
    found = binomial_interval([float(x) for x in range(1, 101)], 80)

    assert (found.low, found.value, found.high) == (72.0, 80.0, 89.0)


@pytest.mark.parametrize(("p", "n"), [(0.95, 59), (0.90, 29)])
def test_wilks_sample_size(p, n):
    """So many trials, and the largest exceeds the percentile with 95 % confidence."""
    assert rank_coverage(0, n, n, p) == pytest.approx(1 - p**n)
    assert 1 - p**n >= 0.95 > 1 - p ** (n - 1)


def test_too_few_trials_for_a_p95_are_refused():
    """Seventy trials do not bracket a P95 with 2.5 % on either side; 200 do."""
    with pytest.raises(TooFewTrials):
        interval_ranks(70, 95)

    assert interval_ranks(200, 95).high <= 200
