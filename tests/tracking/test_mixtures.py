"""A mixture of two revisions is what simulating the mixed estimate gives.

The slow second way: the mixed estimate is written out by hand, and simulated.
"""

import numpy as np
import pytest

from contingency.estimate.nouns import Change, ContingencyRule, PairCorrelation
from contingency.simulation.totals import simulate_totals
from contingency.tracking.families import Family
from contingency.tracking.matching import match
from contingency.tracking.mixtures import mixtures
from tests.tracking.pairs import (
    EVENTS,
    PACKAGES,
    cause,
    change,
    estimate,
    event,
    load,
    package,
    systemic,
    with_row,
    without_row,
)


def mixed(earlier, later):
    """The mixtures of two revisions with the seed of the later one."""
    return mixtures(match(earlier, later), seed=7, blocks=4, percent=80)


def assert_same(total, expected):
    """Totals of a mixture equal those of an estimate, trial by trial."""
    np.testing.assert_allclose(
        total, simulate_totals(expected, blocks=4).ravel(), rtol=1e-11
    )


RICH = {
    "packages": (
        *(p.model_copy(update={"loads": (load("crew", 0.4),)}) for p in PACKAGES[:2]),
        package("P3", 450.0, spent=120.0),
        package("P4", 200.0, 0.7, 1.5, loads=(load("crew", -0.3),)),
    ),
    "causes": (cause("crew"),),
    "general_dependence": 0.1,
    "systemic": (
        systemic(high=0.08, packages=("P1", "P2", "P3", "P4")),
        systemic("S2", applies_to=("P1",), packages=("P1",)),
    ),
    "events": (
        event("E1", 0.25, excludes=("E3",)),
        event("E2", 0.1, 300.0, status="occurred"),
        event("E3", 0.4, 80.0, excludes=("E1",)),
        event("E4", 0.5, 200.0, requires="E2"),
        event("E5", None, 30.0, happens="repeatedly", frequency=1.4),
    ),
}


def test_the_two_ends_are_the_two_revisions():
    """Everything at once: what the engine simulates, trial by trial."""
    earlier, later = estimate(), estimate(revision="B", **RICH)
    found = mixed(earlier, later)

    assert_same(found.total(frozenset()), earlier)
    assert_same(found.total(frozenset(found.families)), later)
    assert found.base(frozenset()) == earlier.base
    assert found.base(frozenset(found.families)) == later.base


@pytest.mark.parametrize(
    ("family", "new"),
    [
        (
            Family.UNEXPLAINED,
            {"packages": with_row(PACKAGES, package("P2", 900.0))},
        ),
        (
            Family.RANGES,
            {"packages": with_row(PACKAGES, package("P2", 600.0, 0.7, 1.9))},
        ),
        (
            Family.ACTUALS,
            {"packages": with_row(PACKAGES, package("P2", 600.0, spent=250.0))},
        ),
        (Family.DEPENDENCE, {"general_dependence": 0.6}),
        (Family.SYSTEMIC, {"systemic": ()}),
        (Family.REASSESSED, {"events": with_row(EVENTS, event("E1", 0.6))}),
        (Family.NEW_EVENTS, {"events": (*EVENTS, event("E9", 0.2))}),
        (Family.CLOSED_EVENTS, {"events": without_row(EVENTS, "E1")}),
        (
            Family.OCCURRED,
            {"events": with_row(EVENTS, event("E1", status="occurred"))},
        ),
        (
            Family.TREATMENT,
            {
                "events": with_row(
                    EVENTS,
                    event(
                        "E2",
                        0.1,
                        300.0,
                        use="after",
                        after_probability=0.05,
                        after_impact=EVENTS[0].impact,
                    ),
                )
            },
        ),
    ],
)
def test_one_family_is_the_one_that_moved(family, new):
    """A revision with one change has one family, and its end is the revision."""
    earlier, later = estimate(), estimate(revision="B", **new)
    found = mixed(earlier, later)

    assert found.families == (family,)
    assert_same(found.total(frozenset()), earlier)
    assert_same(found.total(frozenset({family})), later)


def test_a_base_moves_without_its_range():
    """A range in percent follows the base; the range then moves alone."""
    later = estimate(packages=with_row(PACKAGES, package("P2", 900.0, 0.7, 1.9)))
    found = mixed(estimate(), later)

    assert found.families == (Family.UNEXPLAINED, Family.RANGES)
    only_base = estimate(packages=with_row(PACKAGES, package("P2", 900.0)))
    only_range = estimate(packages=with_row(PACKAGES, package("P2", 600.0, 0.7, 1.9)))
    assert_same(found.total(frozenset({Family.UNEXPLAINED})), only_base)
    assert_same(found.total(frozenset({Family.RANGES})), only_range)


def test_spent_moves_without_the_base_and_the_range():
    """What is spent can no longer vary, whatever else moved."""
    later = estimate(
        packages=with_row(PACKAGES, package("P2", 900.0, 0.7, 1.9, spent=300.0))
    )
    found = mixed(estimate(), later)

    only_spent = estimate(
        packages=with_row(PACKAGES, package("P2", 600.0, spent=300.0))
    )
    assert_same(found.total(frozenset({Family.ACTUALS})), only_spent)
    with_base = estimate(packages=with_row(PACKAGES, package("P2", 900.0, spent=300.0)))
    both = frozenset({Family.ACTUALS, Family.UNEXPLAINED})
    assert_same(found.total(both), with_base)


