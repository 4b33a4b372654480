"""What the pages for auditors and signers promise."""

import re
from pathlib import Path

from contingency.record import attachments
from contingency.record.sign_offs import REQUIRED_ROLES
from contingency.verify.report import Limits, verify_report
from tests.office_project import LATER, project

DOCS = Path(__file__).parents[2] / "docs"
CHECKING = (DOCS / "checking-a-report.md").read_text(encoding="utf-8")
SIGNING = (DOCS / "signing.md").read_text(encoding="utf-8")


def test_the_page_lists_the_lines_that_are_shown():
    """All of them, and no other."""
    listed = re.findall(r"^\| ([a-zA-Z ,-]+) \| ", CHECKING, re.MULTILINE)
    listed = [one for one in listed if one not in {"line", "---"}]
    shown = []
    for pdf in (project().sealed[0], project().sealed[1]):
        for line in verify_report(pdf, when=LATER, make_again=False).lines:
            what = re.sub(r"^seal, \w+$", "seal, ROLE", line.what)
            if what not in shown:
                shown.append(what)

    assert sorted(shown) == sorted(listed)


def test_the_page_states_the_limits_that_hold():
    """Sizes, counts and times are those of the program."""
    mega = 2**20
    one, every = attachments.LARGEST_FILE // mega, attachments.LARGEST_SUM // mega

    assert f"{attachments.LARGEST_PDF // mega} MB for the PDF" in CHECKING
    assert f"{attachments.MOST_FILES:,} files" in CHECKING
    assert f"{one} MB for one file and {every} MB for all" in CHECKING
    assert (Limits().read_seconds, Limits().compute_seconds) == (120.0, 3600.0)
    assert "two minutes to take it apart, an hour to compute" in CHECKING


def test_the_page_for_signers_names_the_roles_that_are_needed():
    """The three that every report has."""
    named = "`, `".join(REQUIRED_ROLES[:-1])

    assert f"`{named}` and `{REQUIRED_ROLES[-1]}` are needed" in SIGNING
