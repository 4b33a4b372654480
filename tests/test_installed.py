"""The wheel in a bare environment: what a reader of the README gets.

Built and installed without the network: the other libraries are those of the
environment that runs the tests, put on the new one's path.
"""

import os
import shutil
import subprocess
import sys
import sysconfig
import venv
import zipfile
from pathlib import Path

import pytest

ROOT = Path(__file__).parents[1]
EXAMPLE = ROOT / "example_estimates" / "buoy-tender-refit"


def run(*words, cwd):
    """Run a command away from the checkout, and show what it said if it fails."""
    bare = {k: v for k, v in os.environ.items() if not k.startswith("PYTHON")}
    done = subprocess.run(
        [str(word) for word in words],
        cwd=cwd,
        env=bare,
        capture_output=True,
        text=True,
        check=False,
    )
    assert done.returncode in {0, 1}, done.stdout + done.stderr
    return done


@pytest.fixture(scope="module")
def wheel(tmp_path_factory):
    """The wheel, built from a copy so that the checkout stays as it is."""
    copy = tmp_path_factory.mktemp("source")
    for name in ("contingency", "report_templates", "docs"):
        shutil.copytree(
            ROOT / name, copy / name, ignore=shutil.ignore_patterns("__pycache__")
        )
    for name in ("pyproject.toml", "README.md"):
        shutil.copy(ROOT / name, copy)
    out = tmp_path_factory.mktemp("dist")
    run(sys.executable, "-m", "hatchling", "build", "-t", "wheel", "-d", out, cwd=copy)
    (built,) = out.glob("contingency-*.whl")
    return built


@pytest.fixture(scope="module")
def programs(wheel, tmp_path_factory):
    """The folder of programs of a new environment with the wheel in it."""
    home = tmp_path_factory.mktemp("bare") / "env"
    venv.create(home, with_pip=False)
    python = home / "bin" / "python"
    run(
        *(sys.executable, "-m", "pip", "--python", python),
        *("install", "--no-deps", "--no-index", "--quiet", wheel),
        cwd=home,
    )
    (packages,) = home.glob("lib/python*/site-packages")
    # A path file of a path file is not read: an editable install of the checkout
    # in the tests' environment stays out of this one.
    (packages / "others.pth").write_text(sysconfig.get_path("purelib") + "\n")
    return python.parent


def test_the_wheel_carries_the_templates(wheel):
    """Inside the package, beside the code; and nothing of the tests."""
    names = zipfile.ZipFile(wheel).namelist()

    assert any(name.startswith("contingency/report_templates/") for name in names)
    assert not any(name.startswith("tests/") for name in names)


def test_the_package_comes_from_the_environment(programs, tmp_path):
    """The next two tests try the wheel and not the checkout."""
    where = "import contingency; print(contingency.__file__)"
    done = run(programs / "python", "-c", where, cwd=tmp_path)

    assert Path(done.stdout.strip()).is_relative_to(programs.parent)


def test_help_is_there(programs, tmp_path):
    """The entry point works and names the commands."""
    done = run(programs / "contingency", "--help", cwd=tmp_path)

    assert done.returncode == 0
    for command in ("start", "check", "report"):
        assert command in done.stdout


def test_one_report_from_outside_the_checkout(programs, tmp_path):
    """The small example, copied away, makes a report with the wheel's templates."""
    estimate = shutil.copytree(EXAMPLE, tmp_path / "refit") / "rev-b"
    run(programs / "contingency", "report", estimate, "--out", "out", cwd=tmp_path)
    (pdf,) = (tmp_path / "out").glob("*.pdf")

    assert pdf.read_bytes().startswith(b"%PDF-")
    assert (tmp_path / "out" / "results.json").exists()
