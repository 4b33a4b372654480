"""What must hold of every shape, whatever the figures of its range."""

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from contingency.errors import NoSuchCurve
from contingency.quantities.hermite import coefficients
from contingency.quantities.shapes import from_range
from tests.properties.strategies import curve_points, ranges, scores, shapes

GRID = np.linspace(-8.5, 8.5, 69)


@given(shapes())
def test_the_quantile_rises_within_the_support(shape):
    """A higher score never gives less, and no value lies outside the support."""
    values = shape.at_score(GRID)
    low, high = shape.support
    width = float(values[-1] - values[0])

    # Rounding of a value may turn it back by its last digits.
    slack = 1e-13 * max(float(np.abs(values).max()), width)
    assert np.all(np.isfinite(values))
    assert np.all(np.diff(values) >= -slack)
    assert low - slack <= values[0]
    assert values[-1] <= high + slack


@given(shapes(), scores)
def test_the_chance_of_a_quantile_is_at_least_what_was_asked(shape, score):
    """F(Q at z) >= the chance of z, but for the last digits of Q."""
    from scipy.special import ndtr

    value = float(shape.at_score(score))
    digits = 1e-13 * max(abs(value), float(np.ptp(shape.at_score([-8.5, 8.5]))))

    assert float(shape.cdf(value + digits)) >= ndtr(score) * (1.0 - 1e-9)


@given(ranges())
def test_ends_are_what_they_are_said_to_be(given_range):
    """Limits are the support; percentiles are met; the likely value is the mode."""
    name, figures = given_range
    try:
        shape = from_range(name, **figures)
    except NoSuchCurve:
        # Only a lognormal may be impossible for a range that is in order: it leans
        # to the high side, its values are positive, and it has a widest spread.
        assert name == "lognormal"
        low, high = figures["low"], figures["high"]
        assert ("likely" in figures) or low <= 0.0 or high > 2.0 * low
        return

    if "low_percent" in figures:
        size = max(abs(figures["low"]), abs(figures["high"]))
        digits = 1e-13 * size / (figures["high"] - figures["low"]) + 1e-11
        assert shape.cdf([figures["low"], figures["high"]]) == pytest.approx(
            [figures["low_percent"] / 100, figures["high_percent"] / 100], abs=digits
        )
    else:
        assert shape.support == (figures["low"], figures["high"])


@given(ranges(), st.sampled_from([0.001, 12.0, 1e6]))
def test_another_unit_is_another_scale(given_range, factor):
    """Every figure times a factor: mean, deviation and curve times that factor."""
    name, figures = given_range
    scaled = {
        key: value * (1 if key.endswith("percent") else factor)
        for key, value in figures.items()
    }
    try:
        shape = from_range(name, **figures)
    except NoSuchCurve:
        with pytest.raises(NoSuchCurve):
            from_range(name, **scaled)
        return
    other = from_range(name, **scaled)

    width = float(np.ptp(shape.at_score([-4.0, 4.0])))
    size = 1e-9 * factor * max(width, abs(shape.mean))
    assert other.mean == pytest.approx(factor * shape.mean, abs=size)
    assert other.variance**0.5 == pytest.approx(factor * shape.variance**0.5, rel=1e-6)
    assert other.at_score(GRID) == pytest.approx(
        factor * shape.at_score(GRID), rel=1e-9, abs=size
    )


@given(shapes())
def test_the_mean_lies_within_and_the_spread_within_half_the_width(shape):
    """Mean inside the support; variance at most a quarter of the width squared."""
    low, high = shape.support
    slack = 1e-12 * max(abs(shape.mean), shape.variance**0.5)

    assert low - slack <= shape.mean <= high + slack
    assert shape.variance >= 0.0
    if np.isfinite(high - low):
        assert shape.variance <= (high - low) ** 2 / 4.0 * (1.0 + 1e-12)


@given(curve_points())
def test_points_are_met(points):
    """The curve goes through every point, also over level pieces."""
    shape = from_range("points", outcomes=points)
    height = points[-1][1] - points[0][1]
    for percent, value in points:
        found = float(shape.at_score(_score(percent)))

        assert found == pytest.approx(value, rel=1e-12, abs=1e-12 * height)


@given(shapes())
def test_no_series_explains_more_than_there_is(shape):
    """The squares of the Hermite coefficients add up to at most the variance."""
    explained = float(np.square(coefficients([shape])).sum())

    assert explained <= shape.variance * (1.0 + 1e-9)


def _score(percent):
    """Normal score of a percent."""
    from scipy.special import ndtri

    return ndtri(percent / 100.0)
