"""Every kind of report is PDF/A-3a and PDF/UA-1 at once.

Sealed and issued reports are tried with the commands that make them; here are the
drafts of both examples, and of an estimate that has only what it must have.
"""

import datetime as dt
from pathlib import Path

import pytest

from contingency import read_estimate, run_study
from contingency.report.pdf import write_report
from contingency.results import as_json
from tests.folders import lay_out

EXAMPLES = Path(__file__).parents[2] / "example_estimates"
CREATED = dt.datetime(2026, 11, 2, 9, 0, tzinfo=dt.UTC)


def draft_of(folder):
    """The draft of an estimate folder, as `contingency report` writes it."""
    study = run_study(read_estimate(folder))
    return write_report(
        study,
        templates=None,
        created=CREATED,
        draft=True,
        results=as_json(study.results()),
    )


@pytest.mark.parametrize(
    "example", ["buoy-tender-refit/rev-b", "island-power-link/rev-c"]
)
def test_the_draft_of_an_example(example, conforms):
    """The small example, and the larger one with every section that there is."""
    conforms(draft_of(EXAMPLES / example))


def test_the_draft_of_a_bare_estimate(tmp_path, conforms):
    """No groups, no risks, no statements of any length: empty sections are tagged."""
    folder = lay_out(
        tmp_path / "bare",
        packages=[{"id": "P1", "base": 100, "low": 90, "high": 130}],
        trials=16_384,
    )

    conforms(draft_of(folder))
