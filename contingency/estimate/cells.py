"""What one cell says: figures, chances, dates, words.

Each function returns the value, or the `Problem` that the cell has.  Nothing is
corrected: what can be read in two ways is refused with the way to write it.
"""

from __future__ import annotations

import datetime as dt
import re
from collections.abc import Iterable
from dataclasses import dataclass
from decimal import Decimal

from contingency.estimate.fault_list import Problem, listed, nearest, shown
from contingency.estimate.faults import (
    AmountUnclear,
    DecimalComma,
    DotThousands,
    EndsUnclear,
    FormulaInCell,
    LevelUnknown,
    ListUnclear,
    NotADate,
    NotANumber,
    NotFinite,
    NumberTooLarge,
    PercentUnwanted,
    ProbabilityOutOfRange,
    ShareOutOfRange,
    SignUnclear,
    WordUnknown,
)
from contingency.estimate.nouns import Ends

HUNDRED = Decimal(100)
LARGEST = Decimal(10) ** 18
"""Figures lie below this.  A choice of ours: a unit of money still shows in it."""

_PLAIN = re.compile(r"[+-]?(?:[0-9]+(?:\.[0-9]+)?|\.[0-9]+)")
_GROUPED = re.compile(
    r"[+-]?(?:[1-9][0-9]{0,2}(?:,[0-9]{3})+|[1-9][0-9]{0,2}(?:_[0-9]{3})+)"
    r"(?:\.[0-9]+)?"
)
_TWO_WAYS = re.compile(r"[+-]?[1-9][0-9]{0,2}[.,][0-9]{3}")
_DOTTED = re.compile(r"[+-]?[0-9]{1,3}(?:\.[0-9]{3}){2,}(?:,[0-9]*)?")
_DOTTED_COMMA = re.compile(r"[+-]?[0-9]{1,3}(?:\.[0-9]{3})+,[0-9]*")
_COMMA = re.compile(r"[+-]?[0-9 _]*,[0-9]*(?:[.,][0-9]*)*")
_EXPONENT = re.compile(r"[+-]?[0-9.]+[eE][+-]?[0-9]+")
_NO_NUMBER = re.compile(r"[+-]?(?:nan|inf|infinity|1\.#\w+|∞)", re.IGNORECASE)
_BROKEN_FORMULA = re.compile(r"#(?:REF!|DIV/0!|N/A|VALUE!|NAME\?|NULL!|NUM!)")
_DAY = re.compile(r"[0-9]{4}-[0-9]{2}-[0-9]{2}")
_LEVEL = re.compile(r"P(0?[1-9]|[1-9][0-9])")
_ENDS = re.compile(r"(P[0-9]{1,2})-(P[0-9]{1,2})")


@dataclass(frozen=True, slots=True)
class Figure:
    """One figure as it is written: an amount, or a percent of something."""

    value: Decimal
    is_percent: bool
    text: str


def read_figure(
    text: str, *, money: bool = True, signed: bool = False, semicolons: bool = False
) -> Figure | Problem:
    """Return the figure of a cell.

    `money` allows thousands separators, `signed` a plus sign; `semicolons` says
    that the table is separated by them, where 1.250 and 1,250 are unclear.
    """
    number = text.removesuffix("%").rstrip()
    is_percent = number != text.rstrip()
    grouped = money and not is_percent and _GROUPED.fullmatch(number) is not None
    if not grouped and not _PLAIN.fullmatch(number):
        return _unreadable(text, number)
    if number.startswith("+") and not signed:
        remedy = "Write the whole amount without a sign."
        if is_percent:
            whole = HUNDRED + Decimal(number)
            remedy = f"Write {whole}% if a rise by {number[1:]}% is meant."
        return Problem(SignUnclear, f"{shown(text)} begins with a plus sign.", remedy)
    if semicolons and money and not is_percent and _TWO_WAYS.fullmatch(number):
        units, rest = re.split("[.,]", number)
        remedy = f"Write {units}{rest}, or {units}.{rest}0 for the fraction."
        found = f"{shown(text)} stands in a table with semicolons."
        return Problem(AmountUnclear, found, remedy)
    value = Decimal(number.replace(",", "").replace("_", ""))
    if abs(value) >= LARGEST:
        remedy = "Check the figure; write all amounts in single units of the currency."
        return Problem(NumberTooLarge, f"{shown(text)} is too large.", remedy)
    return Figure(value, is_percent, text)


def _unreadable(text: str, number: str) -> Problem:
    """Return why a cell is no figure, and how to write it."""
    if text.startswith(("=", "@", "+=")) or _BROKEN_FORMULA.match(text):
        remedy = "Paste the values instead of the formulas."
        return Problem(FormulaInCell, f"{shown(text)} is a formula.", remedy)
    if _NO_NUMBER.fullmatch(number):
        remedy = "Write the figure, or leave the cell blank if it may be blank."
        return Problem(NotFinite, f"{shown(text)} is no finite number.", remedy)
    if _DOTTED.fullmatch(number) or _DOTTED_COMMA.fullmatch(number):
        digits = number.replace(".", "").replace(",", ".").rstrip(".")
        if _DOTTED.fullmatch(number):
            found = f"{shown(text)} has dots between thousands."
            return Problem(DotThousands, found, f"Write {digits}.")
        found = f"{shown(text)} has a decimal comma."
        return Problem(DecimalComma, found, f"Write {digits}.")
    if _COMMA.fullmatch(number):
        found = f"{shown(text)} has a decimal comma, or commas in odd places."
        remedy = "Write the decimal sign as a point, and thousands without commas."
        if re.fullmatch(r"[+-]?[0-9]+,[0-9]+", number):
            found = f"{shown(text)} has a decimal comma."
            remedy = f"Write {text.replace(',', '.')}."
        return Problem(DecimalComma, found, remedy)
    remedy = "Write digits only, without unit, currency sign or spaces."
    if _EXPONENT.fullmatch(number):
        remedy = (
            "Write all digits; a spreadsheet that shows powers of ten has cut some off."
        )
    if text.startswith("("):
        remedy = "Write a negative figure with a minus sign, if one is meant at all."
    return Problem(NotANumber, f"{shown(text)} is no figure.", remedy)


