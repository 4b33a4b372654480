"""What an engineer waits for at the command line.

python -m pytest tests/benchmarks/test_commands.py -m benchmark -s
"""

import subprocess
import sys
import time
from pathlib import Path
from statistics import median

import pytest

pytestmark = pytest.mark.benchmark

ROOT = Path(__file__).parents[2]
LARGER_EXAMPLE = ROOT / "example_estimates" / "island-power-link" / "rev-c"
START = "import sys; from contingency.cli import main; sys.exit(main(sys.argv[1:]))"


@pytest.mark.parametrize(
    ("command", "rounds"),
    [(["--help"], 9), (["check", "ESTIMATE"], 5), (["report", "ESTIMATE"], 3)],
    ids=lambda value: value[0] if isinstance(value, list) else "",
)
def test_seconds_of_a_command(command, rounds, tmp_path, capsys):
    """Wall time of the whole process, median of some rounds."""
    words = [str(LARGER_EXAMPLE) if word == "ESTIMATE" else word for word in command]
    if command[0] == "report":
        words += ["--out", str(tmp_path / "out")]
    seconds = []
    for _ in range(rounds):
        start = time.perf_counter()
        done = subprocess.run(
            [sys.executable, "-c", START, *words],
            cwd=ROOT,
            capture_output=True,
            check=False,
        )
        seconds.append(time.perf_counter() - start)
        assert done.returncode in {0, 1}, done.stderr.decode()
    with capsys.disabled():
        print(f"\n  contingency {command[0]:<8}{median(seconds):6.2f} s", end="")
