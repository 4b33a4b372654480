"""Charts of what the contingency rests on: one change at a time, fresh seeds."""

from __future__ import annotations

from dataclasses import dataclass

from contingency.report.axes import SMALL, Scale, money_axis, scale_over
from contingency.report.canvas import Canvas, Drawing
from contingency.report.chart_total import WIDTH
from contingency.report.look import Look
from contingency.report.wording import MoneyUnit

SIZE = 7.6
ROW = 13.5
NAMES = 206.0
"""Width of the column of names, points."""
HEAD = 27.0
"""Height of the two lines above the rows, points."""
DWARFS = 3.0
"""A change this many times as large as the next one is drawn with a cut line; ours."""
CUT_AT = 1.5
"""Length of a cut line, as a multiple of the next largest change."""


@dataclass(frozen=True, kw_only=True, slots=True)
class ChangeLine:
    """One change: where the contingency would be."""

    name: str
    effect: float
    """Contingency with the change less the issued one, money."""
    half_width: float
    """Half-width of the interval of the effect, money; 0 where there is none."""
    words: str
    """The effect as printed."""


def what_if_chart(
    changes: tuple[ChangeLine, ...],
    levels: tuple[ChangeLine, ...],
    *,
    issued: float,
    issued_words: str,
    seeds: tuple[float, float],
    seeds_words: str,
    unit: MoneyUnit,
    axis_title: str,
    look: Look,
) -> Drawing:
    """Draw where each change would take the contingency, from most to least.

    An upright line stands at the issued contingency, in the band that fresh seeds
    span; each change is a stem from that line to a dot.  Levels stand apart, for they
    are another question.  A change that dwarfs all others has a cut stem, so that the
    others can still be told apart.
    """
    ordered = sorted(changes, key=lambda one: -one.effect)
    apart = sorted(levels, key=lambda one: -one.effect)
    gap = 17.0 if apart else 0.0
    bottom = HEAD + ROW * len(ordered) + gap + ROW * len(apart) + 2.0
    canvas = Canvas(WIDTH, bottom + 24.0, look)
    across = _scale((*ordered, *apart), seeds, issued, look)
    middle = across(issued)
    low, high = (across(amount) for amount in seeds)
    canvas.bar(low, HEAD - 3, max(high, low + 0.6), bottom, canvas.colours.hair)
    canvas.line((middle, HEAD - 3), (middle, bottom), canvas.colours.ink, width=0.8)
    _head(canvas, middle, issued_words, seeds_words)
    for i, change in enumerate(ordered):
        _row(canvas, change, across, issued, HEAD + ROW * i)
    if apart:
        top = HEAD + ROW * len(ordered) + gap
        canvas.text(
            (0, top - 5),
            "Another level: another question, not another assumption",
            size=SMALL,
            colour=canvas.colours.muted,
        )
        for i, change in enumerate(apart):
            _row(canvas, change, across, issued, top + ROW * i)
    money_axis(canvas, across, bottom, unit, axis_title)
    return canvas.drawing()


def _scale(
    lines: tuple[ChangeLine, ...],
    seeds: tuple[float, float],
    issued: float,
    look: Look,
) -> Scale:
    """Return a scale that leaves room for the words at the far end of every stem."""
    figure = max((look.letters.width(one.words, SMALL) for one in lines), default=0.0)
    reach = _reach(tuple(one.effect for one in lines))
    ends = [
        issued + min(max(end, -reach), reach)
        for one in lines
        for end in (one.effect - one.half_width, one.effect + one.half_width)
    ]
    return scale_over(
        (issued, *seeds, *ends),
        NAMES + figure + 8,
        WIDTH - figure - 8,
        air=0.0,
    )


def _reach(effects: tuple[float, ...]) -> float:
    """Return the longest stem that is drawn in full, money.

    >>> _reach((-5.0, 4.0, 1.0)), _reach((-500.0, 4.0, 1.0)), _reach((3.0, 0.0))
    (5.0, 6.0, 3.0)
    """
    longest = [*sorted((abs(effect) for effect in effects), reverse=True), 0.0, 0.0]
    if longest[1] > 0 and longest[0] > DWARFS * longest[1]:
        return CUT_AT * longest[1]
    return longest[0]


def has_cut(lines: tuple[ChangeLine, ...]) -> bool:
    """Whether one of the changes is so large that its stem is cut."""
    effects = tuple(one.effect for one in lines)
    return any(abs(effect) > _reach(effects) for effect in effects)


def _head(canvas: Canvas, middle: float, issued: str, seeds: str) -> None:
    """Say what the line is, and what the band around it is."""
    for y, words, semibold in ((8.0, issued, True), (18.0, seeds, False)):
        width = canvas.letters.width(words, SMALL, semibold=semibold)
        canvas.text(
            (min(max(middle - width / 2, 0.0), WIDTH - width), y),
            words,
            size=SMALL,
            semibold=semibold,
            colour=canvas.colours.ink if semibold else canvas.colours.muted,
        )


def _row(
    canvas: Canvas, change: ChangeLine, across: Scale, issued: float, y: float
) -> None:
    """Draw one change: its name, its stem with dot and noise, its words."""
    colours, letters = canvas.colours, canvas.letters
    canvas.text((0, y + 7.6), letters.fitted(change.name, SIZE, NAMES - 8))
    amount = issued + change.effect
    start, end, middle = across(issued), across(amount), y + 5.0
    is_cut = not across.holds(amount)
    canvas.line((start, middle), (end, middle), colours.accent, width=1.1)
    if is_cut:
        _cut(canvas, (start + end) / 2, middle)
    half = 0.0 if is_cut else change.half_width
    low, high = across(amount - half), across(amount + half)
    if half > 0:
        canvas.bar(low, middle - 1.5, high, middle + 1.5, colours.pale)
    canvas.dot((end, middle), colours.accent, radius=2.3)
    rises = end >= start
    canvas.text(
        (max(high, end + 2) + 3 if rises else min(low, end - 2) - 3, y + 7.4),
        change.words,
        size=SMALL,
        colour=colours.muted,
        align="start" if rises else "end",
    )


def _cut(canvas: Canvas, x: float, y: float) -> None:
    """Open a stem and close it with two slanted strokes: it is longer than drawn."""
    canvas.bar(x - 1.6, y - 1.2, x + 1.6, y + 1.2, "#ffffff")
    for at in (x - 1.6, x + 1.6):
        canvas.line((at - 1.2, y + 3.4), (at + 1.2, y - 3.4), canvas.colours.accent)


def seeds_chart(
    amounts: tuple[float, ...],
    *,
    issued: float,
    issued_words: str,
    unit: MoneyUnit,
    axis_title: str,
    look: Look,
) -> Drawing:
    """Draw each fresh seed as a stroke, and the issued contingency among them."""
    line = 32.0
    canvas = Canvas(WIDTH, line + 24.0, look)
    colours, letters = canvas.colours, canvas.letters
    across = scale_over((issued, *amounts), 6.0, WIDTH - 6.0)
    for amount in amounts:
        x = across(amount)
        canvas.line((x, line - 9), (x, line), colours.ink, width=0.7)
    x = across(issued)
    canvas.line((x, 12.0), (x, line), colours.accent, width=1.6)
    width = letters.width(issued_words, SMALL, semibold=True)
    canvas.text(
        (min(max(x - width / 2, 0.0), WIDTH - width), 8.5),
        issued_words,
        size=SMALL,
        semibold=True,
        colour=colours.accent,
    )
    money_axis(canvas, across, line, unit, axis_title)
    return canvas.drawing()
