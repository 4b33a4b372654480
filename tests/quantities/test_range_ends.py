"""From the figures of a range to its shape: what fits, and what no curve fits."""

import numpy as np
import pytest
from scipy.special import betaincinv, ndtri

from contingency.errors import AnalysisError, NoSuchCurve
from contingency.quantities.shapes import (
    BetaPert,
    Discrete,
    Fixed,
    Lognormal,
    Normal,
    Points,
    Triangular,
    Uniform,
    from_range,
)

LOWS = [1, 5, 10, 33, 45]
HIGHS = [55, 67, 90, 95, 99]
PLACES = [0.0, 1e-9, 0.02, 0.3, 0.5, 0.9, 1.0 - 1e-9, 1.0]
"""Where the likely value lies between low (0) and high (1)."""


@pytest.mark.parametrize("shape", ["pert", "triangular"])
@pytest.mark.parametrize("low_percent", LOWS)
@pytest.mark.parametrize("high_percent", HIGHS)
@pytest.mark.parametrize("place", PLACES)
def test_percentile_ends_are_met_and_the_mode_kept(
    shape, low_percent, high_percent, place
):
    """F(low) and F(high) are the percents; the likely value is the one given."""
    low, high = 80.0, 140.0
    likely = low + place * (high - low)

    found = from_range(
        shape,
        low=low,
        likely=likely,
        high=high,
        low_percent=low_percent,
        high_percent=high_percent,
    )

    assert found.likely == likely
    assert found.low <= likely <= found.high
    assert found.cdf([low, high]) == pytest.approx(
        [low_percent / 100, high_percent / 100], abs=1e-13
    )


@pytest.mark.parametrize("percent", range(1, 50))
@pytest.mark.parametrize("shape", ["pert", "triangular"])
def test_the_mode_may_be_low_or_high_itself_at_every_percent(shape, percent):
    """The root lies at the very end of its bracket; rounding must not lose it."""
    ends = {"low_percent": percent, "high_percent": 100 - percent}
    for likely in (3.0, 7.0):
        found = from_range(shape, low=3, likely=likely, high=7, **ends)

        assert found.cdf([3.0, 7.0]) == pytest.approx(
            [percent / 100, 1.0 - percent / 100], abs=1e-13
        )


@pytest.mark.parametrize("shape", ["pert", "triangular", "lognormal"])
@pytest.mark.parametrize("scale", [1e-7, 1.0, 1e12])
@pytest.mark.parametrize("shift", [0.0, -3.0])
def test_percentile_ends_do_not_depend_on_the_unit(shape, scale, shift):
    """Another unit or another zero gives the same curve there."""
    ends = {"low_percent": 15, "high_percent": 85}
    plain = from_range(shape, low=1.0, likely=1.3, high=2.0, **ends)
    moved = from_range(
        shape,
        low=scale * (1.0 + shift),
        likely=scale * (1.3 + shift),
        high=scale * (2.0 + shift),
        **ends,
    )
    scores = np.linspace(-8.0, 8.0, 33)

    np.testing.assert_allclose(
        moved.at_score(scores) / scale - shift,
        plain.at_score(scores),
        rtol=1e-11,
        atol=1e-11,
    )


@pytest.mark.parametrize(("low_percent", "high_percent"), [(10, 90), (5, 60), (30, 99)])
def test_uniform_ends_go_on_in_a_straight_line(low_percent, high_percent):
    """Each further percent is as wide as the percents between low and high."""
    found = from_range(
        "uniform",
        low=20.0,
        high=50.0,
        low_percent=low_percent,
        high_percent=high_percent,
    )

    assert found.cdf([20.0, 50.0]) == pytest.approx(
        [low_percent / 100, high_percent / 100], abs=1e-15
    )


@pytest.mark.parametrize(("low_percent", "high_percent"), [(10, 90), (5, 60), (30, 99)])
def test_normal_and_lognormal_meet_two_percentiles(low_percent, high_percent):
    """Both from two percentiles alone."""
    for shape, kind in (("normal", Normal), ("lognormal", Lognormal)):
        found = from_range(
            shape,
            low=20.0,
            high=50.0,
            low_percent=low_percent,
            high_percent=high_percent,
        )

        assert isinstance(found, kind)
        assert found.cdf([20.0, 50.0]) == pytest.approx(
            [low_percent / 100, high_percent / 100], abs=1e-14
        )
        assert shape == "normal" or found.shift == 0.0


