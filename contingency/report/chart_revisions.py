"""Charts of revisions: the bridge, both cumulative curves, the trend, the account."""

from __future__ import annotations

import datetime as dt
from collections.abc import Sequence
from dataclasses import dataclass
from itertools import pairwise

from contingency.report.axes import SMALL, Scale, money_axis, scale_over, ticks
from contingency.report.canvas import Canvas, Drawing, Point, spread
from contingency.report.chart_parts import SIZE
from contingency.report.chart_total import WIDTH
from contingency.report.look import Look
from contingency.report.wording import SPACE, MoneyUnit, in_unit
from contingency.setting.curve import CumulativeCurve

ROW = 13.0
"""Height of one line of a chart, points."""


@dataclass(frozen=True, kw_only=True, slots=True)
class BridgeLine:
    """One line of the bridge, amounts as printed."""

    name: str
    base: float
    """Change of the base; at both ends the base itself."""
    contingency: float
    """Change of the contingency; at both ends the contingency itself."""
    words: str
    """Change of base and contingency together, as printed."""
    is_end: bool


def bridge_chart(
    lines: tuple[BridgeLine, ...], look: Look, *, heads: tuple[str, str, str]
) -> Drawing:
    """Draw base and contingency as two staircases side by side, a line to a step.

    Each stair begins where the one above it ended, and hairlines join them, so that
    the eye goes down from the old figure to the new one in both columns at once.
    """
    head = 16.0
    canvas = Canvas(WIDTH, head + ROW * len(lines) + 4.0, look)
    colours, letters = canvas.colours, canvas.letters
    figures = max(letters.width(line.words, SIZE, semibold=True) for line in lines)
    first, gap = 152.0, 16.0
    room = (WIDTH - first - figures - 2 * gap) / 2
    columns = ((first, first + room), (first + room + gap, first + 2 * room + gap))
    for (left, _), title in zip(columns, heads, strict=False):
        canvas.text((left, 7.0), title, size=SMALL, colour=colours.muted)
    canvas.text((WIDTH, 7.0), heads[2], size=SMALL, colour=colours.muted, align="end")
    for i, line in enumerate(lines):
        y = head + ROW * i
        name = letters.fitted(line.name, SIZE, first - 10, semibold=line.is_end)
        canvas.text((0, y + 7.6), name, semibold=line.is_end)
        canvas.text((WIDTH, y + 7.6), line.words, semibold=line.is_end, align="end")
    for (left, right), amounts in zip(
        columns,
        ([x.base for x in lines], [x.contingency for x in lines]),
        strict=True,
    ):
        _staircase(canvas, lines, amounts, (left, right), head)
    return canvas.drawing()


def _staircase(
    canvas: Canvas,
    lines: tuple[BridgeLine, ...],
    amounts: list[float],
    ends: tuple[float, float],
    head: float,
) -> None:
    """Draw one column of the bridge."""
    colours = canvas.colours
    at: list[tuple[float, float]] = []
    level = 0.0
    for line, amount in zip(lines, amounts, strict=True):
        start = level if not line.is_end else amount
        level = amount if line.is_end else level + amount
        at.append((start, level))
    across = scale_over(tuple(x for pair in at for x in pair), *ends, air=0.04)
    for i, (line, (start, end)) in enumerate(zip(lines, at, strict=True)):
        y = head + ROW * i
        if i:
            x = across(at[i - 1][1])
            canvas.line((x, y - ROW + 9.5), (x, y + 1.0), colours.rule, width=0.5)
        if line.is_end:
            x = across(end)
            canvas.bar(x - 1.1, y + 1.0, x + 1.1, y + 9.5, colours.accent)
        elif across(start) != across(end):
            colour = colours.accent if end > start else colours.pale
            canvas.bar(across(start), y + 1.0, across(end), y + 9.5, colour)
        else:
            canvas.line((across(end), y + 1.0), (across(end), y + 9.5), colours.rule)


@dataclass(frozen=True, kw_only=True, slots=True)
class CurveOf:
    """The cumulative curve of one revision, and what was asked for on it."""

    name: str
    curve: CumulativeCurve
    request: float
    """Money."""
    chance: float
    """Fraction not exceeding the request."""
    words: str
    """Level and amount of the request, as printed."""


