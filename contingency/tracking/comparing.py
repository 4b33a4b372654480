"""`contingency compare`: two folders in, one result object and its lines out."""

from __future__ import annotations

import json
from collections.abc import Callable
from dataclasses import dataclass
from pathlib import Path
from typing import Any

from contingency.errors import UnusableResults
from contingency.estimate.reading import read_estimate
from contingency.tracking.averaging import Order
from contingency.tracking.bridge import IssuedFigures, Position, Step
from contingency.tracking.compare import Comparison, Revision, compare
from contingency.tracking.difference import Difference
from contingency.tracking.risks import RiskMovement, RiskState
from contingency.tracking.text import (
    Rounder,
    about,
    amount,
    rounder,
    table,
    wrapped,
)

FORMAT = "contingency-comparison/1"

LARGEST_RESULTS = 64 * 2**20
"""Bytes of a results.json that is read; a choice of ours."""


@dataclass(frozen=True, kw_only=True)
class CompareResult:
    """What `contingency compare` answers."""

    comparison: Comparison
    rounding: float
    """Amounts of the printed lines are multiples of this."""

    @property
    def needs_attention(self) -> bool:
        """Whether something in the bridge has no reason or does not close."""
        found = self.comparison
        return found.lacks_factor or found.unexplained_base > 0.0 or not found.closes

    def as_object(self) -> dict[str, Any]:
        """Return the comparison, ready for JSON; amounts unrounded."""
        return comparison_object(self.comparison)

    def lines(self) -> list[str]:
        """Return the comparison as the command line prints it."""
        return comparison_lines(self.comparison, self.rounding)


def compare_folders(
    earlier: Path | str,
    later: Path | str,
    *,
    order: Order = "average",
    issued: Path | None = None,
    threads: int = 1,
    say: Callable[[str], None] | None = None,
) -> CompareResult:
    """Return the comparison of the estimates in two folders.

    Parameters
    ----------
    earlier, later : path
        Folders of two revisions.
    order : "average" or "sequence"
        How families share what they do together.
    issued : path, optional
        results.json of the earlier revision as it was issued.
    threads : int
        Blocks simulated at the same time; changes no figure.
    say : callable, optional
        Told what is being done.

    Raises
    ------
    UnusableEstimate
        unusable-estimate.  One of the two cannot be read.
    OtherCurrency, NotRevisions, UnusableResults
        other-currency, not-revisions, unusable-results.
    """
    tell = say or (lambda _: None)
    tell("Reading both revisions")
    old, new = read_estimate(earlier), read_estimate(later)
    figures = None if issued is None else read_issued(issued)
    tell("Comparing")
    found = compare(old, new, order=order, issued=figures, threads=threads)
    return CompareResult(comparison=found, rounding=new.contingency.rounding)


def read_issued(path: Path) -> IssuedFigures:
    """Return what a results.json says was issued.

    Raises
    ------
    UnusableResults
        unusable-results.  The file is not there or is no results.json.
    """
    try:
        if path.stat().st_size > LARGEST_RESULTS:
            raise ValueError("the file is too large")  # noqa: TRY301
        results = json.loads(path.read_text(encoding="utf-8"))
        return IssuedFigures(
            base=float(results["base"]),
            contingency=float(results["target"]["contingency"]),
            version=str(results["tool"]["version"]),
            method=str(results["run"]["method"]),
        )
    except (OSError, ValueError, KeyError, TypeError) as error:
        raise UnusableResults(
            where=str(path),
            found=f"The file cannot be used ({type(error).__name__}: {error}).",
            rule="It is the results.json that was issued with the earlier revision.",
            remedy="Name that file, or leave it out: the earlier inputs are then "
            "computed with this version only.",
        ) from error


# --------------------------------------------------------------------------------------
# As an object


def comparison_object(found: Comparison) -> dict[str, Any]:
    """Return a comparison, ready for JSON; money of the later price date, unrounded."""
    bridge = found.bridge
    money = rounder(bridge.after.total)
    return {
        "format": FORMAT,
        "project": found.project,
        "currency": found.currency,
        "earlier": _revision(found.earlier),
        "later": _revision(found.later),
        "order": bridge.order,
        "method": found.method,
        "run": {"seed": bridge.seed, "blocks": bridge.blocks},
        "before": _position(bridge.before, money),
        "after": _position(bridge.after, money),
        "at_old_level": money(bridge.at_old_level),
        "steps": [_step(step, money) for step in bridge.steps],
        "residual": {
            "base": money(bridge.residual[0]),
            "contingency": money(bridge.residual[1]),
        },
        "restated": found.is_restated,
        "lacks_factor": found.lacks_factor,
        "unexplained_base": money(found.unexplained_base),
        "risks": [_risk(risk, money) for risk in found.risks],
        "differences": [_difference(line) for line in found.differences],
        "unused_changes": [
            {"line": c.line, "file": c.file, "id": c.id, "reason": c.reason}
            for c in found.unused
        ],
    }


def summary_object(found: Comparison) -> dict[str, Any]:
    """Return what results.json holds of a comparison: no cells, no idle risks."""
    whole = comparison_object(found)
    del whole["differences"], whole["unused_changes"]
    whole["risks"] = [r for r in whole["risks"] if r["movement"] != "unchanged"]
    return whole


def _revision(revision: Revision) -> dict[str, Any]:
    return {
        "revision": revision.revision,
        "gate": revision.gate,
        "class": revision.estimate_class,
        "data_date": revision.data_date.isoformat(),
        "price_date": revision.price_date.isoformat(),
        "fingerprint": revision.fingerprint,
    }


