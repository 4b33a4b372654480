"""From the figures of a range to the parameters of its shape.

Low and high are limits or two percentiles.  Where they are percentiles, the
parameters are solved so that the distribution function is exactly those percents
at low and high, with the likely value kept as the most likely one.
Formulas: ``docs/method.md``, section "Shapes".
"""

from __future__ import annotations

import math
from collections.abc import Callable

import numpy as np
from scipy.optimize import brentq
from scipy.special import betaincinv, ndtri

from contingency.errors import NoSuchCurve
from contingency.quantities.bounded import PEAKEDNESS, BetaPert, Triangular, Uniform
from contingency.quantities.unbounded import Lognormal, Normal

_LEAST_LOG_SPREAD = 1e-6
# A lognormal with a smaller spread of its logarithm is a normal to six digits.

_MOST_LOG_SPREAD = 4.0
# Its P90 is 28,000 times its P10, and its mean 3,000 times its median: no number of
# trials would settle a total with such a part, and soon after floats overflow.

_MIDPOINT_TOLERANCE = 1e-6
# A normal's likely value may miss the midpoint by this part of high - low.

_EPSILON = float(np.finfo(np.float64).eps)


def pert_from_percentiles(
    *, low: float, likely: float, high: float, low_percent: float, high_percent: float
) -> BetaPert:
    """Return the beta-PERT with these two percentiles and this likely value.

    With the likely value at the place f of its limits (0 to 1), the standard
    quantiles q1(f) and q2(f) at the two percents put it at (f - q1)/(q2 - q1) between
    low and high; f is solved from that, and the limits follow.

    Parameters
    ----------
    low, likely, high : float
        low <= likely <= high, low < high; any unit.
    low_percent, high_percent : float
        Percent not exceeded at low and at high; 50 between them or equal to one.

    Raises
    ------
    NoSuchCurve
        no-such-curve.  Both percents are on one side of 50, where more than one
        beta-PERT may fit or none.
    """
    if not low_percent <= 50 <= high_percent:
        raise NoSuchCurve(
            where="range",
            found=f"The ends P{low_percent:g} and P{high_percent:g} lie on one side of "
            "the median.",
            rule="Two such percentiles do not settle one PERT curve.",
            remedy="Give one end at or below P50 and one at or above it.",
        )
    first, second = low_percent / 100.0, high_percent / 100.0
    last = (100.0 - high_percent) / 100.0

    def quantiles(place: float) -> tuple[float, float]:
        alpha, beta = 1.0 + PEAKEDNESS * place, 1.0 + PEAKEDNESS * (1.0 - place)
        lower = float(betaincinv(alpha, beta, first))
        if second <= 0.5:
            return lower, float(betaincinv(alpha, beta, second))
        return lower, 1.0 - float(betaincinv(beta, alpha, last))

    def miss(place: float) -> float:
        lower, upper = quantiles(place)
        return (place - lower) * (high - likely) - (upper - place) * (likely - low)

    place = _root(miss, 0.0, 1.0)
    lower, upper = quantiles(place)
    width = (high - low) / (upper - lower)
    return BetaPert(
        low=likely - width * place, likely=likely, high=likely + width * (1.0 - place)
    )


def triangular_from_percentiles(
    *, low: float, likely: float, high: float, low_percent: float, high_percent: float
) -> Triangular:
    """Return the triangular with these two percentiles and this likely value.

    As for the beta-PERT, with q1 = sqrt(p1 f) and q2 = 1 - sqrt((1 - p2)(1 - f)).

    Parameters
    ----------
    low, likely, high : float
        low <= likely <= high, low < high; any unit.
    low_percent, high_percent : float
        Percent not exceeded at low and at high.
    """
    first, last = low_percent / 100.0, (100.0 - high_percent) / 100.0

    def quantiles(place: float) -> tuple[float, float]:
        return math.sqrt(first * place), 1.0 - math.sqrt(last * (1.0 - place))

    def miss(place: float) -> float:
        lower, upper = quantiles(place)
        return (place - lower) * (high - likely) - (upper - place) * (likely - low)

    # The chance at the likely value is f itself: it lies between the two percents.
    place = _root(miss, first, 1.0 - last)
    lower, upper = quantiles(place)
    width = (high - low) / (upper - lower)
    return Triangular(
        low=likely - width * place, likely=likely, high=likely + width * (1.0 - place)
    )


def uniform_from_percentiles(
    *, low: float, high: float, low_percent: float, high_percent: float
) -> Uniform:
    """Return the uniform with these two percentiles: the ends go on linearly.

    Parameters
    ----------
    low, high : float
        low < high; any unit.
    low_percent, high_percent : float
        Percent not exceeded at low and at high.
    """
    per_percent = (high - low) / (high_percent - low_percent)
    return Uniform(
        low=low - per_percent * low_percent,
        high=high + per_percent * (100.0 - high_percent),
    )


