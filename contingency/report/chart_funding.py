"""Chart of the funding table: one bar a year, from base to outturn money."""

from __future__ import annotations

from dataclasses import dataclass

from contingency.report.axes import SMALL, Scale
from contingency.report.canvas import Canvas, Drawing
from contingency.report.chart_total import WIDTH
from contingency.report.look import Look

ROW = 15.0
"""Height of a line, points."""
HEAD = 15.0
"""Height of the line that names the parts, points."""
GAP = 8.0
"""Least room between two names, points."""


@dataclass(frozen=True, kw_only=True, slots=True)
class YearBar:
    """One year of the funding table, amounts as printed, none of them negative."""

    name: str
    base: float
    contingency: float
    escalation: float
    words: str
    """The total as printed."""


def funding_chart(bars: tuple[YearBar, ...], look: Look) -> Drawing:
    """Draw base, contingency and escalation of each year end to end.

    The three parts are named right above the longest bar, each where it begins.
    """
    canvas = Canvas(WIDTH, HEAD + ROW * len(bars), look)
    colours = canvas.colours
    sums = [bar.base + bar.contingency + bar.escalation for bar in bars]
    across = Scale(low=0.0, high=max(*sums, 1e-9), left=48.0, right=WIDTH - 62.0)
    longest = sums.index(max(sums))
    top = 0.0
    for place, bar in enumerate(bars):
        parts = (
            ("Base", bar.base, colours.hair),
            ("Contingency", bar.contingency, colours.accent),
            ("Escalation on both", bar.escalation, colours.pale),
        )
        if place == longest:
            _name_parts(canvas, across, [(name, size) for name, size, _ in parts], top)
            top += HEAD
        canvas.text((0, top + 8.0), bar.name)
        end = 0.0
        for _, amount, colour in parts:
            canvas.bar(across(end), top, across(end + amount), top + 10.0, colour)
            end += amount
        canvas.text((WIDTH, top + 8.0), bar.words, align="end")
        top += ROW
    canvas.line((across.left, 0.0), (across.left, top - 2), colours.rule)
    return canvas.drawing()


def _name_parts(
    canvas: Canvas, across: Scale, parts: list[tuple[str, float]], top: float
) -> None:
    """Write the name of each part where it begins, moved aside as little as needed."""
    widths = [canvas.letters.width(name, SMALL, semibold=False) for name, _ in parts]
    begins, left, end = [], across.left + 2.0, 0.0
    for (_, size), width in zip(parts, widths, strict=True):
        begins.append(max(across(end), left))
        left = begins[-1] + width + GAP
        end += size
    right = WIDTH
    for place in reversed(range(len(parts))):
        begins[place] = min(begins[place], right - widths[place])
        right = begins[place] - GAP
    for (name, _), begin in zip(parts, begins, strict=True):
        canvas.text((begin, top + 10.0), name, size=SMALL, colour=canvas.colours.muted)
