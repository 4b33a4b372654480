"""Closed-form mean and variance, against enumeration and against plain integrals."""

from itertools import product

import numpy as np
import pytest
from scipy.integrate import dblquad
from scipy.stats import multivariate_normal, poisson

from contingency.simulation.cost_model import build_model
from contingency.simulation.exact import exact_moments
from tests.simulation.estimates import (
    cause,
    cost_range,
    estimate,
    event,
    exact,
    package,
    systemic,
)

MOST_TIMES = 40
"""Occurrences of a repeated event that an enumeration looks at."""


def outcomes(events):
    """Every outcome of some events with known impacts: (chance, cost) pairs.

    Goes through all combinations of choices, one unit after another, by the words
    of the definition and not by the code under test.
    """
    by_id = {e.id: e for e in events}
    units = []
    seen = set()
    for e in events:
        if e.id in seen:
            continue
        if e.happens == "repeatedly":
            law = poisson(e.frequency)
            units.append([({e.id: n}, law.pmf(n)) for n in range(MOST_TIMES)])
            continue
        group = [e.id, *e.excludes]
        seen |= set(group)
        chances = [by_id[g].probability for g in group]
        units.append(
            [({g: 1}, p) for g, p in zip(group, chances, strict=True)]
            + [({}, 1.0 - sum(chances))]
        )
    for combination in product(*units):
        chosen = {k: v for part, _ in combination for k, v in part.items()}
        chance = np.prod([p for _, p in combination])

        def times(name, chosen=chosen):
            e = by_id[name]
            if e.requires and not times(e.requires):
                return 0
            return chosen.get(name, 0)

        cost = sum(times(e.id) * e.sign * e.impact.distribution.mean for e in events)
        yield chance, cost


def moments_of(events):
    """Mean and variance by enumeration."""
    chance, cost = (np.array(column) for column in zip(*outcomes(events), strict=True))
    mean = float(chance @ cost)
    return mean, float(chance @ np.square(cost)) - mean**2


INDEPENDENT = tuple(
    event(f"R{i}", p, exact(c))
    for i, (p, c) in enumerate([(0.1, 5.0), (0.5, 7.0), (0.9, 11.0), (0.3, 2.0)])
)
CHAIN = (
    event("R1", 0.5, exact(10.0)),
    event("R2", 0.4, exact(7.0), requires="R1"),
    event("R3", 0.3, exact(20.0), requires="R2"),
    event("R4", 0.6, exact(3.0), requires="R1"),
    event("R5", 0.2, exact(4.0)),
    event("R6", 0.7, exact(9.0), kind="opportunity", requires="R3"),
)
EXCLUSIVE = (
    event("R1", 0.2, exact(10.0), excludes=("R2", "R3")),
    event("R2", 0.3, exact(7.0), excludes=("R1", "R3")),
    event("R3", 0.4, exact(20.0), excludes=("R1", "R2")),
    event("R4", 0.5, exact(5.0), requires="R2"),
    event("R5", 0.5, exact(8.0), requires="R3"),
    event("R6", 0.5, exact(2.0), requires="R5"),
)
REPEATED = (
    event("R1", None, exact(3.0), happens="repeatedly", frequency=1.3),
    event("R2", 0.5, exact(10.0), requires="R1"),
    event(
        "R3",
        None,
        exact(2.0),
        happens="repeatedly",
        frequency=0.6,
        requires="R1",
        kind="opportunity",
    ),
)
CROSSED = (
    event("R1", 0.2, exact(10.0), excludes=("R2",)),
    event("R2", 0.3, exact(7.0), excludes=("R1",), requires="R4"),
    event("R3", 0.4, exact(20.0), excludes=("R4",), requires="R1"),
    event("R4", 0.5, exact(5.0), excludes=("R3",)),
)


@pytest.mark.parametrize(
    "events",
    [INDEPENDENT, CHAIN, EXCLUSIVE, REPEATED, CROSSED],
    ids=["independent", "chain", "exclusive", "repeated", "crossed"],
)
def test_events_equal_their_enumeration(events):
    """Mean and variance of every combination of requires, excludes and repeated."""
    found = exact_moments(build_model(estimate([package("A", base=0.0)], events)))
    mean, variance = moments_of(events)

    assert found.mean == pytest.approx(mean, rel=1e-12)
    assert found.variance == pytest.approx(variance, rel=1e-11)


