"""What must hold of every comparison."""

from itertools import permutations
from math import sqrt
from statistics import NormalDist

import numpy as np
import pytest

from contingency.errors import NotRevisions, OtherCurrency
from contingency.estimate.nouns import (
    Change,
    ContingencyRule,
    Level,
    Run,
    ShapeName,
    SystemicRisk,
)
from contingency.tracking.averaging import balanced_orders, effects
from contingency.tracking.bridge import IssuedFigures
from contingency.tracking.compare import compare
from contingency.tracking.families import SUBSTITUTED, Family
from tests.tracking.pairs import (
    DAY,
    EVENTS,
    PACKAGES,
    change,
    estimate,
    event,
    normal,
    package,
    systemic,
    with_row,
    without_row,
)

LATER = {
    "revision": "B",
    "general_dependence": 0.35,
    "packages": (
        package("P1", 1_150.0, 0.9, 1.25),
        package("P2", 600.0, spent=150.0),
        package("P4", 300.0),
    ),
    "systemic": (systemic(high=0.08, packages=("P1", "P2", "P4")),),
    "events": (
        event("E1", 0.45),
        event("E2", 0.1, 300.0, status="closed"),
        event("E3", 0.5, 120.0, kind="opportunity"),
    ),
    "changes": (
        change(id="P1", family="correction", line=2),
        change(id="P4", family="approved-scope", line=3),
    ),
}


@pytest.mark.parametrize("order", ["average", "sequence"])
def test_comparing_an_estimate_with_itself_finds_nothing(order):
    """No step, no difference, no movement of a risk."""
    same = compare(estimate(), estimate(), order=order)

    assert same.is_empty
    assert same.differences == ()
    assert {risk.movement for risk in same.risks} == {"unchanged"}
    assert same.bridge.before == same.bridge.after
    assert same.bridge.residual == (0.0, 0.0)


@pytest.mark.parametrize("order", ["average", "sequence"])
def test_every_column_closes(order):
    """Old plus steps is new, and rows add up to their step."""
    bridge = compare(estimate(), estimate(**LATER), order=order).bridge

    assert bridge.residual == pytest.approx((0.0, 0.0), abs=1e-9)
    assert len(bridge.steps) >= 9
    for step in bridge.steps:
        if step.rows:
            assert sum(r.contingency for r in step.rows) == pytest.approx(
                step.contingency, abs=1e-9
            )
            assert sum(r.base for r in step.rows) == pytest.approx(step.base, abs=1e-9)


def test_the_way_back_is_the_way_there_reversed():
    """Each step has the opposite sign; what was new is closed."""
    turned = {Family.NEW_EVENTS: Family.CLOSED_EVENTS}
    turned |= {new: old for old, new in turned.items()}
    changes = LATER["changes"]
    there = compare(estimate(), estimate(**LATER)).bridge
    back = compare(estimate(**LATER), estimate(changes=changes)).bridge

    assert len(there.steps) == len(back.steps)
    for step in there.steps:
        mirrored = back.step(turned.get(step.family, step.family))
        assert mirrored.base == pytest.approx(-step.base, abs=1e-9)
        assert mirrored.contingency == pytest.approx(-step.contingency, abs=1e-9)
        assert mirrored.noise == pytest.approx(step.noise, rel=1e-6, abs=1e-9)
        rows = {row.id: row.contingency for row in mirrored.rows}
        for row in step.rows:
            assert rows[row.id] == pytest.approx(-row.contingency, abs=1e-9)


def test_the_difference_list_reversed_has_old_and_new_swapped():
    """The same cells differ, whichever way one looks."""
    there = compare(estimate(), estimate(**LATER | {"changes": ()})).differences
    back = compare(estimate(**LATER | {"changes": ()}), estimate()).differences

    assert {(d.file, d.id, d.field, d.old, d.new) for d in there} == {
        (d.file, d.id, d.field, d.new, d.old) for d in back
    }


