"""Figures and words as the report prints them."""

import datetime as dt

import pytest

from contingency.report import wording
from contingency.report.wording import SPACE, Amounts


def spaced(text):
    """Return text with plain spaces, for tests that do not care."""
    return text.replace(SPACE, " ")


@pytest.mark.parametrize(
    ("number", "digits", "words"),
    [
        (0, 0, "0"),
        (-0.4, 0, "0"),
        (-0.5000001, 0, "−1"),
        (1234567.891, 2, "1,234,567.89"),
        (-1e12, 0, "−1,000,000,000,000"),
        (0.0049, 2, "0.00"),
    ],
)
def test_a_figure_has_commas_a_true_minus_and_no_negative_nought(number, digits, words):
    """The same for every figure of the report."""
    assert wording.fixed(number, digits) == words


@pytest.mark.parametrize(
    ("number", "words"), [(0.0, "0"), (-0.2, "0"), (7, "+7"), (-7, "−7")]
)
def test_a_shift_carries_its_sign(number, words):
    """But a shift of nought has none."""
    assert wording.signed(number) == words


@pytest.mark.parametrize(
    ("step", "unit", "cell"),
    [
        (1_000_000, "EUR million", "21"),
        (100_000, "EUR million", "21.4"),
        (250_000, "EUR thousand", "21,500"),
        (10_000, "EUR thousand", "21,380"),
        (1000, "EUR thousand", "21,384"),
        (1, "EUR", "21,384,321"),
        (0.05, "EUR", "21,384,321.25"),
    ],
)
def test_tables_show_steps_and_nothing_finer(step, unit, cell):
    """The unit follows from the rounding that the estimate asks for."""
    amounts = Amounts(currency="EUR", step=step)

    assert spaced(amounts.caption) == unit
    assert amounts.cell(21_384_321.25) == cell


def test_a_sentence_shows_the_amount_in_full():
    """With the currency in front, on one line."""
    amounts = Amounts(currency="EUR", step=1000)

    assert amounts.full(21_384_321.25) == f"EUR{SPACE}21,384,000"
    assert amounts.full(-1_500.0) == f"EUR{SPACE}−2,000"


@pytest.mark.parametrize(
    ("fraction", "words"),
    [
        (0.0, "below 0.1 %"),
        (0.00099, "below 0.1 %"),
        (0.001, "0.1 %"),
        (0.5, "50.0 %"),
        (0.999, "99.9 %"),
        (0.9991, "above 99.9 %"),
        (1.0, "above 99.9 %"),
    ],
)
def test_a_simulated_chance_is_never_nought_or_certain(fraction, words):
    """So many trials cannot show either."""
    assert spaced(wording.chance(fraction)) == words


@pytest.mark.parametrize(
    ("number", "words"),
    [
        (0.3, "0.3"),
        (1 / 3, "0.333333"),
        (3.5, "3.5"),
        (30.0, "30"),
        (0.0, "0"),
        (-2.0, "−2"),
        (1_250_000.0, "1,250,000"),
    ],
)
def test_an_entered_number_keeps_its_figures_and_no_idle_ones(number, words):
    """As a person would write it."""
    assert wording.plain(number) == words


def test_dates_are_in_words_in_every_locale():
    """No month is abbreviated, no figure is padded."""
    assert spaced(wording.date(dt.date(2026, 3, 31))) == "31 March 2026"
    assert spaced(wording.date(dt.date(2026, 12, 1))) == "1 December 2026"


@pytest.mark.parametrize(
    ("largest", "step", "unit", "digits"),
    [
        (2.5e9, 1000, "billion", 2),
        (999e6, 1000, "million", 1),
        (141e6, 1_000_000, "million", 0),
        (12e6, 1000, "million", 2),
        (12e6, 100_000, "million", 1),
        (9_400, 1, "thousand", 2),
        (950, 1, "", 0),
        (3, 0.01, "", 2),
    ],
)
def test_charts_show_three_or_four_figures_but_no_finer_than_the_step(
    largest, step, unit, digits
):
    """A chart is read, not added up."""
    found = wording.chart_unit(largest, step)

    assert (found.word, found.digits) == (unit, digits)


def test_texts_are_cut_at_a_word():
    """And only if they are too long; white space of files is not kept."""
    assert wording.clipped("one  two\nthree", 13) == "one two three"
    assert wording.clipped("one two three", 12) == "one two…"
    assert wording.clipped("x" * 50, 10) == "x" * 9 + "…"
    assert len(wording.clipped("word " * 50, 40)) <= 40


@pytest.mark.parametrize(
    ("text", "words"),
    [("", ""), ("a b", "A b."), ("Done!", "Done!"), ("ends here. ", "Ends here.")],
)
def test_a_sentence_has_a_capital_and_an_end(text, words):
    """Whatever the cell of a file holds."""
    assert wording.sentence(text) == words


def test_counted_nouns():
    """One is one, everything else is many."""
    assert spaced(wording.plural(1, "package")) == "1 package"
    assert spaced(wording.plural(1200, "entry", "entries")) == "1,200 entries"


def test_fingerprints_are_set_in_groups():
    """Whole in the record, twelve characters in the foot of a page."""
    digest = "0123456789abcdef" * 4

    assert spaced(wording.short_fingerprint(digest)) == "0123 4567 89ab"
    assert wording.grouped_fingerprint(digest).replace(" ", "") == digest
