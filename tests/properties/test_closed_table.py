"""What must hold of every table that is rounded as a whole."""

import numpy as np
from hypothesis import given
from hypothesis import strategies as st

from contingency.quantities.closed_table import closed_table
from contingency.quantities.rounding import round_parts

amounts = st.floats(-1e7, 1e7, allow_nan=False)


@st.composite
def tables(draw):
    """A table of amounts in steps with a group for each row."""
    rows = draw(st.integers(1, 9))
    columns = draw(st.integers(1, 4))
    exact = np.array(
        draw(
            st.lists(
                st.lists(amounts, min_size=columns, max_size=columns),
                min_size=rows,
                max_size=rows,
            )
        )
    )
    groups = sorted(draw(st.lists(st.integers(0, 3), min_size=rows, max_size=rows)))
    return exact, np.unique(groups, return_inverse=True)[1]


def sums(table, groups):
    """Every sum that a reader can form: rows, columns, groups both ways, all."""
    by_group = [table[groups == g] for g in range(groups.max() + 1)]
    return np.concatenate(
        [
            table.ravel(),
            table.sum(axis=1),
            table.sum(axis=0),
            *[inside.sum(axis=0) for inside in by_group],
            [inside.sum() for inside in by_group],
        ]
    )


@given(tables())
def test_every_cell_and_every_sum_is_less_than_a_step_away(table):
    """Controlled rounding exists for every such table, and it is found."""
    exact, groups = table
    closed = closed_table(exact, groups, total=round(exact.sum()))

    assert np.all(np.abs(sums(closed, groups) - sums(exact, groups)) < 1.0 + 1e-6)


def test_no_sum_gives_way_for_several_cells():
    """Five cells to their nearer side are no reason to print a column wrong."""
    exact = np.array(
        [
            [0.0, 0.0, 0.0],
            [0.0, 1.75, 0.0],
            [0.0, 1.375, 1.75],
            [0.0, 1.3125, 0.0],
            [0.0, 0.0, 1.625],
            [0.0, 1.625, 1.5],
            [0.0, 1.625, -1.25],
            [0.0, 1.375, 1.75],
        ]
    )
    groups = np.array([0, 0, 0, 0, 1, 1, 1, 2])
    closed = closed_table(exact, groups, total=14)

    assert np.all(np.abs(sums(closed, groups) - sums(exact, groups)) < 1.0)


@given(tables())
def test_the_total_is_kept(table):
    """Not one step is lost or made."""
    exact, groups = table
    total = round(exact.sum())

    assert closed_table(exact, groups, total=total).sum() == total


@given(tables())
def test_whole_amounts_stay_as_they_are(table):
    """A table that closes already is its own closest table."""
    exact, groups = table
    whole = np.round(exact)

    assert np.array_equal(closed_table(whole, groups, total=int(whole.sum())), whole)


@given(st.lists(amounts, min_size=1, max_size=12))
def test_one_row_is_rounded_by_largest_remainders(parts):
    """As near as the method of largest remainders comes; ties may differ."""
    exact = np.array([parts])
    total = round(exact.sum())
    closed = closed_table(exact, np.zeros(1, dtype=int), total=total)[0]
    other = round_parts(parts, step=1.0, total=float(total))

    distance = np.abs(closed - exact[0]).sum()
    assert distance <= np.abs(other - exact[0]).sum() + 0.01


@given(tables(), st.integers(0, 2**32))
def test_rows_that_are_given_are_kept(table, seed):
    """The second half of the allocation adds up to what the first half printed."""
    exact, groups = table
    total = round(exact.sum())
    rows = closed_table(exact, groups, total=total).sum(axis=1)
    share = np.random.default_rng(seed).uniform(-1, 2, exact.shape[0])
    halves = np.column_stack(
        [exact.sum(axis=1) * share, exact.sum(axis=1) * (1 - share)]
    )
    closed = closed_table(halves, groups, total=total, rows=rows)

    assert np.array_equal(closed.sum(axis=1), rows)
    assert np.all(np.abs(closed - halves) < 2.0)