def test_a_package_of_no_cost_moves_nothing():
    """It is in the difference list and in no step."""
    nothing = package(
        "P9",
        0.0,
        cost=normal(0.0, 0.0).model_copy(
            update={"shape": ShapeName.FIXED, "low": None, "high": None, "likely": 0.0}
        ),
    )
    later = estimate(
        packages=(*PACKAGES, nothing),
        systemic=(systemic(packages=("P1", "P2", "P3", "P9")),),
    )
    found = compare(estimate(), later)

    assert found.is_empty
    assert [(d.id, d.field) for d in found.differences] == [("P9", "row")]


# --------------------------------------------------------------------------------------
# Normals: the effects are known in closed form

MEAN, DEVIATION = {"P1": 1_000.0, "P2": 600.0}, {"P1": 120.0, "P2": 90.0}
RUN = Run(seed=11, tolerance=0.5, least=65_536, most=65_536)
WIDER, RHO, MOVED = 150.0, 0.5, 40.0


def _normals(*, wide=False, dependent=False, moved=False, percent=80):
    """Two normal packages; the range of P1, the dependence and P2 may change."""
    p1 = package("P1", 1_000.0, cost=normal(1_000.0, WIDER if wide else 120.0))
    base = 600.0 + (MOVED if moved else 0.0)
    p2 = package("P2", base, cost=normal(base, 90.0 * base / 600.0))
    return estimate(
        packages=(p1, p2),
        systemic=(),
        events=(),
        general_dependence=RHO if dependent else 0.0,
        contingency=ContingencyRule(target=percent),
        run=RUN,
        changes=(change(id="P2", family="definition"),),
    )


def _exact(on, percent=80):
    """Contingency of a mixture of the two: z times the deviation of the sum."""
    first = WIDER if Family.RANGES in on else 120.0
    second = 90.0 * (640.0 / 600.0 if Family.DEFINITION in on else 1.0)
    rho = RHO if Family.DEPENDENCE in on else 0.0
    z = NormalDist().inv_cdf(percent / 100)
    return z * sqrt(first**2 + second**2 + 2 * rho * first * second)


def _exact_effects(families):
    """Average over all orders, written out order by order."""
    total = dict.fromkeys(families, 0.0)
    orders = list(permutations(families))
    for order in orders:
        for place, family in enumerate(order):
            before = frozenset(order[:place])
            total[family] += _exact(before | {family}) - _exact(before)
    return {family: amount / len(orders) for family, amount in total.items()}


NORMAL_FAMILIES = (Family.DEFINITION, Family.RANGES, Family.DEPENDENCE)


def test_normals_have_the_effects_of_their_closed_form():
    """Ranges, dependence and base, averaged over all orders; the level last."""
    later = _normals(wide=True, dependent=True, moved=True, percent=90)
    bridge = compare(_normals(), later).bridge

    expected = _exact_effects(NORMAL_FAMILIES)
    assert [s.family for s in bridge.steps] == [*NORMAL_FAMILIES, Family.LEVEL]
    for family in NORMAL_FAMILIES:
        step = bridge.step(family)
        assert abs(step.contingency - expected[family]) < 2 * step.noise
        assert step.noise < 0.2 * expected[family]
    everything = frozenset(NORMAL_FAMILIES)
    rise = _exact(everything, 90) - _exact(everything, 80)
    assert bridge.step(Family.LEVEL).contingency == pytest.approx(rise, abs=2.5)
    assert bridge.step(Family.DEFINITION).base == MOVED
    assert bridge.at_old_level == pytest.approx(_exact(everything), abs=2.0)


def test_normals_in_sequence_have_the_effects_of_that_sequence():
    """Published order: base, ranges, dependence."""
    later = _normals(wide=True, dependent=True, moved=True)
    bridge = compare(_normals(), later, order="sequence").bridge

    on = frozenset()
    for family in NORMAL_FAMILIES:
        effect = _exact(on | {family}) - _exact(on)
        step = bridge.step(family)
        assert abs(step.contingency - effect) < 2 * step.noise
        assert step.noise < 0.2 * effect
        on |= {family}


