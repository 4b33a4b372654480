"""Charts of the what-ifs, the fresh seeds and the outside view: nothing collides."""

import re

import numpy as np
import pytest

from contingency.report.chart_outside import OutsideCurve, Place, outside_chart
from contingency.report.chart_what_if import ChangeLine, seeds_chart, what_if_chart
from contingency.report.wording import chart_unit
from tests.report.test_charts import hold, keep_labels_clear

EFFECTS = {
    "both ways": (11.9, 5.7, 0.1, -0.5, -4.9, -11.7),
    "all up": (9.0, 4.0, 3.9, 0.2),
    "all down": (-0.1, -3.0, -8.0),
    "nothing": (0.0, 0.0),
    "one": (2.0,),
    "none": (),
    "huge rise": (4000.0, 5.7, 0.1, -4.9),
    "huge fall": (-90_000.0, 5.7, 0.1, -4.9),
    "two huge": (4000.0, -4100.0, 0.1),
    "alike": (1e-9, -1e-9, 0.0),
}


def drawn(effects, look, *, levels=(9.6, -6.7), issued=39.4, seeds=(39.0, 39.7)):
    """The chart of these effects, in millions."""

    def lines(of):
        return tuple(
            ChangeLine(
                name=f"Every range as if it were read otherwise {i} " * (1 + i % 3),
                effect=1e6 * effect,
                half_width=2e5 if i % 2 else 0.0,
                words=f"{effect:+,.1f}",
            )
            for i, effect in enumerate(of)
        )

    return what_if_chart(
        lines(effects),
        lines(levels),
        issued=1e6 * issued,
        issued_words=f"Issued {issued:,.1f}",
        seeds=(1e6 * seeds[0], 1e6 * seeds[1]),
        seeds_words="20 fresh seeds: 39.0 to 39.7",
        unit=chart_unit(1e6 * max(issued, 3.0), 1e5),
        axis_title="Contingency at P80, EUR million",
        look=look,
    )


def dots(drawing):
    """Where the dots lie, from the left, in the order of the rows."""
    return [
        float(x) for x in re.findall(r'<circle cx="([\d.]+)"', drawing.svg.decode())
    ]


@pytest.mark.parametrize("effects", EFFECTS)
@pytest.mark.parametrize("levels", [(9.6, -6.7), (0.0, 0.0)])
def test_what_ifs_hold_in_every_direction(effects, levels, look):
    """Up, down, nothing at all, and one change that dwarfs all others."""
    drawing = drawn(EFFECTS[effects], look, levels=levels)

    hold(drawing)
    keep_labels_clear(drawing)


@pytest.mark.parametrize("issued", [-12.0, 0.0, 4e6])
def test_what_ifs_hold_at_any_contingency(issued, look):
    """Below nought, at nought, and with figures as long as a word."""
    drawing = drawn(
        EFFECTS["both ways"], look, issued=issued, seeds=(issued - 0.1, issued)
    )

    hold(drawing)
    keep_labels_clear(drawing)


def test_what_ifs_run_from_the_dearest_to_the_cheapest(look):
    """Dots go from right to left, and levels start again."""
    places = dots(drawn(EFFECTS["both ways"], look))

    assert places[:6] == sorted(places[:6], reverse=True)
    assert places[6] > places[7]


def test_one_huge_change_leaves_the_others_to_be_told_apart(look):
    """Its stem is cut, and the smaller ones keep at least a third of the width."""
    plain = drawn(EFFECTS["both ways"], look)
    cut = drawn(EFFECTS["huge rise"], look)
    places = dots(cut)

    assert max(places) - min(places) > 100
    assert abs(places[1] - places[3]) > 60
    assert cut.svg.count(b'fill="#ffffff"') == 1
    assert plain.svg.count(b'fill="#ffffff"') == 0


SEEDS = {
    "usual": tuple(np.random.default_rng(1).normal(39.4e6, 2e5, 20)),
    "all alike": (39.4e6,) * 20,
    "far below": tuple(np.linspace(10e6, 11e6, 20)),
    "negative": tuple(np.linspace(-3e6, -2.9e6, 20)),
}


