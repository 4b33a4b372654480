"""docs/inputs.md lists every column and every key that the reader knows, no other."""

import csv
import io
import re
from pathlib import Path

import pytest

from contingency.estimate.evidence import COLUMNS as EVIDENCE
from contingency.estimate.folder import LARGEST_EVIDENCE, LARGEST_READ
from contingency.estimate.nouns import ShapeName
from contingency.estimate.ranges import NEEDED
from contingency.estimate.ratings import FILE as RATINGS
from contingency.estimate.ratings import RATING_KEYS, RATING_REQUIRED
from contingency.estimate.reading import LAYOUTS, read_estimate
from contingency.estimate.settings import (
    KEYS,
    LEAST_BY_DEFAULT,
    LEAST_TRIALS,
    MOST_BY_DEFAULT,
    MOST_TRIALS,
    REQUIRED,
    TOLERANCE_BY_DEFAULT,
)
from tests.estimate.good_folder import write_good

PAGE = (Path(__file__).parents[1] / "docs" / "inputs.md").read_text("utf-8")
FIRST_CELL = re.compile(r"^\| (`[^|]+`) \| (.*) \|$", re.MULTILINE)


def section(heading: str) -> str:
    """The text below a heading, down to the next one of any level."""
    found = re.search(
        rf"^#+ {re.escape(heading)}\n(.*?)(?=^#|\Z)", PAGE, re.MULTILINE | re.DOTALL
    )
    assert found, f"no heading {heading}"
    return found[1]


def rows(text: str) -> list[tuple[str, str]]:
    """Name and last cell of every row of a table; several names make several rows."""
    return [
        (name, rest.split("|")[-1].strip())
        for names, rest in FIRST_CELL.findall(text)
        for name in re.findall(r"`([^`]+)`", names)
    ]


def entries_of(name: str) -> str:
    """The table of the keys of one list within a heading of estimate.toml."""
    heading, _, key = name.partition(".")
    text = section(heading_of(heading))
    if not key:
        return re.split(r"\n(?:Each entry of|Both numbers of) `", text)[0]
    found = re.search(
        rf"(?:Each entry of|Both numbers of) `{key}`.*?\n\n(.*?)(?:\n\n|\Z)",
        text,
        re.DOTALL,
    )
    assert found, f"no table for {name}"
    return found[1]


def heading_of(name: str) -> str:
    """A heading of estimate.toml as the page writes it."""
    return f"[[{name}]]" if name in {"sign_off", "answers"} else f"[{name}]"


@pytest.mark.parametrize("layout", LAYOUTS, ids=lambda layout: layout.file)
def test_the_columns_of_a_table_are_those_of_the_page(layout):
    """Same names, same order."""
    assert [name for name, _ in rows(section(layout.file))] == list(layout.columns)


@pytest.mark.parametrize("layout", LAYOUTS, ids=lambda layout: layout.file)
def test_what_the_page_calls_refused_if_blank_is_required(layout):
    """A required column cannot be blank either."""
    refused = {name for name, last in rows(section(layout.file)) if last == "refused"}

    assert set(layout.required) <= refused


@pytest.mark.parametrize("name", KEYS)
def test_the_keys_under_a_heading_are_those_of_the_page(name):
    """Same names, same order, and the same ones required."""
    listed = rows(entries_of(name))
    required = [key for key, last in listed if last == "required"]

    assert [key for key, _ in listed] == list(KEYS[name])
    if not name.startswith("account"):
        assert required == list(REQUIRED.get(name, ()))


def test_the_page_has_no_heading_of_estimate_toml_that_the_reader_does_not_know():
    """[assurance] is the one whose keys another page lists."""
    headings = re.findall(r"^### \[+(\w+)\]+$", PAGE, re.MULTILINE)

    assert sorted(headings) == sorted({*(k.split(".")[0] for k in KEYS), "assurance"})


def test_the_table_of_shapes_is_the_one_that_the_reader_follows():
    """Which figures a shape reads, and which must be there."""
    shapes = dict(
        re.findall(r"^\| `(\w+)`.*?\| (.*) \|$", section("Ranges"), re.MULTILINE)
    )

    assert set(shapes) == {shape.value for shape in ShapeName}
    for shape, cells in shapes.items():
        ends, likely, outcomes = (cell.strip() for cell in cells.split(" | "))
        needed = NEEDED[ShapeName(shape)]
        assert ends.startswith("needed") == ("low" in needed)
        assert (likely == "blank") == ("likely" not in needed)
        assert likely.startswith("needed") == needed.get("likely", False)
        assert (outcomes == "blank") == ("outcomes" not in needed)


def test_the_columns_of_evidence_are_listed():
    """The four columns that several tables share."""
    assert [name for name, _ in rows(section("Evidence"))] == list(EVIDENCE)


def test_the_files_are_those_that_are_read():
    """The first table names every file that the reader looks for."""
    first = PAGE.split("## How tables are written", maxsplit=1)[0]
    named = set(re.findall(r"[a-z]+\.(?:csv|toml)", first))

    assert named == {
        "estimate.toml",
        *(layout.file for layout in LAYOUTS),
        RATINGS,
    }


def test_the_keys_of_a_rated_model_are_those_of_the_page():
    """Both headings of ratings.toml, and which keys are required."""
    listed = rows(section(RATINGS))

    assert [name for name, _ in listed] == [
        *RATING_KEYS["model"],
        *RATING_KEYS["factors"],
    ]
    assert [name for name, last in listed if last == "required"] == [
        *RATING_REQUIRED["model"],
        *RATING_REQUIRED["factors"],
    ]


def test_limits_and_defaults_are_those_of_the_code():
    """Figures that stand in both places."""
    assert f"at most {LARGEST_READ // 2**20} MB" in PAGE
    assert f"at most {LARGEST_EVIDENCE // 2**20} MB" in PAGE
    assert f"{LEAST_BY_DEFAULT:,} and {MOST_BY_DEFAULT:,}" in PAGE
    assert f"at least {LEAST_TRIALS:,}" in PAGE
    assert f"at most {MOST_TRIALS:,}" in PAGE
    assert f"| {TOLERANCE_BY_DEFAULT} |" in PAGE


@pytest.mark.parametrize("layout", LAYOUTS, ids=lambda layout: layout.file)
def test_the_examples_use_columns_that_exist(layout):
    """The header row of each example, and as many cells in each of its rows."""
    for example in re.findall(r"```csv\n(.*?)```", section(layout.file), re.DOTALL):
        header, *lines = csv.reader(io.StringIO(example))
        assert set(header) <= set(layout.columns)
        assert lines
        assert all(len(line) == len(header) for line in lines)


def test_the_columns_marked_as_refused_are_refused(tmp_path):
    """One blank cell each, in a good folder."""
    from contingency.errors import UnusableEstimate
    from tests.estimate.good_folder import cell

    for layout, row in zip(LAYOUTS, ("P100", "S1", "E1", "steel"), strict=False):
        for name, last in rows(section(layout.file)):
            if last != "refused":
                continue
            folder = write_good(tmp_path / f"{layout.noun}-{name}")
            cell(layout.file, row, **{name: ""})(folder)
            with pytest.raises(UnusableEstimate) as caught:
                read_estimate(folder)
            assert any(
                fault.where.endswith(f", {name}") for fault in caught.value.faults
            )
