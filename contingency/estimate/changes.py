"""changes.csv: why this revision differs from the previous one, line by line.

Ids of rows that are gone belong to the previous revision, which is not read here;
whether a line explains anything is seen when the two are compared.
"""

from __future__ import annotations

from collections.abc import Mapping
from typing import Any, Literal, cast

from contingency.estimate.fault_list import Problem, instead, listed, shown
from contingency.estimate.faults import (
    AmountNegative,
    CellBlank,
    CellWithoutMeaning,
    IdUnknown,
    PercentUnwanted,
    RestTwice,
    SuccessionUnclear,
    WordUnknown,
)
from contingency.estimate.nouns import Change
from contingency.estimate.rows import Row
from contingency.estimate.tables import Layout, Table

LAYOUT = Layout(
    file="changes.csv",
    noun="change",
    columns=(
        "file",
        "id",
        "before",
        "into",
        "family",
        "amount",
        "factor",
        "event",
        "reason",
        "by",
        "on",
    ),
    required=("reason", "by"),
    label=("id", "into"),
)

File = Literal["packages", "systemic", "events", "causes", "estimate"]
FILES: dict[str, str] = {
    "packages": "packages.csv",
    "systemic": "systemic.csv",
    "events": "events.csv",
    "causes": "causes.csv",
    "estimate": "estimate.toml",
}
"""The words of the column `file` and what they stand for."""

BASE_FAMILIES = (
    "approved-scope",
    "unapproved-scope",
    "correction",
    "actuals",
    "definition",
    "treatment",
    "occurred",
)
"""Why the base of a package moved."""
PRICES = "prices"
"""The family of lines that carry a factor between two price dates."""
TREATMENT = "treatment"
"""The one family that an event may have: treatment, not a new opinion, moved it."""


def read_changes(
    table: Table, tables: Mapping[str, Table | None]
) -> tuple[Change, ...]:
    """Return the changes that could be read, in file order.

    `tables` are the other tables of the folder by file name.
    """
    read = [_Line(row, tables).change() for row in table.rows]
    changes = tuple(change for change in read if change is not None)
    _refuse_second_rests(table, changes)
    return changes


