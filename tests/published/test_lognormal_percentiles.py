"""The lognormal from two percentiles, and range factors of transit projects.

Source     Closed form: sigma = ln(P90/P10)/2.563103, median = sqrt(P10 P90). Range
           factors: U.S. Federal Transit Administration, oversight procedures on risk
           and contingency, https://yumpu.com/en/document/view/21023914 (bands read;
           that a factor is P90 over P10 is from memory).
Taken      two pairs of percentiles with results worked out here, and seven factors.
Precision  the digits of the tables below; `test_scipy_has_the_same_lognormal` repeats
           them with another implementation.
Errata     none known.
"""

import numpy as np
import pytest
from scipy.stats import lognorm

from contingency.quantities.shapes import Lognormal, from_range

ENDS = {"low_percent": 10, "high_percent": 90}

RESULTS = {
    # P10, P90: sigma, mean, standard deviation, P80
    (80, 125): (0.174120, 101.5274, 17.8128, 115.7825),
    (50, 200): (0.540866, 115.7506, 67.4758, 157.6495),
}

FACTORS = {
    1.05: 0.0190,
    1.2: 0.0711,
    1.35: 0.1171,
    1.5: 0.1582,
    1.75: 0.2183,
    2.0: 0.2704,
    2.5: 0.3575,
}


@pytest.mark.parametrize(("ends", "results"), RESULTS.items())
def test_moments_and_p80(ends, results):
    """Spread of the logarithm, mean, standard deviation, P80."""
    shape = from_range("lognormal", low=ends[0], high=ends[1], **ENDS)
    sigma, mean, deviation, p80 = results

    assert isinstance(shape, Lognormal)
    assert shape.median == pytest.approx((ends[0] * ends[1]) ** 0.5)
    assert shape.log_spread == pytest.approx(sigma, abs=5e-7)
    assert shape.mean == pytest.approx(mean, abs=5e-5)
    assert shape.variance**0.5 == pytest.approx(deviation, abs=5e-5)
    assert float(shape.quantile(0.8)) == pytest.approx(p80, abs=5e-5)


@pytest.mark.parametrize("ends", RESULTS)
def test_scipy_has_the_same_lognormal(ends):
    """The results once more, with scipy's distribution and its own parameters."""
    _, mean, deviation, p80 = RESULTS[ends]
    theirs = lognorm(np.log(ends[1] / ends[0]) / 2.563103, scale=np.prod(ends) ** 0.5)

    assert theirs.ppf([0.1, 0.9]) == pytest.approx(ends, rel=1e-6)
    assert theirs.mean() == pytest.approx(mean, abs=5e-5)
    assert theirs.std() == pytest.approx(deviation, abs=1e-4)
    assert theirs.ppf(0.8) == pytest.approx(p80, abs=1e-4)


@pytest.mark.parametrize(("factor", "sigma"), FACTORS.items())
def test_a_range_factor_is_a_spread(factor, sigma):
    """P90 over P10 settles the spread of the logarithm, whatever the amount."""
    shape = from_range("lognormal", low=731.0, high=731.0 * factor, **ENDS)

    assert shape.log_spread == pytest.approx(sigma, abs=5e-5)
