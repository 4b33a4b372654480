"""What lies in a checkout, and what must not stand in any of its files."""

import re
from pathlib import Path

import pytest

ROOT = Path(__file__).parents[1]

TOP = {
    "README.md",
    "DEVELOPERS.md",
    "pyproject.toml",
    "contingency",
    "report_templates",
    "tests",
    "example_estimates",
    "docs",
}

LEFT_BY_TOOLS = re.compile(
    r"__pycache__|dist|build|draft-.*|.*\.egg-info|.*\.actual\..*"
)
"""Folders and files that git ignores, the drafts of the README's line among them."""

PERSONAL = re.compile(r"(?<![\w.*)])/(?:work|root|home|tmp|Users|private/var)/\w")
"""A path that exists on one machine only."""

REGISTRY = re.compile(r"\b(?:pypi[.]org|pythonhosted[.]org|npmjs[.]org|deb[.]debian)")
"""Where packages come from is the business of each machine's own set-up."""


def is_left_by_a_tool(path: Path) -> bool:
    """Whether a tool made the file and git ignores it."""
    parts = path.relative_to(ROOT).parts
    if parts[0].startswith(".") and parts[0] not in {".ci", ".gitignore"}:
        return True
    return any(LEFT_BY_TOOLS.fullmatch(part) for part in parts)


def texts() -> dict[str, str]:
    """All text files of the checkout, by their path in it."""
    found = {}
    for path in sorted(ROOT.rglob("*")):
        if not path.is_file() or is_left_by_a_tool(path):
            continue
        try:
            found[str(path.relative_to(ROOT))] = path.read_text(encoding="utf-8")
        except UnicodeDecodeError:
            continue  # a picture, a font, or a file that is meant to be unreadable
    return found


def test_the_top_level_is_what_the_developers_guide_says():
    """Nothing new at the top without a decision."""
    here = {
        path.name
        for path in ROOT.iterdir()
        if not path.name.startswith(".") and not is_left_by_a_tool(path)
    }

    assert here == TOP


@pytest.mark.parametrize(
    ("pattern", "why"), [(PERSONAL, "machine path"), (REGISTRY, "registry host")]
)
def test_no_file_names_a_place_outside_the_checkout(pattern, why):
    """Files that name one machine's folders work on that machine only."""
    found = [
        f"{name}: {why} {match.group()}"
        for name, text in texts().items()
        for match in pattern.finditer(text)
    ]

    assert found == []


@pytest.mark.parametrize("folder", ["work", "root", "home", "tmp"])
def test_a_machine_path_would_be_noticed(folder):
    """The pattern above finds what it is there for, and leaves addresses alone."""
    assert PERSONAL.search(f"open('/{folder}/me/estimate')")
    assert not PERSONAL.search(f"example.org/{folder}/me")


SKIPPED = re.compile(r"importorskip|pytest[.]skip|mark[.](?:skip|xfail)|[+]SKIP")


def test_nothing_is_skipped():
    """Neither a test nor an example of a docstring: what cannot run is not a check."""
    found = [
        f"{name}: {match.group()}"
        for name, text in texts().items()
        if name.startswith(("tests/", "contingency/")) and name != "tests/test_tree.py"
        for match in SKIPPED.finditer(text)
    ]

    assert found == []
