"""Means of five activities and the chances of a path, from course notes on PERT.

Source     Wang, T. Course notes "PERT". https://studylib.net/doc/5706616/notes
Taken      the five triples, their means and (b - a)²/36 variances, the path a-c-d with
           mean 24, variance 264/36 and standard deviation 2.708, and the chance 0.770
           of 26 or less (all read). The chance of 18 or less is worked out.
Precision  means and variances exact; chances to 1e-3 as printed from a table.
Errata     none known.
"""

import pytest

from contingency.quantities.shapes import BetaPert, Normal

ACTIVITIES = {
    # low, likely, high, mean, variance in 36ths
    "a": (5, 6, 7, 6, 4),
    "b": (4, 5, 18, 7, 196),
    "c": (4, 15, 20, 14, 256),
    "d": (3, 4, 5, 4, 4),
    "e": (5, 16, 18, 14.5, 169),
}
PATH = "acd"


@pytest.mark.parametrize("name", ACTIVITIES)
def test_each_mean_is_the_printed_one(name):
    """The beta-PERT mean is the mean of the notes."""
    low, likely, high, mean, _ = ACTIVITIES[name]

    assert BetaPert(low=low, likely=likely, high=high).mean == pytest.approx(mean)


@pytest.mark.parametrize("name", ACTIVITIES)
def test_each_variance_is_the_classic_one(name):
    """The notes' variance is (b - a)²/36: it is not that of the beta-PERT."""
    low, likely, high, _, variance = ACTIVITIES[name]

    assert (high - low) ** 2 == variance
    assert BetaPert(low=low, likely=likely, high=high).variance != pytest.approx(
        variance / 36, rel=0.01
    )


def test_the_path_has_the_printed_chance():
    """Mean 24, standard deviation 2.708, P(26 or less) = 0.770."""
    means = [
        BetaPert(low=low, likely=likely, high=high).mean
        for low, likely, high, *_ in (ACTIVITIES[name] for name in PATH)
    ]
    variance = sum(ACTIVITIES[name][4] for name in PATH) / 36
    path = Normal(centre=sum(means), spread=variance**0.5)

    assert path.mean == pytest.approx(24)
    assert path.spread == pytest.approx(2.708, abs=5e-4)
    assert float(path.cdf(26)) == pytest.approx(0.770, abs=1e-3)
    assert float(path.cdf(18)) == pytest.approx(0.01336, abs=5e-6)
