"""A good estimate folder that uses every column, and small edits that spoil it.

The project is made up: a small observatory dome.  Each edit changes one thing, so that
a test can say exactly which fault must follow.
"""

from __future__ import annotations

import csv
import io
import os
import shutil
from collections.abc import Callable
from pathlib import Path

Edit = Callable[[Path], None]
Row = dict[str, str]

ESTIMATE = """\
# An estimate made up for tests.
[estimate]
project = "Hill observatory dome"
revision = "B"
previous = "../rev-a"
gate = "Gate 3"
class = 3
currency = "EUR"
price_date = 2026-03-31
data_date = 2026-04-15
owner = "Sky Trust"
request_base = 3_000_000
requested_total = 3_900_000.0
budget_cap = 4_500_000

[contingency]
target = "P80"
set_by = "Policy 4"
reason = "A single dome"
rounding = 1000
levels = [
  { level = "P50", purpose = "Delivery", holder = "Manager" },
  { level = "P80", purpose = "Funding", holder = "Sponsor" },
  { level = "P5", purpose = "Floor", holder = "Nobody" },
]

[ranges]
ends = "P10-P90"
general_dependence = 0.2

[simulation]
seed = 7
tolerance = 0.002
trials = { least = 8192, most = 65_536 }

[statements]
scope = "Dome, drive and pier."
base = "Measured in March 2026."
assumptions = [
  { id = "A1", text = "One year.", holder = "PM", expires = 2026-12-31, effect = "S" },
]
exclusions = [
  { id = "X1", text = "The telescope.", carried_by = "University", size = "2 M" },
]
cautions = ["All made up.", "Twice made up."]

[assurance]
some_threshold = 0.4
some_switch = true
some_words = "a; b"

[[sign_off]]
role = "prepared"
name = "A. Person"
position = "Engineer"

[[sign_off]]
role = "checked"

[[sign_off]]
role = "approved"

[[answers]]
check = "mirrored-ranges"
where = "P200"
answer = "The makers said so."
by = "A. Person"
on = 2026-04-16
"""

PACKAGES: list[Row] = [
    {
        "id": "P100",
        "name": "Design",
        "group": "Office",
        "base": "200000",
        "spent": "50000",
        "low": "90%",
        "likely": "",
        "high": "130%",
        "ends": "P05-P95",
        "start": "2026-01-05",
        "finish": "2026-09-30",
        "spend": "early",
        "prices": "wages",
        "price_basis": "constant",
        "price_date": "2026-03-31",
        "holds_allowance": "no",
        "progress": "25%",
        "basis": "Hours of two domes: file:hours.csv.",
        "basis_kind": "data",
        "given_by": "Design lead",
        "given_on": "2026-04-02",
    },
    {
        "id": "P200",
        "name": "Dome shell",
        "group": "Works",
        "base": "1_250_000",
        "low": "1,100,000",
        "likely": "1260000",
        "high": "1500000.50",
        "shape": "triangular",
        "causes": "steel:0.6; site:-0.3",
    },
    {
        "id": "P210",
        "name": "Drive",
        "group": "Works",
        "base": "400000",
        "shape": "discrete",
        "outcomes": "95%:0.3; 100%:50%; 520000:0.2",
    },
    {
        "id": "P300",
        "name": "Pier",
        "group": "Ground",
        "base": "300000",
        "shape": "points",
        "outcomes": "P05=92%; P50=104%; P95=420000",
    },
    {
        "id": "P310",
        "name": "Track, and road",
        "group": "Ground",
        "base": "150000",
        "low": "120000",
        "high": "200000",
        "ends": "limits",
        "shape": "uniform",
    },
    {"id": "P400", "name": "Permit", "base": "10000", "shape": "fixed"},
    {
        "id": "P500",
        "name": "Wiring",
        "base": "90000",
        "low": "80%",
        "high": "150%",
        "shape": "lognormal",
        "causes": "steel:0.2",
    },
]

SYSTEMIC: list[Row] = [
    {
        "id": "S1",
        "name": "Definition",
        "low": "-2%",
        "likely": "3%",
        "high": "+10%",
        "ends": "P10-P90",
        "shape": "pert",
        "applies_to": "all",
        "cause": "scope",
        "covers": "Items not drawn",
        "basis": "Five domes",
        "basis_kind": "analogue",
        "given_by": "Lead",
        "given_on": "2026-04-01",
    },
    {
        "id": "S2",
        "name": "Mountain work",
        "shape": "discrete",
        "outcomes": "0%:0.5; 8%:0.5",
        "applies_to": "Works; P310",
    },
]

