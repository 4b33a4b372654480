"""drawdown.csv and [account]: the contingency account and its rules.

What a draw lacks in reason or approval is no fault of the file but a finding of
assurance: the account shows what was done, also where it was not done well.
"""

from __future__ import annotations

import datetime as dt
import math
from collections.abc import Set as AbstractSet
from typing import Literal, cast

from contingency.estimate.cells import Figure
from contingency.estimate.fault_list import Problem, instead, shown
from contingency.estimate.faults import (
    AmountNegative,
    CellBlank,
    DatesReversed,
    IdUnknown,
    PercentUnwanted,
)
from contingency.estimate.nouns import AccountEntry, AccountRule, Delegation, Milestone
from contingency.estimate.rows import Row
from contingency.estimate.sections import Section
from contingency.estimate.tables import Layout, Table

LAYOUT = Layout(
    file="drawdown.csv",
    noun="entry",
    columns=(
        "id",
        "date",
        "kind",
        "amount",
        "event",
        "package",
        "reason",
        "approved_by",
        "role",
        "in_scope",
    ),
    required=("date", "amount"),
    label=("id", "date"),
)

Kind = Literal["opening", "added", "drawn", "released"]
KINDS: tuple[str, ...] = ("opening", "added", "drawn", "released")

ACCOUNT_KEYS: dict[str, tuple[str, ...]] = {
    "account": ("minimum", "delegations"),
    "account.minimum": ("milestone", "on", "amount"),
    "account.delegations": ("role", "up_to"),
}
"""The keys under [account] of estimate.toml."""
ACCOUNT_REQUIRED: dict[str, tuple[str, ...]] = {
    "account.minimum": ("milestone", "on", "amount"),
    "account.delegations": ("role",),
}


def read_account(
    table: Table, events: Table | None, packages: AbstractSet[str] | None
) -> tuple[AccountEntry, ...]:
    """Return the entries that could be read, by date; one day's in file order.

    `packages` are the ids of packages.csv, None where they could not be read.
    """
    taken: dict[str, int] = {}
    event_ids = events.ids if events else set()
    entries = []
    for row in table.rows:
        identity = row.id(taken) if row.cell("id") else ""
        entry = _entry(row, identity)
        _check_named(row, "event", event_ids, "events.csv")
        if packages is not None:
            _check_named(row, "package", packages, "packages.csv")
        if entry is not None:
            entries.append(entry)
    return tuple(sorted(entries, key=lambda entry: entry.date))


def read_account_rule(section: Section | None) -> AccountRule:
    """Return the rules under [account]; no rules where there is no such heading."""
    if section is None:
        return AccountRule()
    section.check_keys(ACCOUNT_KEYS["account"], (), {})
    points = []
    for line in _lines(section, "minimum"):
        amount = line.number_within("amount", 0.0, math.inf)
        name, on = line.text("milestone", needed=True), line.day("on")
        if on is not None and amount is not None:
            points.append(Milestone(name=name, on=on, amount=amount))
            _check_rising(line, on, points)
    delegations = [
        Delegation(
            role=line.text("role", needed=True),
            up_to=line.number_within("up_to", 0.0, math.inf),
        )
        for line in _lines(section, "delegations")
    ]
    return AccountRule(minimum=tuple(points), delegations=tuple(delegations))


def _lines(section: Section, key: str) -> list[Section]:
    """Return the tables of a list with their keys checked."""
    lines = section.each(key)
    name = f"account.{key}"
    for line in lines:
        line.check_keys(ACCOUNT_KEYS[name], ACCOUNT_REQUIRED[name], {})
    return lines


def _check_rising(line: Section, on: dt.date, points: list[Milestone]) -> None:
    """Note a milestone on or before the day of the one above it."""
    if len(points) > 1 and on <= points[-2].on:
        found = f"{on} is not after {points[-2].on}, the milestone before."
        line.refuse("on", Problem(DatesReversed, found, "List milestones by date."))


def _entry(row: Row, identity: str) -> AccountEntry | None:
    """Return the entry of a row; None where date or amount is missing."""
    if not row.text("date", needed="the day of the approval"):
        day = None
    else:
        day = row.day("date")
    amount = _amount(row)
    kind = row.word("kind", KINDS, "drawn")
    in_scope = row.yes("in_scope")
    if day is None or amount is None:
        return None
    return AccountEntry(
        id=identity,
        date=day,
        kind=cast("Kind", kind),
        amount=amount,
        event=row.text("event"),
        package=row.text("package"),
        reason=row.text("reason"),
        approved_by=row.text("approved_by"),
        role=row.text("role"),
        in_scope=in_scope,
        line=row.line,
    )


def _amount(row: Row) -> float | None:
    """Return the amount of an entry, which is positive for every kind."""
    text = row.text("amount", needed="the amount, positive")
    figure: Figure | None = row.figure("amount") if text else None
    if figure is None:
        return None
    problem: Problem | None = None
    if figure.is_percent:
        found = f"{shown(text)} is a percent."
        problem = Problem(PercentUnwanted, found, "Write the amount.")
    elif figure.value < 0:
        remedy = "Write it positive; the kind says whether it adds or takes."
        problem = Problem(AmountNegative, f"{shown(text)} is negative.", remedy)
    elif figure.value == 0:
        remedy = "Write what was moved, or remove the row."
        problem = Problem(CellBlank, "The amount is nought.", remedy)
    if problem is not None:
        row.refuse("amount", problem)
        return None
    return float(figure.value)


def _check_named(row: Row, column: str, known: AbstractSet[str], file: str) -> None:
    """Note the id of an event or package that its file does not have."""
    name = row.cell(column)
    if name and name not in known:
        remedy = instead(name, known, f"Write an id of {file}.")
        problem = Problem(IdUnknown, f"{file} has no {shown(name)}.", remedy)
        row.refuse(column, problem)
