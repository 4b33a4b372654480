"""Latin hypercube blocks: what the theory says of the mean, with our own draws.

Source     McKay, M. D., Beckman, R. J. and Conover, W. J. (1979). Technometrics
           21(2), 239-245. doi:10.2307/1268522; Stein, M. (1987). Technometrics 29(2),
           143-151. doi:10.1080/00401706.1987.10488205; Owen, A. B. (1997). Monte
           Carlo variance of scrambled net quadrature. SIAM J. Numer. Anal. 34(5).
Taken      theorems: the variance of the mean of one stratified uniform, 1 / (12 n³);
           n Var tends to the variance of the part that is not additive (Stein); it is
           at most n / (n - 1) times that of plain trials (Owen). No printed table.
Precision  exact at n = 4,096; each estimated variance to four of its own standard
           errors, sqrt(2 / (repeats - 1)) of itself.
Errata     none known.
"""

import numpy as np
import pytest

from contingency.quantities.draws import BLOCK, Source, scores, strata, uniforms

REPEATS = 1_500
ALLOWED = 4 * np.sqrt(2 / (REPEATS - 1))

# f = (1 + (u - 1/2) / 2) over three inputs: each factor has mean 1, variance 1/48.
FACTOR_VARIANCE = 0.25 / 12
FUNCTION_VARIANCE = (1 + FACTOR_VARIANCE) ** 3 - 1
NOT_ADDITIVE = 1 - 3 * FACTOR_VARIANCE / FUNCTION_VARIANCE


def in_trial_order(cells, values):
    """Put values, which stand in the order of the strata, to their trials."""
    out = np.empty_like(values)
    np.put_along_axis(out, cells.trial, values, axis=1)
    return out


@pytest.fixture(scope="module")
def means():
    """Mean over each block of one uniform, of a sum of normals, of the product f."""
    source = Source(20260401)
    found = np.empty((REPEATS, 3))
    for block in range(REPEATS):
        cells = strata(source, ["a", "b", "c"], block)
        u = in_trial_order(cells, uniforms(cells))
        product = np.prod(1 + (u - 0.5) / 2, axis=0)
        normals = scores(cells)
        found[block] = u[0].mean(), normals.sum(axis=0).mean(), product.mean()
    return found


def test_the_non_additive_part_is_small():
    """Of the variance of f, 2.05 % is not a sum of functions of one input."""
    assert pytest.approx(0.0205, abs=5e-5) == NOT_ADDITIVE


def test_the_mean_of_one_uniform(means):
    """Variance 1 / (12 n³) instead of 1 / (12 n)."""
    variance = np.var(means[:, 0], ddof=1)

    assert variance == pytest.approx(1 / (12 * BLOCK**3), rel=ALLOWED)


def test_the_mean_is_where_it_should_be(means):
    """Stratified draws are fair draws: no mean is off by more than four errors."""
    error = np.std(means, axis=0, ddof=1) / np.sqrt(REPEATS)

    assert np.all(np.abs(means.mean(axis=0) - [0.5, 0.0, 1.0]) < 4 * error)


def test_an_additive_sum_of_normals_has_hardly_any_variance_left(means):
    """Three normals: 0.0022 of the plain variance at n = 100; here far below that."""
    plain = 3 / BLOCK
    ratio = np.var(means[:, 1], ddof=1) / plain

    assert ratio < 0.0022 * 100 / BLOCK * (1 + ALLOWED)


def test_what_is_not_additive_stays(means):
    """The product keeps its non-additive share of the plain variance (Stein)."""
    plain = FUNCTION_VARIANCE / BLOCK
    ratio = np.var(means[:, 2], ddof=1) / plain

    assert ratio == pytest.approx(NOT_ADDITIVE, rel=ALLOWED)


def test_never_worse_than_plain_trials(means):
    """N / (n - 1) bounds all three ratios (Owen)."""
    plain = np.array([1 / 12, 3.0, FUNCTION_VARIANCE]) / BLOCK

    assert np.all(np.var(means, axis=0, ddof=1) <= plain * BLOCK / (BLOCK - 1))
