"""Charts of revisions and of the account, with data that strains them."""

import datetime as dt

import numpy as np
import pytest

from contingency.report.chart_revisions import (
    AccountCurve,
    BridgeLine,
    CurveOf,
    TrendLine,
    account_chart,
    bridge_chart,
    trend_chart,
    two_curves_chart,
)
from contingency.report.wording import chart_unit
from contingency.setting.curve import cumulative_curve
from contingency.tracking.families import Family
from tests.report.test_charts import hold

HEADS = ("Base", "Contingency", "Total")
DAY = dt.date(2031, 3, 31)


def bridge(amounts, scale=1.0):
    """All families with these (base, contingency) in turn, between two ends."""
    ends = [
        BridgeLine(
            name=name,
            base=200.0 * scale,
            contingency=40.0 * scale,
            words="240.0",
            is_end=True,
        )
        for name in ("Revision B, P75", "Revision C, P80")
    ]
    steps = [
        BridgeLine(
            name=family.heading,
            base=scale * base,
            contingency=scale * contingency,
            words=f"{scale * (base + contingency):+,.1f}",
            is_end=False,
        )
        for family, (base, contingency) in zip(
            Family, amounts * len(Family), strict=False
        )
    ]
    return (ends[0], *steps, ends[1])


@pytest.mark.parametrize(
    "amounts",
    [
        [(3.0, 0.5), (-1.0, -6.0), (0.0, 0.0)],
        [(0.0, 0.0)],
        [(-190.0, -39.0), (900.0, 900.0)],
    ],
    ids=["ordinary", "nothing moves", "far both ways"],
)
@pytest.mark.parametrize("scale", [1e-3, 1.0, 1e9])
def test_a_bridge_of_every_family_holds_together(amounts, scale, look):
    """No label meets another, and no stair leaves the picture."""
    hold(bridge_chart(bridge(amounts, scale), look, heads=HEADS))


def test_each_stair_begins_where_the_one_above_ended(look):
    """The widths of the bars are the steps, in one scale for the column."""
    drawing = bridge_chart(bridge([(10.0, 5.0), (-20.0, -5.0)]), look, heads=HEADS)
    svg = drawing.svg.decode()
    bars = [
        (
            float(line.split('x="')[1].split('"')[0]),
            float(line.split('width="')[1].split('"')[0]),
        )
        for line in svg.splitlines()
        if line.startswith("<rect")
    ]
    base = bars[: len(Family) + 2][1:-1]

    wide = {round(width, 1) for _, width in base}
    assert len(wide) == 2
    assert max(wide) == pytest.approx(2 * min(wide), rel=0.02)


def curve_of(name, mean, deviation, percent):
    """A normal total and its percentile."""
    total = np.random.default_rng(1).normal(mean, deviation, 20_000)
    request = float(np.percentile(total, percent))
    return CurveOf(
        name=name,
        curve=cumulative_curve(total),
        request=request,
        chance=percent / 100,
        words=f"P{percent} at {request:,.1f}",
    )


@pytest.mark.parametrize(("mean", "deviation"), [(240e6, 20e6), (900e6, 1e6)])
def test_both_curves_hold_on_one_scale(mean, deviation, look):
    """Alike, and far apart."""
    old = curve_of("Revision B", 250e6, 25e6, 75)
    new = curve_of("Revision C", mean, deviation, 80)
    hold(
        two_curves_chart(
            old, new, unit=chart_unit(900e6, 1e6), axis_title="Total, EUR", look=look
        )
    )


@pytest.mark.parametrize("count", [2, 12])
def test_a_trend_of_few_and_of_many_revisions_holds(count, look):
    """Base and request may lie in one place, and names may be long."""
    lines = tuple(
        TrendLine(
            name=f"Revision {i} of a long series of them",
            base=200e6 + i * 1e6,
            p10=190e6,
            p90=300e6 - i * 5e6,
            request=200e6 + i * 1e6 if i == 0 else 250e6,
            words="36.5 %",
        )
        for i in range(count)
    )
    hold(
        trend_chart(
            lines, unit=chart_unit(3e8, 1e5), axis_title="Total cost, EUR", look=look
        )
    )


@pytest.mark.parametrize(
    ("needs", "milestones", "entries"),
    [(8, 3, 5), (1, 0, 1), (1, 1, 1), (20, 8, 40)],
)
def test_an_account_of_any_length_holds(needs, milestones, entries, look):
    """One entry on the data date, or years of them."""
    account = AccountCurve(
        balance=tuple(
            (DAY - dt.timedelta(days=30 * (entries - 1 - i)), 45e6 - 5e5 * i)
            for i in range(entries)
        ),
        need=tuple(
            (DAY + dt.timedelta(days=91 * i), 40e6 - 2e6 * i) for i in range(needs)
        ),
        minimum=tuple(
            (DAY + dt.timedelta(days=200 * i), 30e6 - 3e6 * i)
            for i in range(milestones)
        ),
        today=DAY,
    )
    hold(
        account_chart(
            account, unit=chart_unit(45e6, 1e5), unit_words="EUR million", look=look
        )
    )
