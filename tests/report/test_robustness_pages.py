"""What the number rests on, the evidence and the outside view, as they are printed."""

import dataclasses
import io

import pytest
from pypdf import PdfReader

from contingency.assurance.break_points import BreakPoint
from contingency.assurance.evidence import evidence_by_kind
from contingency.estimate.reading import read_estimate
from contingency.report.page_evidence import evidence_page
from contingency.report.page_outside import outside_page
from contingency.report.page_robustness import robustness_page
from contingency.report.pdf import write_report
from contingency.report.wording import Amounts
from contingency.results import as_json
from contingency.setting.printed import printed_change, printed_figures
from contingency.study import run_study
from tests.report.closed_refits import HISTORY, RATED, TABLE, beside_others
from tests.report.conftest import CREATED
from tests.report.ship_refit import FINDINGS, ship_refit
from tests.report.test_pages import bare
from tests.report.test_pdf import plain
from tests.test_examples import LARGE, SMALL

STEP = 1000.0


def printed_of(study, step=STEP):
    """The printed figures of a study."""
    return printed_figures(
        study.allocation,
        study.second_opinion,
        study.levels,
        study.percentiles,
        step=step,
    )


def firmness(study, look, step=STEP):
    """The page of robustness and its charts."""
    amounts = Amounts(currency=study.estimate.currency, step=step)
    return robustness_page(study, printed_of(study, step), amounts, look)


def outside(study, look):
    """The page of the outside view and its charts."""
    amounts = Amounts(currency=study.estimate.currency, step=STEP)
    return outside_page(study, printed_of(study), amounts, look)


def number(cell):
    """A cell as a number of thousands."""
    return int(cell.replace(",", "").replace("−", "-").replace("+", ""))


@pytest.fixture(scope="module")
def beside():
    """The refit with a history, a rated model and published uplifts."""
    return run_study(beside_others())


# ---- what-ifs ----


def test_every_question_is_on_the_page_once(refit, look):
    """Asked or not; with its reason where it is not."""
    page, charts = firmness(refit, look)
    asked = [row.words for row in (*page.changes, *page.levels)]
    titles = [w.title[0].upper() + w.title[1:] for w in refit.robustness.what_ifs]

    assert sorted([*asked, *(row.words for row in page.unasked)]) == sorted(titles)
    assert all(row.reason for row in page.unasked)
    assert [chart.name for chart in charts] == ["what-if", "seeds"]


def test_differences_are_those_of_the_printed_amounts(refit, look):
    """So that a reader who subtracts finds what the table says."""
    page, _ = firmness(refit, look)
    issued = printed_of(refit).total.contingency / STEP
    effects = {w.title.lower(): w.effect for w in refit.robustness.asked}

    for row in (*page.changes, *page.levels):
        assert number(row.contingency) - number(row.difference) == issued, row.words
        exact = effects[row.words.lower()] / STEP
        assert abs(number(row.difference) - exact) <= 1.0, row.words


@pytest.mark.parametrize(
    ("contingency", "step", "expected"),
    [
        (1449.0, 100.0, (1400.0, 0.0)),
        (1451.0, 100.0, (1500.0, 100.0)),
        (-350.0, 100.0, (-400.0, -1800.0)),
        (1400.25, 0.01, (1400.25, 0.25)),
    ],
)
def test_a_printed_change_closes(contingency, step, expected):
    """Contingency less difference is the issued contingency, whatever the step."""
    assert printed_change(contingency, issued=1400.0, step=step) == pytest.approx(
        expected
    )


def test_noise_is_never_a_false_nought(refit, look):
    """A half-width below half a step is said to be below the step."""
    page, _ = firmness(refit, look, step=1_000_000.0)

    assert {row.noise for row in page.changes} <= {"below 1", "–", "1", "2", "3"}
    assert "below 1" in {row.noise for row in page.changes}
    assert {row.noise for row in page.levels} == {"–"}


def test_the_answer_names_three_different_assumptions(refit, look):
    """Never twice the dependence, and never the largest driver."""
    page, _ = firmness(refit, look)
    largest = refit.robustness.largest()

    assert len(largest) == 3
    assert page.top.count("with ") >= 3
    assert "largest driver" not in page.top
    for one in largest:
        assert f"with {one.title}: " in page.top


def test_the_seeds_are_told_as_they_fell(refit, look):
    """Twenty of them, their span, and how many lie below the issued one."""
    page, _ = firmness(refit, look)
    seeds = refit.robustness.seeds
    amounts = Amounts(currency="GBP", step=STEP)

    assert page.seeds_words.startswith("20\xa0fresh seeds with ")
    assert amounts.cell(min(seeds.contingencies)) in page.seeds_words
    assert amounts.cell(max(seeds.contingencies)) in page.seeds_words
    assert f"lies above {seeds.below} of them" in page.seeds_words


# ---- break points ----