def two_curves_chart(
    old: CurveOf, new: CurveOf, *, unit: MoneyUnit, axis_title: str, look: Look
) -> Drawing:
    """Draw both cumulative curves on one scale, each with its request."""
    top, bottom, left, right = 24.0, 182.0, 30.0, 330.0
    canvas = Canvas(WIDTH, bottom + 26.0, look)
    colours = canvas.colours
    across = scale_over((*_middle(old), *_middle(new)), left, right)

    def up(chance: float) -> float:
        return bottom - chance * (bottom - top)

    canvas.text(
        (0, top - 12), "Chance of not exceeding", size=SMALL, colour=colours.muted
    )
    for tenth in range(0, 11, 2):
        y = up(tenth / 10)
        canvas.line((left, y), (right, y), colours.hair, width=0.4)
        canvas.text(
            (left - 5, y + 2.5),
            f"{10 * tenth}{SPACE}%",
            size=SMALL,
            colour=colours.muted,
            align="end",
        )
    money_axis(canvas, across, bottom, unit, axis_title)
    places = spread([up(old.chance), up(new.chance)], 22.0, top, bottom - 12)
    for one, y, colour in zip(
        (old, new), places, (colours.muted, colours.accent), strict=True
    ):
        points = [
            (across(float(cost)), up(float(chance)))
            for cost, chance in zip(one.curve.cost, one.curve.chance, strict=True)
            if across.holds(float(cost))
        ]
        canvas.path(points, colour, width=1.3, dashed=one is old)
        spot = (across(one.request), up(one.chance))
        canvas.path([spot, (right + 6, spot[1]), (right + 12, y)], colour, width=0.6)
        canvas.dot(spot, colour, radius=2.2)
        canvas.text((right + 15, y + 2.6), one.name, semibold=True, colour=colour)
        words = canvas.letters.fitted(one.words, SMALL, WIDTH - right - 15)
        canvas.text((right + 15, y + 11.6), words, size=SMALL, colour=colours.muted)
    return canvas.drawing()


def _middle(one: CurveOf) -> tuple[float, ...]:
    """Return what a scale must hold of a curve: all but its outermost trials."""
    n = one.curve.cost.size
    cut = n // 200
    return float(one.curve.cost[cut]), float(one.curve.cost[n - 1 - cut]), one.request


@dataclass(frozen=True, kw_only=True, slots=True)
class TrendLine:
    """One revision of the trend, amounts as printed."""

    name: str
    base: float
    p10: float
    p90: float
    request: float
    words: str
    """Width from P10 to P90, as printed."""


def trend_chart(
    lines: tuple[TrendLine, ...], *, unit: MoneyUnit, axis_title: str, look: Look
) -> Drawing:
    """Draw each revision as a bar from P10 to P90 with its base and its request."""
    head, row = 18.0, 17.0
    bottom = head + row * len(lines)
    canvas = Canvas(WIDTH, bottom + 26.0, look)
    colours, letters = canvas.colours, canvas.letters
    left, right = 96.0, WIDTH - 64.0
    across = scale_over(
        tuple(x for one in lines for x in (one.base, one.p10, one.p90, one.request)),
        left,
        right,
    )
    canvas.text(
        (WIDTH, 7.0), "P10 to P90", size=SMALL, colour=colours.muted, align="end"
    )
    for i, line in enumerate(lines):
        y = head + row * i
        name = letters.fitted(line.name, SIZE, left - 10, semibold=False)
        canvas.text((0, y + 8.4), name)
        canvas.bar(across(line.p10), y + 2.5, across(line.p90), y + 9.5, colours.pale)
        canvas.bar(
            across(line.request) - 1.1,
            y + 0.5,
            across(line.request) + 1.1,
            y + 11.5,
            colours.accent,
        )
        canvas.dot((across(line.base), y + 6.0), colours.ink, radius=2.2)
        canvas.text((WIDTH, y + 8.4), line.words, align="end")
    _name_the_marks(canvas, lines[0], across, head)
    money_axis(canvas, across, bottom, unit, axis_title)
    return canvas.drawing()


def _name_the_marks(
    canvas: Canvas, line: TrendLine, across: Scale, head: float
) -> None:
    """Say once, above the first line, what the dot and the stroke are."""
    words = (
        ("base", across(line.base), canvas.colours.ink),
        ("request", across(line.request), canvas.colours.accent),
    )
    widths = [canvas.letters.width(word, SMALL) for word, _, _ in words]
    places = spread([x for _, x, _ in words], max(widths) + 4, 96.0, WIDTH - 110.0)
    for (word, _, colour), x in zip(words, places, strict=True):
        canvas.text((x, head - 5.0), word, size=SMALL, colour=colour, align="middle")


@dataclass(frozen=True, kw_only=True, slots=True)
class AccountCurve:
    """The account over time, money."""

    balance: tuple[tuple[dt.date, float], ...]
    """Balance after each entry, by date, up to the data date."""
    need: tuple[tuple[dt.date, float], ...]
    """What will be needed, from the data date on."""
    minimum: tuple[tuple[dt.date, float], ...]
    """The minimum curve's milestones; empty without one."""
    today: dt.date


