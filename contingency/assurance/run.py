"""Run the checks, match the written answers, say how each check ended."""

from __future__ import annotations

import difflib
from collections.abc import Sequence

from contingency.assurance.answers import STALE_ANSWERS
from contingency.assurance.declaration import (
    AnyCheck,
    Check,
    Hit,
    InputCheck,
    NotApplicable,
    Verdict,
)
from contingency.assurance.findings import CheckOutcome, Finding
from contingency.assurance.material import Material
from contingency.assurance.registry import CHECKS, all_settings
from contingency.assurance.settings import Settings, setting_faults
from contingency.errors import InputError, UnknownCheckAnswered, UnusableEstimate
from contingency.estimate.nouns import Answer, Estimate

Ended = tuple[tuple[Finding, ...], tuple[CheckOutcome, ...]]


def run_input_checks(estimate: Estimate) -> Ended:
    """Run the checks that need no simulation.

    Parameters
    ----------
    estimate : Estimate
        As read; amounts in price-date money.

    Returns
    -------
    findings, outcomes
        Findings in the order of the registry, within a check in file order; one
        outcome for every check, result checks among them as not applicable.

    Raises
    ------
    UnusableEstimate
        unusable-estimate.  [assurance] or [[answers]] name something unknown.
    """
    return _run(estimate, None)


def run_checks(material: Material) -> Ended:
    """Run every check on an estimate and its results.

    Returns and raises as `run_input_checks` does.
    """
    return _run(material.estimate, material)


def assurance_faults(estimate: Estimate) -> list[InputError]:
    """Return what is wrong with [assurance] and [[answers]], in that order."""
    toml = next(
        (
            source.content.decode("utf-8-sig", errors="replace")
            for source in estimate.sources
            if source.name == "estimate.toml"
        ),
        "",
    )
    faults = setting_faults(estimate.assurance, all_settings(), toml=toml)
    return faults + _unknown_answers(estimate.answers)


def _run(estimate: Estimate, material: Material | None) -> Ended:
    faults = assurance_faults(estimate)
    if faults:
        raise UnusableEstimate(estimate.project, faults)
    settings = Settings(estimate.assurance)
    findings: list[Finding] = []
    outcomes: list[CheckOutcome] = []
    ran: set[str] = set()
    for check in CHECKS:
        verdict = _look(check, estimate, material, settings)
        if not isinstance(verdict, NotApplicable):
            ran.add(check.slug)
            findings += [_finding(check, hit, estimate.answers) for hit in verdict]
        outcomes.append(_outcome(check, verdict, settings))
    stale = _stale_answers(estimate.answers, findings, ran)
    findings += [_finding(STALE_ANSWERS, hit, ()) for hit in stale]
    outcomes.append(_outcome(STALE_ANSWERS, stale, settings))
    return tuple(findings), tuple(outcomes)


def _look(
    check: AnyCheck, estimate: Estimate, material: Material | None, settings: Settings
) -> Verdict:
    if isinstance(check, InputCheck):
        return check.look(estimate, settings)
    if material is None:
        return NotApplicable("It needs the results of the simulation.")
    return check.look(material, settings)


def _finding(check: Check, hit: Hit, answers: Sequence[Answer]) -> Finding:
    """Return the finding for `hit`, with the answers that belong to it."""
    mine = [answer for answer in answers if answer.check == check.slug]
    to_row = [a for a in mine if a.where and a.where == hit.where]
    to_whole = [a for a in mine if not a.where]
    return Finding(
        check=check.slug,
        severity=hit.severity,
        where=hit.where,
        message=hit.message,
        todo=hit.todo or check.todo,
        source=check.source,
        answer=next(iter(to_row + to_whole), None),
        rows=hit.rows,
        row_answers=tuple(
            answer for row in hit.rows for answer in mine if answer.where == row
        ),
    )


def _outcome(check: Check, verdict: Verdict, settings: Settings) -> CheckOutcome:
    threshold = settings.printed(check.thresholds)
    if isinstance(verdict, NotApplicable):
        return CheckOutcome(
            check=check.slug,
            title=check.title,
            outcome="not-applicable",
            reason=verdict.reason,
            threshold=threshold,
        )
    return CheckOutcome(
        check=check.slug,
        title=check.title,
        outcome="finding" if verdict else "pass",
        threshold=threshold,
    )


def _stale_answers(
    answers: Sequence[Answer], findings: Sequence[Finding], ran: set[str]
) -> list[Hit]:
    """Return a hit for each answer whose check ran and found nothing to answer."""
    used = {
        (answer.check, answer.where)
        for finding in findings
        for answer in (finding.answer, *finding.row_answers)
        if answer is not None
    }
    return [
        Hit(
            severity=STALE_ANSWERS.severities[0],
            where=answer.where,
            message=(
                f"The answer that {answer.by} gave on {answer.on} to {answer.check}"
                + (f" for {answer.where}" if answer.where else "")
                + " answers nothing that is found in this revision."
            ),
        )
        for answer in answers
        if answer.check in ran and (answer.check, answer.where) not in used
    ]


def _unknown_answers(answers: Sequence[Answer]) -> list[InputError]:
    slugs = [check.slug for check in (*CHECKS, STALE_ANSWERS)]
    return [
        UnknownCheckAnswered(
            where=f'estimate.toml, [[answers]], check = "{answer.check}"',
            found=f"no check is called {answer.check}.",
            rule="An answer names one of the checks in docs/assurance.md.",
            remedy="The nearest name is "
            + difflib.get_close_matches(answer.check, slugs, n=1, cutoff=0.0)[0]
            + ".",
        )
        for answer in answers
        if answer.check not in slugs
    ]
