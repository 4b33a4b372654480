"""Growth at the middle of the spending, and growth of even spending.

Source     closed forms of compound growth; the shortcut by the mid-point is common
           practice, no source.  Simple growth to the mid-point: US Federal Emergency
           Management Agency, Cost Estimating Format, part E,
           https://emilms.fema.gov/is_1013/groups/133.html (the rule was read).
Taken      100 from two years on for three years at 4 % a year: at the middle
           100 x 1.04^3.5 = 114.7141, evenly 100 (1.04^5 - 1.04^2) / (3 ln 1.04) =
           114.7803, worked out here; the mid-point is low by 0.058 %.
Precision  four decimals of the amounts; 0.001 percentage points of the difference.
Errata     none known.
"""

import math

import pytest

from contingency import read_estimate, run_study
from tests.folders import lay_out

EVEN, MIDDLE = 114.7803, 114.7141


def outturn(folder, start, finish):
    """The funding table's outturn amount of one certain package of 100."""
    estimate = lay_out(
        folder,
        packages=[
            {
                "id": "P1",
                "base": 100,
                "shape": "fixed",
                "start": start,
                "finish": finish,
                "prices": "four",
            }
        ],
        trials=8_192,
        day="2025-12-31",
        prices=[{"id": "four", "name": "Four", "likely": "4%", "shape": "fixed"}],
    )
    return run_study(read_estimate(estimate)).outturn


def test_the_figures_are_those_of_the_closed_forms():
    """Both amounts, and simple growth beside them: months times a monthly rate."""
    assert pytest.approx(EVEN, abs=5e-5) == 100 * (1.04**5 - 1.04**2) / (
        3 * math.log(1.04)
    )
    assert pytest.approx(MIDDLE, abs=5e-5) == 100 * 1.04**3.5
    assert pytest.approx(114.0) == 100 * (1 + 42 * 0.04 / 12)


def test_even_spending_grows_as_the_integral_says(tmp_path):
    """Three years from 1 January, two years after the price date."""
    found = outturn(tmp_path, "2028-01-01", "2030-12-31")

    assert found.funding == pytest.approx(EVEN, abs=5e-5)
    assert found.level == pytest.approx(EVEN, abs=5e-5)
    assert found.mean == pytest.approx(EVEN, abs=5e-5)


def test_spending_in_the_middle_grows_as_the_shortcut_says(tmp_path):
    """All of it on the middle day, 2 July of a year of 365 days."""
    found = outturn(tmp_path, "2029-07-02", "2029-07-02")

    assert found.funding == pytest.approx(MIDDLE, abs=5e-5)


def test_the_shortcut_is_low_by_so_much(tmp_path):
    """0.058 % of the amount, from the tool's own two answers."""
    even = outturn(tmp_path / "even", "2028-01-01", "2030-12-31").funding
    middle = outturn(tmp_path / "middle", "2029-07-02", "2029-07-02").funding

    assert 100 * (1 - middle / even) == pytest.approx(0.058, abs=1e-3)
