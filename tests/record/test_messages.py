"""The examples of docs/errors.md for sign-offs, issues, seals and verification."""

import ast
import inspect
from pathlib import Path

import pytest

from contingency import errors
from contingency.errors import RecordError
from tests.test_errors import ENTRIES, LAYOUT

ROOT = Path(__file__).parents[2]
KINDS = [
    kind
    for _, kind in inspect.getmembers(errors, inspect.isclass)
    if issubclass(kind, RecordError) and kind is not RecordError
]


def rules_in_the_code():
    """For each class the rules that it is raised with; fixed texts only."""
    found = {}
    for path in (ROOT / "contingency").rglob("*.py"):
        for node in ast.walk(ast.parse(path.read_text(encoding="utf-8"))):
            if not isinstance(node, ast.Call) or not isinstance(node.func, ast.Name):
                continue
            for keyword in node.keywords:
                if keyword.arg == "rule" and isinstance(keyword.value, ast.Constant):
                    found.setdefault(node.func.id, set()).add(keyword.value.value)
    return found


RULES = rules_in_the_code()


@pytest.mark.parametrize("kind", KINDS, ids=lambda kind: kind.slug)
def test_the_rule_in_the_document_is_one_that_is_raised(kind):
    """Word for word, so that a reader who searches for it finds it."""
    parts = LAYOUT.fullmatch(ENTRIES[kind.slug]["example"])
    rules = RULES.get(kind.__name__, set())
    if kind is errors.IssueRefused:
        rules = {errors.IssueRefused("a", ["b"]).rule}

    assert parts["rule"] in rules
