"""What is left against what is needed, today and later."""

import datetime as dt
from itertools import pairwise

import numpy as np
import pytest

from contingency.errors import NoAccount
from contingency.estimate.nouns import (
    AccountEntry,
    AccountRule,
    ContingencyRule,
    CostRange,
    Milestone,
    ShapeName,
)
from contingency.simulation.engine import simulate
from contingency.simulation.spending import PROFILES as DENSITIES
from contingency.simulation.totals import simulate_totals
from contingency.tracking.drawdown import drawdown
from contingency.tracking.run_down import (
    PROFILES,
    carried_forward,
    drawn_in,
    spent_between,
)
from tests.tracking.pairs import DAY, EVENTS, PACKAGES, estimate, event, package


def entry(amount, kind="drawn", **more):
    """An entry on the data date."""
    given = {"date": DAY, "amount": amount, "kind": kind, "event": "", "line": 2}
    return AccountEntry(**given | more)


def days(count):
    """A day after the data date."""
    return DAY + dt.timedelta(days=count)


def test_an_estimate_without_account_has_no_drawdown():
    """It is told how to begin one."""
    with pytest.raises(NoAccount, match="opening"):
        drawdown(estimate())


def test_the_need_is_the_contingency_of_what_remains():
    """At the target, at P90 and at P95, by the engine."""
    revision = estimate(account=(entry(600.0, "opening"), entry(50.0, event="E1")))
    found = drawdown(revision)

    total = np.sort(simulate(revision).total)
    assert found.need == total[-(-total.size * 80 // 100) - 1] - 2_000.0
    assert found.need_90 == total[-(-total.size * 90 // 100) - 1] - 2_000.0
    assert found.balance == 550.0
    assert found.surplus == 550.0 - found.need
    assert found.ratio == pytest.approx(550.0 / found.need)
    assert found.releasable == max(0.0, 550.0 - found.need_90)
    assert found.forecast == ()


def test_spent_money_is_out_of_the_need():
    """Half spent, half the range: half the contingency of the ranges."""
    whole = estimate(events=(), systemic=(), account=(entry(300.0, "opening"),))
    half = whole.model_copy(
        update={
            "packages": tuple(package(p.id, p.base, spent=p.base / 2) for p in PACKAGES)
        }
    )

    assert drawdown(half).need == pytest.approx(drawdown(whole).need / 2, rel=1e-9)


def test_the_minimum_curve_binds_the_release():
    """What must be left is not to be given back."""
    curve = AccountRule(minimum=(Milestone(name="Award", on=days(-1), amount=5_000.0),))
    revision = estimate(account=(entry(5_200.0, "opening"),), account_rule=curve)
    found = drawdown(revision)

    assert found.minimum == 5_000.0
    assert not found.is_below_minimum
    assert found.releasable == 200.0
    short = revision.model_copy(update={"account": (entry(4_999.0, "opening"),)})
    assert drawdown(short).is_below_minimum


def test_events_that_occurred_and_draws_are_held_against_each_other():
    """One without a draw, one drawn for and still open."""
    revision = estimate(
        events=(event("E1", status="occurred"), EVENTS[1]),
        account=(entry(600.0, "opening"), entry(30.0, event="E2")),
    )
    found = drawdown(revision)

    assert found.not_drawn == ("E1 Event E1",)
    assert found.drawn_not_occurred == ("E2 Event E2",)


# --------------------------------------------------------------------------------------
# Carrying forward

WINDOWS = {"start": days(0), "finish": days(100)}


def test_what_has_no_window_stays_in_full():
    """Nothing is assumed about it."""
    revision = estimate(account=(entry(1.0, "opening"),))
    assert carried_forward(revision, days(400)) == revision
    assert drawdown(revision).without_window == ("P1", "P2", "P3", "E1", "E2")


@pytest.mark.parametrize("profile", PROFILES)
def test_a_profile_runs_from_nought_to_one_and_rises(profile):
    """Whatever its form."""
    at = [PROFILES[profile](u) for u in np.linspace(0, 1, 21)]

    assert (at[0], at[-1]) == (0.0, 1.0)
    assert all(a < b for a, b in pairwise(at))


@pytest.mark.parametrize(
    ("profile", "share"),
    [
        (None, 0.25),
        ("even", 0.25),
        ("early", 0.4375),
        ("late", 0.0625),
        ("bell", 0.15625),
    ],
)
def test_a_quarter_of_the_window_by_profile(profile, share):
    """u, 1 - (1 - u)², u², u²(3 - 2u) at u = 1/4."""
    one = package("P1", 100.0, spend=profile, **WINDOWS)
    assert spent_between(one, days(0), days(25)) == pytest.approx(share)


def test_of_a_window_under_way_the_rest_counts():
    """Half passed before the data date: the third quarter is half of the rest."""
    one = package("P1", 100.0, start=days(-50), finish=days(50))
    assert spent_between(one, days(0), days(25)) == pytest.approx(0.5)
    assert spent_between(one, days(0), days(60)) == 1.0


def test_a_window_that_has_passed_says_nothing():
    """The package should be done and is not; it stays."""
    one = package("P1", 100.0, start=days(-50), finish=days(-1))
    assert spent_between(one, days(0), days(25)) == 0.0


def test_ranges_are_drawn_in_towards_the_base():
    """The need of packages with one window falls in proportion."""
    revision = estimate(
        packages=tuple(package(p.id, p.base, **WINDOWS) for p in PACKAGES),
        events=(),
        systemic=(),
    )
    whole = simulate_totals(revision) - revision.base
    later = simulate_totals(carried_forward(revision, days(75))) - revision.base

    np.testing.assert_allclose(later, 0.25 * whole, rtol=1e-9, atol=1e-9)
    done = carried_forward(revision, days(100))
    assert np.ptp(simulate_totals(done)) == 0.0


@pytest.mark.parametrize("shape", ["points", "discrete"])
def test_listed_outcomes_are_drawn_in_too(shape):
    """Percentiles and probabilities stay, amounts move."""
    outcomes = (
        ((10, 80.0), (90, 140.0)) if shape == "points" else ((80.0, 0.5), (140.0, 0.5))
    )
    given = CostRange(shape=ShapeName(shape), outcomes=outcomes)
    half = drawn_in(given, 100.0, 0.5)

    assert half.outcomes == (
        ((10, 90.0), (90, 120.0)) if shape == "points" else ((90.0, 0.5), (120.0, 0.5))
    )


def chance(revision, day, name="E1"):
    """The probability of an event on a later day."""
    later = carried_forward(revision, day)
    return next(e for e in later.events if e.id == name).probability_used


def test_an_event_that_has_not_happened_becomes_less_likely():
    """p(1 - r)/(1 - pr) when the share r of its window has passed."""
    revision = estimate(
        events=(event("E1", 0.4, window_start=days(0), window_finish=days(100)),)
    )

    assert chance(revision, days(0)) == 0.4
    assert chance(revision, days(50)) == pytest.approx(0.4 * 0.5 / (1 - 0.4 * 0.5))
    assert chance(revision, days(100)) == 0.0


def test_exclusive_events_are_judged_together():
    """Given that none of the group has happened."""
    window = {"window_start": days(0), "window_finish": days(100)}
    revision = estimate(
        events=(
            event("E1", 0.4, excludes=("E2",), **window),
            event("E2", 0.5, excludes=("E1",)),
        )
    )
    # E1 had half of its chance, E2 has no window and all of its chance left.
    assert chance(revision, days(50)) == pytest.approx(0.2 / 0.8)
    assert chance(revision, days(50), "E2") == pytest.approx(0.5 / 0.8)


def test_a_repeated_event_has_fewer_occurrences_left():
    """In proportion to what is left of its window."""
    revision = estimate(
        events=(
            event(
                "E1",
                None,
                happens="repeatedly",
                frequency=4.0,
                window_start=days(0),
                window_finish=days(100),
            ),
        )
    )
    (later,) = carried_forward(revision, days(25)).events
    assert later.frequency_used == pytest.approx(3.0)


def test_the_state_after_treatment_is_the_one_carried_forward():
    """It is the one that is simulated."""
    revision = estimate(
        events=(
            event(
                "E1",
                0.4,
                use="after",
                after_probability=0.2,
                after_impact=EVENTS[0].impact,
                window_start=days(0),
                window_finish=days(100),
            ),
        )
    )
    (later,) = carried_forward(revision, days(50)).events
    assert later.after_probability == pytest.approx(0.1 / 0.9)
    assert later.probability == 0.4


def test_the_forecast_begins_with_today_and_ends_with_nothing_left():
    """Quarters, milestones and the last day, in order."""
    window = {"start": days(0), "finish": days(300)}
    revision = estimate(
        packages=tuple(package(p.id, p.base, **window) for p in PACKAGES),
        events=(),
        contingency=ContingencyRule(target=80),
        account=(entry(500.0, "opening"),),
        account_rule=AccountRule(
            minimum=(
                Milestone(name="Award", on=days(10), amount=200.0),
                Milestone(name="End", on=days(310), amount=0.0),
            )
        ),
    )
    found = drawdown(revision)

    assert found.forecast[0].day == DAY
    assert found.forecast[0].need == found.need
    assert [p.day for p in found.forecast] == sorted(p.day for p in found.forecast)
    assert {p.milestone for p in found.forecast} == {"", "Award", "End"}
    assert dt.date(2026, 6, 30) in {p.day for p in found.forecast}
    needs = [p.need for p in found.forecast]
    assert needs == sorted(needs, reverse=True)
    # Ranges are gone; the systemic risk acts on the base to the end.
    assert 0.0 < needs[-1] < 0.6 * found.need


@pytest.mark.parametrize("profile", PROFILES)
def test_the_run_down_spends_as_the_money_by_year_does(profile):
    """The share spent is the integral of the density that phases the money."""
    nodes, weights = np.polynomial.legendre.leggauss(8)
    for u in (0.2, 0.5, 0.9):
        places = u * (1.0 + nodes) / 2.0
        spent = float(np.sum(u / 2.0 * weights * DENSITIES[profile](places)))
        assert PROFILES[profile](u) == pytest.approx(spent, abs=1e-12)
