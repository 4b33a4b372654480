"""Whatever a file holds, reading ends with an estimate or with an input error."""

import pytest
from hypothesis import HealthCheck, given, settings
from hypothesis import strategies as st

from contingency.errors import UnusableEstimate
from contingency.estimate.nouns import Estimate
from contingency.estimate.reading import LAYOUTS, read_estimate
from tests.estimate.good_folder import write_good

FILES = ["estimate.toml", *(layout.file for layout in LAYOUTS)]
BOUNDED = settings(
    max_examples=60,
    deadline=None,
    suppress_health_check=[HealthCheck.function_scoped_fixture],
)
WORDS = [
    *(column for layout in LAYOUTS for column in layout.columns),
    *("pert", "points", "discrete", "lognormal", "once", "repeatedly", "after", "all"),
    *("P05=92%", "95%:0.3", "P10-P90", "limits", "P100:60%", "steel:0.5", "E1", "P100"),
    *("=SUM(A1)", "NaN", "1.250.000", "1,250", "-5%", "2026-02-30", "#", "# ", '"'),
    *(",", ";", "\n", "\r\n", "\t", "\0", "﻿", "[", "]]", "{", "}", "=", "'''", '"""'),
]


@pytest.fixture
def folder(tmp_path):
    """A good estimate folder."""
    return write_good(tmp_path / "estimate")


def reads_or_refuses(folder):
    """The estimate or the faults; anything else is a bug of ours."""
    faults = ()
    try:
        estimate = read_estimate(folder)
    except UnusableEstimate as error:
        estimate, faults = None, error.faults

    assert isinstance(estimate, Estimate) != bool(faults)
    assert all(fault.where and fault.found for fault in faults)


@BOUNDED
@given(file=st.sampled_from(FILES), words=st.lists(st.sampled_from(WORDS), max_size=30))
def test_words_in_disorder(file, words, folder):
    """Pieces of real files in any order."""
    write_good(folder)
    (folder / file).write_text("".join(words), encoding="utf-8", newline="")

    reads_or_refuses(folder)


@BOUNDED
@given(file=st.sampled_from(FILES), content=st.binary(max_size=200))
def test_any_bytes(file, content, folder):
    """Pictures, archives, other encodings."""
    write_good(folder)
    (folder / file).write_bytes(content)

    reads_or_refuses(folder)


@BOUNDED
@given(
    file=st.sampled_from(FILES[:5]),
    place=st.floats(0, 1),
    length=st.integers(0, 12),
    piece=st.sampled_from(WORDS) | st.text(max_size=8),
)
def test_a_good_file_with_one_piece_replaced(file, place, length, piece, folder):
    """A slip of the hand anywhere in a good file."""
    write_good(folder)
    text = (folder / file).read_text(encoding="utf-8")
    start = int(place * len(text))
    spoilt = text[:start] + piece + text[start + length :]
    (folder / file).write_text(spoilt, encoding="utf-8", newline="")

    reads_or_refuses(folder)


@BOUNDED
@given(
    file=st.sampled_from(FILES[1:5]),
    row=st.integers(1, 4),
    column=st.integers(0, 40),
    cell=st.sampled_from(WORDS) | st.text(max_size=12) | st.floats().map(str),
)
def test_a_good_table_with_one_cell_replaced(file, row, column, cell, folder):
    """Any text in any cell, quoted as a spreadsheet would."""
    write_good(folder)
    lines = (folder / file).read_text(encoding="utf-8").splitlines()
    line = min(row, len(lines) - 1)
    cells = lines[line].split(",")
    cells[min(column, len(cells) - 1)] = '"' + cell.replace('"', '""') + '"'
    lines[line] = ",".join(cells)
    text = "\n".join(lines).encode("utf-8", "surrogatepass")
    (folder / file).write_bytes(text)

    reads_or_refuses(folder)
