"""Every error this package raises on purpose, and nothing else.

    ContingencyError
    ├── InputError         the files the user wrote cannot be used as they stand
    │   ├── UnusableEstimate      all faults of one folder, reported together
    │   └── Fault                 one fault of one file; its kinds, each with its slug,
    │                             are in contingency/estimate/faults.py
    ├── AnalysisError      the files are fine but the question cannot be answered
    │   ├── NoSuchCurve           no curve of a shape fits the figures of a range
    │   ├── TooFewTrials          no interval is left around a percentile
    │   └── PartsDoNotClose       parts and total differ by more than rounding

Each class carries a slug that never changes once released.  ``docs/errors.md``
has one heading per slug; ``tests/test_errors.py`` keeps the two in step.
"""

from __future__ import annotations

from typing import TYPE_CHECKING, ClassVar, Self

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


MOST_FAULTS_LISTED = 200
"""Faults of one folder that are listed; the rest is counted.  A choice of ours: a
list that nobody reads to its end, and still one run per kind of mistake."""


class NoSuchCurve(AnalysisError):
    """No curve of the chosen shape fits the figures of a range.

    Raised without a row; the reading room says which row and column it was.
    """

    slug = "no-such-curve"


class TooFewTrials(AnalysisError):
    """The interval of a percentile would reach past the smallest or largest trial."""

    slug = "too-few-trials"


class TooFewProjects(AnalysisError):
    """A history has fewer closed projects than a test of it needs."""

    slug = "too-few-projects"


class PartsDoNotClose(AnalysisError):
    """Parts and total are further apart than rounding can close."""

    slug = "parts-do-not-close"


class UnusableEstimate(InputError):
    """All faults of one estimate folder, in file order."""

    slug = "unusable-estimate"

    def __init__(
        self, folder: str, faults: Iterable[InputError], *, uncounted: int = 0
    ) -> None:
        every = tuple(faults)
        self.faults = every[:MOST_FAULTS_LISTED]
        """The first faults, in file order."""
        self.count = len(every) + uncounted
        """All faults, those that are not listed included."""
        found = f"{self.count:,} problem{'s' if self.count != 1 else ''} in the files."
        if self.count > len(self.faults):
            found += f" The first {len(self.faults)} are listed."
        super().__init__(
            where=folder,
            found=found,
            rule="An estimate is read whole or not at all.",
            remedy="Correct each of the problems listed; nothing was written.",
        )


class Fault(InputError):
    """One fault of one file.  Each kind has one rule, which is its `law`."""

    slug = "fault"
    law: ClassVar[str] = ""

    @classmethod
    def at(cls, where: str, found: str, remedy: str, *, rule: str = "") -> Self:
        """Return the fault at a place such as `packages.csv:14, package P310, low`.

        `rule` is one narrower than the law of the kind, where there is one.
        """
        return cls(where=where, found=found, rule=rule or cls.law, remedy=remedy)


# --- Records: sign-offs, register, seals, verification ------------------------------


class RecordError(ContingencyError):
    """A record of the report cannot be made or read as asked."""

    slug = "record-error"


class DamagedRecord(RecordError, InputError):
    """A file that this program keeps was changed by hand or cut short."""

    slug = "damaged-record"


class BusyRecord(RecordError):
    """Another process is writing the same record."""

    slug = "busy-record"


class NoSuchRole(RecordError, InputError):
    """A sign-off in a role that the estimate does not name."""

    slug = "no-such-role"


class OtherSignatory(RecordError, InputError):
    """A sign-off by someone else than the person named for the role."""

    slug = "other-signatory"


class SamePerson(RecordError):
    """One person would sign in two roles that must be kept apart."""

    slug = "same-person"


class SignOffOutOfTurn(RecordError):
    """A sign-off before the roles ahead of it have signed the same content."""

    slug = "sign-off-out-of-turn"


class SignOffBlocked(RecordError):
    """A stop stands, or a cross-check failed: nobody can sign such a report."""

    slug = "sign-off-blocked"


class IssueRefused(RecordError):
    """The report cannot be issued; `reasons` names everything in its way."""

    slug = "issue-refused"

    def __init__(self, where: str, reasons: Iterable[str]) -> None:
        self.reasons = tuple(reasons)
        super().__init__(
            where=where,
            found=" ".join(self.reasons),
            rule="A report is issued only with every required sign-off in force, "
            "no stop, no major finding without an answer, and cross-checks passed.",
            remedy="Settle each of the points named, then issue again; "
            "nothing was written.",
        )


