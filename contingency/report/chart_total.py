"""Charts of the total: the cumulative curve and the density."""

from __future__ import annotations

from dataclasses import dataclass

from contingency.report.axes import SMALL, Scale, money_axis, scale_over
from contingency.report.canvas import Canvas, Drawing, spread
from contingency.report.look import Look
from contingency.report.wording import SPACE, MoneyUnit, in_unit
from contingency.setting.curve import CumulativeCurve, Histogram

WIDTH = 462.0
"""Points: the width of the text."""


@dataclass(frozen=True, kw_only=True, slots=True)
class Mark:
    """One amount that a chart of the total points at."""

    name: str
    """Short: Base, Mean, P80."""
    words: str
    """What follows name and amount; may be empty."""
    amount: float
    """Total cost, price-date money."""
    chance: float
    """Fraction not exceeding the amount; its height on the cumulative curve."""
    is_target: bool = False


def cumulative_chart(
    curve: CumulativeCurve,
    marks: tuple[Mark, ...],
    *,
    unit: MoneyUnit,
    axis_title: str,
    look: Look,
) -> Drawing:
    """Draw the chance of not exceeding against the total cost, with its marks.

    Every mark is a dot on the curve and a hairline to its label in a column at the
    right, where there is always room: the curve never comes down again.
    """
    gap = 11.0
    height = max(238.0, gap * (len(marks) + 1) + 56.0)
    canvas = Canvas(WIDTH, height, look)
    colours = canvas.colours
    top, bottom, left, right = 24.0, height - 28.0, 30.0, 298.0
    inside = _inside(curve, marks)
    across = scale_over(inside, left, right)

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

    heights = spread([up(mark.chance) for mark in marks], gap, top - 4, bottom - 2)
    for mark, y in zip(marks, heights, strict=True):
        _cumulative_mark(canvas, mark, across(mark.amount), up(mark.chance), y, unit)
    points = [
        (across(cost), up(chance))
        for cost, chance in zip(curve.cost, curve.chance, strict=True)
        if across.holds(cost)
    ]
    canvas.path(points, colours.ink, width=1.3)
    for mark in marks:
        colour = colours.accent if mark.is_target else colours.ink
        canvas.dot((across(mark.amount), up(mark.chance)), colour, radius=2.2)
    return canvas.drawing()


def _cumulative_mark(
    canvas: Canvas, mark: Mark, x: float, y: float, label_y: float, unit: MoneyUnit
) -> None:
    """Draw the hairlines of one mark and its label in the right-hand column."""
    colours = canvas.colours
    colour = colours.accent if mark.is_target else colours.rule
    width = 0.9 if mark.is_target else 0.5
    edge, column = 302.0, 314.0
    canvas.path([(x, y), (edge, y), (column - 3, label_y)], colour, width=width)
    if mark.is_target or mark.name == "Base":
        canvas.line((x, y), (x, canvas.height - 28.0), colour, width=width, dashed=True)
    _mark_label(canvas, mark, (column, label_y + 2.6), unit)


def _mark_label(
    canvas: Canvas, mark: Mark, at: tuple[float, float], unit: MoneyUnit
) -> None:
    """Set name and amount in semibold, the words behind them in the muted colour."""
    colours, letters = canvas.colours, canvas.letters
    head = f"{mark.name}{SPACE}{SPACE}{in_unit(mark.amount, unit)}"
    colour = colours.accent if mark.is_target else colours.ink
    box = canvas.text(at, head, semibold=True, colour=colour)
    room = WIDTH - box.right - 5
    if mark.words and room > 24:
        words = letters.fitted(mark.words, SMALL, room)
        canvas.text((box.right + 5, at[1]), words, size=SMALL, colour=colours.muted)


def _inside(curve: CumulativeCurve, marks: tuple[Mark, ...]) -> tuple[float, ...]:
    """Return the amounts that the scale must hold: all but the outermost trials."""
    n = curve.cost.size
    cut = n // 200
    ends = (float(curve.cost[cut]), float(curve.cost[n - 1 - cut]))
    return (*ends, *(mark.amount for mark in marks))


