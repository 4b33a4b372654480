"""The effect of a family, broken down to the rows that moved in it.

The rows of a family are put in one after another in file order, and once more in the
reverse order.  Each pass adds up by itself, so the average of both does; rows that
act alike are treated alike.  For the average over all orders this is done with all
other families as in the earlier and as in the later revision, and the four results are
averaged; what then misses the family's own effect is spread over its rows in
proportion to their size.  In a plain sequence the families before stand as in the
later revision and nothing misses.
"""

from __future__ import annotations

import math
from collections.abc import Callable, Sequence
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from contingency.tracking.event_pieces import EventPiece
from contingency.tracking.families import Family
from contingency.tracking.mixtures import Mixtures, level
from contingency.tracking.moves import figures
from contingency.tracking.package_pieces import On, PackagePiece

Array = NDArray[np.float64]


@dataclass(frozen=True, kw_only=True)
class Row:
    """One row that moved in a family, and what it does to the total."""

    file: str
    """Without its ending: packages, systemic, events."""
    id: str
    name: str
    base: float
    """Its base change in this family, money."""
    delta: Callable[[On, frozenset[str]], Array]
    """(n,) change of the total when it moves, in a mixture of the other families and
    with these rows of the family moved already."""


@dataclass(frozen=True, kw_only=True, slots=True)
class RowEffect:
    """What one row did."""

    file: str
    id: str
    name: str
    base: float
    """Change of the base, money."""
    contingency: float
    """Change of the contingency, money."""


def rows_of(found: Mixtures, family: Family) -> list[Row]:
    """Return the rows that moved in a family, packages first."""
    if family is Family.SYSTEMIC:
        return _systemic_rows(found)
    rows = [
        _package_row(piece, family)
        for piece in found.packages
        if family in piece.families
    ]
    for piece in found.events:
        rows += [
            _event_row(piece, event, family)
            for event, own in piece.family_of.items()
            if own is family
        ]
    return rows


def _package_row(piece: PackagePiece, family: Family) -> Row:
    def delta(on: On, moved: frozenset[str]) -> Array:
        del moved  # packages add up
        return piece.cost(on | {family}) - piece.cost(on - {family})

    return Row(
        file="packages",
        id=piece.unit.key,
        name=piece.unit.name,
        base=piece.moves.get(family, 0.0),
        delta=delta,
    )


def _event_row(piece: EventPiece, event: str, family: Family) -> Row:
    def delta(on: On, moved: frozenset[str]) -> Array:
        later = {
            i
            for i, own in piece.family_of.items()
            if (own in on and own is not family) or i in moved
        }
        return piece.cost_with(frozenset(later | {event})) - piece.cost_with(
            frozenset(later - {event})
        )

    state = piece.after.get(event) or piece.before[event]
    return Row(file="events", id=event, name=state.name, base=0.0, delta=delta)


def _systemic_rows(found: Mixtures) -> list[Row]:
    """Return a row for each systemic risk that is new, gone or other."""
    sides = (found.old.systemic, found.new.systemic)
    names = list(dict.fromkeys((*sides[1].names, *sides[0].names)))
    return [row for name in names if (row := _systemic_row(found, name)) is not None]


def _systemic_row(found: Mixtures, name: str) -> Row | None:
    """Return the row of one systemic risk; None where it did not move."""
    old, new = found.old.systemic, found.new.systemic
    if not _systemic_moved(found, name):
        return None

    def delta(on: On, moved: frozenset[str]) -> Array:
        del moved  # uplifts add up
        total = np.zeros(found.old.draws.trials)
        for piece in found.packages:
            if Family.SYSTEMIC not in piece.families:
                continue
            for package, cost in piece.ranges(on):
                if name in new.acting(package):
                    total += cost * new.uplift(name)
                if name in old.acting(package):
                    total -= cost * old.uplift(name)
        return total

    risk = (new if name in new.names else old).risk(name)
    return Row(file="systemic", id=name, name=risk.name, base=0.0, delta=delta)


def _systemic_moved(found: Mixtures, name: str) -> bool:
    """Whether a systemic risk is new, gone, other, or acts on other packages."""
    old, new = found.old.systemic, found.new.systemic
    if (name in old.names) != (name in new.names):
        return True
    if figures(old.risk(name).uplift) != figures(new.risk(name).uplift):
        return True
    return any(
        (name in old.acting(package)) != (name in new.acting(package))
        for piece in found.packages
        for package in (*piece.unit.before, *piece.unit.after)
    )


def break_down(
    found: Mixtures,
    family: Family,
    effect: float,
    contexts: Sequence[On],
) -> tuple[RowEffect, ...]:
    """Return what each row of a family did; they sum to the family's effect.

    Parameters
    ----------
    effect : float
        Effect of the family on the contingency, money.
    contexts : sequence of sets of families
        Mixtures of the other families in which the rows are put in.
    """
    rows = rows_of(found, family)
    passes = [
        _pass(found, rows, on - {family}, backwards=backwards)
        for on in contexts
        for backwards in (False, True)
    ]
    raw = np.mean(passes, axis=0) if rows else np.zeros(0)
    shares = closed(raw, effect)
    return tuple(
        RowEffect(
            file=row.file,
            id=row.id,
            name=row.name,
            base=row.base,
            contingency=float(share),
        )
        for row, share in zip(rows, shares, strict=True)
    )


def closed(raw: Array, whole: float) -> Array:
    """Return parts that sum to the whole; what misses goes by the parts' size."""
    missing = whole - math.fsum(raw)
    size = np.abs(raw)
    if not size.sum():
        size = np.ones_like(raw)
    return np.asarray(raw + missing * size / size.sum()) if raw.size else raw


def _pass(found: Mixtures, rows: list[Row], on: On, *, backwards: bool) -> list[float]:
    """Return what each row does when they are put in one after another."""
    total, base = found.total(on), found.base(on)
    before = level(total, found.percent) - base
    effect = [0.0] * len(rows)
    moved: frozenset[str] = frozenset()
    order = range(len(rows))
    for place in reversed(order) if backwards else order:
        row = rows[place]
        total += row.delta(on, moved)
        base += row.base
        after = level(total, found.percent) - base
        effect[place] = after - before
        before = after
        if row.file == "events":
            moved |= {row.id}
    return effect
