"""Tables in plain text, as the command line prints them."""

from __future__ import annotations

import math
import textwrap
from collections.abc import Callable, Sequence

DIGITS = 12
"""Significant digits of a figure in a result object, as in results.json."""


def figure(value: float) -> float:
    """Return a figure to twelve significant digits."""
    return float(f"{value:.{DIGITS}g}") or 0.0


Rounder = Callable[[float], float]


def rounder(largest: float) -> Rounder:
    """Return what rounds money to what twelve digits of the largest amount leave.

    A step is the difference of two large figures: its own twelve digits would hold
    some that depend on the order in which a processor adds.

    >>> rounder(260_964_818.7)(596_213.123456)
    596213.123
    """
    digits = DIGITS - 1 - math.floor(math.log10(max(abs(largest), 1.0)))
    return lambda value: round(value, max(digits, 0)) + 0.0


def amount(value: float, step: float = 1.0) -> str:
    """Return money with commas between thousands, and decimals if `step` has any.

    >>> amount(-1234567.4), amount(0.25, 0.05), amount(-0.2)
    ('-1,234,567', '0.25', '0')
    """
    digits = 0
    while digits < 6 and abs(round(step, digits) - step) > 1e-9 * step:
        digits += 1
    text = f"{value:,.{digits}f}"
    return text.lstrip("-") if not text.strip("-0.,") else text


def about(value: float) -> str:
    """Return an amount to two figures, for noise that is not known any better.

    >>> about(271067.4), about(5926.0)
    ('270,000', '5,900')
    """
    return amount(float(f"{value:.2g}"))


def wrapped(text: str) -> list[str]:
    """Return a sentence as lines of at most 88 characters."""
    return textwrap.wrap(text, 88) or [""]


def table(
    head: Sequence[str], rows: Sequence[Sequence[str]], *, left: int = 1
) -> list[str]:
    """Return the lines of a table.

    The first `left` columns begin at the left, and so does a last one without a head,
    which holds words; all others end at the right.

    >>> for line in table(["step", "EUR", ""], [["Ranges", "-1,200", "noise"]]):
    ...     print(line)
    step       EUR
    Ranges  -1,200  noise
    """
    lines = [head, *rows]
    widths = [max(len(row[i]) for row in lines) for i in range(len(head))]
    words = not head[-1]
    printed = []
    for row in lines:
        cells = [
            cell.ljust(width)
            if i < left or (words and i == len(head) - 1)
            else cell.rjust(width)
            for i, (cell, width) in enumerate(zip(row, widths, strict=True))
        ]
        printed.append("  ".join(cells).rstrip())
    return printed
