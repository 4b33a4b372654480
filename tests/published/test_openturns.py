"""The same model in a general-purpose library, percentile by percentile.

Source     OpenTURNS (Baudin, M., Dutfoy, A., Iooss, B. and Popelin, A.-L. (2017).
           Handbook of Uncertainty Quantification, Springer, 2001-2038.
           doi:10.1007/978-3-319-12385-1_64), installed as a test dependency.
Taken      its distributions, its Gaussian copula and its generator. The model is
           written down a second time, in its terms; no line of ours is used.
Precision  four standard errors of the difference of two samples.
Errata     none known.
"""

import numpy as np
import openturns as ot
import pytest
from scipy.stats import norm

from contingency import read_estimate, run_study
from tests.folders import lay_out

TRIALS = 131_072
ITS_TRIALS = 1_000_000
DEPENDENCE = 0.25

PERCENTS = range(5, 100, 5)

PACKAGES = [
    # id, shape, base, low, likely, high; ends are limits, or P10-P90 where unbounded
    ("P1", "pert", 900.0, 800.0, 900.0, 1500.0),
    ("P2", "pert", 400.0, 380.0, 420.0, 440.0),
    ("P3", "triangular", 650.0, 600.0, 650.0, 1000.0),
    ("P4", "triangular", 300.0, 250.0, 300.0, 310.0),
    ("P5", "uniform", 200.0, 180.0, None, 260.0),
    ("P6", "normal", 500.0, 430.0, None, 600.0),
    ("P7", "lognormal", 700.0, 620.0, None, 1100.0),
    ("P8", "lognormal", 250.0, 200.0, None, 420.0),
]

UPLIFT = (-0.02, 0.03, 0.12)
"""A systemic risk on P1 to P4, beta-PERT."""

EVENTS = [
    # id, kind, chance, low, likely, high: triangular
    ("E1", "threat", 0.30, 100.0, 150.0, 400.0),
    ("E2", "threat", 0.05, 500.0, 800.0, 1400.0),
    ("E3", "opportunity", 0.40, 50.0, 90.0, 120.0),
    ("E4", "threat", 0.65, 20.0, 30.0, 90.0),
]


def beta_pert(low, likely, high):
    """Beta-PERT in its terms: two shape parameters and the limits."""
    width = high - low
    return ot.Beta(
        1 + 4 * (likely - low) / width, 1 + 4 * (high - likely) / width, low, high
    )


def its_distribution(shape, low, likely, high):
    """One range in its terms."""
    reach = norm.ppf(0.9)
    if shape == "pert":
        return beta_pert(low, likely, high)
    if shape == "triangular":
        return ot.Triangular(low, likely, high)
    if shape == "uniform":
        return ot.Uniform(low, high)
    if shape == "normal":
        return ot.Normal((low + high) / 2, (high - low) / (2 * reach))
    spread = np.log(high / low) / (2 * reach)
    return ot.LogNormal(np.log(low * high) / 2, spread, 0.0)


@pytest.fixture(scope="module")
def its_total():
    """Total cost of a million independent trials of its own, sorted."""
    ot.RandomGenerator.SetSeed(20260401)
    correlation = ot.CorrelationMatrix(len(PACKAGES))
    for i in range(len(PACKAGES)):
        for j in range(i):
            correlation[i, j] = DEPENDENCE
    costs = ot.JointDistribution(
        [its_distribution(shape, *ends) for _, shape, _, *ends in PACKAGES],
        ot.NormalCopula(correlation),
    )
    x = np.asarray(costs.getSample(ITS_TRIALS))  # (n, k)
    y = np.asarray(beta_pert(*UPLIFT).getSample(ITS_TRIALS))[:, 0]
    total = x.sum(axis=1) + x[:, :4].sum(axis=1) * y
    for _, kind, chance, *ends in EVENTS:
        happens = np.asarray(ot.Bernoulli(chance).getSample(ITS_TRIALS))[:, 0]
        impact = np.asarray(ot.Triangular(*ends).getSample(ITS_TRIALS))[:, 0]
        total += happens * impact * (1 if kind == "threat" else -1)
    return np.sort(total)


@pytest.fixture(scope="module")
def study(tmp_path_factory):
    """The same model as an estimate folder."""
    folder = lay_out(
        tmp_path_factory.mktemp("same-model"),
        packages=[
            {
                "id": name,
                "shape": shape,
                "base": base,
                "low": low,
                "likely": "" if likely is None else likely,
                "high": high,
                "ends": "P10-P90" if shape in {"normal", "lognormal"} else "",
            }
            for name, shape, base, low, likely, high in PACKAGES
        ],
        systemic=[
            {
                "id": "S1",
                **{
                    key: f"{100 * value:g}%"
                    for key, value in zip(
                        ("low", "likely", "high"), UPLIFT, strict=True
                    )
                },
                "applies_to": "P1; P2; P3; P4",
            }
        ],
        events=[
            {
                "id": name,
                "kind": kind,
                "probability": chance,
                "low": low,
                "likely": likely,
                "high": high,
                "shape": "triangular",
            }
            for name, kind, chance, low, likely, high in EVENTS
        ],
        general_dependence=DEPENDENCE,
        trials=TRIALS,
    )
    return run_study(read_estimate(folder))


@pytest.mark.parametrize("percent", PERCENTS)
def test_percentiles_agree(study, its_total, percent):
    """Its trials that do not exceed our percentile are as many as they should be."""
    p = percent / 100
    ours = study.percentiles[percent - 1]
    share = np.searchsorted(its_total, ours, side="right") / ITS_TRIALS
    error = np.sqrt(p * (1 - p) * (1 / ITS_TRIALS + 1 / TRIALS))

    assert share == pytest.approx(p, abs=4 * error)


def test_means_agree(study, its_total):
    """Mean of both, and of the closed form."""
    error = its_total.std() / np.sqrt(ITS_TRIALS)

    assert study.cross_check.mean.exact == pytest.approx(
        its_total.mean(), abs=4 * error
    )
    assert study.mean == pytest.approx(
        its_total.mean(), abs=4 * its_total.std() * np.sqrt(1 / ITS_TRIALS + 1 / TRIALS)
    )


def test_standard_deviations_agree(study, its_total):
    """Standard deviation of both, and of the closed form."""
    deviation = its_total - its_total.mean()
    variance = np.mean(deviation**2)
    error = np.sqrt((np.mean(deviation**4) - variance**2) / ITS_TRIALS)
    ours = study.cross_check.standard_deviation.exact

    assert ours**2 == pytest.approx(variance, abs=4 * error)
    assert study.standard_deviation**2 == pytest.approx(
        variance, abs=4 * error * np.sqrt(1 + ITS_TRIALS / TRIALS)
    )


def test_the_chance_that_the_base_is_enough_agrees(study, its_total):
    """P(T <= B), counted on both sides."""
    base = sum(row[2] for row in PACKAGES)
    p = np.searchsorted(its_total, base, side="right") / ITS_TRIALS
    error = np.sqrt(p * (1 - p) * (1 / ITS_TRIALS + 1 / TRIALS))

    assert study.estimate.base == base
    assert study.chance_base_is_enough == pytest.approx(p, abs=4 * error)
