"""The words of the command line: commands, options, help, an example each."""

from __future__ import annotations

import argparse
import datetime as dt
import os
from collections.abc import Callable
from pathlib import Path
from typing import Any

from contingency.cli import estimates, offices, revisions
from contingency.cli.console import CAUTION
from contingency.version import VERSION

MOST_THREADS = 256


def make_parser() -> argparse.ArgumentParser:
    """Return the parser of all commands."""
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
    _add_estimate_commands(commands)
    _add_revision_commands(commands)
    _add_office_commands(commands)
    return parser


def _add_estimate_commands(commands: Any) -> None:  # noqa: ANN401  (argparse hides it)
    start = _command(
        commands,
        "start",
        estimates.start,
        "lay out a new estimate folder with commented files",
        "contingency start my-estimate",
    )
    start.add_argument("folder", type=Path, metavar="FOLDER", help="a folder to create")
    check = _command(
        commands,
        "check",
        estimates.check,
        "read and validate an estimate and run the checks that need no simulation",
        "contingency check my-estimate",
    )
    _add_estimate(check)
    report = _command(
        commands,
        "report",
        estimates.report,
        "simulate, set the contingency and write the draft report",
        "contingency report my-estimate --out drafts",
    )
    _add_estimate(report)
    report.add_argument(
        "--out",
        type=Path,
        metavar="DIR",
        help="where the report goes (default: draft- and the name of the folder)",
    )
    _add_templates(report)
    report.add_argument(
        "--date",
        type=_date,
        metavar="YYYY-MM-DD",
        help="date that the report carries (default: today, UTC)",
    )
    _add_threads(report)
    report.add_argument(
        "--workers",
        metavar="PLACE",
        help="run blocks on a Dask cluster: `dask` for one on this machine, or the "
        "address of a scheduler (needs contingency[cluster])",
    )
    calibrate = _command(
        commands,
        "calibrate",
        estimates.calibrate,
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


def _add_revision_commands(commands: Any) -> None:  # noqa: ANN401  (argparse hides it)
    compare = _command(
        commands,
        "compare",
        revisions.compare,
        "explain every step from an earlier revision to a later one",
        "contingency compare rev-b rev-c",
    )
    compare.add_argument(
        "earlier", type=Path, metavar="EARLIER", help="folder of the earlier revision"
    )
    compare.add_argument(
        "later", type=Path, metavar="LATER", help="folder of the later revision"
    )
    compare.add_argument(
        "--order",
        choices=("average", "sequence"),
        metavar="ORDER",
        default="average",
        help="average the effect of a family over all orders, or take the published "
        "order alone (default: average)",
    )
    compare.add_argument(
        "--issued",
        type=Path,
        metavar="RESULTS.json",
        help="results.json of the earlier revision as it was issued",
    )
    _add_threads(compare)
    drawdown = _command(
        commands,
        "drawdown",
        revisions.drawdown,
        "set what is left of the contingency against what remaining work needs",
        "contingency drawdown rev-c",
    )
    _add_estimate(drawdown)
    _add_threads(drawdown)


def _add_office_commands(commands: Any) -> None:  # noqa: ANN401  (argparse hides it)
    sign = _command(
        commands,
        "sign",
        offices.sign,
        "record a sign-off bound to the estimate's inputs and results",
        'contingency sign my-estimate --role checked --name "A. Example"',
    )
    _add_estimate(sign)
    sign.add_argument(
        "--role", required=True, metavar="ROLE", help="role of the signer"
    )
    sign.add_argument("--name", required=True, metavar="NAME", help="who signs")
    for option, text in (
        ("position", "position of the signer (default: as in estimate.toml)"),
        ("comment", "a remark that is printed"),
        ("conditions", "conditions attached to the sign-off, printed with it"),
    ):
        sign.add_argument(f"--{option}", metavar="TEXT", default="", help=text)
    _add_threads(sign)
    issue = _command(
        commands,
        "issue",
        offices.issue,
        "write the final report and add it to the register",
        "contingency issue my-estimate",
    )
    _add_estimate(issue)
    issue.add_argument(
        "--records",
        type=Path,
        metavar="DIR",
        help="folder of register.jsonl and issued/ (default: beside the estimate)",
    )
    issue.add_argument(
        "--reason",
        metavar="TEXT",
        default="",
        help="why a revision that was issued before is issued again",
    )
    _add_templates(issue)
    _add_threads(issue)
    _add_seal(commands)
    verify = _command(
        commands,
        "verify",
        offices.verify,
        "check a report from its PDF alone and compute it again",
        "contingency verify basis-of-contingency.pdf --register register.jsonl",
    )
    verify.add_argument("report", type=Path, metavar="REPORT.pdf", help="the report")
    verify.add_argument(
        "--register",
        type=Path,
        metavar="FILE",
        help="a register.jsonl to look in",
    )
    verify.add_argument(
        "--trust",
        type=Path,
        action="append",
        default=[],
        metavar="CA.pem",
        help="a certificate that you trust; may be given several times",
    )
    _add_threads(verify)


def _add_seal(commands: Any) -> None:  # noqa: ANN401  (argparse hides it)
    seal = _command(
        commands,
        "seal",
        offices.seal,
        "put a digital signature into a role's field of an issued report",
        "contingency seal report.pdf --role approved --certificate me.p12",
    )
    seal.add_argument(
        "report",
        type=Path,
        metavar="REPORT.pdf",
        nargs="?",
        help="the issued report; with --make-test-certificate a folder",
    )
    seal.add_argument("--role", metavar="ROLE", help="whose field is filled")
    seal.add_argument(
        "--certificate", type=Path, metavar="FILE.p12", help="certificate with its key"
    )
    seal.add_argument(
        "--password-file",
        type=Path,
        metavar="FILE",
        help=f"file with the password (else the variable {offices.VARIABLE}, else a "
        "prompt)",
    )
    seal.add_argument(
        "--time-stamps",
        metavar="ADDRESS",
        default="",
        help="a time-stamp server; the seal then has the level B-T",
    )
    seal.add_argument("--out", type=Path, metavar="FILE", help="where the copy goes")
    seal.add_argument(
        "--make-test-certificate",
        metavar="NAME",
        help="make a certificate in this name, for trying out only",
    )
    seal.set_defaults(refuse=_refuse_seal)


def _refuse_seal(options: argparse.Namespace) -> str:
    """Return what is missing in a call of seal, or nothing."""
    if options.make_test_certificate:
        return ""
    missing = [
        name
        for name, value in (
            ("REPORT.pdf", options.report),
            ("--role", options.role),
            ("--certificate", options.certificate),
        )
        if value is None
    ]
    return f"the following arguments are required: {', '.join(missing)}" * bool(missing)


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
    command.set_defaults(run=run, refuse=lambda _options: "")
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


def _add_templates(command: argparse.ArgumentParser) -> None:
    command.add_argument(
        "--templates",
        type=Path,
        metavar="DIR",
        help="an organisation's own copy of report_templates",
    )


def _add_threads(command: argparse.ArgumentParser) -> None:
    command.add_argument(
        "--threads",
        type=_threads,
        default=min(os.cpu_count() or 1, 8),
        metavar="N",
        help="blocks simulated at the same time; changes no figure",
    )


def _date(text: str) -> dt.date:
    try:
        return dt.date.fromisoformat(text)
    except ValueError:
        msg = f"{text!r} is no date like 2026-03-31"
        raise argparse.ArgumentTypeError(msg) from None


def _threads(text: str) -> int:
    if not text.isdigit() or not 1 <= int(text) <= MOST_THREADS:
        msg = f"{text!r} is no count from 1 to {MOST_THREADS}"
        raise argparse.ArgumentTypeError(msg)
    return int(text)
