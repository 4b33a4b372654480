"""Every error this package raises on purpose, and nothing else.

    ContingencyError
    ├── InputError         the files the user wrote cannot be used as they stand
    │   ├── UnusableEstimate      all faults of one folder, reported together
    │   └── ...                   one class per kind of fault, each with its slug
    └── AnalysisError      the files are fine but the question cannot be answered

Each class carries a slug that never changes once released.  ``docs/errors.md``
has one heading per slug; ``tests/test_errors.py`` keeps the two in step.
"""

from __future__ import annotations

from typing import TYPE_CHECKING, ClassVar

if TYPE_CHECKING:
    from collections.abc import Iterable


class ContingencyError(Exception):
    """Base of every error raised on purpose.

    A message has four parts, in this order: where, what was found, the rule
    it breaks, and what to do next.  They stay separate attributes so that the
    command line can lay them out and a test can check each one alone.
    """

    slug: ClassVar[str] = "contingency-error"

    def __init__(self, where: str, found: str, rule: str, remedy: str) -> None:
        super().__init__(where, found, rule, remedy)
        self.where, self.found, self.rule, self.remedy = where, found, rule, remedy

    def __str__(self) -> str:
        return f"{self.where}: {self.found} {self.rule} {self.remedy} [{self.slug}]"

    def laid_out(self) -> str:
        """Return the message as the command line prints it, in five lines."""
        return (
            f"{self.where}\n"
            f"  found   {self.found}\n"
            f"  rule    {self.rule}\n"
            f"  do      {self.remedy}\n"
            f"  see     docs/errors.md#{self.slug}"
        )


class InputError(ContingencyError):
    """The files of an estimate cannot be used as they stand."""

    slug = "input-error"


class AnalysisError(ContingencyError):
    """The estimate is sound but the question cannot be answered from it."""

    slug = "analysis-error"


class UnusableEstimate(InputError):
    """All faults of one estimate folder, in file order."""

    slug = "unusable-estimate"

    def __init__(self, folder: str, faults: Iterable[InputError]) -> None:
        self.faults = tuple(faults)
        count = len(self.faults)
        super().__init__(
            where=folder,
            found=f"{count} problem{'s' if count != 1 else ''} in the input files.",
            rule="An estimate is read whole or not at all.",
            remedy="Correct each of the problems listed; nothing was written.",
        )