EVENTS: list[Row] = [
    {
        "id": "E1",
        "name": "Storm on the hill",
        "kind": "threat",
        "happens": "repeatedly",
        "frequency": "1.5",
        "low": "1%",
        "likely": "30000",
        "high": "2.5%",
        "ends": "P10-P90",
        "shape": "pert",
        "packages": "P200:60%; P310:40%",
        "status": "open",
        "window_start": "2026-05-01",
        "window_finish": "2026-10-31",
        "owner": "Site",
        "response": "Anchors",
        "response_cost": "5000",
        "response_package": "P200",
        "response_due": "2026-04-30",
        "response_owner": "Site lead",
        "after_frequency": "0.5",
        "after_low": "10000",
        "after_likely": "15000",
        "after_high": "40000",
        "use": "after",
        "cause": "weather",
        "contract": "shared",
        "retained_share": "60%",
        "clause": "12.3",
        "in_scope": "yes",
        "reviewed_on": "2026-04-01",
        "next_review": "2026-07-01",
        "held_by": "Sponsor",
        "basis": "Station records",
        "basis_kind": "data",
        "given_by": "Site",
        "given_on": "2026-04-01",
    },
    {
        "id": "E2",
        "name": "Pier on poor rock",
        "kind": "threat",
        "probability": "0.3",
        "low": "20000",
        "likely": "40000",
        "high": "90000",
        "packages": "P300",
        "excludes": "E3",
    },
    {
        "id": "E3",
        "name": "Pier without piles",
        "kind": "opportunity",
        "probability": "20%",
        "likely": "35000",
        "shape": "fixed",
        "packages": "P300:100%",
    },
    {
        "id": "E4",
        "name": "Second survey",
        "kind": "threat",
        "probability": "50%",
        "low": "5000",
        "likely": "8000",
        "high": "12000",
        "requires": "E2",
    },
    {
        "id": "E5",
        "name": "Old cable found",
        "kind": "threat",
        "status": "occurred",
    },
    {"id": "E6", "name": "Bats", "kind": "threat", "status": "closed"},
]

CAUSES: list[Row] = [
    {"id": "steel", "name": "Price of steel", "basis": "One market"},
    {"id": "site", "name": "Site conditions", "basis": "One hill"},
]

PRICES: list[Row] = [
    {
        "id": "wages",
        "name": "Engineers' wages",
        "low": "1.5%",
        "likely": "+2.5%",
        "high": "4%",
        "ends": "P10-P90",
        "shape": "pert",
        "basis": "Wage agreement",
        "basis_kind": "data",
        "given_by": "Cost engineer",
        "given_on": "2026-04-02",
    },
    {
        "id": "metal",
        "name": "Metal work",
        "shape": "discrete",
        "outcomes": "-1%:0.25; 2%:0.5; 6%:0.25",
    },
]

TABLES = {
    "packages.csv": PACKAGES,
    "systemic.csv": SYSTEMIC,
    "events.csv": EVENTS,
    "causes.csv": CAUSES,
    "prices.csv": PRICES,
}
EVIDENCE = {"hours.csv": b"dome,hours\nA,900\nB,1100\n"}


def write_good(folder: Path) -> Path:
    """Write the good folder and return it."""
    folder.mkdir(parents=True, exist_ok=True)
    (folder / "estimate.toml").write_text(ESTIMATE, encoding="utf-8")
    for name, rows in TABLES.items():
        write_table(folder / name, rows)
    for name, content in EVIDENCE.items():
        (folder / name).write_bytes(content)
    return folder


def write_table(path: Path, rows: list[Row], *, delimiter: str = ",") -> None:
    """Write rows with all columns that any of them has."""
    columns = list(dict.fromkeys(column for row in rows for column in row))
    with path.open("w", encoding="utf-8", newline="") as file:
        table = csv.DictWriter(
            file, columns, restval="", delimiter=delimiter, lineterminator="\n"
        )
        table.writeheader()
        table.writerows(rows)


def rows_of(path: Path) -> list[Row]:
    """The rows of a table as they are in the folder."""
    return list(csv.DictReader(io.StringIO(path.read_text(encoding="utf-8"))))


# --------------------------------------------------------------------------------------
# Small edits


def cell(file: str, row: str, **values: str) -> Edit:
    """Set cells of the row with this id; of a new row if there is none."""

    def edit(folder: Path) -> None:
        rows = rows_of(folder / file)
        target = next((r for r in rows if r.get("id") == row), None)
        if target is None:
            target = dict.fromkeys(rows[0], "") | {"id": row}
            rows.append(target)
        target.update(values)
        write_table(folder / file, rows)

    return edit


def package(row: str, **values: str) -> Edit:
    """Set cells of packages.csv."""
    return cell("packages.csv", row, **values)


def risk(row: str, **values: str) -> Edit:
    """Set cells of systemic.csv."""
    return cell("systemic.csv", row, **values)


def event(row: str, **values: str) -> Edit:
    """Set cells of events.csv."""
    return cell("events.csv", row, **values)


