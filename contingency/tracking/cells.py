"""Rows and settings as the files have them: text by column or key."""

from __future__ import annotations

from contingency.estimate.nouns import (
    CostRange,
    Ends,
    Estimate,
    Evidence,
    Noun,
    RiskEvent,
    ShapeName,
    SystemicRisk,
    WorkPackage,
)

Cells = dict[str, str]

_LEFT_OUT = {
    "revision",
    "previous",
    "data_date",
    "sources",
    "fingerprint",
    "packages",
    "systemic",
    "events",
    "causes",
    "correlations",
    "price_series",
    "changes",
    "account",
    "account_rule",
    "sign_offs",
    "answers",
}
"""Fields of an estimate that differ in every revision, or have a list of their own."""


def cells_of(row: Noun) -> Cells:
    """Return a row as its file has it: text by column, blank cells left out."""
    cells: Cells = {}
    for name in type(row).model_fields:
        value = getattr(row, name)
        if name in {"id", "line"} or value is None:
            continue
        if isinstance(value, CostRange):
            cells |= _range(value, after=name == "after_impact")
        elif isinstance(value, Evidence):
            cells |= _evidence(value)
        else:
            column, text = _COLUMNS.get(name, name), _text(row, name, value)
            if text:
                cells[column] = text
    return cells


_COLUMNS = {"loads": "causes", "shares": "packages"}


def _text(row: Noun, name: str, value: object) -> str:
    """Return one field as a cell."""
    if isinstance(row, SystemicRisk) and name == "packages":
        return ""  # what applies_to stands for
    if isinstance(row, WorkPackage) and name == "loads":
        return "; ".join(f"{load.cause}:{load.weight:g}" for load in row.loads)
    if isinstance(row, RiskEvent) and name == "shares":
        return "; ".join(f"{s.package}:{s.fraction:.6g}" for s in row.shares)
    if isinstance(value, tuple):
        return "; ".join(str(word) for word in value)
    return _plain(value)


def _plain(value: object) -> str:
    """Return one value as text."""
    if isinstance(value, bool):
        return "yes" if value else "no"
    return f"{value:.12g}" if isinstance(value, float) else str(value)


def _range(cost: CostRange, *, after: bool) -> Cells:
    """Return a range as its cells."""
    prefix = "after_" if after else ""
    low, likely, high, outcomes = cost.written
    if not any(cost.written):
        low, likely, high = (
            "" if x is None else f"{x:.12g}" for x in (cost.low, cost.likely, cost.high)
        )
        sign = "=" if cost.shape is ShapeName.POINTS else ":"
        outcomes = "; ".join(f"{a:.12g}{sign}{b:.12g}" for a, b in cost.outcomes)
    cells = {
        f"{prefix}low": low,
        f"{prefix}likely": likely,
        f"{prefix}high": high,
        f"{prefix}outcomes": outcomes,
    }
    if not after:
        cells |= {"ends": str(cost.ends), "shape": cost.shape.value}
    return {name: text for name, text in cells.items() if text}


def _evidence(evidence: Evidence) -> Cells:
    cells = {
        "basis": evidence.basis,
        "basis_kind": evidence.kind or "",
        "given_by": evidence.given_by,
        "given_on": str(evidence.given_on or ""),
    }
    return {name: text for name, text in cells.items() if text}


def cells_of_header(estimate: Estimate) -> Cells:
    """Return estimate.toml as keys and texts; lists by their ids."""
    cells: Cells = {}
    for name in type(estimate).model_fields:
        if name not in _LEFT_OUT:
            cells |= _flat(_KEYS.get(name, name), getattr(estimate, name))
    return cells


_KEYS = {"estimate_class": "class"}


def _flat(name: str, value: object) -> Cells:
    """Return a setting, and what lies in it, by dotted keys."""
    if value is None or value == "":
        return {}
    if isinstance(value, Ends):
        return {name: str(value)}
    if isinstance(value, Noun):
        parts = [
            (f"{name}.{field}", getattr(value, field))
            for field in type(value).model_fields
            if field != "id"
        ]
    elif isinstance(value, tuple):
        parts = [
            (f"{name} {_name_of(item, place)}", item)
            for place, item in enumerate(value, start=1)
        ]
    elif isinstance(value, dict):
        parts = [(f"{name}.{key}", item) for key, item in value.items()]
    else:
        return {name: _plain(value)}
    cells: Cells = {}
    for key, item in parts:
        cells |= _flat(key, item)
    return cells


def _name_of(item: object, place: int) -> str:
    """Return what a line of a list is known by."""
    for field in ("id", "name"):
        name = getattr(item, field, None)
        if isinstance(name, str) and name:
            return name
    return str(place)
