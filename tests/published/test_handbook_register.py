"""A register of three risks, with every outcome and its chance.

Source     Industrial Process Plant Construction Estimating and Man-Hour Analysis
           (Gulf/Elsevier), section 12.9, p. 260-261: expected values of three risks.
Taken      chances and amounts, and the expected loss of $49,750. The eight outcomes
           and their chances follow from the inputs, and are enumerated below.
Precision  the expected loss to the dollar (exact); chances to four standard errors.
Errata     none known.
"""

from itertools import product

import numpy as np
import pytest

from contingency import read_estimate, run_study
from tests.folders import lay_out

BASE = 1_000_000
TRIALS = 65_536

# Weather, material saving (an opportunity), labour productivity.
REGISTER = [
    ("W", "threat", 0.30, 75_000),
    ("M", "opportunity", 0.05, 55_000),
    ("L", "threat", 0.10, 300_000),
]

PRINTED = {
    -55_000: 0.0315,
    0: 0.5985,
    20_000: 0.0135,
    75_000: 0.2565,
    245_000: 0.0035,
    300_000: 0.0665,
    320_000: 0.0015,
    375_000: 0.0285,
}
"""Outcome and chance, worked out by hand."""


@pytest.fixture(scope="module")
def study(tmp_path_factory):
    """The register on a base without spread."""
    folder = lay_out(
        tmp_path_factory.mktemp("register"),
        packages=[{"id": "P1", "base": BASE, "shape": "fixed"}],
        events=[
            {
                "id": name,
                "kind": kind,
                "probability": chance,
                "likely": amount,
                "shape": "fixed",
            }
            for name, kind, chance, amount in REGISTER
        ],
        trials=TRIALS,
    )
    return run_study(read_estimate(folder))


def test_the_outcomes_are_enumerated_right():
    """All eight combinations, each with the product of its chances."""
    outcomes = dict.fromkeys(PRINTED, 0.0)
    for happens in product([False, True], repeat=3):
        cost, chance = 0, 1.0
        for yes, (_, kind, probability, amount) in zip(happens, REGISTER, strict=True):
            chance *= probability if yes else 1 - probability
            cost += yes * (amount if kind == "threat" else -amount)
        outcomes[cost] += chance

    assert outcomes == pytest.approx(PRINTED, abs=1e-12)


def test_the_expected_loss(study):
    """$49,750, within four standard errors; in closed form to the cent."""
    assert study.cross_check.mean.exact - BASE == pytest.approx(49_750, abs=0.01)
    assert study.mean - BASE == pytest.approx(49_750, abs=4 * 97_082 / np.sqrt(TRIALS))


def test_the_standard_deviation(study):
    """$97,082: sqrt(0.3 0.7 75² + 0.05 0.95 55² + 0.1 0.9 300²) thousand."""
    exact = 1000 * np.sqrt(0.21 * 75**2 + 0.0475 * 55**2 + 0.09 * 300**2)

    assert exact == pytest.approx(97_082.1, abs=0.1)
    assert study.cross_check.standard_deviation.exact == pytest.approx(exact, rel=1e-9)


def test_only_these_outcomes_happen_each_as_often_as_it_should(study):
    """No trial costs anything between two outcomes."""
    cost = np.round(study.simulation.total - BASE, 6)
    values, counts = np.unique(cost, return_counts=True)

    assert values.tolist() == list(PRINTED)
    for count, chance in zip(counts, PRINTED.values(), strict=True):
        error = np.sqrt(chance * (1 - chance) / TRIALS)
        assert count / TRIALS == pytest.approx(chance, abs=4 * error)


@pytest.mark.parametrize(
    ("percent", "cost"),
    # P90 is left out: the chance of at most 75,000 is 0.9 exactly.
    [(3, -55_000), (50, 0), (63, 0), (80, 75_000), (91, 300_000), (95, 300_000)],
)
def test_percentiles_are_amounts_that_happen(study, percent, cost):
    """The smallest cost that at least this share of the outcomes does not exceed."""
    assert study.percentiles[percent - 1] - BASE == pytest.approx(cost, abs=1e-6)
