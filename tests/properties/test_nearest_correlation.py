"""What must hold of a repaired correlation matrix, whatever was wished for."""

import numpy as np
from hypothesis import given, settings

from contingency.quantities.dependence import LEAST_EIGENVALUE, nearest_correlation
from tests.properties.strategies import wished_correlations


@given(wished_correlations())
@settings(max_examples=60)
def test_it_can_always_be_used(wished):
    """Symmetric, unit diagonal, positive definite: Cholesky finds a factor."""
    found = nearest_correlation(wished).matrix

    assert np.array_equal(found, found.T)
    assert np.all(np.diag(found) == 1.0)
    assert np.linalg.eigvalsh(found)[0] >= 0.5 * LEAST_EIGENVALUE
    np.linalg.cholesky(found)


@given(wished_correlations())
@settings(max_examples=60)
def test_repairing_twice_changes_nothing(wished):
    """A repaired matrix is possible and stays as it is."""
    once = nearest_correlation(wished)
    again = nearest_correlation(once.matrix)

    assert again.largest_change == 0.0
    assert np.abs(again.matrix - once.matrix).max() <= 2.0 * LEAST_EIGENVALUE


@given(wished_correlations())
@settings(max_examples=60)
def test_no_mixture_with_independence_is_nearer(wished):
    """Shrinking all correlations until they are possible is never the nearest."""
    matrix = np.array(wished)
    smallest = np.linalg.eigvalsh(matrix)[0]
    weight = min(1.0, 1.0 / (1.0 - min(smallest, 0.0)))
    shrunk = weight * matrix + (1.0 - weight) * np.eye(len(matrix))

    found = nearest_correlation(wished).matrix
    assert np.linalg.norm(found - matrix) <= np.linalg.norm(shrunk - matrix) + 1e-6
