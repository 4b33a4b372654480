"""The command line: parse, call one function, lay out the answer.

Heavy libraries are imported by the command that needs them, so that `--help` and
`check` answer at once.
"""

from __future__ import annotations

import os
import sys
import traceback
from collections.abc import Sequence

from contingency.cli.console import ATTENTION, DONE, STOPPED, WRONG, complain
from contingency.cli.parser import make_parser
from contingency.errors import (
    ContingencyError,
    InputError,
    ReportError,
    UnusableEstimate,
)
from contingency.version import VERSION

__all__ = ["ATTENTION", "DONE", "WRONG", "main", "make_parser"]


def main(arguments: Sequence[str] | None = None) -> int:
    """Run one command and return its exit status."""
    parser = make_parser()
    options = parser.parse_args(arguments)
    if missing := options.refuse(options):
        parser.error(missing)
    try:
        status: int = options.run(options)
    except ContingencyError as error:
        complain(_laid_out(error))
        return WRONG if isinstance(error, (InputError, ReportError)) else ATTENTION
    except BrokenPipeError:
        # The reader of our output has gone, as `head` does; there is nobody to tell.
        os.dup2(os.open(os.devnull, os.O_WRONLY), sys.stdout.fileno())
        return DONE
    except KeyboardInterrupt:
        complain("Stopped; nothing was written.")
        return STOPPED
    except Exception as error:  # noqa: BLE001  (the last resort, and it tells)
        if options.debug:
            traceback.print_exc()
        complain(
            f"contingency {VERSION} has a fault of its own: "
            f"{type(error).__name__}: {error}\n"
            "Please report this line, and with --debug the rest."
        )
        return WRONG
    return status


def _laid_out(error: ContingencyError) -> str:
    """Return an error in its parts; of an estimate every fault, then the count."""
    if not isinstance(error, UnusableEstimate):
        return error.laid_out()
    faults = [fault.laid_out() for fault in error.faults]
    return "\n\n".join([*faults, f"{error.where}: {error.found} {error.remedy}"])