def test_one_base_change_can_belong_to_two_families():
    """Amounts of changes.csv say how much each of them moved the base."""
    later = estimate(
        packages=with_row(PACKAGES, package("P2", 900.0)),
        changes=(
            change(id="P2", family="approved-scope", amount=200.0),
            change(id="P2", family="correction", line=3),
        ),
    )
    found = mixed(estimate(), later)

    assert found.families == (Family.APPROVED_SCOPE, Family.CORRECTION)
    scope = estimate(packages=with_row(PACKAGES, package("P2", 800.0)))
    rest = estimate(packages=with_row(PACKAGES, package("P2", 700.0)))
    assert_same(found.total(frozenset({Family.APPROVED_SCOPE})), scope)
    assert_same(found.total(frozenset({Family.CORRECTION})), rest)
    assert found.base(frozenset({Family.CORRECTION})) == 1_000 + 700 + 400


def test_a_new_package_meets_the_systemic_risks_and_causes_of_before():
    """By the words of applies_to; its loads act on causes that were known."""
    causes = (cause("crew"),)
    earlier = estimate(causes=causes)
    added = package("P9", 500.0, loads=(load("crew", 0.5), load("steel", 0.3)))
    later = estimate(
        causes=(*causes, cause("steel")),
        packages=(*PACKAGES, added),
        systemic=(systemic(high=0.3, packages=("P1", "P2", "P3", "P9")),),
        changes=(change(id="P9", family="approved-scope"),),
    )
    found = mixed(earlier, later)

    known = added.model_copy(update={"loads": (load("crew", 0.5),)})
    expected = estimate(
        causes=causes,
        packages=(*PACKAGES, known),
        systemic=(systemic(packages=("P1", "P2", "P3", "P9")),),
    )
    assert found.families == (
        Family.APPROVED_SCOPE,
        Family.DEPENDENCE,
        Family.SYSTEMIC,
    )
    assert_same(found.total(frozenset({Family.APPROVED_SCOPE})), expected)


def test_an_event_cannot_happen_while_its_condition_is_closed():
    """A child of a closed event is left out; one of an event that occurred stays."""
    earlier = estimate(events=(event("E1"), event("E2", 0.5, requires="E1")))
    later = estimate(events=(event("E1", status="closed"), event("E2", 0.7)))
    found = mixed(earlier, later)

    closed = found.total(frozenset({Family.CLOSED_EVENTS}))
    assert_same(closed, estimate(events=()))
    reassessed = found.total(frozenset({Family.REASSESSED}))
    assert_same(reassessed, estimate(events=(event("E1"), event("E2", 0.7))))


def test_events_that_come_to_exclude_one_another_are_drawn_together():
    """The tie comes with the event that is new."""
    later = estimate(
        events=(
            event("E1", 0.5, excludes=("E9",)),
            EVENTS[1],
            event("E9", 0.4, 500.0, excludes=("E1",)),
        )
    )
    found = mixed(estimate(), later)

    assert found.families == (Family.REASSESSED, Family.NEW_EVENTS)
    expected = estimate(
        events=(
            event("E1", 0.3, excludes=("E9",)),
            EVENTS[1],
            event("E9", 0.4, 500.0, excludes=("E1",)),
        )
    )
    assert_same(found.total(frozenset({Family.NEW_EVENTS})), expected)


def test_a_split_package_is_one_movement():
    """The same work in two packages, and a base change on top of it."""
    later = estimate(
        packages=(
            *without_row(PACKAGES, "P2"),
            package("P21", 500.0, 0.95, 1.2),
            package("P22", 300.0),
        ),
        systemic=(systemic(packages=("P1", "P3", "P21", "P22")),),
        changes=(
            Change(
                before=("P2",), into=("P21", "P22"), reason="Two lots", by="PM", line=2
            ),
            change(id="P21", family="correction", line=3),
        ),
    )
    found = mixed(estimate(), later)

    assert found.families == (Family.CORRECTION, Family.STRUCTURE)
    grown = estimate(packages=with_row(PACKAGES, package("P2", 800.0)))
    assert_same(found.total(frozenset({Family.CORRECTION})), grown)
    split = estimate(
        packages=(
            *without_row(PACKAGES, "P2"),
            package("P21", 375.0, 0.95, 1.2),
            package("P22", 225.0),
        ),
        systemic=(systemic(packages=("P1", "P3", "P21", "P22")),),
    )
    assert_same(found.total(frozenset({Family.STRUCTURE})), split)


def test_pairs_of_correlations_keep_their_draws():
    """Each revision's own factor is used; packages of the other one are put below."""
    pair = PairCorrelation(a="P1", b="P2", correlation=0.6, line=2)
    added = package("P0", 300.0)
    earlier = estimate(correlations=(pair,))
    later = estimate(
        packages=(added, *PACKAGES),
        correlations=(pair, pair.model_copy(update={"a": "P0", "correlation": 0.3})),
        systemic=(systemic(packages=("P0", "P1", "P2", "P3")),),
    )
    found = mixed(earlier, later)

    assert_same(found.total(frozenset()), earlier)
    assert_same(found.total(frozenset(found.families)), later)


def test_the_level_is_the_one_that_is_asked_for():
    """The contingency of a mixture is its percentile less its base."""
    at_fifty = estimate(contingency=ContingencyRule(target=50))
    found = mixtures(match(at_fifty, at_fifty), seed=7, blocks=4, percent=50)

    totals = simulate_totals(at_fifty, blocks=4)
    expected = np.sort(totals, axis=None)[totals.size // 2 - 1] - at_fifty.base
    assert found.value(frozenset())[0] == pytest.approx(expected, rel=1e-12)
    assert found.value(frozenset()).shape == (5,)