def swap(file: str, old: str, new: str) -> Edit:
    """Put one text for another; the old one must be there."""

    def edit(folder: Path) -> None:
        text = (folder / file).read_text(encoding="utf-8")
        assert old in text, f"{old!r} is not in {file}"
        (folder / file).write_text(text.replace(old, new, 1), encoding="utf-8")

    return edit


def setting(old: str, new: str) -> Edit:
    """Put one text for another in estimate.toml."""
    return swap("estimate.toml", old, new)


def content(file: str, new: bytes | str) -> Edit:
    """Put other content into a file."""
    as_bytes = new if isinstance(new, bytes) else new.encode("utf-8")
    return lambda folder: (folder / file).write_bytes(as_bytes) and None


def no_file(file: str) -> Edit:
    """Remove a file."""
    return lambda folder: (folder / file).unlink()


def renamed(file: str, new: str) -> Edit:
    """Give a file another name."""
    return lambda folder: (folder / file).rename(folder / new) and None


def a_folder_instead(file: str) -> Edit:
    """Put a folder where a file was."""

    def edit(folder: Path) -> None:
        (folder / file).unlink(missing_ok=True)
        (folder / file).mkdir()

    return edit


def without_column(file: str, column: str) -> Edit:
    """Take a column out of a table."""

    def edit(folder: Path) -> None:
        rows = rows_of(folder / file)
        for row in rows:
            del row[column]
        write_table(folder / file, rows)

    return edit


def correlations(*rows: tuple[str, str, str]) -> Edit:
    """Add correlations.csv, and take the loads out of packages.csv."""

    def edit(folder: Path) -> None:
        without_column("packages.csv", "causes")(folder)
        lines = ["a,b,correlation", *(",".join(row) for row in rows)]
        (folder / "correlations.csv").write_text("\n".join(lines), encoding="utf-8")

    return edit


def in_turn(*edits: Edit) -> Edit:
    """Make several edits as one."""

    def edit(folder: Path) -> None:
        for each in edits:
            each(folder)

    return edit


def gone() -> Edit:
    """Remove the folder itself."""
    return shutil.rmtree


def a_file_instead_of_the_folder() -> Edit:
    """Put a file where the folder was."""

    def edit(folder: Path) -> None:
        shutil.rmtree(folder)
        folder.write_text("no folder", encoding="utf-8")

    return edit


def a_pipe_instead(file: str) -> Edit:
    """Put a named pipe, which nobody writes to, where a file was."""

    def edit(folder: Path) -> None:
        (folder / file).unlink()
        os.mkfifo(folder / file)

    return edit


def a_link_out(file: str) -> Edit:
    """Put the file elsewhere, and a link to it in its place."""

    def edit(folder: Path) -> None:
        elsewhere = folder.parent / f"elsewhere-{file}"
        (folder / file).rename(elsewhere)
        (folder / file).symlink_to(elsewhere)

    return edit


def a_link_to_nothing(file: str) -> Edit:
    """Put a link in the file's place that leads nowhere."""

    def edit(folder: Path) -> None:
        (folder / file).unlink()
        (folder / file).symlink_to(folder / "nothing")

    return edit


def of_size(file: str, megabytes: int) -> Edit:
    """Give a file a size; the rest of it is noughts that take no room on the disk."""
    return lambda folder: os.truncate(folder / file, megabytes * 2**20)


def swap_bytes(file: str, old: bytes, new: bytes) -> Edit:
    """Put some bytes for others; the old ones must be there."""

    def edit(folder: Path) -> None:
        before = (folder / file).read_bytes()
        assert old in before, f"{old!r} is not in {file}"
        (folder / file).write_bytes(before.replace(old, new, 1))

    return edit


def with_mark(file: str) -> Edit:
    """Put a byte-order mark at the head of a file."""

    def edit(folder: Path) -> None:
        (folder / file).write_bytes(b"\xef\xbb\xbf" + (folder / file).read_bytes())

    return edit


def with_line_ends(file: str, end: str) -> Edit:
    """Give a file other line ends."""

    def edit(folder: Path) -> None:
        text = (folder / file).read_bytes()
        (folder / file).write_bytes(text.replace(b"\n", end.encode("ascii")))

    return edit


def with_semicolons(file: str) -> Edit:
    """Separate the cells of a table by semicolons."""
    return lambda folder: write_table(
        folder / file, rows_of(folder / file), delimiter=";"
    )


def every_base_nought() -> Edit:
    """Set all bases to 0, each package fixed."""

    def edit(folder: Path) -> None:
        rows = [
            {
                "id": row["id"],
                "name": "Nothing",
                "group": row.get("group", ""),
                "base": "0",
                "shape": "fixed",
            }
            for row in PACKAGES
        ]
        write_table(folder / "packages.csv", rows)

    return edit
