"""The contingency account: what came in, what went out, and what must be left."""

from __future__ import annotations

import datetime as dt
import math
from collections.abc import Sequence
from dataclasses import dataclass
from itertools import pairwise

from contingency.estimate.nouns import AccountEntry, AccountRule, Delegation, Estimate


@dataclass(frozen=True, kw_only=True, slots=True)
class AccountLine:
    """One entry with the balance after it."""

    entry: AccountEntry
    balance: float
    """Money of the account."""


@dataclass(frozen=True, kw_only=True, slots=True)
class Account:
    """The account on one day, in the money in which it is kept."""

    day: dt.date
    lines: tuple[AccountLine, ...]
    """By date, up to and including the day."""
    later: tuple[AccountEntry, ...]
    """Entries dated after the day; they do not count."""
    opening: float
    added: float
    drawn: float
    released: float

    @property
    def balance(self) -> float:
        """What is left: opening and added, less drawn and released."""
        return self.lines[-1].balance if self.lines else 0.0


def account_on(entries: Sequence[AccountEntry], day: dt.date) -> Account:
    """Return the account on the evening of a day.

    Parameters
    ----------
    entries : sequence
        By date.
    day : date
        Usually the data date of the estimate.
    """
    so_far = [entry for entry in entries if entry.date <= day]
    amounts: dict[str, list[float]] = {}
    lines = []
    moved: list[float] = []
    for entry in so_far:
        amounts.setdefault(entry.kind, []).append(entry.amount)
        sign = 1.0 if entry.kind in {"opening", "added"} else -1.0
        moved.append(sign * entry.amount)
        lines.append(AccountLine(entry=entry, balance=math.fsum(moved)))
    sums = {kind: math.fsum(values) for kind, values in amounts.items()}
    return Account(
        day=day,
        lines=tuple(lines),
        later=tuple(entry for entry in entries if entry.date > day),
        opening=sums.get("opening", 0.0),
        added=sums.get("added", 0.0),
        drawn=sums.get("drawn", 0.0),
        released=sums.get("released", 0.0),
    )


def account_of(estimate: Estimate) -> Account | None:
    """Return the account on the estimate's data date; None where none is kept."""
    if not estimate.account:
        return None
    return account_on(estimate.account, estimate.data_date)


def minimum_on(rule: AccountRule, day: dt.date) -> float | None:
    """Return the least contingency that must be left on a day, money.

    A straight line between milestones.  None before the first one; after the last
    one its amount.
    """
    points = rule.minimum
    if not points or day < points[0].on:
        return None
    for before, after in pairwise(points):
        if before.on <= day < after.on:
            part = (day - before.on).days / (after.on - before.on).days
            return before.amount + part * (after.amount - before.amount)
    return points[-1].amount


def delegation_of(rule: AccountRule, role: str) -> Delegation | None:
    """Return what a role may approve, or None where the rules do not name it."""
    wanted = role.strip().casefold()
    return next(
        (d for d in rule.delegations if d.role.strip().casefold() == wanted), None
    )


def lacking(entry: AccountEntry) -> tuple[str, ...]:
    """Return what an entry does not say and every draw must say, in words."""
    lacks = []
    if entry.kind == "drawn" and not entry.event and not entry.package:
        lacks.append("a risk or a package")
    if not entry.reason:
        lacks.append("a reason")
    if not entry.approved_by:
        lacks.append("who approved it")
    if not entry.role:
        lacks.append("the approver's role")
    return tuple(lacks)


def exceeds_delegation(rule: AccountRule, entry: AccountEntry) -> bool:
    """Whether a draw is larger than its approver's role may approve.

    A role that the rules do not name may approve nothing.  Without any rules there is
    nothing to exceed.
    """
    if not rule.delegations or entry.kind != "drawn" or not entry.role:
        return False
    delegation = delegation_of(rule, entry.role)
    if delegation is None:
        return True
    return delegation.up_to is not None and entry.amount > delegation.up_to