def test_the_order_changes_single_effects_and_not_their_sum():
    """The average over all orders lies between the first and the last place."""
    later = _normals(wide=True, dependent=True, moved=True)
    average = compare(_normals(), later).bridge
    sequence = compare(_normals(), later, order="sequence").bridge

    sums = [
        sum(step.contingency for step in bridge.steps) for bridge in (average, sequence)
    ]
    assert sums[0] == pytest.approx(sums[1], abs=1e-9)
    assert average.step(Family.DEPENDENCE).contingency != pytest.approx(
        sequence.step(Family.DEPENDENCE).contingency, abs=0.1
    )


# --------------------------------------------------------------------------------------
# The average


def _game(seed, count):
    """Arbitrary values of all subsets of some families."""
    values = np.random.default_rng(seed).normal(size=(2**count, 3))
    families = SUBSTITUTED[:count]

    def value(on):
        return values[sum(1 << families.index(f) for f in on)]

    return families, value


def test_the_average_over_all_orders_is_just_that():
    """Subset weights against all orders written out."""
    families, value = _game(1, 5)
    slow = np.zeros((5, 3))
    orders = list(permutations(range(5)))
    for order in orders:
        for place, i in enumerate(order):
            before = frozenset(families[j] for j in order[:place])
            slow[i] += value(before | {families[i]}) - value(before)

    np.testing.assert_allclose(
        np.array(effects(families, value, "average")), slow / len(orders), atol=1e-12
    )


def test_many_families_are_averaged_over_balanced_orders():
    """Each takes each place twice, and the effects still add up."""
    families, value = _game(2, 13)
    orders = balanced_orders(families)

    for place in range(13):
        assert sorted(order[place] for order in orders) == sorted([*families] * 2)
    total = np.sum(effects(families, value, "average"), axis=0)
    np.testing.assert_allclose(
        total, value(frozenset(families)) - value(frozenset()), atol=1e-12
    )


# --------------------------------------------------------------------------------------
# The ends of the bridge


def test_another_seed_is_a_step_of_its_own_and_within_its_noise():
    """What is left to chance is shown as chance."""
    later = estimate(run=Run(seed=8, tolerance=0.5, least=16_384, most=16_384))
    bridge = compare(estimate(), later).bridge

    (step,) = bridge.steps
    assert step.family is Family.SAMPLING
    assert step.is_within_noise
    assert step.base == 0.0


def test_another_price_date_is_restated_first():
    """With a factor and no other change the restatement is all there is."""
    in_new_money = estimate(
        price_date=DAY.replace(year=2027),
        packages=tuple(
            package(
                p.id,
                p.base * 1.05,
                cost=p.cost.model_copy(
                    update={
                        "low": p.cost.low * 1.05,
                        "likely": p.cost.likely * 1.05,
                        "high": p.cost.high * 1.05,
                    }
                ),
            )
            for p in PACKAGES
        ),
        events=(event("E1", likely=105.0), event("E2", 0.1, 315.0)),
        changes=(change(file="estimate", family="prices", factor=1.05),),
    )
    found = compare(estimate(), in_new_money)

    (step,) = found.bridge.steps
    assert found.is_restated
    assert not found.lacks_factor
    assert step.family is Family.PRICES
    assert step.base == pytest.approx(100.0)
    assert step.contingency == pytest.approx(0.05 * found.bridge.before.contingency)


def test_a_package_may_have_a_factor_of_its_own():
    """Steel rose more than the rest."""
    later = estimate(
        price_date=DAY.replace(year=2027),
        changes=(
            change(file="estimate", family="prices", factor=1.0),
            change(id="P2", family="prices", factor=1.5, line=3),
        ),
    )
    step = compare(estimate(), later).bridge.step(Family.PRICES)

    assert step.base == pytest.approx(300.0)


def test_a_missing_factor_is_said():
    """Nothing is restated in silence, and nothing is made up."""
    found = compare(estimate(), estimate(price_date=DAY.replace(year=2027)))

    assert found.lacks_factor
    assert not found.is_restated


