"""What a check finds, and how it ended."""

from __future__ import annotations

from dataclasses import dataclass
from typing import Literal

from contingency.estimate.nouns import Answer

Severity = Literal["stop", "major", "caution", "note"]
Outcome = Literal["pass", "finding", "not-applicable"]


@dataclass(frozen=True, kw_only=True, slots=True)
class Finding:
    """One weakness that a check found."""

    check: str
    """Slug of the check."""
    severity: Severity
    where: str
    """Id of the row, or empty for the whole estimate."""
    message: str
    """One or two sentences with the numbers of this estimate."""
    todo: str
    """What to do about it."""
    source: str
    """Source with its mark, as printed."""
    answer: Answer | None = None
    """The answer to the finding as a whole."""
    rows: tuple[str, ...] = ()
    """Ids of the rows that a finding about the whole estimate rests on."""
    row_answers: tuple[Answer, ...] = ()
    """Answers to single rows of `rows`, in their order."""

    @property
    def is_answered(self) -> bool:
        """Whether an answer covers the whole finding, or one covers each row."""
        if self.answer is not None:
            return True
        answered = {answer.where for answer in self.row_answers}
        return bool(self.rows) and answered >= set(self.rows)

    @property
    def needs_attention(self) -> bool:
        """A stop, or a major without an answer."""
        return self.severity == "stop" or (
            self.severity == "major" and not self.is_answered
        )


@dataclass(frozen=True, kw_only=True, slots=True)
class CheckOutcome:
    """How one check ended."""

    check: str
    title: str
    outcome: Outcome
    reason: str = ""
    """Why a check that is not applicable could not run."""
    threshold: str = ""
    """The thresholds used and their grades, as printed."""