def density_chart(
    counts: Histogram,
    marks: tuple[Mark, ...],
    middle: tuple[float, float],
    *,
    middle_words: str,
    unit: MoneyUnit,
    axis_title: str,
    look: Look,
) -> Drawing:
    """Draw the histogram of the total, filled up to the target, with its marks.

    `middle` are the P10 and the P90, shown as a bar under the axis.  The labels of
    the marks stand in as many rows above the picture as they need.
    """
    amounts = (
        float(counts.edges[0]),
        float(counts.edges[-1]),
        *middle,
        *(mark.amount for mark in marks),
    )
    across = _roomy_scale(amounts, marks, unit, look)
    rows = _label_rows(marks, across, unit, look)
    row_height = 11.0
    top = 6.0 + row_height * (max(rows) + 1)
    bottom = top + 128.0
    canvas = Canvas(WIDTH, bottom + 50.0, look)
    colours = canvas.colours

    first, last = amounts[:2]
    target = next((mark.amount for mark in marks if mark.is_target), last)
    peak = float(counts.share.max()) or 1.0
    outline = [(across(first), bottom)]
    for i, share in enumerate(counts.share):
        y = bottom - float(share) / peak * (bottom - top - 8)
        start, end = float(counts.edges[i]), float(counts.edges[i + 1])
        if start < target:
            canvas.bar(across(start), y, across(min(end, target)), bottom, colours.pale)
        outline += [(across(start), y), (across(end), y)]
    outline.append((across(last), bottom))
    canvas.path(outline, colours.ink, width=0.6)

    for mark, row in zip(marks, rows, strict=True):
        x = across(mark.amount)
        y = 9.0 + row_height * (max(rows) - row)
        colour = colours.accent if mark.is_target else colours.ink
        canvas.line(
            (x, bottom), (x, y - 6), colour, width=0.9 if mark.is_target else 0.5
        )
        canvas.text(
            (x + 3, y), _density_words(mark, unit), semibold=True, colour=colour
        )
    money_axis(canvas, across, bottom, unit, axis_title)
    _middle_bar(canvas, across, bottom + 31.0, middle, middle_words)
    return canvas.drawing()


def _middle_bar(
    canvas: Canvas, across: Scale, y: float, middle: tuple[float, float], words: str
) -> None:
    """Draw the P10 to P90 as a bar with its words under it."""
    colours = canvas.colours
    start, end = across(middle[0]), across(middle[1])
    canvas.bar(start, y - 1.6, end, y + 1.6, colours.accent)
    width = canvas.letters.width(words, SMALL)
    left = min(max((start + end - width) / 2, 0.0), WIDTH - width)
    canvas.text((left, y + 11), words, size=SMALL, colour=colours.ink)


def _density_words(mark: Mark, unit: MoneyUnit) -> str:
    return f"{mark.name}{SPACE}{SPACE}{in_unit(mark.amount, unit)}"


def _roomy_scale(
    amounts: tuple[float, ...], marks: tuple[Mark, ...], unit: MoneyUnit, look: Look
) -> Scale:
    """Return a scale on which every mark has room for its label at its right."""
    right = WIDTH - 2.0
    while True:
        across = scale_over(amounts, 2.0, right)
        over = max(
            (
                across(mark.amount) + 3 + _label_width(mark, unit, look) - WIDTH
                for mark in marks
            ),
            default=0.0,
        )
        if over <= 0.0:
            return across
        right -= over + 1.0


def _label_width(mark: Mark, unit: MoneyUnit, look: Look) -> float:
    return look.letters.width(_density_words(mark, unit), 7.6, semibold=True)


def _label_rows(
    marks: tuple[Mark, ...], across: Scale, unit: MoneyUnit, look: Look
) -> list[int]:
    """Return the row of each mark's label, counted from the picture upwards.

    Taken from the right, a label goes to the lowest row in which it reaches neither
    a label that stands there nor the line of a mark whose label stands higher up.
    """
    placed: list[tuple[int, float, float]] = []
    rows = [0] * len(marks)
    for i in sorted(range(len(marks)), key=lambda i: -marks[i].amount):
        line = across(marks[i].amount)
        end = line + 3 + _label_width(marks[i], unit, look)
        row = 0
        while any(
            other >= row and line < other_end and other_line - 4 < end
            for other, other_line, other_end in placed
        ):
            row += 1
        placed.append((row, line, end))
        rows[i] = row
    return rows
