"""Mean and variance of the beta-PERT and the triangular from three figures.

Source     Malcolm, D. G. et al. (1959). Operations Research 7(5), 646-669, for the
           mean (a + 4m + b)/6 (from memory); a guidance sheet on three-point
           estimates, for the same mean, the triangular's moments and (b - a)/6 (read).
Taken      the formulas. The table is worked out from the exact beta distribution,
           and `test_the_table_is_that_of_the_beta_distribution` does so again.
Precision  the six digits of the table; closed forms to 1e-12.
Errata     (b - a)/6 is no standard deviation of a beta-PERT: for a symmetrical range it
           is 11.8 % too low, for a mode at the end 18.3 % too high.
"""

import pytest
from scipy.stats import beta

from contingency.quantities.shapes import BetaPert, Triangular

TABLE = [
    # low, likely, high, mean, standard deviation: beta-PERT, classic, triangular
    (0, 0.5, 1, 0.5, 0.188982, 0.166667, 0.204124),
    (0, 0.25, 1, 0.333333, 0.178174, 0.166667, 0.212459),
    (0, 0.1, 1, 0.233333, 0.159861, 0.166667, 0.224846),
    (0, 0, 1, 0.166667, 0.140859, 0.166667, 0.235702),
    (10, 12, 20, 13, 1.732051, 1.666667, 2.160247),
]

AGREE = 0.14645
"""Place of the mode at which (b - a)/6 is right by chance."""


@pytest.mark.parametrize(("a", "m", "b", "mean", "deviation", "_", "triangular"), TABLE)
def test_the_table(a, m, b, mean, deviation, _, triangular):
    """Beta-PERT mean and standard deviation, triangular standard deviation."""
    pert = BetaPert(low=a, likely=m, high=b)

    assert pert.mean == pytest.approx(mean, abs=5e-7)
    assert pert.variance**0.5 == pytest.approx(deviation, abs=5e-7)
    assert Triangular(low=a, likely=m, high=b).variance ** 0.5 == pytest.approx(
        triangular, abs=5e-7
    )


@pytest.mark.parametrize(("a", "m", "b"), [row[:3] for row in TABLE])
def test_the_table_is_that_of_the_beta_distribution(a, m, b):
    """The distribution from its two exponents has this mean and variance."""
    place = (m - a) / (b - a)
    exact = beta(1 + 4 * place, 5 - 4 * place, loc=a, scale=b - a)
    pert = BetaPert(low=a, likely=m, high=b)

    assert pert.mean == pytest.approx(exact.mean(), rel=1e-12)
    assert pert.variance == pytest.approx(exact.var(), rel=1e-12)


@pytest.mark.parametrize(("a", "m", "b", "_", "deviation", "classic", "__"), TABLE)
def test_the_classic_deviation_is_another_one(a, m, b, _, deviation, classic, __):
    """No shape here reports (b - a)/6 as the spread of a beta-PERT."""
    found = BetaPert(low=a, likely=m, high=b).variance ** 0.5

    assert classic == pytest.approx((b - a) / 6, abs=5e-7)
    assert abs(found - classic) > 0.03 * deviation


@pytest.mark.parametrize("place", [AGREE, 1 - AGREE])
def test_the_two_agree_where_they_cross(place):
    """With the mode at 0.14645 or 0.85355 of the range both give 1/6."""
    found = BetaPert(low=0.0, likely=place, high=1.0).variance ** 0.5

    # The place is printed to five digits, the deviation changes less than that.
    assert found == pytest.approx(1 / 6, abs=1e-5)


def test_skew_raises_the_triangular_spread_and_lowers_the_beta_perts():
    """As the guidance sheet says, for one fixed range."""
    modes = [0.5, 0.4, 0.3, 0.2, 0.1, 0.0]
    pert = [BetaPert(low=0, likely=m, high=1).variance for m in modes]
    triangular = [Triangular(low=0, likely=m, high=1).variance for m in modes]

    assert pert == sorted(pert, reverse=True)
    assert triangular == sorted(triangular)
