"""What a sample, or a fitted model, predicts for one case more.

Formulas are those of the normal sample; ratios are lognormal.
"""

from __future__ import annotations

import math
from dataclasses import dataclass

import numpy as np
from numpy.typing import ArrayLike
from scipy.special import ndtri, stdtr, stdtrit


@dataclass(frozen=True, kw_only=True, slots=True)
class LognormalFit:
    """Ratios as a lognormal, and what they predict for one more."""

    count: int
    """Ratios behind it."""
    log_mean: float
    log_spread: float
    """Standard deviation of the logarithms, with count - 1 in the denominator."""

    def quantile(self, percent: float) -> float:
        """Return the ratio that one more case does not exceed, by `percent`.

        The predictive quantile for a small sample: exp(m + t s sqrt(1 + 1/n)), t of
        Student with n - 1 degrees of freedom.

        >>> fit = LognormalFit(count=10, log_mean=0.0, log_spread=0.2)
        >>> round(fit.quantile(50), 3), round(fit.quantile(80), 3)
        (1.0, 1.204)
        """
        t = float(stdtrit(self.count - 1, percent / 100))
        return math.exp(self.log_mean + t * self._predictive_spread)

    def chance(self, ratio: float) -> float:
        """Return the chance, 0 to 1, that one more case does not exceed `ratio`."""
        if ratio <= 0:
            return 0.0
        distance = math.log(ratio) - self.log_mean
        if self._predictive_spread == 0:
            return float(distance >= 0)
        return float(stdtr(self.count - 1, distance / self._predictive_spread))

    @property
    def _predictive_spread(self) -> float:
        return self.log_spread * math.sqrt(1.0 + 1.0 / self.count)


def fit_lognormal(ratios: ArrayLike) -> LognormalFit:
    """Return the lognormal of (n,) positive ratios; two at least."""
    logs = np.log(np.asarray(ratios, dtype=np.float64))
    return LognormalFit(
        count=logs.size,
        log_mean=float(logs.mean()),
        log_spread=float(logs.std(ddof=1)),
    )


def model_quantile(
    expected: float, spread: float, percent: float, *, degrees: int | None
) -> float:
    """Return what a linear model predicts that one case does not exceed.

    expected + q spread, with q of Student for the degrees of freedom that the
    residual spread was estimated on, or of the normal where they are not known.

    >>> round(model_quantile(0.0, 0.159, 80, degrees=None), 4)
    0.1338
    """
    p = percent / 100
    q = float(ndtri(p)) if degrees is None else float(stdtrit(degrees, p))
    return expected + q * spread
