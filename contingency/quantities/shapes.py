"""Cost distributions, each given by its quantile function.

Every shape offers the same things: `mean`, `variance`, `support`, `breaks`, `cdf`,
`quantile`, `at_score` (the quantile at a standard normal score) and `standard_form`.
Formulas and sources are in ``docs/method.md``, section "Shapes".  This module is the
door to all of them; the classes live in `bounded`, `unbounded` and `listed`.
"""

from __future__ import annotations

import math
from collections.abc import Callable, Sequence
from itertools import pairwise

from contingency.errors import NoSuchCurve
from contingency.quantities import range_ends
from contingency.quantities.bounded import BetaPert, Triangular, Uniform
from contingency.quantities.listed import Discrete, Fixed, Points
from contingency.quantities.shape_contract import Array, Shape, StandardKey
from contingency.quantities.unbounded import Lognormal, Normal

__all__ = [
    "Array",
    "BetaPert",
    "Discrete",
    "Fixed",
    "Lognormal",
    "Normal",
    "Points",
    "Shape",
    "StandardKey",
    "Triangular",
    "Uniform",
    "from_range",
    "standard_shape",
]

_SUM_TOLERANCE = 1e-9
# How far probabilities written in decimals may miss 1 by rounding.


def from_range(
    shape: str,
    *,
    low: float | None = None,
    likely: float | None = None,
    high: float | None = None,
    low_percent: float | None = None,
    high_percent: float | None = None,
    outcomes: Sequence[tuple[float, float]] = (),
) -> Shape:
    """Return the shape with this name and these figures.

    Equal figures, low = likely = high, give `Fixed` whatever the name.

    Parameters
    ----------
    shape : str
        pert, triangular, uniform, normal, lognormal, fixed, discrete or points.
    low, likely, high : float, optional
        The range, any unit.  fixed takes likely only; uniform low and high only;
        normal and lognormal may go without likely; pert and triangular need all.
    low_percent, high_percent : float, optional
        Percent not exceeded at low and at high; neither where they are limits.
    outcomes : sequence of pairs
        discrete: (value, probability); points: (percent not exceeded, value).
        Any order.

    Raises
    ------
    NoSuchCurve
        no-such-curve.  No curve of this shape has these figures.

    Examples
    --------
    >>> shape = from_range("triangular", low=1, likely=3, high=8,
    ...                    low_percent=10, high_percent=90)
    >>> round(shape.low, 3), round(shape.high, 3)
    (-1.33, 11.208)
    """
    if shape == "fixed":
        return Fixed(value=_needed(likely, "likely", shape))
    if shape == "discrete":
        return _discrete(outcomes)
    if shape == "points":
        return _points(outcomes)
    if shape not in _LIMITS and shape not in _PERCENTILES:
        msg = f"unknown shape {shape!r}"
        raise ValueError(msg)

    low, high = _needed(low, "low", shape), _needed(high, "high", shape)
    if shape in ("pert", "triangular"):
        likely = _needed(likely, "likely", shape)
    if shape == "uniform" and likely is not None and not low == likely == high:
        raise NoSuchCurve(
            where="range",
            found=f"likely {likely:,.10g} for the shape uniform.",
            rule="No value of a uniform is more likely than another.",
            remedy="Leave likely blank, or choose the shape pert or triangular.",
        )
    _check_order(low, likely, high)
    if low == high:
        return Fixed(value=low)

    if low_percent is None or high_percent is None:
        return _from_limits(shape, low, likely, high)
    _check_percents(low_percent, high_percent)
    given: dict[str, float | None] = {"low": low, "high": high}
    if shape != "uniform":
        given["likely"] = likely
    return _PERCENTILES[shape](
        **given, low_percent=low_percent, high_percent=high_percent
    )


def standard_shape(key: StandardKey) -> Shape:
    """Return the shape S that the key of a `standard_form` stands for.

    Parameters
    ----------
    key : tuple
        As `standard_form` returns it.

    Examples
    --------
    >>> key, location, scale = BetaPert(low=0, likely=25, high=100).standard_form()
    >>> standard_shape(key)
    BetaPert(low=0.0, likely=0.25, high=1.0)
    """
    match key:
        case ("pert", float(place)):
            return BetaPert(low=0.0, likely=place, high=1.0)
        case ("triangular", float(place)):
            return Triangular(low=0.0, likely=place, high=1.0)
        case ("uniform",):
            return Uniform(low=0.0, high=1.0)
        case _:
            msg = f"no standard shape has the key {key!r}"
            raise ValueError(msg)


_LIMITS = ("pert", "triangular", "uniform")

_PERCENTILES: dict[str, Callable[..., Shape]] = {
    "pert": range_ends.pert_from_percentiles,
    "triangular": range_ends.triangular_from_percentiles,
    "uniform": range_ends.uniform_from_percentiles,
    "normal": range_ends.normal_from_percentiles,
    "lognormal": range_ends.lognormal_from_percentiles,
}


