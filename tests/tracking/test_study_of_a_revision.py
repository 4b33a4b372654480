"""A study that knows the revision before it."""

from pathlib import Path

import pytest

from contingency.estimate.chain import read_chain
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
    """The larger example's last revision after the one before it."""
    *_, previous, last = read_chain(ISLAND / "rev-c")
    return run_study(last, previous=previous)


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
    alone = run_study(study.estimate)
    outcomes = {check.check: check.outcome for check in alone.checks_run}

    assert alone.comparison is None
    assert outcomes["bridge-does-not-close"] == "not-applicable"
