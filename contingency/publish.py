"""Write a draft report and its results into a folder, all of it or nothing."""

from __future__ import annotations

import csv
import io
import os
import tempfile
from collections.abc import Callable, Sequence
from datetime import datetime
from pathlib import Path

from contingency.errors import CrossCheckFailed, OutputBlocked
from contingency.report.page_front import TypedSignOff
from contingency.report.pdf import write_report
from contingency.results import as_json, figure
from contingency.study import Study

REPORT = "basis-of-contingency.pdf"
RESULTS = "results.json"


def publish_report(
    study: Study,
    folder: Path,
    *,
    created: datetime,
    templates: Path | None = None,
    say: Callable[[str], None] | None = None,
    typed: Sequence[TypedSignOff] = (),
) -> tuple[Path, ...]:
    """Write the draft report, results.json and the CSV tables; return their paths.

    Everything is made before anything is written, and each file appears whole.  A
    draft of the same name is replaced.  `typed` are the sign-offs given so far.

    Raises
    ------
    OutputBlocked
        output-blocked.  The folder cannot be made or written to.
    CrossCheckFailed
        cross-check-failed.  Two ways of computing one figure disagree.
    """
    _refuse_what_does_not_check(study)
    say = say or (lambda _step: None)
    results = as_json(study.results())
    say("Laying out the report")
    pdf = write_report(
        study,
        templates=templates,
        created=created,
        draft=True,
        results=results,
        typed=typed,
    )
    say("")
    files = {REPORT: pdf, RESULTS: results, **tables(study)}
    return _write(files, folder)


def _refuse_what_does_not_check(study: Study) -> None:
    """Raise if a cross-check failed, naming the figures."""
    check = study.cross_check
    if check.passed:
        return
    pairs = [
        ("mean", check.mean.passed, check.mean.simulated, check.mean.exact),
        (
            "standard deviation",
            check.standard_deviation.passed,
            check.standard_deviation.simulated,
            check.standard_deviation.exact,
        ),
        *(
            (f"P{level.percent:02d}", level.passed, level.simulated, level.second_route)
            for level in check.levels
        ),
    ]
    failed = [
        f"{name}: {one:,.0f} against {other:,.0f}"
        for name, passed, one, other in pairs
        if not passed
    ]
    raise CrossCheckFailed(
        where=f"{study.estimate.project}, revision {study.estimate.revision}",
        found=f"the simulation and its check disagree on {'; '.join(failed)}.",
        rule="Two ways of computing one figure must agree within their error.",
        remedy="Report this with the estimate's files: it is a fault of the tool.",
    )


def tables(study: Study) -> dict[str, bytes]:
    """Return allocation, percentiles and drivers as CSV files by name."""
    results = study.results()
    base = results["base"]
    percentiles = [
        {"level": level, "total": total, "contingency": figure(total - base)}
        for level, total in results["percentiles"].items()
    ]
    drivers = [
        {
            **{key: value for key, value in driver.items() if key != "swing"},
            "swing_low": driver["swing"][0],
            "swing_high": driver["swing"][1],
        }
        for driver in results["drivers"]
    ]
    return {
        "allocation.csv": _csv(results["allocation"]),
        "percentiles.csv": _csv(percentiles),
        "drivers.csv": _csv(drivers),
    }


def _csv(rows: Sequence[dict[str, object]]) -> bytes:
    """Return rows as CSV in UTF-8; text that a spreadsheet would run is quoted off."""
    text = io.StringIO()
    if rows:
        writer = csv.writer(text, lineterminator="\n")
        writer.writerow(rows[0])
        writer.writerows([_inert(cell) for cell in row.values()] for row in rows)
    return text.getvalue().encode("utf-8")


def _inert(cell: object) -> object:
    """Return a cell that a spreadsheet shows and does not calculate."""
    if isinstance(cell, str) and cell[:1] in ("=", "+", "-", "@", "\t", "\r"):
        return f"'{cell}"
    return cell


def _write(files: dict[str, bytes], folder: Path) -> tuple[Path, ...]:
    """Write the files into the folder, each by a rename."""
    try:
        folder.mkdir(parents=True, exist_ok=True)
        return tuple(_put(folder / name, content) for name, content in files.items())
    except OSError as error:
        raise OutputBlocked(
            where=str(folder),
            found=f"{error.strerror or error}.",
            rule="The report needs a folder that can be written to.",
            remedy="Name another folder with --out, or free this one.",
        ) from error


def _put(path: Path, content: bytes) -> Path:
    handle, temporary = tempfile.mkstemp(dir=path.parent, prefix=f".{path.name}.")
    try:
        with os.fdopen(handle, "wb") as file:
            file.write(content)
        # mkstemp keeps others out; a report is for reading, as the umask allows.
        Path(temporary).chmod(0o666 & ~_umask())
        Path(temporary).replace(path)
    except BaseException:
        Path(temporary).unlink(missing_ok=True)
        raise
    return path


def _umask() -> int:
    mask = os.umask(0o022)
    os.umask(mask)
    return mask