def normal_from_percentiles(
    *,
    low: float,
    likely: float | None,
    high: float,
    low_percent: float,
    high_percent: float,
) -> Normal:
    """Return the normal with these two percentiles.

    Parameters
    ----------
    low, high : float
        low < high; any unit.
    likely : float or None
        None, or the mean that follows from low and high.
    low_percent, high_percent : float
        Percent not exceeded at low and at high.

    Raises
    ------
    NoSuchCurve
        no-such-curve.  The likely value is not the mean that follows.
    """
    first, second = _scores(low_percent, high_percent)
    spread = (high - low) / (second - first)
    # Weights of the two ends, so that a symmetrical pair gives the midpoint exactly.
    centre = (second * low - first * high) / (second - first)
    if likely is not None and abs(likely - centre) > _MIDPOINT_TOLERANCE * (high - low):
        raise NoSuchCurve(
            where="range",
            found=f"likely {_figure(likely)} is not the middle of a normal with low "
            f"{_figure(low)} and high {_figure(high)}, which is {_figure(centre)}.",
            rule="A normal is symmetrical: its ends settle its most likely value.",
            remedy="Leave likely blank, or choose the shape pert or lognormal.",
        )
    return Normal(centre=centre, spread=spread)


def lognormal_from_percentiles(
    *,
    low: float,
    likely: float | None,
    high: float,
    low_percent: float,
    high_percent: float,
) -> Lognormal:
    """Return the lognormal with these two percentiles.

    Without a likely value the two-parameter lognormal, for low above 0; with one, the
    shifted lognormal whose mode is the likely value.

    Parameters
    ----------
    low, high : float
        low < high; any unit.
    likely : float or None
        low <= likely < high, or None.
    low_percent, high_percent : float
        Percent not exceeded at low and at high.

    Raises
    ------
    NoSuchCurve
        no-such-curve.  low is not above 0, or the spread of the logarithm is above 4
        (two parameters); the likely value is too far up for a curve that leans to the
        high side (three).
    """
    first, second = _scores(low_percent, high_percent)
    if likely is not None:
        return _shifted_lognormal(low, likely, high, first, second)
    if low <= 0.0:
        raise NoSuchCurve(
            where="range",
            found=f"low {_figure(low)} is not above 0.",
            rule="A lognormal without a likely value has positive values only.",
            remedy="Give a likely value (the curve is then shifted), or choose the "
            "shape normal or pert.",
        )
    log_spread = (math.log(high) - math.log(low)) / (second - first)
    if log_spread > _MOST_LOG_SPREAD:
        raise NoSuchCurve(
            where="range",
            found=f"low {_figure(low)} at P{low_percent:g} and high {_figure(high)} at "
            f"P{high_percent:g}: the logarithm would spread by {log_spread:.1f}.",
            rule="The logarithm of a lognormal spreads by at most "
            f"{_MOST_LOG_SPREAD:g} here; the mean of a wider one lies beyond any total "
            "that can be simulated.",
            remedy="Bring low and high closer together, give a likely value, or choose "
            "the shape pert.",
        )
    median = low * math.exp(-log_spread * first)
    return Lognormal(median=median, scale=median, log_spread=log_spread)


def _shifted_lognormal(
    low: float, likely: float, high: float, first: float, second: float
) -> Lognormal:
    """Return the lognormal with mode `likely`; `first`, `second`: scores of the ends.

    The mode lies at score -s, s the spread of the logarithm.  Its place between low
    and high falls from its limit at s = 0 to nothing at s = -first.
    """
    width = high - low

    def miss(s: float) -> float:
        lower, upper = math.expm1(s * first), math.expm1(s * second)
        mode = math.expm1(-s * s)
        return (mode - lower) * (high - likely) - (upper - mode) * (likely - low)

    least = max(_LEAST_LOG_SPREAD, -second)
    if -first <= least or miss(least) <= 0.0:
        limit = low + width * max(0.0, min(1.0, -first / (second - first)))
        raise NoSuchCurve(
            where="range",
            found=f"likely {_figure(likely)} with low {_figure(low)} and high "
            f"{_figure(high)}.",
            rule="A lognormal leans to the high side: with these ends its most likely "
            f"value lies below {_figure(limit)}.",
            remedy="Choose the shape pert or normal, or leave likely blank for the "
            "lognormal that low and high settle alone.",
        )
    s = _root(miss, least, -first)
    scale = width / (math.expm1(s * second) - math.expm1(s * first))
    return Lognormal(
        median=likely - scale * math.expm1(-s * s), scale=scale, log_spread=s
    )


def _root(miss: Callable[[float], float], first: float, last: float) -> float:
    """Return where `miss` is zero between `first` and `last`, to the last digits.

    Where the likely value is low or high itself, an end is the root, and `miss` is
    zero there exactly.
    """
    return float(brentq(miss, first, last, xtol=1e-16, rtol=4.0 * _EPSILON))


def _scores(low_percent: float, high_percent: float) -> tuple[float, float]:
    """Return the normal scores of two percents."""

    def score(percent: float) -> float:
        if percent <= 50:
            return float(ndtri(percent / 100.0))
        return -float(ndtri((100.0 - percent) / 100.0))

    return score(low_percent), score(high_percent)


def _figure(value: float) -> str:
    """Return a figure as it stands in a message."""
    return f"{value:,.10g}"
