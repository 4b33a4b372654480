"""One unlikely event and one overrun of five outcomes, as whole estimates.

Source     Guidance of an Australian state on public-private partnerships, advanced risk
           quantification. https://ppponline.affinitext.com/public/book?id=1493 (adverse
           ground) and id=1565 (overrun of five outcomes).
Taken      the inputs of both and the weighted total 129.5 (read). The percentiles are
           worked out here from the quantile function.
Precision  weighted total exact; moments and percentiles to four standard errors.
Errata     none known.
"""

import numpy as np
import pytest
from scipy.stats import triang

from contingency import read_estimate, run_study
from tests.folders import lay_out

TRIALS = 65_536
NO_SPREAD = {"id": "P1", "base": 1000, "shape": "fixed"}


def study_of(folder, **rows):
    """The study of a small folder."""
    return run_study(read_estimate(lay_out(folder, trials=TRIALS, **rows)))


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
