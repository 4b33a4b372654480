"""Thresholds of the checks: named settings with a default and a grade.

An organisation may set each of them under ``[assurance]`` in estimate.toml.
A name that no check knows is an input error that gives the nearest name.
"""

from __future__ import annotations

import difflib
from collections.abc import Iterable, Mapping
from dataclasses import dataclass
from typing import Literal

from contingency.errors import (
    AssuranceSettingRefused,
    InputError,
    UnknownAssuranceSetting,
)

Grade = Literal["G", "L", "D", "H"]
Written = Mapping[str, float | int | str | bool]
"""The table [assurance] as read: settings by name."""

GRADES: dict[Grade, str] = {
    "G": "a published guide gives it",
    "L": "a paper supports it",
    "D": "computed",
    "H": "house default, not a standard",
}
"""How well a threshold is founded, in the words that are printed."""


@dataclass(frozen=True, kw_only=True, slots=True)
class Threshold:
    """A number that decides whether a check fires."""

    name: str
    """Name under ``[assurance]``; permanent."""
    default: float
    unit: str
    """What stands behind the number when it is printed: `% of the base`."""
    grade: Grade
    meaning: str
    """What the number decides, in a few words."""
    least: float = 0.0
    """Smallest value that makes sense."""
    most: float = float("inf")
    """Largest value that makes sense."""


@dataclass(frozen=True, kw_only=True, slots=True)
class WordList:
    """Words that a check looks for, written with semicolons between them."""

    name: str
    default: str
    grade: Grade
    meaning: str


class Settings:
    """The thresholds in force: what the estimate sets, else the defaults."""

    def __init__(self, written: Written | None = None) -> None:
        self._written: Written = written or {}

    def number(self, threshold: Threshold) -> float:
        """Return the value of `threshold` in force, in its own unit."""
        return float(self._written.get(threshold.name, threshold.default))

    def words(self, words: WordList) -> tuple[str, ...]:
        """Return the words in force, lower case, in the order written."""
        text = str(self._written.get(words.name, words.default))
        return tuple(w.strip().lower() for w in text.split(";") if w.strip())

    def printed(self, thresholds: Iterable[Threshold | WordList]) -> str:
        """Return the values in force with unit and grade, as the report prints them."""
        return "; ".join(self._printed_one(one) for one in thresholds)

    def _printed_one(self, one: Threshold | WordList) -> str:
        grade = (
            "set in estimate.toml"
            if one.name in self._written
            else f"{one.grade}: {GRADES[one.grade]}"
        )
        if isinstance(one, WordList):
            return f"{one.meaning}: {', '.join(self.words(one))} ({grade})"
        value = f"{self.number(one):g}"
        return f"{one.meaning}: {value} {one.unit}".rstrip() + f" ({grade})"


def setting_faults(
    written: Written,
    known: Iterable[Threshold | WordList],
    *,
    toml: str = "",
) -> list[InputError]:
    """Return one fault for each entry of [assurance] that cannot be used.

    Parameters
    ----------
    written : mapping of name to value
        The table ``[assurance]`` as read.
    known : thresholds and word lists
        Every setting that some check declares.
    toml : str
        Text of estimate.toml, to give the line; may be empty.

    Returns
    -------
    list of InputError
        In the order written: `UnknownAssuranceSetting` with the nearest known
        name, or `AssuranceSettingRefused` for a wrong type or an impossible value.
    """
    by_name = {one.name: one for one in known}
    faults: list[InputError] = []
    for name, value in written.items():
        where = f"{_place(toml, name)}, [assurance] {name}"
        if name not in by_name:
            faults.append(_unknown(where, name, by_name))
        else:
            fault = _refused(where, by_name[name], value)
            if fault is not None:
                faults.append(fault)
    return faults


def _unknown(
    where: str, name: str, known: Mapping[str, Threshold | WordList]
) -> UnknownAssuranceSetting:
    near = difflib.get_close_matches(name, known, n=1, cutoff=0.0)
    return UnknownAssuranceSetting(
        where=where,
        found=f"no check has a setting called {name}.",
        rule="[assurance] holds only the settings listed in docs/assurance.md.",
        remedy=f"The nearest name is {near[0]}." if near else "Remove the line.",
    )


def _refused(
    where: str, one: Threshold | WordList, value: object
) -> AssuranceSettingRefused | None:
    if isinstance(one, WordList):
        if isinstance(value, str) and value.strip(" ;"):
            return None
        return AssuranceSettingRefused(
            where=where,
            found=f"{value!r} is not a list of words.",
            rule="The words stand in one text with semicolons between them.",
            remedy=f'Write for example {one.name} = "{one.default}".',
        )
    if (
        isinstance(value, int | float)
        and not isinstance(value, bool)
        and one.least <= value <= one.most
    ):
        return None
    limits = (
        f"at least {one.least:g}"
        if one.most == float("inf")
        else f"from {one.least:g} to {one.most:g}"
    )
    return AssuranceSettingRefused(
        where=where,
        found=f"the value is {value!r}.",
        rule=f"{one.name} is a number {limits}.",
        remedy=f"Write for example {one.name} = {one.default:g}, the default.",
    )


def _place(toml: str, name: str) -> str:
    """Return the file and, if it can be found, the line that sets `name`."""
    inside = False
    for number, line in enumerate(toml.splitlines(), start=1):
        text = line.strip()
        if text.startswith("["):
            inside = text.startswith("[assurance]")
        elif inside and text.split("=")[0].strip().strip("\"'") == name:
            return f"estimate.toml:{number}"
    return "estimate.toml"
