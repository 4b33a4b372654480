"""The table of bad inputs: one small edit of a good folder each, and what it must say.

The same table is run through `read_estimate` and through the command line.
"""

from __future__ import annotations

from dataclasses import dataclass

from tests.estimate.good_folder import Edit

FOLDER = "{folder}"
"""Stands for the path of the estimate folder in an expected place."""


@dataclass(frozen=True)
class Expected:
    """One fault as it must be reported."""

    where: str
    slug: str
    found: str


@dataclass(frozen=True)
class Bad:
    """One bad input and all faults that it must give, in file order."""

    name: str
    edit: Edit
    faults: tuple[Expected, ...]


def bad(name: str, edit: Edit, *faults: tuple[str, str, str]) -> Bad:
    """A bad input; each fault is (where, slug, found)."""
    return Bad(name, edit, tuple(Expected(*fault) for fault in faults))


def every_case() -> tuple[Bad, ...]:
    """All bad inputs, in the order of docs/inputs.md."""
    from tests.estimate.bad_cells import CELLS
    from tests.estimate.bad_events import EVENTS
    from tests.estimate.bad_files import FILES
    from tests.estimate.bad_history import HISTORY
    from tests.estimate.bad_links import LINKS
    from tests.estimate.bad_outside import OUTSIDE
    from tests.estimate.bad_prices import PRICES
    from tests.estimate.bad_ranges import RANGES
    from tests.estimate.bad_settings import SETTINGS

    return (
        *FILES,
        *SETTINGS,
        *CELLS,
        *RANGES,
        *LINKS,
        *EVENTS,
        *PRICES,
        *HISTORY,
        *OUTSIDE,
    )