def broken(**changes):
    """A break point of a range, unless said otherwise."""
    point = {
        "id": "P1",
        "name": "Deck",
        "kind": "range",
        "quantity": "stretch",
        "now": 1.0,
        "breaks_at": 2.5,
        "furthest": 10.0,
        "level_there": 70,
        **changes,
    }
    return BreakPoint(**point)


@pytest.mark.parametrize(
    ("changes", "now", "breaks", "cannot"),
    [
        ({}, "× 1.00", "× 2.50", ""),
        ({"breaks_at": 1.0}, "× 1.00", "is broken already", ""),
        (
            {"breaks_at": None, "level_there": 74},
            "× 1.00",
            "",
            "cannot: at × 10.00 still enough in 74 of 100",
        ),
        (
            {"quantity": "uplift", "now": 0.0, "breaks_at": 0.0281},
            "0\xa0%",
            "+2.8\xa0%",
            "",
        ),
        (
            {"quantity": "uplift", "now": 0.0, "breaks_at": -0.02},
            "0\xa0%",
            "is broken already",
            "",
        ),
        (
            {"quantity": "chance", "now": 0.025, "breaks_at": 0.26921},
            "2.5\xa0%",
            "26.9\xa0%",
            "",
        ),
        (
            {"quantity": "cost factor", "breaks_at": 0.25, "furthest": 0.0},
            "× 1.00",
            "× 0.25",
            "",
        ),
        (
            {"quantity": "dependence", "now": 0.15, "breaks_at": 0.404},
            "0.15",
            "0.40",
            "",
        ),
    ],
)
def test_a_break_point_is_worded(refit, look, changes, now, breaks, cannot):
    """The quantity in its own unit, or that it cannot break the request."""
    rested = dataclasses.replace(refit.robustness, break_points=(broken(**changes),))
    page, _ = firmness(dataclasses.replace(refit, robustness=rested), look)
    row = page.breaks[0]

    assert (row.now, row.breaks, row.cannot) == (now, breaks, cannot)


def test_every_break_point_is_on_the_page(refit, look):
    """Ten drivers and three judgements, in the order of the analysis."""
    page, _ = firmness(refit, look)

    assert [row.id for row in page.breaks] == [
        point.id for point in refit.robustness.break_points
    ]
    assert len(page.breaks) == 13
    assert page.broken_level == "P70"


def test_a_study_that_was_not_asked_has_no_page(refit, look):
    """Then there is nothing to draw either."""
    assert firmness(dataclasses.replace(refit, robustness=None), look) == (None, [])


def test_an_estimate_in_which_nothing_varies_still_has_its_page(look):
    """Every contingency is the issued one."""
    page, charts = firmness(run_study(bare()), look)

    assert {number(row.difference) for row in page.levels} == {0}
    assert len(charts) == 2


# ---- evidence ----


def test_the_evidence_score_is_printed_by_kind(refit):
    """Shares of a hundred, inputs counted, the largest named."""
    page = evidence_page(refit)
    kinds = evidence_by_kind(refit)

    assert [row.kind for row in page.kinds] == [
        "Data",
        "Analogue",
        "Judgement",
        "Nothing",
    ]
    assert [row.share for row in page.kinds] == [f"{k.percent}\xa0%" for k in kinds]
    for row, kind in zip(page.kinds, kinds, strict=True):
        assert row.inputs == str(len(kind.drivers))
        assert all(d.id in row.largest for d in kind.drivers[:3])
        assert row.share in page.line


def test_an_estimate_in_which_nothing_varies_has_no_score():
    """A share of nothing would be a number without meaning."""
    page = evidence_page(run_study(bare()))

    assert page.line == ""
    assert page.kinds == ()


def test_a_rated_model_is_printed_to_the_last_factor(beside):
    """Rating, evidence, coefficient, effect; sum, spread and provenance."""
    page = evidence_page(beside)
    rated = page.rated
    first, second = rated.factors

    assert (first.rating, first.coefficient, first.effect) == (
        "fair (2)",
        "0.03",
        "0.06",
    )
    assert first.evidence == "Review of 12 May."
    assert (second.rating, second.effect) == ("3.1", "0.031")
    assert second.evidence == "No evidence is recorded."
    assert float(rated.expected) == pytest.approx(RATED.expected)
    assert "14 degrees of freedom" in rated.spread
    assert rated.provenance == "Invented for tests from no refit at all."
    assert [row.id for row in page.modelled] == ["Y1", "Y2"]
    assert all(len(row.uplifts) == len(page.heads) for row in page.modelled)


def test_a_model_that_no_risk_uses_is_not_printed(beside):
    """It has no effect on any figure."""
    entered = tuple(
        risk.model_copy(update={"model": None}) for risk in beside.estimate.systemic
    )
    estimate = beside.estimate.model_copy(update={"systemic": entered})
    page = evidence_page(dataclasses.replace(beside, estimate=estimate))

    assert page.rated is None
    assert page.modelled == ()


# ---- outside view ----


def test_the_outside_view_says_why_there_is_none(refit, look):
    """And draws nothing."""
    page, charts = outside(refit, look)

    assert page.comparison is None
    assert page.reason.endswith(".")
    assert charts == []


