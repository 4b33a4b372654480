"""The list of published checks in docs/checks.md, and the headers it repeats.

Source, Taken, Precision and Errata: every file of this folder has all four, and
docs/checks.md has one row for each file, made of its header.
"""

import ast
import re
from pathlib import Path

import pytest

HERE = Path(__file__).parent
PAGE = HERE.parents[1] / "docs" / "checks.md"
FILES = sorted(set(HERE.glob("test_*.py")) - {Path(__file__)})

ENTRIES = ("Source", "Taken", "Precision", "Errata")


def header_of(path: Path) -> dict[str, str]:
    """The first line of a file's docstring, and its entries, each on one line."""
    docstring = ast.get_docstring(ast.parse(path.read_text(encoding="utf-8"))) or ""
    subject, *lines = docstring.splitlines()
    found = {"": subject}
    entry = None
    for line in lines:
        start = re.match(rf"({'|'.join(ENTRIES)}) +(?=\S)", line)
        if start:
            entry = start[1]
            found[entry] = line[start.end() :]
        elif entry and line.startswith("   "):
            found[entry] += " " + line.strip()
        else:
            entry = None
    return found


def row_of(path: Path) -> str:
    """The row of docs/checks.md that a file's header asks for."""
    header = header_of(path)
    cells = [header[""].rstrip("."), *(header.get(name, "") for name in ENTRIES[:3])]
    name = path.relative_to(HERE.parents[1]).as_posix()
    return (
        "| " + " | ".join([f"`{name}`", *(c.replace("|", "\\|") for c in cells)]) + " |"
    )


def listed() -> list[str]:
    """The rows of the table in docs/checks.md."""
    lines = PAGE.read_text(encoding="utf-8").splitlines()
    return [line for line in lines if line.startswith("| `tests/published/")]


@pytest.mark.parametrize("path", FILES, ids=lambda p: p.stem)
def test_the_header_is_complete(path):
    """One line on what the numbers are, and four entries, none of them empty."""
    header = header_of(path)

    assert header[""].endswith(".")
    assert [name for name in ENTRIES if not header.get(name)] == []


@pytest.mark.parametrize("path", FILES, ids=lambda p: p.stem)
def test_every_check_is_listed(path):
    """docs/checks.md has the row that the header asks for; if not, it is this one."""
    assert row_of(path) in listed()


def test_every_row_has_its_check():
    """No row without a file, none twice, and in the order of the files."""
    names = [re.match(r"\| `([^`]+)`", row)[1] for row in listed()]

    assert names == [path.relative_to(HERE.parents[1]).as_posix() for path in FILES]
