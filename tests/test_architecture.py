"""The number that docs/architecture.md follows is the one on the page."""

from pathlib import Path

import pytest

from contingency import read_estimate, run_study
from contingency.setting.printed import printed_figures

ROOT = Path(__file__).parents[1]
TEXT = (ROOT / "docs" / "architecture.md").read_text(encoding="utf-8")
EXAMPLE = ROOT / "example_estimates" / "buoy-tender-refit" / "rev-b"


def test_the_row_stands_in_the_file_and_is_read_as_the_page_says():
    """The cells of W2 and the amounts that they mean."""
    row = "W2,Hull steel and coating,1900000,78%,142%"
    cost = read_estimate(EXAMPLE).find_package("W2").cost

    assert row in TEXT
    assert row in (EXAMPLE / "packages.csv").read_text(encoding="utf-8")
    assert (cost.low, cost.likely, cost.high) == pytest.approx(
        (1_482_000, 1_900_000, 2_698_000)
    )
    for amount in (cost.low, cost.likely, cost.high):
        assert f"{amount:,.0f}" in TEXT


def test_the_figure_at_the_end_is_the_printed_one():
    """Contingency at the target, rounded as the estimate asks."""
    study = run_study(read_estimate(EXAMPLE))
    printed = printed_figures(
        study.allocation,
        study.second_opinion,
        study.levels,
        study.percentiles,
        step=study.estimate.contingency.rounding,
    )

    assert f"A contingency of CAD {printed.total.contingency:,.0f} is asked for" in TEXT
