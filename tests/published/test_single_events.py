"""One event, one discrete risk: what chance does to a cost.

Source     Guidance of the Australian states on public-private partnerships, advanced
           risk quantification (adverse ground; cost overrun of five outcomes); HM
           Treasury, The Green Book, box 22 (facility of GBP 50 million); the mean
           and variance of a Bernoulli event are a theorem.
Taken      inputs of all three and the weighted totals 129.5 and +1.0 (read). The
           percentiles of the first are computed here from the quantile function.
Precision  weighted totals exact; moments and percentiles to four standard errors.
Errata     none known.
"""

import numpy as np
import pytest
from scipy.stats import norm, triang

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


@pytest.fixture(scope="module")
def ground(tmp_path_factory):
    """Adverse ground, 15 %, triangular $250k, $325k, $600k, at most once."""
    return study_of(
        tmp_path_factory.mktemp("ground"),
        packages=[NO_SPREAD],
        events=[
            {
                "id": "E1",
                "kind": "threat",
                "probability": "15%",
                "low": 250,
                "likely": 325,
                "high": 600,
                "shape": "triangular",
            }
        ],
    )


def test_expected_value_of_adverse_ground(ground):
    """58.750 thousand, with a standard deviation of 142.856."""
    assert ground.cross_check.mean.exact - 1000 == pytest.approx(58.750, abs=5e-4)
    assert ground.cross_check.standard_deviation.exact == pytest.approx(
        142.856, abs=5e-4
    )


@pytest.mark.parametrize("percent", [50, 80, 84])
def test_the_p80_of_one_unlikely_event_is_nothing(ground, percent):
    """Up to 1 - p the event has not happened."""
    assert ground.percentiles[percent - 1] == pytest.approx(1000, abs=1e-9)


@pytest.mark.parametrize(("percent", "cost"), [(90, 346.689), (95, 420.882)])
def test_beyond_its_chance_it_costs_its_own_percentile(ground, percent, cost):
    """Q(q) = F⁻¹((q - (1 - p)) / p)."""
    severity = triang(c=75 / 350, loc=250, scale=350)
    exact = severity.ppf((percent / 100 - 0.85) / 0.15)
    density = 0.15 * severity.pdf(exact)
    q = percent / 100
    error = np.sqrt(q * (1 - q) / TRIALS) / density

    assert exact == pytest.approx(cost, abs=5e-4)
    assert ground.percentiles[percent - 1] - 1000 == pytest.approx(exact, abs=4 * error)


def test_an_overrun_of_five_outcomes(tmp_path):
    """Weighted 129.5, standard deviation 40.556; the P50 is 120, the P80 170."""
    study = study_of(
        tmp_path,
        packages=[
            {
                "id": "P1",
                "base": 120,
                "shape": "discrete",
                "outcomes": "60:5%; 80:20%; 120:40%; 170:20%; 190:15%",
            }
        ],
    )

    assert study.cross_check.mean.exact == pytest.approx(129.5, rel=1e-12)
    assert study.cross_check.standard_deviation.exact == pytest.approx(40.556, abs=5e-4)
    assert study.mean == pytest.approx(129.5, abs=4 * 40.556 / np.sqrt(TRIALS))
    assert study.percentiles[50 - 1] == pytest.approx(120, abs=1e-9)
    assert study.percentiles[80 - 1] == pytest.approx(170, abs=1e-9)


def test_a_facility_of_fifty_million(tmp_path):
    """45, 50 or 55 with chances 0.1, 0.6, 0.3: an expected addition of 1.0."""
    study = study_of(
        tmp_path,
        packages=[
            {
                "id": "P1",
                "base": 50,
                "shape": "discrete",
                "outcomes": "45:0.1; 50:0.6; 55:0.3",
            }
        ],
    )

    assert study.cross_check.mean.exact - 50 == pytest.approx(1.0, abs=1e-12)
    assert study.cross_check.standard_deviation.exact == pytest.approx(3.0, rel=1e-12)
