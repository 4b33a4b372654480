"""Shapes given by a list: one value, outcomes with probabilities, points of a curve."""

from __future__ import annotations

import math
from dataclasses import dataclass
from functools import cached_property

import numpy as np
from numpy.typing import ArrayLike, NDArray
from scipy.special import ndtr, ndtri

from contingency.quantities.shape_contract import Array, Shape, ShapeByScore

_BISECTIONS = 64
# Halvings of one piece of a points curve: past the last digit of its score.

_NODES = 48
# Gauss-Legendre nodes for one piece: cubic times normal density, exact to rounding.


@dataclass(frozen=True, kw_only=True, slots=True)
class Fixed(Shape):
    """One value, with certainty.

    Parameters
    ----------
    value : float
        The value; any unit.

    Examples
    --------
    >>> Fixed(value=5.0).variance
    0.0
    """

    value: float

    @property
    def mean(self) -> float:
        """The value."""
        return self.value

    @property
    def variance(self) -> float:
        """Nothing."""
        return 0.0

    @property
    def support(self) -> tuple[float, float]:
        """The value, twice."""
        return self.value, self.value

    def cdf(self, x: ArrayLike) -> Array:
        """Return 0 below the value and 1 from there on, same shape as `x`."""
        return np.where(np.asarray(x, dtype=np.float64) >= self.value, 1.0, 0.0)

    def quantile(self, p: ArrayLike) -> Array:
        """Return the value, in the shape of `p`."""
        return np.full(np.shape(p), self.value)

    def at_score(self, z: ArrayLike) -> Array:
        """Return the value, in the shape of `z`."""
        return np.full(np.shape(z), self.value)


@dataclass(frozen=True, kw_only=True)
class Discrete(Shape):
    """A few outcomes, each with its probability.

    Parameters
    ----------
    values : tuple of float
        The outcomes, ascending, no two alike; any unit.
    probabilities : tuple of float
        Their probabilities, each above 0, adding up to 1.

    Examples
    --------
    >>> shape = Discrete(values=(45.0, 50.0, 55.0), probabilities=(0.1, 0.6, 0.3))
    >>> shape.mean, float(shape.quantile(0.7))
    (51.0, 50.0)
    """

    values: tuple[float, ...]
    probabilities: tuple[float, ...]

    @cached_property
    def mean(self) -> float:
        """Exact mean."""
        return math.fsum(
            p * v for p, v in zip(self.probabilities, self.values, strict=True)
        )

    @cached_property
    def variance(self) -> float:
        """Exact variance."""
        return math.fsum(
            p * (v - self.mean) ** 2
            for p, v in zip(self.probabilities, self.values, strict=True)
        )

    @property
    def support(self) -> tuple[float, float]:
        """The smallest and the largest outcome."""
        return self.values[0], self.values[-1]

    @cached_property
    def breaks(self) -> tuple[float, ...]:
        """The scores at which one outcome gives way to the next."""
        return tuple(
            _score(math.fsum(self.probabilities[:i]), math.fsum(self.probabilities[i:]))
            for i in range(1, len(self.values))
        )

    @cached_property
    def _outcomes(self) -> Array:
        return np.array(self.values, dtype=np.float64)

    @cached_property
    def _cumulative(self) -> Array:
        """Chance of not exceeding each outcome; correctly rounded, the last is 1."""
        sums = [math.fsum(self.probabilities[: i + 1]) for i in range(len(self.values))]
        return np.array([*sums[:-1], 1.0])

    def cdf(self, x: ArrayLike) -> Array:
        """Return the chance of not exceeding `x`, same shape as `x`."""
        below = np.searchsorted(self.values, np.asarray(x, np.float64), side="right")
        return np.concatenate(([0.0], self._cumulative))[below]

    def quantile(self, p: ArrayLike) -> Array:
        """Return the smallest outcome not exceeded with chance `p`, same shape."""
        chance = np.asarray(p, dtype=np.float64)
        return self._outcomes[np.searchsorted(self._cumulative, chance)]

    def at_score(self, z: ArrayLike) -> Array:
        """Return the quantile at the standard normal score `z`, same shape."""
        score = np.asarray(z, dtype=np.float64)
        return self._outcomes[np.searchsorted(self.breaks, score)]


