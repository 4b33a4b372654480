"""The page on results.json names every key, in the order of the file."""

import re
from pathlib import Path

import pytest

from contingency.estimate.reading import read_estimate
from contingency.study import run_study

ROOT = Path(__file__).parents[1]
ROW = re.compile(r"^\| `(\w+)` \| (.*) \|$", re.MULTILINE)


@pytest.fixture(scope="module")
def results():
    """The results of the larger example, on few trials."""
    folder = ROOT / "example_estimates" / "island-power-link" / "rev-c"
    estimate = read_estimate(folder)
    run = estimate.run.model_copy(update={"least": 8_192, "most": 8_192})
    return run_study(estimate.model_copy(update={"run": run})).results()


@pytest.fixture(scope="module")
def page():
    """What the page says of each key."""
    return dict(ROW.findall((ROOT / "docs" / "results.md").read_text("utf-8")))


def test_every_key_has_its_row(results, page):
    """None is missing, none is left of an earlier version."""
    assert list(page) == list(results)


def test_every_part_of_a_key_is_named_in_its_row(results, page):
    """Of objects, and of the first object of lists."""
    unnamed = []
    for key, value in results.items():
        one = value[0] if isinstance(value, list) and value else value
        if isinstance(one, dict) and key != "percentiles":
            unnamed += [f"{key}.{k}" for k in one if f"`{k}`" not in page[key]]

    assert unnamed == []
