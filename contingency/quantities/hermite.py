"""Covariance of ranges in closed form, from Hermite series of their quantile curves.

A range is X = Q(Z), Z its normal score.  With the orthonormal Hermite polynomials
h_n (h_n = He_n / sqrt(n!)) the coefficients c_n = E[Q(Z) h_n(Z)] give the variance as
the sum of c_n^2 over n >= 1 and, for scores with correlation r, the covariance of two
ranges as the sum of a_n b_n r^n ([1]_; Mehler's formula [2]_).  Derivation:
``docs/method.md``, section "Closed-form covariance".

References
----------
.. [1] Morrison, R. and Basor, E. (2024). Exact mean and covariance formulas after
   diagonal transformations of a multivariate normal. arXiv:2407.00240
.. [2] Mehler, F. G. (1866). Ueber die Entwicklung einer Function von beliebig vielen
   Variablen nach Laplaceschen Functionen hoeherer Ordnung. J. reine angew. Math. 66,
   161-176. doi:10.1515/crll.1866.66.161
"""

from __future__ import annotations

import math
from collections.abc import Sequence
from functools import lru_cache
from itertools import pairwise

import numpy as np
from numpy.typing import ArrayLike, NDArray

from contingency.quantities.shapes import (
    Discrete,
    Fixed,
    Lognormal,
    Normal,
    Shape,
    standard_shape,
)

Array = NDArray[np.float64]

ORDER = 60
"""Terms of a series, n = 1 to 60."""

_LAST_SCORE = 10.0
# Chance beyond it: 2e-23; with h_60 there still below 1e-11 of the curve's height.

_STEP = 0.125
# Trapezium rule for curves without breaks: exact to rounding, for they are analytic.

_PANEL = 0.5
_NODES = 16
# Gauss-Legendre panels for curves with breaks, which all fall between panels.


def coefficients(shapes: Sequence[Shape], order: int = ORDER) -> Array:
    """Return the (k, order) Hermite coefficients of ``k`` quantile curves.

    Column n - 1 holds c_n of the orthonormal polynomial of degree n, in the units of
    the shape; c_0, the mean, is left out.  Closed forms for normal, lognormal,
    discrete and fixed shapes, quadrature split at the breaks for the others.

    Parameters
    ----------
    shapes : sequence of ``k`` shapes
    order : int
        Highest degree.

    Examples
    --------
    >>> coefficients([Normal(centre=100.0, spread=10.0)], order=3)
    array([[10.,  0.,  0.]])
    """
    rows = np.zeros((len(shapes), order))
    shared: dict[object, Array] = {}
    for row, shape in zip(rows, shapes, strict=True):
        form = shape.standard_form()
        if form is None:
            row[:] = _coefficients(shape, order)
            continue
        key, _, scale = form
        if key not in shared:
            shared[key] = _coefficients(standard_shape(key), order)
        row[:] = scale * shared[key]
    return rows


def covariance_matrix(
    series: Array, correlation: ArrayLike, variances: ArrayLike
) -> Array:
    """Return the (k, k) covariances of ranges under a Gaussian copula.

    Sum of a_n b_n r^n over the series; the diagonal is `variances`, exactly.

    Parameters
    ----------
    series : (k, order) array
        As `coefficients` returns it.
    correlation : (k, k) array
        Correlations of the normal scores.
    variances : (k,) array
        Exact variances of the shapes.

    See Also
    --------
    truncation_bound : what the rest of the series can amount to.

    Examples
    --------
    Two normals with standard deviations 1 and 2, correlation 1/2:

    >>> series = coefficients(
    ...     [Normal(centre=0.0, spread=1.0), Normal(centre=0.0, spread=2.0)]
    ... )
    >>> covariance_matrix(series, [[1.0, 0.5], [0.5, 1.0]], [1.0, 4.0])
    array([[1., 1.],
           [1., 4.]])
    """
    r = np.asarray(correlation, dtype=np.float64)
    # Horner's rule in r, from the last term to the first.
    covariance = np.zeros_like(r)
    for term in series.T[::-1]:
        covariance += np.multiply.outer(term, term)
        covariance *= r
    np.fill_diagonal(covariance, variances)
    return covariance


