"""What must hold of rounded parts, whatever the parts and the step."""

from decimal import Decimal

import numpy as np
from hypothesis import given
from hypothesis import strategies as st

from contingency.quantities.rounding import round_amount, round_parts
from tests.properties.strategies import money, parts, steps


def in_steps(amounts, step):
    """Whole numbers of steps; fails where an amount is none."""
    whole = [round(amount / step) for amount in amounts]
    assert np.all(
        np.abs(np.array(whole, dtype=float) * step - amounts)
        <= 1e-9 * step + 1e-15 * np.abs(amounts)
    )
    return whole


@given(parts, steps)
def test_the_parts_make_the_whole(amounts, step):
    """Counted in steps, the rounded parts add up to the rounded sum."""
    total = round_amount(float(sum(Decimal(repr(a)) for a in amounts)), step)
    rounded = in_steps(round_parts(amounts, step=step), step)

    # The sum of the parts as floats may sit on the other side of a half.
    exact = sum(Decimal(repr(a)) for a in amounts) / Decimal(repr(step))
    near_half = abs(abs(exact % 1) - Decimal("0.5")) < Decimal("1e-6")
    assert abs(sum(rounded) - round(total / step)) <= (1 if near_half else 0)


@given(parts, steps)
def test_no_part_moves_by_a_step_or_more(amounts, step):
    """Each part is rounded down or up, and never further."""
    moved = np.abs(round_parts(amounts, step=step) - amounts)

    assert np.all(moved < step * (1.0 + 1e-9) + 1e-15 * np.abs(amounts))


@given(parts, steps)
def test_rounding_twice_changes_nothing(amounts, step):
    """Parts in whole steps are left as they are."""
    once = in_steps(round_parts(amounts, step=step), step)
    again = in_steps(round_parts(np.array(once) * step, step=step), step)

    assert again == once


@given(parts, st.sampled_from([1.0, 5.0, 1_000.0]), st.data())
def test_a_total_within_reach_is_met(amounts, step, data):
    """Any whole total from all parts down to all parts up can be asked for."""
    floor = sum(int(np.floor(a / step)) for a in amounts)
    total = step * (floor + data.draw(st.integers(0, len(amounts))))

    assert round_parts(amounts, step=step, total=total).sum() == total


@given(parts, steps)
def test_a_larger_part_is_not_rounded_to_less(amounts, step):
    """The order of the parts is kept."""
    ordered = np.sort(amounts)

    rounded = round_parts(ordered[::-1], step=step)[::-1]

    assert np.all(np.diff(rounded) >= -1e-9 * step - 1e-15 * np.abs(rounded[1:]))


@given(money, steps)
def test_amounts_are_rounded_alike_on_both_sides_of_zero(amount, step):
    """The mirror image of an amount is rounded to the mirror image."""
    assert round_amount(-amount, step) == -round_amount(amount, step)
    assert abs(round_amount(amount, step) - amount) <= step * 0.5000001
