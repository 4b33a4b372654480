"""One cell: every way of writing a figure that is read, and none that is guessed."""

import datetime as dt
from decimal import Decimal

import pytest
from hypothesis import given
from hypothesis import strategies as st

from contingency.estimate.cells import (
    Figure,
    read_day,
    read_ends,
    read_entries,
    read_figure,
    read_level,
    read_number,
    read_pairs,
    read_probability,
    read_share,
    read_word,
)
from contingency.estimate.evidence import named_files
from contingency.estimate.fault_list import Problem, listed, nearest, shown, worded
from contingency.estimate.nouns import Ends


@pytest.mark.parametrize(
    ("text", "value"),
    [
        ("1250000", "1250000"),
        ("1_250_000", "1250000"),
        ("1,250,000", "1250000"),
        ("1,250,000.75", "1250000.75"),
        ("1,250", "1250"),
        ("1250000.00", "1250000.00"),
        ("0", "0"),
        ("0.5", "0.5"),
        (".5", "0.5"),
        ("-12.5", "-12.5"),
        ("007", "7"),
    ],
)
def test_amounts_that_are_read(text, value):
    """Plain, grouped by underscores, grouped by commas."""
    assert read_figure(text) == Figure(Decimal(value), is_percent=False, text=text)


@pytest.mark.parametrize(
    "text", ["1,25", "12,50,000", "1,250,00", "0,125", ",5", "1_25", "1,250_000", "5."]
)
def test_amounts_that_are_refused(text):
    """Groups of other sizes than three, mixed signs, a point without digits."""
    assert isinstance(read_figure(text), Problem)


@pytest.mark.parametrize(
    "text", ["١٢٣", "１２", "½", "1e5", "0x10", "--5", "5-", "1 %%"]
)
def test_what_python_would_read_and_an_engineer_would_not_write(text):
    """Only the ten digits, one sign and one point."""
    assert isinstance(read_figure(text), Problem)


@given(st.integers(0, 10**15))
def test_all_groupings_of_one_amount_are_one_amount(amount):
    """Commas and underscores of Python's own formatting are read back."""
    for text in (f"{amount}", f"{amount:,}", f"{amount:_}"):
        figure = read_figure(text)
        assert isinstance(figure, Figure)
        assert figure.value == amount


@given(st.decimals(-(10**6), 10**6, places=4))
def test_a_percent_is_read_exactly(percent):
    """Ten percent is a tenth, not a binary number close to it."""
    figure = read_figure(f"{percent:f}%", signed=True)

    assert isinstance(figure, Figure)
    assert figure.is_percent
    assert figure.value == percent


@given(st.text(max_size=40))
def test_any_text_gives_a_value_or_a_problem(text):
    """No text makes a reader of cells fall over."""
    cell = text.strip()
    for read in (
        read_figure,
        read_number,
        read_probability,
        read_share,
        read_day,
        read_level,
        read_ends,
        read_entries,
        lambda text: read_word(text, ["pert", "fixed"]),
        lambda text: read_pairs(text, ":", "a:b"),
    ):
        assert read(cell) is not None


@pytest.mark.parametrize(
    ("text", "value"),
    [("30%", "0.3"), ("0.3", "0.3"), ("0", "0"), ("1", "1"), ("100 %", "1")],
)
def test_probabilities_that_are_read(text, value):
    """As a fraction or in percent, both ends included."""
    assert read_probability(text) == Decimal(value)


@pytest.mark.parametrize("text", ["30", "1.01", "101%", "-1%", "0,3", "three"])
def test_probabilities_that_are_refused(text):
    """Above, below, or not a figure."""
    assert isinstance(read_probability(text), Problem)


def test_days_are_read_in_one_form_only():
    """Forms that Python's calendar also takes are left out."""
    assert read_day("2026-02-28") == dt.date(2026, 2, 28)
    for text in ("20260228", "2026-W09-6", "2026-2-28", "2026-02-30", "28.02.2026"):
        assert isinstance(read_day(text), Problem)


@pytest.mark.parametrize(
    ("text", "percent"), [("P5", 5), ("P05", 5), ("P80", 80), ("P99", 99), ("P1", 1)]
)
def test_levels_that_are_read(text, percent):
    """One digit or two."""
    assert read_level(text) == percent


@pytest.mark.parametrize("text", ["P0", "P00", "P100", "p80", "80", "P8.5", "P-5"])
def test_levels_that_are_refused(text):
    """Nothing outside 1 to 99, nothing without the letter."""
    assert isinstance(read_level(text), Problem)


def test_ends_are_limits_or_two_rising_percentiles():
    """Any pair will do, equal ones will not."""
    assert read_ends("limits") == Ends()
    assert read_ends("P5-P90") == Ends(low_percent=5, high_percent=90)
    for text in ("Limits", "P90-P10", "P50-P50", "P10–P90", "P10 - P90", "10-90"):
        assert isinstance(read_ends(text), Problem)


def test_lists_may_end_with_a_semicolon():
    """A blank entry elsewhere is a slip."""
    assert read_entries("P100; P200;") == ["P100", "P200"]
    assert read_pairs("a:1; b:2", ":", "") == [("a", "1"), ("b", "2")]
    assert isinstance(read_entries("P100;;P200"), Problem)
    assert isinstance(read_pairs("a:1; b", ":", ""), Problem)


def test_a_file_is_named_up_to_the_end_of_its_name():
    """Within a sentence as well as alone."""
    assert named_files("file:a.csv") == ["a.csv"]
    assert named_files("See (file:a.csv), file:b-2.pdf.") == ["a.csv", "b-2.pdf"]
    assert named_files("profile:x and files:y") == []


def test_cells_are_quoted_on_one_printable_line():
    """Line breaks, escapes and length are taken out of messages."""
    assert shown("two\nlines") == '"two lines"'
    assert shown("\x1b[31mred") == '"\\u001b[31mred"'
    assert len(shown("x" * 1_000)) == 62


def test_amounts_are_worded_as_in_the_report():
    """Millions from one million on; no digit of a difference is lost."""
    assert worded(12_400_000) == "12.4 M"
    assert worded(999_999.5) == "999,999.5"
    assert worded(12_400_001) == "12.400001 M"


def test_lists_of_words_read_as_a_sentence():
    """With commas, and a word before the last."""
    assert listed(["a"]) == "a"
    assert listed(["a", "b", "c"]) == "a, b or c"
    assert listed(["a", "b"], "and") == "a and b"


def test_the_nearest_word_is_one_or_none():
    """Two that are equally near are no suggestion."""
    assert nearest("lognorml", ["normal", "lognormal"]) == "lognormal"
    assert nearest("P900", ["P100", "P200"]) is None
    assert nearest("colour", ["base", "low"]) is None