def truncation_bound(
    series: Array, correlation: ArrayLike, variances: ArrayLike
) -> Array:
    """Return (k, k) bounds of what `covariance_matrix` leaves out.

    The rest of the series is at most |r|^(order + 1) times the root of the product of
    the two variances' rests, variance - sum of c_n^2 (Cauchy-Schwarz).

    Parameters
    ----------
    series, correlation, variances
        As in `covariance_matrix`.

    Examples
    --------
    >>> shape = Lognormal(median=1.0, scale=1.0, log_spread=0.5)
    >>> series = coefficients([shape, shape], order=3)
    >>> bound = truncation_bound(series, [[1.0, 0.5], [0.5, 1.0]], [shape.variance] * 2)
    >>> bool(bound[0, 1] < 1e-4)
    True
    """
    r = np.abs(np.asarray(correlation, dtype=np.float64))
    rest = np.asarray(variances, np.float64) - np.square(series).sum(axis=1)
    root = np.sqrt(np.maximum(rest, 0.0))
    bound: Array = r ** (series.shape[1] + 1) * np.multiply.outer(root, root)
    np.fill_diagonal(bound, 0.0)
    return bound


def _coefficients(shape: Shape, order: int) -> Array:
    """Return the (order,) coefficients of one curve."""
    if isinstance(shape, Fixed):
        return np.zeros(order)
    if isinstance(shape, Normal):
        return np.asarray(shape.spread * np.eye(1, order)[0])
    if isinstance(shape, Lognormal):
        return _of_lognormal(shape, order)
    if isinstance(shape, Discrete):
        return _of_discrete(shape, order)
    score, weight, polynomials = _rule(shape.breaks, order)
    centre = float(shape.at_score(0.0))
    return np.asarray(((shape.at_score(score) - centre) * weight) @ polynomials[:, 1:])


def _of_lognormal(shape: Lognormal, order: int) -> Array:
    """Return scale exp(s^2/2) s^n / sqrt(n!), from the generating function."""
    degree = np.arange(1, order + 1)
    ratios = shape.log_spread / np.sqrt(degree)
    growth = math.exp(shape.log_spread**2 / 2.0)
    return np.asarray(shape.scale * growth * np.cumprod(ratios))


def _of_discrete(shape: Discrete, order: int) -> Array:
    """Return the sum over jumps of height times density(b) h_(n-1)(b) / sqrt(n)."""
    jumps = np.array(shape.breaks)
    heights = np.diff(shape.values) * np.exp(-(jumps**2) / 2.0) / math.sqrt(2 * math.pi)
    degree = np.arange(1, order + 1)
    return np.asarray(heights @ _polynomials(jumps, order - 1) / np.sqrt(degree))


@lru_cache(maxsize=8)
def _rule(breaks: tuple[float, ...], order: int) -> tuple[Array, Array, Array]:
    """Return scores, weights times normal density, and (nodes, order + 1) h_n."""
    if breaks:
        ends = [-_LAST_SCORE, *(b for b in breaks if abs(b) < _LAST_SCORE), _LAST_SCORE]
        score, weight = _panels(ends)
    else:
        score = np.linspace(
            -_LAST_SCORE, _LAST_SCORE, round(2 * _LAST_SCORE / _STEP) + 1
        )
        weight = np.full(score.size, _STEP)
    density = np.exp(-(score**2) / 2.0) / math.sqrt(2.0 * math.pi)
    return score, weight * density, _polynomials(score, order)


def _panels(ends: Sequence[float]) -> tuple[Array, Array]:
    """Return Gauss-Legendre nodes and weights, panels between all ends."""
    edges = [ends[0]]
    for left, right in pairwise(ends):
        count = max(1, math.ceil((right - left) / _PANEL))
        edges.extend(np.linspace(left, right, count + 1)[1:])
    nodes, weights = np.polynomial.legendre.leggauss(_NODES)
    half = np.diff(edges)[:, None] / 2.0
    score = np.asarray(edges[:-1])[:, None] + half * (nodes + 1.0)
    return score.ravel(), (half * weights).ravel()


def _polynomials(score: Array, order: int) -> Array:
    """Return (nodes, order + 1) orthonormal Hermite polynomials, by recurrence."""
    h = np.ones((score.size, order + 1))
    if order >= 1:
        h[:, 1] = score
    for n in range(1, order):
        h[:, n + 1] = (score * h[:, n] - math.sqrt(n) * h[:, n - 1]) / math.sqrt(n + 1)
    return h