def test_what_another_version_makes_of_the_same_inputs_comes_first():
    """Issued figures are the start; the old inputs were run again."""
    own = compare(estimate(), estimate()).bridge.before
    issued = IssuedFigures(
        base=own.base, contingency=own.contingency - 25.0, version="0.1", method="m/0"
    )
    bridge = compare(estimate(), estimate(**LATER), issued=issued).bridge

    assert bridge.steps[0].family is Family.METHOD
    assert bridge.steps[0].contingency == pytest.approx(25.0)
    assert bridge.before.contingency == issued.contingency
    assert bridge.residual == pytest.approx((0.0, 0.0), abs=1e-9)


def test_the_level_is_last_and_alone():
    """The step before it ends at the contingency of the old level."""
    higher = ContingencyRule(target=90, levels=(Level(percent=90),))
    bridge = compare(estimate(), estimate(**LATER | {"contingency": higher})).bridge

    assert bridge.steps[-1].family is Family.LEVEL
    so_far = bridge.before.contingency + sum(s.contingency for s in bridge.steps[:-1])
    assert so_far == pytest.approx(bridge.at_old_level, abs=1e-9)
    assert bridge.after.percent == 90


def test_printed_steps_close_in_whole_steps():
    """Rounded old plus rounded steps is rounded new, for several roundings."""
    found = compare(estimate(), estimate(**LATER))

    for step in (1.0, 7.0, 50.0, 1_000.0):
        rows = found.printed(step)
        for name in ("base", "contingency"):
            ends = [
                round(getattr(end, name) / step + 1e-12) * step
                for end in (found.bridge.before, found.bridge.after)
            ]
            change_ = sum(getattr(row, name) for row in rows)
            assert ends[0] + change_ == pytest.approx(ends[1])


# --------------------------------------------------------------------------------------
# History is kept


def test_a_renamed_package_goes_on():
    """Its history and its draws are those of the new id; nothing is new or gone."""
    renamed = PACKAGES[1].model_copy(update={"id": "P20"})
    later = estimate(
        packages=(PACKAGES[0], renamed, PACKAGES[2]),
        systemic=(systemic(packages=("P1", "P20", "P3")),),
        changes=(
            Change(before=("P2",), into=("P20",), reason="New code", by="PM", line=2),
        ),
    )
    found = compare(estimate(), later)

    # Only the draws of the range moved to another stream.
    assert [step.family for step in found.bridge.steps] == [Family.SAMPLING]
    (line,) = found.differences
    assert (line.field, line.old, line.new) == ("id", "P2", "P20")
    assert line.reason == "New code"


def test_a_merged_package_keeps_its_base():
    """Two become one; the base is explained, the ranges are one movement."""
    merged = package("P23", 1_000.0)
    later = estimate(
        packages=(PACKAGES[0], merged),
        systemic=(systemic(packages=("P1", "P23")),),
        changes=(
            Change(before=("P2", "P3"), into=("P23",), reason="One", by="PM", line=2),
        ),
    )
    bridge = compare(estimate(), later).bridge

    (step,) = bridge.steps
    assert step.family is Family.STRUCTURE
    assert step.base == 0.0
    assert step.contingency > 0.0
    assert [row.id for row in step.rows] == ["P2, P3 → P23"]


def test_a_split_event_is_assessed_anew_and_neither_closed_nor_new():
    """Its parts are rows of one movement."""
    later = estimate(
        events=(event("E11", 0.2), event("E12", 0.2), EVENTS[1]),
        changes=(
            Change(
                file="events",
                before=("E1",),
                into=("E11", "E12"),
                reason="Two causes",
                by="PM",
                line=2,
            ),
        ),
    )
    bridge = compare(estimate(), later).bridge

    assert [step.family for step in bridge.steps] == [Family.REASSESSED]
    assert {row.id for row in bridge.steps[0].rows} == {"E1", "E11", "E12"}


