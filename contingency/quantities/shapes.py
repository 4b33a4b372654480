"""Cost distributions, each given by its quantile function.

Every shape offers the same five things: `mean`, `variance`, `cdf`, `quantile`
and `at_score` (the quantile at a standard normal score).  Formulas and sources
are in ``docs/method.md``, section "Shapes".
"""

from __future__ import annotations

from abc import ABC, abstractmethod

import numpy as np
from numpy.typing import NDArray
from scipy.special import ndtr

Array = NDArray[np.float64]


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
        """Normal scores at which the quantile curve bends or jumps."""
        return ()

    @abstractmethod
    def cdf(self, x: Array) -> Array:
        """Return the chance of not exceeding `x`, same shape as `x`."""

    @abstractmethod
    def quantile(self, p: Array) -> Array:
        """Return the value not exceeded with chance `p` in [0, 1], same shape."""

    def at_score(self, z: Array) -> Array:
        """Return the quantile at the standard normal score `z`, same shape."""
        return self.quantile(ndtr(np.asarray(z, dtype=np.float64)))
