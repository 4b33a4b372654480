"""history.csv and [outside_view]: what similar projects came to.

Whether the projects can be compared with this one is no fault of the file: what is
not declared, or too little, keeps the outside view from being used, and assurance
says so.
"""

from __future__ import annotations

import math
from dataclasses import replace
from itertools import pairwise
from pathlib import Path

from contingency.estimate.fault_list import FaultList, Problem, shown
from contingency.estimate.faults import (
    AmountUnclear,
    CellBlank,
    PercentUnwanted,
    PointsOutOfOrder,
    SharesNotWhole,
)
from contingency.estimate.folder import EstimateFolder
from contingency.estimate.nouns import ClosedProject, OutsideRule, UpliftPart
from contingency.estimate.rows import Row
from contingency.estimate.sections import Section
from contingency.estimate.tables import Layout, Table, read_table

LAYOUT = Layout(
    file="history.csv",
    noun="project",
    columns=("id", "name", "group", "estimate", "final", "covered", "notes"),
    required=("id", "estimate", "final"),
)

OUTSIDE_KEYS: dict[str, tuple[str, ...]] = {
    "outside_view": (
        "stage",
        "money",
        "scope",
        "group",
        "source",
        "percentiles",
        "uplifts",
    ),
    "outside_view.uplifts": ("kind", "share", "upper", "managed"),
}
"""The keys under [outside_view] of estimate.toml."""
OUTSIDE_REQUIRED: dict[str, tuple[str, ...]] = {
    "outside_view.uplifts": ("kind", "share", "upper"),
}
PERCENTILES = tuple(f"P{percent}" for percent in range(1, 100))
"""The keys of `percentiles`."""

_SHARES_TOLERANCE = 1e-9
# How far shares written in decimals may miss 100 % by rounding.


def read_history(table: Table) -> tuple[ClosedProject, ...]:
    """Return the closed projects that could be read, in file order."""
    taken: dict[str, int] = {}
    projects = []
    for row in table.rows:
        identity = row.id(taken)
        estimate = _amount(row, "estimate", "the base estimate at the same gate")
        final = _amount(row, "final", "the final cost, in the same money")
        if estimate is not None and final is not None:
            projects.append(
                ClosedProject(
                    id=identity,
                    name=row.text("name"),
                    group=row.text("group"),
                    estimate=estimate,
                    final=final,
                    covered=_covered(row, final),
                    notes=row.text("notes"),
                    line=row.line,
                )
            )
    return tuple(projects)


def read_history_file(path: Path | str) -> tuple[ClosedProject, ...]:
    """Return the closed projects of a file that lies anywhere, in file order.

    Parameters
    ----------
    path : path
        A file of the form of history.csv, of any name.

    Raises
    ------
    UnusableEstimate
        unusable-estimate.  Its `faults` are all problems of the file.
    """
    path, faults = Path(path), FaultList()
    folder = EstimateFolder(path.parent, frozenset({path.name}), faults)
    table = read_table(folder, replace(LAYOUT, file=path.name), faults)
    projects = read_history(table) if table is not None else ()
    if faults or table is None:
        raise faults.error(str(path))
    return projects


def read_outside_rule(section: Section | None) -> OutsideRule:
    """Return what [outside_view] says; nothing where there is no such heading."""
    if section is None:
        return OutsideRule()
    section.check_keys(OUTSIDE_KEYS["outside_view"], (), {})
    return OutsideRule(
        stage=section.text("stage"),
        money=section.text("money"),
        scope=section.text("scope"),
        group=section.text("group"),
        source=section.text("source"),
        percentiles=_percentiles(section),
        uplifts=_uplifts(section),
    )


def _percentiles(section: Section) -> tuple[tuple[int, float], ...]:
    """Return the percentile table; overruns are written in percent of the base."""
    inside = section.inside("percentiles")
    if inside is None:
        return ()
    inside.check_keys(PERCENTILES, (), {})
    points = []
    for name in PERCENTILES:
        overrun = inside.number_within(name, -100.0, math.inf, low_included=False)
        if overrun is not None:
            points.append((int(name[1:]), overrun / 100.0))
    for (low, below), (high, above) in pairwise(points):
        if above < below:
            found = f"P{high} is {100 * above:g}, below {100 * below:g} at P{low}."
            problem = Problem(PointsOutOfOrder, found, "Correct one of the two.")
            inside.refuse(f"P{high}", problem)
    if len(points) == 1:
        found = "One percentile is given."
        problem = Problem(PointsOutOfOrder, found, "Give at least one more.")
        section.refuse("percentiles", problem)
    return tuple(points)


def _uplifts(section: Section) -> tuple[UpliftPart, ...]:
    """Return the parts of a published uplift; figures are written in percent."""
    parts = []
    for line in section.each("uplifts"):
        name = "outside_view.uplifts"
        line.check_keys(OUTSIDE_KEYS[name], OUTSIDE_REQUIRED[name], {})
        share = line.number_within("share", 0.0, 100.0)
        upper = line.number_within("upper", 0.0, math.inf)
        managed = line.number_within("managed", 0.0, 100.0)
        parts.append(
            UpliftPart(
                kind=line.text("kind", needed=True),
                share=(share or 0.0) / 100.0,
                upper=(upper or 0.0) / 100.0,
                managed=(managed or 0.0) / 100.0,
            )
        )
    whole = math.fsum(part.share for part in parts)
    if parts and abs(whole - 1.0) > _SHARES_TOLERANCE:
        found = f"The shares add up to {100 * whole:.10g} %."
        rule = "The shares of the kinds of work sum to 100 %."
        problem = Problem(SharesNotWhole, found, "Correct the shares.", rule)
        section.refuse("uplifts", problem)
    return tuple(parts)


def _covered(row: Row, final: float) -> float:
    """Return the part of the final cost that ranges and events cover; 0 if blank."""
    figure = row.figure("covered")
    if figure is None:
        return 0.0
    covered = float(figure.value)
    if figure.is_percent or not 0.0 <= covered < final:
        found = f"The amount is {shown(row.cell('covered'))}."
        rule = "What is covered is a part of the final cost, an amount below it."
        problem = Problem(AmountUnclear, found, "Write the part alone.", rule)
        row.refuse("covered", problem)
    return covered


def _amount(row: Row, column: str, needed: str) -> float | None:
    """Return an amount above nought."""
    text = row.text(column, needed=needed)
    figure = row.figure(column) if text else None
    if figure is None:
        return None
    problem: Problem | None = None
    if figure.is_percent:
        found = f"{shown(text)} is a percent."
        problem = Problem(PercentUnwanted, found, "Write the amount.")
    elif figure.value <= 0:
        found = f"The amount is {shown(text)}."
        problem = Problem(CellBlank, found, "Write what it came to, or drop the row.")
    if problem is not None:
        row.refuse(column, problem)
        return None
    return float(figure.value)
