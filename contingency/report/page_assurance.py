"""Cross-checks, findings, cautions, and how to compute everything again."""

from __future__ import annotations

import json
from dataclasses import dataclass
from hashlib import sha256

from contingency.assurance.findings import Finding
from contingency.assurance.settings import GRADES
from contingency.estimate.nouns import Answer
from contingency.report.wording import (
    NOTHING,
    Amounts,
    count,
    date,
    fixed,
    grouped_fingerprint,
    plural,
    sentence,
)
from contingency.simulation.cross_check import MomentCheck
from contingency.study import Study

OUTCOMES = {"pass": "passed", "finding": "finding", "not-applicable": "not applicable"}
SEVERITIES = ("stop", "major", "caution", "note")


@dataclass(frozen=True, kw_only=True, slots=True)
class MomentRow:
    """One moment, simulated and in closed form."""

    name: str
    simulated: str
    exact: str
    difference: str
    allowed: str
    outcome: str


@dataclass(frozen=True, kw_only=True, slots=True)
class LevelCheckRow:
    """One level by both routes."""

    name: str
    simulated: str
    second_route: str
    allowed: str
    outcome: str


@dataclass(frozen=True, kw_only=True, slots=True)
class CrossCheckPage:
    """The cross-checks of the run."""

    unit: str
    outcome: str
    moments: tuple[MomentRow, ...]
    levels: tuple[LevelCheckRow, ...]
    second_trials: str
    settled: str
    average_correlation: str


@dataclass(frozen=True, kw_only=True, slots=True)
class AnswerLine:
    """One written answer."""

    row: str
    words: str
    by: str


@dataclass(frozen=True, kw_only=True, slots=True)
class FindingBlock:
    """One finding with its answers."""

    severity: str
    title: str
    where: str
    message: str
    todo: str
    source: str
    answers: tuple[AnswerLine, ...]
    open_words: str
    """What is still missing; empty if nothing is."""


@dataclass(frozen=True, kw_only=True, slots=True)
class CheckRow:
    """One check and how it ended."""

    title: str
    threshold: str
    outcome: str
    reason: str


@dataclass(frozen=True, kw_only=True, slots=True)
class AssurancePage:
    """Findings and all checks."""

    summary: str
    findings: tuple[FindingBlock, ...]
    checks: tuple[CheckRow, ...]


@dataclass(frozen=True, kw_only=True, slots=True)
class CautionsPage:
    """Cautions and the reading guide."""

    stated: tuple[str, ...]
    found: tuple[str, ...]
    """Messages of findings that are printed as cautions."""
    level: str
    percent_words: str
    complement_words: str


@dataclass(frozen=True, kw_only=True, slots=True)
class FileRow:
    """One file inside the report."""

    name: str
    what: str
    length: str
    sha256: str


@dataclass(frozen=True, kw_only=True, slots=True)
class RecordFact:
    """One line of the run record."""

    name: str
    words: str


@dataclass(frozen=True, kw_only=True, slots=True)
class RecordPage:
    """How to compute everything again."""

    files: tuple[FileRow, ...]
    facts: tuple[RecordFact, ...]
    fingerprint: str


def cross_check_page(study: Study, amounts: Amounts) -> CrossCheckPage:
    """Return the cross-checks."""
    check = study.cross_check
    run = study.simulation
    average = study.implied_average_correlation
    return CrossCheckPage(
        unit=amounts.caption,
        outcome="All cross-checks passed." if check.passed else "A cross-check failed.",
        moments=(
            _moment_row("Mean", check.mean, amounts),
            _moment_row("Standard deviation", check.standard_deviation, amounts),
        ),
        levels=tuple(
            LevelCheckRow(
                name=f"P{row.percent:02d}",
                simulated=amounts.cell(row.simulated),
                second_route=amounts.cell(row.second_route),
                allowed=f"{amounts.cell(row.allowed_low)} to "
                f"{amounts.cell(row.allowed_high)}",
                outcome="agree" if row.passed else "differ",
            )
            for row in check.levels
        ),
        second_trials=count(check.second_route_trials),
        settled=(
            "The interval of the target is within the tolerance."
            if run.settled
            else "The interval of the target is wider than the tolerance, although the "
            "largest number of trials was run."
        ),
        average_correlation=(
            "none, for fewer than two packages vary"
            if average is None
            else fixed(average, 2)
        ),
    )


