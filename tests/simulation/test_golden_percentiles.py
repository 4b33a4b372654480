"""The percentiles of the examples stay what they were: a change of the streams is seen.

Nine significant digits, for the last ones depend on the order in which a processor
adds.  If a change is meant, `docs/changelog.md` has a heading for it: Figures.
"""

import json
from pathlib import Path

import numpy as np
import pytest

from contingency import read_estimate
from contingency.quantities.percentiles import percentile
from contingency.simulation import simulate

EXAMPLES = Path(__file__).parents[2] / "example_estimates"
PERCENTS = (1, 5, 10, 25, 50, 75, 80, 90, 95, 99)


@pytest.mark.parametrize("name", ["buoy-tender-refit/rev-b", "island-power-link/rev-c"])
def test_the_percentiles_of_an_example_are_the_golden_ones(name, golden):
    """Total cost at ten percentiles, and the moments, of the run as it is issued."""
    result = simulate(read_estimate(EXAMPLES / name), threads=2)
    ordered = np.sort(result.total)
    found = {
        "trials": result.trials,
        "mean": f"{result.total.mean():.9g}",
        "standard deviation": f"{result.total.std():.9g}",
        **{f"P{p:02d}": f"{percentile(ordered, p):.9g}" for p in PERCENTS},
    }

    text = json.dumps(found, indent=1) + "\n"
    golden(text, f"percentiles/{name.split('/')[0]}.json")
