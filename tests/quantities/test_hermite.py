"""Closed-form covariance against integrals that use no Hermite polynomial."""

import itertools

import numpy as np
import pytest
from scipy.integrate import quad
from scipy.stats import norm

from contingency.quantities.hermite import (
    ORDER,
    coefficients,
    covariance_matrix,
    truncation_bound,
)
from contingency.quantities.shapes import (
    Discrete,
    Fixed,
    Lognormal,
    Normal,
    Points,
    Triangular,
    Uniform,
)
from tests.quantities.shape_samples import ALL, CONTINUOUS


def pair_covariance(a, b, r):
    """E[(A - mean)(B - mean)] for scores with correlation r, by two integrals.

    Given the first score z, the second is r z + sqrt(1 - r^2) times another normal.
    """
    inner_nodes, inner_weights = np.polynomial.legendre.leggauss(40)
    spread = np.sqrt(1.0 - r * r)

    def conditional_mean(z):
        """E[B | first score z], split where B breaks."""
        edges = [-9.0, *((b_ - r * z) / spread for b_ in b.breaks), *range(-8, 9), 9.0]
        edges = np.unique(np.clip(edges, -9.0, 9.0))
        half = np.diff(edges)[:, None] / 2.0
        e = edges[:-1, None] + half * (inner_nodes + 1.0)
        value = (b.at_score(r * z + spread * e) - b.mean) * norm.pdf(e) * half
        return float(np.sum(value @ inner_weights))

    total = 0.0
    edges = sorted({-9.0, 0.0, 9.0, *a.breaks})
    for left, right in itertools.pairwise(edges):
        part, _ = quad(
            lambda z: float(a.at_score(z) - a.mean) * conditional_mean(z) * norm.pdf(z),
            left,
            right,
            epsrel=1e-10,
            limit=200,
        )
        total += part
    return total


PAIRS = [
    ("pert", "triangular", 0.5),
    ("pert, P10-P90", "lognormal", -0.7),
    ("pert, mode at low", "pert, mode at high", 0.9),
    ("lognormal, shifted", "uniform", 0.3),
    ("lognormal", "normal", -0.4),
    ("points, three", "triangular, mode at low", 0.6),
    ("discrete", "pert", 0.5),
    ("discrete", "points, level ends", -0.5),
]


@pytest.mark.parametrize(("first", "second", "r"), PAIRS)
def test_covariance_agrees_with_the_double_integral(first, second, r):
    """The series equals the integral of the product over both scores."""
    a, b = ALL[first], ALL[second]
    series = coefficients([a, b])
    variances = [a.variance, b.variance]
    correlation = [[1.0, r], [r, 1.0]]

    found = covariance_matrix(series, correlation, variances)[0, 1]

    allowed = 1e-8 * np.sqrt(a.variance * b.variance)
    allowed += truncation_bound(series, correlation, variances)[0, 1]
    assert found == pytest.approx(pair_covariance(a, b, r), abs=allowed)


@pytest.mark.parametrize("name", CONTINUOUS)
def test_squares_of_the_coefficients_add_up_to_the_variance(name):
    """Parseval: nothing is lost beyond the stated order, but at a break.

    A curve that almost jumps, like the one with close points, loses most.
    """
    shape = CONTINUOUS[name]
    lost = 3e-2 if name == "points, close" else 3e-3
    explained = np.square(coefficients([shape])).sum() / shape.variance

    if shape.breaks:
        assert 1.0 - lost < explained <= 1.0 + 1e-12
    else:
        assert explained == pytest.approx(1.0, abs=1e-11)


def test_lognormal_coefficients_have_a_closed_form_that_the_quadrature_meets():
    """Scale exp(s²/2) s^n / sqrt(n!), against E[Q(Z) h_n(Z)] integrated plainly."""
    shape = Lognormal(median=3.0, scale=2.0, log_spread=0.6)
    found = coefficients([shape], order=6)[0]

    for n in range(1, 7):
        hermite = np.polynomial.HermiteE.basis(n)
        norm_n = np.sqrt(float(np.prod(range(1, n + 1))))
        plain, _ = quad(
            lambda z, h=hermite: float(shape.at_score(z)) * h(z) * norm.pdf(z), -12, 14
        )
        assert found[n - 1] == pytest.approx(plain / norm_n, rel=1e-9)