@pytest.mark.parametrize("name", ["R1", "R2"])
def test_an_uncertain_impact_adds_its_variance(name):
    """It is p s^2 + p (1 - p) m^2, and L (s^2 + m^2) for a repeated one."""
    impact = cost_range(20, 40, 90)
    m, v = impact.distribution.mean, impact.distribution.variance
    one = {
        "R1": event("R1", 0.3, impact),
        "R2": event("R2", None, impact, happens="repeatedly", frequency=1.7),
    }[name]
    wanted = {"R1": 0.3 * v + 0.21 * m**2, "R2": 1.7 * (v + m**2)}[name]
    found = exact_moments(build_model(estimate([package("A")], (one,))))

    assert found.variance == pytest.approx(wanted, rel=1e-12)


def test_two_ranges_under_the_copula_equal_their_integral():
    """Covariance of a beta-PERT and a lognormal by two-dimensional quadrature."""
    a = cost_range(80, 100, 200)
    b = cost_range(50, None, 200, shape="lognormal")
    model = estimate([package("A", a), package("B", b)], general_dependence=0.45)
    found = exact_moments(build_model(model)).package_covariance[0, 1]
    normal = multivariate_normal(cov=[[1.0, 0.45], [0.45, 1.0]])
    product_mean, _ = dblquad(
        lambda y, x: (
            a.distribution.at_score(x) * b.distribution.at_score(y) * normal.pdf([x, y])
        ),
        -8,
        8,
        -8,
        8,
        epsabs=1e-5,
        epsrel=1e-7,
    )

    wanted = product_mean - a.distribution.mean * b.distribution.mean
    assert found == pytest.approx(wanted, rel=1e-4)


def test_systemic_uplifts_join_the_packages_that_they_act_on():
    """Two known packages share an uplift: variance (c1 + c2)^2 var, by hand."""
    uplift = cost_range(0.0, 0.1, 0.3)
    other = cost_range(0.0, 0.05, 0.1, shape="triangular")
    model = estimate(
        [package("A"), package("B", base=50.0), package("C", base=7.0)],
        systemic=(
            systemic("S1", uplift, ("A", "B")),
            systemic("S2", other, ("B", "C")),
        ),
    )
    found = exact_moments(build_model(model))
    one, two = uplift.distribution, other.distribution

    assert found.mean == pytest.approx(157.0 + 150.0 * one.mean + 57.0 * two.mean)
    assert found.variance == pytest.approx(
        150.0**2 * one.variance + 57.0**2 * two.variance
    )


def test_a_range_times_an_uplift():
    """Var(X(1+Y)) = E[X^2] E[(1+Y)^2] - (E[X] E[1+Y])^2, by hand."""
    x, y = cost_range(80, 100, 150), cost_range(0.0, 0.1, 0.3)
    model = estimate([package("A", x)], systemic=(systemic("S", y, ("A",)),))
    found = exact_moments(build_model(model))
    x, y = x.distribution, y.distribution
    square = (x.variance + x.mean**2) * (y.variance + (1 + y.mean) ** 2)

    assert found.variance == pytest.approx(
        square - (x.mean * (1 + y.mean)) ** 2, rel=1e-12
    )


def test_the_implied_average_correlation_of_equal_normals_is_their_correlation():
    """Normals keep the copula's correlation as it is."""
    model = estimate(
        [
            package(n, cost_range(80, None, 120, shape="normal"))
            for n in ("A", "B", "C", "D")
        ],
        general_dependence=0.3,
    )
    found = exact_moments(build_model(model))

    assert found.implied_average_correlation == pytest.approx(0.3, rel=1e-12)


def test_one_uncertain_package_has_no_average_correlation():
    """There is no pair to speak of."""
    model = estimate([package("A", cost_range(80, 100, 150)), package("B")])

    assert exact_moments(build_model(model)).implied_average_correlation is None


def test_the_share_of_a_cause_of_normals_is_its_squared_weight():
    """Var(E[T | f]) / Var(T) of two normals with loads 0.6 and -0.2."""
    model = estimate(
        [
            package("A", cost_range(80, None, 120, shape="normal"), loads={"c": 0.6}),
            package("B", cost_range(60, None, 140, shape="normal"), loads={"c": -0.2}),
        ],
        causes=(cause("c"),),
    )
    found = exact_moments(build_model(model))
    s = np.sqrt(np.diag(found.package_covariance))
    wanted = (0.6 * s[0] - 0.2 * s[1]) ** 2 / found.variance

    assert found.cause_share == pytest.approx([wanted], rel=1e-12)