@pytest.mark.parametrize(("low_percent", "high_percent"), [(10, 90), (1, 75), (45, 99)])
@pytest.mark.parametrize("part", [0.0, 1e-6, 0.2, 0.8, 0.999])
def test_the_shifted_lognormal_has_its_mode_at_likely(low_percent, high_percent, part):
    """Two percentiles and the mode, from low up to the furthest mode that is left."""
    low, high = -0.05, 0.4
    limit = furthest_mode(low, high, low_percent, high_percent)
    likely = low + part * (limit - low)

    found = from_range(
        "lognormal",
        low=low,
        likely=likely,
        high=high,
        low_percent=low_percent,
        high_percent=high_percent,
    )

    assert found.mode == pytest.approx(likely, abs=1e-13)
    assert found.cdf([low, high]) == pytest.approx(
        [low_percent / 100, high_percent / 100], abs=1e-11
    )


def furthest_mode(low, high, low_percent, high_percent):
    """Mode of the normal with these two percentiles."""
    normal = from_range(
        "normal", low=low, high=high, low_percent=low_percent, high_percent=high_percent
    )
    return normal.centre


def test_a_lognormal_close_to_a_normal_loses_no_digits():
    """A mode just below the middle: a huge shift, and still the percentiles asked."""
    found = from_range(
        "lognormal", low=1, likely=4.4999, high=8, low_percent=10, high_percent=90
    )

    assert found.shift < -1e4
    assert found.cdf([1.0, 8.0]) == pytest.approx([0.1, 0.9], abs=1e-12)


def test_limits_are_taken_as_they_are():
    """Without percents low and high are the absolute limits."""
    assert from_range("pert", low=1, likely=2, high=4) == BetaPert(
        low=1.0, likely=2.0, high=4.0
    )
    assert from_range("triangular", low=1, likely=2, high=4) == Triangular(
        low=1.0, likely=2.0, high=4.0
    )
    assert from_range("uniform", low=1, high=4) == Uniform(low=1.0, high=4.0)


@pytest.mark.parametrize(
    "shape", ["pert", "triangular", "uniform", "normal", "lognormal", "fixed"]
)
@pytest.mark.parametrize("ends", [{}, {"low_percent": 10, "high_percent": 90}])
def test_equal_figures_are_one_value(shape, ends):
    """Low = likely = high is a range without spread, whatever its name and ends."""
    assert from_range(shape, low=7, likely=7, high=7, **ends) == Fixed(value=7.0)


def test_a_list_is_put_in_order():
    """Outcomes and points may stand in any order; equal outcomes are one."""
    assert from_range(
        "discrete", outcomes=[(130, 0.2), (95, 0.3), (100, 0.25), (100, 0.25)]
    ) == Discrete(values=(95.0, 100.0, 130.0), probabilities=(0.3, 0.5, 0.2))
    assert from_range("points", outcomes=[(95, 140), (5, 92), (50, 104)]) == Points(
        percents=(5.0, 50.0, 95.0), values=(92.0, 104.0, 140.0)
    )
    assert from_range("discrete", outcomes=[(3, 0.4), (3, 0.6)]) == Fixed(value=3.0)
    assert from_range("points", outcomes=[(10, 3), (90, 3)]) == Fixed(value=3.0)


RANGE = {"low": 1.0, "likely": 2.0, "high": 4.0}
ENDS = {"low_percent": 10, "high_percent": 90}

