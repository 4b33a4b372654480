"""Following `previous` from revision to revision."""

from pathlib import Path

import pytest

from contingency.errors import NoPrevious, RevisionCircle, UnusableEstimate
from contingency.estimate.chain import carried_chain, previous_of, read_chain
from contingency.estimate.reading import read_estimate, read_held_estimate
from tests.estimate.good_folder import package, setting, write_good

EXAMPLE = Path(__file__).parents[2] / "example_estimates" / "island-power-link"


def test_the_larger_example_has_three_revisions():
    """The oldest first."""
    assert [e.revision for e in read_chain(EXAMPLE / "rev-c")] == ["A", "B", "C"]


def test_a_first_revision_is_a_chain_of_one():
    """Nothing comes before it."""
    assert [e.revision for e in read_chain(EXAMPLE / "rev-a")] == ["A"]


def test_a_previous_that_is_not_there_is_named(tmp_path):
    """With the place of the line that names it."""
    folder = write_good(tmp_path / "rev-b")
    with pytest.raises(NoPrevious) as caught:
        read_chain(folder)
    assert caught.value.where == f"{folder / 'estimate.toml'}, [estimate] previous"
    assert '"../rev-a"' in caught.value.found


def test_a_circle_is_refused(tmp_path):
    """Two revisions that each come after the other."""
    write_good(tmp_path / "rev-b")
    setting('"../rev-a"', '"../rev-b"')(write_good(tmp_path / "rev-a"))
    with pytest.raises(RevisionCircle):
        read_chain(tmp_path / "rev-b")


def test_a_revision_that_cannot_be_read_is_named(tmp_path):
    """The folder of the broken one, not of the one that was asked for."""
    write_good(tmp_path / "rev-b")
    earlier = write_good(tmp_path / "rev-a")
    package("P200", base="-5")(earlier)
    with pytest.raises(UnusableEstimate) as caught:
        read_chain(tmp_path / "rev-b")
    assert "rev-a" in caught.value.where


# --------------------------------------------------------------------------------------
# Earlier revisions travel with an estimate


def test_the_files_of_all_earlier_revisions_travel_along():
    """Under names that say how far back they lie."""
    names = [source.name for source in read_estimate(EXAMPLE / "rev-c").sources]

    assert "packages.csv" in names
    assert "earlier-1-packages.csv" in names
    assert "earlier-2-packages.csv" in names
    assert names == sorted(names)
    assert [e.revision for e in carried_chain(read_estimate(EXAMPLE / "rev-c"))] == [
        "A",
        "B",
        "C",
    ]


def test_the_revision_before_is_the_one_in_its_folder():
    """With what travels with it in turn; its fingerprint is the same."""
    before = previous_of(read_estimate(EXAMPLE / "rev-c"))
    read = read_estimate(EXAMPLE / "rev-b")

    assert before == read
    assert before.fingerprint == read.fingerprint


def test_a_first_revision_carries_nothing():
    """Nor does one whose previous revision is not there, or is broken."""
    assert previous_of(read_estimate(EXAMPLE / "rev-a")) is None


@pytest.mark.parametrize("state", ["missing", "broken", "circle"])
def test_a_previous_revision_that_cannot_be_read_is_left_out(state, tmp_path):
    """The estimate itself is sound; assurance says what is missing."""
    folder = write_good(tmp_path / "rev-b")
    if state == "broken":
        package("P200", base="-5")(write_good(tmp_path / "rev-a"))
    elif state == "circle":
        setting('"../rev-a"', '"../rev-b"')(write_good(tmp_path / "rev-a"))

    carried = carried_chain(read_estimate(folder))
    assert len(carried) == (2 if state == "circle" else 1)


def test_files_saved_from_a_report_are_read_back_with_their_history(tmp_path):
    """Into one empty folder, as the report says: the chain is the same."""
    estimate = read_estimate(EXAMPLE / "rev-c")
    for source in estimate.sources:
        (tmp_path / source.name).write_bytes(source.content)

    assert read_estimate(tmp_path) == estimate
    held = {source.name: source.content for source in estimate.sources}
    assert read_held_estimate(held, where="a report") == estimate
