"""Dependence: weights of loads, rank correlations, nearest possible matrices."""

import numpy as np
import pytest
from scipy.optimize import minimize

from contingency.quantities.dependence import (
    LEAST_EIGENVALUE,
    factor_correlation,
    nearest_correlation,
    normal_to_rank,
    own_weight,
    rank_to_normal,
)


def wished(values):
    """A symmetric matrix with unit diagonal from the values above the diagonal."""
    size = round((1 + np.sqrt(1 + 8 * len(values))) / 2)
    matrix = np.eye(size)
    matrix[np.triu_indices(size, 1)] = values
    return matrix + matrix.T - np.eye(size)


def impossible(size, seed):
    """A matrix of correlations that no quantities can have together."""
    rng = np.random.default_rng(seed)
    values = rng.uniform(-1.0, 1.0, size * (size - 1) // 2)
    return wished(values)


def nearest_by_descent(matrix):
    """The nearest correlation matrix, searched over matrices of unit vectors."""
    size = len(matrix)

    def vectors(x):
        rows = x.reshape(size, size)
        return rows / np.linalg.norm(rows, axis=1, keepdims=True)

    def distance(x):
        v = vectors(x)
        return np.sum((v @ v.T - matrix) ** 2)

    start = np.random.default_rng(1).normal(size=size * size)
    found = minimize(distance, start, method="BFGS", options={"gtol": 1e-9})
    v = vectors(found.x)
    return v @ v.T


class TestLoads:
    def test_the_variance_of_a_score_is_one(self):
        """Own weight, general dependence and loads: squares add up to 1."""
        loads = np.array([[0.5, 0.3], [-0.6, 0.0], [0.0, 0.0]])

        own = own_weight(0.2, loads)

        assert own**2 + 0.2 + (loads**2).sum(axis=1) == pytest.approx(np.ones(3))

    def test_loads_that_fill_the_whole_leave_nothing(self):
        """0.2 + 0.4² + 0.8² is 1, up to rounding: no weight of its own."""
        assert own_weight(0.2, [[0.4, 0.8]]).tolist() == [0.0]

    def test_loads_beyond_the_whole_are_refused(self):
        """A score cannot follow its causes more than fully."""
        with pytest.raises(ValueError, match="more than 1"):
            own_weight(0.5, [[0.8]])

    def test_no_causes_are_no_loads(self):
        """Without causes the general dependence stands alone."""
        assert own_weight(0.36, np.zeros((2, 0))) == pytest.approx([0.8, 0.8])
        assert factor_correlation(0.36, np.zeros((2, 0))) == pytest.approx(
            np.array([[1.0, 0.36], [0.36, 1.0]])
        )

    def test_correlations_follow_from_the_loads(self):
        """G + sum of products; the same as from simulated scores."""
        loads = np.array([[0.5, 0.3], [-0.6, 0.0], [0.0, 0.7]])
        implied = factor_correlation(0.1, loads)

        rng = np.random.default_rng(2)
        common, causes, own = (rng.normal(size=(i, 400_000)) for i in (1, 2, 3))
        scores = (
            np.sqrt(0.1) * common
            + loads @ causes
            + own_weight(0.1, loads)[:, None] * own
        )
        assert implied[0, 1] == pytest.approx(0.1 - 0.3)
        assert np.corrcoef(scores) == pytest.approx(implied, abs=4 / np.sqrt(400_000))
        assert np.linalg.eigvalsh(implied)[0] > 0.0


def test_rank_and_normal_correlation_undo_each_other():
    """There and back for the whole range, both ends included."""
    rho = np.linspace(-1.0, 1.0, 41)

    assert normal_to_rank(rank_to_normal(rho)) == pytest.approx(rho, abs=1e-15)
    assert rank_to_normal([-1.0, 0.0, 1.0]) == pytest.approx([-1.0, 0.0, 1.0])


class TestNearestCorrelation:
    @pytest.mark.parametrize("seed", range(4))
    def test_a_search_finds_nothing_nearer(self, seed):
        """An optimiser that knows nothing of projections ends at the same matrix."""
        matrix = impossible(5, seed)
        assert np.linalg.eigvalsh(matrix)[0] < 0.0

        found = nearest_correlation(matrix)

        assert found.matrix == pytest.approx(nearest_by_descent(matrix), abs=2e-5)

    @pytest.mark.parametrize(("size", "seed"), [(3, 0), (10, 1), (60, 2)])
    def test_the_result_is_usable(self, size, seed):
        """Symmetric, ones on the diagonal, a Cholesky factor that gives it back."""
        found = nearest_correlation(impossible(size, seed)).matrix

        assert np.array_equal(found, found.T)
        assert np.all(np.diag(found) == 1.0)
        assert np.all(np.abs(found) <= 1.0)
        assert np.linalg.eigvalsh(found)[0] >= 0.5 * LEAST_EIGENVALUE
        factor = np.linalg.cholesky(found)
        assert factor @ factor.T == pytest.approx(found, abs=1e-13)

    def test_the_largest_change_is_named(self):
        """Value and pair of the correlation that moved furthest."""
        matrix = impossible(6, 3)

        found = nearest_correlation(matrix)

        change = np.abs(found.matrix - matrix)
        assert found.largest_change == change.max() > 0.1
        assert change[found.pair] == change.max()
        assert found.pair[0] < found.pair[1]

    def test_a_possible_matrix_stays(self):
        """Nothing wrong: the same matrix, no change, no pair."""
        matrix = wished([0.3, -0.2, 0.5])

        found = nearest_correlation(matrix)

        assert np.array_equal(found.matrix, matrix)
        assert (found.largest_change, found.pair) == (0.0, None)

    def test_full_dependence_is_possible_too(self):
        """Three costs that are one: nothing to repair, and still a Cholesky factor."""
        found = nearest_correlation(np.ones((3, 3)))

        assert (found.largest_change, found.pair) == (0.0, None)
        assert found.matrix == pytest.approx(np.ones((3, 3)), abs=2 * LEAST_EIGENVALUE)
        np.linalg.cholesky(found.matrix)

    def test_the_one_by_one_matrix(self):
        """A single range has no pair."""
        found = nearest_correlation([[1.0]])

        assert found.matrix.tolist() == [[1.0]]
        assert found.pair is None

    @pytest.mark.parametrize(
        ("matrix", "why"),
        [
            ([[1.0, 0.5]], "square"),
            ([[1.0, 1.5], [1.5, 1.0]], "between -1 and 1"),
            ([[2.0, 0.5], [0.5, 1.0]], "between -1 and 1"),
            ([[1.0, float("nan")], [float("nan"), 1.0]], "between -1 and 1"),
            ([[1.0, 0.5], [0.4, 1.0]], "symmetric"),
        ],
    )
    def test_what_is_no_matrix_of_correlations_is_refused(self, matrix, why):
        """A mistake of the caller, not of an estimate."""
        with pytest.raises(ValueError, match=why):
            nearest_correlation(matrix)
