"""Dependence between ranges: a Gaussian copula from loads or from pairs.

Correlations here are those of the normal scores unless a name says rank.
Formulas and sources: ``docs/method.md``, section "Dependence".
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import ArrayLike, NDArray

Array = NDArray[np.float64]

LEAST_EIGENVALUE = 1e-9
"""Floor of a repaired matrix's eigenvalues, so that a Cholesky factor exists."""

_TOLERANCE = 1e-11
_MOST_ITERATIONS = 1000

_LOADS_TOLERANCE = 1e-9
# How far squares of loads written in decimals may pass 1 by rounding.


@dataclass(frozen=True, kw_only=True, slots=True)
class NearestCorrelation:
    """A usable correlation matrix and what it cost to get there."""

    matrix: Array
    """(k, k) symmetric, unit diagonal, no eigenvalue below `LEAST_EIGENVALUE`."""
    largest_change: float
    """Largest absolute change of one correlation; 0 where nothing was wrong."""
    pair: tuple[int, int] | None
    """Rows of the pair with the largest change, or None where nothing was wrong."""


def own_weight(general: float, loads: ArrayLike) -> Array:
    """Return the weight of each range's own score, sqrt(1 - g - sum of squares).

    Parameters
    ----------
    general : float
        General dependence g, 0 to 1.
    loads : (k, j) array
        Loads of ``k`` ranges on ``j`` common causes, -1 to 1; j may be 0.

    Returns
    -------
    (k,) array

    Raises
    ------
    ValueError
        A range's general dependence and squared loads add up to more than 1.

    Examples
    --------
    >>> own_weight(0.2, [[0.4, 0.8]])
    array([0.])
    >>> own_weight(0.36, [[0.0]])
    array([0.8])
    """
    rest = 1.0 - general - np.square(np.asarray(loads, np.float64)).sum(axis=1)
    if np.any(rest < -_LOADS_TOLERANCE):
        msg = "general dependence and squared loads add up to more than 1"
        raise ValueError(msg)
    own: Array = np.sqrt(np.maximum(rest, 0.0))
    # What rounding leaves of a rest of nothing is nothing.
    own[rest < _LOADS_TOLERANCE] = 0.0
    return own


def factor_correlation(general: float, loads: ArrayLike) -> Array:
    """Return the (k, k) correlations that general dependence and loads imply.

    Off the diagonal g + sum of the products of the loads on each cause.

    Parameters
    ----------
    general : float
        General dependence g, 0 to 1.
    loads : (k, j) array
        Loads of ``k`` ranges on ``j`` common causes.
    """
    by_cause = np.asarray(loads, dtype=np.float64)
    correlation: Array = general + by_cause @ by_cause.T
    np.fill_diagonal(correlation, 1.0)
    return correlation


def rank_to_normal(rank_correlation: ArrayLike) -> Array:
    """Return the correlation of normal scores that gives this rank correlation.

    2 sin(pi rho/6), rho Spearman's rank correlation ([1]_).

    Parameters
    ----------
    rank_correlation : array
        Spearman's rank correlations, -1 to 1.

    References
    ----------
    .. [1] Pearson, K. (1907). Mathematical contributions to the theory of evolution.
       XVI. On further methods of determining correlation. Drapers' Company Research
       Memoirs, Biometric Series IV.

    Examples
    --------
    >>> round(float(rank_to_normal(0.5)), 6)
    0.517638
    """
    rho = np.asarray(rank_correlation, dtype=np.float64)
    return np.asarray(2.0 * np.sin(np.pi / 6.0 * rho))


def normal_to_rank(correlation: ArrayLike) -> Array:
    """Return the rank correlation that this correlation of normal scores gives.

    (6/pi) arcsin(r/2): the inverse of `rank_to_normal`, and its source.

    Parameters
    ----------
    correlation : array
        Correlations of normal scores, -1 to 1.

    Examples
    --------
    >>> round(float(normal_to_rank(0.5)), 6)
    0.482584
    """
    r = np.asarray(correlation, dtype=np.float64)
    return np.asarray(6.0 / np.pi * np.arcsin(r / 2.0))


