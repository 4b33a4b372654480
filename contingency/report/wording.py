"""Figures and words as the report prints them.

Every number that reaches a page passes through one of these functions, so that
one amount is written one way in the whole report.  They round for the eye only;
amounts that must close are rounded by `contingency.setting.printed` before.
"""

from __future__ import annotations

import datetime as dt
import math
from collections.abc import Iterable
from dataclasses import dataclass

SPACE = "\u00a0"
"""Between a figure and its unit: no line ends there."""
MINUS = "\u2212"
DASH = "\u2013"
NOTHING = "\u2013"
"""Stands in a cell that has no figure."""

MONTHS = (
    "January",
    "February",
    "March",
    "April",
    "May",
    "June",
    "July",
    "August",
    "September",
    "October",
    "November",
    "December",
)


@dataclass(frozen=True, kw_only=True, slots=True)
class MoneyUnit:
    """The unit in which a table or a chart shows its amounts."""

    size: float
    """Money in one unit: 1000 for thousands."""
    digits: int
    """Decimals that are printed."""
    word: str
    """`thousand`, `million`, or empty for single units of the currency."""

    def caption(self, currency: str) -> str:
        """Return the unit as it stands in a caption: EUR thousand."""
        return f"{currency}{SPACE}{self.word}" if self.word else currency


def decimals(step: float) -> int:
    """Return how many decimals an amount has that is rounded to `step`.

    >>> decimals(1000), decimals(1), decimals(0.05)
    (0, 0, 2)
    """
    digits = 0
    while digits < 6 and abs(round(step, digits) - step) > 1e-9 * step:
        digits += 1
    return digits


def table_unit(step: float) -> MoneyUnit:
    """Return the unit that shows amounts rounded to `step` with the fewest figures.

    >>> [table_unit(step).word for step in (100, 1000, 50_000, 100_000, 1e6)]
    ['', 'thousand', 'thousand', 'million', 'million']
    """
    for size, word, least in ((1e6, "million", 1e5), (1e3, "thousand", 1e3)):
        if step >= least and decimals(step / size) <= 1:
            return MoneyUnit(size=size, digits=decimals(step / size), word=word)
    return MoneyUnit(size=1.0, digits=decimals(step), word="")


def chart_unit(largest: float, step: float) -> MoneyUnit:
    """Return the unit for a chart: 3 to 4 figures, but none finer than `step`.

    >>> chart_unit(141_784_000, 1000), chart_unit(9_400, 1).word
    (MoneyUnit(size=1000000.0, digits=1, word='million'), 'thousand')
    """
    for size, word in ((1e9, "billion"), (1e6, "million"), (1e3, "thousand")):
        if largest >= 2 * size:
            digits = 2 if largest < 20 * size else 1 if largest < 1000 * size else 0
            digits = min(digits, decimals(min(step / size, 1.0)))
            return MoneyUnit(size=size, digits=digits, word=word)
    return MoneyUnit(size=1.0, digits=decimals(min(step, 1.0)), word="")


def fixed(number: float, digits: int = 0) -> str:
    """Return `number` with comma thousands, `digits` decimals and a true minus.

    A figure that rounds to nought has no sign.

    >>> fixed(-1234567.8), fixed(-0.004, 2), fixed(2.5, 2)
    ('−1,234,568', '0.00', '2.50')
    """
    text = f"{abs(number):,.{digits}f}"
    is_nought = not text.strip("0.,")
    return MINUS + text if number < 0 and not is_nought else text


def signed(number: float, digits: int = 0) -> str:
    """Return `number` as `fixed` does, with a plus in front if it is positive.

    >>> signed(1200), signed(0.0), signed(-3.26, 1)
    ('+1,200', '0', '−3.3')
    """
    text = fixed(number, digits)
    return text if text.startswith(MINUS) or not text.strip("0.,") else f"+{text}"


def money(amount: float, *, step: float = 1.0) -> str:
    """Return an amount in full, with as many decimals as `step` has.

    >>> money(21384000), money(-12.5, step=0.01)
    ('21,384,000', '−12.50')
    """
    return fixed(amount, decimals(step))


def currency_amount(currency: str, amount: float, *, step: float = 1.0) -> str:
    """Return currency code and amount, joined by a space that does not break.

    >>> currency_amount("EUR", 21384000).replace(SPACE, " ")
    'EUR 21,384,000'
    """
    return f"{currency}{SPACE}{money(amount, step=step)}"


def in_unit(amount: float, unit: MoneyUnit) -> str:
    """Return an amount counted in `unit`.

    >>> in_unit(21_384_000, table_unit(1000))
    '21,384'
    """
    return fixed(amount / unit.size, unit.digits)


@dataclass(frozen=True, kw_only=True, slots=True)
class Amounts:
    """How one report writes its amounts."""

    currency: str
    step: float
    """Printed amounts are multiples of this."""

    @property
    def unit(self) -> MoneyUnit:
        """The unit of the tables."""
        return table_unit(self.step)

    @property
    def caption(self) -> str:
        """The unit of the tables as captions name it: EUR thousand."""
        return self.unit.caption(self.currency)

    def cell(self, amount: float) -> str:
        """Return an amount as a table shows it, to the nearest step."""
        return in_unit(self._rounded(amount), self.unit)

    def full(self, amount: float) -> str:
        """Return an amount as a sentence shows it: EUR 21,384,000."""
        return currency_amount(self.currency, self._rounded(amount), step=self.step)

    def _rounded(self, amount: float) -> float:
        return round(amount / self.step) * self.step


