"""Estimate folders for tests, laid out as an engineer would write them."""

from __future__ import annotations

import csv
from pathlib import Path
from typing import Any

ESTIMATE = """\
[estimate]
project = "A made-up project"
revision = "A"
gate = "Gate 3: full funding"
class = 3
currency = "EUR"
price_date = {day}
data_date = {day}
owner = "A made-up organisation"

[contingency]
target = "P{target}"
set_by = "Capital approvals policy, section 4"
reason = "The policy's level for this gate."
rounding = {rounding}
levels = [
  {{ level = "P50", purpose = "Delivery target", holder = "Project manager" }},
  {{ level = "P80", purpose = "Approved funding", holder = "Sponsor" }},
]

[ranges]
ends = "{ends}"
general_dependence = {general_dependence}

[simulation]
seed = {seed}
tolerance = 0.001
trials = {{ least = {trials}, most = {trials} }}

[statements]
scope = "Made up for a test."
"""

Row = dict[str, Any]


def write_rows(path: Path, rows: list[Row]) -> None:
    """Write rows of different columns as one CSV file; a row's own gaps stay blank."""
    columns = list(dict.fromkeys(column for row in rows for column in row))
    with path.open("w", encoding="utf-8", newline="") as file:
        table = csv.DictWriter(file, columns, restval="")
        table.writeheader()
        table.writerows(rows)


def lay_out(
    folder: Path,
    *,
    packages: list[Row],
    systemic: list[Row] | None = None,
    events: list[Row] | None = None,
    causes: list[Row] | None = None,
    prices: list[Row] | None = None,
    day: str = "2026-03-31",
    target: int = 80,
    ends: str = "limits",
    general_dependence: float = 0.0,
    seed: int = 1,
    trials: int = 65_536,
    rounding: float = 1,
) -> Path:
    """Write an estimate folder and return it; rows are dicts of the file's columns.

    Rows without a name are named after their id.  The number of trials is fixed, so
    that a test knows its own sampling error.  `day` is price date and data date.
    """
    folder.mkdir(parents=True, exist_ok=True)
    text = ESTIMATE.format(
        day=day,
        target=target,
        rounding=rounding,
        ends=ends,
        general_dependence=general_dependence,
        seed=seed,
        trials=trials,
    )
    (folder / "estimate.toml").write_text(text, encoding="utf-8")
    for name, rows in (
        ("packages", packages),
        ("systemic", systemic),
        ("events", events),
        ("causes", causes),
        ("prices", prices),
    ):
        if rows:
            named = [{"id": row["id"], "name": row["id"], **row} for row in rows]
            write_rows(folder / f"{name}.csv", named)
    return folder
