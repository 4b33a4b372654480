"""Chart of the outside view: similar projects, and where this one stands."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass

import numpy as np

from contingency.report.axes import SMALL, Scale, money_axis, scale_over
from contingency.report.canvas import Canvas, Drawing, spread
from contingency.report.chart_total import WIDTH
from contingency.report.look import Look
from contingency.report.wording import SPACE, MoneyUnit

PERCENT = MoneyUnit(size=0.01, digits=0, word="")
"""Ratios along the axis are printed in percent."""
_Height = Callable[[float], float]

GAP = 24.0
"""Least distance of two labels, each of two lines, points."""


@dataclass(frozen=True, kw_only=True, slots=True)
class Place:
    """One amount of this project on the outside curve."""

    name: str
    ratio: float
    """Amount over base."""
    span: tuple[float, float]
    """Percent between which its chance lies; twice the same where it is known."""
    ratio_words: str
    words: str
    """The chance that it is enough, by the outside view."""
    is_target: bool

    @property
    def is_on_the_curve(self) -> bool:
        """Whether the amount lies between the ends of what is known."""
        low, high = self.span
        return low == high or (low > 0 and high < 100)

    def height(self, ratios: tuple[float, ...], percents: tuple[float, ...]) -> float:
        """Return the percent at which the amount is drawn on a curve."""
        low, high = self.span
        if low == high or not self.is_on_the_curve:
            return (low + high) / 2
        return float(np.interp(self.ratio, ratios, percents))


@dataclass(frozen=True, kw_only=True, slots=True)
class OutsideCurve:
    """The curve of similar projects, rising."""

    points: tuple[tuple[int, float], ...]
    """(whole percent not exceeding, final cost over base)."""
    given: tuple[float, ...]
    """Ratios of the closed projects behind it; empty with a published table."""
    given_words: str
    """What the strokes are, in words."""
    are_points_given: bool
    """Whether the points themselves were published, and deserve a dot each."""

    @property
    def percents(self) -> tuple[float, ...]:
        """Percents of the points."""
        return tuple(float(percent) for percent, _ in self.points)


def outside_chart(
    curve: OutsideCurve, places: tuple[Place, ...], axis_title: str, look: Look
) -> Drawing:
    """Draw the outside curve with this project's amounts on it.

    Labels stand in a column at the right, where there is always room.  Under the axis
    each closed project is one stroke.  Where a table only tells between which chances
    an amount lies, a bar spans them.
    """
    top, bottom, left, right = 22.0, 182.0, 30.0, 292.0
    strip = bottom + 40.0
    canvas = Canvas(WIDTH, strip + 4.0 if curve.given else bottom + 24.0, look)
    colours = canvas.colours
    ratios = [ratio for _, ratio in curve.points]
    across = scale_over(
        (*ratios, *curve.given, *(place.ratio for place in places)), left, right
    )

    def up(percent: float) -> float:
        return bottom - percent / 100 * (bottom - top)

    _grid(canvas, left, right, top, up)
    money_axis(canvas, across, bottom, PERCENT, axis_title)
    heights = [up(percent) for percent, _ in curve.points]
    points = list(zip([across(ratio) for ratio in ratios], heights, strict=True))
    spots = [
        (across(p.ratio), up(p.height(tuple(ratios), curve.percents))) for p in places
    ]
    wanted = spread([y for _, y in spots], GAP, top + 2, bottom - 14)
    for place, spot, y in zip(places, spots, wanted, strict=True):
        low, high = (up(percent) for percent in place.span)
        if low > high:
            canvas.bar(spot[0] - 1.5, high, spot[0] + 1.5, low, colours.pale)
        _place(canvas, place, spot, y, bottom)
    canvas.path(points, colours.ink, width=1.3)
    if curve.are_points_given:
        for point in points:
            canvas.dot(point, colours.ink, radius=1.7)
    for place, spot in zip(places, spots, strict=True):
        if place.is_on_the_curve:
            colour = colours.accent if place.is_target else colours.ink
            canvas.dot(spot, colour, radius=2.4)
    if curve.given:
        _strokes(canvas, curve, across, strip)
    return canvas.drawing()


def _grid(canvas: Canvas, left: float, right: float, top: float, up: _Height) -> None:
    colours = canvas.colours
    canvas.text(
        (0, top - 12),
        "Chance of not exceeding, by similar projects",
        size=SMALL,
        colour=colours.muted,
    )
    for fifth in range(6):
        y = up(20.0 * fifth)
        canvas.line((left, y), (right, y), colours.hair, width=0.4)
        canvas.text(
            (left - 5, y + 2.5),
            f"{20 * fifth}{SPACE}%",
            size=SMALL,
            colour=colours.muted,
            align="end",
        )


def _place(
    canvas: Canvas, place: Place, spot: tuple[float, float], y: float, bottom: float
) -> None:
    """Draw the hairlines of one amount and its two lines of words."""
    colours, letters = canvas.colours, canvas.letters
    line = colours.accent if place.is_target else colours.rule
    ink = colours.accent if place.is_target else colours.ink
    width = 0.9 if place.is_target else 0.5
    edge, column = 297.0, 309.0
    canvas.line(spot, (spot[0], bottom), line, width=width, dashed=True)
    canvas.path([spot, (edge, spot[1]), (column - 3, y)], line, width=width)
    name = f"{place.name}{SPACE}{SPACE}{place.ratio_words}"
    canvas.text((column, y + 2.6), name, semibold=True, colour=ink)
    words = letters.fitted(place.words, SMALL, WIDTH - column)
    canvas.text((column, y + 11.6), words, size=SMALL, colour=colours.muted)


def _strokes(canvas: Canvas, curve: OutsideCurve, across: Scale, y: float) -> None:
    """Draw one stroke for each closed project, and say so beside them."""
    colours = canvas.colours
    canvas.line((across.left, y), (across.right, y), colours.hair, width=0.4)
    for ratio in curve.given:
        x = across(ratio)
        canvas.line((x, y - 7), (x, y), colours.ink, width=0.8)
    canvas.text((309.0, y - 1), curve.given_words, size=SMALL, colour=colours.muted)
