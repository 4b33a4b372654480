"""The air vehicle of the cost guide, through the folder and the command line.

Source     U.S. Government Accountability Office (2020). Cost Estimating and
           Assessment Guide. GAO-20-195G, table 12 (unmanned aerial vehicle).
Taken      the seven triangular ranges and the point estimate (read). The guide's own
           percentiles were not read. The exact distribution is computed here, by
           numerical convolution of the seven independent densities.
Precision  point estimate to $0.01 billion as printed; percentiles to four standard
           errors of the simulation, at most 0.1 %; the convolution to 1e-4.
Errata     none known.
"""

import csv
import json
from pathlib import Path

import numpy as np
import pytest

from tests.folders import lay_out

TABLE = Path(__file__).parent / "data" / "gao_20_195g_table_12.csv"
TRIALS = 262_144
VEHICLES = 32


def elements() -> list[dict[str, str]]:
    """Rows of table 12."""
    with TABLE.open(encoding="utf-8") as file:
        return list(csv.DictReader(line for line in file if line[0] != "#"))


def triangular_cdf(x, low, likely, high):
    """Chance of not exceeding x, written from the definition."""
    rising = np.clip(x - low, 0, likely - low) ** 2 / ((high - low) * (likely - low))
    falling = np.clip(high - x, 0, high - likely) ** 2 / (
        (high - low) * (high - likely)
    )
    return np.where(x <= likely, rising, 1 - falling)


class Exact:
    """The exact distribution of the sum, on a grid of $1K."""

    def __init__(self) -> None:
        mass = np.array([1.0])
        start = 0.0
        for row in elements():
            low, likely, high = (float(row[key]) for key in ("low", "likely", "high"))
            edges = np.arange(low, high + 1.5)
            cells = np.diff(triangular_cdf(edges, low, likely, high))
            mass = np.convolve(mass, cells)
            start += low + 0.5  # a cell's chance sits in its middle
        self.value = start + np.arange(mass.size)
        self.mass = mass
        self.cumulative = np.cumsum(mass)

    def percentile(self, percent: int) -> float:
        """The total not exceeded with this chance; between cells by a straight line."""
        return float(np.interp(percent / 100, self.cumulative, self.value + 0.5))

    def chance(self, total: float) -> float:
        """Chance of not exceeding `total`."""
        return float(np.interp(total, self.value + 0.5, self.cumulative))

    def standard_error(self, percent: int, trials: int) -> float:
        """Standard error of a percentile of independent trials; $K."""
        p = percent / 100
        at = self.percentile(percent)
        density = (self.chance(at + 50) - self.chance(at - 50)) / 100
        return float(np.sqrt(p * (1 - p) / trials) / density)


@pytest.fixture(scope="module")
def exact():
    """The convolution, once."""
    return Exact()


@pytest.fixture(scope="module")
def results(tmp_path_factory):
    """`results.json` of `contingency report` on table 12 as an estimate folder."""
    from contingency.cli import main

    folder = lay_out(
        tmp_path_factory.mktemp("gao") / "air-vehicle",
        packages=[
            {**row, "base": row["likely"], "shape": "triangular"} for row in elements()
        ],
        trials=TRIALS,
    )
    out = folder.parent / "out"
    # The folder lacks evidence, which is a finding: 1 is "needs attention", 2 a fault.
    assert main(["report", str(folder), "--out", str(out), "--quiet"]) in {0, 1}
    return json.loads((out / "results.json").read_text(encoding="utf-8"))


def chance_by_inversion(total):
    """P(T <= total) from the characteristic function (Gil-Pelaez 1951)."""
    t = (np.arange(400_000) + 0.5) * 5e-8  # it is below 1e-9 beyond 0.02
    product = np.ones_like(t, dtype=complex)
    for row in elements():
        a, m, b = (float(row[key]) for key in ("low", "likely", "high"))
        wave = (b - m) * np.exp(1j * a * t) - (b - a) * np.exp(1j * m * t)
        wave += (m - a) * np.exp(1j * b * t)
        product *= -2 * wave / ((b - a) * (m - a) * (b - m) * t**2)
    integrand = (np.exp(-1j * t * total) * product).imag / t
    return 0.5 - integrand.sum() * (t[1] - t[0]) / np.pi


def test_the_convolution_is_right(exact):
    """It has the exact mean and variance, and a second way gives the same chances."""
    mean = variance = 0.0
    for row in elements():
        a, m, b = (float(row[key]) for key in ("low", "likely", "high"))
        mean += (a + m + b) / 3
        variance += (a * a + m * m + b * b - a * m - a * b - m * b) / 18

    assert exact.mass.sum() == pytest.approx(1, abs=1e-12)
    assert exact.mass @ exact.value == pytest.approx(mean, abs=0.01)
    deviation = exact.value - mean
    assert exact.mass @ deviation**2 == pytest.approx(variance, rel=1e-5)
    for total in (74_000, 77_092, 82_000, 86_446, 92_000):
        assert exact.chance(total) == pytest.approx(
            chance_by_inversion(total), abs=1e-6
        )
    assert exact.chance(77_092) == pytest.approx(0.12580, abs=5e-6)


def test_the_point_estimate_is_the_published_one(results):
    """$77 million a vehicle, $2.47 billion for 32."""
    assert results["base"] == 77_092
    assert round(results["base"] * VEHICLES / 1e6, 2) == 2.47


def test_mean_and_standard_deviation(results):
    """Mean 82,244.0 and standard deviation 4,599.6."""
    error = 4_599.6 / np.sqrt(TRIALS)

    assert results["mean"] == pytest.approx(82_244.0, abs=4 * error)
    # The fourth moment of a sum of triangulars is below that of a normal: s / sqrt(2n)
    # is no less than the standard error of s.
    assert results["standard_deviation"] == pytest.approx(
        4_599.6, abs=4 * error / np.sqrt(2)
    )


@pytest.mark.parametrize("percent", [10, 20, 30, 40, 50, 60, 70, 80, 90])
def test_percentiles(results, exact, percent):
    """Every tenth percentile, within its own sampling error."""
    allowed = 4 * exact.standard_error(percent, TRIALS)

    assert allowed < 0.001 * exact.percentile(percent)
    assert results["percentiles"][f"P{percent}"] == pytest.approx(
        exact.percentile(percent), abs=allowed
    )


def test_the_chance_that_the_point_estimate_is_enough(results):
    """0.12580: the sum of the most likely figures is far from the middle."""
    error = np.sqrt(0.12580 * (1 - 0.12580) / TRIALS)

    assert results["chance_base_is_enough"] == pytest.approx(0.12580, abs=4 * error)


def test_shares_of_variance(results):
    """Software is 92.69 % of the variance, propulsion 4.00, airframe 2.90."""
    share = {row["package"]: row["variance_share"] for row in results["allocation"]}

    # A share is a regression slope: its error is sqrt(share (1 - share) / n).
    for package, expected in {"1.6": 0.9269, "1.2": 0.0400, "1.1": 0.0290}.items():
        error = np.sqrt(expected * (1 - expected) / TRIALS)
        assert share[package] == pytest.approx(expected, abs=4 * error + 5e-5)
