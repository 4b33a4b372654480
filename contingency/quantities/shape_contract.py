"""What every shape offers: one distribution of a cost or of a fraction of a cost.

A shape is its quantile curve, with exact mean and variance beside it.
"""

from __future__ import annotations

from abc import ABC, abstractmethod

import numpy as np
from numpy.typing import ArrayLike, NDArray
from scipy.special import ndtr, ndtri

Array = NDArray[np.float64]

StandardKey = tuple[str | float, ...]
"""Names a standard shape: equal for shapes that differ in place and width only."""


class Shape(ABC):
    """One distribution of a cost or of a fraction of a cost."""

    @property
    @abstractmethod
    def mean(self) -> float:
        """Exact mean, in the units of the shape's ends."""

    @property
    @abstractmethod
    def variance(self) -> float:
        """Exact variance, in squared units."""

    @property
    @abstractmethod
    def support(self) -> tuple[float, float]:
        """Smallest and largest possible value; infinite where unbounded."""

    @property
    def breaks(self) -> tuple[float, ...]:
        """Normal scores at which the quantile curve bends or jumps, ascending."""
        return ()

    @abstractmethod
    def cdf(self, x: ArrayLike) -> Array:
        """Return the chance of not exceeding `x`, same shape as `x`."""

    @abstractmethod
    def quantile(self, p: ArrayLike) -> Array:
        """Return the value not exceeded with chance `p` in [0, 1], same shape.

        Where several values fit, the smallest.
        """

    @abstractmethod
    def at_score(self, z: ArrayLike) -> Array:
        """Return the quantile at the standard normal score `z`, same shape.

        Keeps its precision in both tails, out to scores of -8.5 and 8.5 and
        further, where ``quantile(p)`` would have run out of digits near ``p = 1``.
        """

    def standard_form(self) -> tuple[StandardKey, float, float] | None:
        """Return (key, location, scale) with X = location + scale * S, or None.

        S is the shape that `standard_shape` of :mod:`contingency.quantities.shapes`
        gives for the key.  Shapes with one key can share a table of S.  None means
        that `at_score` is already cheap and exact, and no table is wanted.
        """
        return None


class ShapeByTails(Shape):
    """A shape whose quantile is written in the chances below and above it."""

    def quantile(self, p: ArrayLike) -> Array:
        """Return the value not exceeded with chance `p` in [0, 1], same shape."""
        below = np.asarray(p, dtype=np.float64)
        return self.at_tails(below, 1.0 - below)

    def at_score(self, z: ArrayLike) -> Array:
        """Return the quantile at the standard normal score `z`, same shape."""
        score = np.asarray(z, dtype=np.float64)
        return self.at_tails(
            np.asarray(ndtr(score), dtype=np.float64),
            np.asarray(ndtr(-score), dtype=np.float64),
        )

    @abstractmethod
    def at_tails(self, below: Array, above: Array) -> Array:
        """Return the quantile with chance `below` under it and `above` over it.

        The two have one shape and add up to 1; each is exact where it is small.
        """


class ShapeByScore(Shape):
    """A shape whose quantile is written in the standard normal score."""

    def quantile(self, p: ArrayLike) -> Array:
        """Return the value not exceeded with chance `p` in [0, 1], same shape."""
        return self.at_score(ndtri(np.asarray(p, dtype=np.float64)))
