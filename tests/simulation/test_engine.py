"""The engine: what is drawn, what is kept, and what must not change it."""

from dataclasses import fields

import numpy as np
import pytest
from scipy.stats import spearmanr

from contingency.estimate.nouns import Run
from contingency.quantities.draws import BLOCK
from contingency.simulation import simulate
from contingency.simulation.blocks import run_block
from contingency.simulation.cost_model import build_model
from contingency.simulation.drawing import Workspace
from tests.simulation.estimates import (
    a_bit_of_everything,
    cause,
    cost_range,
    estimate,
    event,
    exact,
    package,
    pair,
    systemic,
)


def assert_same(one, other):
    """Every field of two simulations is equal to the bit."""
    for field in fields(one):
        a, b = getattr(one, field.name), getattr(other, field.name)
        if isinstance(a, np.ndarray):
            assert np.array_equal(a, b), field.name
        else:
            assert a == b, field.name


def test_the_number_of_threads_changes_nothing():
    """One, two and five threads give the same bytes."""
    model = a_bit_of_everything()
    one = simulate(model)

    assert_same(one, simulate(model, threads=2))
    assert_same(one, simulate(model, threads=5))


def test_the_order_in_which_blocks_run_changes_nothing():
    """Blocks run backwards, each in a workspace of its own, add up to the same."""
    model = a_bit_of_everything()

    def backwards(built, centre, blocks):
        done = {
            block: run_block(built, block, Workspace(built), centre)
            for block in reversed(blocks)
        }
        return (done[block] for block in blocks)

    assert_same(simulate(model), simulate(model, runner=backwards))


def test_the_order_of_rows_changes_no_bit():
    """Rows turned round give the same totals; parts follow their rows."""
    model = a_bit_of_everything()
    turned = model.model_copy(
        update={
            "packages": model.packages[::-1],
            "events": model.events[::-1],
            "systemic": model.systemic[::-1],
        }
    )
    one, other = simulate(model), simulate(turned)

    assert np.array_equal(one.total, other.total)
    assert np.array_equal(one.range_mean, other.range_mean[::-1])
    assert np.array_equal(one.range_removal, other.range_removal[::-1])
    assert np.array_equal(one.event_covariance, other.event_covariance[::-1])
    assert np.array_equal(one.systemic_swing, other.systemic_swing[::-1])


def test_an_added_package_moves_no_other_draw():
    """Every other part keeps its mean to the bit when a row is added."""
    model = a_bit_of_everything()
    more = model.model_copy(
        update={"packages": (package("AA", cost_range(5, 10, 30)), *model.packages)}
    )
    one, other = simulate(model), simulate(more)

    assert np.array_equal(one.range_mean, other.range_mean[1:])
    assert np.array_equal(one.event_mean, other.event_mean)
    assert np.array_equal(one.systemic_mean, other.systemic_mean[1:])


def test_a_package_of_no_cost_moves_nothing():
    """A fixed package of zero leaves the total as it was."""
    model = a_bit_of_everything()
    more = model.model_copy(
        update={"packages": (*model.packages, package("Z", base=0.0))}
    )

    assert simulate(more).total == pytest.approx(simulate(model).total, rel=1e-14)


def test_the_parts_make_the_whole():
    """Means and covariances of the parts add up to those of the total."""
    result = simulate(a_bit_of_everything())
    means = (
        result.range_mean.sum() + result.systemic_mean.sum() + result.event_mean.sum()
    )
    covariances = (
        result.range_covariance.sum()
        + result.systemic_covariance.sum()
        + result.event_covariance.sum()
    )
    near = (
        result.range_near.sum() + result.systemic_near.sum() + result.event_near.sum()
    )

    assert result.base + means == pytest.approx(result.total.mean(), rel=1e-12)
    assert covariances == pytest.approx(result.total.var(), rel=1e-10)
    level = np.quantile(result.total, 0.8)
    assert result.base + near == pytest.approx(level, rel=0.002)


def test_parts_are_covariances_of_what_they_say():
    """Each part equals the plain covariance over the trials, drawn again by hand."""
    model = estimate(
        [package("A", cost_range(80, 100, 150)), package("B", base=50.0)],
        (event("R", 0.3, exact(40.0)),),
        systemic=(systemic("S", cost_range(0.0, 0.1, 0.3), ("A", "B")),),
        trials=4 * BLOCK,
    )
    result = simulate(model)
    rows = []
    built = build_model(model)
    for block in range(4):
        work = Workspace(built)
        run_block(built, block, work, 0.0)
        rows.append(work.value.copy())
    value = np.concatenate(rows, axis=1)  # (k, n), A varies and comes first
    ranges = value - np.array([[100.0], [50.0]])
    direct = (ranges * result.total).mean(axis=1) - ranges.mean(
        axis=1
    ) * result.total.mean()

    assert result.range_covariance == pytest.approx(direct, rel=1e-9, abs=1e-9)
    assert result.range_covariance[1] == pytest.approx(0.0, abs=1e-12)
    assert result.systemic_mean[1, 0] > 0.0


