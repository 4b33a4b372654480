"""A CSV file as rows whose cells are found by column name.

Commas or semicolons separate the cells; the header row decides.  Blank rows and
comment lines, which begin with `#` and a space, are passed over; line numbers are
those of the file.
"""

from __future__ import annotations

import csv
import io
import re
from collections import Counter
from collections.abc import Iterator
from dataclasses import dataclass, field

from contingency.estimate.fault_list import (
    FaultList,
    Place,
    Problem,
    listed,
    nearest,
    shown,
)
from contingency.estimate.faults import (
    ColumnMissing,
    ColumnTwice,
    ColumnUnknown,
    ColumnUnnamed,
    CommentUnclear,
    ControlCharacter,
    FileEmpty,
    RowRagged,
    SeparatorUnknown,
    TableSyntax,
)
from contingency.estimate.folder import EstimateFolder
from contingency.estimate.rows import Row

_UNPRINTABLE = re.compile("[\x00-\x08\x0b\x0c\x0e-\x1f\x7f-\x9f\ufffe\uffff]")
_LINE_END = re.compile("\r\n?")


@dataclass(frozen=True, kw_only=True, slots=True)
class Layout:
    """The columns of one table."""

    file: str
    noun: str
    """What a row is, in messages."""
    columns: tuple[str, ...]
    required: tuple[str, ...]
    """Columns that the header must name."""
    label: tuple[str, ...] = ("id", "name")
    """Columns that name a row in messages."""


@dataclass(slots=True)
class Table:
    """One table as it was read; cells are still text."""

    layout: Layout
    columns: tuple[str, ...]
    """What the names of the header row mean; blank where nothing is read."""
    unnamed: tuple[int, ...]
    """Positions of the blank names of the header row."""
    semicolons: bool
    rows: list[Row] = field(default_factory=list)
    ragged: list[Row] = field(default_factory=list)
    """Rows with too few or too many cells, for their ids only."""
    is_whole: bool = True
    """Whether every row has been found, so that an id not in it does not exist."""
    under_no_name: dict[int, tuple[Row, str]] = field(default_factory=dict)
    """The first cell that is filled under each blank name."""

    @property
    def ids(self) -> set[str]:
        """The ids of all rows, those included that have faults."""
        return {row.cell("id") for row in (*self.rows, *self.ragged)} - {""}

    @property
    def known_ids(self) -> frozenset[str] | None:
        """The ids that other rows may name; None where some may be hidden."""
        hidden = not self.is_whole or "id" not in self.columns
        return None if hidden else frozenset(self.ids)


def read_table(
    folder: EstimateFolder, layout: Layout, faults: FaultList
) -> Table | None:
    """Return a table of the folder; None where there is none that can be read."""
    text = folder.text(layout.file)
    if text is None:
        return None
    separator = _separator(text)
    records = _Records(text, separator, layout.file, faults)
    table: Table | None = None
    for line, record in records:
        if table is None:
            if len(record) == 1 and record[0] not in layout.columns:
                found = f"The header row is one cell, {shown(record[0])}."
                remedy = "Save the table as CSV with commas or semicolons."
                problem = Problem(SeparatorUnknown, found, remedy)
                faults.add(Place(layout.file, line), problem)
                return None
            table = _with_header(line, record, layout, separator, faults)
        else:
            _add_row(table, line, record, separator, faults)
    if table is None:
        if not records.refused:
            found = "The file holds comments only."
            remedy = "Add the header row and the rows."
            faults.add(Place(layout.file), Problem(FileEmpty, found, remedy))
        return None
    _check_unnamed(table)
    table.is_whole = not records.refused
    return table


def _add_row(
    table: Table, line: int, record: list[str], separator: str, faults: FaultList
) -> None:
    """Add a record as a row, or note that it does not fit the header row."""
    row = Row(
        file=table.layout.file,
        noun=table.layout.noun,
        line=line,
        cells=dict(zip(table.columns, record, strict=False)),
        label_columns=table.layout.label,
        semicolons=table.semicolons,
        faults=faults,
    )
    width = len(table.columns)
    if len(record) != width:
        table.ragged.append(row)
        row.refuse("", _ragged(len(record), width, separator))
        return
    table.rows.append(row)
    _check_characters(row)
    for position in table.unnamed:
        if record[position]:
            table.under_no_name.setdefault(position, (row, record[position]))


