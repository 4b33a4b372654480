"""The estimate inside a report, read and computed again in a process apart."""

from __future__ import annotations

import json
from collections.abc import Mapping
from dataclasses import dataclass
from typing import Any

from contingency.errors import UnreadableReport, UnusableEstimate
from contingency.record.apart import Answer, Apart


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


def recompute(
    apart: Apart, inputs: Mapping[str, bytes], *, threads: int, seconds: float
) -> Recomputed:
    """Return what the inputs of a report give, computed in another process.

    Parameters
    ----------
    apart : Apart
        Where it is computed.
    inputs : mapping
        Content of each input file by its name; no name is used as a path.
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
    answer, (results,) = apart.call(
        "contingency.verify.recomputation:recompute_apart",
        {"names": list(inputs), "threads": threads},
        list(inputs.values()),
        seconds=seconds,
    )
    return Recomputed(**answer, results=json.loads(results))


def recompute_apart(arguments: dict[str, Any], blobs: list[bytes]) -> Answer:
    """Do the reading and computing, as a task of `contingency.record.apart`."""
    from contingency.estimate.reading import read_held_estimate
    from contingency.results import as_json
    from contingency.study import run_study

    files = dict(zip(arguments["names"], blobs, strict=True))
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
    return {
        "fingerprint": estimate.fingerprint,
        "currency": estimate.currency,
        "step": estimate.contingency.rounding,
        "least": estimate.run.least,
    }, [as_json(study.results())]
