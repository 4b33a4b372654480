"""Shapes without a limit on at least one side: normal and lognormal."""

from __future__ import annotations

import math
from dataclasses import dataclass

import numpy as np
from numpy.typing import ArrayLike
from scipy.special import ndtr

from contingency.quantities.shape_contract import Array, ShapeByScore


@dataclass(frozen=True, kw_only=True, slots=True)
class Normal(ShapeByScore):
    """The normal distribution.

    Parameters
    ----------
    centre : float
        Mean, median and most likely value; any unit.
    spread : float
        Standard deviation, positive, same unit.

    Examples
    --------
    >>> Normal(centre=100.0, spread=10.0).at_score(1.0)
    np.float64(110.0)
    """

    centre: float
    spread: float

    @property
    def mean(self) -> float:
        """Exact mean."""
        return self.centre

    @property
    def variance(self) -> float:
        """Exact variance."""
        return self.spread**2

    @property
    def support(self) -> tuple[float, float]:
        """Everything."""
        return -math.inf, math.inf

    def cdf(self, x: ArrayLike) -> Array:
        """Return the chance of not exceeding `x`, same shape as `x`."""
        score = (np.asarray(x, dtype=np.float64) - self.centre) / self.spread
        return np.asarray(ndtr(score), dtype=np.float64)

    def at_score(self, z: ArrayLike) -> Array:
        """Return the quantile at the standard normal score `z`, same shape."""
        return self.centre + self.spread * np.asarray(z, dtype=np.float64)


@dataclass(frozen=True, kw_only=True, slots=True)
class Lognormal(ShapeByScore):
    """The lognormal distribution, with two parameters or shifted (three).

    X = shift + scale exp(log_spread Z) with Z standard normal; written from the
    median, X = median + scale (exp(log_spread Z) - 1), so that a large shift loses
    no digits.

    Parameters
    ----------
    median : float
        Value exceeded with a chance of one half; any unit.
    scale : float
        Distance of the median from the shift, positive, same unit.  Equal to the
        median where the shift is zero.
    log_spread : float
        Standard deviation of the logarithm of X - shift, positive.

    References
    ----------
    .. [1] Johnson, N. L., Kotz, S. and Balakrishnan, N. (1994). Continuous
       Univariate Distributions, vol. 1, 2nd ed. Wiley. Chapter 14.

    Examples
    --------
    >>> shape = Lognormal(median=100.0, scale=100.0, log_spread=0.2)
    >>> round(shape.mean, 4), round(shape.mode, 4)
    (102.0201, 96.0789)
    """

    median: float
    scale: float
    log_spread: float

    @property
    def shift(self) -> float:
        """Lower limit of the values."""
        return self.median - self.scale

    @property
    def mode(self) -> float:
        """Most likely value, shift + scale exp(-log_spread^2)."""
        return self.median + self.scale * math.expm1(-(self.log_spread**2))

    @property
    def mean(self) -> float:
        """Exact mean, shift + scale exp(log_spread^2/2)."""
        return self.median + self.scale * math.expm1(self.log_spread**2 / 2.0)

    @property
    def variance(self) -> float:
        """Exact variance, scale^2 (exp(s^2) - 1) exp(s^2) with s = log_spread."""
        square = self.log_spread**2
        return self.scale**2 * math.expm1(square) * math.exp(square)

    @property
    def support(self) -> tuple[float, float]:
        """From the shift upwards."""
        return self.shift, math.inf

    def cdf(self, x: ArrayLike) -> Array:
        """Return the chance of not exceeding `x`, same shape as `x`."""
        from_median = (np.asarray(x, dtype=np.float64) - self.median) / self.scale
        with np.errstate(divide="ignore"):
            score = np.log1p(np.maximum(from_median, -1.0)) / self.log_spread
        return np.asarray(ndtr(score), dtype=np.float64)

    def at_score(self, z: ArrayLike) -> Array:
        """Return the quantile at the standard normal score `z`, same shape."""
        growth = np.expm1(self.log_spread * np.asarray(z, dtype=np.float64))
        return self.median + self.scale * growth
