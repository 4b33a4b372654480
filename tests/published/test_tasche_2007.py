"""Allocation controls: two normal costs with standard deviations 1 and 2.

Source     Tasche, D. (2007). Euler allocation: theory and practice, for the
           covariance shares; Owen, A. B. and Prieur, C. (2017). On Shapley value for
           measuring importance of dependent inputs. SIAM/ASA J. Uncertainty
           Quantification 5, for the model.
Taken      the linear model of two normals; the shares Cov(c, T) / Var(T) are closed
           forms. No printed figure was read.
Precision  exact; the simulation to four standard errors of a regression slope.
Errata     none known.
"""

import numpy as np
import pytest
from scipy.stats import norm

from contingency import read_estimate, run_study
from tests.folders import lay_out

TRIALS = 65_536
SPREAD = (1.0, 2.0)

SHARES = {
    0.0: (0.2, 0.8),
    0.5: (0.285714, 0.714286),
    -0.5: (0.0, 1.0),
    0.9: (0.325581, 0.674419),
}
"""Share of each cost in the variance, by correlation."""


def exact_shares(rho):
    """Covariance of each cost with the sum over the variance of the sum."""
    a, b = SPREAD
    joint = rho * a * b
    return (np.array([a * a, b * b]) + joint) / (a * a + b * b + 2 * joint)


@pytest.fixture(scope="module", params=SHARES)
def case(request, tmp_path_factory):
    """Correlation and study of the two costs, which share one common cause."""
    rho = request.param
    weight = np.sqrt(abs(rho))
    loads = (weight, weight if rho >= 0 else -weight)
    folder = lay_out(
        tmp_path_factory.mktemp("two-normals"),
        packages=[
            {
                "id": name,
                "base": 100,
                "low": f"{100 - norm.ppf(0.9) * spread:.14f}",
                "high": f"{100 + norm.ppf(0.9) * spread:.14f}",
                "shape": "normal",
                "causes": f"labour:{load:.16f}" if rho else "",
            }
            for name, spread, load in zip("AB", SPREAD, loads, strict=True)
        ],
        causes=[{"id": "labour"}],
        ends="P10-P90",
        trials=TRIALS,
    )
    return rho, run_study(read_estimate(folder))


@pytest.mark.parametrize("rho", SHARES)
def test_the_table_follows_from_the_formula(rho):
    """Every share, to its last digit."""
    assert exact_shares(rho) == pytest.approx(SHARES[rho], abs=5e-7)


def test_shares_of_variance(case):
    """At a correlation of -1/2 the first cost has no share at all."""
    rho, study = case
    variance = 5 + 4 * rho
    for row, share, spread in zip(
        study.allocation.rows, exact_shares(rho), SPREAD, strict=True
    ):
        # The share is the slope of the cost on the total; this is a slope's error.
        left = spread**2 - share**2 * variance
        error = np.sqrt(left / variance / TRIALS)
        assert row.variance_share == pytest.approx(share, abs=4 * error)


def test_the_margin_is_shared_in_the_same_way(case):
    """Margin of each cost: its share of z(0.8) standard deviations."""
    rho, study = case
    deviation = np.sqrt(5 + 4 * rho)
    margin = norm.ppf(0.8) * deviation
    level_error = np.sqrt(0.8 * 0.2 / TRIALS) / norm.pdf(norm.ppf(0.8)) * deviation
    for row, share, spread in zip(
        study.allocation.rows, exact_shares(rho), SPREAD, strict=True
    ):
        slope_error = np.sqrt((spread**2 / deviation**2 - share**2) / TRIALS)
        allowed = 4 * np.hypot(share * level_error, margin * slope_error)
        assert row.margin == pytest.approx(share * margin, abs=allowed)
        assert row.expected == pytest.approx(0, abs=4 * spread / np.sqrt(TRIALS))


def test_the_parts_make_the_whole(case):
    """Both costs together are the contingency at the level, exactly."""
    _, study = case

    assert sum(row.contingency for row in study.allocation.rows) == pytest.approx(
        study.target.contingency, rel=1e-12
    )
    assert sum(row.variance_share for row in study.allocation.rows) == pytest.approx(
        1, rel=1e-12
    )
