"""start, check, report, calibrate: one estimate, or the history beside it."""

from __future__ import annotations

import argparse
from contextlib import suppress
from pathlib import Path
from threading import Thread

from contingency.cli.console import (
    CAUTION,
    DONE,
    attention,
    moment,
    now,
    print_findings,
    print_json,
    progress_bar,
    say,
    workers,
    written,
)


def start(options: argparse.Namespace) -> int:
    """Lay out a new estimate folder."""
    from contingency.estimate.layout import lay_out

    written = lay_out(options.folder)
    if options.json:
        print_json({"written": [str(path) for path in written]})
        return DONE
    print(f"A new estimate lies in {options.folder}:")
    for path in written:
        print(f"  {path.name}")
    print(f"Fill in the files, then: contingency check {options.folder}")
    return DONE


def check(options: argparse.Namespace) -> int:
    """Read, validate, run the checks that need no simulation."""
    from contingency.assurance.run import run_input_checks
    from contingency.estimate.reading import read_estimate
    from contingency.office import sign_off_standings
    from contingency.results import finding_object

    estimate = read_estimate(options.estimate)
    findings, outcomes = run_input_checks(estimate)
    standings = sign_off_standings(options.estimate, estimate, when=now())
    signed = [line for line in standings if line.sign_off]
    if options.json:
        print_json(
            {
                "estimate": {
                    "project": estimate.project,
                    "revision": estimate.revision,
                    "fingerprint": estimate.fingerprint,
                },
                "findings": [finding_object(finding) for finding in findings],
                "checks_run": [
                    {
                        "check": outcome.check,
                        "title": outcome.title,
                        "outcome": outcome.outcome,
                        "reason": outcome.reason,
                    }
                    for outcome in outcomes
                ],
                "sign_offs": [
                    {"role": line.role.role, "standing": line.standing}
                    for line in standings
                ],
            }
        )
    else:
        print(f"{estimate.project}, revision {estimate.revision}: the files are sound.")
        print_findings(findings, outcomes)
        for line in signed:
            print(f"  {line.sentence}")
    return attention(findings)


def report(options: argparse.Namespace) -> int:
    """Simulate, set the contingency, write the draft report."""
    warm = Thread(target=_load_typesetting, daemon=True)
    warm.start()
    from contingency.estimate.reading import read_estimate
    from contingency.office import sign_off_standings, typed_words
    from contingency.publish import publish_report
    from contingency.quantities.rounding import round_amount
    from contingency.report.folder import existing_folder
    from contingency.results import as_json
    from contingency.study import run_study

    estimate = read_estimate(options.estimate)
    if options.templates is not None:
        # Before the work, and not after it.
        existing_folder(options.templates)
    with workers(options) as runner:
        study = run_study(
            estimate,
            threads=options.threads,
            progress=progress_bar(options),
            runner=runner,
        )
    results = study.results()
    standings = sign_off_standings(
        options.estimate, estimate, results=as_json(results), when=now()
    )
    paths = publish_report(
        study,
        options.out or Path(f"draft-{options.estimate.resolve().name}"),
        templates=options.templates,
        created=moment(options),
        say=say(options),
        typed=typed_words(standings),
    )
    if options.json:
        print_json(results)
        return attention(study.findings)
    target, currency = study.target, estimate.currency
    step = estimate.contingency.rounding
    base = written(round_amount(estimate.base, step), step)
    contingency = written(round_amount(target.contingency, step), step)
    print(f"{estimate.project}, revision {estimate.revision}")
    print(
        f"  base {base} {currency}; contingency at {target.name} "
        f"{contingency} {currency}, {target.percent_of_base:.1f} % of base"
    )
    print_findings(study.findings, study.checks_run)
    for path in paths:
        print(f"  wrote {path}")
    print(CAUTION)
    return attention(study.findings)


def calibrate(options: argparse.Namespace) -> int:
    """Test how often levels of a history would have been enough."""
    from contingency.assurance.calibration import calibrate as back_test
    from contingency.estimate.history import read_history_file
    from contingency.results import calibration_object

    projects = [
        project
        for project in read_history_file(options.history)
        if not options.group or project.group == options.group
    ]
    result = back_test(projects)
    if options.json:
        print_json(calibration_object(result))
        return DONE
    print(
        f"{len(projects)} closed projects: final cost over estimate is"
        f" {result.fit.quantile(50):.2f} at P50 and {result.fit.quantile(80):.2f} at"
        " P80 for one more."
    )
    for record in result.funded:
        print(f"  {record.sentence}")
    print("  level   enough   share   95 % interval")
    for record in result.pictured:
        print(
            f"  P{record.percent:02d}  {record.enough:4d} of {record.count:<4d}"
            f" {100 * record.share:4.0f} %   {100 * record.low:3.0f} % to"
            f" {100 * record.high:3.0f} %"
        )
    return DONE


def _load_typesetting() -> None:
    """Load the library that sets the pages, while the figures are computed.

    Where it cannot be loaded the report says so itself, with the remedy.
    """
    with suppress(ImportError, OSError):
        import weasyprint  # noqa: F401