def account_chart(
    account: AccountCurve, *, unit: MoneyUnit, unit_words: str, look: Look
) -> Drawing:
    """Draw the balance in steps, the need that follows and the minimum curve."""
    top, bottom, left, right = 22.0, 152.0, 40.0, 368.0
    canvas = Canvas(WIDTH, bottom + 22.0, look)
    colours = canvas.colours
    days = [
        d for line in (account.balance, account.need, account.minimum) for d, _ in line
    ]
    first, last = min((*days, account.today)), max((*days, account.today))
    along = scale_over((float(first.toordinal()), float(last.toordinal())), left, right)
    amounts = [
        a for line in (account.balance, account.need, account.minimum) for _, a in line
    ]
    up = scale_over((0.0, *amounts), bottom, top, air=0.04)

    def at(day: dt.date, amount: float) -> Point:
        return along(float(day.toordinal())), up(amount)

    canvas.text((0, top - 12), unit_words, size=SMALL, colour=colours.muted)
    _heights(canvas, up, (left, right), unit)
    _years(canvas, along, bottom, (first, last))
    x = along(float(account.today.toordinal()))
    canvas.line((x, top), (x, bottom), colours.rule, width=0.5, dashed=True)
    canvas.text(
        (x, top - 3), "data date", size=SMALL, colour=colours.muted, align="middle"
    )
    ends: list[tuple[str, Point, str]] = []
    if account.minimum:
        points = [at(*point) for point in account.minimum]
        canvas.path(points, colours.muted, width=0.9, dashed=True)
        ends.append(("minimum curve", points[-1], colours.muted))
    if account.need:
        points = [at(*point) for point in account.need]
        canvas.path(points, colours.ink, width=1.3)
        ends.append(("needed", points[-1], colours.ink))
    if account.balance:
        stairs = _stairs([*account.balance, (account.today, account.balance[-1][1])])
        points = [at(*point) for point in stairs]
        canvas.path(points, colours.accent, width=1.5)
        canvas.dot(points[-1], colours.accent, radius=2.2)
        ends.append(("left in the account", points[-1], colours.accent))
    _end_words(canvas, ends, right, (top, bottom))
    return canvas.drawing()


def _stairs(
    points: Sequence[tuple[dt.date, float]],
) -> list[tuple[dt.date, float]]:
    """Return points joined by level and upright lines."""
    stairs = [points[0]]
    for (_, before), (day, after) in pairwise(points):
        stairs += [(day, before), (day, after)]
    return stairs


def _heights(
    canvas: Canvas, up: Scale, ends: tuple[float, float], unit: MoneyUnit
) -> None:
    """Draw level hairlines with round amounts."""
    amounts, _ = ticks(up.low, up.high, 6)
    for amount in amounts:
        y = up(amount)
        canvas.line((ends[0], y), (ends[1], y), canvas.colours.hair, width=0.4)
        canvas.text(
            (ends[0] - 5, y + 2.5),
            in_unit(amount, MoneyUnit(size=unit.size, digits=0, word=unit.word)),
            size=SMALL,
            colour=canvas.colours.muted,
            align="end",
        )


def _years(
    canvas: Canvas, along: Scale, y: float, days: tuple[dt.date, dt.date]
) -> None:
    """Draw a time axis with a stroke at each New Year."""
    colours = canvas.colours
    canvas.line((along.left, y), (along.right, y), colours.rule)
    for year in range(days[0].year, days[1].year + 2):
        day = dt.date(year, 1, 1)
        if not days[0] <= day <= days[1]:
            continue
        x = along(float(day.toordinal()))
        canvas.line((x, y), (x, y + 2.5), colours.rule)
        canvas.text(
            (x, y + 10), str(year), size=SMALL, colour=colours.muted, align="middle"
        )


def _end_words(
    canvas: Canvas,
    ends: list[tuple[str, Point, str]],
    right: float,
    room: tuple[float, float],
) -> None:
    """Set the name of each line in a column at the right, joined by a hairline."""
    places = spread([y for _, (_, y), _ in ends], 11.0, room[0], room[1] - 4)
    for (words, spot, colour), y in zip(ends, places, strict=True):
        canvas.path(
            [spot, (right + 4, spot[1]), (right + 10, y)],
            canvas.colours.rule,
            width=0.5,
        )
        canvas.text((right + 13, y + 2.6), words, size=SMALL, colour=colour)