class _Records:
    """The records of a table with the physical line on which each one starts."""

    def __init__(self, text: str, separator: str, file: str, faults: FaultList) -> None:
        self._text = io.StringIO(text, newline="")
        self._separator = separator
        self._file = file
        self._faults = faults
        self._number = 0
        self._start = 0
        self._between_records = True
        self.refused = False
        """Whether any record had a problem."""

    def __iter__(self) -> Iterator[tuple[int, list[str]]]:
        """Yield (line, stripped cells) of every record that is not blank."""
        reader = csv.reader(self._lines(), delimiter=self._separator, strict=True)
        while True:
            self._between_records = True
            try:
                record = next(reader)
            except StopIteration:
                return
            except csv.Error as error:
                self._refuse(_bad_quotes(error))
                return
            cells = [_LINE_END.sub("\n", cell).strip() for cell in record]
            if any(cells) and not _is_quoted_comment(cells):
                yield self._start, cells

    def _lines(self) -> Iterator[str]:
        """Yield the physical lines, without the comments between records."""
        for line in self._text:
            self._number += 1
            if self._between_records:
                self._start = self._number
                if line.startswith("#"):
                    if line.rstrip() != "#" and line[1] not in " \t":
                        self._refuse(_unclear_comment(line))
                    continue
                self._between_records = False
            yield line

    def _refuse(self, problem: Problem) -> None:
        """Note a problem of the record at hand."""
        self.refused = True
        self._faults.add(Place(self._file, self._start), problem)


def _separator(text: str) -> str:
    """Return the separator of the header row."""
    for line in io.StringIO(text, newline=""):
        if line.strip() and not line.startswith(("#", '"# ')):
            return ";" if line.count(";") > line.count(",") else ","
    return ","


def _with_header(
    line: int, cells: list[str], layout: Layout, separator: str, faults: FaultList
) -> Table:
    """Return a table without rows whose columns are those of the header row."""
    columns: list[str] = []
    counts = Counter(cells)
    for order, name in enumerate(cells):
        part = f"column {name}" if name.isprintable() else f"column {shown(name)}"
        place = Place(layout.file, line, part, order)
        meant = name
        if name and name not in layout.columns:
            # Its cells are still checked as those of the column that was meant.
            meant = nearest(name, set(layout.columns) - set(cells)) or name
            found = f"The table has no column {shown(name)}."
            remedy = f"Rename it to {meant}, if that is meant."
            if meant == name:
                remedy = f"The columns are {listed(layout.columns, 'and')}."
            faults.add(place, Problem(ColumnUnknown, found, remedy))
        elif name and name in columns:
            found = f"The column {name} stands {counts[name]} times in the header row."
            remedy = "Remove or rename all but one of them."
            faults.add(place, Problem(ColumnTwice, found, remedy))
            meant = ""
        columns.append(meant if meant not in columns else "")
    for name in layout.required:
        if name not in columns:
            found = f"The header row has no column {name}."
            remedy = "Add it; if another character separates the cells, use , or ;."
            place = Place(layout.file, line, f"column {name}", len(cells))
            faults.add(place, Problem(ColumnMissing, found, remedy))
    return Table(
        layout,
        tuple(columns),
        unnamed=tuple(i for i, name in enumerate(cells) if not name),
        semicolons=separator == ";",
    )


def _check_characters(row: Row) -> None:
    """Note the first character of each cell that cannot be printed."""
    if not _UNPRINTABLE.search("".join(row.cells.values())):
        return
    for column, cell in row.cells.items():
        match = _UNPRINTABLE.search(cell)
        if match:
            found = f"The character U+{ord(match[0]):04X} stands in the cell."
            remedy = "Delete it; retype the cell if the character does not show."
            row.refuse(column, Problem(ControlCharacter, found, remedy))


def _check_unnamed(table: Table) -> None:
    """Note what stands under a blank name, once for each column."""
    for position, (row, cell) in table.under_no_name.items():
        found = f"{shown(cell)} stands under a blank name, in column {position + 1}."
        remedy = "Name the column in the header row, or empty it."
        row.refuse("", Problem(ColumnUnnamed, found, remedy))


def _is_quoted_comment(cells: list[str]) -> bool:
    """Whether a spreadsheet has put a comment line into the first cell."""
    return cells[0].startswith("# ") and not any(cells[1:])


def _ragged(cells: int, width: int, separator: str) -> Problem:
    """Return the problem of a row that is too short or too long."""
    found = f"The row has {cells} cells; the header row has {width}."
    if cells < width:
        remedy = f"Add the separators ({separator}) of the cells that are blank."
    elif separator == ",":
        remedy = "Put cells with commas in quotes; write decimals with a point."
    else:
        remedy = "Put cells with semicolons in quotes."
    return Problem(RowRagged, found, remedy)


def _unclear_comment(line: str) -> Problem:
    """Return the problem of a line that is no clear comment."""
    remedy = "Write a space after #, or put the first cell in quotes if it is a row."
    return Problem(CommentUnclear, f"The line begins {shown(line[:20])}.", remedy)


def _bad_quotes(error: csv.Error) -> Problem:
    """Return the problem that the CSV reader met, in words of ours."""
    reason = str(error)
    if "field larger" in reason:
        found = "A cell goes on for more than a hundred thousand characters."
        remedy = "Close the quote that was left open, probably in this row."
    elif "unexpected end" in reason:
        found = "A quote is opened in this row and not closed to the end of the file."
        remedy = "Close it; a quote inside a quoted cell is written twice."
    else:
        found = f"The quotes of this row do not match ({reason})."
        remedy = "A quote inside a quoted cell is written twice."
    return Problem(TableSyntax, found, remedy)