def nearest_correlation(matrix: ArrayLike) -> NearestCorrelation:
    """Return the correlation matrix that is nearest to a wished-for one.

    Nearest in the Frobenius norm, by alternating projections with Dykstra's
    correction ([1]_, algorithm 3.3 with unit weights).  Where its smallest eigenvalue
    is below `LEAST_EIGENVALUE`, the correlations are then shrunk towards 0 by the one
    factor, next to 1, that lifts it there.  A wished-for matrix that was possible is
    returned with a `largest_change` of 0; if it was singular, it is shrunk like this.

    Parameters
    ----------
    matrix : (k, k) array
        Symmetric, ones on the diagonal, other entries from -1 to 1.

    Raises
    ------
    ValueError
        The matrix is not of this kind.

    References
    ----------
    .. [1] Higham, N. J. (2002). Computing the nearest correlation matrix: a problem
       from finance. IMA Journal of Numerical Analysis 22(3), 329-343.
       doi:10.1093/imanum/22.3.329

    Examples
    --------
    >>> nearest = nearest_correlation([[1, 1, 0], [1, 1, 1], [0, 1, 1]])
    >>> nearest.matrix.round(4)
    array([[1.    , 0.7607, 0.1573],
           [0.7607, 1.    , 0.7607],
           [0.1573, 0.7607, 1.    ]])
    """
    wished = _checked(matrix)
    smallest = float(np.linalg.eigvalsh(wished)[0])
    if smallest >= LEAST_EIGENVALUE:
        return NearestCorrelation(matrix=wished, largest_change=0.0, pair=None)
    if smallest >= -_singular(wished.shape[0]):
        return NearestCorrelation(matrix=_lifted(wished), largest_change=0.0, pair=None)

    usable = _lifted(_projected(wished))
    change = np.abs(usable - wished)
    first, second = np.unravel_index(int(change.argmax()), change.shape)
    return NearestCorrelation(
        matrix=usable,
        largest_change=float(change[first, second]),
        pair=(int(first), int(second)),
    )


def _checked(matrix: ArrayLike) -> Array:
    """Return the matrix as an array of its own, or raise."""
    wished = np.array(matrix, dtype=np.float64)
    if wished.ndim != 2 or wished.shape[0] != wished.shape[1]:
        msg = f"a correlation matrix is square, not {wished.shape}"
        raise ValueError(msg)
    if not (np.all(np.abs(wished) <= 1.0) and np.all(np.diag(wished) == 1.0)):
        msg = "correlations lie between -1 and 1, with 1 on the diagonal"
        raise ValueError(msg)
    if not np.array_equal(wished, wished.T):
        msg = "a correlation matrix is symmetric"
        raise ValueError(msg)
    return wished


def _projected(wished: Array) -> Array:
    """Return the nearest correlation matrix by alternating projections."""
    unit = wished.copy()
    correction = np.zeros_like(wished)
    for _ in range(_MOST_ITERATIONS):
        before = unit
        uncorrected = before - correction
        semidefinite = _without_negative_part(uncorrected)
        correction = semidefinite - uncorrected
        unit = semidefinite.copy()
        np.fill_diagonal(unit, 1.0)
        if np.abs(unit - before).max() <= _TOLERANCE:
            break
    return unit


def _without_negative_part(symmetric: Array) -> Array:
    """Return the nearest positive semidefinite matrix."""
    values, vectors = np.linalg.eigh(symmetric)
    negative = values < 0.0
    part = vectors[:, negative]
    positive = symmetric - (part * values[negative]) @ part.T
    return np.asarray((positive + positive.T) / 2.0)


def _lifted(matrix: Array) -> Array:
    """Return the matrix with its off-diagonal shrunk until Cholesky can use it."""
    smallest = float(np.linalg.eigvalsh(matrix)[0])
    if smallest >= LEAST_EIGENVALUE:
        return matrix
    # The smallest eigenvalue of (1 - w) matrix + w identity is (1 - w) smallest + w.
    weight = (LEAST_EIGENVALUE - smallest) / (1.0 - smallest)
    lifted = (1.0 - weight) * matrix
    np.fill_diagonal(lifted, 1.0)
    return lifted


def _singular(size: int) -> float:
    """Return how far rounding may push the eigenvalue 0 of a `size` matrix below 0."""
    return 10.0 * size * float(np.finfo(np.float64).eps)
