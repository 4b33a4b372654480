"""The answer page against the results inside the report."""

import pytest

from contingency.verify.printed import check_printed, figures_to_print

RESULTS = {
    "base": 9_400_400.0,
    "target": {
        "level": "P80",
        "contingency": 1_649_700.0,
        "percent_of_base": 17.55,
        "interval": [11_045_000.0, 11_055_000.0],
    },
    "levels": [{"level": "P50", "contingency": 780_200.0}],
}
PAGE = (
    "A contingency of CAD\u00a01,650,000 is asked for on a base of CAD 9,400,000, so "
    "that the\nrequest of CAD\n11,050,000 (P80). It is 17.6\u00a0% of the base. "
    "11,050 to 11,060 P50 Budget 780 780 10,180"
)


@pytest.fixture
def figures():
    results = {
        **RESULTS,
        "target": {**RESULTS["target"], "interval": [11_051_000, 11_057_000]},
    }
    return figures_to_print(results, currency="CAD", step=10_000.0)


def test_figures_are_worded_as_the_report_words_them():
    """Rounded to the step; the request is the sum of what is printed."""
    words = {
        one.figure: one.words.replace("\u00a0", " ")
        for one in figures_to_print(RESULTS, currency="CAD", step=1000.0)
    }

    assert words["contingency"] == "CAD 1,650,000"
    assert words["base"] == "CAD 9,400,000"
    assert words["request"] == "CAD 11,050,000"
    assert words["P50 total"] == "10,180"


def test_a_page_with_all_figures_holds(figures):
    """Wherever its lines break."""
    found = check_printed(["Title 1,650,000", PAGE, "other"], figures)

    assert (found.page, found.missing) == (2, ())
    assert found.holds


@pytest.mark.parametrize(
    ("old", "new", "missing"),
    [
        ("1,650,000", "1,660,000", "contingency"),
        ("CAD\u00a01,650,000", "CAD 11,650,000", "contingency"),
        ("CAD 9,400,000", "CAD 9,400,0001", "base"),
        ("11,050,000", "11,050,000.5", "request"),
        ("(P80)", "(P90)", "level"),
        ("17.6\u00a0%", "7.6 %", "percent of the base"),
        ("780 780", "1,780 2780", "P50 contingency"),
        ("10,180", "\u221210,180", "P50 total"),
    ],
)
def test_a_changed_figure_is_missed(figures, old, new, missing):
    """Also where the right digits stand inside a longer figure."""
    found = check_printed([PAGE.replace(old, new)], figures)

    assert [one.figure for one in found.missing] == [missing]


def test_pages_without_the_answer_do_not_hold(figures):
    """A PDF of pictures, or of nothing."""
    assert check_printed([], figures).page == 0
    assert not check_printed(["", "text"], figures).holds
