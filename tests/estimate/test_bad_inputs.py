"""Every bad input is refused whole, at its place, in words, and with status 2."""

import re
import tracemalloc
from pathlib import Path

import pytest

from contingency.cli import WRONG, main
from contingency.errors import (
    MOST_FAULTS_LISTED,
    ContingencyError,
    Fault,
    UnusableEstimate,
)
from contingency.estimate import faults as kinds
from contingency.estimate.reading import read_estimate
from tests.estimate.bad_inputs import FOLDER, every_case
from tests.estimate.good_folder import (
    content,
    event,
    in_turn,
    package,
    setting,
    with_semicolons,
    write_good,
)

CASES = every_case()


def each_case(function):
    """Run a test once for every bad input."""
    return pytest.mark.parametrize("case", CASES, ids=lambda case: case.name)(function)


@pytest.fixture
def folder(tmp_path):
    """A good estimate folder, to be spoilt."""
    return write_good(tmp_path / "estimate")


def faults_of(folder: Path) -> tuple[ContingencyError, ...]:
    """What reading the folder complains about."""
    with pytest.raises(UnusableEstimate) as caught:
        read_estimate(folder)
    return caught.value.faults


def test_the_folder_is_good_before_it_is_spoilt(folder):
    """No case fails for a reason that it did not bring along."""
    assert read_estimate(folder).project == "Hill observatory dome"


def test_there_are_enough_cases_and_no_two_of_one_name():
    """Every kind of fault has its case."""
    names = [case.name for case in CASES]
    slugs = {fault.slug for case in CASES for fault in case.faults}
    of_reading = {
        kind.slug
        for kind in vars(kinds).values()
        if isinstance(kind, type) and issubclass(kind, Fault) and kind is not Fault
    }

    assert len(set(names)) == len(names)
    assert len(names) >= 200
    # These two belong to `contingency start`; see test_layout.py.
    assert of_reading - slugs == {"folder-in-use", "folder-not-made"}


@each_case
def test_a_bad_input_gives_its_faults_and_no_others(case, folder):
    """Place, slug and words of every fault, in file order."""
    case.edit(folder)

    found = faults_of(folder)

    assert [(f.where, f.slug) for f in found] == [
        (expected.where.replace(FOLDER, str(folder)), expected.slug)
        for expected in case.faults
    ]
    for fault, expected in zip(found, case.faults, strict=True):
        assert expected.found in fault.found


@each_case
def test_every_message_has_its_four_parts(case, folder):
    """Where, found, rule and remedy: each a sentence on one printable line."""
    case.edit(folder)

    for fault in faults_of(folder):
        for part in (fault.where, fault.found, fault.rule, fault.remedy):
            assert part.strip() == part
            assert part.isprintable()
        for sentence in (fault.found, fault.rule, fault.remedy):
            assert len(sentence) > 8
            assert sentence.endswith((".", "..."))


@each_case
@pytest.mark.parametrize("command", ["check", "report"])
def test_the_command_line_says_it_and_writes_nothing(
    command, case, folder, tmp_path, monkeypatch, capsys
):
    """Exit status 2, each fault on standard error, no traceback, no file."""
    case.edit(folder)
    monkeypatch.chdir(tmp_path)
    before = everything_in(tmp_path)

    status = main([command, "estimate"])

    printed = capsys.readouterr()
    assert status == WRONG
    assert printed.out == ""
    assert "Traceback" not in printed.err
    assert everything_in(tmp_path) == before
    for expected in case.faults:
        assert f"{expected.where.replace(FOLDER, 'estimate')}\n" in printed.err
        assert f"see     docs/errors.md#{expected.slug}\n" in printed.err
        assert expected.found in printed.err


def everything_in(folder: Path) -> dict[str, int]:
    """Every path below a folder, with the time of its last change."""
    return {
        str(path.relative_to(folder)): path.lstat().st_mtime_ns
        for path in folder.rglob("*")
    }


@pytest.mark.parametrize(
    ("edit", "remedy"),
    [
        (package("P200", base="1.250.000"), "Write 1250000."),
        (package("P200", base="1.250.000,50"), "Write 1250000.50."),
        (package("P200", high="1500000,50"), "Write 1500000.50."),
        (package("P100", high="130,5%"), "Write 130.5%."),
        (package("P100", high="+30%"), "Write 130% if a rise by 30% is meant."),
        (event("E2", probability="30"), "Write 30% or 0.3, if that is meant."),
        (event("E1", frequency="150%"), "Write 1.5."),
        (setting("least = 8192", "least = 10_000"), "Write 8192, the nearest"),
        (setting("least = 8192", "least = 4096"), "Write a least within"),
        (
            setting("least = 8192", "least = 15_000"),
            "Write 16384, the nearest multiple of 4,096.",
        ),
        (setting('target = "P80"', "target = 80"), "Write P80, in quotes."),
        (setting('"EUR"', '"eur"'), "Write EUR."),
        (package("P310", shape="unform"), "Write uniform, if that is meant"),
        (event("E1", packages="P200:60%; P31:40%"), "Write P310, if that is meant."),
    ],
)
def test_the_remedy_says_how_to_write_it(edit, remedy, folder):
    """What can be spelt out is spelt out."""
    edit(folder)

    (fault,) = faults_of(folder)

    assert fault.remedy.startswith(remedy)


