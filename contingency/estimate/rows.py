"""One row of a table: its cells by column name, and where its faults are."""

from __future__ import annotations

import datetime as dt
from collections.abc import Iterable
from dataclasses import dataclass
from decimal import Decimal
from typing import TypeVar

from contingency.estimate.cells import (
    Figure,
    read_day,
    read_entries,
    read_figure,
    read_number,
    read_probability,
    read_share,
    read_word,
)
from contingency.estimate.fault_list import FaultList, Place, Problem, listed, shown
from contingency.estimate.faults import (
    AmountNegative,
    CellBlank,
    DatesReversed,
    FrequencyTooLarge,
    IdReserved,
    IdTwice,
    IdUnusable,
    WindowTooFar,
)
from contingency.estimate.nouns import PROJECT_WIDE

Value = TypeVar("Value")

MOST_OCCURRENCES = 1_000
"""Occurrences of one event that may be expected.  A choice of ours: a Poisson number
with that mean varies by some 3 % (1/√1000), less than what a range says anyway."""

FIRST_YEAR, LAST_YEAR = 1900, 2200
"""Years of a window.  A choice of ours: a slip of the pen is found before it makes
prices grow for centuries."""

RESERVED = (PROJECT_WIDE, "all")
"""Words that stand for several packages and can be the id of none."""


@dataclass(frozen=True, kw_only=True, slots=True)
class Row:
    """One row; its methods return a cell's value, or None and note the fault."""

    file: str
    noun: str
    line: int
    cells: dict[str, str]
    """Stripped text by column name; a column that is not in the file is absent."""
    label_columns: tuple[str, ...]
    semicolons: bool
    faults: FaultList

    @property
    def label(self) -> str:
        """What the row is called in messages: package P310 Deck."""
        names = [self.cell(column) for column in self.label_columns]
        words = " ".join(" ".join(names).split())
        return f"{self.noun} {shown(words)[1:-1]}" if words else self.noun

    def cell(self, column: str) -> str:
        """Return the text of a cell; blank where the file has no such column."""
        return self.cells.get(column, "")

    def place(self, column: str = "") -> Place:
        """Return the place of a cell, or of the row as a whole."""
        order = list(self.cells).index(column) if column in self.cells else 999
        part = f"{self.label}, {column}" if column else self.label
        return Place(self.file, self.line, part, order if column else -1)

    def refuse(self, column: str, problem: Problem) -> None:
        """Note a problem of a cell, or of the row where `column` is empty."""
        self.faults.add(self.place(column), problem)

    def accept(self, column: str, value: Value | Problem) -> Value | None:
        """Return the value; None where it is a problem, which is noted."""
        if isinstance(value, Problem):
            self.refuse(column, value)
            return None
        return value

    def text(self, column: str, *, needed: str = "") -> str:
        """Return a text; `needed` says what it is for where it must not be blank."""
        text = self.cell(column)
        if not text and needed and column in self.cells:
            found = f"The cell {column} is blank."
            self.refuse(column, Problem(CellBlank, found, f"Write {needed}."))
        return text

    def figure(self, column: str, *, signed: bool = False) -> Figure | None:
        """Return an amount or a percent; None also where the cell is blank."""
        text = self.cell(column)
        if not text:
            return None
        figure = read_figure(text, signed=signed, semicolons=self.semicolons)
        return self.accept(column, figure)

    def number(self, column: str) -> Decimal | None:
        """Return a plain number of any sign."""
        text = self.cell(column)
        return self.accept(column, read_number(text, signed=True)) if text else None

    def frequency(self, column: str) -> float | None:
        """Return an expected number of occurrences, 0 to 1,000."""
        value = self.number(column)
        if value is not None and value < 0:
            found = f"{shown(self.cell(column))} is negative."
            rule = "A number of occurrences is not negative."
            problem = Problem(AmountNegative, found, "Correct the number.", rule)
            self.refuse(column, problem)
            return None
        if value is not None and value > MOST_OCCURRENCES:
            found = f"{shown(self.cell(column))} occurrences are expected."
            remedy = (
                "Put the cost into a package's base, and its spread into its range."
            )
            self.refuse(column, Problem(FrequencyTooLarge, found, remedy))
            return None
        return None if value is None else float(value)

    def probability(self, column: str) -> float | None:
        """Return a probability, 0 to 1."""
        text = self.cell(column)
        value = self.accept(column, read_probability(text)) if text else None
        return None if value is None else float(value)

    def share(self, column: str) -> float | None:
        """Return a share, 0 to 1."""
        text = self.cell(column)
        value = self.accept(column, read_share(text)) if text else None
        return None if value is None else float(value)

    def day(self, column: str) -> dt.date | None:
        """Return a date."""
        text = self.cell(column)
        return self.accept(column, read_day(text)) if text else None

    def window(self, start: str, finish: str) -> tuple[dt.date | None, dt.date | None]:
        """Return two dates, the second not before the first."""
        first, last = self.day(start), self.day(finish)
        if first and last and last < first:
            found = f"{finish} {last} lies before {start} {first}."
            problem = Problem(DatesReversed, found, "Swap or correct the dates.")
            self.refuse(finish, problem)
        for column, day in ((start, first), (finish, last)):
            if day and not FIRST_YEAR <= day.year <= LAST_YEAR:
                found = f"{column} is {day}."
                remedy = "Correct the year."
                self.refuse(column, Problem(WindowTooFar, found, remedy))
        return first, last

    def word(self, column: str, words: Iterable[str], default: str = "") -> str:
        """Return one of `words`, `default` where the cell is blank."""
        text = self.cell(column)
        if not text:
            return default
        return self.accept(column, read_word(text, words)) or default

    def yes(self, column: str) -> bool | None:
        """Return the answer of a yes or no column; None where it is blank."""
        word = self.word(column, ("yes", "no"))
        return word == "yes" if word else None

    def entries(self, column: str) -> list[str] | None:
        """Return the entries of a list; None where there are none."""
        text = self.cell(column)
        return self.accept(column, read_entries(text)) if text else None

    def id(self, taken: dict[str, int], *, reserved: Iterable[str] = ()) -> str:
        """Return the row's id and enter it in `taken` (id -> line)."""
        text = self.text("id", needed="an id that this row keeps in every revision")
        if not text:
            return ""
        if any(c in text for c in ";:") or not text.isprintable():
            found = f"The id {shown(text)} holds {_offending(text)}."
            remedy = "Use letters, digits, points and hyphens."
            self.refuse("id", Problem(IdUnusable, found, remedy))
        elif text in reserved:
            found = f"The id is {shown(text)}."
            remedy = f"Choose an id other than {listed(reserved)}."
            self.refuse("id", Problem(IdReserved, found, remedy))
        elif text in taken:
            found = f"The id {shown(text)} is also on line {taken[text]}."
            remedy = "Give one of the two another id."
            self.refuse("id", Problem(IdTwice, found, remedy))
        taken.setdefault(text, self.line)
        return text


def _offending(text: str) -> str:
    """Return which character keeps a text from being an id."""
    for character, name in ((";", "a semicolon"), (":", "a colon")):
        if character in text:
            return name
    return "a line break or a character that does not show"