def test_base_middle_and_request_are_placed_on_the_history(beside, look):
    """With the declarations, every project compared with, and the back-test."""
    page, charts = outside(beside, look)
    view = page.comparison

    assert page.reason == ""
    assert [row.name for row in view.positions] == ["Base", "P50", "Request (P80)"]
    assert [row.is_target for row in view.positions] == [False, False, True]
    assert view.positions[0].of_base == "100.0\xa0%"
    assert [row.name for row in view.guard] == ["Stage", "Money", "Scope"]
    assert [row.id for row in view.projects] == [p.id for p in HISTORY]
    assert [row.ratio for row in view.projects][:2] == ["97.0\xa0%", "104.0\xa0%"]
    assert view.back_test.count("Funded at") == 3
    assert view.positions[2].outside in view.statement
    assert charts[0].name == view.curve.name


def test_a_published_table_gives_places_between_its_percentiles(beside, look):
    """What lies beyond its ends is said to lie beyond them."""
    estimate = beside.estimate.model_copy(update={"outside_rule": TABLE, "history": ()})
    page, _ = outside(dataclasses.replace(beside, estimate=estimate), look)
    view = page.comparison

    assert view.positions[0].outside == "below 20\xa0%"
    assert [row.name for row in view.levels] == ["P25", "P50", "P75", "P80", "P90"]
    assert view.projects == ()
    assert view.back_test == ""
    assert "published percentiles give it" in view.statement


def test_published_uplifts_are_shown_with_what_is_left(beside, look):
    """70 % of 24 % less half, and 30 % of 51 %."""
    page, _ = outside(beside, look)

    assert page.uplift_left == "23.7\xa0%"
    assert [row.managed for row in page.uplifts] == ["50\xa0%", "0\xa0%"]


# ---- the answer stays on one page ----


@pytest.mark.parametrize("folder", [LARGE / "rev-c", SMALL / "rev-b"], ids=str)
def test_the_answer_of_an_example_is_one_page(folder):
    """With the assumptions and the evidence line on it, figures as in the results."""
    study = run_study(read_estimate(folder))
    pdf = write_report(study, created=CREATED, results=as_json(study.results()))
    pages = [plain(page.extract_text()) for page in PdfReader(io.BytesIO(pdf)).pages]
    backed = evidence_by_kind(study)

    assert "asked for on a base" in pages[1]
    assert "Assumptions that matter most." in pages[1]
    assert f"Evidence. {backed[0].percent} % of the variance" in pages[1]
    assert "What to bear in mind" in pages[1]
    assert pages[2].startswith("DRAFT Contents")
    for words in ("How firm the number is", "Break points", "What backs the spread"):
        assert any(words in page for page in pages[3:]), words


def times(cost, factor):
    """A range with all of its amounts times a factor."""
    if cost is None:
        return None
    ends = {name: getattr(cost, name) for name in ("low", "likely", "high")}
    return cost.model_copy(
        update={name: factor * end for name, end in ends.items() if end is not None}
    )


def wide_and_wordy():
    """The refit in amounts of thirteen figures, to the unit, with long words."""
    words = "A name that goes on & on, with ÄÖÜ ß ñ ç Ω and <b>tags</b> "
    refit = ship_refit()
    rule, factor = refit.contingency, 1e5
    level = rule.levels[0].model_copy(update={"purpose": words, "holder": words})
    return refit.model_copy(
        update={
            "contingency": rule.model_copy(
                update={
                    "rounding": 1.0,
                    "set_by": words * 9,
                    "reason": words * 9,
                    "levels": tuple(
                        level.model_copy(update={"percent": percent})
                        for percent in (10, 30, 50, 60, 70, 80, 90)
                    ),
                }
            ),
            "packages": tuple(
                p.model_copy(
                    update={
                        "name": words * 3,
                        "base": factor * p.base,
                        "cost": times(p.cost, factor),
                    }
                )
                for p in refit.packages
            ),
            "events": tuple(
                e.model_copy(
                    update={
                        "impact": times(e.impact, factor),
                        "after_impact": times(e.after_impact, factor),
                    }
                )
                for e in refit.events
            ),
        }
    )


@pytest.mark.slow
def test_the_answer_stays_on_one_page_with_long_words_and_long_amounts():
    """Also with three findings that are cut, and everything else at its longest."""
    study = run_study(wide_and_wordy())
    stops = tuple(
        dataclasses.replace(FINDINGS[2], message=f"Reason {i} is long " * 20)
        for i in range(3)
    )
    study = dataclasses.replace(study, findings=stops)
    pdf = write_report(study, created=CREATED, results=as_json(study.results()))
    pages = [plain(page.extract_text()) for page in PdfReader(io.BytesIO(pdf)).pages]

    assert "Assumptions that matter most." in pages[1]
    assert "Evidence. " in pages[1]
    assert pages[1].count("Stop. Reason") == 3
    assert pages[2].startswith("DRAFT Contents")
