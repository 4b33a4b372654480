"""Chart of the funding table: one bar a year, from base to outturn money."""

from __future__ import annotations

from dataclasses import dataclass

from contingency.report.axes import SMALL, Scale
from contingency.report.canvas import Canvas, Drawing
from contingency.report.chart_total import WIDTH
from contingency.report.look import Look

ROW = 15.0
"""Height of a line, points."""
HEAD = 16.0


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

    The head names the three parts where the longest bar has them.
    """
    canvas = Canvas(WIDTH, HEAD + ROW * len(bars), look)
    colours = canvas.colours
    sums = [bar.base + bar.contingency + bar.escalation for bar in bars]
    across = Scale(low=0.0, high=max(*sums, 1e-9), left=48.0, right=WIDTH - 62.0)
    _key(canvas, across.left)
    for place, bar in enumerate(bars):
        y = HEAD + ROW * place
        canvas.text((0, y + 8.0), bar.name)
        end = 0.0
        for amount, colour in (
            (bar.base, colours.hair),
            (bar.contingency, colours.accent),
            (bar.escalation, colours.pale),
        ):
            canvas.bar(across(end), y, across(end + amount), y + 10.0, colour)
            end += amount
        canvas.text((WIDTH, y + 8.0), bar.words, align="end")
    canvas.line(
        (across.left, HEAD - 3),
        (across.left, HEAD + ROW * len(bars) - 2),
        colours.rule,
    )
    return canvas.drawing()


def _key(canvas: Canvas, left: float) -> None:
    """Draw a patch and a word for each part, in the order of the bars."""
    colours = canvas.colours
    for word, colour in (
        ("Base", colours.hair),
        ("Contingency", colours.accent),
        ("Escalation on both", colours.pale),
    ):
        canvas.bar(left, 1.5, left + 8.0, 8.5, colour)
        canvas.text((left + 12.0, 8.0), word, size=SMALL, colour=colours.muted)
        left += 12.0 + canvas.letters.width(word, SMALL, semibold=False) + 18.0
