"""A study that knows the revision before it."""

from pathlib import Path

import pytest

from contingency.estimate.reading import read_estimate
from contingency.study import run_study

ISLAND = Path(__file__).parents[2] / "example_estimates" / "island-power-link"
SLUGS = {
    "bridge-does-not-close",
    "unexplained-base-change",
    "price-dates-without-factor",
    "contingency-cut",
    "percent-carried-forward",
    "unused-changes",
    "drawdown-ahead",
    "draws-not-justified",
    "occurred-without-draw",
}


@pytest.fixture(scope="module")
def study():
    """The larger example's last revision, with the ones that travel with it."""
    return run_study(read_estimate(ISLAND / "rev-c"))


def test_the_bridge_ends_at_the_figures_of_the_study(study):
    """One simulation serves both."""
    after = study.comparison.bridge.after

    assert after.base == study.estimate.base
    assert after.contingency == pytest.approx(study.target.contingency, rel=1e-12)
    assert study.change.at_old_level < after.contingency


def test_the_larger_example_passes_the_checks_of_its_history(study):
    """Every change has its reason, every draw its approval."""
    outcomes = {check.check: check.outcome for check in study.checks_run}

    assert {outcomes[slug] for slug in SLUGS} == {"pass"}
    assert outcomes["holding-too-much"] == "not-applicable"


def test_the_account_is_there_when_it_is_asked_for(study):
    """Its need is the target of the study."""
    assert study.drawdown.need == pytest.approx(study.target.contingency, rel=1e-12)
    assert study.drawdown is study.drawdown


def test_without_a_previous_revision_there_is_no_bridge(study):
    """And the checks of the bridge say so."""
    alone = run_study(study.estimate.model_copy(update={"sources": ()}))
    outcomes = {check.check: check.outcome for check in alone.checks_run}

    assert alone.comparison is None
    assert outcomes["bridge-does-not-close"] == "not-applicable"
    assert alone.trend is None
    assert alone.results()["changes"] is None


def test_the_results_hold_the_bridge_and_the_account(study):
    """Ready for JSON, closing, with the fingerprint of the revision before."""
    results = study.results()
    changes, account = results["changes"], results["account"]

    assert changes["after"]["contingency"] == pytest.approx(
        results["target"]["contingency"], abs=1e-2
    )
    moved = sum(step["contingency"] for step in changes["steps"])
    assert changes["before"]["contingency"] + moved == pytest.approx(
        changes["after"]["contingency"], abs=0.1
    )
    assert (
        changes["earlier"]["fingerprint"] == read_estimate(ISLAND / "rev-b").fingerprint
    )
    assert account["balance"] == study.drawdown.balance
    assert account["ratio"] == pytest.approx(study.drawdown.ratio)


def test_the_trend_follows_all_revisions(study):
    """The oldest first; the width shrinks as definition grows."""
    trend = study.trend

    assert [point.revision for point in trend.points] == ["A", "B", "C"]
    assert trend.points[-1].total == pytest.approx(study.target.total, rel=1e-12)
    assert trend.points[1].findings is None
    widths = [point.width for point in trend.points]
    assert widths == sorted(widths, reverse=True)
    assert trend.remarks == ()
