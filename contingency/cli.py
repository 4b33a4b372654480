"""The command line: parse, call one function, lay out the answer.

Heavy libraries are imported by the command that needs them, so that `--help` and
`check` answer at once.
"""

from __future__ import annotations

import argparse
import json
import os
import sys
import traceback
from collections.abc import Callable, Sequence
from contextlib import AbstractContextManager, nullcontext
from pathlib import Path
from typing import TYPE_CHECKING, Any

from contingency.errors import ContingencyError, InputError, UnusableEstimate
from contingency.version import VERSION

if TYPE_CHECKING:
    from contingency.assurance.findings import CheckOutcome, Finding
    from contingency.simulation.engine import BlockRunner

DONE = 0
"""Done, and nothing needs attention."""
ATTENTION = 1
"""Done and something needs attention, or the answer is no."""
WRONG = 2
"""The input or the call is wrong; nothing was written."""

CAUTION = (
    "Figures rest on the inputs and assumptions recorded with them.  Your "
    "organisation's policy, local rules and qualified professional judgement come "
    "first."
)


def main(arguments: Sequence[str] | None = None) -> int:
    """Run one command and return its exit status."""
    options = _parser().parse_args(arguments)
    try:
        status: int = options.run(options)
    except ContingencyError as error:
        _complain(_laid_out(error))
        return WRONG if isinstance(error, InputError) else ATTENTION
    except BrokenPipeError:
        # The reader of our output has gone, as `head` does; there is nobody to tell.
        os.dup2(os.open(os.devnull, os.O_WRONLY), sys.stdout.fileno())
        return DONE
    except KeyboardInterrupt:
        _complain("Stopped; nothing was written.")
        return 130
    except Exception as error:  # noqa: BLE001  (the last resort, and it tells)
        if options.debug:
            traceback.print_exc()
        _complain(
            f"contingency {VERSION} has a fault of its own: "
            f"{type(error).__name__}: {error}\n"
            "Nothing was written.  Please report this line, and with --debug the rest."
        )
        return WRONG
    return status


def _complain(text: str) -> None:
    print(text, file=sys.stderr)


def _laid_out(error: ContingencyError) -> str:
    """Return an error in its parts; of an estimate every fault, then the count."""
    if not isinstance(error, UnusableEstimate):
        return error.laid_out()
    faults = [fault.laid_out() for fault in error.faults]
    return "\n\n".join([*faults, f"{error.where}: {error.found} {error.remedy}"])


# --------------------------------------------------------------------------------------
# The commands


def _start(options: argparse.Namespace) -> int:
    from contingency.estimate.layout import lay_out

    written = lay_out(options.folder)
    if options.json:
        _print_json({"written": [str(path) for path in written]})
        return DONE
    print(f"A new estimate lies in {options.folder}:")
    for path in written:
        print(f"  {path.name}")
    print(f"Fill in the files, then: contingency check {options.folder}")
    return DONE


def _check(options: argparse.Namespace) -> int:
    from contingency.assurance.run import run_input_checks
    from contingency.estimate.reading import read_estimate

    estimate = read_estimate(options.estimate)
    findings, outcomes = run_input_checks(estimate)
    if options.json:
        _print_json(
            {
                "estimate": {
                    "project": estimate.project,
                    "revision": estimate.revision,
                    "fingerprint": estimate.fingerprint,
                },
                "findings": [_finding_object(finding) for finding in findings],
                "checks_run": [_outcome_object(outcome) for outcome in outcomes],
            }
        )
    else:
        print(f"{estimate.project}, revision {estimate.revision}: the files are sound.")
        _print_findings(findings, outcomes)
    return _attention(findings)


