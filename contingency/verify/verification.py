"""What a verification found: small truths, one line each, and a bottom line."""

from __future__ import annotations

from dataclasses import asdict, dataclass
from typing import Any, Literal

from contingency.record.chain import Entry
from contingency.record.issue_note import IssueNote
from contingency.record.manifest import ManifestCheck
from contingency.record.seal_check import SealsCheck
from contingency.verify.comparison import Comparison
from contingency.verify.printed import PrintedCheck

LineOutcome = Literal["holds", "fails", "not checked"]


@dataclass(frozen=True, kw_only=True, slots=True)
class Line:
    """One line of the table that a reader sees."""

    what: str
    outcome: LineOutcome
    words: str


@dataclass(frozen=True, kw_only=True, slots=True)
class RegisterCheck:
    """The register that was given, and this report's line in it."""

    lines: int
    """Lines that could be read."""
    faults: tuple[str, ...]
    """Where its chain is broken, and what does not fit this report, in words."""
    entry: Entry | None
    """The line of this report."""
    later_issue: Entry | None
    """A later issue of the same revision, which replaces this one."""


@dataclass(frozen=True, kw_only=True, slots=True)
class TypedCheck:
    """The typed sign-offs inside the report."""

    names: tuple[str, ...]
    """Role and name of each, in words."""
    faults: tuple[str, ...]
    """Each that is bound to other content, in words."""


@dataclass(frozen=True, kw_only=True, slots=True)
class RemadeCheck:
    """The report made again from what travels in it."""

    same_bytes: bool
    """Whether the report as issued came out, byte for byte."""
    fault: str
    """Why it could not be made, in words; empty if it was."""


@dataclass(frozen=True, kw_only=True, slots=True)
class Verification:
    """Everything that was found out about one report."""

    project: str
    """As its results name it; empty if they cannot be read."""
    revision: str
    is_issued: bool
    """Whether it carries a note of its issue; a draft does not."""
    note: IssueNote | None
    files: ManifestCheck
    seals: SealsCheck | None
    """None where they could not be looked at."""
    typed: TypedCheck | None
    """None where no typed sign-offs travel in it."""
    register: RegisterCheck | None
    """None where no register was given."""
    recomputed: Comparison | None
    """None where it could not be computed."""
    printed: PrintedCheck | None
    """None where the pages could not be compared."""
    remade: RemadeCheck | None
    """None where it was not made again: a draft, another version, other results."""
    lines: tuple[Line, ...]
    """All of it as a reader sees it."""

    @property
    def holds(self) -> bool:
        """Whether nothing failed, and the figures were reproduced."""
        return self.recomputed is not None and not self._failed

    @property
    def bottom_line(self) -> str:
        """The verdict in one or two sentences."""
        if self._failed:
            return f"This report does not hold: {'; '.join(self._failed)}."
        if not self.holds:
            return "This report was not verified: its figures were not computed again."
        parts = ["This report holds."]
        if self.recomputed and self.recomputed.outcome != "exactly":
            parts.append("Its figures are reproduced within sampling error only.")
        if self.seals is None or not self.seals.seals:
            parts.append("It has no seal, so nothing in it shows who made it.")
        elif any(seal.is_test for seal in self.seals.seals):
            parts.append("It is sealed with a test certificate, which proves nobody.")
        elif any(seal.trusted is None for seal in self.seals.seals):
            parts.append(
                "Nobody was asked to vouch for the names in its seals: give the "
                "certificates that you trust."
            )
        if not self.is_issued:
            parts.append("It carries no note of an issue: it is a draft.")
        if self.register and self.register.later_issue:
            later = self.register.later_issue
            parts.append(f"A later issue replaces it: {later.folder}.")
        return " ".join(parts)

    @property
    def _failed(self) -> list[str]:
        return [line.what for line in self.lines if line.outcome == "fails"]

    def as_dict(self) -> dict[str, Any]:
        """Return all of it as plain values, for JSON."""
        return {
            "holds": self.holds,
            "bottom_line": self.bottom_line,
            **{
                key: asdict(value) if hasattr(value, "__dataclass_fields__") else value
                for key, value in (
                    (name, getattr(self, name))
                    for name in self.__dataclass_fields__
                    if name != "lines"
                )
            },
            "lines": [asdict(line) for line in self.lines],
        }
