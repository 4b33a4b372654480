"""Shapes between two limits: beta-PERT, triangular, uniform."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import ArrayLike
from scipy.special import betainc, betaincinv, ndtri

from contingency.quantities.shape_contract import Array, ShapeByTails, StandardKey

PEAKEDNESS = 4.0
"""Weight of the likely value in the beta-PERT's mean (a + 4m + b)/6."""

_KEY_DIGITS = 12
# Two packages with the same range in percent differ by rounding only; twelve digits
# of the likely value's place let them share a table.


@dataclass(frozen=True, kw_only=True, slots=True)
class BetaPert(ShapeByTails):
    """The beta distribution of the PERT method, between two limits.

    Beta on [low, high] with alpha = 1 + 4 (likely - low)/(high - low) and
    beta = 1 + 4 (high - likely)/(high - low).

    Parameters
    ----------
    low, likely, high : float
        Smallest, most likely and largest value, low < high; any unit.

    References
    ----------
    .. [1] Malcolm, D. G., Roseboom, J. H., Clark, C. E. and Fazar, W. (1959).
       Application of a technique for research and development program
       evaluation. Operations Research 7(5), 646-669. doi:10.1287/opre.7.5.646
       The mean is theirs; the variance is the exact one of the beta, not their
       (high - low)^2/36.

    Examples
    --------
    >>> shape = BetaPert(low=10.0, likely=12.0, high=20.0)
    >>> shape.mean, shape.variance
    (13.0, 3.0)
    """

    low: float
    likely: float
    high: float

    @property
    def alpha(self) -> float:
        """First exponent of the beta distribution plus 1."""
        return 1.0 + PEAKEDNESS * _place(self.low, self.likely, self.high)

    @property
    def beta(self) -> float:
        """Second exponent of the beta distribution plus 1."""
        return 1.0 + PEAKEDNESS * _place(-self.high, -self.likely, -self.low)

    @property
    def mean(self) -> float:
        """Exact mean, (low + 4 likely + high)/6."""
        return (self.low + PEAKEDNESS * self.likely + self.high) / (PEAKEDNESS + 2.0)

    @property
    def variance(self) -> float:
        """Exact variance, (mean - low)(high - mean)/7."""
        return (self.mean - self.low) * (self.high - self.mean) / (PEAKEDNESS + 3.0)

    @property
    def support(self) -> tuple[float, float]:
        """The two limits."""
        return self.low, self.high

    def cdf(self, x: ArrayLike) -> Array:
        """Return the chance of not exceeding `x`, same shape as `x`."""
        place = _place_within(x, self.low, self.high)
        return np.asarray(betainc(self.alpha, self.beta, place), dtype=np.float64)

    def standard_form(self) -> tuple[StandardKey, float, float]:
        """Return the key of the beta-PERT on [0, 1], low and high - low."""
        place = round(_place(self.low, self.likely, self.high), _KEY_DIGITS)
        return ("pert", place), self.low, self.high - self.low

    def at_tails(self, below: Array, above: Array) -> Array:
        """Return the quantile with chance `below` under it and `above` over it."""
        # Each half from its own limit: both tails keep all their digits.
        lower = below <= above
        alpha = np.where(lower, self.alpha, self.beta)
        beta = np.where(lower, self.beta, self.alpha)
        away = (self.high - self.low) * betaincinv(
            alpha, beta, np.where(lower, below, above)
        )
        return np.where(lower, self.low + away, self.high - away)


