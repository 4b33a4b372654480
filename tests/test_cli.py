"""The command line from outside: statuses, streams, files, the same bytes again."""

import json
import os
import shutil
import subprocess
import sys
from pathlib import Path

import pytest

from contingency.cli import ATTENTION, DONE, WRONG, main
from contingency.cli.offices import VARIABLE

ROOT = Path(__file__).parents[1]
SMALL = ROOT / "example_estimates" / "buoy-tender-refit" / "rev-b"
LARGE = ROOT / "example_estimates" / "island-power-link" / "rev-c"
FILES = {
    "allocation.csv",
    "basis-of-contingency.pdf",
    "drivers.csv",
    "percentiles.csv",
    "results.json",
}


@pytest.fixture
def small(tmp_path):
    """A copy of the small example with its earlier revision beside it."""
    shutil.copytree(SMALL.parent, tmp_path / "refit")
    return tmp_path / "refit" / SMALL.name


def test_a_report_again_gives_the_same_bytes(tmp_path, capsys):
    """Every file, from another process, with one thread and with two."""
    one, two = tmp_path / "one", tmp_path / "two"
    call = ["report", str(LARGE), "--date", "2026-12-01", "--quiet"]
    assert main([*call, "--threads", "2", "--out", str(one)]) == DONE
    capsys.readouterr()
    subprocess.run(
        [
            *(sys.executable, "-m", "contingency", *call),
            *("--threads", "1", "--out", str(two)),
        ],
        check=True,
        capture_output=True,
        cwd=tmp_path,
        env={
            **os.environ,
            "PYTHONPATH": str(ROOT),
            "PYTHONHASHSEED": "7",
            "TZ": "Asia/Tokyo",
        },
    )

    assert {path.name for path in one.iterdir()} == FILES
    for name in FILES:
        assert (one / name).read_bytes() == (two / name).read_bytes(), name


def test_json_is_the_results_file_and_nothing_else(tmp_path, capsys):
    """Standard output holds one object; standard error is silent off a terminal."""
    assert main(["report", str(SMALL), "--json", "--out", str(tmp_path)]) == DONE
    printed = capsys.readouterr()

    assert printed.err == ""
    assert json.loads(printed.out) == json.loads(
        (tmp_path / "results.json").read_text(encoding="utf-8")
    )


def test_a_stop_makes_status_one(small, capsys):
    """The report is written all the same; what needs attention is told."""
    toml = small / "estimate.toml"
    text = toml.read_text(encoding="utf-8")
    assert "general_dependence" in text
    lines = [
        line for line in text.splitlines() if not line.startswith(("set_by", "reason"))
    ]
    toml.write_text("\n".join(lines), encoding="utf-8")

    assert main(["check", str(small)]) == ATTENTION
    assert "level-without-authority" in capsys.readouterr().out


def test_a_folder_that_is_not_there_is_status_two(tmp_path, capsys):
    """One message in parts on standard error, and no traceback."""
    assert main(["report", str(tmp_path / "nowhere")]) == WRONG
    told = capsys.readouterr()

    assert told.out == ""
    assert all(word in told.err for word in ("found", "rule", "do", "see"))
    assert "Traceback" not in told.err


def test_an_output_that_cannot_be_written_is_status_two(tmp_path, capsys):
    """A file stands where the folder should go; it is left as it was."""
    blocked = tmp_path / "blocked"
    blocked.write_text("mine", encoding="utf-8")

    assert main(["report", str(SMALL), "--quiet", "--out", str(blocked)]) == WRONG
    assert "output-blocked" in capsys.readouterr().err
    assert blocked.read_text(encoding="utf-8") == "mine"


def test_a_report_that_cannot_be_set_is_status_two(small, tmp_path, capsys):
    """A letter that no font has; its neighbourhood is shown without markup."""
    file = small / "packages.csv"
    text = file.read_text(encoding="utf-8").replace("Hull steel", "\u5e95 steel")
    file.write_text(text, encoding="utf-8")
    out = tmp_path / "out"

    assert main(["report", str(small), "--quiet", "--out", str(out)]) == WRONG
    told = capsys.readouterr().err
    assert "U+5E95" in told
    assert "<" not in told.splitlines()[0]
    assert not out.exists()


@pytest.mark.parametrize(
    "call",
    [
        [],
        ["repot", "x"],
        ["report"],
        ["report", "x", "--threads", "0"],
        ["report", "x", "--date", "tomorrow"],
        ["seal", "x.pdf", "--role", "approved"],
        ["sign", "x", "--role", "checked"],
    ],
    ids=" ".join,
)
def test_a_wrong_call_is_status_two(call, capsys):
    """As the conventions of the command line have it."""
    with pytest.raises(SystemExit) as left:
        main(call)

    assert left.value.code == WRONG
    assert "usage" in capsys.readouterr().err


def test_a_fault_of_ours_is_one_line_and_a_traceback_on_demand(monkeypatch, capsys):
    """Anything that is no error of this package is said to be its own fault."""

    def fails(folder):
        raise ZeroDivisionError(folder)

    monkeypatch.setattr("contingency.estimate.reading.read_estimate", fails)

    assert main(["check", "x"]) == WRONG
    assert "Traceback" not in capsys.readouterr().err
    assert main(["check", "x", "--debug"]) == WRONG
    assert "Traceback" in capsys.readouterr().err


def test_the_office_from_sign_off_to_verification(small, monkeypatch, capsys):
    """Signed by all, issued, sealed, verified; a change makes the sign-offs lapse."""
    monkeypatch.setenv(VARIABLE, "a password")
    records = small.parent
    assert main(["issue", str(small)]) == ATTENTION
    assert capsys.readouterr().err.count("is missing") == 3

    signers = ("prepared", "J. Marchetti"), ("checked", "A. Nwosu")
    for role, name in (*signers, ("approved", "C. Tremblay-Hart")):
        assert main(["sign", str(small), "--role", role, "--name", name]) == DONE
    assert main(["issue", str(small), "--quiet"]) == DONE
    issued = records / "issued" / "B" / "basis-of-contingency.pdf"
    assert main(["seal", "--make-test-certificate", "A. Nwosu", str(records)]) == DONE
    (key,) = records.glob("*.p12")
    sealing = ["seal", str(issued), "--certificate", str(key), "--role", "checked"]
    assert main(sealing) == DONE
    sealed = issued.with_name("basis-of-contingency-sealed.pdf")
    capsys.readouterr()
    register = str(records / "register.jsonl")
    assert main(["verify", str(sealed), "--register", register, "--json"]) == DONE
    found = json.loads(capsys.readouterr().out)
    assert found["holds"]
    assert found["recomputed"]["outcome"] == "exactly"

    packages = small / "packages.csv"
    packages.write_text(
        packages.read_text(encoding="utf-8").replace("142%", "141%"), encoding="utf-8"
    )
    main(["check", str(small)])
    assert capsys.readouterr().out.count("has lapsed: packages.csv changed") == 3


def test_own_templates_that_are_not_there_are_missed_before_the_work(tmp_path, capsys):
    """Nothing is simulated for a folder that cannot be used."""
    call = ["report", str(SMALL), "--templates", str(tmp_path / "none")]

    assert main([*call, "--out", str(tmp_path / "out")]) == WRONG
    assert "template-fault" in capsys.readouterr().err
    assert not (tmp_path / "out").exists()
