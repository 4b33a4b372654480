"""Charts: labels never meet, nothing leaves the picture, the same data same bytes.

The boxes of labels are computed from the widths of the letters in the fonts that the
PDF embeds, so what holds here holds on the page.
"""

import itertools
import re

import numpy as np
import pytest

from contingency.report.canvas import Canvas, spread
from contingency.report.chart_drivers import (
    EffectBar,
    SwingBar,
    effect_chart,
    swing_chart,
)
from contingency.report.chart_parts import (
    AllocationBar,
    Part,
    allocation_chart,
    composition_chart,
)
from contingency.report.chart_total import Mark, cumulative_chart, density_chart
from contingency.report.wording import chart_unit
from contingency.setting.curve import cumulative_curve, histogram


def hold(drawing):
    """Fail if labels overlap, or if a label or a stroke leaves the picture."""
    for one, other in itertools.combinations(drawing.labels, 2):
        assert not one.overlaps(other), f"{one.words!r} meets {other.words!r}"
    for label in drawing.labels:
        assert label.left >= -0.1, label
        assert label.right <= drawing.width + 0.1, label
        assert label.top >= -0.1, label
        assert label.bottom <= drawing.height + 0.1, label
    text = drawing.svg.decode()
    for path in re.findall(r' d="([^"]+)"', text):
        numbers = np.array([float(n) for n in re.findall(r"-?\d+\.?\d*", path)])
        assert np.all(numbers[0::2] >= -0.5)
        assert np.all(numbers[0::2] <= drawing.width + 0.5)
        assert np.all(numbers[1::2] >= -0.5)
        assert np.all(numbers[1::2] <= drawing.height + 0.5)
    for width in re.findall(r'<rect[^>]* width="([^"]+)"', text):
        assert float(width) >= 0.0
    assert "nan" not in text
    assert "inf" not in text


def keep_labels_clear(drawing):
    """Fail if an upright line runs through a label."""
    paths = re.findall(
        r' d="M([\d.]+) ([\d.]+) L([\d.]+) ([\d.]+)"', drawing.svg.decode()
    )
    for x1, y1, x2, y2 in [tuple(map(float, path)) for path in paths]:
        for label in drawing.labels:
            upright = x1 == x2 and label.left + 0.5 < x1 < label.right - 0.5
            low, high = min(y1, y2), max(y1, y2)
            crosses = upright and low < label.bottom - 1 and high > label.top + 1
            assert not crosses, f"a line runs through {label.words!r}"


TOTALS = {
    "bell": np.random.default_rng(1).normal(100e6, 12e6, 4096),
    "long tail": np.random.default_rng(2).lognormal(17.0, 1.6, 4096),
    "two lumps": np.repeat([50e6, 90e6], 2048),
    "no spread": np.full(4096, 2.15e6),
    "negative": np.random.default_rng(3).normal(-4e6, 1e6, 4096),
    "tiny": np.random.default_rng(4).normal(3.0, 0.2, 4096),
    "few trials": np.array([1e6, 2e6, 5e6]),
}
LEVELS = {
    "usual": (50, 80, 90),
    "crowded": (94, 95, 96, 97, 98, 99),
    "low": (1, 2, 5, 10),
    "many": tuple(range(5, 100, 5)),
    "none": (),
}