@dataclass(frozen=True, kw_only=True, slots=True)
class Triangular(ShapeByTails):
    """The triangular distribution: density rising to `likely`, then falling.

    Parameters
    ----------
    low, likely, high : float
        Smallest, most likely and largest value, low < high; any unit.

    References
    ----------
    .. [1] Johnson, N. L., Kotz, S. and Balakrishnan, N. (1995). Continuous
       Univariate Distributions, vol. 2, 2nd ed. Wiley. Section 26.9.

    Examples
    --------
    >>> Triangular(low=0.0, likely=0.0, high=3.0).mean
    1.0
    """

    low: float
    likely: float
    high: float

    @property
    def mean(self) -> float:
        """Exact mean, (low + likely + high)/3."""
        return (self.low + self.likely + self.high) / 3.0

    @property
    def variance(self) -> float:
        """Exact variance, (A^2 + A B + B^2)/18 with the widths A, B of the two sides.

        The same as (a^2 + m^2 + b^2 - a m - a b - m b)/18, without its cancellation.
        """
        left, right = self.likely - self.low, self.high - self.likely
        return (left * left + left * right + right * right) / 18.0

    @property
    def support(self) -> tuple[float, float]:
        """The two limits."""
        return self.low, self.high

    @property
    def breaks(self) -> tuple[float, ...]:
        """The score of the likely value, where the density has its corner."""
        place = _place(self.low, self.likely, self.high)
        return (float(ndtri(place)),) if 0.0 < place < 1.0 else ()

    def cdf(self, x: ArrayLike) -> Array:
        """Return the chance of not exceeding `x`, same shape as `x`."""
        place = _place_within(x, self.low, self.high)
        mode = _place(self.low, self.likely, self.high)
        # Each side up to the mode only, so that a side of hardly any width is harmless.
        rise, fall = np.minimum(place, mode), np.minimum(1.0 - place, 1.0 - mode)
        rising = rise * (rise / mode) if mode > 0.0 else 0.0
        falling = fall * (fall / (1.0 - mode)) if mode < 1.0 else 0.0
        return np.where(place <= mode, rising, 1.0 - falling)

    def standard_form(self) -> tuple[StandardKey, float, float]:
        """Return the key of the triangular on [0, 1], low and high - low."""
        place = round(_place(self.low, self.likely, self.high), _KEY_DIGITS)
        return ("triangular", place), self.low, self.high - self.low

    def at_tails(self, below: Array, above: Array) -> Array:
        """Return the quantile with chance `below` under it and `above` over it."""
        width, mode = self.high - self.low, _place(self.low, self.likely, self.high)
        return np.where(
            below <= mode,
            self.low + width * np.sqrt(below * mode),
            self.high - width * np.sqrt(above * (1.0 - mode)),
        )


@dataclass(frozen=True, kw_only=True, slots=True)
class Uniform(ShapeByTails):
    """The uniform distribution: every value between the limits alike.

    Parameters
    ----------
    low, high : float
        Smallest and largest value, low < high; any unit.

    Examples
    --------
    >>> Uniform(low=0.0, high=12.0).variance
    12.0
    """

    low: float
    high: float

    @property
    def mean(self) -> float:
        """Exact mean, (low + high)/2."""
        return (self.low + self.high) / 2.0

    @property
    def variance(self) -> float:
        """Exact variance, (high - low)^2/12."""
        return (self.high - self.low) ** 2 / 12.0

    @property
    def support(self) -> tuple[float, float]:
        """The two limits."""
        return self.low, self.high

    def cdf(self, x: ArrayLike) -> Array:
        """Return the chance of not exceeding `x`, same shape as `x`."""
        return _place_within(x, self.low, self.high)

    def standard_form(self) -> tuple[StandardKey, float, float]:
        """Return the key of the uniform on [0, 1], low and high - low."""
        return ("uniform",), self.low, self.high - self.low

    def at_tails(self, below: Array, above: Array) -> Array:
        """Return the quantile with chance `below` under it and `above` over it."""
        width = self.high - self.low
        return np.where(
            below <= above, self.low + width * below, self.high - width * above
        )


def _place(low: float, value: float, high: float) -> float:
    """Return where `value` lies between the limits, 0 at `low` and 1 at `high`."""
    return (value - low) / (high - low)


def _place_within(x: ArrayLike, low: float, high: float) -> Array:
    """Return the same for an array, cut off at 0 and 1."""
    place = (np.asarray(x, dtype=np.float64) - low) / (high - low)
    return np.clip(place, 0.0, 1.0)
