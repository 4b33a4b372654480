"""Every error is documented, and every documented error exists.

``docs/errors.md`` has one heading for each slug, with an example in the form in which
the command line prints it.  Examples of faults of an estimate folder are messages
that a bad input of ``tests/estimate/bad_inputs.py`` really gives.
"""

import inspect
import re
from pathlib import Path

import pytest

import contingency
from contingency.errors import ContingencyError, Fault, InputError, UnusableEstimate
from contingency.estimate import faults
from contingency.estimate.layout import lay_out
from contingency.estimate.reading import read_estimate
from tests.estimate.bad_inputs import every_case
from tests.estimate.good_folder import write_good

DOCUMENT = Path(__file__).parents[1] / "docs" / "errors.md"
ENTRY = re.compile(
    r"^### (?P<slug>[a-z0-9-]+)\n\n```text\n(?P<example>.*?)\n```\n\n(?P<cure>\S.*?)\n"
    r"(?=\n#|\Z)",
    re.MULTILINE | re.DOTALL,
)
LAYOUT = re.compile(
    r"(?P<where>[^\n]+)\n  found   (?P<found>[^\n]+)\n  rule    (?P<rule>[^\n]+)\n"
    r"  do      (?P<remedy>[^\n]+)\n  see     docs/errors\.md#(?P<slug>[a-z0-9-]+)"
)
OTHERS_WORDS = {"toml-syntax"}
"""Faults whose reason is given in the words of Python's own TOML reader."""


def kinds(base: type[ContingencyError] = ContingencyError):
    """All error classes that stand for one kind of error: those without kinds below."""
    below = base.__subclasses__()
    if not below:
        yield base
    for kind in below:
        yield from kinds(kind)


KINDS = sorted(
    {kind for kind in kinds() if kind.__module__.startswith("contingency.")},
    key=lambda kind: kind.slug,
)
ENTRIES = {
    match["slug"]: match for match in ENTRY.finditer(DOCUMENT.read_text("utf-8"))
}


def each_kind(function):
    """Run a test once for every kind of error."""
    return pytest.mark.parametrize("kind", KINDS, ids=lambda kind: kind.slug)(function)


def test_every_error_is_in_the_document_and_the_document_has_no_other():
    """One heading for each slug, and every heading in the same form."""
    headings = re.findall(r"^### (.+)$", DOCUMENT.read_text("utf-8"), re.MULTILINE)

    assert sorted(headings) == sorted(kind.slug for kind in KINDS)
    assert sorted(headings) == sorted(ENTRIES)


def test_no_two_errors_have_one_slug():
    """A slug leads to one heading."""
    slugs = [kind.slug for kind in KINDS]

    assert len(slugs) == len(set(slugs))


@each_kind
def test_a_slug_is_words_with_hyphens_and_its_class_says_what_it_is(kind):
    """Readable in an address, and explained where it is defined."""
    assert re.fullmatch(r"[a-z0-9]+(-[a-z0-9]+)+", kind.slug)
    assert inspect.getdoc(kind)
    assert "slug" in vars(kind)


@each_kind
def test_each_example_is_laid_out_as_the_command_line_prints_it(kind):
    """Four parts and the way here, in that order; then the cure."""
    entry = ENTRIES[kind.slug]
    parts = LAYOUT.fullmatch(entry["example"])

    assert parts is not None
    assert parts["slug"] == kind.slug
    assert entry["cure"].rstrip().endswith((".", ".*"))


@each_kind
def test_the_rule_in_the_document_is_the_rule_of_the_kind(kind):
    """A fault of a folder quotes the law of its kind, unless a narrower one holds."""
    if not issubclass(kind, Fault) or kind.slug in {
        "setting-out-of-range",
        "shape-impossible",
    }:
        return
    parts = LAYOUT.fullmatch(ENTRIES[kind.slug]["example"])

    assert parts["rule"] == kind.law


@pytest.fixture(scope="module")
def messages(tmp_path_factory):
    """Every message of every bad input, the folder called my-estimate."""
    place = tmp_path_factory.mktemp("bad")
    found = set()
    for case in every_case():
        folder = write_good(place / case.name)
        case.edit(folder)
        with pytest.raises(UnusableEstimate) as caught:
            read_estimate(folder)
        for fault in caught.value.faults:
            found.add(fault.laid_out().replace(str(folder), "my-estimate"))
    (place / "full" / "thing").mkdir(parents=True)
    with pytest.raises(InputError) as refused:
        lay_out(place / "full")
    text = refused.value.laid_out()
    found.add(text.replace(str(place / "full"), "my-estimate"))
    with pytest.raises(InputError) as refused:
        lay_out(place / "plans" / "2026" / "my-estimate")
    found.add(refused.value.laid_out().replace(f"{place}/", ""))
    return found


@pytest.mark.parametrize(
    "kind", [k for k in KINDS if issubclass(k, Fault)], ids=lambda kind: kind.slug
)
def test_each_example_of_a_fault_is_a_message_that_was_really_given(kind, messages):
    """The document quotes; it does not remember."""
    example = ENTRIES[kind.slug]["example"]
    if kind.slug in OTHERS_WORDS:
        beginning, _, _ = example.partition(": ")
        assert any(message.startswith(beginning) for message in messages)
    else:
        assert example in messages


def test_the_count_of_problems_is_quoted_as_it_is_given():
    """The last message of every bad folder."""
    error = UnusableEstimate("my-estimate", [Fault.at("a", "b", "c")] * 3)

    assert error.laid_out() == ENTRIES["unusable-estimate"]["example"]


def test_an_error_keeps_its_four_parts_apart():
    """Each can be read alone, and together they make the message."""
    error = faults.RangeOutOfOrder.at("packages.csv:14, package P310", "a.", "c.")

    assert (error.where, error.found) == ("packages.csv:14, package P310", "a.")
    assert error.rule == faults.RangeOutOfOrder.law
    assert error.remedy == "c."
    assert str(error).endswith("[range-out-of-order]")
    assert error.laid_out().splitlines()[-1].endswith("#range-out-of-order")


def test_every_module_of_the_package_raises_errors_of_ours_by_name():
    """No bare base class is raised: its slug would lead nowhere."""
    bases = {"ContingencyError", "InputError", "AnalysisError", "Fault"}
    folder = Path(contingency.__file__).parent
    raised = re.compile(r"raise (\w+)\(")
    found = [
        f"{path.name}: {name}"
        for path in folder.rglob("*.py")
        for name in raised.findall(path.read_text("utf-8"))
        if name in bases
    ]

    assert found == []
    assert raised.findall("raise InputError(where=...)") == ["InputError"]
