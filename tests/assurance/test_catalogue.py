"""docs/assurance.md lists what the registry holds."""

from pathlib import Path

from contingency.assurance.catalogue import catalogue
from contingency.assurance.registry import all_checks, all_settings

PAGE = Path(__file__).parents[2] / "docs" / "assurance.md"


def test_the_page_is_made_from_the_checks():
    """Write it anew with: python -m contingency.assurance.catalogue."""
    assert PAGE.read_text(encoding="utf-8") == catalogue()


def test_the_page_names_every_check_and_every_setting():
    """One heading for each slug, one row for each setting."""
    lines = catalogue().splitlines()

    for check in all_checks():
        assert f"### {check.slug}" in lines
    for one in all_settings():
        assert any(line.startswith(f"| `{one.name}` |") for line in lines)
