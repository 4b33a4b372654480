"""What a study gives to a notebook: frames of its tables."""

from pathlib import Path

import pytest

from contingency import read_estimate, run_study

EXAMPLE = Path(__file__).parents[1] / "example_estimates" / "buoy-tender-refit/rev-b"


@pytest.fixture(scope="module")
def study():
    """The smaller example."""
    return run_study(read_estimate(EXAMPLE))


def test_the_frame_of_percentiles_has_the_levels_of_the_results(study):
    """P01 to P99, each with its contingency over the base."""
    frame = study.percentile_frame().set_index("percent")

    assert list(frame.index) == list(range(1, 100))
    assert frame["total"].is_monotonic_increasing
    for level in study.levels:
        assert frame.loc[level.percent, "contingency"] == level.contingency


def test_the_frame_of_drivers_has_a_row_for_every_driver(study):
    """In their order, with the unrounded shares."""
    frame = study.driver_frame()

    assert frame["id"].tolist() == [driver.id for driver in study.drivers]
    shares = [driver.variance_share for driver in study.drivers]
    assert frame["variance_share"].tolist() == shares


def test_the_frame_of_the_allocation_adds_up(study):
    """Its contingency column is the contingency."""
    frame = study.allocation_frame()

    assert frame["contingency"].sum() == pytest.approx(study.target.contingency)