def _position(position: Position, money: Rounder) -> dict[str, Any]:
    return {
        "level": f"P{position.percent:02d}",
        "base": money(position.base),
        "contingency": money(position.contingency),
        "total": money(position.total),
    }


def _step(step: Step, money: Rounder) -> dict[str, Any]:
    return {
        "family": step.family.value,
        "heading": step.family.heading,
        "base": money(step.base),
        "contingency": money(step.contingency),
        "total": money(step.total),
        "noise": money(step.noise),
        "within_noise": step.is_within_noise,
        "rows": [
            {
                "file": row.file,
                "id": row.id,
                "name": row.name,
                "base": money(row.base),
                "contingency": money(row.contingency),
            }
            for row in step.rows
        ],
    }


def _risk(risk: RiskMovement, money: Rounder) -> dict[str, Any]:
    return {
        "id": risk.id,
        "name": risk.name,
        "kind": risk.kind,
        "movement": risk.movement,
        "old": _state(risk.old, money),
        "new": _state(risk.new, money),
        "contingency": money(risk.contingency),
        "released": money(risk.released),
        "base": money(risk.base),
        "reason": risk.reason,
        "by": risk.by,
        "on": risk.on.isoformat() if risk.on else None,
        "evidence": risk.evidence,
    }


def _state(state: RiskState | None, money: Rounder) -> dict[str, Any] | None:
    if state is None:
        return None
    return {
        "status": state.status,
        "use": state.use,
        "chance": state.chance,
        "mean_impact": None if state.mean_impact is None else money(state.mean_impact),
    }


def _difference(line: Difference) -> dict[str, Any]:
    return {
        "file": line.file,
        "id": line.id,
        "field": line.field,
        "old": line.old,
        "new": line.new,
        "reason": line.reason,
        "by": line.by,
    }


# --------------------------------------------------------------------------------------
# As lines


def comparison_lines(found: Comparison, step: float) -> list[str]:
    """Return a comparison as lines of text; amounts are multiples of `step`."""
    bridge = found.bridge
    old, new = found.earlier.revision, found.later.revision
    lines = [f"{found.project}, from revision {old} to {new}, in {found.currency}", ""]
    if found.is_empty:
        return [*lines, "Nothing that moves base or contingency differs."]
    rows = [_end(found, step, is_after=False)]
    for moved, printed in zip(bridge.steps, found.printed(step), strict=True):
        remark = ""
        if moved.noise >= 0.5 * step:
            remark = f"± {about(moved.noise)}"
        if moved.is_within_noise:
            remark += ", not more than chance"
        rows.append(
            [
                f"  {moved.family.heading}",
                amount(printed.base, step),
                amount(printed.contingency, step),
                amount(printed.total, step),
                remark.lstrip(", "),
            ]
        )
    rows.append(_end(found, step, is_after=True))
    lines += table(["", "base", "contingency", "total", ""], rows)
    if bridge.before.percent != bridge.after.percent:
        at_old = amount(round(bridge.at_old_level / step) * step, step)
        lines += ["", *wrapped(_at_old_level(found, at_old))]
    lines += ["", *wrapped(found.method), ""]
    for remark in _remarks(found):
        lines += wrapped(remark)
    return [*lines, *_risk_lines(found, step)]


def _at_old_level(found: Comparison, amount_: str) -> str:
    return (
        f"At P{found.bridge.before.percent:02d}, the level of revision "
        f"{found.earlier.revision}, the contingency would be {amount_}."
    )


def _end(found: Comparison, step: float, *, is_after: bool) -> list[str]:
    end = found.bridge.after if is_after else found.bridge.before
    revision = (found.later if is_after else found.earlier).revision
    base, contingency = found.printed_end(step, is_after=is_after)
    return [
        f"Revision {revision}, P{end.percent:02d}",
        amount(base, step),
        amount(contingency, step),
        amount(base + contingency, step),
        "",
    ]


def _remarks(found: Comparison) -> list[str]:
    """Return what a reader must know about the bridge."""
    lines = []
    if found.lacks_factor:
        lines.append(
            f"The price dates differ ({found.earlier.price_date} and "
            f"{found.later.price_date}) and changes.csv gives no factor: growth of "
            "prices is inside the other steps."
        )
    if found.unexplained_base:
        lines.append(
            "Base that moved without a reason in changes.csv: "
            f"{found.currency} {amount(found.unexplained_base)}."
        )
    if found.unused:
        numbers = ", ".join(str(line.line) for line in found.unused)
        lines.append(f"Lines of changes.csv that explain nothing: {numbers}.")
    silent = sum(not line.reason for line in found.differences)
    lines.append(
        f"{len(found.differences)} cells differ, {silent} of them without a reason; "
        "--json lists them."
    )
    return lines


def _risk_lines(found: Comparison, step: float) -> list[str]:
    """Return the risks that moved, as a table."""
    moved = [
        risk
        for risk in found.risks
        if risk.movement not in {"unchanged", "closed before", "occurred before"}
    ]
    if not moved:
        return []
    rows = [
        [
            f"  {risk.id} {risk.name}"[:48],
            risk.movement,
            amount(round(risk.contingency / step) * step, step),
            amount(round(risk.base / step) * step, step),
            risk.reason[:60],
        ]
        for risk in moved
    ]
    head = ["Risks that moved", "", "contingency", "base", ""]
    return ["", *table(head, rows, left=2)]