def percent(fraction: float, digits: int = 0) -> str:
    """Return a fraction in percent.

    >>> percent(0.178, 1).replace(SPACE, " "), percent(-0.02).replace(SPACE, " ")
    ('17.8 %', '−2 %')
    """
    return f"{fixed(100.0 * fraction, digits)}{SPACE}%"


def chance(fraction: float) -> str:
    """Return a simulated chance in percent, without a false nought or certainty.

    >>> [chance(p).replace(SPACE, " ") for p in (0.0, 0.0004, 0.118, 0.9996, 1.0)]
    ['below 0.1 %', 'below 0.1 %', '11.8 %', 'above 99.9 %', 'above 99.9 %']
    """
    if fraction < 0.001:
        return f"below 0.1{SPACE}%"
    if fraction > 0.999:
        return f"above 99.9{SPACE}%"
    return percent(fraction, 1)


def probability(fraction: float) -> str:
    """Return a probability as entered, in percent, with no digit that says nothing.

    >>> [probability(p).replace(SPACE, " ") for p in (0.3, 0.025, 0.0015)]
    ['30 %', '2.5 %', '0.15 %']
    """
    return f"{plain(100.0 * fraction)}{SPACE}%"


def plain(number: float) -> str:
    """Return a number as entered: at most six significant figures, none of them idle.

    >>> plain(0.2), plain(30.0), plain(-1234.5)
    ('0.2', '30', '−1,234.5')
    """
    if number == 0 or not math.isfinite(number):
        return fixed(number) if number == 0 else str(number)
    digits = max(0, 5 - math.floor(math.log10(abs(number))))
    text = fixed(number, digits)
    return text.rstrip("0").rstrip(".") if "." in text else text


def level(percentage: int) -> str:
    """Return a funding level by its name.

    >>> level(80), level(5)
    ('P80', 'P05')
    """
    return f"P{percentage:02d}"


def date(day: dt.date) -> str:
    """Return a date in words, whatever the machine's language.

    >>> date(dt.date(2026, 3, 31)).replace(SPACE, " ")
    '31 March 2026'
    """
    return f"{day.day}{SPACE}{MONTHS[day.month - 1]} {day.year}"


def month(day: dt.date) -> str:
    """Return month and year of a date.

    >>> month(dt.date(2026, 3, 31))
    'March 2026'
    """
    return f"{MONTHS[day.month - 1]} {day.year}"


def count(number: int) -> str:
    """Return a whole number with comma thousands.

    >>> count(65536)
    '65,536'
    """
    return f"{number:,}"


def plural(number: int, one: str, many: str = "") -> str:
    r"""Return a number with its noun.

    >>> plural(1, "package").replace(SPACE, " "), plural(0, "entry", "entries")
    ('1 package', '0\xa0entries')
    """
    return f"{count(number)}{SPACE}{one if number == 1 else many or one + 's'}"


def listed(words: Iterable[str]) -> str:
    """Return words in a row: commas, and `and` before the last.

    >>> listed(["a"]), listed(["a", "b"]), listed(["a", "b", "c"])
    ('a', 'a and b', 'a, b and c')
    """
    words = list(words)
    if len(words) < 2:
        return "".join(words)
    return f"{', '.join(words[:-1])} and {words[-1]}"


def clipped(text: str, length: int) -> str:
    """Return `text`, cut at a word with an ellipsis if it is longer than `length`.

    >>> clipped("Ground softer than logged", 15)
    'Ground softer…'
    """
    text = " ".join(text.split())
    if len(text) <= length:
        return text
    head = text[: length - 1]
    cut = head.rsplit(" ", 1)[0] if " " in head[length // 2 :] else head
    return cut.rstrip(" ,;:.") + "…"


def capital(text: str) -> str:
    """Return `text` with a capital in front.

    >>> capital("no systemic risks"), capital("")
    ('No systemic risks', '')
    """
    return text[:1].upper() + text[1:]


def sentence(text: str) -> str:
    """Return `text` with a capital in front and a full stop at its end.

    >>> sentence("agreed at the workshop")
    'Agreed at the workshop.'
    """
    text = text.strip()
    if not text:
        return ""
    text = text[0].upper() + text[1:]
    return text if text[-1] in ".!?…" else f"{text}."


def short_fingerprint(fingerprint: str) -> str:
    """Return the first twelve characters of a fingerprint, in groups of four.

    >>> short_fingerprint("0123456789abcdef").replace(SPACE, " ")
    '0123 4567 89ab'
    """
    return SPACE.join(fingerprint[i : i + 4] for i in (0, 4, 8))


def grouped_fingerprint(fingerprint: str) -> str:
    """Return a whole fingerprint in groups of eight, with spaces that may break.

    >>> grouped_fingerprint("0123456789abcdef")
    '01234567 89abcdef'
    """
    return " ".join(fingerprint[i : i + 8] for i in range(0, len(fingerprint), 8))
