"""causes.csv and correlations.csv: what makes ranges move together."""

from __future__ import annotations

from contingency.estimate.cells import read_number
from contingency.estimate.evidence import carry_named_files
from contingency.estimate.fault_list import FaultList, Place, Problem, instead, shown
from contingency.estimate.faults import (
    IdUnknown,
    LoadOutOfRange,
    LoadsAndCorrelations,
    PairTwice,
    SelfReference,
)
from contingency.estimate.folder import EstimateFolder
from contingency.estimate.nouns import CommonCause, PairCorrelation
from contingency.estimate.packages import Packages
from contingency.estimate.rows import Row
from contingency.estimate.tables import Layout, Table

CAUSES = Layout(
    file="causes.csv",
    noun="cause",
    columns=("id", "name", "basis"),
    required=("id", "name"),
)
CORRELATIONS = Layout(
    file="correlations.csv",
    noun="pair",
    columns=("a", "b", "correlation"),
    required=("a", "b", "correlation"),
    label=("a", "b"),
)


def read_causes(table: Table, folder: EstimateFolder) -> tuple[CommonCause, ...]:
    """Return the common causes, in file order."""
    taken: dict[str, int] = {}
    causes = []
    for row in table.rows:
        carry_named_files(row, folder)
        cause = CommonCause(
            id=row.id(taken),
            name=row.text("name", needed="a title"),
            basis=row.text("basis"),
            line=row.line,
        )
        causes.append(cause)
    return tuple(causes)


def read_correlations(
    table: Table, packages: Packages | None
) -> tuple[PairCorrelation, ...]:
    """Return the rank correlations that could be read, in file order."""
    taken: dict[frozenset[str], int] = {}
    pairs = []
    for row in table.rows:
        a, b = (_package(row, column, packages) for column in ("a", "b"))
        _check_pair(row, a, b, taken)
        correlation = _correlation(row)
        if a and b and correlation is not None:
            pair = PairCorrelation(a=a, b=b, correlation=correlation, line=row.line)
            pairs.append(pair)
    return tuple(pairs)


def refuse_both(table: Table | None, packages: Table | None, faults: FaultList) -> None:
    """Note an estimate that has both loads on causes and correlations."""
    if table is None or packages is None or not table.rows:
        return
    loaded = next((row for row in packages.rows if row.cell("causes")), None)
    if loaded is not None:
        found = f"packages.csv gives loads on causes, first on line {loaded.line}."
        remedy = "Keep the loads and remove correlations.csv, or empty column causes."
        place = Place(table.layout.file)
        faults.add(place, Problem(LoadsAndCorrelations, found, remedy))


def _package(row: Row, column: str, packages: Packages | None) -> str:
    """Return the id of a package that the cell names; blank where it names none."""
    text = row.text(column, needed="the id of a package")
    known = packages.ids if packages else None
    if text and known is not None and text not in known:
        found = f"packages.csv has no package {shown(text)}."
        remedy = instead(text, known, "Write the id of a package.")
        row.refuse(column, Problem(IdUnknown, found, remedy))
    return text


def _check_pair(row: Row, a: str, b: str, taken: dict[frozenset[str], int]) -> None:
    """Note a pair that is one package, or that has a correlation already."""
    if not a or not b:
        return
    if a == b:
        found = f"Both packages of the pair are {shown(a)}."
        remedy = "Name two packages; each has a correlation of 1 with itself anyway."
        row.refuse("b", Problem(SelfReference, found, remedy))
        return
    line = taken.setdefault(frozenset((a, b)), row.line)
    if line != row.line:
        found = f"The pair also stands on line {line}."
        row.refuse("b", Problem(PairTwice, found, "Keep one of the two rows."))


def _correlation(row: Row) -> float | None:
    """Return the correlation of a pair, -1 to 1."""
    text = row.text("correlation", needed="a rank correlation from -1 to 1")
    if not text:
        return None
    value = row.accept("correlation", read_number(text, signed=True))
    if value is not None and abs(value) > 1:
        found = f"{shown(text)} lies outside -1 to 1."
        remedy = "Write Spearman's rank correlation of the two costs."
        row.refuse("correlation", Problem(LoadOutOfRange, found, remedy))
        return None
    return None if value is None else float(value)
