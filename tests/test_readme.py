"""What the README shows works: its estimate, its commands, its lines of Python."""

import re
from pathlib import Path

import pytest

from contingency import read_estimate, run_study
from contingency.cli import main

ROOT = Path(__file__).parents[1]
README = (ROOT / "README.md").read_text(encoding="utf-8")


def block(kind: str, number: int = 0) -> str:
    """The text of a fenced block of one kind."""
    return re.findall(rf"^```{kind}\n(.*?)^```$", README, re.MULTILINE | re.DOTALL)[
        number
    ]


@pytest.fixture
def smallest(tmp_path):
    """The smallest estimate, as the README prints it."""
    folder = tmp_path / "footbridge"
    folder.mkdir()
    (folder / "estimate.toml").write_text(block("toml"), encoding="utf-8")
    (folder / "packages.csv").write_text(block("text"), encoding="utf-8")
    return folder


def test_the_smallest_estimate_works(smallest, tmp_path):
    """It makes a report, and has the findings that the README names."""
    out = tmp_path / "out"

    assert main(["report", str(smallest), "--out", str(out), "--quiet"]) == 1
    assert (out / "basis-of-contingency.pdf").read_bytes().startswith(b"%PDF-")
    found = {finding.check for finding in run_study(read_estimate(smallest)).findings}
    assert {
        "ranges-without-evidence",
        "no-systemic-layer",
        "level-without-authority",
    } <= found


def test_every_line_of_it_is_needed(smallest):
    """Nothing in the smallest estimate could be left out without a complaint."""
    whole = (smallest / "estimate.toml").read_text(encoding="utf-8")
    needed = [line for line in whole.splitlines() if "=" in line]
    read_estimate(smallest)
    spared = []
    for line in needed:
        (smallest / "estimate.toml").write_text(whole.replace(line + "\n", ""))
        if main(["check", str(smallest), "--quiet", "--json"]) != 2:
            spared.append(line)

    # Ends and dependence are asked for by the checks and not by the reader.
    assert spared == ['ends = "P10-P90"', "general_dependence = 0.2"]


def test_the_lines_of_python_run(monkeypatch):
    """From the checkout, as they stand."""
    monkeypatch.chdir(ROOT)
    names = {}
    exec(block("python"), names)  # noqa: S102  (a document's own example)

    assert names["study"].target.contingency > 0


def test_both_lines_for_a_fresh_machine_install_first():
    """One line for a report, one for the tests; each from nothing to the end."""
    report, tests = block("sh", 0).strip(), block("sh", 1).strip()

    for line in (report, tests):
        assert "\n" not in line
        assert line.startswith("apt-get update && apt-get install -y ")
        for package in ("libpangoft2-1.0-0", "libharfbuzz-subset0", "python3-venv"):
            assert package in line
    assert "contingency report example_estimates/" in report
    assert "pytest" in tests


def test_the_folder_that_the_report_line_makes_is_named(monkeypatch, tmp_path):
    """`contingency report` without --out writes where the README says."""
    monkeypatch.chdir(tmp_path)
    example = ROOT / re.search(r"report (example_estimates/\S+)", README)[1]
    main(["report", str(example), "--quiet"])
    (made,) = tmp_path.iterdir()

    assert f"`{made.name}`" in README


def test_the_table_of_commands_is_the_whole_one(capsys):
    """Every command that `contingency --help` lists, in its order."""
    with pytest.raises(SystemExit):
        main(["--help"])
    listed = re.findall(r"^    ([a-z-]+)(?= |$)", capsys.readouterr().out, re.MULTILINE)

    assert re.findall(r"^\| `contingency ([a-z-]+) ", README, re.MULTILINE) == listed
