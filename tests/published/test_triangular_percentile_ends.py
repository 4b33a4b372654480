"""Limits of a triangular from its P10, its mode and its P90.

Source     The problem is a standard one of range estimating (common practice, no
           source). Three equations for the limits a, b: F(P10) = 0.1 and F(P90) = 0.9
           with F(x) = (x - a)²/((b - a)(m - a)) below the mode and
           1 - (b - x)²/((b - a)(b - m)) above it.
Taken      P10 = 1, mode 3, P90 = 8, with the limits -1.330 and 11.208 from memory; the
           equations are solved again here by another method.
Precision  three decimals; the equations to 1e-12.
Errata     none known.
"""

import pytest
from scipy.optimize import fsolve

from contingency.quantities.shapes import Triangular, from_range

RANGE = {"low": 1.0, "likely": 3.0, "high": 8.0}
ENDS = {"low_percent": 10, "high_percent": 90}


def equations(limits):
    """How far two limits miss the two percentiles."""
    a, b = limits
    low, m, high = RANGE.values()
    return (
        (low - a) ** 2 / ((b - a) * (m - a)) - 0.1,
        (b - high) ** 2 / ((b - a) * (b - m)) - 0.1,
    )


def test_the_limits():
    """-1.330 and 11.208, with the mode kept."""
    found = from_range("triangular", **RANGE, **ENDS)

    assert isinstance(found, Triangular)
    assert found.low == pytest.approx(-1.330, abs=5e-4)
    assert found.high == pytest.approx(11.208, abs=5e-4)
    assert found.likely == 3.0


def test_the_limits_solve_the_equations():
    """Both equations hold, and Newton's method in two unknowns ends there too."""
    found = from_range("triangular", **RANGE, **ENDS)

    assert equations((found.low, found.high)) == pytest.approx((0.0, 0.0), abs=1e-12)
    assert fsolve(equations, (0.0, 10.0)) == pytest.approx(
        (found.low, found.high), rel=1e-8
    )