def marks_of(total, percents, base):
    """Marks as the report makes them, the last level being the target."""
    ordered = np.sort(total)

    def chance(amount):
        return float(np.mean(total <= amount))

    found = [
        Mark(name="Base", words="enough with 1.3 %", amount=base, chance=chance(base)),
        Mark(
            name="Mean",
            words="average of all outcomes, which is a long thing to say",
            amount=float(total.mean()),
            chance=chance(total.mean()),
        ),
    ]
    found += [
        Mark(
            name=f"P{p:02d}",
            words="Approved funding, Investment committee of the whole organisation",
            amount=float(ordered[-(-total.size * p // 100) - 1]),
            chance=p / 100,
            is_target=p == percents[-1],
        )
        for p in percents
    ]
    return tuple(sorted(found, key=lambda mark: mark.amount))


@pytest.mark.parametrize("levels", LEVELS)
@pytest.mark.parametrize("total", TOTALS)
@pytest.mark.parametrize("base_at", [-1.0, 0.0, 3.0])
def test_labels_of_the_total_never_meet(total, levels, base_at, look):
    """Whatever the shape, however crowded the levels, wherever the base lies."""
    values = TOTALS[total]
    base = float(values.mean() + base_at * max(values.std(), abs(values.mean()) / 9))
    marks = marks_of(values, LEVELS[levels], base)
    unit = chart_unit(float(np.abs(values).max()), 1.0)
    about = {"unit": unit, "axis_title": "Total cost, EUR million", "look": look}

    hold(cumulative_chart(cumulative_curve(values), marks, **about))
    density = density_chart(
        histogram(values),
        marks,
        tuple(np.quantile(values, [0.1, 0.9])),
        middle_words="P10 to P90: 70.1 to 86.7, eight outcomes in ten",
        **about,
    )
    hold(density)
    keep_labels_clear(density)


PARTS = {
    "usual": (7.1, 8.5, 2.4),
    "saving": (7.1, 8.5, -2.4),
    "all below": (-4.0, -0.5, -0.1),
    "nothing": (0.0, 0.0, 0.0),
    "closes at nought": (5.0, -3.0, -2.0),
    "back and forth": (9.0, -14.0, 6.0),
}


@pytest.mark.parametrize("parts", PARTS)
@pytest.mark.parametrize("base", [65.4, 0.0, 1.0])
def test_the_way_from_base_to_request_holds_for_every_sign(parts, base, look):
    """Also for a contingency below nought and for a base of nought."""
    amounts = PARTS[parts]
    contingency = sum(amounts)

    def part(name, amount):
        return Part(name=name, amount=amount * 1e6, words=f"EUR {amount:,.1f} million")

    hold(
        composition_chart(
            part("Base", base),
            tuple(
                part(name, amount)
                for name, amount in zip(
                    ("Estimate ranges", "Systemic risks", "Risk events"),
                    amounts,
                    strict=True,
                )
            ),
            part("Contingency", contingency),
            part("Request", base + contingency),
            look,
        )
    )


def allocation_bar(name, expected, margin, *, is_group=False):
    """One line with its amounts in thousands."""
    return AllocationBar(
        name=name,
        expected=expected,
        margin=margin,
        contingency=expected + margin,
        words=f"{expected + margin:,.0f}",
        is_group=is_group,
    )


@pytest.mark.parametrize(
    "amounts",
    [
        [(4342, 1880), (3000, 700)],
        [(-700, 2000), (300, 100)],
        [(700, -2000), (300, 100)],
        [(-700, -20), (-300, -100)],
        [(0, 0), (0, 0)],
        [(1, 0), (0, 1)],
        [(10_000_000_000, 1), (1, 1)],
    ],
)
def test_the_allocation_is_drawn_with_either_sign(amounts, look):
    """Parts that run against each other, nothing at all, and one that dwarfs all."""
    bars = tuple(
        allocation_bar(f"P{i} " + "A long name of a package " * i, *pair)
        for i, pair in enumerate(amounts)
    )

    hold(allocation_chart(bars, look))


def test_a_margin_ends_at_the_contingency(look):
    """The accent bar of a line reaches as far as its two amounts together."""
    drawing = allocation_chart((allocation_bar("A", 300, 100),), look)
    bars = re.findall(
        r'<rect x="([\d.]+)" y="[\d.]+" width="([\d.]+)"', drawing.svg.decode()
    )
    (zero, first), (middle, second) = [(float(x), float(w)) for x, w in bars]

    assert middle == pytest.approx(zero + first, abs=0.02)
    assert first == pytest.approx(3 * second, abs=0.05)


SWINGS = {
    "usual": ((70.0, 84.0), (76.0, 79.0)),
    "one side": ((78.0, 90.0), (78.1, 78.2)),
    "turned": ((84.0, 70.0), (79.0, 76.0)),
    "nothing": ((78.0, 78.0),),
    "negative": ((-9.0, -3.0), (-8.0, 88.0)),
}


@pytest.mark.parametrize("swings", SWINGS)
@pytest.mark.parametrize("causes", [0, 2])
def test_swings_hold_in_every_direction(swings, causes, look):
    """Also where low costs more than high, as for an opportunity."""
    bars = tuple(
        SwingBar(
            name=f"E{i}  " + "Launch and recovery cradle for vehicles " * 3,
            low=low,
            high=high,
            low_words=f"{low:,.1f}",
            high_words=f"{high:,.1f}",
        )
        for i, (low, high) in enumerate(SWINGS[swings])
    )

    hold(
        swing_chart(
            bars, bars[:causes], mean=78.0, mean_words="Mean total 78.0", look=look
        )
    )


@pytest.mark.parametrize(
    "effects", [(4019, 1766, 3), (-4019, 12), (-5, -4), (0, 0), (1e12, -1e12)]
)
@pytest.mark.parametrize("causes", [0, 1])
def test_effects_hold_with_either_sign(effects, causes, look):
    """An opportunity's effect is negative and runs to the left."""
    bars = tuple(
        EffectBar(name="R1  A name", effect=effect, words=f"{effect:,.0f}")
        for effect in effects
    )

    hold(effect_chart(bars, bars[:causes], look))


def test_charts_are_plain_for_any_reader(look):
    """No label is anchored elsewhere, nothing is transparent, nothing is dated."""
    values = TOTALS["bell"]
    drawing = cumulative_chart(
        cumulative_curve(values),
        marks_of(values, (50, 80), 90e6),
        unit=chart_unit(1e8, 1.0),
        axis_title="Total",
        look=look,
    )
    text = drawing.svg.decode()

    for word in ("text-anchor", "opacity", "<image", "url(", "id=", "date"):
        assert word not in text.lower()


def test_the_same_call_draws_the_same_bytes(look):
    """There is no clock and no chance in a chart."""

    def draw():
        canvas = Canvas(100, 50, look)
        canvas.text((10, 20), "P80 & <more>", align="middle")
        canvas.path([(0, 0), (10, 10)], look.colours.ink, dashed=True)
        return canvas.drawing().svg

    assert draw() == draw()
    assert b"P80 &amp; &lt;more&gt;" in draw()


@pytest.mark.parametrize("align", ["start", "middle", "end"])
def test_a_label_lies_where_its_alignment_says(align, look):
    """The box follows from the widths of the letters."""
    canvas = Canvas(200, 50, look)
    box = canvas.text((100, 20), "Contingency", size=10, align=align)
    width = look.letters.width("Contingency", 10)
    left = {"start": 100, "middle": 100 - width / 2, "end": 100 - width}[align]

    assert box.left == pytest.approx(left)
    assert box.right == pytest.approx(left + width)


def test_places_are_spread_in_order_and_within_their_ends():
    """At least the gap apart, as near as can be, in the order that was wanted."""
    wanted = [10.0, 10.0, 10.0, 90.0]
    places = spread(wanted, 12.0, 0.0, 100.0)
    ordered = sorted(places)

    assert ordered == pytest.approx([0.0, 12.0, 24.0, 90.0], abs=2.1)
    assert min(b - a for a, b in itertools.pairwise(ordered)) >= 12.0 - 1e-9


def test_a_name_that_is_too_long_is_cut_to_its_room(look):
    """With an ellipsis, and never wider than the room."""
    words = look.letters.fitted("A very long name of a package", 8.0, 60.0)

    assert words.endswith("…")
    assert look.letters.width(words, 8.0) <= 60.0
