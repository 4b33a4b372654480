"""The chain of revisions, and where the final cost fell."""

from statistics import NormalDist

import numpy as np
import pytest

from contingency.errors import NotFinished
from contingency.estimate.nouns import ContingencyRule, Level
from contingency.simulation.engine import simulate
from contingency.tracking.close_out import close_out
from contingency.tracking.trend import trend
from tests.tracking.pairs import (
    DAY,
    EVENTS,
    PACKAGES,
    change,
    estimate,
    normal,
    package,
    with_row,
)


def test_each_point_is_that_revision_by_itself():
    """Base, level, percentiles and the chance of the base, by the engine."""
    chain = (estimate(), estimate(revision="B", contingency=ContingencyRule(target=90)))
    found = trend(chain)

    for point, revision in zip(found.points, chain, strict=True):
        total = np.sort(simulate(revision).total)
        assert point.base == 2_000.0
        assert point.total == total[-(-total.size * point.level // 100) - 1]
        assert point.p10 == total[-(-total.size // 10) - 1]
        assert point.chance_base_is_enough == np.mean(total <= 2_000.0)
        assert point.percent_of_base == pytest.approx(point.contingency / 20.0)
    assert [p.level for p in found.points] == [80, 90]
    assert not found.changes_price_date


def test_a_width_that_does_not_shrink_is_said():
    """A revision with a better class and wider ranges needs a word."""
    chain = (
        estimate(estimate_class=4),
        estimate(
            revision="B",
            estimate_class=3,
            packages=with_row(PACKAGES, package("P1", 1_000.0, 0.7, 1.9)),
        ),
        estimate(revision="C", estimate_class=3),
    )
    (remark,) = trend(chain).remarks

    assert remark.startswith("From revision A to B the width from P10 to P90 grew from")
    assert remark.endswith("although the class improved from 4 to 3.")


def test_the_same_width_has_not_shrunk():
    """Twice the same estimate."""
    (remark,) = trend((estimate(), estimate(revision="B"))).remarks

    assert "stayed" in remark
    assert "class" not in remark


def test_findings_are_counted_where_they_are_known():
    """The checks belong to another room."""
    counts = {"A": {"major": 2}}
    first, second = trend((estimate(), estimate(revision="B")), findings=counts).points

    assert first.findings == {"major": 2}
    assert second.findings is None


# --------------------------------------------------------------------------------------
# Close-out


def _normal_estimate(revision, **more):
    """One package: N(1000, 100)."""
    return estimate(
        revision=revision,
        packages=(package("P1", 1_000.0, cost=normal(1_000.0, 100.0)),),
        systemic=(),
        events=(),
        contingency=ContingencyRule(
            target=80, levels=(Level(percent=50), Level(percent=80))
        ),
        **more,
    )


def _account(base):
    """The final account: all spent, nothing open."""
    return estimate(
        revision="Z",
        packages=(package("P1", base, cost=normal(base, 0.0), spent=base),),
        systemic=(),
        events=(EVENTS[0].model_copy(update={"status": "closed"}),),
    )


def test_the_final_cost_falls_where_the_curve_says():
    """1070 on N(1000, 100) is the percentile of z = 0.7."""
    found = close_out((_normal_estimate("A"), _account(1_070.0)))
    (outcome,) = found.outcomes

    assert found.final == 1_070.0
    assert outcome.chance == pytest.approx(NormalDist().cdf(0.7), abs=0.002)
    assert outcome.overrun == pytest.approx(0.07)
    assert outcome.within == ((50, False), (80, True))
    assert outcome.was_enough
    assert outcome.funded == pytest.approx(
        NormalDist(1_000, 100).inv_cdf(0.8), rel=0.002
    )


def test_earlier_revisions_are_brought_to_the_money_of_the_last():
    """5 % on the way to B and 2 % on the way to the account."""
    second = _normal_estimate(
        "B",
        price_date=DAY.replace(year=2027),
        changes=(change(file="estimate", family="prices", factor=1.05),),
    )
    last = _account(1_200.0).model_copy(
        update={
            "price_date": DAY.replace(year=2028),
            "changes": (change(file="estimate", family="prices", factor=1.02),),
        }
    )
    first, later = close_out((_normal_estimate("A"), second, last)).outcomes

    assert first.base == pytest.approx(1_000.0 * 1.05 * 1.02)
    assert later.base == pytest.approx(1_000.0 * 1.02)
    z = (1_200.0 / 1.071 - 1_000.0) / 100.0
    assert first.chance == pytest.approx(NormalDist().cdf(z), abs=0.002)


def test_a_row_of_history_csv_has_both_amounts_in_one_money():
    """What the outside view of the next project reads."""
    (row,) = close_out(
        (_normal_estimate("A", gate="Gate 3"), _account(990.0))
    ).history_rows()

    assert row["id"] == "Two revisions A"
    assert (row["estimate"], row["final"]) == (1_000.0, 990.0)
    assert row["notes"] == "Gate 3; fell at P46"


def test_a_project_with_open_ends_is_not_finished():
    """Unless somebody states what it cost."""
    chain = (_normal_estimate("A"), _normal_estimate("B"))
    with pytest.raises(NotFinished, match="P1 Package P1"):
        close_out(chain)

    assert close_out(chain, final=1_010.0).final == 1_010.0