@dataclass(frozen=True, kw_only=True)
class Points(ShapeByScore):
    """A smooth rising quantile curve through given percentiles.

    The value is a monotone piecewise cubic of the standard normal score (PCHIP).
    Slopes at inner points are the weighted harmonic means of [2]_; the slope at
    either outermost point is that of the straight line to its neighbour, and beyond
    it the curve goes on in this line: the tail of the normal distribution that has
    the two outermost percentiles.  Two points give that normal distribution itself.

    Parameters
    ----------
    percents : tuple of float
        Percent not exceeded at each point, rising, above 0 and below 100; two or more.
    values : tuple of float
        The values there, not falling; any unit.

    Notes
    -----
    The end slope differs from the three-point formula that is usual with PCHIP.
    That one becomes zero as soon as the second interval is three times as steep as the
    first, and would pile all chance beyond an outermost point up on the point itself.

    References
    ----------
    .. [1] Fritsch, F. N. and Carlson, R. E. (1980). Monotone piecewise cubic
       interpolation. SIAM J. Numer. Anal. 17(2), 238-246. doi:10.1137/0717021
    .. [2] Fritsch, F. N. and Butland, J. (1984). A method for constructing local
       monotone piecewise cubic interpolants. SIAM J. Sci. Stat. Comput. 5(2),
       300-304. doi:10.1137/0905021

    Examples
    --------
    >>> shape = Points(percents=(5.0, 50.0, 95.0), values=(92.0, 104.0, 140.0))
    >>> float(shape.quantile(0.5))
    104.0
    """

    percents: tuple[float, ...]
    values: tuple[float, ...]

    @cached_property
    def _scores(self) -> Array:
        return np.array([_score(p / 100.0, (100.0 - p) / 100.0) for p in self.percents])

    @cached_property
    def _slopes(self) -> Array:
        """Slope of the curve at each point, value per unit of score."""
        width, secant = (
            np.diff(self._scores),
            np.diff(self.values) / np.diff(self._scores),
        )
        slopes = np.empty(len(self.values))
        slopes[0], slopes[-1] = secant[0], secant[-1]
        first, second = 2.0 * width[1:] + width[:-1], width[1:] + 2.0 * width[:-1]
        rising = (secant[:-1] > 0.0) & (secant[1:] > 0.0)
        # Where one side is level the slope is 0; 1 keeps the division defined.
        left, right = np.where(rising, (secant[:-1], secant[1:]), 1.0)
        harmonic = (first + second) / (first / left + second / right)
        slopes[1:-1] = np.where(rising, harmonic, 0.0)
        return slopes

    @cached_property
    def _cubics(self) -> Array:
        """(4, pieces) coefficients of each piece, in powers of score - left score."""
        width, values, slopes = np.diff(self._scores), self.values, self._slopes
        secant = np.diff(values) / width
        return np.array(
            [
                values[:-1],
                slopes[:-1],
                (3.0 * secant - 2.0 * slopes[:-1] - slopes[1:]) / width,
                (slopes[:-1] + slopes[1:] - 2.0 * secant) / width**2,
            ]
        )

    @cached_property
    def mean(self) -> float:
        """Exact mean: the curve integrated against the normal density."""
        return self.values[0] + self._moment(1, self.values[0])

    @cached_property
    def variance(self) -> float:
        """Exact variance: the same for the square of the distance from the mean."""
        return self._moment(2, self.mean)

    @property
    def support(self) -> tuple[float, float]:
        """Without limits, but for a side whose two outermost values are equal."""
        return (
            -math.inf if self._slopes[0] > 0.0 else self.values[0],
            math.inf if self._slopes[-1] > 0.0 else self.values[-1],
        )

    @cached_property
    def breaks(self) -> tuple[float, ...]:
        """The scores of the points."""
        return tuple(float(score) for score in self._scores)

    def cdf(self, x: ArrayLike) -> Array:
        """Return the chance of not exceeding `x`, same shape as `x`."""
        value = np.asarray(x, dtype=np.float64)
        scores, slopes, last = self._scores, self._slopes, len(self.values) - 1
        point = np.searchsorted(self.values, value, side="right") - 1
        piece = np.clip(point, 0, last - 1)
        low, high = np.zeros(value.shape), np.diff(scores)[piece]
        for _ in range(_BISECTIONS):
            middle = (low + high) / 2.0
            under = self._on_piece(piece, middle) <= value
            low, high = np.where(under, middle, low), np.where(under, high, middle)
        score = scores[piece] + low
        for end, outside in ((0, point < 0), (last, point == last)):
            # A level end is reached at once, from below or from above.
            past = np.where(value < self.values[end], -math.inf, math.inf)
            if slopes[end] > 0.0:
                past = scores[end] + (value - self.values[end]) / slopes[end]
            score = np.where(outside, past, score)
        return np.asarray(ndtr(score), dtype=np.float64)

    def at_score(self, z: ArrayLike) -> Array:
        """Return the quantile at the standard normal score `z`, same shape."""
        score = np.asarray(z, dtype=np.float64)
        scores, slopes = self._scores, self._slopes
        inside = np.clip(score, scores[0], scores[-1])
        piece = np.searchsorted(scores[1:-1], inside, side="right")
        value = self._on_piece(piece, inside - scores[piece])
        # A level end stays level: 0 times an infinite score is not wanted.
        if slopes[0] > 0.0:
            value = value + slopes[0] * np.minimum(score - scores[0], 0.0)
        if slopes[-1] > 0.0:
            value = value + slopes[-1] * np.maximum(score - scores[-1], 0.0)
        return value

    def _on_piece(self, piece: NDArray[np.intp], past: Array) -> Array:
        """Return the curve `past` units of score after the left end of `piece`."""
        constant, first, second, third = self._cubics[:, piece]
        value: Array = constant + past * (first + past * (second + past * third))
        return value

    def _moment(self, power: int, centre: float) -> float:
        """Return E[(X - centre)^power] for power 1 or 2."""
        nodes, weights = np.polynomial.legendre.leggauss(_NODES)
        half = np.diff(self._scores)[:, None] / 2.0
        past = half * (nodes + 1.0)
        pieces = np.arange(half.size)[:, None]
        density = _density(self._scores[:-1, None] + past)
        inner = (self._on_piece(pieces, past) - centre) ** power * density * half
        return float(
            np.sum(inner @ weights)
            + _tail(power, -self._scores[0], self.values[0] - centre, -self._slopes[0])
            + _tail(power, self._scores[-1], self.values[-1] - centre, self._slopes[-1])
        )


def _tail(power: int, start: float, value: float, slope: float) -> float:
    """Return E[(value + slope (Z - start))^power; Z > start] for power 1 or 2."""
    chance, density = float(ndtr(-start)), float(_density(np.array(start)))
    beyond = density - start * chance
    if power == 1:
        return value * chance + slope * beyond
    square = (1.0 + start**2) * chance - start * density
    return value**2 * chance + 2.0 * value * slope * beyond + slope**2 * square


def _density(score: Array) -> Array:
    """Return the standard normal density."""
    density: Array = np.exp(-(score**2) / 2.0) / math.sqrt(2.0 * math.pi)
    return density


def _score(below: float, above: float) -> float:
    """Return the normal score with these chances below and above it."""
    return float(ndtri(below)) if below <= above else -float(ndtri(above))
