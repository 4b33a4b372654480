"""Rank correlations under a Gaussian copula.

Source     Pearson, K. (1907), Drapers' Company Research Memoirs, Biometric Series IV,
           for rho_S = (6/pi) arcsin(r/2); Kruskal, W. H. (1958). Ordinal measures of
           association. J. Am. Stat. Assoc. 53(284), 814-861, for tau = (2/pi) arcsin(r)
           (both theorems, from memory).
Taken      the theorems. The table is worked out from them.
Precision  six digits; the covariance of two uniforms, which shares nothing with the
           formula, to 1e-12; sampled rank correlations to four standard errors.
Errata     none known.
"""

import numpy as np
import pytest
from scipy.stats import kendalltau, spearmanr

from contingency.quantities.dependence import normal_to_rank, rank_to_normal
from contingency.quantities.hermite import coefficients, covariance_matrix
from contingency.quantities.shapes import BetaPert, Lognormal, Uniform

TABLE = {
    # r: rank correlation, r needed for the rank correlation r, Kendall's tau
    0.1: (0.095533, 0.104672, 0.063769),
    0.2: (0.191306, 0.209057, 0.128188),
    0.3: (0.287564, 0.312869, 0.193973),
    0.5: (0.482584, 0.517638, 0.333333),
    0.7: (0.682911, 0.716736, 0.493633),
    0.9: (0.891456, 0.907981, 0.712867),
}


@pytest.mark.parametrize(("r", "row"), TABLE.items())
def test_to_rank_correlation_and_back(r, row):
    """Both directions, to the digits of the table."""
    assert float(normal_to_rank(r)) == pytest.approx(row[0], abs=5e-7)
    assert float(rank_to_normal(r)) == pytest.approx(row[1], abs=5e-7)


@pytest.mark.parametrize("r", TABLE)
def test_it_is_the_correlation_of_two_uniforms(r):
    """Rank correlation is that of the uniforms under the scores: twelve covariances.

    By the Hermite series of the uniform, which knows nothing of an arcsine.
    """
    shapes = [Uniform(low=0.0, high=1.0)] * 2
    covariance = covariance_matrix(
        coefficients(shapes), [[1.0, r], [r, 1.0]], [1 / 12, 1 / 12]
    )[0, 1]

    assert 12.0 * covariance == pytest.approx(float(normal_to_rank(r)), abs=1e-12)


def test_skewed_costs_have_the_rank_correlation_that_was_asked_for():
    """A beta-PERT and a lognormal: ranks do not see the shape, and tau agrees too."""
    wished, pairs = 0.5, 40_000
    r = float(rank_to_normal(wished))
    rng = np.random.default_rng(20260401)
    first = rng.normal(size=pairs)
    second = r * first + np.sqrt(1 - r * r) * rng.normal(size=pairs)
    cost = BetaPert(low=80.0, likely=85.0, high=150.0).at_score(first)
    other = Lognormal(median=10.0, scale=10.0, log_spread=0.9).at_score(second)

    # The standard error of either rank correlation is below 1/sqrt(pairs).
    allowed = 4.0 / np.sqrt(pairs)
    assert spearmanr(cost, other).statistic == pytest.approx(wished, abs=allowed)
    assert kendalltau(cost, other).statistic == pytest.approx(
        2 / np.pi * np.arcsin(r), abs=allowed
    )


@pytest.mark.parametrize(("r", "row"), TABLE.items())
def test_the_column_of_kendalls_tau(r, row):
    """(2/pi) arcsin(r), to the digits of the table."""
    assert 2 / np.pi * np.arcsin(r) == pytest.approx(row[2], abs=5e-7)
