"""A chance times a cost: mean and variance of one event.

Source     a theorem: E = p m, Var = p s² + p (1 - p) m².
Taken      p = 0.3, m = 100, s = 20 as an example; mean 30 and variance 2,220 follow.
Precision  closed form to rounding; the simulation to four standard errors.
Errata     none known.
"""

import numpy as np
import pytest
from scipy.stats import norm

from contingency import read_estimate, run_study
from tests.folders import lay_out

TRIALS = 65_536
NO_SPREAD = {"id": "P1", "base": 1000, "shape": "fixed"}


def study_of(folder, **rows):
    """The study of a small folder."""
    return run_study(read_estimate(lay_out(folder, trials=TRIALS, **rows)))


def test_a_chance_times_a_cost(tmp_path):
    """At p = 0.3, mean 100, s = 20: mean 30, variance p s² + p (1 - p) m² = 2,220."""
    reach = 20 * norm.ppf(0.9)
    study = study_of(
        tmp_path,
        packages=[NO_SPREAD],
        ends="P10-P90",
        events=[
            {
                "id": "E1",
                "kind": "threat",
                "probability": 0.3,
                "low": f"{100 - reach:.12f}",
                "high": f"{100 + reach:.12f}",
                "shape": "normal",
            }
        ],
    )

    assert study.cross_check.mean.exact - 1000 == pytest.approx(30, rel=1e-9)
    assert study.cross_check.standard_deviation.exact**2 == pytest.approx(
        2220, rel=1e-9
    )
    assert study.mean - 1000 == pytest.approx(30, abs=4 * np.sqrt(2220 / TRIALS))
    fourth = 0.3 * np.mean(
        (norm.ppf((np.arange(10_000) + 0.5) / 10_000, 100, 20) - 30) ** 4
    )
    fourth += 0.7 * 30**4
    error = np.sqrt((fourth - 2220**2) / TRIALS)
    assert study.standard_deviation**2 == pytest.approx(2220, abs=4 * error)
