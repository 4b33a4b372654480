"""The fingerprint of an estimate: one number that changes with any figure."""

from __future__ import annotations

import hashlib
import json
import re
from typing import Any

from contingency.estimate.evidence import named_files
from contingency.estimate.nouns import CostRange, Ends, Estimate, Noun

FORM = "contingency-estimate/1"
"""Name of the canonical form; a new one would change every fingerprint."""

_IN_LISTS = {
    "packages": "id",
    "systemic": "id",
    "events": "id",
    "causes": "id",
    "loads": "cause",
    "shares": "package",
    "history": "id",
    "factors": "id",
    "price_series": "id",
}
"""Lists whose order says nothing, and the field that they are sorted by."""
_IN_SETS = ("applies_to", "excludes", "packages")
"""Lists of words whose order says nothing."""
_SPACING = re.compile(r"[\s_,]")


def fingerprint(estimate: Estimate) -> str:
    """Return SHA-256, hexadecimal, over the canonical form of the estimate.

    Order of rows, form of the CSV files, line numbers and ways of writing a number
    do not change it.  Any figure, word or named evidence file does.
    """
    form = json.dumps(
        canonical_form(estimate),
        ensure_ascii=False,
        allow_nan=False,
        sort_keys=True,
        separators=(",", ":"),
    )
    return hashlib.sha256(form.encode("utf-8")).hexdigest()


def canonical_form(estimate: Estimate) -> dict[str, Any]:
    """Return everything that was read, as plain values in a settled order."""
    skipped = {"sources", "fingerprint", "correlations"}
    form = _filled(
        {
            name: _plain(name, value)
            for name, value in _fields(estimate).items()
            if name not in skipped
        }
    )
    form["form"] = FORM
    form["correlations"] = sorted(
        [*sorted((pair.a, pair.b)), pair.correlation] for pair in estimate.correlations
    )
    content = {source.name: source.content for source in estimate.sources}
    form["evidence"] = {
        name: hashlib.sha256(content[name]).hexdigest()
        for name in sorted(_evidence(estimate))
        if name in content
    }
    return form


def _fields(noun: Noun) -> dict[str, Any]:
    """Return the fields of a noun by name."""
    return {name: getattr(noun, name) for name in type(noun).model_fields}


def _plain(name: str, value: object) -> Any:  # noqa: ANN401  (any JSON value)
    """Return the value of a field as JSON has it, lists without order sorted."""
    if isinstance(value, Ends):
        return str(value)
    if isinstance(value, Noun):
        plain = _filled(
            {k: _plain(k, v) for k, v in _fields(value).items() if k != "line"}
        )
        if isinstance(value, CostRange):
            plain["written"] = [_way_of_writing(cell) for cell in value.written]
        return plain
    if isinstance(value, dict):
        return {str(k): _plain("", v) for k, v in value.items()}
    if isinstance(value, tuple):
        return _ordered(name, [_plain("", item) for item in value])
    if value is None or isinstance(value, str | int | float | bool):
        return value
    return str(value)  # a date


def _filled(fields: dict[str, Any]) -> dict[str, Any]:
    """Return the fields that say something.

    A column that a later version adds, and that an estimate leaves blank, must not
    change the estimate's fingerprint.
    """
    return {k: v for k, v in fields.items() if v not in (None, "", [], {})}


def _ordered(name: str, items: list[Any]) -> list[Any]:
    """Return the items of a list, sorted where their order says nothing."""
    if name in _IN_LISTS and items and isinstance(items[0], dict):
        return sorted(items, key=lambda item: str(item[_IN_LISTS[name]]))
    if name in _IN_SETS:
        return sorted(items)
    return items


def _way_of_writing(cell: str) -> str:
    """Return whether a cell is blank, an amount or a percent; outcomes as written."""
    if ":" in cell or "=" in cell:
        return _SPACING.sub("", cell)
    if not cell:
        return "blank"
    return "percent" if cell.endswith("%") else "amount"


def _evidence(estimate: Estimate) -> set[str]:
    """Return the names of the files that a basis names."""
    bases = [
        *(package.evidence.basis for package in estimate.packages),
        *(risk.evidence.basis for risk in estimate.systemic),
        *(event.evidence.basis for event in estimate.events),
        *(cause.basis for cause in estimate.causes),
        *(series.evidence.basis for series in estimate.price_series),
    ]
    return {name for basis in bases for name in named_files(basis)}