def _report(options: argparse.Namespace) -> int:
    from contingency.estimate.reading import read_estimate
    from contingency.publish import publish_report
    from contingency.study import run_study

    estimate = read_estimate(options.estimate)
    progress = _progress_bar(options)
    with _workers(options) as runner:
        study = run_study(
            estimate, threads=options.threads, progress=progress, runner=runner
        )
    written = publish_report(
        study,
        options.out or Path(f"draft-{options.estimate.resolve().name}"),
        templates=options.templates,
        created=_moment(options),
        say=None if options.quiet or options.json else _say_step,
    )
    if options.json:
        _print_json(study.results())
        return _attention(study.findings)
    target, currency = study.target, estimate.currency
    print(f"{estimate.project}, revision {estimate.revision}")
    print(
        f"  base {estimate.base:,.0f} {currency}; contingency at {target.name} "
        f"{target.contingency:,.0f} {currency}, {target.percent_of_base:.1f} % of base"
    )
    _print_findings(study.findings, study.checks_run)
    for path in written:
        print(f"  wrote {path}")
    print(CAUTION)
    return _attention(study.findings)


# --------------------------------------------------------------------------------------
# What the commands share


def _calibrate(options: argparse.Namespace) -> int:
    from contingency.assurance.calibration import calibrate
    from contingency.estimate.history import read_history_file
    from contingency.results import calibration_object

    projects = [
        project
        for project in read_history_file(options.history)
        if not options.group or project.group == options.group
    ]
    result = calibrate(projects)
    if options.json:
        _print_json(calibration_object(result))
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


def _attention(findings: Sequence[Finding]) -> int:
    """Return 1 if a stop or an unanswered major stands, else 0."""
    return ATTENTION if any(f.needs_attention for f in findings) else DONE


def _print_findings(
    findings: Sequence[Finding], outcomes: Sequence[CheckOutcome]
) -> None:
    passed = sum(outcome.outcome == "pass" for outcome in outcomes)
    skipped = sum(outcome.outcome == "not-applicable" for outcome in outcomes)
    print(
        f"  {len(outcomes)} checks: {passed} passed, {skipped} not applicable here, "
        f"{len(findings)} finding{'' if len(findings) == 1 else 's'}"
    )
    for finding in findings:
        answered = "answered" if finding.is_answered else ""
        label = f"{finding.severity}{', ' + answered if answered else ''}"
        where = f" {finding.where}" if finding.where else ""
        print(f"  {label}: {finding.check}{where}")
        print(f"    {finding.message}")
        if not finding.is_answered:
            print(f"    {finding.todo}")


def _finding_object(finding: Finding) -> dict[str, Any]:
    from contingency.results import finding_object

    return finding_object(finding)


def _outcome_object(outcome: CheckOutcome) -> dict[str, Any]:
    return {
        "check": outcome.check,
        "title": outcome.title,
        "outcome": outcome.outcome,
        "reason": outcome.reason,
    }


def _print_json(value: object) -> None:
    print(json.dumps(value, indent=2, ensure_ascii=False))


def _say_step(step: str) -> None:
    """Tell a person at a terminal what takes the time."""
    if sys.stderr.isatty():
        print(f"\r\x1b[K{step}", end="", file=sys.stderr, flush=True)


def _progress_bar(options: argparse.Namespace) -> Callable[[int, int], None] | None:
    """Return a progress bar on standard error, for a terminal only."""
    if options.quiet or not sys.stderr.isatty():
        return None
    width = 40

    def show(done: int, most: int) -> None:
        filled = width * done // most
        bar = "█" * filled + "·" * (width - filled)
        end = "\r\x1b[K" if done >= most else ""
        line = f"\r{bar} {done:,} of {most:,} trials{end}"
        print(line, end="", file=sys.stderr, flush=True)

    return show


def _workers(
    options: argparse.Namespace,
) -> AbstractContextManager[BlockRunner | None]:
    """Return where the blocks run: a cluster, or nothing for this process."""
    if not options.workers:
        return nullcontext()
    from contingency.simulation.cluster import cluster

    return cluster(options.workers)


def _moment(options: argparse.Namespace) -> Any:  # noqa: ANN401  (a datetime)
    """Return the date that the report carries, at midnight UTC.

    The only place where the clock is read.
    """
    import datetime as dt

    today = dt.datetime.now(dt.UTC).date()  # noqa: TID251  (here the clock enters)
    day = options.date or today
    return dt.datetime.combine(day, dt.time(), tzinfo=dt.UTC)


