"""The figures printed on the answer page, against the results inside the report.

The text of the page is read, not its picture: white letters, or a picture over the
text, deceive this check and no reader's eye.  `docs/checking-a-report.md` says so.
"""

from __future__ import annotations

import io
import re
from collections.abc import Sequence
from dataclasses import dataclass
from typing import Any

from contingency.quantities.rounding import round_amount
from contingency.record.apart import Answer
from contingency.report.wording import Amounts, percent

FIRST_PAGES = 12
"""Pages among which the answer page is looked for; a report has it second."""
LONGEST_TEXT = 200_000
"""Characters of one page that are looked at."""


@dataclass(frozen=True, kw_only=True, slots=True)
class PrintedFigure:
    """One figure as the answer page must show it."""

    figure: str
    """What it is."""
    words: str
    """As it is printed."""


@dataclass(frozen=True, kw_only=True, slots=True)
class PrintedCheck:
    """How the answer page compares with the results."""

    page: int
    """From 1; 0 if no page shows the answer."""
    figures: tuple[PrintedFigure, ...]
    """What it must show."""
    missing: tuple[PrintedFigure, ...]
    """What it does not show."""

    @property
    def holds(self) -> bool:
        """Whether every figure stands on the page."""
        return not self.missing


def figures_to_print(
    results: dict[str, Any], *, currency: str, step: float
) -> tuple[PrintedFigure, ...]:
    """Return the figures of the answer page, worded as the report words them.

    Parameters
    ----------
    results : dict
        The results inside the report; price-date money.
    currency : str
        Of the estimate.
    step : float
        Amounts are printed in multiples of this.
    """
    amounts = Amounts(currency=currency, step=step)
    target = results["target"]
    base = round_amount(results["base"], step)
    contingency = round_amount(target["contingency"], step)
    low, high = target["interval"]
    figures = [
        ("level", str(target["level"])),
        ("contingency", amounts.full(contingency)),
        ("base", amounts.full(base)),
        ("request", amounts.full(base + contingency)),
        ("percent of the base", percent(target["percent_of_base"] / 100, 1)),
        ("95 % interval", f"{amounts.cell(low)} to {amounts.cell(high)}"),
    ]
    for level in results["levels"][:6]:
        amount = round_amount(level["contingency"], step)
        figures += [
            (f"{level['level']} contingency", amounts.cell(amount)),
            (f"{level['level']} total", amounts.cell(base + amount)),
        ]
    return tuple(PrintedFigure(figure=name, words=words) for name, words in figures)


def check_printed(
    pages: Sequence[str], figures: Sequence[PrintedFigure]
) -> PrintedCheck:
    """Return how the page that shows most of the figures compares with them."""
    best, missing = 0, tuple(figures)
    for number, text in enumerate(pages, start=1):
        plain = _plain(text)
        absent = tuple(one for one in figures if not _shows(plain, one.words))
        if len(absent) < len(missing):
            best, missing = number, absent
    return PrintedCheck(page=best, figures=tuple(figures), missing=missing)


def pages_apart(arguments: dict[str, Any], blobs: list[bytes]) -> Answer:
    """Return the text of the first pages, as a task of `contingency.record.apart`."""
    del arguments
    from pypdf import PdfReader

    reader = PdfReader(io.BytesIO(blobs[0]))
    count = min(len(reader.pages), FIRST_PAGES)
    texts = [reader.pages[i].extract_text()[:LONGEST_TEXT] for i in range(count)]
    return {"pages": texts}, []


def _plain(text: str) -> str:
    """Return text with every kind and number of spaces as one space."""
    return " ".join(text.replace("\N{SOFT HYPHEN}", "").split())


def _shows(text: str, words: str) -> bool:
    """Whether the words stand in the text as whole figures."""
    pattern = rf"(?<![\w.,\N{{MINUS SIGN}}]){re.escape(_plain(words))}(?!\w|[.,]\d)"
    return bool(re.search(pattern, text))