def _from_limits(shape: str, low: float, likely: float | None, high: float) -> Shape:
    """Return a shape whose low and high are its absolute limits."""
    if shape == "pert" and likely is not None:
        return BetaPert(low=low, likely=likely, high=high)
    if shape == "triangular" and likely is not None:
        return Triangular(low=low, likely=likely, high=high)
    if shape == "uniform":
        return Uniform(low=low, high=high)
    raise NoSuchCurve(
        where="range",
        found=f"Limits as the ends of the shape {shape}.",
        rule=f"A {shape} has no limit on at least one side: its low and high are "
        "percentiles.",
        remedy="Say which percentiles they are, for instance ends P10-P90.",
    )


def _discrete(outcomes: Sequence[tuple[float, float]]) -> Shape:
    """Return the discrete shape of (value, probability) pairs."""
    for value, probability in outcomes:
        _check_finite(value, "An outcome")
        if not 0.0 < probability <= 1.0:
            raise NoSuchCurve(
                where="range",
                found=f"The outcome {value:,.10g} has the probability {probability:g}.",
                rule="Each outcome has a probability above 0 and at most 1.",
                remedy="Correct the probability, or leave the outcome out.",
            )
    together: dict[float, list[float]] = {}
    for value, probability in sorted(outcomes):
        together.setdefault(float(value), []).append(probability)
    total = math.fsum(probability for _, probability in outcomes)
    if abs(total - 1.0) > _SUM_TOLERANCE:
        raise NoSuchCurve(
            where="range",
            found=f"The probabilities of the outcomes add up to {total:.10g}.",
            rule="They add up to 1.",
            remedy="Correct them, or add the outcome that is missing.",
        )
    if len(together) == 1:
        return Fixed(value=next(iter(together)))
    return Discrete(
        values=tuple(together),
        probabilities=tuple(math.fsum(parts) for parts in together.values()),
    )


def _points(outcomes: Sequence[tuple[float, float]]) -> Shape:
    """Return the points shape of (percent, value) pairs."""
    ordered = sorted(outcomes)
    if len(ordered) < 2:
        raise NoSuchCurve(
            where="range",
            found=f"{len(ordered)} point{'' if len(ordered) == 1 else 's'} of a curve.",
            rule="A curve through points needs at least two of them.",
            remedy="Give more percentiles, or choose the shape fixed.",
        )
    for percent, value in ordered:
        _check_finite(value, f"The value at P{percent:g}")
        if not 0.0 < percent < 100.0:
            raise NoSuchCurve(
                where="range",
                found=f"A point at P{percent:g}.",
                rule="Points lie between P00 and P100, both left out.",
                remedy="Move the point inwards; the curve goes on beyond it.",
            )
    for (percent, value), (next_percent, next_value) in pairwise(ordered):
        if percent == next_percent or value > next_value:
            raise NoSuchCurve(
                where="range",
                found=f"P{percent:g} = {value:,.10g} is followed by "
                f"P{next_percent:g} = {next_value:,.10g}.",
                rule="A higher percentile has a value at least as high, and only one.",
                remedy="Correct the points.",
            )
    if ordered[0][1] == ordered[-1][1]:
        return Fixed(value=ordered[0][1])
    return Points(
        percents=tuple(float(percent) for percent, _ in ordered),
        values=tuple(float(value) for _, value in ordered),
    )


def _needed(value: float | None, name: str, shape: str) -> float:
    """Return a figure that this shape cannot go without."""
    if value is None:
        raise NoSuchCurve(
            where="range",
            found=f"No {name} value.",
            rule=f"The shape {shape} needs one.",
            remedy=f"Fill in {name}, or choose another shape.",
        )
    return float(value)


def _check_order(low: float, likely: float | None, high: float) -> None:
    """Raise unless low <= likely <= high, all finite."""
    for name, value in (("low", low), ("likely", likely), ("high", high)):
        if value is not None:
            _check_finite(value, name)
    _check_finite(high - low, "The distance from low to high")
    middle = low if likely is None else likely
    if not low <= middle <= high:
        raise NoSuchCurve(
            where="range",
            found=f"low {low:,.10g}"
            + ("" if likely is None else f", likely {likely:,.10g}")
            + f", high {high:,.10g}.",
            rule="A range must not fall: low <= likely <= high.",
            remedy="Put the figures in order.",
        )


def _check_finite(value: float, name: str) -> None:
    """Raise unless `value` is an ordinary number."""
    if not math.isfinite(value):
        raise NoSuchCurve(
            where="range",
            found=f"{name} is {value}.",
            rule="Every figure of a range is an ordinary number.",
            remedy="Correct the figure.",
        )


def _check_percents(low_percent: float, high_percent: float) -> None:
    """Raise unless the two percents can be ends of a range."""
    if not 0.0 < low_percent < high_percent < 100.0:
        raise NoSuchCurve(
            where="range",
            found=f"The ends P{low_percent:g} and P{high_percent:g}.",
            rule="The percent at low is below the percent at high, both between 0 "
            "and 100.",
            remedy="Correct the ends.",
        )
