"""packages.csv: the work packages of the base estimate."""

from __future__ import annotations

from dataclasses import dataclass
from decimal import Decimal
from typing import Literal, cast, get_args

from contingency.estimate.cells import read_number, read_pairs
from contingency.estimate.evidence import COLUMNS as EVIDENCE
from contingency.estimate.evidence import read_evidence
from contingency.estimate.fault_list import (
    FaultList,
    Place,
    Problem,
    instead,
    shown,
    worded,
)
from contingency.estimate.faults import (
    AmountNegative,
    IdReserved,
    IdUnknown,
    ListUnclear,
    LoadOutOfRange,
    LoadsTooStrong,
    NoBase,
    NoPackages,
    PercentUnwanted,
)
from contingency.estimate.folder import EstimateFolder
from contingency.estimate.nouns import Load, WorkPackage
from contingency.estimate.ranges import EndsRule, PackageTerms, read_range
from contingency.estimate.rows import RESERVED, Row
from contingency.estimate.tables import Layout, Table

LAYOUT = Layout(
    file="packages.csv",
    noun="package",
    columns=(
        "id",
        "name",
        "group",
        "base",
        "spent",
        "low",
        "likely",
        "high",
        "ends",
        "shape",
        "outcomes",
        "causes",
        "start",
        "finish",
        "spend",
        "prices",
        "price_basis",
        "price_date",
        "holds_allowance",
        "progress",
        *EVIDENCE,
    ),
    required=("id", "name", "base"),
)

Spend = Literal["even", "early", "late", "bell"]
PriceBasis = Literal["constant", "outturn"]
PROFILES: tuple[str, ...] = get_args(Spend)
PRICE_BASES: tuple[str, ...] = get_args(PriceBasis)


@dataclass(frozen=True, kw_only=True, slots=True)
class Packages:
    """What packages.csv holds, as far as it could be read."""

    read: tuple[WorkPackage, ...]
    """The packages without a fault, in file order."""
    ids: frozenset[str] | None
    """Ids of all rows, those included that have faults; None where some are hidden."""
    groups: frozenset[str]
    """Headings of all rows."""
    base: Decimal | None
    """Sum of the bases; None where one of them could not be read."""


@dataclass(frozen=True, kw_only=True, slots=True)
class PackageRules:
    """What other files say about how a package is read."""

    ends: EndsRule
    causes: frozenset[str] | None
    """Ids of causes.csv; None where that file has faults that hide them."""
    series: frozenset[str] | None
    """Ids of prices.csv; None where that file has faults that hide them."""
    general_dependence: float
    """Correlation that all ranges share, 0 to 1."""


def read_packages(
    table: Table, folder: EstimateFolder, rules: PackageRules
) -> Packages:
    """Return the packages of the table and note every fault of its rows."""
    taken: dict[str, int] = {}
    bases: list[Decimal | None] = [None for _ in table.ragged]
    read = []
    for row in table.rows:
        base = _money(row, "base", needed="the base estimate of the package")
        bases.append(base)
        package = _read_package(row, base, taken, folder, rules)
        if package is not None:
            read.append(package)
    return Packages(
        read=tuple(read),
        ids=table.known_ids if bases else None,
        groups=frozenset(row.cell("group") for row in table.rows) - {""},
        base=_sum_of_bases(table, bases, folder.faults),
    )


def _read_package(
    row: Row,
    base: Decimal | None,
    taken: dict[str, int],
    folder: EstimateFolder,
    rules: PackageRules,
) -> WorkPackage | None:
    """Return one package; None where it has no readable base or range."""
    package_id = row.id(taken, reserved=RESERVED)
    name = row.text("name", needed="a title")
    group = _group(row)
    spent = _money(row, "spent")
    cost = read_range(row, PackageTerms(base, spent or Decimal(0)), rules.ends)
    loads = _loads(row, rules)
    start, finish = row.window("start", "finish")
    spend = row.word("spend", PROFILES)
    prices = _series(row, rules)
    price_basis = row.word("price_basis", PRICE_BASES)
    price_date = row.day("price_date")
    holds_allowance = row.yes("holds_allowance")
    progress = row.share("progress")
    evidence = read_evidence(row, folder)
    if base is None or cost is None:
        return None
    return WorkPackage(
        id=package_id,
        name=name,
        group=group,
        base=float(base),
        spent=None if spent is None else float(spent),
        cost=cost,
        loads=loads,
        start=start,
        finish=finish,
        spend=cast("Spend", spend) if spend else None,
        prices=prices,
        price_basis=cast("PriceBasis", price_basis) if price_basis else None,
        price_date=price_date,
        holds_allowance=holds_allowance,
        progress=progress,
        evidence=evidence,
        line=row.line,
    )


