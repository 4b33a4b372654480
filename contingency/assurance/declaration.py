"""What every check declares: slug, rule, thresholds, severity, source.

A check is one small function with a declaration above it.  Two kinds exist: an
input check looks at the estimate alone, a result check at the estimate and
everything that was computed from it.  ``contingency/assurance/registry.py``
lists them all; ``docs/assurance.md`` is made from the declarations.
"""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass, field
from typing import Literal, NotRequired, TypedDict, Unpack

from contingency.assurance.findings import Severity
from contingency.assurance.material import Material
from contingency.assurance.settings import Settings, Threshold, WordList
from contingency.estimate.nouns import Estimate

Subject = Literal[
    "base estimate",
    "ranges",
    "dependence",
    "systemic risks and events",
    "simulation",
    "level and presentation",
    "allocation and holding",
    "revisions and account",
    "answers",
]

Mark = Literal["READ", "READ-title", "READ-2nd", "MEMORY", "PRACTICE"]

MARKS: dict[Mark, str] = {
    "READ": "passage read",
    "READ-title": "title or abstract read, detail from memory",
    "READ-2nd": "read in a secondary summary",
    "MEMORY": "from memory, not checked against the original",
    "PRACTICE": "common practice, no source",
}
"""How well a source is known, in the words that are printed."""


@dataclass(frozen=True, slots=True)
class Source:
    """Where a check comes from, and how well that is known."""

    text: str
    mark: Mark

    def __str__(self) -> str:
        if self.mark == "PRACTICE":
            return MARKS[self.mark]
        return f"{self.text} [{MARKS[self.mark]}]"


COMMON_PRACTICE = Source("", "PRACTICE")


@dataclass(frozen=True, kw_only=True, slots=True)
class Hit:
    """One place where a check fired."""

    severity: Severity
    message: str
    where: str = ""
    """Id of the row; empty for the whole estimate."""
    rows: tuple[str, ...] = ()
    """Ids of the rows that a hit on the whole estimate rests on."""
    todo: str = ""
    """What to do; empty for the check's own advice."""


@dataclass(frozen=True, slots=True)
class NotApplicable:
    """A check could not run, and why."""

    reason: str


Verdict = list[Hit] | NotApplicable


@dataclass(frozen=True, kw_only=True, slots=True)
class Check:
    """The declaration of one check."""

    slug: str
    """Permanent name, lower case, joined by hyphens."""
    subject: Subject
    title: str
    """The weakness in a few words."""
    catches: str
    """What goes wrong in practice."""
    rule: str
    """What is computed, in words."""
    severities: tuple[Severity, ...]
    """The severities that a finding of this check can have, worst first."""
    todo: str
    """What to do about a finding."""
    sources: tuple[Source, ...]
    thresholds: tuple[Threshold | WordList, ...] = ()

    @property
    def source(self) -> str:
        """All sources with their marks, as printed."""
        return "; ".join(str(source) for source in self.sources)


@dataclass(frozen=True, kw_only=True, slots=True)
class InputCheck(Check):
    """A check that needs only the estimate."""

    look: Callable[[Estimate, Settings], Verdict] = field(repr=False)


@dataclass(frozen=True, kw_only=True, slots=True)
class ResultCheck(Check):
    """A check that needs the results of a simulation too."""

    look: Callable[[Material, Settings], Verdict] = field(repr=False)


AnyCheck = InputCheck | ResultCheck


class Declared(TypedDict):
    """What stands above the function of a check; fields as in `Check`."""

    slug: str
    subject: Subject
    title: str
    catches: str
    rule: str
    severities: tuple[Severity, ...]
    todo: str
    sources: tuple[Source, ...]
    thresholds: NotRequired[tuple[Threshold | WordList, ...]]


def input_check(
    **declared: Unpack[Declared],
) -> Callable[[Callable[[Estimate, Settings], Verdict]], InputCheck]:
    """Return a decorator that makes an input check of the function below it."""

    def declare(look: Callable[[Estimate, Settings], Verdict]) -> InputCheck:
        return InputCheck(look=look, **declared)

    return declare


def result_check(
    **declared: Unpack[Declared],
) -> Callable[[Callable[[Material, Settings], Verdict]], ResultCheck]:
    """Return a decorator that makes a result check of the function below it."""

    def declare(look: Callable[[Material, Settings], Verdict]) -> ResultCheck:
        return ResultCheck(look=look, **declared)

    return declare
