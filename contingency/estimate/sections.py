"""One heading of estimate.toml: its values by key, and where its faults are."""

from __future__ import annotations

import datetime as dt
import math
import re
from collections.abc import Iterable, Mapping
from dataclasses import dataclass
from typing import Any

from contingency.estimate.cells import read_level
from contingency.estimate.fault_list import (
    FaultList,
    Place,
    Problem,
    instead,
    listed,
    nearest,
    shown,
)
from contingency.estimate.faults import (
    CellBlank,
    ControlCharacter,
    KeyMissing,
    KeyUnknown,
    KindWrong,
    NotFinite,
    SettingOutOfRange,
)
from contingency.estimate.toml_lines import KeyLines, KeyPath

FILE = "estimate.toml"
_UNPRINTABLE = re.compile("[\x00-\x08\x0b\x0c\x0e-\x1f\x7f-\x9f\ufffe\uffff]")


@dataclass(frozen=True, kw_only=True, slots=True)
class Section:
    """A table of estimate.toml; its methods return a value, or None and a fault."""

    name: str
    """As messages name it: [contingency], or [contingency] levels 2."""
    values: Mapping[str, Any]
    path: KeyPath
    lines: KeyLines
    faults: FaultList
    file: str = FILE
    """The file, as messages name it."""

    def place(self, key: str = "") -> Place:
        """Return the place of a key, or of the heading."""
        path = (*self.path, key) if key else self.path
        part = f"{self.name} {key}" if self.name and key else self.name or key
        return Place(self.file, self.lines.line(path), part)

    def refuse(self, key: str, problem: Problem) -> None:
        """Note a problem of a key, or of the section where `key` is empty."""
        self.faults.add(self.place(key), problem)

    def check_keys(
        self,
        known: Iterable[str],
        required: Iterable[str],
        elsewhere: Mapping[str, str],
    ) -> None:
        """Note keys that are unknown and keys that are missing.

        `elsewhere` says under which heading a key of another section belongs.
        """
        known = list(known)
        misspelt: set[str | None] = set()
        for key in self.values:
            if key in known:
                continue
            found = f"{self.name or self.file} has no key {shown(key)}."
            if key in elsewhere:
                remedy = f"Move it to {elsewhere[key]}."
            else:
                otherwise = f"Its keys are {listed(known, 'and')}."
                remedy = instead(key, known, otherwise)
                misspelt.add(nearest(key, known))
            rule = ""
            if self.file != FILE:
                rule = f"{self.file} has only the keys that docs/inputs.md lists."
            self.refuse(key, Problem(KeyUnknown, found, remedy, rule))
        for key in required:
            if key not in self.values and key not in misspelt:
                found = f"The key {key} is missing."
                problem = Problem(KeyMissing, found, f"Add a line {key} = ...")
                self.refuse(key, problem)

    def text(self, key: str, *, needed: bool = False) -> str:
        """Return a text; blank where there is none."""
        value = self.values.get(key)
        if value is None:
            return ""
        if not isinstance(value, str):
            self.refuse_kind(key, "a text", "Put it in quotes.")
            return ""
        match = _UNPRINTABLE.search(value)
        if match:
            found = f"The character U+{ord(match[0]):04X} stands in the text."
            problem = Problem(ControlCharacter, found, "Delete it.")
            self.refuse(key, problem)
        text = value.strip()
        if needed and not text:
            found = f"The text {key} is blank." if key else "The text is blank."
            self.refuse(key, Problem(CellBlank, found, "Write it."))
        return text

    def texts(self, key: str) -> tuple[str, ...]:
        """Return a list of texts."""
        entries = [
            self._section(f"{self.name} {key} {i + 1}", {"": value}, key, i)
            for i, value in enumerate(self._list(key))
        ]
        return tuple(entry.text("", needed=True) for entry in entries)

    def day(self, key: str) -> dt.date | None:
        """Return a day."""
        value = self.values.get(key)
        if value is None:
            return None
        if isinstance(value, dt.date) and not isinstance(value, dt.datetime):
            return value
        remedy = "Write a day without quotes and time, as in 2026-03-31."
        self.refuse_kind(key, "a day", remedy)
        return None

    def number(self, key: str) -> float | None:
        """Return a finite number."""
        value = self.values.get(key)
        if value is None:
            return None
        if isinstance(value, bool) or not isinstance(value, int | float):
            remedy = "Write it without quotes, with a decimal point."
            self.refuse_kind(key, "a number", remedy)
            return None
        try:
            number = float(value)
        except OverflowError:
            number = math.inf
        if not math.isfinite(number):
            found = f"{key} is {_digits(value)}."
            remedy = "Write a number that is finite."
            self.refuse(key, Problem(NotFinite, found, remedy))
            return None
        return number

    def number_within(
        self, key: str, low: float, high: float, *, low_included: bool = True
    ) -> float | None:
        """Return a number from `low` to `high`."""
        value = self.number(key)
        if value is None:
            return None
        above = value >= low if low_included else value > low
        if above and value <= high:
            return value
        least = f"at least {low:g}" if low_included else f"more than {low:g}"
        rule = f"{key} is {least}"
        rule += f" and at most {high:g}." if math.isfinite(high) else "."
        problem = Problem(
            SettingOutOfRange,
            f"{key} is {value:.15g}.",
            f"Write a {key} within these bounds.",
            rule,
        )
        self.refuse(key, problem)
        return None

    def whole_within(self, key: str, low: int, high: int) -> int | None:
        """Return a whole number from `low` to `high`."""
        value = self.values.get(key)
        if value is None:
            return None
        if isinstance(value, bool) or not isinstance(value, int):
            remedy = "Write it without quotes, decimal point and exponent."
            self.refuse_kind(key, "a whole number", remedy)
            return None
        if low <= value <= high:
            return value
        rule = f"{key} is a whole number from {low:,} to {high:,}."
        problem = Problem(
            SettingOutOfRange,
            f"{key} is {_digits(value)}.",
            f"Write a {key} within these bounds.",
            rule,
        )
        self.refuse(key, problem)
        return None

    def level(self, key: str) -> int | None:
        """Return whole percent from a level such as P80."""
        value = self.values.get(key)
        if value is None:
            return None
        # A bare 80 is no text either, but the level's own message helps more.
        level = read_level(value if isinstance(value, str) else _digits(value))
        if isinstance(level, Problem):
            remedy = level.remedy.removesuffix(".") + ", in quotes."
            self.refuse(key, Problem(level.kind, level.found, remedy))
            return None
        return level

    def inside(self, key: str) -> Section | None:
        """Return a table within this one; None where there is none."""
        value = self.values.get(key)
        if value is None:
            return None
        if not isinstance(value, dict):
            remedy = f"Write {key} = {{ ... }} with its own keys."
            self.refuse_kind(key, "a table of keys", remedy)
            return None
        name = f"{self.name} {key}" if self.path else f"[{key}]"
        return self._section(name, value, key)

    def each(self, key: str) -> list[Section]:
        """Return the tables of a list within this one."""
        sections = []
        for i, value in enumerate(self._list(key)):
            name = f"{self.name} {key} {i + 1}" if self.path else f"[[{key}]] {i + 1}"
            if isinstance(value, dict):
                sections.append(self._section(name, value, key, i))
                continue
            entry = self._section(name, {"": value}, key, i)
            remedy = "Write it as { ... } with its own keys."
            entry.refuse_kind("", "a table of keys", remedy)
        return sections

    def _list(self, key: str) -> list[Any]:
        value = self.values.get(key, [])
        if isinstance(value, list):
            return value
        self.refuse_kind(key, "a list", "Put it in square brackets.")
        return []

    def _section(
        self, name: str, values: Mapping[str, Any], *steps: str | int
    ) -> Section:
        """Return a section within this one."""
        path = (*self.path, *steps)
        return Section(
            name=name,
            values=values,
            path=path,
            lines=self.lines,
            faults=self.faults,
            file=self.file,
        )

    def refuse_kind(self, key: str, expected: str, remedy: str) -> None:
        """Note a value of another kind than the one expected."""
        value = self.values[key]
        found = f"{key or 'The entry'} is {_kind(value)}, not {expected}."
        self.refuse(key, Problem(KindWrong, found, remedy))


def _kind(value: object) -> str:
    """Return what a TOML value is, with the value where it is short."""
    if isinstance(value, str):
        return f"the text {shown(value)}"
    if isinstance(value, bool):
        return "true" if value else "false"
    if isinstance(value, int | float):
        return _digits(value)
    if isinstance(value, dict):
        return "a table of keys"
    if isinstance(value, list):
        return "a list"
    return f"the time {value}"


def _digits(value: object) -> str:
    """Return a value in digits; numbers of very many digits in words.

    Python refuses to print whole numbers of more than 4,300 digits.
    """
    if isinstance(value, int) and abs(value) >= 10**40:
        return "a number of more than 40 digits"
    return shown(str(value))[1:-1]
