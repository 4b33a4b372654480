"""The range method on five elements, and the row that must be refused.

Source     Industrial Process Plant Construction Estimating and Man-Hour Analysis
           (Gulf/Elsevier), section 12.9, table 12.9.2, p. 263; method p. 261.
Taken      low, likely and high of five elements in dollars, E = (L + 4M + H)/6,
           variance ((H - L)/6)², their totals 26,200 and 20,405, and the amount
           26,400 (read). The chance 0.0812 follows from the printed totals.
Precision  0.1 on each E and 0.5 on the total (the book rounds on the way); 0.01 on each
           variance, 1 on the total; 0.001 on the chance.
Errata     "Baffle guide" has low 6,372 above likely 5,652: a misprint that the book
           carries through. The running text prints the variance as 20,495.
"""

import pytest

from contingency.errors import NoSuchCurve
from contingency.quantities.shapes import BetaPert, Normal, from_range

ELEMENTS = {
    # low, likely, high, E printed, variance printed
    "support brackets": (4652, 4786, 4912, 4784.69, 1877.78),
    "baffles": (4626, 4682, 4828, 4696.91, 1133.44),
    "wall bracket": (4592, 4723, 5232, 4785.91, 11377.78),
    "baffle guide": (6372, 5652, 5942, 5820.24, 5136.11),
    "perforated liner": (6002, 6123, 6180, 6112.24, 880.11),
}
MISPRINTED = "baffle guide"
SOUND = [name for name in ELEMENTS if name != MISPRINTED]


def classic(low, likely, high):
    """E and variance as the handbook has them."""
    return (low + 4 * likely + high) / 6, ((high - low) / 6) ** 2


@pytest.mark.parametrize("name", ELEMENTS)
def test_the_formulas_give_the_printed_rows(name):
    """Also for the misprinted row, whose figures went through the book's formulas."""
    low, likely, high, mean, variance = ELEMENTS[name]

    assert classic(low, likely, high)[0] == pytest.approx(mean, abs=0.1)
    assert classic(low, likely, high)[1] == pytest.approx(variance, abs=0.01)


def test_the_formulas_give_the_printed_totals():
    """26,200 and 20,405, and the chance of more than 26,400 by the normal."""
    rows = [classic(*row[:3]) for row in ELEMENTS.values()]
    mean, variance = (sum(column) for column in zip(*rows, strict=True))

    assert mean == pytest.approx(26_200, abs=0.5)
    assert variance == pytest.approx(20_405, abs=1)
    total = Normal(centre=26_200.0, spread=20_405**0.5)
    assert 1 - float(total.cdf(26_400)) == pytest.approx(0.0812, abs=0.001)


@pytest.mark.parametrize("name", SOUND)
def test_the_mean_of_a_sound_row_is_that_of_the_beta_pert(name):
    """Same formula for the mean, so the same figure as printed."""
    low, likely, high, mean, _ = ELEMENTS[name]

    assert BetaPert(low=low, likely=likely, high=high).mean == pytest.approx(
        mean, abs=0.1
    )


def test_the_beta_perts_have_another_variance():
    """Four sound rows: mean 20,380.0, exact variance 17,169.11, classic 15,269.11."""
    shapes = [
        BetaPert(low=low, likely=likely, high=high)
        for low, likely, high, *_ in (ELEMENTS[name] for name in SOUND)
    ]

    assert sum(shape.mean for shape in shapes) == pytest.approx(20_380.0)
    assert sum(shape.variance for shape in shapes) == pytest.approx(17_169.11, abs=5e-3)
    assert sum(classic(*ELEMENTS[name][:3])[1] for name in SOUND) == pytest.approx(
        15_269.11, abs=5e-3
    )


def test_the_misprinted_row_is_no_range():
    """Low above likely: no curve, and the refusal repeats the three figures."""
    low, likely, high, *_ = ELEMENTS[MISPRINTED]

    with pytest.raises(NoSuchCurve, match=r"low 6,372, likely 5,652, high 5,942"):
        from_range("pert", low=low, likely=likely, high=high)
