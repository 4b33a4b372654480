"""How much of an event's cost the level pays for."""

from contingency.setting.coverage import event_coverage
from contingency.setting.drivers import Driver
from tests.report.ship_refit import ship_refit


def driver(id_, effect):
    """A driver of which only the effect matters here."""
    return Driver(
        id=id_,
        name="",
        kind="event",
        variance_share=0.0,
        mean_shift=0.0,
        swing=(0.0, 0.0),
        removal_effect=effect,
    )


def coverage_by_id(contingency):
    """Coverage of the refit's threats when each is funded with 0.3 million."""
    estimate = ship_refit()
    drivers = tuple(driver(event.id, 3e5) for event in estimate.open_events)
    found = event_coverage(
        estimate, drivers, contingency=contingency, large=0.25, thin=0.25
    )
    return {one.event.id: one for one in found}


def test_only_open_threats_are_looked_at():
    """No opportunity, nothing closed, nothing that has occurred."""
    found = coverage_by_id(18e6)

    assert "R15" not in found
    assert not {"R17", "R18"} & set(found)
    assert list(found)[:3] == ["R01", "R02", "R03"]


def test_coverage_is_the_effect_over_the_mean_impact_of_the_state_used():
    """R02 is used after treatment: its impact is the smaller one."""
    found = coverage_by_id(18e6)
    event = found["R02"].event

    assert found["R02"].mean_impact == event.after_impact.distribution.mean
    assert found["R02"].coverage == 3e5 / found["R02"].mean_impact
    assert found["R02"].funded == 3e5


def test_a_thinly_funded_event_is_large_and_hardly_covered():
    """R06 costs about 12 million; the same sum is small beside a large contingency."""
    assert coverage_by_id(18e6)["R06"].is_thinly_funded
    assert not coverage_by_id(18e6)["R12"].is_thinly_funded
    assert not coverage_by_id(180e6)["R06"].is_thinly_funded
    assert not coverage_by_id(-1.0)["R06"].is_thinly_funded
