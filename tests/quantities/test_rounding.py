"""Whole steps that add up."""

import numpy as np
import pytest

from contingency.errors import PartsDoNotClose
from contingency.quantities.rounding import round_amount, round_parts


@pytest.mark.parametrize(
    ("amount", "step", "expected"),
    [
        (2_499.0, 1_000.0, 2_000.0),
        (2_500.0, 1_000.0, 3_000.0),
        (-2_500.0, 1_000.0, -3_000.0),
        (-2_499.0, 1_000.0, -2_000.0),
        (0.0, 10.0, 0.0),
        (1e15 + 1.0, 1.0, 1e15 + 1.0),
    ],
)
def test_halves_go_away_from_zero(amount, step, expected):
    """As an accountant rounds, and alike on both sides of zero."""
    assert round_amount(amount, step) == expected


def test_the_largest_remainders_get_the_missing_steps():
    """Three parts of 1/3 each: the total 1 goes to the first of equals."""
    assert round_parts([1 / 3, 1 / 3, 1 / 3], step=1.0).tolist() == [1.0, 0.0, 0.0]
    assert round_parts([0.2, 0.5, 0.3], step=1.0).tolist() == [0.0, 1.0, 0.0]


def test_among_equals_the_earlier_part_comes_first():
    """Remainders in a pattern: 0.75 before 0.5 before 0.25, each in file order."""
    parts = np.tile([0.25, 0.75, 0.25, 0.5], 40)

    found = round_parts(parts, step=1.0)

    # 70 steps: the forty of 0.75, and the first thirty of 0.5.
    assert parts.sum() == 70.0
    assert found[1::4].tolist() == [1.0] * 40
    assert found[3::4].tolist() == [1.0] * 30 + [0.0] * 10
    assert not found[::2].any()


def test_negative_parts_close_too():
    """Opportunities are negative parts: down is towards minus infinity for them too.

    1.7, -0.45 and -0.45 are 0.8 in all: 2, 0 and -1, and not 2, 0 and 0.
    """
    found = round_parts([1_700.0, -450.0, -450.0], step=1_000.0)

    assert found.tolist() == [2_000.0, 0.0, -1_000.0]
    assert found.sum() == round_amount(800.0, 1_000.0)


def test_a_total_may_be_given():
    """Rounded elsewhere, within a step of the sum of the parts."""
    parts = [10.4, 20.4, 30.4]

    assert round_parts(parts, step=1.0).tolist() == [11.0, 20.0, 30.0]
    assert round_parts(parts, step=1.0, total=62.0).tolist() == [11.0, 21.0, 30.0]
    assert round_parts(parts, step=1.0, total=60.0).tolist() == [10.0, 20.0, 30.0]


@pytest.mark.parametrize("total", [59.0, 64.0, 61.5])
def test_a_total_out_of_reach_is_refused(total):
    """No part may move by a whole step, and a total is a whole number of steps."""
    with pytest.raises(PartsDoNotClose) as raised:
        round_parts([10.4, 20.4, 30.4], step=1.0, total=total)

    assert raised.value.slug == "parts-do-not-close"


def test_no_parts_are_nothing():
    """An empty table closes at zero."""
    assert round_parts([], step=10.0).tolist() == []


def test_nothing_has_no_sign():
    """A small negative part is printed as 0, not as -0."""
    found = round_parts([-0.2, 0.1, -0.0], step=1.0)

    assert found.tolist() == [0.0, 0.0, 0.0]
    assert not np.signbit(found).any()
