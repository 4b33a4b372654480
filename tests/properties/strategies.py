"""The only home of strategies, named by our nouns."""

import datetime as dt

from hypothesis import strategies as st

from contingency.errors import NoSuchCurve
from contingency.estimate.changes import BASE_FAMILIES
from contingency.estimate.nouns import ContingencyRule, CostRange, PriceSeries, Run
from contingency.quantities.shapes import from_range
from tests.tracking import pairs

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


# --------------------------------------------------------------------------------------
# Revisions

ratios = st.sampled_from([0.0, 0.4, 0.9, 1.0, 1.1, 2.5, 9.0])
"""By how much a base moves."""
lows = st.sampled_from([0.7, 0.9])
highs = st.sampled_from([1.1, 1.3, 2.0])
base_families = st.sampled_from(["", *BASE_FAMILIES])


@st.composite
def package_edits(draw, before):
    """A package as a later revision may have it; None where it has gone."""
    if draw(st.integers(0, 7)) == 0:
        return None
    base = round(before.base * draw(ratios), 2)
    spent = round(base * draw(st.sampled_from([0.0, 0.0, 0.3, 1.0])), 2)
    new = pairs.package(before.id, base, draw(lows), draw(highs), spent=spent or None)
    if draw(st.booleans()):
        # The same range, written in money.
        new = new.model_copy(
            update={"cost": new.cost.model_copy(update={"written": ("",) * 4})}
        )
    if draw(st.booleans()):
        new = new.model_copy(update={"loads": (pairs.load("crew", 0.5),)})
    return new


@st.composite
def event_edits(draw, before):
    """An event as a later revision may have it; None where it has gone."""
    status = draw(st.sampled_from(["open", "open", "open", "closed", "occurred"]))
    if draw(st.integers(0, 7)) == 0:
        return None
    return before.model_copy(
        update={
            "status": status,
            "probability": draw(st.sampled_from([0.0, 0.05, 0.3, 0.5])),
            "kind": draw(st.sampled_from(["threat", "opportunity"])),
            "use": draw(st.sampled_from(["before", "after"])),
            "after_probability": 0.1,
            "after_impact": before.impact,
        }
    )


@st.composite
def tied_events(draw, events):
    """Events of which some require or exclude one another, as the reader allows."""
    rows = {event.id: event for event in events}
    first, last = rows.get("E1"), rows.get("E8")
    tie = draw(st.sampled_from(["", "requires", "excludes"]))
    if first is None or last is None or not tie:
        return events
    if tie == "excludes" and "occurred" not in {first.status, last.status}:
        rows["E1"] = first.model_copy(update={"excludes": ("E8",)})
        rows["E8"] = last.model_copy(update={"excludes": ("E1",)})
    elif tie == "requires" and not (first.status == "closed" and last.is_open):
        rows["E8"] = last.model_copy(update={"requires": "E1"})
    return tuple(rows.values())


@st.composite
def revisions(draw):
    """An estimate with anything moved, and lines of changes.csv for some of it."""
    edited = [draw(package_edits(p)) or p for p in pairs.PACKAGES[:1]]
    edited += [draw(package_edits(p)) for p in pairs.PACKAGES[1:]]
    packages = [p for p in edited if p is not None]
    packages.append(pairs.package("P9", 250.0))
    events = [draw(event_edits(e)) for e in (*pairs.EVENTS, pairs.event("E8", 0.2))]
    ids = tuple(p.id for p in packages)
    lines = [
        pairs.change(id=i, family=draw(base_families), line=n, amount=amount)
        for n, i in enumerate((*ids, "P2"), start=2)
        if (amount := draw(st.sampled_from([None, None, 12.5, -80.0]))) or n < 4
    ]
    return pairs.estimate(
        revision="B",
        packages=tuple(packages),
        events=draw(tied_events(tuple(e for e in events if e is not None))),
        systemic=draw(st.sampled_from([(), (pairs.systemic(high=0.2, packages=ids),)])),
        causes=(pairs.cause("crew"),),
        general_dependence=draw(st.sampled_from([None, 0.0, 0.3, 0.6])),
        contingency=ContingencyRule(target=draw(st.sampled_from([50, 80, 95]))),
        price_date=draw(st.sampled_from([pairs.DAY, pairs.DAY.replace(year=2028)])),
        run=Run(seed=draw(st.integers(0, 3)), tolerance=0.5, least=8192, most=8192),
        changes=(
            *lines,
            pairs.change(file="estimate", family="prices", factor=1.04, line=99),
        ),
    )


# --------------------------------------------------------------------------------------
# Money by year

days = st.dates(dt.date(2024, 1, 1), dt.date(2036, 12, 31))


@st.composite
def windows(draw, start, finish):
    """A window, two dates by the names of their fields; half of one, or none."""
    first, last = sorted((draw(days), draw(days)))
    given = draw(st.sampled_from(["both", "both", "both", "start", "finish", "none"]))
    return {
        start: first if given in {"both", "start"} else None,
        finish: last if given in {"both", "finish"} else None,
    }


@st.composite
def spent_by_year(draw, estimate):
    """An estimate with windows, profiles, prices and money spent anyhow."""
    packages = []
    for package in estimate.packages:
        changes = draw(windows("start", "finish")) | {
            "spend": draw(st.sampled_from([None, "even", "early", "late", "bell"])),
            "prices": draw(st.sampled_from(["", "a", "b"])),
            "spent": draw(st.sampled_from([None, 0.0, 30.0, 100.0, 140.0])),
        }
        packages.append(package.model_copy(update=changes))
    events = tuple(
        event.model_copy(update=draw(windows("window_start", "window_finish")))
        for event in estimate.events
    )
    return estimate.model_copy(
        update={
            "packages": tuple(packages),
            "events": events,
            "financial_year_starts": draw(st.sampled_from([None, 1, 4, 7, 12])),
            "price_series": tuple(
                PriceSeries(
                    id=name,
                    name=name,
                    rate=CostRange(
                        shape="uniform",
                        low=draw(st.sampled_from([-0.3, -0.02, 0.0, 0.03])),
                        high=draw(st.sampled_from([0.03, 0.1, 0.4])),
                    ),
                    line=2,
                )
                for name in ("a", "b")
            ),
        }
    )
