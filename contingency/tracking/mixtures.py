"""Total cost of every mixture of two revisions, with common random numbers.

The total is a sum of pieces, and each piece depends on the few families that move it.
Pieces that depend on the same families are summed once for each state of these, so
that a mixture is the sum of some twenty arrays instead of a simulation.
"""

from __future__ import annotations

import math
from collections.abc import Mapping, Sequence
from dataclasses import dataclass, replace
from itertools import compress, product

import numpy as np
from numpy.typing import NDArray

from contingency.estimate.nouns import WorkPackage
from contingency.quantities.draws import BLOCK
from contingency.quantities.percentiles import rank
from contingency.simulation.cost_model import CostModel, build_model
from contingency.tracking.event_pieces import EventPiece, event_pieces
from contingency.tracking.families import SUBSTITUTED, Family
from contingency.tracking.matching import Match
from contingency.tracking.moves import base_moves
from contingency.tracking.package_pieces import On, PackagePiece, Side
from contingency.tracking.scores import Draws

Array = NDArray[np.float64]


@dataclass(frozen=True, kw_only=True)
class Mixtures:
    """Two revisions that can be mixed by family."""

    packages: tuple[PackagePiece, ...]
    events: tuple[EventPiece, ...]
    old: Side
    new: Side
    base_before: float
    base_after: float
    percent: int
    """Level at which contingency is taken: the earlier revision's target."""
    families: tuple[Family, ...]
    """The families that move anything, in published order."""
    grouped: tuple[Grouped, ...]
    """Pieces summed by the families that they depend on."""

    def base(self, on: On) -> float:
        """Return the base of a mixture, money."""
        if on.issuperset(self.families):
            return self.base_after
        return self.base_before + math.fsum(
            amount
            for piece in self.packages
            for family, amount in piece.moves.items()
            if family in on
        )

    def total(self, on: On) -> Array:
        """Return the (n,) total costs of a mixture, money."""
        first, *rest = self.grouped
        total = first.cost(on).copy()
        for group in rest:
            total += group.cost(on)
        return total

    def value(self, on: On) -> Array:
        """Return the contingency of a mixture: of all trials, then of each block.

        (1 + b,) array of money at the level `percent`.
        """
        return contingencies(self.total(on), self.base(on), self.percent)


def contingencies(total: Array, base: float, percent: int) -> Array:
    """Return (1 + b,) contingencies of all trials and of each block, money."""
    blocks = total.reshape(-1, BLOCK)
    place = rank(BLOCK, percent) - 1
    of_blocks = np.partition(blocks, place, axis=1)[:, place]
    return np.concatenate([[level(total, percent)], of_blocks]) - base


def level(total: Array, percent: int) -> float:
    """Return the smallest total that `percent` of the trials do not exceed."""
    place = rank(total.size, percent) - 1
    return float(np.partition(total, place, axis=None)[place])


class Grouped:
    """Pieces that depend on the same families, summed."""

    def __init__(
        self, families: tuple[Family, ...], pieces: list[PackagePiece | EventPiece]
    ) -> None:
        self.families = families
        self._states: dict[On, Array] = {}
        for switches in product((False, True), repeat=len(families)):
            on = frozenset(compress(families, switches))
            total = pieces[0].cost(on).copy()
            for piece in pieces[1:]:
                total += piece.cost(on)
            self._states[on] = total

    def cost(self, on: On) -> Array:
        """Return the (n,) cost of the pieces in one mixture, money."""
        return self._states[on.intersection(self.families)]


def mixtures(match: Match, *, seed: int, blocks: int, percent: int) -> Mixtures:
    """Return two revisions ready to be mixed.

    Parameters
    ----------
    match : Match
        The revisions, the earlier one in money of the later one's price date.
    seed : int
        Of the streams that both draw from.
    blocks : int
        Blocks of 4,096 trials.
    percent : int
        Level at which contingency is taken.
    """
    draws = Draws(seed, blocks)
    models = build_model(match.earlier), build_model(match.later)
    old = Side(match.earlier, models[0], _strangers(models[0], models[1]), draws)
    new = Side(match.later, models[1], _strangers(models[1], models[0]), draws)
    packages = tuple(
        PackagePiece(unit=unit, moves=base_moves(match, unit), old=old, new=new)
        for unit in match.units
    )
    packages = tuple(_settled(piece) for piece in packages)
    events = event_pieces(match, draws)
    pieces: tuple[PackagePiece | EventPiece, ...] = (*packages, *events)
    moved = {family for piece in pieces for family in piece.families}
    return Mixtures(
        packages=packages,
        events=events,
        old=old,
        new=new,
        base_before=match.earlier.base,
        base_after=match.later.base,
        percent=percent,
        families=tuple(f for f in SUBSTITUTED if f in moved),
        grouped=_grouped(pieces),
    )


def _strangers(mine: CostModel, other: CostModel) -> tuple[WorkPackage, ...]:
    """Return packages whose range varies in the other revision only."""
    own = {p.id for p in mine.packages[: mine.varying]}
    return tuple(p for p in other.packages[: other.varying] if p.id not in own)


def _settled(piece: PackagePiece) -> PackagePiece:
    """Return the piece; without moves where a package of no cost comes or goes."""
    unit = piece.unit
    if (unit.before and unit.after) or any(piece.moves.values()):
        return piece
    cost = (unit.after or unit.before)[0].cost.distribution
    if cost.variance > 0.0 or cost.mean != 0.0:
        return piece
    return replace(piece, moves={})


def _grouped(pieces: Sequence[PackagePiece | EventPiece]) -> tuple[Grouped, ...]:
    """Return the pieces summed by the families that they depend on."""
    by_families: dict[On, list[PackagePiece | EventPiece]] = {}
    for piece in pieces:
        by_families.setdefault(piece.families, []).append(piece)
    return tuple(
        Grouped(tuple(f for f in SUBSTITUTED if f in families), together)
        for families, together in by_families.items()
    )


def base_by_family(found: Mixtures) -> Mapping[Family, float]:
    """Return the base change of each family, money."""
    return {
        family: math.fsum(p.moves.get(family, 0.0) for p in found.packages)
        for family in found.families
    }
