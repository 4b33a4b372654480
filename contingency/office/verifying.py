"""Verify: a report and what it is judged by, read from files."""

from __future__ import annotations

import datetime as dt
from collections.abc import Callable, Sequence
from pathlib import Path
from typing import TYPE_CHECKING

from contingency.office.paths import bytes_of

if TYPE_CHECKING:
    from contingency.verify.report import Limits
    from contingency.verify.verification import Verification


def verify_file(
    path: Path,
    *,
    when: dt.datetime,
    register_file: Path | None = None,
    trusted: Sequence[Path] = (),
    make_again: bool = True,
    threads: int = 2,
    limits: Limits | None = None,
    say: Callable[[str], None] | None = None,
) -> Verification:
    """Return what holds of a report; see `contingency.verify.report.verify_report`.

    Parameters
    ----------
    path : Path
        The PDF.
    when : datetime
        Moment at which certificates are judged, with its offset from UTC.
    register_file : Path, optional
        A register.jsonl.
    trusted : sequence of Path
        PEM or DER files of certificates that the reader trusts.
    make_again, threads, limits, say
        See `verify_report`.

    Raises
    ------
    UnusablePath
        unusable-path.  A file cannot be read.
    UnreadableReport, TookTooLong, UnfitCertificate
        See `verify_report`.
    """
    from contingency.verify.report import verify_report

    return verify_report(
        bytes_of(path),
        when=when,
        register=bytes_of(register_file) if register_file else None,
        trusted=[bytes_of(one) for one in trusted],
        make_again=make_again,
        threads=threads,
        limits=limits,
        say=say,
    )
