"""Figures and lists as they stand in the message of a finding."""

from __future__ import annotations

import math
import re
from collections.abc import Iterable, Sequence

SHOWN = 6
"""How many ids a message names before it says how many more there are."""


def money(amount: float, currency: str) -> str:
    """Return an amount to three significant figures: `EUR 12.4 M`.

    >>> money(12_412_000, "EUR"), money(-31_480, "NOK"), money(0.0, "EUR")
    ('EUR 12.4 M', 'NOK -31,500', 'EUR 0')
    """
    if abs(amount) >= 999_500:
        return f"{currency} {_significant(amount / 1e6)} M"
    return f"{currency} {_significant(amount)}"


def percent(fraction: float, digits: int = 0) -> str:
    """Return a fraction as a percentage: `62 %`.

    >>> percent(0.6249), percent(0.0004, 2)
    ('62 %', '0.04 %')
    """
    return f"{100 * fraction:.{digits}f} %"


def listed(names: Iterable[str]) -> str:
    """Return names with commas, at most `SHOWN` of them.

    >>> listed(["P1", "P2"]), listed(str(i) for i in range(9))
    ('P1, P2', '0, 1, 2, 3, 4, 5 and 3 more')
    """
    names = list(names)
    shown = ", ".join(names[:SHOWN])
    more = len(names) - SHOWN
    return f"{shown} and {more} more" if more > 0 else shown


def counted(count: int, one: str, many: str = "") -> str:
    """Return a count with its noun: `1 package`, `3 packages`.

    >>> counted(1, "package"), counted(3, "entry", "entries")
    ('1 package', '3 entries')
    """
    return f"{count:,} {one if count == 1 else many or one + 's'}"


def words_found(text: str, words: Sequence[str]) -> list[str]:
    """Return those of `words` that stand in `text` as whole words, any case.

    A hyphen joins words: `risk-free` does not hold `risk`.

    >>> words_found("Design development, marginal", ["margin", "design development"])
    ['design development']
    """
    return [
        word
        for word in words
        if re.search(rf"(?<![\w-]){re.escape(word)}(?![\w-])", text, re.IGNORECASE)
    ]


def _significant(number: float) -> str:
    if not math.isfinite(number):
        return "not a number"
    if number == 0:
        return "0"
    rounded = float(f"{number:.3g}")
    decimals = 2 - math.floor(math.log10(abs(rounded)))
    return f"{rounded:,.{max(decimals, 0)}f}"
