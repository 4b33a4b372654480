"""The difference list: every cell of the inputs that differs, row by row.

Rows are paired by id; renamed rows are followed.  Cells are shown as the files have
them, or, where an estimate was not read from a file, as its figures.
"""

from __future__ import annotations

import re
from collections.abc import Iterable, Mapping
from dataclasses import dataclass

from contingency.estimate.nouns import Change, Estimate, Noun
from contingency.tracking.cells import Cells, cells_of, cells_of_header
from contingency.tracking.matching import Match
from contingency.tracking.restating import is_price_line


@dataclass(frozen=True, kw_only=True, slots=True)
class Difference:
    """One cell that differs between two revisions."""

    file: str
    """As in the folder: packages.csv, estimate.toml."""
    id: str
    """Row in the later revision, or in the earlier one for a row that has gone; blank
    for the estimate as a whole."""
    field: str
    """Column or key; `row` where the whole row is new or gone."""
    old: str
    new: str
    reason: str
    """From changes.csv; blank where no line says why."""
    by: str

    @property
    def feeds_the_result(self) -> bool:
        """Whether base or contingency are computed from the cell."""
        return self.field in _FIGURES or self.field in _COMPUTED_FROM


_FIGURES = {
    "row",
    "id",
    "base",
    "spent",
    "low",
    "likely",
    "high",
    "ends",
    "shape",
    "outcomes",
    "causes",
    "applies_to",
    "kind",
    "probability",
    "happens",
    "frequency",
    "requires",
    "excludes",
    "status",
    "use",
    "after_probability",
    "after_frequency",
    "after_low",
    "after_likely",
    "after_high",
    "after_outcomes",
    "correlation",
    "price_date",
}
"""Columns that a figure of the result is computed from."""


def differences(match: Match) -> tuple[Difference, ...]:
    """Return every cell that differs, in the order of the files."""
    old, new = match.relabelled, match.later
    found: list[Difference] = []
    found += _header(match, cells_of_header(old), cells_of_header(new))
    found += _successions(match)
    for file, before, after in (
        ("packages", old.packages, new.packages),
        ("systemic", old.systemic, new.systemic),
        ("events", old.events, new.events),
        ("causes", old.causes, new.causes),
        ("prices", old.price_series, new.price_series),
    ):
        found += _rows(match, file, _table(before), _table(after))
    found += _rows(match, "correlations", _pairs(old), _pairs(new))
    return tuple(found)


def _table(rows: Iterable[Noun]) -> Mapping[str, Cells]:
    return {str(getattr(row, "id")): cells_of(row) for row in rows}  # noqa: B009


def _pairs(estimate: Estimate) -> Mapping[str, Cells]:
    return {
        " and ".join(sorted((pair.a, pair.b))): {"correlation": f"{pair.correlation:g}"}
        for pair in estimate.correlations
    }


def _header(match: Match, old: Cells, new: Cells) -> list[Difference]:
    lines = [c for c in match.later.changes if c.file == "estimate"]
    found = []
    for name in dict.fromkeys((*old, *new)):
        if old.get(name, "") != new.get(name, ""):
            said = [c for c in lines if _is_about(c, name)]
            found.append(
                _difference(
                    "estimate.toml",
                    "",
                    name,
                    old.get(name, ""),
                    new.get(name, ""),
                    said,
                )
            )
    return found


def _is_about(change: Change, key: str) -> bool:
    """Whether a line about estimate.toml is about one of its keys.

    It names the key or its heading; without a name it is about what the figures are
    computed from.
    """
    if is_price_line(change):
        return key == "price_date"
    if not change.id:
        return key in _COMPUTED_FROM
    return change.id in re.split("[. ]", key)


_COMPUTED_FROM = {"contingency.target", "ends", "general_dependence"}


def _successions(match: Match) -> list[Difference]:
    """Return a line for every renaming, split and merger."""
    return [
        Difference(
            file=f"{change.file}.csv",
            id=", ".join(change.into),
            field="id",
            old=", ".join(change.before),
            new=", ".join(change.into),
            reason=change.reason,
            by=change.by,
        )
        for change in match.later.changes
        if change.before
    ]


def _rows(
    match: Match, file: str, old: Mapping[str, Cells], new: Mapping[str, Cells]
) -> list[Difference]:
    found: list[Difference] = []
    name = f"{file}.csv"
    for row in dict.fromkeys((*new, *old)):
        said = _lines(match, file, row)
        before, after = old.get(row), new.get(row)
        if before is None or after is None:
            title = (after or before or {}).get("name", "")
            states = (
                ("", title or "there") if before is None else (title or "there", "")
            )
            found.append(_difference(name, row, "row", *states, said))
            continue
        for field in dict.fromkeys((*after, *before)):
            was, is_now = before.get(field, ""), after.get(field, "")
            if was != is_now:
                found.append(_difference(name, row, field, was, is_now, said))
    return found


def _lines(match: Match, file: str, row: str) -> list[Change]:
    names = {row, match.old_id(file, row)}
    return [
        change
        for change in match.later.changes
        if change.file == file
        and (change.id in names or names & {*change.before, *change.into})
    ]


def _difference(
    file: str, row: str, field: str, old: str, new: str, said: list[Change]
) -> Difference:
    return Difference(
        file=file,
        id=row,
        field=field,
        old=old,
        new=new,
        reason=" ".join(dict.fromkeys(change.reason for change in said)),
        by=", ".join(dict.fromkeys(change.by for change in said)),
    )
