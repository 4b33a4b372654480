"""The fingerprint: any figure changes it, no way of writing the files does."""

import csv
import io
import random
import re
import subprocess
import sys
from pathlib import Path

import pytest
from hypothesis import HealthCheck, given, settings
from hypothesis import strategies as st

from contingency.errors import UnusableEstimate
from contingency.estimate.fingerprint import canonical_form
from contingency.estimate.reading import read_estimate
from tests.estimate.good_folder import (
    ESTIMATE,
    EVIDENCE,
    TABLES,
    content,
    correlations,
    package,
    setting,
    swap,
    with_line_ends,
    with_mark,
    with_semicolons,
    write_good,
    write_table,
)

QUIET = settings(
    max_examples=25,
    deadline=None,
    suppress_health_check=[HealthCheck.function_scoped_fixture],
)


@pytest.fixture
def folder(tmp_path):
    """A good estimate folder."""
    return write_good(tmp_path / "estimate")


@pytest.fixture(scope="module")
def good(tmp_path_factory):
    """The fingerprint of the good folder."""
    return read_estimate(
        write_good(tmp_path_factory.mktemp("good") / "estimate")
    ).fingerprint


def test_it_is_a_sha_256(good):
    """Sixty-four hexadecimal digits."""
    assert re.fullmatch(r"[0-9a-f]{64}", good)


def test_it_is_the_same_in_a_new_process(folder, good):
    """Nothing of a process's own order is in it."""
    script = (
        "import sys; from contingency.estimate.reading import read_estimate;"
        "print(read_estimate(sys.argv[1]).fingerprint)"
    )
    for seed in ("1", "2"):
        done = subprocess.run(
            [sys.executable, "-c", script, str(folder)],
            capture_output=True,
            text=True,
            check=True,
            env={"PYTHONHASHSEED": seed},
        )
        assert done.stdout.strip() == good


@QUIET
@given(
    seed=st.integers(0, 2**32),
    semicolons=st.booleans(),
    mark=st.booleans(),
    end=st.sampled_from(["\n", "\r\n", "\r"]),
    quoting=st.sampled_from([csv.QUOTE_MINIMAL, csv.QUOTE_ALL]),
)
def test_order_and_dialect_change_nothing(
    seed, semicolons, mark, end, quoting, folder, good
):
    """Rows and columns in any order, any separator, line end, quotes and mark."""
    shuffled = random.Random(seed)  # noqa: S311  (no secret is drawn)
    for file, rows in TABLES.items():
        columns = list(dict.fromkeys(column for row in rows for column in row))
        shuffled.shuffle(columns)
        text = io.StringIO()
        table = csv.DictWriter(
            text,
            columns,
            restval="",
            delimiter=";" if semicolons else ",",
            lineterminator=end,
            quoting=quoting,
        )
        table.writeheader()
        table.writerows(shuffled.sample(rows, len(rows)))
        body = text.getvalue().encode("utf-8")
        (folder / file).write_bytes(b"\xef\xbb\xbf" + body if mark else body)

    assert read_estimate(folder).fingerprint == good


@pytest.mark.parametrize(
    "edit",
    [
        with_mark("estimate.toml"),
        with_line_ends("estimate.toml", "\r\n"),
        with_semicolons("events.csv"),
        setting("# An estimate made up for tests.", "# Another comment."),
        setting("seed = 7", "seed = 0x7"),
        setting("rounding = 1000", "rounding = 1_000.0"),
        swap("packages.csv", "1_250_000", "1250000.0"),
        swap("packages.csv", "90%", "90.0 %"),
        swap("packages.csv", "95%:0.3; 100%:50%", "95%:0.3;100%: 50%"),
        swap("packages.csv", "steel:0.6; site:-0.3", "site:-0.30;steel:0.6;"),
        swap("systemic.csv", "Works; P310", "P310;Works"),
        swap("events.csv", "P200:60%; P310:40%", "P310:40%; P200:60%"),
        swap("packages.csv", "P400,Permit", "# off\n\nP400,Permit"),
        content("notes.txt", "not read"),
    ],
    ids=range(14),
)
def test_what_means_the_same_has_the_same(edit, folder, good):
    """Spacing, comments, grouping of digits, order within a cell."""
    edit(folder)

    assert read_estimate(folder).fingerprint == good


