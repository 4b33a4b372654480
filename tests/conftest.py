"""The golden fixture; nothing else is global."""

from pathlib import Path

import pytest

GOLDEN = Path(__file__).parent / "golden"


def pytest_addoption(parser):
    """Add the switch that accepts a golden difference."""
    parser.addoption(
        "--accept", action="store_true", help="make the new output the golden one"
    )


@pytest.fixture
def golden(request):
    """Compare text with a golden file; on a mismatch leave the new text beside it."""

    def check(text: str, name: str) -> None:
        __tracebackhide__ = True
        expected = GOLDEN / name
        actual = expected.with_name(expected.stem + ".actual" + expected.suffix)
        if request.config.getoption("--accept"):
            expected.parent.mkdir(exist_ok=True)
            expected.write_text(text, encoding="utf-8")
        if not expected.exists() or expected.read_text(encoding="utf-8") != text:
            actual.parent.mkdir(exist_ok=True)
            actual.write_text(text, encoding="utf-8")
            pytest.fail(
                f"{name} changed; see {actual.name}. If it is right: pytest --accept"
            )
        actual.unlink(missing_ok=True)

    return check
