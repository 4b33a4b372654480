"""The nearest correlation matrix.

Source     Higham, N. J. (2002). IMA J. Numer. Anal. 22(3), 329-343.
           doi:10.1093/imanum/22.3.329, for the 3 × 3 example (from memory); the manual
           of the NAG library, example of routine g02aa, for the 4 × 4 matrix (read).
Taken      both matrices and the nearest correlation matrices printed for them.
Precision  four decimals and five decimals, as printed. An optimiser that knows nothing
           of projections confirms both.
Errata     none known.
"""

import numpy as np
import pytest
from scipy.optimize import minimize

from contingency.quantities.dependence import nearest_correlation

THREE = np.array([[1.0, 1.0, 0.0], [1.0, 1.0, 1.0], [0.0, 1.0, 1.0]])
NEAREST_TO_THREE = {(0, 1): 0.7607, (0, 2): 0.1573, (1, 2): 0.7607}

# The source has 2 on its diagonal. The distance of two matrices splits into that of
# the diagonals and the rest, so the nearest unit diagonal is the same for 1.
FOUR = np.eye(4) - np.eye(4, k=1) - np.eye(4, k=-1)
NEAREST_TO_FOUR = np.array(
    [
        [1.00000, -0.80841, 0.19159, 0.10678],
        [-0.80841, 1.00000, -0.65623, 0.19159],
        [0.19159, -0.65623, 1.00000, -0.80841],
        [0.10678, 0.19159, -0.80841, 1.00000],
    ]
)


def nearest_by_descent(matrix):
    """The nearest correlation matrix, searched over matrices of unit vectors."""
    size = len(matrix)

    def correlation(x):
        rows = x.reshape(size, size)
        rows = rows / np.linalg.norm(rows, axis=1, keepdims=True)
        return rows @ rows.T

    found = minimize(
        lambda x: np.sum((correlation(x) - matrix) ** 2),
        np.random.default_rng(1).normal(size=size * size),
        method="BFGS",
        options={"gtol": 1e-9},
    )
    return correlation(found.x)


def test_the_example_of_the_paper():
    """Off the diagonal 0.7607 and 0.1573; the largest change is the 0.2393."""
    found = nearest_correlation(THREE)

    for pair, value in NEAREST_TO_THREE.items():
        assert found.matrix[pair] == pytest.approx(value, abs=5e-5)
    assert found.largest_change == pytest.approx(1 - 0.7607, abs=5e-5)
    assert found.pair in {(0, 1), (1, 2)}


def test_the_example_of_the_manual():
    """The tridiagonal matrix of four."""
    assert nearest_correlation(FOUR).matrix == pytest.approx(NEAREST_TO_FOUR, abs=5e-6)


@pytest.mark.parametrize("matrix", [THREE, FOUR], ids=["paper", "manual"])
def test_an_optimiser_ends_at_the_same_matrix(matrix):
    """Steepest descent over all correlation matrices finds nothing nearer."""
    assert nearest_correlation(matrix).matrix == pytest.approx(
        nearest_by_descent(matrix), abs=1e-5
    )
