"""history.csv and [outside_view] are read as they are meant."""

import pytest

from contingency.errors import UnusableEstimate
from contingency.estimate.history import read_history_file
from contingency.estimate.nouns import ClosedProject, OutsideRule, UpliftPart
from contingency.estimate.reading import read_estimate
from tests.estimate.bad_outside import COLUMNS, outside, projects
from tests.estimate.good_folder import in_turn, write_good


@pytest.fixture
def folder(tmp_path):
    """A good estimate folder."""
    return write_good(tmp_path / "estimate")


def test_an_estimate_without_them_has_no_outside_view(folder):
    """Nothing is made up where nothing is written."""
    estimate = read_estimate(folder)

    assert estimate.history == ()
    assert estimate.outside_rule == OutsideRule()
    assert not estimate.outside_rule.is_comparable


def test_projects_and_declarations_are_read(folder):
    """Percent of the table become fractions; the file travels along."""
    in_turn(
        projects("H1,Old dome,domes,1_000_000,1_150_000,Rock", "H2,,,200,190.5,"),
        outside(
            'stage = "gate 3"\nmoney = "2026 money"\nscope = "as approved"\n'
            'group = "domes"\nsource = "a table"\n'
            "percentiles = { P80 = 32, P50 = 15.5 }\n"
            'uplifts = [ { kind = "plain", share = 70, upper = 24 },'
            ' { kind = "odd", share = 30, upper = 51, managed = 10 } ]'
        ),
    )(folder)
    estimate = read_estimate(folder)
    rule = estimate.outside_rule

    assert estimate.history[0] == ClosedProject(
        id="H1",
        name="Old dome",
        group="domes",
        estimate=1e6,
        final=1.15e6,
        notes="Rock",
        line=2,
    )
    assert estimate.history[1].ratio == pytest.approx(0.9525)
    assert rule.is_comparable
    assert (rule.group, rule.source) == ("domes", "a table")
    assert rule.percentiles == ((50, 0.155), (80, 0.32))
    assert rule.uplifts == (
        UpliftPart(kind="plain", share=0.7, upper=0.24),
        UpliftPart(kind="odd", share=0.3, upper=0.51, managed=0.1),
    )
    assert "history.csv" in {source.name for source in estimate.sources}


def test_the_order_of_projects_is_not_in_the_fingerprint(folder):
    """A figure is."""
    rows = ("H1,,,100,115,", "H2,,,200,190,")
    projects(*rows)(folder)
    one = read_estimate(folder).fingerprint
    projects(*reversed(rows))(folder)
    two = read_estimate(folder).fingerprint
    projects("H1,,,100,116,", rows[1])(folder)

    assert one == two != read_estimate(folder).fingerprint


def test_a_history_is_read_from_a_file_of_any_name(tmp_path):
    """As `contingency calibrate` is given it; faults name that file."""
    path = tmp_path / "closed projects.csv"
    path.write_text(f"{COLUMNS}\nH1,,,100,115,\n", encoding="utf-8")

    assert [p.ratio for p in read_history_file(path)] == [1.15]

    path.write_text(f"{COLUMNS}\nH1,,,100,,\n", encoding="utf-8")
    with pytest.raises(UnusableEstimate) as raised:
        read_history_file(path)
    assert [f.where for f in raised.value.faults] == [
        "closed projects.csv:2, project H1, final"
    ]


def test_a_history_that_is_not_there_is_a_fault_without_a_traceback(tmp_path):
    """With the reason of the operating system."""
    with pytest.raises(UnusableEstimate) as raised:
        read_history_file(tmp_path / "none.csv")

    assert "no such file" in raised.value.faults[0].found
