"""The chapter on money by year: printed sums close, and nothing is hidden."""

import dataclasses
import re

import pytest

from contingency.report.page_funding import funding_page
from contingency.report.wording import Amounts
from contingency.setting.printed import printed_figures
from contingency.study import run_study
from tests.report.funded_refit import funded
from tests.report.test_charts import hold, keep_labels_clear


@pytest.fixture(scope="module")
def study():
    """The refit with windows and prices."""
    return run_study(funded())


def page_of(study, look):
    """The page and its charts."""
    estimate = study.estimate
    step = estimate.contingency.rounding
    printed = printed_figures(
        study.allocation,
        study.second_opinion,
        study.levels,
        study.percentiles,
        step=step,
    )
    amounts = Amounts(currency=estimate.currency, step=step)
    page, charts = funding_page(study, printed, amounts, look)
    return page, charts, printed, amounts


def figure(cell):
    """A printed amount as a number."""
    return float(re.sub(r"[^\d.\-]", "", cell.replace("−", "-")))


def test_the_printed_table_adds_up_for_a_reader_with_a_pencil(study, look):
    """Each row and each column, from the cells alone."""
    page, _, printed, amounts = page_of(study, look)
    cells = [
        [
            figure(getattr(row, name))
            for name in ("base", "contingency", "on_base", "on_contingency", "total")
        ]
        for row in (*page.rows, page.total)
    ]

    for row in cells:
        assert sum(row[:4]) == pytest.approx(row[4], abs=1e-6)
    for column in zip(*cells, strict=True):
        assert sum(column[:-1]) == pytest.approx(column[-1], abs=1e-6)
    assert page.total.base == amounts.cell(printed.total.base)
    assert page.total.contingency == amounts.cell(printed.total.contingency)


def test_prices_are_shown_as_entered_with_what_they_rest_on(study, look):
    """Three ways to write a range, and one series without a basis."""
    page, *_ = page_of(study, look)

    assert [row.rate for row in page.series] == [
        "1% to 6%, likely 3% (P10-P90, pert)",
        "2%",
        "discrete: -2%:0.4; 5%:0.6",
    ]
    assert "Cost lead" in page.series[0].evidence
    assert page.series[1].evidence == "No basis is recorded."
    assert page.series[2].evidence == "Two market reports."


def test_years_windows_and_profiles_are_shown(study, look):
    """Financial years from April; only packages with both dates have a window."""
    page, *_ = page_of(study, look)

    assert [row.year for row in page.rows] == ["2031/32", "2032/33"]
    assert [(row.id, row.profile) for row in page.windows] == [
        ("H100", "early"),
        ("H110", "bell"),
        ("M200", "even"),
    ]
    assert page.without_window


def test_the_picture_is_clear(study, look):
    """Labels inside the picture and apart from one another."""
    _, charts, *_ = page_of(study, look)

    hold(charts[0].drawing)
    keep_labels_clear(charts[0].drawing)


def test_a_negative_part_is_not_drawn(study, look):
    """The table has it; a bar would hide it."""
    years = study.funding
    bent = dataclasses.replace(years[0], escalation_on_base=-1e9)
    spoilt = dataclasses.replace(study, funding=(bent, *years[1:]))
    page, charts, *_ = page_of(spoilt, look)

    assert page.picture is None
    assert charts == []


def test_without_a_window_there_is_no_page(refit, look):
    """The chapter then says so in one sentence."""
    page, charts, *_ = page_of(refit, look)

    assert page is None
    assert charts == []