def test_an_event_that_occurred_moves_base_and_contingency_in_one_step():
    """Its cost in the base and the contingency that it held."""
    later = estimate(
        packages=with_row(PACKAGES, package("P3", 490.0)),
        events=with_row(EVENTS, event("E1", status="occurred")),
        changes=(
            change(id="P3", family="occurred", event="E1"),
            change(file="events", id="E1", reason="Flood in May.", line=3),
        ),
    )
    found = compare(estimate(), later)

    (step,) = found.bridge.steps
    assert step.family is Family.OCCURRED
    assert step.base == pytest.approx(90.0)
    assert step.contingency < 0.0
    risk = next(r for r in found.risks if r.id == "E1")
    assert risk.movement == "occurred"
    assert risk.base == pytest.approx(90.0)
    assert risk.reason == "Flood in May."
    assert risk.contingency < 0.0


def test_a_closed_event_stays_listed_and_shows_what_it_released():
    """An event that just left the register is told apart from a closed one."""
    closed = estimate(events=with_row(EVENTS, event("E1", status="closed")))
    gone = estimate(events=without_row(EVENTS, "E1"))

    by_movement = {}
    for later in (closed, gone):
        risk = next(r for r in compare(estimate(), later).risks if r.id == "E1")
        by_movement[risk.movement] = risk.released
    assert by_movement["closed"] == by_movement["left out"] > 0.0

    again = compare(closed, closed)
    assert {r.id: r.movement for r in again.risks}["E1"] == "closed before"


def test_lines_that_explain_nothing_are_named():
    """A line about an unchanged row, and one about a row that never was."""
    later = estimate(
        packages=with_row(PACKAGES, package("P2", 700.0)),
        changes=(
            change(id="P2", family="correction"),
            change(id="P3", family="correction", line=3),
            change(file="events", id="E77", line=4),
        ),
    )

    assert [c.id for c in compare(estimate(), later).unused] == ["P3", "E77"]


def test_reasons_stand_beside_the_cells():
    """And a base change without one is its own family."""
    later = estimate(
        packages=with_row(
            with_row(PACKAGES, package("P2", 700.0)), package("P3", 380.0)
        ),
        changes=(change(id="P2", family="correction", reason="Wrong rate."),),
    )
    found = compare(estimate(), later)

    said = {(d.id, d.field): d.reason for d in found.differences}
    assert said["P2", "base"] == "Wrong rate."
    assert said["P3", "base"] == ""
    assert found.unexplained_base == pytest.approx(20.0)


def test_estimates_in_two_currencies_are_refused():
    """No rate of exchange is made up."""
    with pytest.raises(OtherCurrency, match="EUR"):
        compare(estimate(), estimate(currency="USD"))


def test_estimates_without_a_common_package_are_refused():
    """They are no revisions of one another."""
    other = estimate(
        packages=(package("X1", 10.0),), systemic=(systemic(packages=("X1",)),)
    )
    with pytest.raises(NotRevisions, match="no package in common"):
        compare(estimate(), other)


def test_a_systemic_risk_of_before_is_a_row():
    """New, gone and changed risks share the step."""
    gone: SystemicRisk = systemic("S0")
    earlier = estimate(systemic=(gone, systemic()))
    later = estimate(systemic=(systemic(high=0.2), systemic("S9")))
    (step,) = compare(earlier, later).bridge.steps

    assert step.family is Family.SYSTEMIC
    signs = {row.id: np.sign(row.contingency) for row in step.rows}
    assert signs == {"S0": -1.0, "S1": 1.0, "S9": 1.0}


def test_the_way_back_is_the_way_there_where_a_base_grew_many_times():
    """A hybrid is read from the same revision in both directions."""
    small = estimate(packages=with_row(PACKAGES, package("P1", 400.0, spent=120.0)))
    large = estimate(packages=with_row(PACKAGES, package("P1", 2_500.0)))
    there = {s.family: s for s in compare(small, large).bridge.steps}
    back = {s.family: s for s in compare(large, small).bridge.steps}

    assert there.keys() == back.keys() == {Family.ACTUALS, Family.UNEXPLAINED}
    for family, step in there.items():
        assert back[family].contingency == pytest.approx(-step.contingency, abs=1e-9)
