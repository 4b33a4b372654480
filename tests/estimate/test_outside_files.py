"""history.csv and [outside_view] are read as they are meant."""

import numpy as np
import pytest
from scipy import stats

from contingency.errors import UnusableEstimate
from contingency.estimate.history import read_history_file
from contingency.estimate.nouns import ClosedProject, OutsideRule, UpliftPart
from contingency.estimate.reading import read_estimate
from contingency.quantities.predictive import fit_lognormal
from tests.estimate.bad_outside import (
    COLUMNS,
    RATED,
    modelled,
    outside,
    projects,
    ratings,
)
from tests.estimate.good_folder import in_turn, write_good


@pytest.fixture
def folder(tmp_path):
    """A good estimate folder."""
    return write_good(tmp_path / "estimate")


def test_an_estimate_without_them_has_no_outside_view(folder):
    """Nothing is made up where nothing is written."""
    estimate = read_estimate(folder)

    assert estimate.history == ()
    assert estimate.outside_rule == OutsideRule()
    assert not estimate.outside_rule.is_comparable


def test_projects_and_declarations_are_read(folder):
    """Percent of the table become fractions; the file travels along."""
    in_turn(
        projects(
            "H1,Old dome,domes,1_000_000,1_150_000,50000,Rock", "H2,,,200,190.5,,"
        ),
        outside(
            'stage = "gate 3"\nmoney = "2026 money"\nscope = "as approved"\n'
            'group = "domes"\nsource = "a table"\n'
            "percentiles = { P80 = 32, P50 = 15.5 }\n"
            'uplifts = [ { kind = "plain", share = 70, upper = 24 },'
            ' { kind = "odd", share = 30, upper = 51, managed = 10 } ]'
        ),
    )(folder)
    estimate = read_estimate(folder)
    rule = estimate.outside_rule

    assert estimate.history[0] == ClosedProject(
        id="H1",
        name="Old dome",
        group="domes",
        estimate=1e6,
        final=1.15e6,
        covered=5e4,
        notes="Rock",
        line=2,
    )
    assert estimate.history[0].net_ratio == pytest.approx(1.10)
    assert estimate.history[1].ratio == pytest.approx(0.9525)
    assert rule.is_comparable
    assert (rule.group, rule.source) == ("domes", "a table")
    assert rule.percentiles == ((50, 0.155), (80, 0.32))
    assert rule.uplifts == (
        UpliftPart(kind="plain", share=0.7, upper=0.24),
        UpliftPart(kind="odd", share=0.3, upper=0.51, managed=0.1),
    )
    assert "history.csv" in {source.name for source in estimate.sources}


def test_the_order_of_projects_is_not_in_the_fingerprint(folder):
    """A figure is."""
    rows = ("H1,,,100,115,,", "H2,,,200,190,,")
    projects(*rows)(folder)
    one = read_estimate(folder).fingerprint
    projects(*reversed(rows))(folder)
    two = read_estimate(folder).fingerprint
    projects("H1,,,100,116,,", rows[1])(folder)

    assert one == two != read_estimate(folder).fingerprint


def test_a_history_is_read_from_a_file_of_any_name(tmp_path):
    """As `contingency calibrate` is given it; faults name that file."""
    path = tmp_path / "closed projects.csv"
    path.write_text(f"{COLUMNS}\nH1,,,100,115,,\n", encoding="utf-8")

    assert [p.ratio for p in read_history_file(path)] == [1.15]

    path.write_text(f"{COLUMNS}\nH1,,,100,,,\n", encoding="utf-8")
    with pytest.raises(UnusableEstimate) as raised:
        read_history_file(path)
    assert [f.where for f in raised.value.faults] == [
        "closed projects.csv:2, project H1, final"
    ]


def test_a_history_that_is_not_there_is_a_fault_without_a_traceback(tmp_path):
    """With the reason of the operating system."""
    with pytest.raises(UnusableEstimate) as raised:
        read_history_file(tmp_path / "none.csv")

    assert "no such file" in raised.value.faults[0].found


def test_a_systemic_risk_takes_its_uplift_from_history(folder):
    """Net of what ranges and events cover; the curve is that of the prediction."""
    ratios = (0.95, 1.02, 1.05, 1.11, 1.13, 1.19, 1.26, 1.31, 1.48)
    in_turn(
        projects(*(f"H{i},,,100,{100 * r + 4},4," for i, r in enumerate(ratios))),
        outside('stage = "a"\nmoney = "b"\nscope = "c"'),
        modelled("history"),
    )(folder)
    risk = read_estimate(folder).systemic[1]
    fit = fit_lognormal(ratios)

    assert risk.model == "history"
    assert risk.covers == "All but storms"
    assert risk.uplift.shape == "points"
    for percent, uplift in risk.uplift.outcomes:
        assert uplift == pytest.approx(fit.quantile(percent) - 1)
    curve = risk.uplift.distribution
    between = np.array([0.025, 0.15, 0.55, 0.85, 0.97])
    exact = np.array([fit.quantile(100 * p) - 1 for p in between])
    # Of the distance between P10 and P90: what a curve through percentiles loses.
    spread = fit.quantile(90) - fit.quantile(10)
    np.testing.assert_allclose(curve.quantile(between), exact, atol=0.02 * spread)


def test_a_systemic_risk_takes_its_uplift_from_ratings(folder):
    """Constant and effects in the exponent, Student's t with its degrees."""
    in_turn(ratings(), modelled("ratings"))(folder)
    estimate = read_estimate(folder)
    model, risk = estimate.rated_model, estimate.systemic[1]

    assert [factor.effect for factor in model.factors] == pytest.approx([0.10, 0.025])
    assert (model.factors[0].rating, model.factors[0].value) == ("fair", 2.0)
    assert model.expected == pytest.approx(0.145)
    assert risk.model == "ratings"
    for percent, uplift in risk.uplift.outcomes:
        t = stats.t(36).ppf(percent / 100)
        assert uplift == pytest.approx(np.expm1(0.145 + 0.12 * t))


def test_a_linear_model_without_degrees_is_normal(folder):
    """The sum is the uplift itself."""
    in_turn(
        ratings("degrees = 36\n", "", RATED.replace('"log"', '"linear"')),
        modelled("ratings"),
    )(folder)
    outcomes = dict(read_estimate(folder).systemic[1].uplift.outcomes)

    assert outcomes[80.0] == pytest.approx(0.145 + 0.12 * stats.norm.ppf(0.8))
    assert outcomes[50.0] == pytest.approx(0.145)


def test_a_rating_is_in_the_fingerprint(folder):
    """Another rating, another estimate."""
    in_turn(ratings(), modelled("ratings"))(folder)
    one = read_estimate(folder).fingerprint
    ratings('"fair"\n', '"good"\n')(folder)

    assert read_estimate(folder).fingerprint != one