def _moment_row(name: str, check: MomentCheck, amounts: Amounts) -> MomentRow:
    return MomentRow(
        name=name,
        simulated=amounts.cell(check.simulated),
        exact=amounts.cell(check.exact),
        difference=amounts.cell(check.difference),
        allowed=amounts.cell(check.allowed),
        outcome="agree" if check.passed else "differ",
    )


def assurance_page(study: Study) -> AssurancePage:
    """Return findings by weight, and every check with its outcome."""
    titles = {check.check: check.title for check in study.checks_run}
    ordered = sorted(study.findings, key=lambda f: SEVERITIES.index(f.severity))
    return AssurancePage(
        summary=_summary(study),
        findings=tuple(_finding(f, titles.get(f.check, f.check)) for f in ordered),
        checks=tuple(
            CheckRow(
                title=check.title,
                threshold=_grades_short(check.threshold) or NOTHING,
                outcome=OUTCOMES[check.outcome],
                reason=check.reason,
            )
            for check in study.checks_run
        ),
    )


def _grades_short(threshold: str) -> str:
    """Return a threshold with its grades as letters; the page explains them once."""
    for grade, words in GRADES.items():
        threshold = threshold.replace(f"({grade}: {words})", f"({grade})")
    return sentence(threshold)


def _summary(study: Study) -> str:
    ran = plural(len(study.checks_run), "check")
    outcomes = [check.outcome for check in study.checks_run]
    fired = plural(outcomes.count("finding"), "finds something", "find something")
    rest = plural(outcomes.count("not-applicable"), "does", "do")
    found = [
        plural(n, severity)
        for severity in SEVERITIES
        if (n := sum(f.severity == severity for f in study.findings))
    ]
    return (
        f"Of {ran}, {outcomes.count('pass')} passed, {fired} and {rest} not apply. "
        + (f"The findings: {', '.join(found)}." if found else "There are no findings.")
    )


def _finding(finding: Finding, title: str) -> FindingBlock:
    answers = [finding.answer] if finding.answer else []
    answers += finding.row_answers
    needs_answer = finding.severity == "major" and not finding.is_answered
    is_stop = finding.severity == "stop"
    return FindingBlock(
        severity=finding.severity.capitalize(),
        title=title,
        where=finding.where,
        message=sentence(finding.message),
        todo=finding.todo,
        source=finding.source,
        answers=tuple(_answer(answer) for answer in answers),
        open_words=(
            "A stop cannot be answered; it must be removed before sign-off."
            if is_stop
            else "No answer is written yet."
            if needs_answer
            else ""
        ),
    )


def _answer(answer: Answer) -> AnswerLine:
    return AnswerLine(
        row=answer.where, words=answer.answer, by=f"{answer.by}, {date(answer.on)}"
    )


def cautions_page(study: Study) -> CautionsPage:
    """Return what a reader must bear in mind."""
    percent = study.target.percent
    return CautionsPage(
        stated=study.estimate.statements.cautions,
        found=tuple(
            sentence(finding.message)
            for finding in study.findings
            if finding.severity == "caution"
        ),
        level=study.target.name,
        percent_words=f"{percent}",
        complement_words=f"{100 - percent}",
    )


def record_page(study: Study, files: dict[str, tuple[str, bytes]]) -> RecordPage:
    """Return the run record; `files` are name to what it is and its bytes."""
    results = json.loads(files["results.json"][1])
    estimate, run = study.estimate, study.simulation
    facts = (
        ("Tool", f"{results['tool']['name']} {results['tool']['version']}"),
        ("Method", str(results["run"]["method"])),
        ("Seed", str(run.seed)),
        ("Trials", count(run.trials)),
        ("Blocks", f"{count(run.blocks)} of {plural(run.block, 'trial')}"),
        (
            "Least and most",
            f"{count(estimate.run.least)} to {count(estimate.run.most)}",
        ),
        ("Tolerance", f"{100 * run.tolerance:g} % of the target's total"),
        ("Generator", "Philox 4x64, one stream for each input and block"),
    )
    return RecordPage(
        files=tuple(
            FileRow(
                name=name,
                what=what,
                length=count(len(content)),
                sha256=grouped_fingerprint(sha256(content).hexdigest()),
            )
            for name, (what, content) in sorted(files.items())
        ),
        facts=tuple(RecordFact(name=name, words=words) for name, words in facts),
        fingerprint=grouped_fingerprint(estimate.fingerprint),
    )
