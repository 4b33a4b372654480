"""Seven activities and the chance of their critical path, from a textbook.

Source     A production and operations textbook, chapter on PERT.
           https://flylib.com/books/en/3.287.1.117/1
Taken      the seven triples, the critical path 1-3-5-7 with mean 24, and the chance
           0.9633 of 28 or less (all read). Means and variance are worked out.
Precision  means exact; the chance to 5e-4, for the book reads z = 1.79 from a table.
Errata     none known.
"""

import pytest

from contingency.quantities.shapes import BetaPert, Fixed, Normal, from_range

ACTIVITIES = {
    1: (5, 8, 17),
    2: (7, 10, 13),
    3: (3, 5, 7),
    4: (1, 3, 5),
    5: (4, 6, 8),
    6: (3, 3, 3),
    7: (3, 4, 5),
}
MEANS = {1: 9, 2: 10, 3: 5, 4: 3, 5: 6, 6: 3, 7: 4}
CRITICAL = (1, 3, 5, 7)


@pytest.mark.parametrize("number", ACTIVITIES)
def test_each_mean(number):
    """The beta-PERT means; activity 6 has one duration and no spread."""
    low, likely, high = ACTIVITIES[number]
    shape = from_range("pert", low=low, likely=likely, high=high)

    assert shape.mean == pytest.approx(MEANS[number])
    assert isinstance(shape, Fixed if number == 6 else BetaPert)


def test_the_critical_path_has_the_printed_chance():
    """Mean 24, classic variance 5, P(28 or less) = 0.9633."""
    mean = sum(
        from_range("pert", low=low, likely=likely, high=high).mean
        for low, likely, high in (ACTIVITIES[number] for number in CRITICAL)
    )
    variance = sum(
        ((ACTIVITIES[number][2] - ACTIVITIES[number][0]) / 6) ** 2
        for number in CRITICAL
    )
    path = Normal(centre=mean, spread=variance**0.5)

    assert mean == pytest.approx(24)
    assert variance == pytest.approx(5)
    assert float(path.cdf(28)) == pytest.approx(0.9633, abs=5e-4)
