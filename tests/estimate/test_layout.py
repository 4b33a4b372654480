"""A new estimate folder: all of it or nothing, and it can be read as it is."""

from pathlib import Path

import pytest

from contingency.errors import ContingencyError
from contingency.estimate import layout
from contingency.estimate.layout import STARTER, lay_out
from contingency.estimate.reading import read_estimate


def test_the_new_folder_reads_without_an_error(tmp_path):
    """It shows packages, systemic risks, events and causes at work."""
    lay_out(tmp_path / "rev-a")

    estimate = read_estimate(tmp_path / "rev-a")

    assert estimate.base > 1e6
    assert len(estimate.packages) == 6
    assert estimate.systemic
    assert {event.kind for event in estimate.events} == {"threat", "opportunity"}
    assert {event.use for event in estimate.events} == {"before", "after"}
    assert any(package.loads for package in estimate.packages)
    assert all(package.evidence.is_complete for package in estimate.packages)


def test_every_file_is_commented(tmp_path):
    """A newcomer reads in the file what the file is for."""
    files = lay_out(tmp_path / "rev-a")

    assert [file.name for file in files] == list(STARTER)
    assert sorted(p.name for p in (tmp_path / "rev-a").iterdir()) == sorted(STARTER)
    for file in files:
        assert file.read_text(encoding="utf-8").startswith("# ")


def test_an_empty_folder_is_filled(tmp_path):
    """`contingency start .` in a fresh folder."""
    folder = tmp_path / "rev-a"
    folder.mkdir()

    lay_out(folder)

    assert sorted(p.name for p in folder.iterdir()) == sorted(STARTER)


@pytest.mark.parametrize("what", ["file", "folder with a file", "link to nothing"])
def test_nothing_is_overwritten(what, tmp_path):
    """Whatever lies there stays as it is."""
    place = tmp_path / "rev-a"
    if what == "file":
        place.write_text("mine", encoding="utf-8")
    elif what == "link to nothing":
        place.symlink_to(tmp_path / "nothing")
    else:
        place.mkdir()
        (place / "packages.csv").write_text("mine", encoding="utf-8")
    before = sorted(tmp_path.rglob("*"))

    with pytest.raises(ContingencyError) as caught:
        lay_out(place)

    assert caught.value.slug == "folder-in-use"
    assert sorted(tmp_path.rglob("*")) == before


def test_the_folder_above_must_be_there(tmp_path):
    """A slip in the path makes no chain of new folders."""
    with pytest.raises(ContingencyError) as caught:
        lay_out(tmp_path / "no" / "such" / "place")

    assert caught.value.slug == "folder-not-made"
    assert list(tmp_path.iterdir()) == []


@pytest.mark.parametrize("is_there", [True, False], ids=["empty folder", "new folder"])
@pytest.mark.parametrize("calls", range(8))
def test_a_full_disk_leaves_no_half_of_a_folder(calls, is_there, tmp_path, monkeypatch):
    """Every write and every move may be the one that fails."""
    folder = tmp_path / "rev-a"
    if is_there:
        folder.mkdir()
    left = [calls]

    def counted(action):
        def act(path, *arguments):
            if left[0] == 0:
                raise OSError(28, "No space left on device")
            left[0] -= 1
            return action(path, *arguments)

        return act

    monkeypatch.setattr(Path, "write_bytes", counted(Path.write_bytes))
    monkeypatch.setattr(Path, "rename", counted(Path.rename))
    refused = None
    try:
        lay_out(folder)
    except ContingencyError as error:
        refused = error

    if refused is None:
        assert sorted(p.name for p in folder.iterdir()) == sorted(STARTER)
        return
    assert refused.slug == "folder-not-made"
    assert "no space left" in refused.found
    assert [p for p in tmp_path.rglob("*") if p != folder] == []
    assert folder.exists() == is_there


def test_the_files_lie_in_the_package():
    """An installed package has them too."""
    starter = Path(layout.__file__).parent / "starter"

    assert sorted(path.name for path in starter.iterdir()) == sorted(STARTER)
