"""estimate.toml: what is asked, how it is run, what is said about it."""

from __future__ import annotations

import datetime as dt
import math
import re
import tomllib
from collections.abc import Mapping
from dataclasses import dataclass
from typing import Any

from contingency.estimate.account import ACCOUNT_KEYS, read_account_rule
from contingency.estimate.cells import read_ends
from contingency.estimate.currencies import CURRENCIES
from contingency.estimate.fault_list import (
    FaultList,
    Place,
    Problem,
    instead,
    listed,
    shown,
)
from contingency.estimate.faults import (
    CurrencyUnknown,
    IdTwice,
    KeyMissing,
    KeyUnknown,
    KindWrong,
    LevelTwice,
    SignOffIncomplete,
    TomlSyntax,
    TrialsNotInBlocks,
    TrialsOutOfOrder,
)
from contingency.estimate.history import (
    OUTSIDE_KEYS,
    OUTSIDE_REQUIRED,
    read_outside_rule,
)
from contingency.estimate.nouns import (
    AccountRule,
    Answer,
    Assumption,
    ContingencyRule,
    Ends,
    Exclusion,
    Level,
    OutsideRule,
    Run,
    SignOffLine,
    Statements,
)
from contingency.estimate.sections import FILE, Section
from contingency.estimate.toml_lines import KeyLines

BLOCK = 4_096
"""Trials of one block: a constant of the method."""
LEAST_TRIALS, MOST_TRIALS = 2 * BLOCK, 2**24
"""Trials of one run.  Two blocks at least, for an interval compares blocks; 4,096 at
most, a choice of ours: the totals alone then take 128 MB, and no interval of a
percentile is of use that narrow."""
LEAST_BY_DEFAULT, MOST_BY_DEFAULT = 65_536, 1_048_576
TOLERANCE_BY_DEFAULT = 0.001
"""What holds where [simulation] does not say it.  Choices of ours, named in
``docs/inputs.md``."""

KEYS: dict[str, tuple[str, ...]] = {
    "estimate": (
        "project",
        "revision",
        "previous",
        "gate",
        "class",
        "currency",
        "price_date",
        "data_date",
        "owner",
        "request_base",
        "requested_total",
        "budget_cap",
        "financial_year_starts",
    ),
    "contingency": ("target", "set_by", "reason", "rounding", "levels"),
    "contingency.levels": ("level", "purpose", "holder"),
    "ranges": ("ends", "general_dependence"),
    "simulation": ("seed", "tolerance", "trials"),
    "simulation.trials": ("least", "most"),
    "statements": ("scope", "base", "assumptions", "exclusions", "cautions"),
    "statements.assumptions": ("id", "text", "holder", "expires", "effect"),
    "statements.exclusions": ("id", "text", "carried_by", "size"),
    "sign_off": ("role", "name", "position"),
    "answers": ("check", "where", "answer", "by", "on"),
    **ACCOUNT_KEYS,
    **OUTSIDE_KEYS,
}
"""The keys under each heading of estimate.toml, in the order of docs/inputs.md.
[assurance] takes the names of thresholds, which the assurance room knows."""

REQUIRED: dict[str, tuple[str, ...]] = {
    "estimate": ("project", "revision", "currency", "price_date", "data_date"),
    "contingency": ("target",),
    "contingency.levels": ("level",),
    "simulation": ("seed",),
    "statements.assumptions": ("id", "text"),
    "statements.exclusions": ("id", "text"),
    "sign_off": ("role",),
    "answers": ("check", "answer", "by", "on"),
    **OUTSIDE_REQUIRED,
}
HEADINGS = ("estimate", "contingency", "simulation")
"""Headings that must be there."""
ROLES = ("prepared", "checked", "approved")
"""Lines that every sign-off block has."""

_AT_LINE = re.compile(r" \(at (?:line (\d+), column \d+|end of document)\)")


