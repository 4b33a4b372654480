"""What `contingency compare` and `contingency drawdown` answer."""

import json
from pathlib import Path

import pytest

from contingency.errors import NoAccount, UnusableEstimate, UnusableResults
from contingency.tracking.accounting import drawdown_of_folder
from contingency.tracking.comparing import compare_folders, read_issued

EXAMPLES = Path(__file__).parents[2] / "example_estimates"
ISLAND = EXAMPLES / "island-power-link"
REFIT = EXAMPLES / "buoy-tender-refit"


@pytest.fixture(scope="module")
def refit():
    """The smaller example, compared."""
    return compare_folders(REFIT / "rev-a", REFIT / "rev-b")


def test_the_object_of_a_comparison_is_json_and_closes(refit):
    """Steps from before to after, unrounded."""
    found = json.loads(json.dumps(refit.as_object(), allow_nan=False))

    assert found["format"] == "contingency-comparison/1"
    for name in ("base", "contingency", "total"):
        change = sum(step[name] for step in found["steps"])
        assert found["before"][name] + change == pytest.approx(found["after"][name])
    assert found["residual"] == {"base": 0.0, "contingency": 0.0}
    assert found["earlier"]["revision"] == "A"
    assert {risk["id"]: risk["movement"] for risk in found["risks"]} == {
        "R1": "unchanged",
        "R2": "unchanged",
        "R3": "opened",
        "R4": "closed",
    }


def test_the_lines_of_a_comparison_add_up(refit):
    """Every column of the printed table, read back."""
    lines = refit.lines()
    first = next(i for i, line in enumerate(lines) if line.startswith("Revision A"))
    last = next(i for i, line in enumerate(lines) if line.startswith("Revision B"))
    rows = []
    for line in lines[first : last + 1]:
        cells = [cell for cell in line.split("  ") if cell.strip()]
        rows.append([int(cell.replace(",", "")) for cell in cells[1:4]])
    before, *steps, after = rows

    assert len(steps) == len(refit.comparison.bridge.steps)
    for column in range(3):
        moved = sum(step[column] for step in steps)
        assert before[column] + moved == after[column]
    assert all(row[0] + row[1] == row[2] for row in rows)
    assert max(len(line) for line in lines) < 140


def test_the_lines_say_how_it_was_done(refit):
    """The method, the run and what is left without a reason."""
    text = " ".join(refit.lines())

    assert "averaged over all orders (Shapley value)" in text
    assert "16 blocks of 4,096 trials" in text
    assert "cells differ" in text
    assert not refit.needs_attention


def test_a_comparison_with_itself_says_so():
    """One sentence and nothing else to read."""
    found = compare_folders(REFIT / "rev-a", REFIT / "rev-a")

    assert found.lines()[-1] == "Nothing that moves base or contingency differs."
    assert not found.needs_attention


def test_the_plain_sequence_says_so():
    """The order is that of the table."""
    found = compare_folders(REFIT / "rev-a", REFIT / "rev-b", order="sequence")
    assert "one after another in the order of the table" in found.comparison.method


def test_issued_results_are_the_start(tmp_path, refit):
    """Another version's figures make a step of the method."""
    path = tmp_path / "results.json"
    own = refit.comparison.bridge.before
    path.write_text(
        json.dumps(
            {
                "base": own.base,
                "target": {"contingency": own.contingency + 1000.0},
                "tool": {"version": "0.0.1"},
                "run": {"method": "contingency-method/0"},
            }
        ),
        encoding="utf-8",
    )
    found = compare_folders(REFIT / "rev-a", REFIT / "rev-b", issued=path)

    assert found.as_object()["steps"][0]["family"] == "method"
    assert found.as_object()["steps"][0]["contingency"] == pytest.approx(-1000.0)


@pytest.mark.parametrize("content", ["", "[]", '{"base": "much"}', "no json"])
def test_a_file_that_is_no_results_json_is_refused(content, tmp_path):
    """With the reason, and without a traceback of ours."""
    path = tmp_path / "results.json"
    path.write_text(content, encoding="utf-8")
    with pytest.raises(UnusableResults, match="cannot be used"):
        read_issued(path)
    with pytest.raises(UnusableResults):
        read_issued(tmp_path / "missing.json")


def test_a_folder_that_cannot_be_read_is_refused(tmp_path):
    """As by every other command."""
    with pytest.raises(UnusableEstimate):
        compare_folders(tmp_path / "nothing", REFIT / "rev-b")


def test_the_larger_example_has_an_account():
    """Balance, need, ratio and a forecast with its milestones."""
    result = drawdown_of_folder(ISLAND / "rev-c")
    found = json.loads(json.dumps(result.as_object(), allow_nan=False))
    account = found["account"]

    assert account["balance"] == pytest.approx(
        account["opening"] + account["added"] - account["drawn"] - account["released"]
    )
    assert found["entries"][-1]["balance"] == account["balance"]
    assert found["ratio"] == pytest.approx(account["balance"] / found["need"]["amount"])
    assert found["occurred_not_drawn"] == []
    assert result.faulty_entries == ()
    text = "\n".join(result.lines())
    assert "Left in the account" in text
    assert "Energised" in text


def test_an_estimate_without_an_account_is_told_how_to_begin():
    """The smaller example keeps none."""
    with pytest.raises(NoAccount, match="no drawdown"):
        drawdown_of_folder(REFIT / "rev-b")