class _Line:
    """One row while it is read."""

    def __init__(self, row: Row, tables: Mapping[str, Table | None]) -> None:
        self.row = row
        self.tables = tables
        self.file = row.word("file", FILES, "packages")
        self.family = row.word("family", (*BASE_FAMILIES, PRICES))

    def change(self) -> Change | None:
        """Return the change that the row says; None where a fault keeps it back."""
        row = self.row
        before, into = (tuple(row.entries(c) or ()) for c in ("before", "into"))
        identity = row.text("id")
        self._check_target(identity, before, into)
        self._check_family()
        amount, factor = self._amount(), self._factor()
        event = row.text("event")
        if event and event not in self._ids("events"):
            found = f"events.csv has no event {shown(event)}."
            remedy = instead(event, self._ids("events"), "Write the id of one event.")
            row.refuse("event", Problem(IdUnknown, found, remedy))
        reason = row.text("reason", needed="why it changed, in a sentence")
        by = row.text("by", needed="who decided or found it")
        on = row.day("on")
        if not reason or not by:
            return None
        fields: dict[str, Any] = {"amount": amount, "factor": factor, "on": on}
        return Change(
            file=cast("File", self.file),
            id=identity,
            before=before,
            into=into,
            family=self.family,
            event=event,
            reason=reason,
            by=by,
            line=row.line,
            **fields,
        )

    def _ids(self, file: str) -> set[str]:
        table = self.tables.get(FILES[file])
        return table.ids if table else set()

    def _check_target(
        self, identity: str, before: tuple[str, ...], into: tuple[str, ...]
    ) -> None:
        """Note a line that names no row, or two kinds of row at once."""
        if before or into:
            self._check_succession(identity, before, into)
        elif not identity and self.file != "estimate" and self.family != PRICES:
            found = "The cells id, before and into are blank."
            remedy = "Write the id of the row that changed."
            self.row.refuse("id", Problem(CellBlank, found, remedy))

    def _check_succession(
        self, identity: str, before: tuple[str, ...], into: tuple[str, ...]
    ) -> None:
        """Note a renaming, split or merger that cannot be one."""
        row, present = self.row, self._ids(self.file)
        if identity:
            found = f"id {shown(identity)} stands beside before and into."
            remedy = "Leave id blank here; give the row's own change a line of its own."
            row.refuse("id", Problem(CellWithoutMeaning, found, remedy))
        renamed = len(before) == len(into) == 1
        divides = self.file in {"packages", "events"}
        split_or_merged = {1} < {len(before), len(into)} and 0 not in {
            len(before),
            len(into),
        }
        if not renamed and not (divides and split_or_merged):
            found = f"{len(before)} before and {len(into)} into, in {self.file}."
            row.refuse("into", Problem(SuccessionUnclear, found, _HOW_TO_SUCCEED))
        for name in into:
            if name not in present:
                found = f"{FILES[self.file]} has no {shown(name)}."
                remedy = instead(name, present, "Write ids of this revision.")
                row.refuse("into", Problem(IdUnknown, found, remedy))
        kept = [name for name in before if name in present]
        if kept:
            found = f"{listed(kept, 'and')} still stands in {FILES[self.file]}."
            remedy = "An id that stays names the same thing; leave it out of before."
            row.refuse("before", Problem(SuccessionUnclear, found, remedy))

    def _check_family(self) -> None:
        """Note a family that the file cannot have."""
        allowed: tuple[str, ...] = {
            "packages": (*BASE_FAMILIES, PRICES),
            "events": (TREATMENT,),
            "estimate": (PRICES,),
        }.get(self.file, ())
        if self.family and self.family not in allowed:
            found = f"{shown(self.family)} is no family of {FILES[self.file]}."
            remedy = "Leave it blank; what changed in the row says its family."
            if allowed:
                remedy = f"Write {listed(allowed)}, or leave it blank."
            self.row.refuse("family", Problem(WordUnknown, found, remedy))

    def _amount(self) -> float | None:
        """Return the part of the base change that the line explains."""
        figure = self.row.figure("amount", signed=True)
        if figure is None:
            return None
        if figure.is_percent:
            found = f"{shown(self.row.cell('amount'))} is a percent."
            problem = Problem(PercentUnwanted, found, "Write the amount.")
            self.row.refuse("amount", problem)
            return None
        if self.file != "packages" or self.family not in BASE_FAMILIES:
            found = "An amount stands in a line without a family of the base."
            remedy = f"Write {listed(BASE_FAMILIES)} under family, or no amount."
            self.row.refuse("amount", Problem(CellWithoutMeaning, found, remedy))
        return float(figure.value)

    def _factor(self) -> float | None:
        """Return the factor between the two price dates."""
        row = self.row
        text = row.cell("factor")
        if self.family != PRICES:
            if text:
                found = f"A factor stands in a line of family {shown(self.family)}."
                remedy = f"Write {PRICES} under family, or no factor."
                row.refuse("factor", Problem(CellWithoutMeaning, found, remedy))
            return None
        value = row.number("factor")
        if not text:
            found = "The line has no factor between the two price dates."
            remedy = "Write it, as in 1.034 for a rise by 3.4 %."
            row.refuse("factor", Problem(CellBlank, found, remedy))
        elif value is not None and value <= 0:
            found = f"The factor is {shown(text)}."
            remedy = "Write a factor above nought, as in 1.034."
            row.refuse("factor", Problem(AmountNegative, found, remedy))
        return None if value is None else float(value)


_HOW_TO_SUCCEED = (
    "Name one before and one into for a new id, one and several for a split, several "
    "and one for a merger; systemic risks and causes can only take a new id."
)


def _refuse_second_rests(table: Table, changes: tuple[Change, ...]) -> None:
    """Note a package with two lines that each explain all that is left."""
    rows = {row.line: row for row in table.rows}
    taken: dict[tuple[str, str], int] = {}
    for change in changes:
        if change.file != "packages" or not change.id or not change.family:
            continue
        if change.amount is not None:
            continue
        kind = "prices" if change.family == PRICES else "base"
        line = taken.setdefault((change.id, kind), change.line)
        if line != change.line:
            found = f"Line {line} has no amount for {change.id} either."
            remedy = "Write the amount in all lines of one package but one."
            rows[change.line].refuse("amount", Problem(RestTwice, found, remedy))
