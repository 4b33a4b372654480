"""events.csv: threats and opportunities that may or may not happen."""

from __future__ import annotations

from decimal import Decimal
from typing import Any, Literal, get_args

from contingency.estimate.cells import read_pairs, read_share
from contingency.estimate.evidence import COLUMNS as EVIDENCE
from contingency.estimate.evidence import read_evidence
from contingency.estimate.fault_list import Problem, instead, listed, shown
from contingency.estimate.faults import (
    AfterIncomplete,
    AfterMissing,
    CellBlank,
    HappensMismatch,
    IdUnknown,
    ListUnclear,
    RetainedShareMismatch,
    SharesNotWhole,
)
from contingency.estimate.folder import EstimateFolder
from contingency.estimate.nouns import (
    PROJECT_WIDE,
    PackageShare,
    RiskEvent,
    ShapeName,
)
from contingency.estimate.packages import Packages
from contingency.estimate.ranges import (
    LISTED,
    NEEDED,
    SUM_TOLERANCE,
    EndsRule,
    EventTerms,
    read_range,
)
from contingency.estimate.rows import RESERVED, Row
from contingency.estimate.tables import Layout, Table

LAYOUT = Layout(
    file="events.csv",
    noun="event",
    columns=(
        "id",
        "name",
        "kind",
        "probability",
        "happens",
        "frequency",
        "low",
        "likely",
        "high",
        "ends",
        "shape",
        "outcomes",
        "packages",
        "requires",
        "excludes",
        "status",
        "window_start",
        "window_finish",
        "owner",
        "response",
        "response_cost",
        "response_package",
        "response_due",
        "response_owner",
        "after_probability",
        "after_frequency",
        "after_low",
        "after_likely",
        "after_high",
        "use",
        "cause",
        "contract",
        "retained_share",
        "clause",
        "in_scope",
        "reviewed_on",
        "next_review",
        "held_by",
        *EVIDENCE,
    ),
    required=("id", "name", "kind"),
)

Kind = Literal["threat", "opportunity"]
Happens = Literal["once", "repeatedly"]
Status = Literal["open", "closed", "occurred"]
Use = Literal["before", "after"]
Contract = Literal["retained", "transferred", "shared"]

STATUSES: tuple[str, ...] = get_args(Status)
AFTER_FIGURES = ("after_low", "after_likely", "after_high")
AFTER = ("after_probability", "after_frequency", *AFTER_FIGURES)
"""The columns of the state after treatment."""

WHOLLY_PROJECT_WIDE = (PackageShare(package=PROJECT_WIDE, fraction=1.0),)


CHANCE: dict[str, str] = {"once": "probability", "repeatedly": "frequency"}
"""The column that says how likely an event is, by how it happens."""


def read_events(
    table: Table, folder: EstimateFolder, ends: EndsRule, packages: Packages | None
) -> tuple[RiskEvent, ...]:
    """Return the events that could be read, in file order.

    How they are tied to one another is checked in `links`.
    """
    taken: dict[str, int] = {}
    terms = EventTerms(packages.base if packages else None)
    events = []
    for row in table.rows:
        row.text("kind", needed="threat or opportunity")
        fields: dict[str, Any] = {
            "id": row.id(taken, reserved=RESERVED),
            "name": row.text("name", needed="a title"),
            "kind": row.word("kind", get_args(Kind)),
            "happens": row.word("happens", CHANCE, "once"),
            "status": row.word("status", STATUSES, "open"),
            "shares": _shares(row, packages),
            "requires": row.text("requires") or None,
            "excludes": tuple(row.entries("excludes") or ()),
            **_before(row, terms, ends),
            **_after(row, terms, ends),
            **_management(row, terms, packages),
            "evidence": read_evidence(row, folder),
            "line": row.line,
        }
        if fields["kind"] and _is_whole(fields):
            events.append(RiskEvent(**fields))
    return tuple(events)


def _is_whole(fields: dict[str, Any]) -> bool:
    """Whether an open event has what the simulation needs."""
    if fields["status"] != "open":
        return True
    prefix = "after_" if fields["use"] == "after" else ""
    chance = fields[prefix + CHANCE[fields["happens"]]]
    return fields[prefix + "impact"] is not None and chance is not None


def _before(row: Row, terms: EventTerms, ends: EndsRule) -> dict[str, Any]:
    """Return chance and impact of one occurrence before treatment."""
    fields: dict[str, Any] = _chance(row, "")
    is_open = row.cell("status") in {"", "open"}
    wanted = CHANCE.get(row.cell("happens") or "once")
    if is_open and wanted and not row.cell(wanted):
        found = f"The event is open and has no {wanted}."
        remedy = "Write its chance, such as 30%."
        if wanted == "frequency":
            remedy = "Write the expected number of occurrences over the project."
        row.refuse(wanted, Problem(CellBlank, found, remedy))
    given = any(row.cell(column) for column in ("low", "likely", "high", "outcomes"))
    has_impact = is_open or given
    fields["impact"] = read_range(row, terms, ends) if has_impact else None
    return fields


def _chance(row: Row, prefix: str) -> dict[str, float | None]:
    """Return probability and frequency; notes the one that does not belong."""
    happens = row.cell("happens") or "once"
    for manner, column in CHANCE.items():
        name = prefix + column
        if happens in CHANCE and happens != manner and row.cell(name):
            found = f"The event happens {happens} and has the {column} "
            found += f"{shown(row.cell(name))}."
            remedy = f"Move the figure to {prefix}{CHANCE[happens]}, or write "
            remedy += f"{manner} under happens."
            row.refuse(name, Problem(HappensMismatch, found, remedy))
    return {
        f"{prefix}probability": row.probability(f"{prefix}probability"),
        f"{prefix}frequency": row.frequency(f"{prefix}frequency"),
    }


