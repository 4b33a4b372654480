"""The benchmark's model, written once for each program that runs it.

A third each of the packages is beta-PERT, triangular and lognormal, joined by a general
dependence of 0.2; every event has a beta-PERT impact.  The figures come from a fixed
generator, so that every run and every program has the same model.
"""

from __future__ import annotations

from concurrent.futures import ThreadPoolExecutor
from dataclasses import dataclass
from pathlib import Path

import numpy as np
from scipy import stats

from tests.folders import lay_out

DEPENDENCE = 0.2
BLOCK = 4096


@dataclass(frozen=True, kw_only=True)
class Model:
    """Figures of the model: a row for each package, a row for each event."""

    ends: np.ndarray
    """(k, 3) low, likely, high; for a lognormal low and high are its P10 and P90."""
    shapes: tuple[str, ...]
    chances: np.ndarray
    """(e,)"""
    impacts: np.ndarray
    """(e, 3)"""

    def of(self, shape: str) -> np.ndarray:
        """Rows of the packages with one shape."""
        return np.array([i for i, name in enumerate(self.shapes) if name == shape])


def make_model(packages: int = 300, events: int = 80) -> Model:
    """Figures that no two packages share."""
    rng = np.random.default_rng(20260401)
    base = rng.uniform(100_000, 5_000_000, packages)
    low = base * rng.uniform(0.80, 0.97, packages)
    high = base * rng.uniform(1.05, 1.60, packages)
    likely = rng.uniform(0.30, 3.0, events) * 400_000
    return Model(
        ends=np.column_stack([low, base, high]),
        shapes=tuple(
            ("pert", "triangular", "lognormal")[i % 3] for i in range(packages)
        ),
        chances=rng.uniform(0.02, 0.60, events),
        impacts=np.column_stack([likely * 0.6, likely, likely * 2.2]),
    )


def as_folder(model: Model, folder: Path, *, trials: int) -> Path:
    """The model as an estimate folder."""
    return lay_out(
        folder,
        packages=[
            {
                "id": f"P{i:04d}",
                "base": likely,
                "low": low,
                "likely": "" if shape == "lognormal" else likely,
                "high": high,
                "shape": shape,
                "ends": "P10-P90" if shape == "lognormal" else "limits",
            }
            for i, (shape, (low, likely, high)) in enumerate(
                zip(model.shapes, model.ends.tolist(), strict=True)
            )
        ],
        events=[
            {
                "id": f"E{i:03d}",
                "kind": "threat",
                "probability": chance,
                "low": low,
                "likely": likely,
                "high": high,
            }
            for i, (chance, (low, likely, high)) in enumerate(
                zip(model.chances.tolist(), model.impacts.tolist(), strict=True)
            )
        ],
        general_dependence=DEPENDENCE,
        trials=trials,
    )


def pert_shapes(ends: np.ndarray) -> tuple[np.ndarray, np.ndarray]:
    """Both shape parameters of beta-PERTs, one for each row of `ends`."""
    low, likely, high = ends.T
    return (
        1 + 4 * (likely - low) / (high - low),
        1 + 4 * (high - likely) / (high - low),
    )


def lognormal_figures(ends: np.ndarray) -> tuple[np.ndarray, np.ndarray]:
    """Mean and standard deviation of the logarithm, from P10 and P90."""
    logs = np.log(ends[:, [0, 2]])
    return logs.mean(axis=1), (logs[:, 1] - logs[:, 0]) / (2 * stats.norm.ppf(0.9))


def total_by_openturns(model: Model, trials: int) -> np.ndarray:
    """Build, sample and sum in OpenTURNS, in its own terms; no statistics."""
    import openturns as ot

    def beta_pert(low, likely, high):
        width = high - low
        return ot.Beta(
            1 + 4 * (likely - low) / width, 1 + 4 * (high - likely) / width, low, high
        )

    log_mean, log_spread = lognormal_figures(model.ends)
    margins = []
    for i, shape in enumerate(model.shapes):
        if shape == "pert":
            margins.append(beta_pert(*model.ends[i]))
        elif shape == "triangular":
            margins.append(ot.Triangular(*model.ends[i]))
        else:
            margins.append(ot.LogNormal(log_mean[i], log_spread[i], 0.0))
    count = len(margins)
    correlation = np.full((count, count), DEPENDENCE)
    np.fill_diagonal(correlation, 1.0)
    copula = ot.NormalCopula(ot.CorrelationMatrix(correlation.tolist()))
    costs = ot.JointDistribution(margins, copula)
    happens = ot.JointDistribution([ot.Bernoulli(p) for p in model.chances])
    impacts = ot.JointDistribution([beta_pert(*row) for row in model.impacts])
    total = np.asarray(costs.getSample(trials)).sum(axis=1)
    total += (
        np.asarray(happens.getSample(trials)) * np.asarray(impacts.getSample(trials))
    ).sum(axis=1)
    return total


def total_by_scipy(model: Model, trials: int) -> np.ndarray:
    """The plain script: one vectorised call of scipy.stats for each shape."""
    rng = np.random.default_rng(1)
    count = len(model.shapes)
    z = np.sqrt(1 - DEPENDENCE) * rng.standard_normal((trials, count))
    z += np.sqrt(DEPENDENCE) * rng.standard_normal((trials, 1))
    u = stats.norm.cdf(z)  # (n, k)
    total = np.zeros(trials)

    rows = model.of("pert")
    low, _, high = model.ends[rows].T
    alpha, beta = pert_shapes(model.ends[rows])
    total += stats.beta.ppf(u[:, rows], alpha, beta, low, high - low).sum(axis=1)

    rows = model.of("triangular")
    low, likely, high = model.ends[rows].T
    mode = (likely - low) / (high - low)
    total += stats.triang.ppf(u[:, rows], mode, low, high - low).sum(axis=1)

    rows = model.of("lognormal")
    mean, spread = lognormal_figures(model.ends[rows])
    total += stats.lognorm.ppf(u[:, rows], spread, scale=np.exp(mean)).sum(axis=1)

    size = (trials, model.chances.size)
    happens = stats.bernoulli.rvs(model.chances, size=size, random_state=rng)
    low, _, high = model.impacts.T
    alpha, beta = pert_shapes(model.impacts)
    impact = stats.beta.rvs(alpha, beta, low, high - low, size=size, random_state=rng)
    return total + (happens * impact).sum(axis=1)


def draw_and_sort(inputs: int, trials: int, threads: int = 2) -> int:
    """Draw and sort `inputs` x `trials` raw Philox numbers in blocks, on threads.

    The least that a Latin hypercube of that size costs: nothing is computed from
    the numbers.  Returns how many there were.
    """

    def one_block(block: int) -> int:
        words = (
            np.random.Philox(block).random_raw(inputs * BLOCK).reshape(inputs, BLOCK)
        )
        words.sort(axis=1)
        return words.size

    with ThreadPoolExecutor(threads) as pool:
        return sum(pool.map(one_block, range(trials // BLOCK)))