@pytest.mark.parametrize("seeds", SEEDS)
def test_fresh_seeds_hold_wherever_the_issued_one_lies(seeds, look):
    """One stroke for each of the twenty and a longer one for the issued number."""
    drawing = seeds_chart(
        SEEDS[seeds],
        issued=39.4e6,
        issued_words="Issued 39.4",
        unit=chart_unit(39e6, 1e5),
        axis_title="Contingency at P80, EUR million",
        look=look,
    )
    accent = f'stroke="{look.colours.accent}"'
    strokes = drawing.svg.decode().count(f'stroke="{look.colours.ink}"')

    hold(drawing)
    assert strokes == 20
    assert drawing.svg.decode().count(accent) == 1


CURVES = {
    "fit": tuple((p, 0.9 + 0.004 * p + 0.00001 * p * p) for p in range(2, 99)),
    "table": ((20, 1.02), (50, 1.15), (80, 1.32), (90, 1.4)),
    "two points": ((50, 1.1), (80, 1.3)),
    "no spread": ((10, 1.1), (50, 1.1), (90, 1.1)),
    "long": ((10, 0.2), (50, 1.4), (90, 9.8)),
}


@pytest.mark.parametrize("curve", CURVES)
@pytest.mark.parametrize(
    "ratios", [(1.0, 1.099, 1.178), (1.0, 1.0, 1.0), (1.0, 0.4, 3.0), (1.0, 1.35, 1.36)]
)
@pytest.mark.parametrize("given", [(), (0.96, 1.02, 1.02, 1.1, 1.3)])
@pytest.mark.parametrize(
    "spans",
    [
        ((12, 12), (48, 48), (78, 78)),
        ((0, 20), (50, 80), (90, 100)),
        ((99.9, 99.9),) * 3,
    ],
    ids=str,
)
def test_places_on_the_outside_curve_never_meet(curve, ratios, given, spans, look):
    """However near they lie, and beyond the ends of a table too."""
    places = tuple(
        Place(
            name=name,
            ratio=ratio,
            span=span,
            ratio_words=f"{100 * ratio:.0f} %",
            words="50 % to 80 % by the outside view",
            is_target=name.startswith("Request"),
        )
        for name, ratio, span in zip(
            ("Base", "P50", "Request (P80)"), ratios, spans, strict=True
        )
    )
    drawing = outside_chart(
        OutsideCurve(
            points=CURVES[curve],
            given=given,
            given_words="5 closed projects, one stroke each",
            are_points_given=curve != "fit",
        ),
        places,
        "Final cost, % of the base estimate",
        look,
    )

    hold(drawing)


def test_what_a_table_leaves_open_is_drawn_as_a_bar(look):
    """Between two percentiles a dot lies in it; beyond the ends there is no dot."""

    def draw(*spans):
        places = tuple(
            Place(
                name=f"Amount {i}",
                ratio=1.0 + 0.1 * i,
                span=span,
                ratio_words="",
                words="",
                is_target=False,
            )
            for i, span in enumerate(spans)
        )
        curve = OutsideCurve(
            points=((50, 1.05), (80, 1.15)),
            given=(),
            given_words="",
            are_points_given=False,
        )
        svg = outside_chart(curve, places, "Final cost", look).svg.decode()
        return svg.count("<rect"), svg.count("<circle")

    assert draw((0, 50), (50, 80), (80, 100)) == (3, 1)
    assert draw((12, 12), (48, 48), (78, 78)) == (0, 3)


def test_words_stand_beyond_the_noise(look):
    """The bar of the noise does not run under the figure at its end."""
    lines = tuple(
        ChangeLine(name="A", effect=effect, half_width=9e5, words="5.0")
        for effect in (5e6, -5e6)
    )
    drawing = what_if_chart(
        lines,
        (),
        issued=40e6,
        issued_words="Issued",
        seeds=(39e6, 41e6),
        seeds_words="Seeds",
        unit=chart_unit(40e6, 1e5),
        axis_title="Contingency",
        look=look,
    )
    bars = [
        (float(x), float(x) + float(width))
        for x, width in re.findall(
            rf'<rect x="([\d.]+)" y="[\d.]+" width="([\d.]+)" height="[\d.]+" '
            rf'fill="{look.colours.pale}"',
            drawing.svg.decode(),
        )
    ]
    right, left = (label for label in drawing.labels if label.words == "5.0")

    assert len(bars) == 2
    assert right.left > bars[0][1]
    assert left.right < bars[1][0]
    hold(drawing)
