"""Charts of the drivers: swing of the mean total, effect on the target."""

from __future__ import annotations

from dataclasses import dataclass

from contingency.report.axes import SMALL, Scale, scale_over
from contingency.report.canvas import Canvas, Drawing
from contingency.report.chart_total import WIDTH
from contingency.report.look import Look

SIZE = 7.6
ROW = 13.5
NAMES = 196.0
"""Width of the column of names, points."""


@dataclass(frozen=True, kw_only=True, slots=True)
class SwingBar:
    """One driver: mean total in its lowest and in its highest tenth."""

    name: str
    low: float
    high: float
    low_words: str
    high_words: str


@dataclass(frozen=True, kw_only=True, slots=True)
class EffectBar:
    """One driver: how far the target falls without it."""

    name: str
    effect: float
    words: str


def swing_chart(
    bars: tuple[SwingBar, ...],
    causes: tuple[SwingBar, ...],
    *,
    mean: float,
    mean_words: str,
    look: Look,
) -> Drawing:
    """Draw each driver's swing about the mean total; causes apart, below."""
    head = 22.0
    canvas = Canvas(WIDTH, _height(len(bars), len(causes), head), look)
    colours, letters = canvas.colours, canvas.letters
    every = (*bars, *causes)
    figure = max(
        letters.width(words, SMALL)
        for bar in every
        for words in (bar.low_words, bar.high_words)
    )
    across = scale_over(
        (mean, *(x for bar in every for x in (bar.low, bar.high))),
        NAMES + figure + 8,
        WIDTH - figure - 6,
        air=0.0,
    )
    middle = across(mean)
    width = letters.width(mean_words, SMALL)
    canvas.text(
        (min(max(middle - width / 2, NAMES), WIDTH - width), 9.0),
        mean_words,
        size=SMALL,
        colour=colours.muted,
    )
    for i, bar in enumerate(bars):
        _swing_row(canvas, bar, across, middle, head + ROW * i)
    canvas.line((middle, 13.0), (middle, head + ROW * len(bars)), colours.ink)
    top = _causes_head(canvas, len(bars), len(causes), head)
    for i, bar in enumerate(causes):
        _swing_row(canvas, bar, across, middle, top + ROW * i)
    if causes:
        canvas.line((middle, top - 2), (middle, top + ROW * len(causes)), colours.ink)
    return canvas.drawing()


def _swing_row(
    canvas: Canvas, bar: SwingBar, across: Scale, middle: float, y: float
) -> None:
    colours = canvas.colours
    canvas.text((0, y + 7.6), canvas.letters.fitted(bar.name, SIZE, NAMES - 8))
    low, high = across(bar.low), across(bar.high)
    first, last = min(low, high), max(low, high)
    canvas.bar(first, y + 0.8, min(last, middle), y + 9.2, colours.pale)
    if last > middle:
        canvas.bar(max(first, middle), y + 0.8, last, y + 9.2, colours.accent)
    left_words, right_words = (
        (bar.low_words, bar.high_words)
        if low <= high
        else (bar.high_words, bar.low_words)
    )
    first, last = min(first, middle), max(last, middle)
    canvas.text(
        (first - 4, y + 7.4),
        left_words,
        size=SMALL,
        colour=colours.muted,
        align="end",
    )
    canvas.text((last + 4, y + 7.4), right_words, size=SMALL, colour=colours.muted)


def effect_chart(
    bars: tuple[EffectBar, ...], causes: tuple[EffectBar, ...], look: Look
) -> Drawing:
    """Draw how far the target falls without each driver; causes apart, below."""
    head = 4.0
    canvas = Canvas(WIDTH, _height(len(bars), len(causes), head), look)
    letters = canvas.letters
    every = (*bars, *causes)
    figure = max(letters.width(bar.words, SMALL) for bar in every)
    lowest = min(0.0, *(bar.effect for bar in every))
    across = scale_over(
        (0.0, *(bar.effect for bar in every)),
        NAMES + (figure + 8 if lowest < 0 else 0.0),
        WIDTH - figure - 6,
        air=0.0,
    )
    zero = across(0.0)
    for i, bar in enumerate(bars):
        _effect_row(canvas, bar, across, head + ROW * i)
    canvas.line((zero, head - 2), (zero, head + ROW * len(bars)), canvas.colours.rule)
    top = _causes_head(canvas, len(bars), len(causes), head)
    for i, bar in enumerate(causes):
        _effect_row(canvas, bar, across, top + ROW * i)
    if causes:
        canvas.line(
            (zero, top - 2), (zero, top + ROW * len(causes)), canvas.colours.rule
        )
    return canvas.drawing()


def _effect_row(canvas: Canvas, bar: EffectBar, across: Scale, y: float) -> None:
    colours = canvas.colours
    canvas.text((0, y + 7.6), canvas.letters.fitted(bar.name, SIZE, NAMES - 8))
    end = across(bar.effect)
    colour = colours.accent if bar.effect >= 0 else colours.pale
    canvas.bar(across(0.0), y + 0.8, end, y + 9.2, colour)
    if bar.effect >= 0:
        canvas.text((end + 4, y + 7.4), bar.words, size=SMALL, colour=colours.muted)
    else:
        canvas.text(
            (end - 4, y + 7.4), bar.words, size=SMALL, colour=colours.muted, align="end"
        )


def _height(bars: int, causes: int, head: float) -> float:
    return head + ROW * bars + (ROW * causes + 22.0 if causes else 0.0) + 4.0


def _causes_head(canvas: Canvas, bars: int, causes: int, head: float) -> float:
    """Set the line that keeps causes apart; return where their rows begin."""
    top = head + ROW * bars + 22.0
    if causes:
        canvas.line((0, top - 17), (WIDTH, top - 17), canvas.colours.hair, width=0.4)
        canvas.text(
            (0, top - 6),
            "Common causes: another cut through the same uncertainty, not to be added",
            size=SMALL,
            colour=canvas.colours.muted,
        )
    return top
