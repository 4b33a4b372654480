"""Scales and round tick marks of the charts."""

from __future__ import annotations

import math
from dataclasses import dataclass

from contingency.report.canvas import Canvas
from contingency.report.wording import MoneyUnit, fixed

SMALL = 7.2
"""Size of figures along an axis, points."""


@dataclass(frozen=True, kw_only=True, slots=True)
class Scale:
    """A straight scale from money to points."""

    low: float
    high: float
    left: float
    right: float

    def __call__(self, amount: float) -> float:
        """Return where an amount lies, held to the ends of the scale."""
        held = min(max(amount, self.low), self.high)
        part = (held - self.low) / (self.high - self.low)
        return self.left + part * (self.right - self.left)

    def holds(self, amount: float) -> bool:
        """Whether an amount lies within the ends."""
        return self.low <= amount <= self.high


def scale_over(
    amounts: tuple[float, ...], left: float, right: float, *, air: float = 0.03
) -> Scale:
    """Return a scale that holds all `amounts` with a little air on either side."""
    low, high = min(amounts), max(amounts)
    if high - low <= 1e-12 * max(abs(low), abs(high), 1e-300):
        room = 0.02 * max(abs(low), abs(high)) or 1.0
        low, high = low - room, high + room
    more = air * (high - low)
    return Scale(low=low - more, high=high + more, left=left, right=right)


def round_step(span: float, most: int) -> float:
    """Return the smallest step of 1, 2, 2.5 or 5 that gives at most `most` ticks.

    >>> round_step(43.0, 6), round_step(9e6, 5)
    (10.0, 2000000.0)
    """
    rough = span / max(most, 1)
    power = 10.0 ** math.floor(math.log10(rough))
    for factor in (1.0, 2.0, 2.5, 5.0):
        if rough <= factor * power * (1 + 1e-9):
            return factor * power
    return 10.0 * power


def ticks(low: float, high: float, most: int) -> tuple[list[float], float]:
    """Return the round amounts between `low` and `high`, and their step."""
    step = round_step(high - low, most)
    first = math.ceil(low / step - 1e-9)
    last = math.floor(high / step + 1e-9)
    return [i * step for i in range(first, last + 1)], step


def money_axis(
    canvas: Canvas, scale: Scale, y: float, unit: MoneyUnit, title: str
) -> None:
    """Draw a money axis at height `y`: line, round figures below it and its title."""
    colours = canvas.colours
    canvas.line((scale.left, y), (scale.right, y), colours.rule)
    room = scale.right - scale.left
    most = 9
    while True:
        amounts, step = ticks(scale.low, scale.high, most)
        digits = _digits(step / unit.size)
        words = [fixed(amount / unit.size, digits) for amount in amounts]
        widest = max((canvas.letters.width(word, SMALL) for word in words), default=0)
        if len(amounts) <= 1 or widest + 8 < room * step / (scale.high - scale.low):
            break
        most -= 1
        if most < 1:
            amounts, words = amounts[:1], words[:1]
            break
    for amount, word in zip(amounts, words, strict=True):
        x = scale(amount)
        canvas.line((x, y), (x, y + 2.5), colours.rule)
        width = canvas.letters.width(word, SMALL)
        left = min(max(x - width / 2, 0.0), canvas.width - width)
        canvas.text((left, y + 10), word, size=SMALL, colour=colours.muted)
    canvas.text(
        (scale.right, y + 20), title, size=SMALL, colour=colours.muted, align="end"
    )


def _digits(step: float) -> int:
    """Return the decimals that a figure on an axis with this step needs."""
    digits = 0
    while digits < 6 and abs(step * 10**digits - round(step * 10**digits)) > 1e-6:
        digits += 1
    return digits
