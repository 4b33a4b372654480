"""The list of all checks, as docs/assurance.md has it.

A test compares the file with the text made here.  To write it anew::

    python -m contingency.assurance.catalogue > docs/assurance.md
"""

from __future__ import annotations

import sys
from collections.abc import Iterator

from contingency.assurance.declaration import MARKS, Check, InputCheck
from contingency.assurance.registry import SUBJECTS, all_checks
from contingency.assurance.settings import GRADES, Threshold, WordList

_OPENING = """# Checks of assurance

This page is made from the declarations of the checks by
`contingency.assurance.catalogue.catalogue`; a test compares the two.

`contingency check` runs the checks that need only the estimate.
`contingency report` runs all of them and prints every one with its outcome: that a
check was made and passed is part of the defence.

## Severities and answers

| severity | meaning |
|---|---|
| stop | No sign-off is possible while it stands, answered or not. |
| major | Needs a written answer. |
| caution | Is printed among the cautions. |
| note | Is printed with the checks. |

An answer is an entry `[[answers]]` in `estimate.toml`: `check`, `answer`, `by`, `on`.
With `where` it answers one row; without it, the whole finding.
A finding that rests on several rows counts as answered once each of its rows is.
An answer to something that is no longer found is reported by `stale-answers`.

## Thresholds

Each threshold is a setting under `[assurance]` in `estimate.toml`.
Its name and its default are given with the check.
A name that is not listed here is refused.

| grade | meaning |
|---|---|
"""


def catalogue() -> str:
    """Return the page in Markdown, the same text for the same checks."""
    return _OPENING + "\n".join(_lines()) + "\n"


def _lines() -> Iterator[str]:
    for grade, meaning in GRADES.items():
        yield f"| {grade} | {meaning} |"
    yield ""
    yield "Sources carry a mark that says how well they are known:"
    yield "; ".join(f"*{words}*" for words in MARKS.values()) + "."
    yield "Editions move: a reference holds for the year or the edition that it names."
    checks = all_checks()
    yield ""
    yield f"## The {len(checks)} checks in short"
    yield ""
    yield "| check | subject | weakness | severities |"
    yield "|---|---|---|---|"
    for check in checks:
        yield (
            f"| [`{check.slug}`](#{check.slug}) | {check.subject} | {check.title} |"
            f" {', '.join(check.severities)} |"
        )
    for subject in SUBJECTS:
        yield ""
        yield f"## {subject.capitalize()}"
        for check in checks:
            if check.subject == subject:
                yield from _check(check)


def _check(check: Check) -> Iterator[str]:
    yield ""
    yield f"### {check.slug}"
    yield ""
    yield f"**{check.title}.**"
    yield _by_sentence(check.catches)
    yield ""
    yield f"- Looks at: {'the estimate' if _is_input(check) else 'the results'}."
    yield f"- Rule: {_by_sentence(check.rule, '  ')}"
    yield f"- Severity: {', '.join(check.severities)}."
    yield f"- What to do: {_by_sentence(check.todo, '  ')}"
    yield f"- Source: {check.source}."
    if check.thresholds:
        yield ""
        yield "| setting | default | decides | grade |"
        yield "|---|---|---|---|"
        for one in check.thresholds:
            yield f"| `{one.name}` | {_default(one)} | {one.meaning} | {one.grade} |"


def _by_sentence(text: str, indent: str = "") -> str:
    """Return a text with one sentence on each line."""
    return text.replace(". ", f".\n{indent}")


def _is_input(check: Check) -> bool:
    return isinstance(check, InputCheck) or check.subject == "answers"


def _default(one: Threshold | WordList) -> str:
    if isinstance(one, WordList):
        return one.default
    return f"{one.default:g} {one.unit}".strip()


if __name__ == "__main__":
    sys.stdout.write(catalogue())
