"""The percentiles of one event that may not happen, in closed form.

Source     Guidance of an Australian state on public-private partnerships, advanced risk
           quantification. https://ppponline.affinitext.com/public/book?id=1493
Taken      adverse ground: chance 15 %, triangular $250,000, $325,000, $600,000, at most
           once (read). The results are worked out here: Q(q) = 0 up to q = 1 - p, then
           the impact's quantile at (q - (1 - p))/p.
Precision  six digits, as worked out.
Errata     none known.
"""

import pytest

from contingency.quantities.shapes import Triangular

CHANCE = 0.15
IMPACT = Triangular(low=250.0, likely=325.0, high=600.0)
"""Thousands of dollars."""


def funding(q):
    """The q quantile of the event's cost."""
    if q <= 1.0 - CHANCE:
        return 0.0
    return float(IMPACT.quantile((q - (1.0 - CHANCE)) / CHANCE))


def test_the_impact_has_its_moments():
    """Mean 391.667, standard deviation 75.231."""
    assert IMPACT.mean == pytest.approx(391.667, abs=5e-4)
    assert IMPACT.variance**0.5 == pytest.approx(75.231, abs=5e-4)


def test_the_event_has_its_moments():
    """Expected cost 58.750, standard deviation 142.856."""
    mean = CHANCE * IMPACT.mean
    variance = CHANCE * IMPACT.variance + CHANCE * (1 - CHANCE) * IMPACT.mean**2

    assert mean == pytest.approx(58.750, abs=5e-4)
    assert variance**0.5 == pytest.approx(142.856, abs=5e-4)


@pytest.mark.parametrize(
    ("q", "amount"),
    [(0.5, 0.0), (0.8, 0.0), (0.85, 0.0), (0.9, 346.689), (0.95, 420.882)],
)
def test_a_level_below_the_chance_of_nothing_funds_nothing(q, amount):
    """P80 of an unlikely event is 0; P90 and P95 reach into its impact."""
    assert funding(q) == pytest.approx(amount, abs=5e-4)


@pytest.mark.parametrize("amount", [250.0, 346.689, 420.882, 599.0])
def test_the_distribution_function_says_the_same(amount):
    """(1 - p) + p F(x), the other way round."""
    q = 1.0 - CHANCE + CHANCE * float(IMPACT.cdf(amount))

    assert funding(q) == pytest.approx(amount if amount > 250.0 else 0.0, abs=1e-9)
