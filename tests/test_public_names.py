"""The public names: what an engineer's own script may rely on."""

import subprocess
import sys

import pytest

import contingency
import contingency.simulation

HEAVY = {
    "cryptography",
    "dask",
    "jinja2",
    "matplotlib",
    "numpy",
    "pandas",
    "pikepdf",
    "pydantic",
    "pyhanko",
    "scipy",
    "weasyprint",
}
"""Libraries that a command pays for only if it uses them."""


def test_the_public_names_are_these():
    """A name that goes or comes is a decision, and is in the changelog."""
    assert sorted(contingency.__all__) == [
        "Study",
        "__version__",
        "read_estimate",
        "run_study",
    ]
    assert sorted(contingency.simulation.__all__) == ["Simulation", "simulate"]


@pytest.mark.parametrize("name", contingency.__all__)
def test_every_public_name_is_there_and_says_what_it_is(name):
    """Names that are imported on first use exist, and carry a docstring."""
    value = getattr(contingency, name)

    assert value.__doc__


def test_an_unknown_name_is_refused_in_the_usual_words():
    """A typing error reads as it does for any other module."""
    with pytest.raises(AttributeError, match="no attribute 'read_estimates'"):
        _ = contingency.read_estimates


@pytest.mark.parametrize("module", ["contingency", "contingency.cli"])
def test_importing_the_top_imports_nothing_heavy(module):
    """`contingency --help` answers before numpy would have been imported."""
    script = f"import sys, {module}; print(*sys.modules)"
    done = subprocess.run(
        [sys.executable, "-c", script], capture_output=True, text=True, check=True
    )

    assert HEAVY & set(done.stdout.split()) == set()
