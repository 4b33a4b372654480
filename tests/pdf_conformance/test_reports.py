"""Every kind of report is PDF/A-3a and PDF/UA-1 at once.

Drafts of both examples and of an estimate that has only what it must have; the
smaller example issued, sealed once, and sealed by all three.
"""

import datetime as dt
import shutil
from pathlib import Path

import pytest

from contingency import read_estimate, run_study
from contingency.office import issue_estimate, seal_report, sign_estimate
from contingency.report.pdf import write_report
from contingency.results import as_json
from tests.folders import lay_out
from tests.record import pki

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


@pytest.fixture(scope="module")
def kept(tmp_path_factory):
    """The smaller example signed, issued and sealed; its PDFs by number of seals."""
    project = tmp_path_factory.mktemp("kept") / "refit"
    shutil.copytree(EXAMPLES / "buoy-tender-refit", project)
    folder = project / "rev-b"
    people = read_estimate(folder).sign_offs
    for hour, line in enumerate(people):
        sign_estimate(
            folder,
            role=line.role,
            name=line.name,
            position=line.position,
            when=CREATED + dt.timedelta(hours=hour),
        )
    issue_estimate(folder, when=CREATED + dt.timedelta(days=1))
    (issued,) = project.glob("issued/*/*.pdf")
    found = [issued.read_bytes()]
    path = issued
    for day, line in enumerate(people, start=2):
        sealed = seal_report(
            path,
            role=line.role,
            certificate=pki.holder(line.name).pkcs12,
            password=pki.PASSWORD,
            when=CREATED + dt.timedelta(days=day),
        )
        path = sealed.path
        found.append(path.read_bytes())
    return found


@pytest.mark.parametrize("seals", [0, 1, 3])
def test_an_issued_report_with_seals(kept, seals, conforms):
    """A seal is added to the file, and what is added keeps the standards too."""
    assert kept[seals].startswith(kept[0])

    conforms(kept[seals])
