"""What must hold of the bridge between any two revisions."""

import math

import pytest
from hypothesis import HealthCheck, given, settings
from hypothesis import strategies as st

from contingency.tracking.compare import compare
from contingency.tracking.families import Family
from tests.properties.strategies import revisions

MOSTLY = settings(
    max_examples=60,
    deadline=None,
    suppress_health_check=[HealthCheck.too_slow, HealthCheck.data_too_large],
)


@MOSTLY
@given(revisions(), revisions(), st.sampled_from(["average", "sequence"]))
def test_it_closes_to_the_money_unit(earlier, later, order):
    """Both columns, rows within their step, and the printed figures."""
    found = compare(earlier, later, order=order)
    bridge = found.bridge

    assert bridge.residual == pytest.approx((0.0, 0.0), abs=1e-6)
    for step in bridge.steps:
        assert math.isfinite(step.contingency)
        if step.rows:
            rows = [row.contingency for row in step.rows]
            assert math.fsum(rows) == pytest.approx(step.contingency, abs=1e-6)
    for column in ("base", "contingency"):
        printed = [getattr(row, column) for row in found.printed(1.0)]
        ends = [getattr(end, column) for end in (bridge.before, bridge.after)]
        change = sum(printed)
        assert abs(change - (ends[1] - ends[0])) <= 1.0
        assert change == int(change)


@MOSTLY
@given(revisions())
def test_an_estimate_and_itself_have_no_bridge(estimate):
    """Whatever the estimate is like."""
    found = compare(estimate, estimate.model_copy(update={"changes": ()}))

    assert found.is_empty
    assert found.differences == ()


@MOSTLY
@given(revisions(), revisions())
def test_the_way_back_is_the_way_there_reversed(earlier, later):
    """Family by family, where no step has a fixed place and no event occurred."""
    same = {
        "changes": (),
        "contingency": earlier.contingency,
        "price_date": earlier.price_date,
        "run": earlier.run,
        "events": closed_or_open(later.events),
    }
    later = later.model_copy(update=same)
    earlier = earlier.model_copy(
        update={"changes": (), "events": closed_or_open(earlier.events)}
    )
    there, back = compare(earlier, later).bridge, compare(later, earlier).bridge

    reversed_ = {TURNED.get(step.family, step.family): step for step in back.steps}
    assert reversed_.keys() == {step.family for step in there.steps}
    for step in there.steps:
        other = reversed_[step.family]
        assert other.base == pytest.approx(-step.base, abs=1e-6)
        assert other.contingency == pytest.approx(-step.contingency, abs=1e-6)


TURNED = {
    Family.NEW_EVENTS: Family.CLOSED_EVENTS,
    Family.CLOSED_EVENTS: Family.NEW_EVENTS,
}


def closed_or_open(events):
    """Events without one that occurred: what was closed can only be opened again."""
    return tuple(
        e.model_copy(update={"status": "closed"}) if e.status == "occurred" else e
        for e in events
    )