# --------------------------------------------------------------------------------------
# The parser


def _parser() -> argparse.ArgumentParser:
    parser = argparse.ArgumentParser(
        prog="contingency",
        description=(
            "Set, defend and explain the contingency on a capital project's base "
            "estimate."
        ),
        epilog=(
            "Exit status: 0 done; 1 done and something needs attention; 2 the input or "
            "the call is wrong.  " + CAUTION
        ),
    )
    parser.add_argument("--version", action="version", version=f"contingency {VERSION}")
    commands = parser.add_subparsers(dest="command", required=True, metavar="COMMAND")
    start = _command(
        commands,
        "start",
        _start,
        "lay out a new estimate folder with commented files",
        "contingency start my-estimate",
    )
    start.add_argument("folder", type=Path, metavar="FOLDER", help="a folder to create")
    check = _command(
        commands,
        "check",
        _check,
        "read and validate an estimate and run the checks that need no simulation",
        "contingency check my-estimate",
    )
    _add_estimate(check)
    report = _command(
        commands,
        "report",
        _report,
        "simulate, set the contingency and write the draft report",
        "contingency report my-estimate --out drafts",
    )
    _add_estimate(report)
    _add_report_options(report)
    calibrate = _command(
        commands,
        "calibrate",
        _calibrate,
        "test how often levels of closed projects' history would have been enough",
        "contingency calibrate closed-projects.csv --group quays",
    )
    calibrate.add_argument(
        "history",
        type=Path,
        metavar="HISTORY",
        help="a file of closed projects, as history.csv",
    )
    calibrate.add_argument(
        "--group", metavar="NAME", default="", help="only projects of this group"
    )
    return parser


def _command(
    commands: Any,  # noqa: ANN401  (argparse names the type with an underscore)
    name: str,
    run: Callable[[argparse.Namespace], int],
    summary: str,
    example: str,
) -> argparse.ArgumentParser:
    """Add a command with the options that every command has."""
    command: argparse.ArgumentParser = commands.add_parser(
        name,
        help=summary,
        description=f"{summary[0].upper()}{summary[1:]}.",
        epilog=f"Example: {example}",
    )
    command.set_defaults(run=run)
    command.add_argument("--json", action="store_true", help="print the result object")
    command.add_argument("--quiet", action="store_true", help="show no progress")
    command.add_argument(
        "--debug", action="store_true", help="show the traceback of a fault of ours"
    )
    return command


def _add_estimate(command: argparse.ArgumentParser) -> None:
    command.add_argument(
        "estimate",
        type=Path,
        metavar="ESTIMATE",
        help="folder of one estimate revision",
    )


def _add_report_options(command: argparse.ArgumentParser) -> None:
    command.add_argument(
        "--out",
        type=Path,
        metavar="DIR",
        help="where the report goes (default: draft- and the name of the folder)",
    )
    command.add_argument(
        "--templates",
        type=Path,
        metavar="DIR",
        help="an organisation's own copy of report_templates",
    )
    command.add_argument(
        "--date",
        type=_date,
        metavar="YYYY-MM-DD",
        help="date that the report carries (default: today, UTC)",
    )
    command.add_argument(
        "--threads",
        type=_threads,
        default=min(os.cpu_count() or 1, 8),
        metavar="N",
        help="blocks simulated at the same time; changes no figure",
    )
    command.add_argument(
        "--workers",
        metavar="PLACE",
        help="run blocks on a Dask cluster: `dask` for one on this machine, or the "
        "address of a scheduler (needs contingency[cluster])",
    )


def _date(text: str) -> Any:  # noqa: ANN401  (a date)
    import datetime as dt

    try:
        return dt.date.fromisoformat(text)
    except ValueError:
        msg = f"{text!r} is no date like 2026-03-31"
        raise argparse.ArgumentTypeError(msg) from None


def _threads(text: str) -> int:
    if not text.isdigit() or not 1 <= int(text) <= 256:
        msg = f"{text!r} is no count from 1 to 256"
        raise argparse.ArgumentTypeError(msg)
    return int(text)


if __name__ == "__main__":
    sys.exit(main())