def _sum_of_bases(
    table: Table, bases: list[Decimal | None], faults: FaultList
) -> Decimal | None:
    """Return the base of the project; None where it is unreadable or nought."""
    place = Place(table.layout.file)
    readable = [base for base in bases if base is not None]
    if not bases and not table.is_whole:
        return None
    if not bases:
        found = "The table has no rows below its header row."
        faults.add(place, Problem(NoPackages, found, "Add the work packages."))
        return None
    if len(readable) < len(bases):
        return None
    total = sum(readable, Decimal(0))
    if total == 0:
        found = "The bases of all packages sum to 0."
        faults.add(place, Problem(NoBase, found, "Fill in the column base."))
        return None
    return total


def _money(row: Row, column: str, *, needed: str = "") -> Decimal | None:
    """Return an amount of money that is not negative; None where it is blank."""
    row.text(column, needed=needed)
    figure = row.figure(column)
    if figure is None:
        return None
    if figure.is_percent:
        found = f"{shown(figure.text)} is a percent."
        remedy = "Write the amount of money."
        row.refuse(column, Problem(PercentUnwanted, found, remedy))
        return None
    if figure.value < 0:
        found = f"{column} {worded(float(figure.value))} is negative."
        remedy = "Correct the sign; a possible income is an opportunity in events.csv."
        row.refuse(column, Problem(AmountNegative, found, remedy))
        return None
    return figure.value


def _group(row: Row) -> str:
    """Return the heading of a package, which applies_to of a systemic risk can name."""
    group = row.text("group")
    if ";" in group or "\n" in group:
        found = f"The group {shown(group)} holds a semicolon or a line break."
        remedy = "Remove it: applies_to in systemic.csv lists groups with semicolons."
        row.refuse("group", Problem(ListUnclear, found, remedy))
    elif group in RESERVED:
        found = f"The group is {shown(group)}."
        row.refuse("group", Problem(IdReserved, found, "Give the group another name."))
    return group


def _series(row: Row, rules: PackageRules) -> str:
    """Return the id of the price series that escalates the package."""
    text, known = row.text("prices"), rules.series
    if text and known is not None and text not in known:
        found = f"prices.csv has no series {shown(text)}."
        if not known:
            found = f"There is no prices.csv with the series {shown(text)}."
        remedy = instead(text, known, "Add the series to prices.csv.")
        row.refuse("prices", Problem(IdUnknown, found, remedy))
    return text


def _loads(row: Row, rules: PackageRules) -> tuple[Load, ...]:
    """Return how strongly the range follows each cause."""
    text, causes = row.cell("causes"), rules.causes
    if not text:
        return ()
    pairs = row.accept("causes", read_pairs(text, ":", "labour:0.5; steel:0.3"))
    loads: dict[str, Decimal] = {}
    for cause, cell in pairs or ():
        if causes is not None and cause not in causes:
            found = f"causes.csv has no cause {shown(cause)}."
            if not causes:
                found = f"There is no causes.csv with the cause {shown(cause)}."
            remedy = instead(cause, causes, "Add the cause to causes.csv.")
            row.refuse("causes", Problem(IdUnknown, found, remedy))
        if cause in loads:
            found = f"The cause {shown(cause)} stands in the cell twice."
            row.refuse("causes", Problem(ListUnclear, found, "Give it one load."))
        weight = row.accept("causes", read_number(cell, signed=True))
        if weight is not None and abs(weight) > 1:
            found = f"The load {cause}:{shown(cell)[1:-1]} lies outside -1 to 1."
            remedy = "Write the correlation of the package's range with the cause."
            row.refuse("causes", Problem(LoadOutOfRange, found, remedy))
        elif weight is not None:
            loads[cause] = weight
    _check_strength(row, loads, rules.general_dependence)
    return tuple(Load(cause=c, weight=float(w)) for c, w in loads.items())


def _check_strength(
    row: Row, loads: dict[str, Decimal], general_dependence: float
) -> None:
    """Note loads that together leave a package no spread of its own."""
    general = Decimal(repr(general_dependence))
    squares = sum((w * w for w in loads.values()), Decimal(0))
    if squares + general > 1:
        found = (
            f"The squares of the loads sum to {squares.normalize():f}; the general "
            f"dependence is {general.normalize():f}; together they exceed 1."
        )
        remedy = "Lower the loads, or general_dependence in estimate.toml."
        row.refuse("causes", Problem(LoadsTooStrong, found, remedy))
