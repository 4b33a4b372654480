"""The page of commands and the command line say the same."""

import argparse
import re
import shlex
from pathlib import Path

import pytest

from contingency import cli, publish

PAGE = (Path(__file__).parents[1] / "docs" / "commands.md").read_text(encoding="utf-8")
SHARED = "What every command takes"


def commands() -> dict[str, argparse.ArgumentParser]:
    """Every command of the parser by its name."""
    found = next(
        action
        for action in cli.make_parser()._actions
        if isinstance(action, argparse._SubParsersAction)
    )
    return dict(found.choices)


def sections() -> dict[str, str]:
    """Text of the page by its headings of the second level."""
    parts = re.split(r"^## (.+)\n", PAGE, flags=re.MULTILINE)
    return dict(zip(parts[1::2], parts[2::2], strict=True))


def rows(section: str) -> dict[str, str]:
    """What stands in the first column of a table, with the second."""
    return dict(re.findall(r"^\| `([^`]+)` \| (.+) \|$", section, re.MULTILINE))


def spelled(action: argparse.Action) -> str:
    """An argument or option as the page writes it."""
    if not action.option_strings:
        return str(action.metavar)
    name = action.option_strings[-1]
    return name if action.nargs == 0 else f"{name} {action.metavar}"


def test_every_command_has_a_section_and_every_section_a_command():
    """In both directions, in the order of the parser."""
    headings = [title for title in sections() if title.startswith("contingency ")]

    assert headings == [f"contingency {name}" for name in commands()]


@pytest.mark.parametrize("name", commands())
def test_every_option_is_on_the_page(name):
    """The table of a command and the shared table hold its options, and no other."""
    page = sections()
    own = set(rows(page[f"contingency {name}"]))
    shared = set(rows(page[SHARED]))
    taken = {
        spelled(action)
        for action in commands()[name]._actions
        if not isinstance(action, argparse._HelpAction)
    }

    assert own & shared == set()
    assert own | shared == taken


@pytest.mark.parametrize("name", commands())
def test_the_example_of_a_command_is_the_one_of_its_help(name):
    """And it parses."""
    example = re.search(
        r"^Example: `(.+)`$", sections()[f"contingency {name}"], re.MULTILINE
    ).group(1)

    assert commands()[name].epilog == f"Example: {example}"
    assert cli.make_parser().parse_args(shlex.split(example)[1:]).command == name


def test_the_exit_statuses_of_the_page_are_those_of_the_code():
    """Three have a name in the code; the fourth is the shell's own for an interrupt."""
    numbers = re.findall(r"^\| (\d+) \|", sections()["Exit status"], re.MULTILINE)

    assert [int(n) for n in numbers] == [cli.DONE, cli.ATTENTION, cli.WRONG, 130]


def test_the_page_names_every_file_that_a_report_writes():
    """Files in the section on `report` are those of contingency/publish.py."""
    named = re.findall(
        r"`([\w-]+\.(?:pdf|json|csv))`", sections()["contingency report"]
    )

    assert set(named) == {
        publish.REPORT,
        publish.RESULTS,
        "allocation.csv",
        "percentiles.csv",
        "drivers.csv",
    }