def figures() -> list[tuple[str, int, int]]:
    """Every digit of the good folder that is no part of a name: file and place."""
    found = []
    texts = {"estimate.toml": ESTIMATE}
    for file, rows in TABLES.items():
        text = io.StringIO()
        columns = list(dict.fromkeys(column for row in rows for column in row))
        table = csv.DictWriter(text, columns, restval="", lineterminator="\n")
        table.writeheader()
        table.writerows(rows)
        texts[file] = text.getvalue()
    for file, text in texts.items():
        matches = re.finditer(r"(?<![A-Za-z0-9.])[0-9][0-9._]*", text)
        found += [(file, match.start(), match.end()) for match in matches]
    return found


def test_any_figure_changes_it(folder, good):
    """Change the last digit of one figure after another."""
    unread, unchanged = [], []
    for file, start, end in figures():
        text = (folder / file).read_text(encoding="utf-8")
        before = text[start:end]
        last = before.rstrip("._")
        changed = last[:-1] + str((int(last[-1]) + 1) % 10) + before[len(last) :]
        (folder / file).write_text(text[:start] + changed + text[end:], "utf-8")
        try:
            if read_estimate(folder).fingerprint == good:
                unchanged.append((file, before))
        except UnusableEstimate:
            unread.append((file, before))
        (folder / file).write_text(text, encoding="utf-8")

    assert unchanged == []
    # Some changes break a rule, such as a probability that no longer fits.
    assert len(figures()) - len(unread) >= 90, unread


@pytest.mark.parametrize(
    "edit",
    [
        content("hours.csv", EVIDENCE["hours.csv"] + b"C,1\n"),
        package("P400", name="Permits"),
        package("P200", basis="Something"),
        package("P100", low="185000"),
        package("P100", likely="200000"),
        package("P310", group=""),
        setting('name = "A. Person"', 'name = "B. Person"'),
        setting('ends = "P10-P90"', 'ends = "P05-P95"'),
        setting("some_switch = true", "some_switch = false"),
        swap("causes.csv", "One hill", "One valley"),
        swap("prices.csv", "Metal work", "Metal works"),
        swap("packages.csv", "early,wages", "early,metal"),
        setting("class = 3", "class = 3\nfinancial_year_starts = 4"),
        correlations(("P100", "P200", "0.3")),
    ],
    ids=range(14),
)
def test_any_word_and_any_evidence_changes_it(edit, folder, good):
    """Names, bases, the way a figure is given, files that are named."""
    edit(folder)

    assert read_estimate(folder).fingerprint != good


def test_ends_that_are_not_stated_differ_from_limits(folder):
    """The one stops the sign-off, the other does not."""
    package("P500", ends="P10-P90")(folder)
    setting('ends = "P10-P90"', 'ends = "limits"')(folder)
    stated = read_estimate(folder).fingerprint
    setting('ends = "limits"\n', "")(folder)

    assert read_estimate(folder).fingerprint != stated


def test_the_order_of_a_pair_says_nothing(folder):
    """The correlation of A with B is that of B with A."""
    correlations(("P100", "P200", "0.3"), ("P210", "P200", "0.1"))(folder)
    before = read_estimate(folder).fingerprint
    correlations(("P200", "P210", "0.1"), ("P200", "P100", "0.3"))(write_good(folder))

    assert read_estimate(folder).fingerprint == before


def test_the_canonical_form_holds_no_lines_and_no_bytes(folder):
    """A comment at the head of a file moves all lines and changes nothing."""
    form = str(canonical_form(read_estimate(folder)))

    assert "'line'" not in form
    assert "sources" not in form


def test_a_blank_column_says_nothing(folder, good):
    """A column that a later version adds leaves old fingerprints alone."""
    rows = [
        {key: value for key, value in row.items() if value}
        for row in TABLES["events.csv"]
    ]
    for row in rows:
        row["after_probability"] = ""
    write_table(folder / "events.csv", rows)

    assert read_estimate(folder).fingerprint == good


def test_an_estimate_without_prices_keeps_the_fingerprint_it_had():
    """Computed before price series and financial years were read."""
    example = Path(__file__).parents[2] / "example_estimates" / "buoy-tender-refit"

    assert read_estimate(example / "rev-a").fingerprint == (
        "9ecc407f949f5abc5762a6d4961ac63dde3b949852bffd0e1693bec17b76283a"
    )
