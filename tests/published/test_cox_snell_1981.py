"""Regression of the cost of 32 reactors, as a rated model.

Source     Cox, D. R. and Snell, E. J. (1981), Applied Statistics: Principles and
           Examples, Chapman and Hall, example G; data of Mooz (1978), RAND report
           R-2304, whose abstract was read (rand.org/pubs/reports/R2304.html).
           Coefficients as in Davison, A. C. (2003), Statistical Models, Cambridge
           University Press, chapter 8, from memory.
Taken      the 32 plants, from an open collection of data sets; the reduced
           regression of log cost: constant -13.26 (3.140), date 0.212 (0.043), log
           cap 0.723 (0.119), NE 0.249 (0.074), CT 0.140 (0.060), log N -0.088
           (0.042), PT -0.226 (0.114), residual standard deviation 0.159 on 25
           degrees of freedom.  The residual sum of squares 0.63374, the mean cost
           461.56 and the ratio P80/P50 = exp(0.8416 x 0.159) = 1.143 were worked out.
Precision  half a unit of the last printed digit; standard errors, from memory, to a
           whole unit (log N: 0.0415 was worked out, 0.042 is remembered); ratios to
           1e-3.
Errata     none known.  The printed digits of the slope of date alone leave the sum
           open by 0.03, for dates lie near 68.
"""

import csv
import math
from pathlib import Path

import numpy as np
import pytest
from scipy import stats

from contingency.estimate.fault_list import FaultList
from contingency.estimate.modelled import rated_quantile, rated_uplift
from contingency.estimate.ratings import read_ratings

DATA = Path(__file__).parent / "data" / "cox_snell_1981_example_g.csv"
PRINTED = {
    "constant": (-13.26, 3.140),
    "date": (0.212, 0.043),
    "log cap": (0.723, 0.119),
    "ne": (0.249, 0.074),
    "ct": (0.140, 0.060),
    "log n": (-0.088, 0.042),
    "pt": (-0.226, 0.114),
}
"""Coefficient and standard error."""
SPREAD, DEGREES = 0.159, 25


def plants():
    """The plants as numbers by column."""
    with DATA.open(encoding="utf-8", newline="") as file:
        rows = csv.DictReader(line for line in file if not line.startswith("#"))
        return [{name: float(cell) for name, cell in row.items()} for row in rows]


def terms(plant):
    """What the coefficients of the reduced regression act on."""
    return {
        "constant": 1.0,
        "date": plant["date"],
        "log cap": math.log(plant["cap"]),
        "ne": plant["ne"],
        "ct": plant["ct"],
        "log n": math.log(plant["n"]),
        "pt": plant["pt"],
    }


def fitted():
    """Least squares on the data: coefficients, standard errors, residuals."""
    design = np.array([list(terms(plant).values()) for plant in plants()])
    logs = np.log([plant["cost"] for plant in plants()])
    coefficients, *_ = np.linalg.lstsq(design, logs)
    residuals = logs - design @ coefficients
    variance = residuals @ residuals / (len(logs) - len(coefficients))
    errors = np.sqrt(variance * np.diag(np.linalg.inv(design.T @ design)))
    return coefficients, errors, residuals


def as_ratings(plant, coefficients, spread=SPREAD):
    """The regression and one plant as a ratings.toml."""
    constant, *slopes = coefficients
    names = list(PRINTED)[1:]
    lines = [
        "[model]",
        'name = "32 reactors"',
        'provenance = "Cox and Snell (1981), example G"',
        'form = "log"',
        f"constant = {float(constant)!r}",
        f"residual_spread = {float(spread)!r}",
        f"degrees = {DEGREES}",
    ]
    for name, slope in zip(names, slopes, strict=True):
        lines += [
            "[[factors]]",
            f'id = "{name}"',
            f'name = "{name}"',
            f"coefficient = {float(slope)!r}",
            f"value = {terms(plant)[name]!r}",
        ]
    return "\n".join(lines) + "\n"


def model_of(plant, coefficients, spread=SPREAD):
    """The rated model that the reader makes of it."""
    faults = FaultList()
    model = read_ratings(as_ratings(plant, coefficients, spread), faults)
    assert not faults, faults.in_file_order()
    return model


def test_the_data_are_those_of_the_book():
    """32 plants, their mean cost, and the printed fit of the reduced regression."""
    coefficients, errors, residuals = fitted()

    assert len(plants()) == 32
    assert np.mean([p["cost"] for p in plants()]) == pytest.approx(461.56, abs=0.005)
    for mine, error, (printed, printed_error) in zip(
        coefficients, errors, PRINTED.values(), strict=True
    ):
        # Half a unit of the last printed digit, the second of the constant, else the
        # third; the standard errors, which are from memory, to a whole unit.
        digit = 0.005 if printed == PRINTED["constant"][0] else 0.0005
        assert mine == pytest.approx(printed, abs=1.01 * digit)
        assert error == pytest.approx(printed_error, abs=0.001)
    assert residuals @ residuals == pytest.approx(0.63374, abs=5e-6)
    assert math.sqrt(residuals @ residuals / DEGREES) == pytest.approx(0.159, abs=5e-4)


def test_rated_models_have_the_residuals_of_the_regression():
    """Each plant rated in turn: what is left open sums to the printed spread."""
    coefficients, _, residuals = fitted()
    mine = [
        math.log(plant["cost"]) - model_of(plant, coefficients).expected
        for plant in plants()
    ]

    assert mine == pytest.approx(list(residuals), abs=1e-9)
    assert math.sqrt(np.square(mine).sum() / DEGREES) == pytest.approx(SPREAD, abs=5e-4)


def test_printed_coefficients_predict_each_cost_within_the_printed_spread():
    """Rounded as printed, the misfit grows by no more than the rounding allows."""
    printed = [coefficient for coefficient, _ in PRINTED.values()]
    misfit = [
        math.log(plant["cost"]) - model_of(plant, printed).expected
        for plant in plants()
    ]

    rounding = {name: 0.005 if name == "constant" else 0.0005 for name in PRINTED}
    allowed = np.mean(
        [
            sum(rounding[name] * abs(term) for name, term in terms(plant).items())
            for plant in plants()
        ]
    )

    assert abs(np.mean(misfit)) < allowed < 0.05
    assert np.std(misfit, ddof=7) == pytest.approx(SPREAD, abs=2e-3)


def test_the_spread_of_one_more_plant():
    """P80 over P50 with the spread taken as known: 1.143; with 25 degrees, more."""
    plant = plants()[0]
    model = model_of(plant, fitted()[0])
    known = model.model_copy(update={"degrees": None})

    def ratio(of):
        return (1 + rated_quantile(of, 80)) / (1 + rated_quantile(of, 50))

    assert ratio(known) == pytest.approx(1.143, abs=1e-3)
    assert ratio(model) == pytest.approx(
        math.exp(SPREAD * stats.t(DEGREES).ppf(0.8)), rel=1e-12
    )


def test_the_curve_that_is_simulated_is_that_of_the_prediction():
    """Cost of the first plant at P50, in M USD, through the points of the curve."""
    plant = plants()[0]
    model = model_of(plant, fitted()[0])
    median = 1 + float(rated_uplift(model).distribution.quantile(np.array([0.5]))[0])

    assert median == pytest.approx(math.exp(model.expected), rel=1e-9)
    assert math.log(plant["cost"] / median) == pytest.approx(fitted()[2][0], abs=1e-9)
