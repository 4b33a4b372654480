"""The estimate inside a report, read and computed again in a process apart."""

from __future__ import annotations

import datetime as dt
import json
from collections.abc import Mapping
from dataclasses import dataclass
from typing import TYPE_CHECKING, Any

from contingency.errors import ContingencyError, UnreadableReport, UnusableEstimate
from contingency.record.apart import Answer, Apart

if TYPE_CHECKING:
    from contingency.study import Study


@dataclass(frozen=True, kw_only=True, slots=True)
class Recomputed:
    """What the embedded inputs give today."""

    fingerprint: str
    """Of the inputs, as this version of the program takes it."""
    currency: str
    step: float
    """Amounts are printed in multiples of this."""
    least: int
    """Trials that the estimate asks for at least."""
    results: dict[str, Any]
    """The results contract."""
    pdf: bytes
    """The report made again; empty where it was not asked for or cannot be made."""
    pdf_fault: str
    """Why it cannot be made, in words."""


@dataclass(frozen=True, kw_only=True, slots=True)
class Remaking:
    """What a report carries besides its inputs, and what it is made again from."""

    created: str
    """Time of the issue, ISO 8601."""
    results: bytes
    sign_offs: bytes
    note: bytes


def recompute(
    apart: Apart,
    inputs: Mapping[str, bytes],
    *,
    remaking: Remaking | None = None,
    threads: int,
    seconds: float,
) -> Recomputed:
    """Return what the inputs of a report give, computed in another process.

    Parameters
    ----------
    apart : Apart
        Where it is computed.
    inputs : mapping
        Content of each input file by its name; no name is used as a path.
    remaking : Remaking, optional
        Has the report itself made again, with the program's own templates, if the
        results come out as they are in it.
    threads : int
        Blocks simulated at the same time; changes no figure.
    seconds : float
        Time after which it is given up.

    Raises
    ------
    UnreadableReport
        unreadable-report.  The inputs are no sound estimate.
    TookTooLong
        took-too-long.
    """
    more = [remaking.results, remaking.sign_offs, remaking.note] if remaking else []
    answer, (results, pdf) = apart.call(
        "contingency.verify.recomputation:recompute_apart",
        {
            "names": list(inputs),
            "threads": threads,
            "created": remaking.created if remaking else "",
        },
        [*inputs.values(), *more],
        seconds=seconds,
    )
    return Recomputed(**answer, results=json.loads(results), pdf=pdf)


def recompute_apart(arguments: dict[str, Any], blobs: list[bytes]) -> Answer:
    """Do the reading and computing, as a task of `contingency.record.apart`."""
    from contingency.estimate.reading import read_held_estimate
    from contingency.results import as_json
    from contingency.study import run_study

    files = dict(zip(arguments["names"], blobs, strict=False))
    more = blobs[len(files) :]
    try:
        estimate = read_held_estimate(files, where="the files inside the report")
        study = run_study(estimate, threads=arguments["threads"])
    except UnusableEstimate as fault:
        first = fault.faults[0] if fault.faults else fault
        raise UnreadableReport(
            where="the files inside the report",
            found=f"{fault.found} The first: {first.where}: {first.found}",
            rule="A report holds a sound estimate.",
            remedy="Ask for the file again from where it was issued.",
        ) from None
    results = as_json(study.results())
    pdf, fault_words = b"", ""
    if more and more[0] == results:
        pdf, fault_words = _made_again(study, more, arguments["created"])
    return {
        "fingerprint": estimate.fingerprint,
        "currency": estimate.currency,
        "step": estimate.contingency.rounding,
        "least": estimate.run.least,
        "pdf_fault": fault_words,
    }, [results, pdf]


def _made_again(study: Study, more: list[bytes], created: str) -> tuple[bytes, str]:
    """Return the report made again, or why it cannot be."""
    from contingency.issued import issued_pdf

    results, sign_offs, note = more
    try:
        return issued_pdf(
            study,
            results=results,
            sign_offs=sign_offs,
            note=note,
            created=dt.datetime.fromisoformat(created),
            templates=None,
        ), ""
    except ContingencyError as fault:
        return b"", fault.found
