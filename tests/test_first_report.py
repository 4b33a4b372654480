"""The lesson of docs/first-report.md, run from its first command to its last.

Each block of commands runs in one scratch folder; the block of text after it is
what it printed, to the letter.  Blocks of TOML and CSV stand in the example.  Where
a change of the tool changes what is printed, ``python tests/test_first_report.py``
writes it into the lesson anew; read the difference before it is committed.
"""

import os
import re
import subprocess
import sys
import tempfile
from pathlib import Path

import pytest

ROOT = Path(__file__).parents[1]
LESSON = ROOT / "docs" / "first-report.md"
EXAMPLE = ROOT / "example_estimates" / "buoy-tender-refit" / "rev-a"
BLOCK = re.compile(r"^```(\w+)\n(.*?)^```$", re.MULTILINE | re.DOTALL)


def blocks_of(kinds):
    """The blocks of some kinds, without their fences, in the order of the lesson."""
    found = BLOCK.findall(LESSON.read_text(encoding="utf-8"))
    return [text for kind, text in found if kind in kinds]


def lesson_as_printed(place):
    """The lesson with every block of text as its commands print it in `place`."""
    (place / "example_estimates").symlink_to(ROOT / "example_estimates")
    command = place / "bin" / "contingency"
    command.parent.mkdir()
    command.write_text(f'#!/bin/sh\nexec "{sys.executable}" -m contingency "$@"\n')
    command.chmod(0o755)
    environment = {
        **os.environ,
        "PATH": f"{command.parent}{os.pathsep}{os.environ['PATH']}",
        "PYTHONPATH": str(ROOT),
    }
    printed = ""

    def run(block):
        nonlocal printed
        kind, text = block.groups()
        if kind == "sh":
            assert printed == "", f"the lesson does not show: {printed}"
            printed = subprocess.run(
                ["bash", "-euc", text],
                cwd=place,
                env=environment,
                stdout=subprocess.PIPE,
                stderr=subprocess.STDOUT,
                encoding="utf-8",
                check=True,
            ).stdout
        elif kind == "text":
            text, printed = printed, ""
        return f"```{kind}\n{text}```"

    return BLOCK.sub(run, LESSON.read_text(encoding="utf-8"))


@pytest.mark.slow
def test_every_command_prints_what_the_lesson_says(tmp_path):
    """In order, in one folder, as a reader would do it."""
    assert lesson_as_printed(tmp_path) == LESSON.read_text(encoding="utf-8")
    for draft in ("draft", "what-if"):
        report = tmp_path / draft / "basis-of-contingency.pdf"
        assert report.read_bytes()[:5] == b"%PDF-"


@pytest.mark.parametrize(
    "text", blocks_of({"toml", "csv"}), ids=lambda text: text.split("\n", 1)[0]
)
def test_every_file_shown_is_in_the_example(text):
    """What a reader copies from the page is what the example holds."""
    files = [path.read_text(encoding="utf-8") for path in EXAMPLE.iterdir()]

    assert any(text in file for file in files)


if __name__ == "__main__":
    with tempfile.TemporaryDirectory() as folder:
        lesson = lesson_as_printed(Path(folder))
    LESSON.write_text(lesson, encoding="utf-8")
