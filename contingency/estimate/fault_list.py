"""Faults while they are collected: what is wrong, and where, in file order."""

from __future__ import annotations

from collections.abc import Iterable
from dataclasses import dataclass
from difflib import SequenceMatcher, get_close_matches

from contingency.errors import Fault, UnusableEstimate

FILE_ORDER = (
    "estimate.toml",
    "packages.csv",
    "systemic.csv",
    "events.csv",
    "causes.csv",
    "correlations.csv",
    "prices.csv",
    "changes.csv",
    "drawdown.csv",
    "history.csv",
    "ratings.toml",
)
"""The files that are interpreted, in the order in which their faults are listed."""

MOST_KEPT = 1_000
"""Faults of one file that are kept; further ones are counted only.  More than are
ever listed, so that the first ones of the list are the first ones of the file."""

LONGEST_SHOWN = 60
"""Characters of a cell that a message quotes."""


@dataclass(frozen=True, slots=True)
class Problem:
    """A fault that does not yet know its place."""

    kind: type[Fault]
    found: str
    """What is there, with the offending value; one sentence."""
    remedy: str
    """What to do; one sentence."""
    rule: str = ""
    """The rule that is broken, where it is narrower than the law of the kind."""


@dataclass(frozen=True, slots=True)
class Place:
    """Where a fault is, as the user finds it."""

    file: str
    line: int = 0
    """Physical line, from 1; 0 for the file as a whole."""
    part: str = ""
    """Row and column, or heading and key."""
    order: int = 0
    """Position within the line, for sorting."""

    def __str__(self) -> str:
        where = f"{self.file}:{self.line}" if self.line else self.file
        return f"{where}, {self.part}" if self.part else where


class FaultList:
    """The faults of one folder, collected in any order."""

    def __init__(self) -> None:
        self._kept: dict[str, list[tuple[int, int, Fault]]] = {}
        self._seen: set[tuple[Place, Problem]] = set()
        self._uncounted = 0

    def __bool__(self) -> bool:
        return bool(self._kept)

    def add(self, place: Place, problem: Problem) -> None:
        """Note one problem at its place; once, however often it is met."""
        if (place, problem) in self._seen:
            return
        self._seen.add((place, problem))
        kept = self._kept.setdefault(place.file, [])
        if len(kept) >= MOST_KEPT:
            self._uncounted += 1
            return
        fault = problem.kind.at(
            str(place), problem.found, problem.remedy, rule=problem.rule
        )
        kept.append((place.line, place.order, fault))

    def in_file_order(self) -> tuple[Fault, ...]:
        """Return the faults by file, line and position in the line."""
        return tuple(
            fault
            for file in sorted(self._kept, key=_rank)
            for _, _, fault in sorted(self._kept[file], key=lambda kept: kept[:2])
        )

    def error(self, folder: str) -> UnusableEstimate:
        """Return all faults as one error."""
        return UnusableEstimate(folder, self.in_file_order(), uncounted=self._uncounted)


def _rank(file: str) -> tuple[int, str]:
    """Order of the files in the list of faults."""
    return (
        FILE_ORDER.index(file) if file in FILE_ORDER else len(FILE_ORDER),
        file,
    )


def shown(text: str) -> str:
    """Return a cell as messages quote it: one line, printable, not too long."""
    line = " ".join(text.split())
    line = "".join(c if c.isprintable() else f"\\u{ord(c):04x}" for c in line)
    if len(line) > LONGEST_SHOWN:
        line = line[: LONGEST_SHOWN - 1] + "…"
    return f'"{line}"'


def worded(amount: float) -> str:
    """Return an amount of money in words of the report: 12.4 M."""
    amount = float(amount)
    if abs(amount) >= 1e6:
        return f"{amount / 1e6:,.9g} M"
    return f"{amount:,.9g}"


def listed(words: Iterable[str], last: str = "or") -> str:
    """Return words as a sentence lists them: `a, b or c`."""
    words = list(words)
    if len(words) < 2:
        return "".join(words)
    return f"{', '.join(words[:-1])} {last} {words[-1]}"


def nearest(word: str, known: Iterable[str], *, at_least: float = 0.6) -> str | None:
    """Return the known word that the user most likely meant, or None.

    `at_least` is the likeness asked for, 0 to 1 (`difflib`'s ratio).  Of two words
    that are equally like neither is the one: P900 may be P100 or P200.
    """
    by_small = {k.lower(): k for k in known}
    small = word.lower()[:100]
    close = get_close_matches(small, by_small, n=2, cutoff=at_least)
    ratios = [SequenceMatcher(None, candidate, small).ratio() for candidate in close]
    is_tie = len(ratios) == 2 and ratios[0] == ratios[1]
    return by_small[close[0]] if close and not is_tie else None


def instead(word: str, known: Iterable[str], otherwise: str) -> str:
    """Return a remedy for an unknown word: its nearest known one, or `otherwise`."""
    meant = nearest(word, known)
    return f"Write {meant}, if that is meant." if meant else otherwise
