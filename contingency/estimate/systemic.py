"""systemic.csv: systemic risks, each an uplift on the cost that it acts on."""

from __future__ import annotations

from typing import Literal, cast

from contingency.estimate.evidence import COLUMNS as EVIDENCE
from contingency.estimate.evidence import read_evidence
from contingency.estimate.fault_list import Problem, instead, shown
from contingency.estimate.faults import (
    AppliesToUnclear,
    CellBlank,
    CellWithoutMeaning,
    IdUnknown,
    ModelMissing,
)
from contingency.estimate.folder import EstimateFolder
from contingency.estimate.modelled import Models
from contingency.estimate.nouns import CostRange, SystemicRisk
from contingency.estimate.packages import Packages
from contingency.estimate.ranges import EndsRule, UpliftTerms, read_range
from contingency.estimate.rows import RESERVED, Row
from contingency.estimate.tables import Layout, Table

LAYOUT = Layout(
    file="systemic.csv",
    noun="systemic risk",
    columns=(
        "id",
        "name",
        "low",
        "likely",
        "high",
        "ends",
        "shape",
        "outcomes",
        "applies_to",
        "model",
        "cause",
        "covers",
        *EVIDENCE,
    ),
    required=("id", "name"),
)

Model = Literal["history", "ratings"]
MODELS: tuple[str, ...] = ("history", "ratings")
FIGURE_COLUMNS = ("low", "likely", "high", "ends", "shape", "outcomes")
"""Columns that stay blank where a model gives the uplift."""


def read_systemic(
    table: Table,
    folder: EstimateFolder,
    ends: EndsRule,
    packages: Packages | None,
    models: Models,
) -> tuple[SystemicRisk, ...]:
    """Return the systemic risks that could be read, in file order.

    `packages` is None where packages.csv has no rows to act on; `models` is what a
    row may take its uplift from.
    """
    taken: dict[str, int] = {}
    risks = []
    for row in table.rows:
        risk_id = row.id(taken, reserved=RESERVED)
        name = row.text("name", needed="a title")
        model = row.word("model", MODELS)
        if row.cell("model"):
            uplift = _modelled(row, model, models) if model else None
        else:
            uplift = read_range(row, UpliftTerms(), ends)
        words = row.entries("applies_to") or ["all"]
        acts_on = _acts_on(row, words, packages)
        evidence = read_evidence(row, folder)
        if uplift is None:
            continue
        risk = SystemicRisk(
            id=risk_id,
            name=name,
            uplift=uplift,
            packages=acts_on,
            applies_to=tuple(words),
            model=cast("Model | None", model or None),
            cause=row.text("cause"),
            covers=row.text("covers"),
            evidence=evidence,
            line=row.line,
        )
        risks.append(risk)
    return tuple(risks)


def _modelled(row: Row, model: str, models: Models) -> CostRange | None:
    """Return the uplift that a model gives; None, and the faults, if it gives none."""
    for column in FIGURE_COLUMNS:
        if row.cell(column):
            found = f"The uplift is taken from {model}; {column} says"
            found += f" {shown(row.cell(column))}."
            problem = Problem(CellWithoutMeaning, found, "Empty one of the two cells.")
            row.refuse(column, problem)
    row.text("covers", needed="which part of the cost it covers and which it does not")
    if "covers" not in row.cells:
        found = "The table has no column covers."
        remedy = "Add it, and say which part of the cost the uplift covers."
        row.refuse("model", Problem(CellBlank, found, remedy))
    uplift = models.uplift(model)
    if isinstance(uplift, str):
        remedy = "Supply what is missing, or give the row a low and a high."
        row.refuse("model", Problem(ModelMissing, uplift, remedy))
        return None
    return uplift


def _acts_on(row: Row, words: list[str], packages: Packages | None) -> tuple[str, ...]:
    """Return the ids of the packages that the words of applies_to stand for."""
    if packages is None or packages.ids is None:
        return ()
    if words == ["all"]:
        return tuple(package.id for package in packages.read)
    for word in dict.fromkeys(words):
        problem = _problem_with(word, words, packages.groups, packages.ids)
        if problem is not None:
            row.refuse("applies_to", problem)
    named = set(words)
    return tuple(p.id for p in packages.read if p.id in named or p.group in named)


def _problem_with(
    word: str, words: list[str], groups: frozenset[str], ids: frozenset[str]
) -> Problem | None:
    """Return what is wrong with one word of applies_to."""
    if word == "all":
        remedy = "Write all alone, or the groups and packages that are meant."
        return Problem(AppliesToUnclear, "The word all stands beside others.", remedy)
    if words.count(word) > 1:
        found = f"{shown(word)} stands in the cell twice."
        return Problem(AppliesToUnclear, found, "Name it once.")
    is_group, is_package = word in groups, word in ids
    if is_group and is_package:
        found = f"{shown(word)} is a group and the id of a package."
        return Problem(AppliesToUnclear, found, "Rename the group.")
    if not is_group and not is_package:
        found = f"No group or package is called {shown(word)}."
        otherwise = "Write all, or groups and package ids of packages.csv."
        remedy = instead(word, groups | ids, otherwise)
        return Problem(IdUnknown, found, remedy)
    return None
