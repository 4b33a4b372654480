"""`contingency drawdown`: one folder in, one result object and its lines out."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass
from pathlib import Path
from typing import Any

from contingency.estimate.nouns import Estimate
from contingency.estimate.reading import read_estimate
from contingency.setting.account import (
    Account,
    AccountLine,
    exceeds_delegation,
    lacking,
)
from contingency.setting.levels import FundingLevel
from contingency.tracking.drawdown import Drawdown, drawdown
from contingency.tracking.text import amount, figure, table

FORMAT = "contingency-drawdown/1"


@dataclass(frozen=True, kw_only=True)
class DrawdownResult:
    """What `contingency drawdown` answers."""

    estimate: Estimate
    drawdown: Drawdown

    @property
    def needs_attention(self) -> bool:
        """Whether money falls short, or a draw lacks a reason or an approval."""
        found = self.drawdown
        return (
            found.surplus < 0.0 or found.is_below_minimum or bool(self.faulty_entries)
        )

    @property
    def faulty_entries(self) -> tuple[tuple[str, str], ...]:
        """Each entry that lacks something, or goes beyond a delegation, and what."""
        rule = self.estimate.account_rule
        found = []
        for line in self.drawdown.account.lines:
            lacks = list(lacking(line.entry))
            if exceeds_delegation(rule, line.entry):
                lacks.append("an approval within the delegation")
            if lacks:
                found.append((line.entry.label, ", ".join(lacks)))
        return tuple(found)

    def as_object(self) -> dict[str, Any]:
        """Return the drawdown, ready for JSON; amounts unrounded."""
        return drawdown_object(self.drawdown) | {
            "faulty_entries": [
                {"entry": label, "lacks": lacks} for label, lacks in self.faulty_entries
            ]
        }

    def lines(self) -> list[str]:
        """Return the drawdown as the command line prints it."""
        step = self.estimate.contingency.rounding
        lines = drawdown_lines(self.drawdown, step)
        lines += [
            f"Entry {label} lacks {lacks}." for label, lacks in self.faulty_entries
        ]
        return lines


def drawdown_of_folder(
    folder: Path | str,
    *,
    threads: int = 1,
    say: Callable[[str], None] | None = None,
) -> DrawdownResult:
    """Return the contingency account of the estimate in a folder.

    Raises
    ------
    UnusableEstimate
        unusable-estimate.
    NoAccount
        no-account.  The folder has no drawdown.csv with entries.
    """
    tell = say or (lambda _: None)
    estimate = read_estimate(folder)
    tell("Simulating what remains")
    found = drawdown(estimate, threads=threads)
    return DrawdownResult(estimate=estimate, drawdown=found)


def account_object(account: Account, target: FundingLevel) -> dict[str, Any]:
    """Return what results.json holds of the account: sums, need and balance."""
    need = target.contingency
    return {
        "day": account.day.isoformat(),
        **_sums(account),
        "need": figure(need),
        "level": target.name,
        "ratio": figure(account.balance / need) if need > 0.0 else None,
    }


def _sums(account: Account) -> dict[str, float]:
    return {
        "opening": figure(account.opening),
        "added": figure(account.added),
        "drawn": figure(account.drawn),
        "released": figure(account.released),
        "balance": figure(account.balance),
    }


def drawdown_object(found: Drawdown) -> dict[str, Any]:
    """Return a drawdown, ready for JSON; price-date money, unrounded."""
    account = found.account
    return {
        "format": FORMAT,
        "project": found.project,
        "revision": found.revision,
        "currency": found.currency,
        "day": account.day.isoformat(),
        "account": _sums(account),
        "need": {
            "level": f"P{found.level:02d}",
            "amount": figure(found.need),
            "P90": figure(found.need_90),
            "P95": figure(found.need_95),
        },
        "surplus": figure(found.surplus),
        "ratio": None if found.ratio is None else figure(found.ratio),
        "minimum": None if found.minimum is None else figure(found.minimum),
        "below_minimum": found.is_below_minimum,
        "releasable": figure(found.releasable),
        "entries": [_entry(line) for line in account.lines],
        "later_entries": [entry.label for entry in account.later],
        "forecast": [
            {
                "day": point.day.isoformat(),
                "need": figure(point.need),
                "minimum": None if point.minimum is None else figure(point.minimum),
                "milestone": point.milestone,
            }
            for point in found.forecast
        ],
        "without_window": list(found.without_window),
        "occurred_not_drawn": list(found.not_drawn),
        "drawn_not_occurred": list(found.drawn_not_occurred),
    }


def _entry(line: AccountLine) -> dict[str, Any]:
    entry = line.entry
    return {
        "id": entry.id,
        "date": entry.date.isoformat(),
        "kind": entry.kind,
        "amount": figure(entry.amount),
        "event": entry.event,
        "package": entry.package,
        "reason": entry.reason,
        "approved_by": entry.approved_by,
        "role": entry.role,
        "in_scope": entry.in_scope,
        "balance": figure(line.balance),
    }


def drawdown_lines(found: Drawdown, step: float) -> list[str]:
    """Return a drawdown as lines of text; needs are multiples of `step`."""
    lines = [_title(found), "", *_entry_lines(found), "", _balance(found, step)]
    ratio = found.ratio
    if ratio is not None:
        word = "covers" if ratio >= 1.0 else "does not cover"
        lines.append(
            f"What is left {word} the need: {100 * ratio:.0f} % of it "
            f"({_rounded(found.surplus, step)})."
        )
    if found.minimum is not None:
        state = "below" if found.is_below_minimum else "not below"
        lines.append(
            f"Minimum curve on that day: {amount(found.minimum)}; the balance is "
            f"{state} it."
        )
    if found.forecast:
        lines += ["", *_forecast_lines(found, step)]
    if found.without_window:
        lines.append(
            f"{len(found.without_window)} packages and events have no window after "
            "the data date and stay in the forecast in full."
        )
    lines += [f"{label} occurred and no draw names it." for label in found.not_drawn]
    lines += [
        f"{label} was drawn for, is still open and is not treated."
        for label in found.drawn_not_occurred
    ]
    if found.account.later:
        names = ", ".join(entry.label for entry in found.account.later)
        lines.append(f"Entries after the data date do not count: {names}.")
    return lines


def _title(found: Drawdown) -> str:
    return (
        f"{found.project}, revision {found.revision}, account on "
        f"{found.account.day}, in {found.currency}"
    )


def _balance(found: Drawdown, step: float) -> str:
    return (
        f"Left in the account: {amount(found.balance)}. Needed at "
        f"P{found.level:02d} for what remains: {_rounded(found.need, step)}."
    )


def _rounded(value: float, step: float) -> str:
    return amount(round(value / step) * step, step)


def _entry_lines(found: Drawdown) -> list[str]:
    rows = []
    for line in found.account.lines:
        entry = line.entry
        sign = 1.0 if entry.kind in {"opening", "added"} else -1.0
        rows.append(
            [
                f"{entry.date} {entry.id}".rstrip(),
                entry.kind,
                amount(sign * entry.amount),
                amount(line.balance),
                f"{entry.event} {entry.package} {entry.reason}".strip()[:70],
            ]
        )
    return table(["day", "", "amount", "balance", ""], rows, left=2)


def _forecast_lines(found: Drawdown, step: float) -> list[str]:
    rows = [
        [
            str(point.day),
            _rounded(point.need, step),
            "" if point.minimum is None else amount(point.minimum),
            point.milestone,
        ]
        for point in found.forecast
    ]
    return table(["run-down", "needed", "minimum", ""], rows)