def _after(row: Row, terms: EventTerms, ends: EndsRule) -> dict[str, Any]:
    """Return chance and impact after treatment, and which state is used."""
    fields: dict[str, Any] = {
        **_chance(row, "after_"),
        "after_impact": None,
        "use": row.word("use", get_args(Use), "before"),
    }
    given = [column for column in AFTER if row.cell(column)]
    if not given:
        if fields["use"] == "after":
            found = "The cell says after; the cells after treatment are blank."
            remedy = f"Fill in {listed(AFTER[:1] + AFTER[2:], 'and')}, or write before."
            row.refuse("use", Problem(AfterMissing, found, remedy))
        return fields
    missing = _missing_after(row)
    if missing:
        found = f"{listed(given, 'and')} filled, {listed(missing, 'and')} blank."
        remedy = "Fill in all of them; repeat the figures that treatment leaves alone."
        row.refuse(missing[0], Problem(AfterIncomplete, found, remedy))
        for column in given:
            if column in AFTER_FIGURES:
                row.figure(column)
    else:
        fields["after_impact"] = read_range(row, terms, ends, prefix="after_")
    return fields


def _missing_after(row: Row) -> list[str]:
    """Return the blank columns that the state after treatment cannot do without."""
    chance = CHANCE.get(row.cell("happens") or "once")
    # A chance under the other name is a fault of its own.
    has_chance = any(row.cell(f"after_{column}") for column in CHANCE.values())
    wanted = [f"after_{chance}"] if chance and not has_chance else []
    shape = row.cell("shape") or ShapeName.PERT
    if shape in list(ShapeName) and shape not in LISTED:
        needed = NEEDED[ShapeName(shape)]
        wanted += [f"after_{c}" for c, is_needed in needed.items() if is_needed]
    return [column for column in wanted if not row.cell(column)]


def _management(
    row: Row, terms: EventTerms, packages: Packages | None
) -> dict[str, Any]:
    """Return who does what about the event, and what the contract says."""
    start, finish = row.window("window_start", "window_finish")
    reviewed, next_review = row.window("reviewed_on", "next_review")
    cost = row.figure("response_cost")
    amount = row.accept("response_cost", terms.number(cost)) if cost else None
    contract, retained = _contract(row)
    package = row.text("response_package")
    if package:
        _check_package(row, "response_package", package, packages)
    texts = ("owner", "response", "response_owner", "cause", "clause", "held_by")
    return {
        **{column: row.text(column) for column in texts},
        "window_start": start,
        "window_finish": finish,
        "response_cost": None if amount is None else float(amount),
        "response_package": package or None,
        "response_due": row.day("response_due"),
        "contract": contract,
        "retained_share": retained,
        "in_scope": row.yes("in_scope"),
        "reviewed_on": reviewed,
        "next_review": next_review,
    }


def _contract(row: Row) -> tuple[str | None, float | None]:
    """Return who bears the risk under the contract, and the share retained."""
    contract = row.word("contract", get_args(Contract)) or None
    share = row.share("retained_share")
    has_share = bool(row.cell("retained_share"))
    if contract == "shared" and not has_share:
        found = "contract is shared and retained_share is blank."
        remedy = "Write the share of the cost that stays with the owner, such as 40%."
        row.refuse("retained_share", Problem(RetainedShareMismatch, found, remedy))
    elif has_share and contract != "shared" and row.cell("contract") != "shared":
        found = f"contract is {contract or 'blank'} and retained_share is filled."
        remedy = "Write shared under contract, or empty retained_share."
        row.refuse("retained_share", Problem(RetainedShareMismatch, found, remedy))
    return contract, share


def _shares(row: Row, packages: Packages | None) -> tuple[PackageShare, ...]:
    """Return which fraction of the event's cost falls on which package."""
    entries = row.entries("packages")
    if not entries:
        return WHOLLY_PROJECT_WIDE
    if len(entries) == 1 and ":" not in entries[0]:
        pairs: list[tuple[str, str]] | None = [(entries[0], "100%")]
    else:
        text = row.cell("packages")
        pairs = row.accept("packages", read_pairs(text, ":", "P100:60%; P200:40%"))
    if pairs is None:
        return ()
    shares: dict[str, Decimal] = {}
    for package, text in pairs:
        _check_package(row, "packages", package, packages)
        if package in shares:
            found = f"The package {shown(package)} stands in the cell twice."
            row.refuse("packages", Problem(ListUnclear, found, "Give it one share."))
            return ()
        share = row.accept("packages", read_share(text))
        if share is None:
            return ()
        shares[package] = share
    total = sum(shares.values(), Decimal(0))
    if abs(total - 1) > SUM_TOLERANCE * len(shares):
        found = f"The shares sum to {(total * 100).normalize():f} %."
        remedy = "Correct them; what is not any package's needs a row of its own."
        row.refuse("packages", Problem(SharesNotWhole, found, remedy))
    return tuple(PackageShare(package=p, fraction=float(s)) for p, s in shares.items())


def _check_package(
    row: Row, column: str, package: str, packages: Packages | None
) -> None:
    """Note a package that is not in the estimate."""
    known = packages.ids if packages else None
    if known is not None and package not in known:
        found = f"packages.csv has no package {shown(package)}."
        remedy = instead(package, known, "Write the id of a package.")
        row.refuse(column, Problem(IdUnknown, found, remedy))