def test_an_opportunity_reduces_cost():
    """A certain saving of 10 takes 10 off every trial."""
    saving = event("R", 1.0, exact(10.0), kind="opportunity")
    result = simulate(estimate([package("A")], (saving,), trials=2 * BLOCK))

    assert np.all(result.total == 90.0)
    assert result.event_mean.tolist() == [-10.0]


def test_an_event_happens_as_often_as_its_probability_says():
    """Each block has the whole number of occurrences next to its expected number."""
    risk = event("R", 0.3, exact(10.0))
    result = simulate(estimate([package("A")], (risk,)))
    counts = (result.total.reshape(-1, BLOCK) > 100.0).sum(axis=1)

    assert set(counts.tolist()) <= {1228, 1229}


def test_events_that_require_another_never_come_alone():
    """The child happens in the share of its parent's trials that it should."""
    parent = event("R1", 0.4, exact(1.0))
    child = event("R2", 0.5, exact(10.0), requires="R1")
    total = simulate(estimate([package("A", base=0.0)], (parent, child))).total

    assert set(total.tolist()) == {0.0, 1.0, 11.0}
    assert np.mean(total == 11.0) == pytest.approx(0.2, abs=0.004)


def test_events_that_exclude_each_other_never_come_together():
    """Three of a kind: at most one in any trial, each as often as it should."""
    names = ("R1", "R2", "R3")
    three = tuple(
        event(n, p, exact(c), excludes=tuple(m for m in names if m != n))
        for n, p, c in zip(names, (0.2, 0.3, 0.1), (1.0, 10.0, 100.0), strict=True)
    )
    total = simulate(estimate([package("A", base=0.0)], three)).total

    assert set(total.tolist()) == {0.0, 1.0, 10.0, 100.0}
    assert np.mean(total == 10.0) == pytest.approx(0.3, abs=0.001)


def test_closing_a_member_moves_no_other_stream():
    """The group's uniform is named after the whole group, closed members included."""
    names = ("R1", "R2")
    both = tuple(
        event(n, 0.2, exact(c), excludes=tuple(m for m in names if m != n))
        for n, c in zip(names, (1.0, 10.0), strict=True)
    )
    closed = (both[0].model_copy(update={"status": "closed"}), both[1])
    streams = [
        build_model(estimate([package("A")], events)).units[0].stream
        for events in (both, closed)
    ]

    assert streams == ["event/R1", "event/R1"]


def test_a_repeated_event_follows_the_poisson_law():
    """Counts of occurrences, read off a known impact of 1."""
    risk = event("R", None, exact(1.0), happens="repeatedly", frequency=1.5)
    total = simulate(estimate([package("A", base=0.0)], (risk,))).total

    assert np.mean(total == 0.0) == pytest.approx(np.exp(-1.5), abs=3e-4)
    assert total.mean() == pytest.approx(1.5, abs=3e-3)
    assert total.var() == pytest.approx(1.5, abs=0.02)


def test_common_causes_and_general_dependence_give_the_correlation_asked_for():
    """Spearman of the drawn costs is (6/pi) asin(r/2), for skewed shapes too."""
    model = estimate(
        [
            package("A", cost_range(80, 100, 200), loads={"c": 0.7}),
            package(
                "B", cost_range(50, None, 200, shape="lognormal"), loads={"c": -0.6}
            ),
            package("C", cost_range(90, 95, 180, shape="triangular")),
        ],
        general_dependence=0.25,
        causes=(cause("c"),),
        trials=BLOCK,
    )
    built = build_model(model)
    rows = []
    for block in range(16):
        work = Workspace(built)
        run_block(built, block, work, 0.0)
        rows.append(work.value.copy())
    order = [p.id for p in built.packages]
    drawn = np.concatenate(rows, axis=1)[[order.index(i) for i in "ABC"]]
    r = np.array([0.25 - 0.42, 0.25, 0.25])
    wanted = 6 / np.pi * np.arcsin(r / 2)
    found = spearmanr(drawn.T).statistic[[0, 0, 1], [1, 2, 2]]

    # A rank correlation of 65,536 pairs has a standard error of at most 1/256.
    assert found == pytest.approx(wanted, abs=4 / 256)


