"""Following `previous` from revision to revision."""

from pathlib import Path

import pytest

from contingency.errors import NoPrevious, RevisionCircle, UnusableEstimate
from contingency.estimate.chain import read_chain
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