@dataclass(frozen=True, kw_only=True, slots=True)
class Settings:
    """What estimate.toml says; a value with a fault stands at its default."""

    header: Mapping[str, Any]
    """Fields of the estimate that [estimate] gives."""
    contingency: ContingencyRule
    ends: Ends | None
    ends_are_readable: bool
    general_dependence: float | None
    run: Run
    statements: Statements
    sign_offs: tuple[SignOffLine, ...]
    answers: tuple[Answer, ...]
    assurance: dict[str, float | int | str | bool]
    account_rule: AccountRule
    outside_rule: OutsideRule


def read_settings(text: str, faults: FaultList) -> Settings | None:
    """Return what the text of estimate.toml says; None where it is no TOML.

    Where any fault was noted the result serves to check the other files only.
    """
    try:
        values = tomllib.loads(text)
    except (ValueError, RecursionError) as error:
        faults.add(*_syntax_fault(error, text))
        return None
    root = Section(name="", values=values, path=(), lines=KeyLines(text), faults=faults)
    _check_headings(root)
    ranges = _heading(root, "ranges")
    ends, ends_are_readable = _ends(ranges)
    return Settings(
        header=_header(_heading(root, "estimate")),
        contingency=_rule(_heading(root, "contingency")),
        ends=ends,
        ends_are_readable=ends_are_readable,
        general_dependence=ranges.number_within("general_dependence", 0.0, 1.0),
        run=_run(_heading(root, "simulation")),
        statements=_statements(_heading(root, "statements")),
        sign_offs=_sign_offs(root),
        answers=_answers(root),
        assurance=_assurance(root),
        account_rule=read_account_rule(root.inside("account")),
        outside_rule=read_outside_rule(root.inside("outside_view")),
    )


def _syntax_fault(error: Exception, text: str) -> tuple[Place, Problem]:
    """Return where the text stops being TOML, and why."""
    if isinstance(error, RecursionError):
        found = "Brackets are nested too deeply."
        return Place(FILE), Problem(TomlSyntax, found, "Remove the inner ones.")
    said = str(error)
    match = _AT_LINE.search(said)
    line = int(match[1]) if match and match[1] else 0
    if match and not match[1]:
        line = text.rstrip().count("\n") + 1
    reason = _AT_LINE.sub("", said).rstrip(".")
    found = f"The line cannot be read: {shown(reason)[1:-1]}."
    remedy = "Check quotes, brackets, commas and doubled keys there and just above."
    return Place(FILE, line), Problem(TomlSyntax, found, remedy)


def _check_headings(root: Section) -> None:
    """Note headings that are unknown and headings that are missing."""
    known = [*dict.fromkeys(name.split(".")[0] for name in KEYS), "assurance"]
    for key in root.values:
        if key not in known:
            found = f"estimate.toml has no heading or key {shown(key)}."
            homes = _homes()
            otherwise = f"The headings are {listed(known, 'and')}."
            remedy = instead(key, known, otherwise)
            if key in homes:
                remedy = f"Move it to {homes[key]}."
            root.refuse(key, Problem(KeyUnknown, found, remedy))
    for key in HEADINGS:
        if key not in root.values:
            found = f"The heading [{key}] is missing."
            remedy = f"Add [{key}] with its keys: {', '.join(REQUIRED[key])}."
            problem = Problem(KeyMissing, found, remedy)
            root.faults.add(Place(FILE, part=f"[{key}]"), problem)


def _homes() -> dict[str, str]:
    """Return the heading of every key that stands under one heading only."""
    homes: dict[str, str] = {}
    for name in ("estimate", "contingency", "ranges", "simulation", "statements"):
        homes |= dict.fromkeys(KEYS[name], f"[{name}]")
    return homes


def _heading(root: Section, name: str) -> Section:
    """Return the section of a heading with its keys checked; empty if it is missing."""
    section = root.inside(name)
    if section is None:
        return Section(
            name=f"[{name}]",
            values={},
            path=(name,),
            lines=root.lines,
            faults=root.faults,
        )
    _check(section, name)
    return section


