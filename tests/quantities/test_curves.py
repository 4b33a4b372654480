"""Tabulated curves against the exact quantile functions."""

import numpy as np
import pytest

from contingency.quantities.curves import Curves
from contingency.quantities.shapes import from_range

SCORES = np.linspace(-8.5, 8.5, 100_003)
WEIGHTS = np.exp(-(SCORES**2) / 2) / np.sqrt(2 * np.pi) * (SCORES[1] - SCORES[0])

GIVEN = {
    **{
        f"pert {m}": ("pert", 0.0, m, 1.0)
        for m in (0.0, 0.001, 0.02, 0.1, 0.3, 0.5, 0.77, 0.999, 1.0)
    },
    **{
        f"triangular {m}": ("triangular", 0.0, m, 1.0)
        for m in (0.0, 0.001, 0.1, 0.5, 0.9, 1.0)
    },
    "uniform": ("uniform", 0.0, None, 1.0),
    "large pert": ("pert", 8.1e7, 8.6e7, 1.4e8),
}
BESIDE = {
    "lognormal": from_range(
        "lognormal", low=80, high=150, low_percent=10, high_percent=90
    ),
    "shifted lognormal": from_range(
        "lognormal", low=80, likely=95, high=150, low_percent=10, high_percent=90
    ),
    "normal": from_range("normal", low=80, high=150, low_percent=10, high_percent=90),
    "points": from_range("points", outcomes=((5, 92.0), (50, 104.0), (95, 140.0))),
    "discrete": from_range("discrete", outcomes=((95, 0.3), (100, 0.5), (130, 0.2))),
    "fixed": from_range("fixed", likely=7.0),
}
TABLED = {
    name: from_range(shape, low=low, likely=likely, high=high)
    for name, (shape, low, likely, high) in GIVEN.items()
}


def read(shape, scores):
    """The curve as the engine reads it."""
    out = np.empty((1, scores.size))
    Curves([shape]).read(scores[None].copy(), 0, out)
    return out[0]


@pytest.mark.parametrize("name", TABLED)
def test_a_table_is_within_a_millionth_of_its_range(name):
    """Everywhere, both tails included."""
    shape = TABLED[name]
    width = shape.support[1] - shape.support[0]

    off = np.abs(read(shape, SCORES) - shape.at_score(SCORES)).max()

    assert off < 4e-7 * width


@pytest.mark.parametrize("name", TABLED)
def test_a_table_keeps_mean_and_variance(name):
    """Within a millionth of the exact ones, relative."""
    shape = TABLED[name]
    values = read(shape, SCORES)
    mean = float(values @ WEIGHTS)
    variance = float(np.square(values - mean) @ WEIGHTS)

    assert mean == pytest.approx(shape.mean, rel=1e-8)
    assert variance == pytest.approx(shape.variance, rel=1e-7)


@pytest.mark.parametrize("name", BESIDE)
def test_other_curves_are_read_as_they_stand(name):
    """Normal, lognormal, listed and fixed shapes carry no table's error."""
    shape = BESIDE[name]

    assert read(shape, SCORES) == pytest.approx(shape.at_score(SCORES), rel=1e-12)


def test_scores_beyond_the_grid_stay_within_the_range():
    """A draw that cannot happen reads the end of the curve, not another one's."""
    curves = Curves([TABLED["pert 0.1"], TABLED["pert 0.5"]])
    scores = np.array([[-40.0, 40.0, 0.0], [-40.0, 40.0, 0.0]])
    out = np.empty_like(scores)
    curves.read(scores, 0, out)

    assert out[:, 0] == pytest.approx([0.0, 0.0], abs=1e-7)
    assert out[:, 1] == pytest.approx(
        [float(TABLED[f"pert {m}"].at_score(10.0)) for m in (0.1, 0.5)], abs=1e-7
    )
    assert out[:, 2] == pytest.approx(
        [float(TABLED["pert 0.1"].quantile(0.5)), 0.5], abs=1e-6
    )


def test_a_mixture_reads_each_curve_in_its_place():
    """Curves sorted by kind lead back to the shapes given; tiles change nothing."""
    shapes = [*BESIDE.values(), *TABLED.values()]
    curves = Curves(shapes)
    scores = np.tile(np.linspace(-3.0, 3.0, 61), (len(shapes), 1))
    whole = np.empty_like(scores)
    curves.read(scores.copy(), 0, whole)
    tiles = np.empty_like(scores)
    for first in range(0, len(shapes), 4):
        part = slice(first, min(first + 4, len(shapes)))
        curves.read(scores[part].copy(), first, tiles[part])

    assert np.array_equal(whole, tiles)
    for row, place in enumerate(curves.order):
        shape = shapes[place]
        assert whole[row] == pytest.approx(
            shape.at_score(scores[row]), rel=2e-6, abs=1e-6
        )


def test_each_reads_one_curve_at_one_score():
    """The flat form agrees with the rows, for tabled and other curves."""
    curves = Curves([*BESIDE.values(), *TABLED.values()])
    row = np.repeat(np.arange(len(curves)), 5)
    score = np.tile([-2.0, -0.5, 0.0, 0.7, 3.0], len(curves))
    flat = np.empty(row.size)
    curves.read_each(score.copy(), row, flat)
    rows = np.empty((len(curves), 5))
    curves.read(score.reshape(-1, 5).copy(), 0, rows)

    assert np.array_equal(flat, rows.ravel())