def test_correlated_lognormals_have_the_known_covariance():
    """Cov = scale² e^(s²) (e^(r s t) - 1), the textbook closed form."""
    s, t, r = 0.8, 0.5, 0.65
    a = Lognormal(median=1.0, scale=1.0, log_spread=s)
    b = Lognormal(median=1.0, scale=1.0, log_spread=t)

    found = covariance_matrix(
        coefficients([a, b]), [[1.0, r], [r, 1.0]], [a.variance, b.variance]
    )

    assert found[0, 1] == pytest.approx(
        np.exp((s * s + t * t) / 2.0) * np.expm1(r * s * t), rel=1e-13
    )


def test_a_discrete_pair_has_the_chance_of_both():
    """Two events with p = 1/2: P(both) = 1/4 + arcsin(r)/(2 pi), Sheppard's formula."""
    coin = Discrete(values=(0.0, 1.0), probabilities=(0.5, 0.5))
    r = 0.6
    found = covariance_matrix(
        coefficients([coin, coin]), [[1.0, r], [r, 1.0]], [0.25, 0.25]
    )

    assert found[0, 1] == pytest.approx(np.arcsin(r) / (2.0 * np.pi), rel=1e-12)


def test_the_diagonal_is_the_exact_variance():
    """Also for shapes whose series ends early."""
    shapes = list(ALL.values())
    variances = np.array([shape.variance for shape in shapes])
    correlation = np.full((len(shapes), len(shapes)), 0.3)

    found = covariance_matrix(coefficients(shapes), correlation, variances)

    assert np.array_equal(np.diag(found), variances)
    assert found == pytest.approx(found.T)


def test_the_bound_is_close_to_what_is_left_out():
    """A series that falls quickly: nearly all of its rest is in the next term."""
    s, r = 0.2, 0.5
    shape = Lognormal(median=1.0, scale=1.0, log_spread=s)
    correlation, variances = [[1.0, r], [r, 1.0]], [shape.variance] * 2
    series = coefficients([shape, shape], order=3)

    left_out = np.exp(s * s) * np.expm1(r * s * s)
    left_out -= covariance_matrix(series, correlation, variances)[0, 1]

    bound = truncation_bound(series, correlation, variances)[0, 1]
    assert left_out <= bound <= 1.02 * left_out


def test_full_dependence_stays_within_the_bound():
    """At r = 1 two discrete costs that are one: the rest is what the bound says."""
    shape = Discrete(values=(0.0, 1.0, 5.0), probabilities=(0.5, 0.45, 0.05))
    series = coefficients([shape, shape])
    ones, variances = np.ones((2, 2)), [shape.variance] * 2

    found = covariance_matrix(series, ones, variances)[0, 1]
    bound = truncation_bound(series, ones, variances)[0, 1]

    assert shape.variance - found == pytest.approx(bound, rel=1e-9)
    assert bound > 0.01 * shape.variance


def test_independence_and_constants_give_nothing():
    """R = 0, or a fixed cost: covariance 0, exactly."""
    shapes = [Normal(centre=0.0, spread=2.0), Fixed(value=3.0), Uniform(low=0, high=1)]
    correlation = np.array([[1.0, 0.9, 0.0], [0.9, 1.0, 0.5], [0.0, 0.5, 1.0]])

    found = covariance_matrix(
        coefficients(shapes), correlation, [s.variance for s in shapes]
    )

    off = found[~np.eye(3, dtype=bool)]
    assert np.array_equal(off, np.zeros(6))


def test_breaks_do_not_cost_digits():
    """Panels end at the breaks: a doubled order leaves the first terms as they are."""
    shape = Triangular(low=0.0, likely=0.1, high=1.0)
    points = Points(percents=(10.0, 50.0, 60.0), values=(0.0, 1.0, 9.0))

    short = coefficients([shape, points])
    long = coefficients([shape, points], order=2 * ORDER)

    assert long[:, :ORDER] == pytest.approx(short, rel=1e-12, abs=1e-15)
    # E[Q(Z) Z] integrated piece by piece, which is the first coefficient.
    for row, curve in zip(short, (shape, points), strict=True):
        edges = [-12.0, *curve.breaks, 12.0]
        first = sum(
            quad(lambda z, c=curve: float(c.at_score(z)) * z * norm.pdf(z), *ends)[0]
            for ends in itertools.pairwise(edges)
        )
        assert row[0] == pytest.approx(first, rel=1e-10)
