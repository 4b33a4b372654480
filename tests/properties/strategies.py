"""The only home of strategies, named by our nouns."""

from hypothesis import strategies as st

from contingency.errors import NoSuchCurve
from contingency.quantities.shapes import from_range

scales = st.sampled_from([1e-6, 0.01, 1.0, 37.0, 1e5, 2.5e9])
"""Units of money or fractions."""

places = st.floats(-3.0, 3.0)
"""Where a range begins, in units of its width."""

low_percents = st.integers(1, 45)
high_percents = st.integers(55, 99)

scores = st.floats(-8.5, 8.5)
"""Standard normal scores, as far out as any draw."""

money = st.floats(-1e9, 1e9).map(lambda x: round(x, 2))
"""An amount of either sign, to the cent."""

parts = st.lists(money, min_size=1, max_size=40)
"""Parts of one total."""

steps = st.sampled_from([0.01, 1.0, 5.0, 1_000.0, 250_000.0])
"""What amounts are rounded to."""


@st.composite
def three_points(draw):
    """Low <= likely <= high with low < high, away from the last digits."""
    scale, low = draw(scales), draw(places)
    width = draw(st.floats(0.01, 3.0))
    likely = draw(st.one_of(st.sampled_from([0.0, 1.0]), st.floats(0.0, 1.0)))
    high = low + width
    return scale * low, scale * min(low + likely * width, high), scale * high


@st.composite
def percentile_ends(draw):
    """What low and high mean: nothing for limits, or two percents."""
    if draw(st.booleans()):
        return {}
    return {
        "low_percent": draw(low_percents),
        "high_percent": draw(high_percents),
    }


@st.composite
def ranges(draw):
    """Name and figures of a range with low and high, as `from_range` takes them."""
    shape = draw(
        st.sampled_from(["pert", "triangular", "uniform", "normal", "lognormal"])
    )
    low, likely, high = draw(three_points())
    ends = draw(percentile_ends())
    if shape in {"normal", "lognormal"} and not ends:
        ends = {"low_percent": 10, "high_percent": 90}
    figures = {"low": low, "high": high} | ends
    if shape in {"pert", "triangular"} or (
        shape == "lognormal" and draw(st.booleans())
    ):
        figures["likely"] = likely
    return shape, figures


@st.composite
def outcomes(draw):
    """(value, probability) pairs that add up to 1."""
    weights = draw(st.lists(st.integers(1, 1000), min_size=1, max_size=8))
    values = draw(
        st.lists(money, min_size=len(weights), max_size=len(weights), unique=True)
    )
    return [(v, w / sum(weights)) for v, w in zip(values, weights, strict=True)]


@st.composite
def curve_points(draw):
    """(percent, value) pairs of a rising curve, some of its pieces level."""
    percents = sorted(
        draw(st.lists(st.integers(1, 99), min_size=2, max_size=7, unique=True))
    )
    rises = draw(
        st.lists(
            st.one_of(st.just(0.0), st.floats(0.01, 5.0)),
            min_size=len(percents),
            max_size=len(percents),
        )
    )
    scale, value = draw(scales), draw(places)
    pairs = []
    for percent, rise in zip(percents, rises, strict=True):
        value += rise
        pairs.append((percent, scale * value))
    return pairs


@st.composite
def shapes(draw):
    """A shape of any kind; ranges that no curve fits are left out by themselves."""
    kind = draw(st.sampled_from(["range", "range", "discrete", "points"]))
    if kind == "discrete":
        return from_range("discrete", outcomes=draw(outcomes()))
    if kind == "points":
        return from_range("points", outcomes=draw(curve_points()))
    name, figures = draw(ranges())
    try:
        return from_range(name, **figures)
    except NoSuchCurve:
        # A lognormal that leans the wrong way: the beta-PERT takes any such range.
        low, high = figures["low"], figures["high"]
        return from_range("pert", low=low, likely=figures.get("likely", low), high=high)


@st.composite
def wished_correlations(draw):
    """A symmetric matrix with unit diagonal, possible or not."""
    size = draw(st.integers(2, 6))
    matrix = [[1.0] * size for _ in range(size)]
    for i in range(size):
        for j in range(i):
            matrix[i][j] = matrix[j][i] = draw(st.integers(-100, 100)) / 100
    return matrix