NO_CURVE = {
    "low above likely": ("pert", RANGE | {"low": 3.0}, "must not fall"),
    "likely above high": ("triangular", RANGE | {"likely": 5.0}, "must not fall"),
    "low above high": ("uniform", {"low": 2.0, "high": 1.0}, "must not fall"),
    "equal ends, another likely": (
        "pert",
        {"low": 1.0, "likely": 2.0, "high": 1.0},
        "must not fall",
    ),
    "no likely": ("pert", {"low": 1.0, "high": 2.0}, "needs one"),
    "no low": ("triangular", {"likely": 1.0, "high": 2.0}, "needs one"),
    "no high": ("normal", {"low": 1.0} | ENDS, "needs one"),
    "fixed without a value": ("fixed", {}, "needs one"),
    "not a number": ("pert", RANGE | {"likely": float("nan")}, "ordinary number"),
    "infinite": ("pert", RANGE | {"high": float("inf")}, "ordinary number"),
    "too wide": ("uniform", {"low": -1e308, "high": 1e308}, "ordinary number"),
    "normal with limits": ("normal", {"low": 1.0, "high": 2.0}, "no limit on"),
    "lognormal with limits": ("lognormal", {"low": 1.0, "high": 2.0}, "no limit on"),
    "uniform with likely": ("uniform", RANGE, "more likely than another"),
    "normal off its middle": ("normal", RANGE | ENDS, "is symmetrical"),
    "lognormal from nought": (
        "lognormal",
        {"low": 0.0, "high": 2.0} | ENDS,
        "positive values only",
    ),
    "lognormal over all bounds": (
        "lognormal",
        {"low": 1e-9, "high": 2.0, "low_percent": 45, "high_percent": 55},
        "spreads by at most 4",
    ),
    "lognormal leaning to the low side": (
        "lognormal",
        {"low": 1.0, "likely": 3.0, "high": 4.0} | ENDS,
        "value lies below 2.5",
    ),
    "lognormal in the middle": (
        "lognormal",
        {"low": 1.0, "likely": 2.5, "high": 4.0} | ENDS,
        "value lies below 2.5",
    ),
    "lognormal, both ends above the median": (
        "lognormal",
        RANGE | {"low_percent": 60, "high_percent": 90},
        "value lies below 1",
    ),
    "pert, both ends below the median": (
        "pert",
        RANGE | {"low_percent": 1, "high_percent": 10},
        "do not settle one PERT curve",
    ),
    "ends the wrong way round": (
        "pert",
        RANGE | {"low_percent": 90, "high_percent": 10},
        "below the percent at high",
    ),
    "ends at nought": (
        "pert",
        RANGE | {"low_percent": 0, "high_percent": 90},
        "both between 0 and 100",
    ),
    "chances short of one": (
        "discrete",
        {"outcomes": [(1, 0.3), (2, 0.6)]},
        "add up to 1",
    ),
    "a chance of nought": (
        "discrete",
        {"outcomes": [(1, 0.0), (2, 1.0)]},
        "above 0 and at most 1",
    ),
    "a negative chance": (
        "discrete",
        {"outcomes": [(1, -0.1), (2, 1.1)]},
        "above 0 and at most 1",
    ),
    "an infinite outcome": (
        "discrete",
        {"outcomes": [(float("inf"), 1.0)]},
        "ordinary number",
    ),
    "no outcomes": ("discrete", {}, "add up to 1"),
    "one point": ("points", {"outcomes": [(50, 1)]}, "at least two"),
    "a falling curve": ("points", {"outcomes": [(10, 5), (90, 4)]}, "at least as high"),
    "one percent twice": (
        "points",
        {"outcomes": [(10, 4), (10, 5)]},
        "and only one",
    ),
    "a point at P100": (
        "points",
        {"outcomes": [(50, 4), (100, 5)]},
        "between P00 and P100",
    ),
}


@pytest.mark.parametrize(
    ("shape", "figures", "rule"), NO_CURVE.values(), ids=NO_CURVE.keys()
)
def test_figures_without_a_curve_are_refused(shape, figures, rule):
    """The refusal says what was found, the rule and a way out, each as a sentence."""
    with pytest.raises(NoSuchCurve) as raised:
        from_range(shape, **figures)

    error = raised.value
    assert isinstance(error, AnalysisError)
    assert error.slug == "no-such-curve"
    assert rule in error.rule
    for part in (error.found, error.rule, error.remedy):
        assert part.endswith(".")


def test_a_name_that_is_no_shape_is_a_mistake_of_the_caller():
    """The reading room knows the names; anything else is no question of curves."""
    with pytest.raises(ValueError, match="unknown shape 'gamma'"):
        from_range("gamma", low=1, likely=2, high=3)


@pytest.mark.parametrize(("low_percent", "high_percent"), [(50, 90), (10, 50)])
def test_the_median_itself_may_be_an_end(low_percent, high_percent):
    """P50 as an end of a PERT still settles one curve."""
    found = from_range(
        "pert",
        low=1.0,
        likely=2.0,
        high=4.0,
        low_percent=low_percent,
        high_percent=high_percent,
    )

    assert found.cdf([1.0, 4.0]) == pytest.approx(
        [low_percent / 100, high_percent / 100], abs=1e-13
    )


def test_one_pert_fits_any_two_percents_around_the_median():
    """The place of the mode between low and high rises with its place in the limits.

    At every pair of whole percents with 50 between them, so the root is the only one.
    """
    near = np.geomspace(1e-6, 0.05, 12)
    modes = np.concatenate([[0.0], near, np.linspace(0.06, 0.94, 45), 1 - near[::-1]])
    modes = np.append(modes, 1.0)
    at = {
        percent: betaincinv(1 + 4 * modes, 5 - 4 * modes, percent / 100)
        for percent in range(1, 100)
    }
    for low in range(1, 51):
        for high in range(max(50, low + 1), 100):
            place = (modes - at[low]) / (at[high] - at[low])

            assert np.all(np.diff(place) > 0.0)


def test_one_lognormal_fits_two_percents_and_a_mode():
    """The place of the mode between low and high falls as the spread grows."""
    for low in range(1, 50):
        for high in range(low + 1, 100):
            first, second = ndtri(low / 100), ndtri(high / 100)
            spread = np.linspace(max(0.0, -second) + 1e-6, -first, 200)
            lower, upper = np.expm1(spread * first), np.expm1(spread * second)
            place = (np.expm1(-(spread**2)) - lower) / (upper - lower)

            assert np.all(np.diff(place) < 0.0)