def test_pairs_give_the_rank_correlation_asked_for():
    """A file of rank correlations is met by the draws; unnamed pairs are general."""
    model = estimate(
        [
            package("A", cost_range(80, 100, 200)),
            package("B", cost_range(50, None, 200, shape="lognormal")),
            package("C", cost_range(90, 95, 180, shape="triangular")),
        ],
        general_dependence=0.1,
        correlations=(pair("A", "B", 0.6), pair("C", "A", -0.3)),
        trials=2 * BLOCK,
    )
    built = build_model(model)
    rows = []
    for block in range(16):
        work = Workspace(built)
        run_block(built, block, work, 0.0)
        rows.append(work.value.copy())
    order = [p.id for p in built.packages]
    drawn = np.concatenate(rows, axis=1)[[order.index(i) for i in "ABC"]]
    found = spearmanr(drawn.T).statistic[[0, 0, 1], [1, 2, 2]]
    wanted = [0.6, -0.3, 6 / np.pi * np.arcsin(0.05)]

    assert found == pytest.approx(wanted, abs=4 / 256)
    assert simulate(model).correlation_repair is None


def test_contradicting_pairs_are_repaired_and_the_change_is_told():
    """Three pairs that no three packages can have."""
    model = estimate(
        [package(n, cost_range(80, 100, 150)) for n in "ABC"],
        correlations=(
            pair("A", "B", 0.9),
            pair("B", "C", 0.9),
            pair("A", "C", -0.9),
        ),
        trials=2 * BLOCK,
    )
    repair = simulate(model).correlation_repair

    assert repair is not None
    change, a, b = repair
    assert change > 0.3
    assert {a, b} <= set("ABC")


def test_blocks_run_until_the_target_is_settled():
    """A tolerance that the least cannot meet asks for more, and no more than most."""
    loose = Run(seed=1, tolerance=0.5, least=2 * BLOCK, most=64 * BLOCK)
    tight = Run(seed=1, tolerance=0.0008, least=2 * BLOCK, most=64 * BLOCK)
    hopeless = Run(seed=1, tolerance=1e-9, least=2 * BLOCK, most=8 * BLOCK)
    first, second, third = (
        simulate(a_bit_of_everything(run=run)) for run in (loose, tight, hopeless)
    )

    assert (first.blocks, first.settled) == (2, True)
    assert second.settled
    assert 2 < second.blocks < 64
    assert (third.blocks, third.settled) == (8, False)
    assert np.array_equal(first.total, second.total[: 2 * BLOCK])


def test_progress_is_told_block_by_block():
    """The last call says that all trials are done."""
    calls = []
    simulate(
        a_bit_of_everything(trials=4 * BLOCK),
        progress=lambda done, most: calls.append((done, most)),
    )

    assert calls == [(i * BLOCK, 4 * BLOCK) for i in (1, 2, 3, 4)]


def test_removal_is_the_fall_of_the_level_without_the_input():
    """Close to a second run without the event, and with the range at its base."""
    model = a_bit_of_everything()
    result = simulate(model)
    level = np.quantile(result.total, 0.8)
    closed = model.model_copy(
        update={
            "events": tuple(
                e.model_copy(update={"status": "closed"}) if e.id in ("R1", "R2") else e
                for e in model.events
            )
        }
    )
    fixed = model.model_copy(update={"packages": (package("A"), *model.packages[1:])})

    # R2 cannot happen without R1, but its draws stay in the total without R1's cost.
    both = result.event_removal[0] + result.event_removal[1]
    assert level - np.quantile(simulate(closed).total, 0.8) == pytest.approx(
        both, abs=3.0
    )
    assert level - np.quantile(simulate(fixed).total, 0.8) == pytest.approx(
        result.range_removal[0], abs=0.3
    )


def test_swings_are_means_of_the_total_in_the_tails():
    """One range alone: the mean of its lowest and of its highest tenth."""
    shape = cost_range(80, 100, 150)
    result = simulate(estimate([package("A", shape)]))
    p = (np.arange(100_000) + 0.5) / 1_000_000
    low = shape.distribution.quantile(p).mean()
    high = shape.distribution.quantile(1.0 - p).mean()

    assert result.range_swing[0] == pytest.approx([low, high], rel=2e-5)
    assert result.event_swing.shape == (0, 2)


def test_a_single_fixed_package_has_no_spread_and_no_trouble():
    """Nothing uncertain: every trial is the base, and every share is nought."""
    result = simulate(estimate([package("A")], trials=2 * BLOCK))

    assert np.all(result.total == 100.0)
    assert result.settled
    assert result.range_covariance.tolist() == [0.0]