def _check(section: Section, name: str) -> None:
    """Note the unknown and the missing keys of a section of this name."""
    homes = _homes()
    elsewhere = {k: home for k, home in homes.items() if home != f"[{name}]"}
    section.check_keys(KEYS[name], REQUIRED.get(name, ()), elsewhere)


def _header(section: Section) -> dict[str, Any]:
    """Return the fields of the estimate that [estimate] gives."""
    currency = section.text("currency", needed=True)
    if currency and currency not in CURRENCIES:
        found = f"{shown(currency)} is no ISO 4217 code in use."
        remedy = "Write the code, such as EUR or USD."
        if currency.upper() in CURRENCIES:
            remedy = f"Write {currency.upper()}."
        section.refuse("currency", Problem(CurrencyUnknown, found, remedy))
    return {
        "project": section.text("project", needed=True),
        "revision": section.text("revision", needed=True),
        "previous": section.text("previous"),
        "gate": section.text("gate"),
        "estimate_class": section.whole_within("class", 1, 5),
        "currency": currency,
        "price_date": section.day("price_date") or dt.date.min,
        "data_date": section.day("data_date") or dt.date.min,
        "owner": section.text("owner"),
        "request_base": _amount(section, "request_base"),
        "requested_total": _amount(section, "requested_total"),
        "budget_cap": _amount(section, "budget_cap"),
        "financial_year_starts": section.whole_within("financial_year_starts", 1, 12),
    }


def _amount(section: Section, key: str) -> float | None:
    """Return an amount of money that is more than nought."""
    return section.number_within(key, 0.0, math.inf, low_included=False)


def _rule(section: Section) -> ContingencyRule:
    """Return which level is asked for, by whom and why."""
    levels: dict[int, Level] = {}
    for line in section.each("levels"):
        _check(line, "contingency.levels")
        percent = line.level("level")
        if percent is None:
            continue
        level = Level(
            percent=percent, purpose=line.text("purpose"), holder=line.text("holder")
        )
        if percent in levels:
            found = f"The level {level.name} stands in an earlier line."
            remedy = "Keep one of the two lines, or correct the level."
            line.refuse("level", Problem(LevelTwice, found, remedy))
        levels.setdefault(percent, level)
    rounding = section.number_within("rounding", 0.0, math.inf, low_included=False)
    return ContingencyRule(
        target=section.level("target") or 50,
        set_by=section.text("set_by"),
        reason=section.text("reason"),
        rounding=1.0 if rounding is None else rounding,
        levels=tuple(levels.values()),
    )


def _ends(section: Section) -> tuple[Ends | None, bool]:
    """Return what low and high mean, and whether that could be read."""
    text = section.text("ends")
    if not text:
        return None, not section.values.get("ends")
    ends = read_ends(text)
    if isinstance(ends, Problem):
        section.refuse("ends", ends)
        return None, False
    return ends, True


def _run(section: Section) -> Run:
    """Return how the simulation is run."""
    seed = section.whole_within("seed", 0, 2**64 - 1)
    tolerance = section.number_within("tolerance", 0.0, 0.5, low_included=False)
    trials = section.inside("trials")
    least, most = LEAST_BY_DEFAULT, MOST_BY_DEFAULT
    if trials is not None:
        _check(trials, "simulation.trials")
        least = _blocks(trials, "least") or least
        most = _blocks(trials, "most") or max(most, least)
        if least > most:
            found = f"least {least:,} is above most {most:,}."
            remedy = "Swap or correct the two."
            key = "least" if "least" in trials.values else "most"
            trials.refuse(key, Problem(TrialsOutOfOrder, found, remedy))
    return Run(
        seed=seed or 0,
        tolerance=TOLERANCE_BY_DEFAULT if tolerance is None else tolerance,
        least=least,
        most=most,
    )


