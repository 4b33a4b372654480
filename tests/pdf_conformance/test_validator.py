"""The validator itself: it passes what is right and says what is wrong.

A check that passes everything checks nothing; these three files are small and made
here, so that the verdicts on real reports mean something.
"""

from pathlib import Path

import pytest
from weasyprint import HTML

FONTS = Path(__file__).parents[2] / "report_templates" / "fonts"
FONT = FONTS / "SourceSansPro-Regular.ttf"

PAGE = """
<html lang="en-GB"><head><title>A page</title><style>
@font-face {{ font-family: "Sample"; src: url("{font}"); }}
body {{ font-family: "Sample"; }}
</style></head><body><h1>A page</h1><p>With one line.</p></body></html>
"""


@pytest.fixture(scope="module")
def page():
    """A small page in an embedded font, ready to be written in any variant."""
    return HTML(string=PAGE.format(font=FONT.as_uri()))


@pytest.mark.parametrize(
    ("variant", "standard"), [("pdf/a-3a", "3a"), ("pdf/ua-1", "ua1")]
)
def test_a_file_that_keeps_the_standard_passes(
    verapdf, page, tmp_path, variant, standard
):
    """Each standard is passed by a file that is written for it."""
    path = tmp_path / "page.pdf"
    page.write_pdf(path, pdf_variant=variant)
    verdict = verapdf.verdict(path, standard)

    assert verdict.passed, str(verdict)
    assert verdict.checks > 100


@pytest.mark.parametrize(
    ("variant", "standard", "clause"),
    [
        (None, "3a", "6.6.2.1-1"),  # no metadata that claims PDF/A
        (None, "ua1", "7.1-11"),  # no tags
        ("pdf/ua-1", "3a", "6.6.4-1"),  # the one claim does not stand for the other
        ("pdf/a-3a", "ua1", "5-1"),
    ],
)
def test_a_file_that_breaks_the_standard_fails(
    verapdf, page, tmp_path, variant, standard, clause
):
    """The rule that is broken is named by its clause."""
    path = tmp_path / "page.pdf"
    page.write_pdf(path, pdf_variant=variant)
    verdict = verapdf.verdict(path, standard)

    assert not verdict.passed
    assert clause in {text.split()[0] for text in verdict.broken}, str(verdict)


def test_a_file_that_is_no_pdf_is_an_error(verapdf, tmp_path):
    """The validator says that it could not read the file, and goes on to the next."""
    path = tmp_path / "page.pdf"
    path.write_bytes(b"no pdf at all")

    with pytest.raises(RuntimeError, match=r"page\.pdf"):
        verapdf.verdict(path, "3a")


def test_the_fixture_fails_on_a_file_that_breaks_a_rule(conforms, page):
    """`conforms` raises pytest's failure, with both verdicts in its text."""
    with pytest.raises(pytest.fail.Exception, match="ua1: FAIL"):
        conforms(page.write_pdf(pdf_variant="pdf/a-3a"))
