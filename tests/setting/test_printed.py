"""Amounts as they are printed: what a reader adds up is what the report says."""

import numpy as np
import pytest

from contingency.errors import PartsDoNotClose
from contingency.quantities.closed_table import closed_table
from contingency.setting.allocation import (
    Allocation,
    GroupSubtotal,
    PackageAllocation,
    SecondOpinion,
    Split,
)
from contingency.setting.levels import FundingLevel
from contingency.setting.printed import groups_of, printed_figures

AMOUNTS = ("base", "ranges", "systemic", "events", "expected", "margin")


def allocation_of(seed, *, packages=12):
    """An allocation of made-up amounts that closes unrounded."""
    rng = np.random.default_rng(seed)
    rows = []
    for i in range(packages):
        ranges, systemic, events = rng.normal(60_000, 90_000, 3)
        contingency = ranges + systemic + events
        expected = contingency * rng.uniform(-0.5, 1.5)
        rows.append(
            PackageAllocation(
                package=f"P{i}",
                name=f"Package {i}",
                group=f"Group {i // 5}" if i < packages - 2 else "",
                base=rng.uniform(1e5, 9e6),
                ranges=ranges,
                systemic=systemic,
                events=events,
                contingency=contingency,
                expected=expected,
                margin=contingency - expected,
                variance_share=1 / packages,
            )
        )
    names = dict.fromkeys(row.group or row.name for row in rows)
    groups = tuple(
        GroupSubtotal(
            group=name,
            contingency=0.0,
            variance_share=0.0,
            **{
                field: sum(
                    getattr(r, field) for r in rows if (r.group or r.name) == name
                )
                for field in AMOUNTS
            },
        )
        for name in names
    )
    split = Split(
        ranges=sum(r.ranges for r in rows),
        systemic=sum(r.systemic for r in rows),
        events=sum(r.events for r in rows),
    )
    allocation = Allocation(
        percent=80,
        rows=tuple(rows),
        groups=groups,
        split=split,
        expected=sum(r.expected for r in rows),
        margin=sum(r.margin for r in rows),
    )
    moved = rng.normal(0, 20_000, packages)
    moved -= moved.mean()
    second = SecondOpinion(
        split=Split(
            ranges=split.ranges - 7e3,
            systemic=split.systemic,
            events=split.events + 7e3,
        ),
        contingency=tuple(
            row.contingency + shift for row, shift in zip(rows, moved, strict=True)
        ),
    )
    return allocation, second


def level(percent, contingency, base):
    """A funded level of no particular purpose."""
    return FundingLevel(
        percent=percent,
        purpose="",
        holder="",
        total=base + contingency,
        contingency=contingency,
        percent_of_base=0.0,
        low=0.0,
        high=0.0,
    )


@pytest.fixture(params=range(6))
def figures(request):
    """Exact allocation, second opinion and the figures printed from them."""
    allocation, second = allocation_of(request.param)
    base = sum(row.base for row in allocation.rows)
    levels = tuple(
        level(percent, amount, base)
        for percent, amount in ((80, 912_345.0), (50, 500_499.9), (90, 1_250_500.0))
    )
    percentiles = tuple(base + 10_000.3 * (p - 40) for p in range(1, 100))
    step = (1000.0, 1.0, 250_000.0)[request.param % 3]
    printed = printed_figures(allocation, second, levels, percentiles, step=step)
    return allocation, second, printed


def test_every_line_adds_up(figures):
    """Sources to the contingency, expected part and margin to the same."""
    _, _, printed = figures

    for line in (*printed.rows, *printed.groups, printed.total):
        assert line.ranges + line.systemic + line.events == line.contingency
        assert line.expected + line.margin == line.contingency


def test_every_column_adds_up(figures):
    """Packages to groups, groups to the total."""
    allocation, _, printed = figures
    groups = groups_of(allocation)

    for name in (*AMOUNTS, "contingency", "second_opinion"):
        for number, line in enumerate(printed.groups):
            inside = [
                getattr(row, name)
                for row, group in zip(printed.rows, groups, strict=True)
                if group == number
            ]
            assert sum(inside) == getattr(line, name)
        assert sum(getattr(g, name) for g in printed.groups) == getattr(
            printed.total, name
        )
    assert printed.total.second_opinion == printed.total.contingency
    assert sum(printed.second_split) == printed.total.contingency
    assert sum(printed.shares) == 100


def test_base_and_contingency_are_the_nearest_steps(figures):
    """The two figures that all others add up to."""
    allocation, _, printed = figures
    base = sum(row.base for row in allocation.rows)

    assert abs(printed.total.base - base) <= printed.step / 2
    assert (
        abs(printed.total.contingency - allocation.split.contingency)
        <= printed.step / 2
    )
    assert printed.request == printed.total.base + printed.total.contingency
    assert printed.mean == printed.total.base + printed.total.expected


def test_no_amount_is_a_step_away_from_the_computed_one(figures):
    """Cells, lines and totals alike; only margins may be, for their rows are fixed."""
    allocation, second, printed = figures
    pairs = []
    for exact, line in zip(allocation.rows, printed.rows, strict=True):
        pairs += [
            (getattr(exact, name), getattr(line, name))
            for name in ("base", "ranges", "systemic", "events", "contingency")
        ]
    pairs += [
        (exact, line.second_opinion)
        for exact, line in zip(second.contingency, printed.rows, strict=True)
    ]
    pairs += [
        (allocation.split.ranges, printed.total.ranges),
        (allocation.split.systemic, printed.total.systemic),
        (allocation.split.events, printed.total.events),
        (allocation.expected, printed.total.expected),
    ]

    for exact, shown in pairs:
        assert abs(exact - shown) < printed.step * (1 + 1e-9)


def test_levels_step_up_from_the_next_lower_one(figures):
    """In the order of the estimate, whatever that is."""
    _, _, printed = figures
    p80, p50, p90 = printed.levels

    assert [p.percent for p in printed.levels] == [80, 50, 90]
    assert p50.above_previous == p50.contingency
    assert p80.above_previous == p80.contingency - p50.contingency
    assert p90.above_previous == p90.contingency - p80.contingency
    for one in printed.levels:
        assert one.total == printed.total.base + one.contingency
    assert [p.percent for p in printed.percentiles] == list(range(1, 100))


def test_a_total_that_is_far_off_is_refused():
    """Three from a table of one is no rounding."""
    with pytest.raises(PartsDoNotClose):
        closed_table(np.ones((1, 1)), np.zeros(1, dtype=int), total=30)


def test_no_contingency_has_no_shares():
    """Nothing is divided by nought."""
    allocation, second = allocation_of(1, packages=3)
    nothing = Split(ranges=0.0, systemic=0.0, events=0.0)
    still = Allocation(
        percent=80,
        rows=tuple(
            PackageAllocation(
                package=row.package,
                name=row.name,
                group=row.group,
                base=row.base,
                ranges=0.0,
                systemic=0.0,
                events=0.0,
                contingency=0.0,
                expected=0.0,
                margin=0.0,
                variance_share=0.0,
            )
            for row in allocation.rows
        ),
        groups=allocation.groups,
        split=nothing,
        expected=0.0,
        margin=0.0,
    )
    opinion = SecondOpinion(split=nothing, contingency=(0.0,) * 3)
    printed = printed_figures(still, opinion, (), (1.0,) * 99, step=1000.0)

    assert printed.shares == (0, 0, 0)
    assert second.contingency != opinion.contingency
