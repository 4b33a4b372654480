"""The distribution of the total as it is drawn."""

import numpy as np
import pytest

from contingency.setting.curve import chance_of_holding, cumulative_curve, histogram


def test_the_curve_is_that_of_the_trials():
    """Every point is a trial with the share of trials that do not exceed it."""
    total = np.random.default_rng(1).normal(size=5000)
    curve = cumulative_curve(total, points=400)

    assert curve.cost.size <= 400
    assert curve.cost[0] == total.min()
    assert curve.cost[-1] == total.max()
    assert curve.chance[-1] == 1.0
    for cost, chance in zip(curve.cost[::37], curve.chance[::37], strict=True):
        assert chance_of_holding(total, cost) == pytest.approx(chance)


def test_few_trials_are_all_points():
    """No point is made up between them."""
    curve = cumulative_curve(np.array([3.0, 1.0, 2.0]))

    assert curve.cost.tolist() == [1.0, 2.0, 3.0]
    assert curve.chance.tolist() == pytest.approx([1 / 3, 2 / 3, 1.0])


def test_the_histogram_counts_every_trial_once():
    """Shares and what is left out make the whole."""
    total = np.random.default_rng(2).lognormal(size=10_000)
    counts = histogram(total)

    assert counts.share.sum() + counts.left_out == pytest.approx(1.0)
    assert 0.0 < counts.left_out <= 0.0021
    assert counts.edges.size == counts.share.size + 1


def test_a_total_without_spread_is_one_bin():
    """Around the amount, so that it can be drawn."""
    counts = histogram(np.full(100, 2.15e6))

    assert counts.share.tolist() == [1.0]
    assert counts.edges[0] < 2.15e6 < counts.edges[1]