def _blocks(section: Section, key: str) -> int | None:
    """Return a number of trials that is a whole number of blocks."""
    trials = section.whole_within(key, LEAST_TRIALS, MOST_TRIALS)
    if trials is None or trials % BLOCK == 0:
        return trials
    below = trials // BLOCK * BLOCK
    near = below if below and trials - below <= BLOCK // 2 else below + BLOCK
    found = f"{key} is {trials:,}, which is {trials / BLOCK:.2f} blocks."
    remedy = f"Write {near}, the nearest multiple of {BLOCK:,}."
    section.refuse(key, Problem(TrialsNotInBlocks, found, remedy))
    return None


def _statements(section: Section) -> Statements:
    """Return what the estimate covers, assumes, leaves out and warns of."""
    assumptions = []
    for line in _lines_with_ids(section, "assumptions"):
        assumption = Assumption(
            id=line.text("id"),
            text=line.text("text", needed=True),
            holder=line.text("holder"),
            expires=line.day("expires"),
            effect=line.text("effect"),
        )
        assumptions.append(assumption)
    exclusions = []
    for line in _lines_with_ids(section, "exclusions"):
        exclusion = Exclusion(
            id=line.text("id"),
            text=line.text("text", needed=True),
            carried_by=line.text("carried_by"),
            size=line.text("size"),
        )
        exclusions.append(exclusion)
    return Statements(
        scope=section.text("scope"),
        base=section.text("base"),
        assumptions=tuple(assumptions),
        exclusions=tuple(exclusions),
        cautions=section.texts("cautions"),
    )


def _lines_with_ids(section: Section, key: str) -> list[Section]:
    """Return the lines of a list, each with an id of its own."""
    lines = section.each(key)
    taken: set[str] = set()
    for line in lines:
        _check(line, f"statements.{key}")
        identity = line.text("id", needed=True)
        if identity in taken and identity:
            found = f"The id {shown(identity)} stands in an earlier line."
            remedy = "Give one of the two another id."
            line.refuse("id", Problem(IdTwice, found, remedy))
        taken.add(identity)
    return lines


def _sign_offs(root: Section) -> tuple[SignOffLine, ...]:
    """Return the lines of the sign-off block."""
    lines = []
    roles: list[str] = []
    for line in root.each("sign_off"):
        _check(line, "sign_off")
        role = line.text("role", needed=True)
        if role and role in roles:
            found = f"The role {shown(role)} stands in an earlier line."
            remedy = "Keep one of the two lines, or name another role."
            line.refuse("role", Problem(SignOffIncomplete, found, remedy))
        roles.append(role)
        name, position = line.text("name"), line.text("position")
        lines.append(SignOffLine(role=role, name=name, position=position))
    missing = [role for role in ROLES if role not in roles]
    if roles and missing:
        found = f"The block has no line for {' and '.join(missing)}."
        remedy = "Add [[sign_off]] with the role; its name may stay blank."
        root.refuse("sign_off", Problem(SignOffIncomplete, found, remedy))
    return tuple(lines)


def _answers(root: Section) -> tuple[Answer, ...]:
    """Return the written answers to findings."""
    answers = []
    for line in root.each("answers"):
        _check(line, "answers")
        answer = Answer(
            check=line.text("check", needed=True),
            where=line.text("where"),
            answer=line.text("answer", needed=True),
            by=line.text("by", needed=True),
            on=line.day("on") or dt.date.min,
        )
        answers.append(answer)
    return tuple(answers)


def _assurance(root: Section) -> dict[str, float | int | str | bool]:
    """Return the thresholds that the estimate sets, by name."""
    section = root.inside("assurance")
    if section is None:
        return {}
    thresholds: dict[str, float | int | str | bool] = {}
    for key, value in section.values.items():
        if isinstance(value, bool):
            thresholds[key] = value
        elif isinstance(value, int | float):
            number = section.number(key)
            if number is not None:
                thresholds[key] = value
        elif isinstance(value, str):
            thresholds[key] = section.text(key)
        else:
            found = f"The threshold {shown(key)} is no single value."
            remedy = "Write a number, a text in quotes, true or false."
            section.refuse(key, Problem(KindWrong, found, remedy))
    return thresholds
