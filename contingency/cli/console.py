"""What the commands share: exit statuses, the clock, progress, printing."""

from __future__ import annotations

import argparse
import datetime as dt
import json
import sys
from collections.abc import Callable, Sequence
from contextlib import AbstractContextManager, nullcontext
from typing import TYPE_CHECKING

if TYPE_CHECKING:
    from contingency.assurance.findings import CheckOutcome, Finding
    from contingency.simulation.engine import BlockRunner

DONE = 0
"""Done, and nothing needs attention."""
ATTENTION = 1
"""Done and something needs attention, or the answer is no."""
WRONG = 2
"""The input or the call is wrong; nothing was written."""
STOPPED = 130
"""Stopped from the keyboard; nothing was written."""

CAUTION = (
    "Figures rest on the inputs and assumptions recorded with them.  Your "
    "organisation's policy, local rules and qualified professional judgement come "
    "first."
)

BAR_WIDTH = 40
MOST_PLACES = 6


def now() -> dt.datetime:
    """Return this moment in UTC.  The only place where the clock is read."""
    return dt.datetime.now(dt.UTC).replace(microsecond=0)  # noqa: TID251  (see above)


def moment(options: argparse.Namespace) -> dt.datetime:
    """Return the day that a report carries, at midnight UTC: --date, or today."""
    day = options.date or now().date()
    return dt.datetime.combine(day, dt.time(), tzinfo=dt.UTC)


def complain(text: str) -> None:
    """Print to standard error."""
    print(text, file=sys.stderr)


def print_json(value: object) -> None:
    """Print a result object."""
    print(json.dumps(value, indent=2, ensure_ascii=False, default=str))


def attention(findings: Sequence[Finding]) -> int:
    """Return 1 if a stop or an unanswered major stands, else 0."""
    return ATTENTION if any(f.needs_attention for f in findings) else DONE


def print_findings(
    findings: Sequence[Finding], outcomes: Sequence[CheckOutcome]
) -> None:
    """Print how the checks ended, and each finding with what to do."""
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


def say(options: argparse.Namespace) -> Callable[[str], None] | None:
    """Return how to tell what takes the time: on a terminal's standard error only."""
    if options.quiet or not sys.stderr.isatty():
        return None

    def tell(step: str) -> None:
        print(f"\r\x1b[K{step}", end="", file=sys.stderr, flush=True)

    return tell


def progress_bar(options: argparse.Namespace) -> Callable[[int, int], None] | None:
    """Return a progress bar on standard error, for a terminal only."""
    if options.quiet or not sys.stderr.isatty():
        return None

    def show(done: int, most: int) -> None:
        filled = BAR_WIDTH * done // most
        bar = "█" * filled + "·" * (BAR_WIDTH - filled)
        end = "\r\x1b[K" if done >= most else ""
        line = f"\r{bar} {done:,} of {most:,} trials{end}"
        print(line, end="", file=sys.stderr, flush=True)

    return show


def workers(options: argparse.Namespace) -> AbstractContextManager[BlockRunner | None]:
    """Return where the blocks run: a cluster, or nothing for this process."""
    if not options.workers:
        return nullcontext()
    from contingency.simulation.cluster import cluster

    return cluster(options.workers)


def written(amount: float, step: float) -> str:
    """Return money, a whole multiple of `step`, as the command line prints it."""
    places = 0
    while places < MOST_PLACES and abs(step - round(step, places)) > step * 1e-9:
        places += 1
    return f"{amount:,.{places}f}"