def test_an_id_that_could_be_any_of_several_is_no_suggestion(folder):
    """P900 is as near to P100 as to P200."""
    event("E1", packages="P200:60%; P900:40%")(folder)

    (fault,) = faults_of(folder)

    assert fault.remedy == "Write the id of a package."


def test_all_problems_of_all_files_come_in_one_go_and_in_file_order(folder):
    """Settings first, then the tables as docs/inputs.md has them, by line."""
    in_turn(
        event("E2", probability="30"),
        package("P400", base="ten"),
        package("P100", start="5.1.2026", high="+30%"),
        setting("seed = 7", "seed = -7"),
        content("causes.csv", "id,name\nsteel,\nsite,Site\n"),
    )(folder)

    found = [fault.where for fault in faults_of(folder)]

    assert found == [
        "estimate.toml:32, [simulation] seed",
        "packages.csv:2, package P100 Design, high",
        "packages.csv:2, package P100 Design, start",
        "packages.csv:7, package P400 Permit, base",
        "events.csv:3, event E2 Pier on poor rock, probability",
        "causes.csv:2, cause steel, name",
    ]


def test_lines_are_those_of_the_file(folder):
    """Quoted line breaks, comments and blank rows are counted."""
    rows = (
        "# A comment, with commas\n"
        "\n"
        "id,name,base,shape,basis\n"
        'A,First,100,fixed,"two\r\nlines, and\nthree"\n'
        ",,,,\n"
        "# P200,off,1,fixed,\n"
        "B,Second,ten,fixed,\n"
    )
    content("packages.csv", rows)(folder)

    found = faults_of(folder)

    assert found[0].where == "packages.csv:9, package B Second, base"


def test_a_fault_in_one_file_makes_none_in_another(folder):
    """Without packages nobody is told that each event names an unknown one."""
    content("packages.csv", 'id,name,base\nP1,"A,1\n')(folder)

    found = faults_of(folder)

    assert [fault.slug for fault in found] == ["table-syntax"]


def test_a_long_list_is_cut_and_the_rest_counted(folder):
    """The first 200 are listed, and the message says how many there are."""
    rows = "".join(f"Q{i},Thing,-1,fixed\n" for i in range(1_500))
    content("packages.csv", f"id,name,base,shape\n{rows}")(folder)

    with pytest.raises(UnusableEstimate) as caught:
        read_estimate(folder)
    error = caught.value

    assert len(error.faults) == MOST_FAULTS_LISTED
    assert error.count > 1_500
    assert f"{error.count:,} problems" in error.found
    assert "The first 200 are listed." in error.found
    assert error.faults[-1].where.startswith("packages.csv:201,")


def test_an_unreadable_file_is_named(folder, monkeypatch):
    """The operating system refuses; its reason is passed on, no traceback."""
    open_as_usual = Path.open

    def refuse(path, *arguments, **options):
        if path.name == "packages.csv":
            raise PermissionError(13, "Permission denied", str(path))
        return open_as_usual(path, *arguments, **options)

    monkeypatch.setattr(Path, "open", refuse)

    (fault,) = faults_of(folder)

    assert fault.where == "packages.csv"
    assert fault.slug == "file-unreadable"
    assert "permission denied" in fault.found


def test_a_folder_that_cannot_be_listed_is_named(folder, monkeypatch):
    """A folder of somebody else."""

    def refuse(path):
        raise PermissionError(13, "Permission denied", str(path))

    monkeypatch.setattr(Path, "iterdir", refuse)

    (fault,) = faults_of(folder)

    assert fault.slug == "folder-not-found"
    assert "permission denied" in fault.found


def test_a_path_that_no_system_has_is_refused():
    """A NUL in the name of the folder is an input problem, no fault of ours."""
    (fault,) = faults_of(Path("a\0b"))

    assert fault.slug == "folder-not-found"


def test_a_file_of_50_mb_is_not_read_into_memory(folder):
    """The size is looked up, the content left alone."""
    with (folder / "packages.csv").open("ab") as file:
        file.truncate(50 * 2**20)
    tracemalloc.start()
    (fault,) = faults_of(folder)
    _, peak = tracemalloc.get_traced_memory()
    tracemalloc.stop()

    assert fault.slug == "file-too-large"
    assert peak < 2 * 2**20


@pytest.mark.parametrize("figure", ["12,500", "12.500"])
def test_an_amount_that_reads_two_ways_is_refused_with_semicolons_only(figure, folder):
    """12.500 from a country with decimal commas is twelve thousand five hundred."""
    package("P400", base=figure)(folder)
    read_estimate(folder)
    with_semicolons("packages.csv")(folder)

    (fault,) = faults_of(folder)

    assert fault.slug == "amount-unclear"


def test_messages_quote_long_cells_in_part(folder):
    """A message stays a message, whatever was pasted into the cell."""
    package("P400", base="x" * 5_000)(folder)

    (fault,) = faults_of(folder)

    assert len(fault.found) < 100
    assert re.fullmatch(r'"x+…" is no figure\.', fault.found)
