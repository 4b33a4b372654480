"""Charts of the parts: from base to request, and the allocation."""

from __future__ import annotations

from dataclasses import dataclass

from contingency.report.axes import SMALL, Scale, scale_over
from contingency.report.canvas import Canvas, Drawing
from contingency.report.chart_total import WIDTH
from contingency.report.look import Look
from contingency.report.wording import SPACE

SIZE = 7.6
"""Size of labels, points."""


@dataclass(frozen=True, kw_only=True, slots=True)
class Part:
    """One part of the contingency, with the words that stand at its end."""

    name: str
    amount: float
    """Money as printed; negative for a part that lowers the contingency."""
    words: str
    """Amount and share, as printed."""


def composition_chart(
    base: Part, parts: tuple[Part, ...], contingency: Part, request: Part, look: Look
) -> Drawing:
    """Draw the request as one bar and its contingency again under a lens.

    The upper bar is base and contingency on one scale.  Two lines open from the ends
    of the contingency to the lower picture, where each part starts where the one
    before it ended, so that parts with either sign lead to the contingency.
    """
    row = 15.0
    lens_top = 52.0
    height = lens_top + row * (len(parts) + 1) + 8.0
    canvas = Canvas(WIDTH, height, look)
    colours = canvas.colours
    whole = Scale(
        low=0.0, high=max(base.amount, request.amount, 1e-9), left=0.0, right=WIDTH
    )
    seam, end = whole(base.amount), whole(request.amount)
    _request_bar(canvas, base, contingency, request, seam, end)

    left, right = 152.0, 352.0
    steps = [0.0]
    for part in parts:
        steps.append(steps[-1] + part.amount)
    lens = scale_over((*steps, contingency.amount), left, right, air=0.0)
    zero, sum_at = lens(0.0), lens(contingency.amount)
    canvas.path([(seam, 28.0), (zero, lens_top - 4)], colours.rule, width=0.5)
    canvas.path([(end, 28.0), (sum_at, lens_top - 4)], colours.rule, width=0.5)
    foot = lens_top + row * len(parts)
    canvas.line((zero, lens_top - 4), (zero, foot + row - 3), colours.rule)
    canvas.line((sum_at, lens_top - 4), (sum_at, foot + row - 3), colours.rule)

    for i, part in enumerate(parts):
        y = lens_top + row * i
        canvas.text((0, y + 7.6), part.name)
        canvas.bar(lens(steps[i]), y, lens(steps[i + 1]), y + 9.5, colours.pale)
        x = lens(steps[i + 1])
        canvas.line((x, y), (x, y + row + 9.5), colours.accent, width=0.6)
        canvas.text((WIDTH, y + 7.6), part.words, align="end")
    canvas.text((0, foot + 7.6), contingency.name, semibold=True)
    canvas.bar(zero, foot, sum_at, foot + 9.5, colours.accent)
    canvas.text((WIDTH, foot + 7.6), contingency.words, semibold=True, align="end")
    return canvas.drawing()


def _request_bar(
    canvas: Canvas,
    base: Part,
    contingency: Part,
    request: Part,
    seam: float,
    end: float,
) -> None:
    """Draw base and contingency as one bar with its words above it."""
    colours = canvas.colours
    canvas.bar(0.0, 14.0, min(seam, end), 28.0, colours.hair)
    canvas.bar(seam, 14.0, end, 28.0, colours.accent)
    if contingency.amount < 0:
        canvas.bar(end, 14.0, seam, 28.0, colours.pale)
    canvas.text(
        (0, 9.0), f"{base.name}{SPACE}{SPACE}{base.words}", colour=colours.muted
    )
    canvas.text(
        (WIDTH, 9.0),
        f"{request.name}{SPACE}{SPACE}{request.words}",
        semibold=True,
        align="end",
    )


@dataclass(frozen=True, kw_only=True, slots=True)
class AllocationBar:
    """One line of the allocation picture, amounts as printed."""

    name: str
    expected: float
    margin: float
    contingency: float
    words: str
    """The contingency as printed."""
    is_group: bool


def allocation_chart(bars: tuple[AllocationBar, ...], look: Look) -> Drawing:
    """Draw each line's expected part and its margin, which starts where that ends.

    So the margin always ends at the contingency.  Where it runs back over the expected
    part, because the two have different signs, each takes half of the height.
    """
    row, head = 12.5, 14.0
    canvas = Canvas(WIDTH, head + row * len(bars) + 6.0, look)
    colours, letters = canvas.colours, canvas.letters
    figures = max(letters.width(bar.words, SIZE, semibold=True) for bar in bars)
    left, right = 176.0, WIDTH - max(figures, 46.0) - 12.0
    named = max(range(len(bars)), key=lambda i: abs(bars[i].contingency))
    across = scale_over(
        (0.0, *(x for b in bars for x in (b.expected, b.margin, b.contingency))),
        left,
        right,
        air=0.01,
    )
    zero = across(0.0)
    canvas.text(
        (WIDTH, 7.0), "Contingency", size=SMALL, colour=colours.muted, align="end"
    )
    canvas.line((zero, head - 4), (zero, head + row * len(bars)), colours.rule)
    for i, bar in enumerate(bars):
        y = head + row * i
        if bar.is_group:
            canvas.line((0, y - 1.5), (WIDTH, y - 1.5), colours.hair, width=0.4)
        indent = 0.0 if bar.is_group else 8.0
        name = letters.fitted(bar.name, SIZE, left - indent - 12, semibold=bar.is_group)
        canvas.text((indent, y + 7.4), name, semibold=bar.is_group)
        _allocation_bar(canvas, bar, across, y)
        canvas.text((WIDTH, y + 7.4), bar.words, semibold=bar.is_group, align="end")
        if i == named:
            _name_the_bars(canvas, bar, across, y)
    return canvas.drawing()


def _allocation_bar(
    canvas: Canvas, bar: AllocationBar, across: Scale, y: float
) -> None:
    colours = canvas.colours
    middle = across(bar.expected)
    top, low = (4.6, 5.0) if bar.expected * bar.margin < 0 else (9.0, 1.0)
    canvas.bar(across(0.0), y + 1.0, middle, y + top, colours.pale)
    canvas.bar(middle, y + low, across(bar.contingency), y + 9.0, colours.accent)


def _name_the_bars(canvas: Canvas, bar: AllocationBar, across: Scale, y: float) -> None:
    """Say once, at the largest line, which part is which: inside where it fits."""
    size, letters = 6.4, canvas.letters
    zero, middle, end = across(0.0), across(bar.expected), across(bar.contingency)
    parts = (
        ("expected", zero, middle, canvas.colours.ink),
        ("margin", middle, end, "#ffffff"),
    )
    if bar.expected * bar.margin >= 0 and all(
        abs(stop - start) > letters.width(name, size) + 6
        for name, start, stop, _ in parts
    ):
        for name, start, stop, colour in parts:
            canvas.text((min(start, stop) + 3, y + 7.1), name, size=size, colour=colour)
        return
    words = "expected, then margin"
    at = max(zero, middle, end) + 4
    if at + letters.width(words, size) <= across.right + 4:
        canvas.text((at, y + 7.1), words, size=size, colour=canvas.colours.muted)