def read_number(text: str, *, signed: bool = False) -> Decimal | Problem:
    """Return a plain number: a load, a correlation, a frequency."""
    figure = read_figure(text, money=False, signed=signed)
    if isinstance(figure, Problem):
        return figure
    if figure.is_percent:
        remedy = f"Write {figure.value / HUNDRED}."
        return Problem(PercentUnwanted, f"{shown(text)} is a percent.", remedy)
    return figure.value


def read_probability(text: str) -> Decimal | Problem:
    """Return a probability, 0 to 1, from `30%` or `0.3`."""
    figure = read_figure(text, money=False)
    if isinstance(figure, Problem):
        return figure
    value = figure.value / HUNDRED if figure.is_percent else figure.value
    if 0 <= value <= 1:
        return value
    remedy = "Write a probability from 0 to 1."
    if not figure.is_percent and 1 < value <= HUNDRED:
        remedy = f"Write {figure.value}% or {figure.value / HUNDRED}, if that is meant."
    return Problem(ProbabilityOutOfRange, f"{shown(text)} is no probability.", remedy)


def read_share(text: str) -> Decimal | Problem:
    """Return a share, 0 to 1, from a percent."""
    figure = read_figure(text, money=False)
    if isinstance(figure, Problem):
        return figure
    if not figure.is_percent:
        found = f"{shown(text)} has no percent sign."
        hint = figure.value * HUNDRED if figure.value <= 1 else figure.value
        return Problem(
            ShareOutOfRange, found, f"Write {hint.normalize():f}%, if that is meant."
        )
    if not 0 <= figure.value <= HUNDRED:
        found = f"{shown(text)} lies outside 0% to 100%."
        return Problem(ShareOutOfRange, found, "Correct the share.")
    return figure.value / HUNDRED


def read_day(text: str) -> dt.date | Problem:
    """Return a day from `2026-03-31`."""
    remedy = "Write year-month-day, as in 2026-03-31."
    if not _DAY.fullmatch(text):
        return Problem(NotADate, f"{shown(text)} is no date of that form.", remedy)
    try:
        return dt.date.fromisoformat(text)
    except ValueError:
        found = f"{shown(text)} is not in the calendar."
        return Problem(NotADate, found, "Correct the month or the day.")


def read_word(text: str, words: Iterable[str]) -> str | Problem:
    """Return the word of the cell if it is one of `words`."""
    words = list(words)
    if text in words:
        return text
    remedy = f"Write {listed(words)}."
    meant = nearest(text, words)
    if meant:
        remedy = f"Write {meant}, if that is meant; the words are "
        remedy += f"{listed(words, 'and')}."
    return Problem(WordUnknown, f"{shown(text)} is no word of this column.", remedy)


def read_level(text: str) -> int | Problem:
    """Return whole percent from `P80`."""
    match = _LEVEL.fullmatch(text)
    if match:
        return int(match[1])
    remedy = "Write a level such as P80."
    digits = re.fullmatch(r"[pP]? ?([1-9][0-9]?)(?: ?%)?", text)
    if digits:
        remedy = f"Write P{digits[1]}."
    return Problem(LevelUnknown, f"{shown(text)} is no level.", remedy)


def read_ends(text: str) -> Ends | Problem:
    """Return what low and high mean, from `limits` or `P10-P90`."""
    if text == "limits":
        return Ends()
    remedy = "Write limits, or two percentiles with a hyphen such as P10-P90."
    match = _ENDS.fullmatch(text)
    low, high = (read_level(match[i]) if match else None for i in (1, 2))
    if not isinstance(low, int) or not isinstance(high, int):
        found = f"{shown(text)} does not say what low and high mean."
        return Problem(EndsUnclear, found, remedy)
    if low >= high:
        return Problem(EndsUnclear, f"{shown(text)} does not rise.", remedy)
    return Ends(low_percent=low, high_percent=high)


def read_entries(text: str) -> list[str] | Problem:
    """Return the entries of a list such as `P100; P200`, without the last blank."""
    entries = [entry.strip() for entry in text.split(";")]
    if entries[-1] == "":
        entries.pop()
    if all(entries):
        return entries
    found = f"{shown(text)} has a blank entry."
    return Problem(ListUnclear, found, "Remove the semicolon that is too many.")


def read_pairs(text: str, sign: str, example: str) -> list[tuple[str, str]] | Problem:
    """Return the pairs of a list such as `P100:60%; P200:40%`, `sign` between each."""
    entries = read_entries(text)
    if isinstance(entries, Problem):
        return entries
    pairs = []
    for entry in entries:
        key, found_sign, value = (part.strip() for part in entry.partition(sign))
        if not (key and found_sign and value):
            found = f"The entry {shown(entry)} is not of the form a{sign}b."
            return Problem(ListUnclear, found, f"Write it as in {example}.")
        pairs.append((key, value))
    return pairs
