"""The sum of two dice: two discrete packages.

Source     U.S. Government Accountability Office (2009). Cost Estimating and
           Assessment Guide. GAO-09-3SP, figure 18 (distribution of two dice).
Taken      range 2 to 12, median and mode 7, the eleven counts out of 36.
Precision  exact; the simulation is held to four standard errors.
Errata     none known.
"""

import numpy as np
import pytest

from contingency import read_estimate, run_study
from tests.folders import lay_out

COUNTS = {2: 1, 3: 2, 4: 3, 5: 4, 6: 5, 7: 6, 8: 5, 9: 4, 10: 3, 11: 2, 12: 1}
TRIALS = 65_536
FACES = "; ".join(f"{face}:{1 / 6:.17f}" for face in range(1, 7))


@pytest.fixture(scope="module")
def study(tmp_path_factory):
    """Two dice, each a package whose base is one eye."""
    folder = lay_out(
        tmp_path_factory.mktemp("dice"),
        packages=[
            {"id": name, "base": 1, "shape": "discrete", "outcomes": FACES}
            for name in ("D1", "D2")
        ],
        trials=TRIALS,
    )
    return run_study(read_estimate(folder))


def test_every_sum_comes_as_often_as_it_should(study):
    """Counts of 36 for the sums 2 to 12, and no other sum."""
    values, counts = np.unique(np.round(study.simulation.total, 9), return_counts=True)

    assert values.tolist() == list(COUNTS)
    for count, expected in zip(counts, COUNTS.values(), strict=True):
        chance = expected / 36
        error = np.sqrt(chance * (1 - chance) / TRIALS)
        assert count / TRIALS == pytest.approx(chance, abs=4 * error)


def test_the_median_is_seven(study):
    """And a seventh part of the way down it still is: 21 of 36 sums are at most 7."""
    assert study.percentiles[50 - 1] == pytest.approx(7, abs=1e-9)
    assert study.percentiles[42 - 1] == pytest.approx(7, abs=1e-9)
    assert study.percentiles[57 - 1] == pytest.approx(7, abs=1e-9)
    assert study.percentiles[60 - 1] == pytest.approx(8, abs=1e-9)


def test_mean_and_standard_deviation(study):
    """Mean 7, standard deviation sqrt(35/6) = 2.41523."""
    assert np.sqrt(35 / 6) == pytest.approx(2.41523, abs=5e-6)
    assert study.cross_check.mean.exact == pytest.approx(7, rel=1e-12)
    assert study.cross_check.standard_deviation.exact == pytest.approx(
        np.sqrt(35 / 6), rel=1e-9
    )
    assert study.mean == pytest.approx(7, abs=4 * 2.41523 / np.sqrt(TRIALS))