class AlreadyIssued(RecordError):
    """The revision has been issued before and no reason for another issue is given."""

    slug = "already-issued"


class FolderInTheWay(RecordError):
    """A folder that the register does not know stands where an issue would go."""

    slug = "folder-in-the-way"


class UnreadableReport(RecordError, InputError):
    """A PDF that cannot be taken apart within the limits set for it."""

    slug = "unreadable-report"


class TookTooLong(RecordError):
    """A step of a verification ran into its time limit or its memory limit."""

    slug = "took-too-long"


class UnusablePath(RecordError, InputError):
    """A file that a command was given cannot be read, or stands in the way."""

    slug = "unusable-path"


class NotIssued(RecordError, InputError):
    """A seal was asked for on a PDF that was never issued, such as a draft."""

    slug = "not-issued"


class NoSealField(RecordError, InputError):
    """The PDF has no field for a seal in that role."""

    slug = "no-seal-field"


class AlreadySealed(RecordError):
    """The field of that role holds a seal already."""

    slug = "already-sealed"


class BrokenSeal(RecordError):
    """An earlier seal no longer holds, so another one must not be put on top."""

    slug = "broken-seal"


class WrongPassword(RecordError, InputError):
    """The certificate file does not open with the password given."""

    slug = "wrong-password"


class NoPassword(RecordError, InputError):
    """There is nowhere to take the certificate's password from."""

    slug = "no-password"


class UnfitCertificate(RecordError, InputError):
    """The certificate is expired, not yet valid, or not made for signing."""

    slug = "unfit-certificate"


class NoTimeStamp(RecordError):
    """The time-stamp server gave no usable answer."""

    slug = "no-time-stamp"


class UnknownAssuranceSetting(InputError):
    """A name under [assurance] that no check knows."""

    slug = "unknown-assurance-setting"


class AssuranceSettingRefused(InputError):
    """A value under [assurance] that cannot be a threshold."""

    slug = "assurance-setting-refused"


class UnknownCheckAnswered(InputError):
    """An answer in estimate.toml to a check that does not exist."""

    slug = "unknown-check-answered"


class OutputBlocked(InputError):
    """The folder for the report cannot be made or written to."""

    slug = "output-blocked"


class CrossCheckFailed(AnalysisError):
    """Two ways of computing the same figure disagree; no report is made of it."""

    slug = "cross-check-failed"


class ClusterUnavailable(InputError):
    """The cluster that should run the blocks cannot be used."""

    slug = "cluster-unavailable"


class ReportError(ContingencyError):
    """The report cannot be written, though the results are sound."""

    slug = "report-error"


class TemplateFault(ReportError):
    """A template, a style sheet or another file of the templates folder is wrong."""

    slug = "template-fault"


class CharacterWithoutFont(ReportError):
    """A character of the estimate is in none of the report's fonts."""

    slug = "character-without-font"


class NoTextEngine(ReportError):
    """The library that sets text is not installed."""

    slug = "no-text-engine"


class AttachmentNameTaken(ReportError):
    """Two files would be attached to a report under one name."""

    slug = "attachment-name-taken"


# --- Revisions: comparing, the chain of previous revisions ---------------------------


class RevisionError(InputError):
    """Two estimates, or a chain of them, cannot be put in one history."""

    slug = "revision-error"


class OtherCurrency(RevisionError):
    """Two revisions in different currencies."""

    slug = "other-currency"


class NotRevisions(RevisionError):
    """Two estimates that have no package in common."""

    slug = "not-revisions"


class NoPrevious(RevisionError):
    """The folder that `previous` names is not there or cannot be read."""

    slug = "no-previous"


class RevisionCircle(RevisionError):
    """Revisions that each name the other as the one before."""

    slug = "revision-circle"


class NoAccount(RevisionError):
    """An estimate without drawdown.csv whose account is asked for."""

    slug = "no-account"


class UnusableResults(RevisionError):
    """A results.json of an earlier revision that cannot be used."""

    slug = "unusable-results"


class NotFinished(RevisionError):
    """A close-out of a project that is not finished."""

    slug = "not-finished"
