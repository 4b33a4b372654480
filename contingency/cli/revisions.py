"""compare, drawdown: from one revision to the next."""

from __future__ import annotations

import argparse

from contingency.cli.console import ATTENTION, DONE, print_json, say


def compare(options: argparse.Namespace) -> int:
    """Explain every step from an earlier revision to a later one."""
    from contingency.tracking.comparing import compare_folders

    found = compare_folders(
        options.earlier,
        options.later,
        order=options.order,
        issued=options.issued,
        threads=options.threads,
        say=say(options),
    )
    _done(options)
    if options.json:
        print_json(found.as_object())
    else:
        for line in found.lines():
            print(line)
    return ATTENTION if found.needs_attention else DONE


def drawdown(options: argparse.Namespace) -> int:
    """Set what is left of the contingency against what remaining work needs."""
    from contingency.tracking.accounting import drawdown_of_folder

    found = drawdown_of_folder(
        options.estimate, threads=options.threads, say=say(options)
    )
    _done(options)
    if options.json:
        print_json(found.as_object())
    else:
        for line in found.lines():
            print(line)
    return ATTENTION if found.needs_attention else DONE


def _done(options: argparse.Namespace) -> None:
    """Clear the line that told what is being done."""
    tell = say(options)
    if tell is not None:
        tell("")
