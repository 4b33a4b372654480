"""The cost of a package in a mixture of two revisions, trial by trial.

A range written in percent follows what is still to be spent, base − spent, as it does
in packages.csv.  A range written in money is kept in proportion to the base.  So a
base can be moved without its range, and a range without its base, whatever the way
the range is written.
"""

from __future__ import annotations

from dataclasses import dataclass
from functools import cached_property

import numpy as np
from numpy.typing import NDArray

from contingency.estimate.nouns import CostRange, Estimate, ShapeName, WorkPackage
from contingency.simulation.cost_model import CostModel
from contingency.tracking.families import Family
from contingency.tracking.matching import PackageUnit
from contingency.tracking.moves import Moves, figures
from contingency.tracking.scores import Draws, RangeScores, SystemicFactors

Array = NDArray[np.float64]
On = frozenset[Family]
"""The families that stand as in the later revision; all others as in the earlier."""

MOST_STRETCH = 5.0
"""A range is stretched with its base up to fivefold; beyond that it moves along with
the base by the same amount.  A choice of ours: a range of 100,000 on a base of 1 says
nothing about a base of 100,000."""
_ALIKE = 1e-9


class Side:
    """One revision as a source of draws."""

    def __init__(
        self,
        estimate: Estimate,
        model: CostModel,
        strangers: tuple[WorkPackage, ...],
        draws: Draws,
    ) -> None:
        self.scores = RangeScores(estimate, model, strangers, draws)
        self.systemic = SystemicFactors(estimate, model, draws)
        self.draws = draws
        self._model = model
        self._row = {p.id: i for i, p in enumerate(model.packages)}

    def varies(self, package_id: str) -> bool:
        """Whether the range of a package of this revision has any spread."""
        return self._row[package_id] < self._model.varying

    def cost(self, package_id: str, scores: RangeScores) -> Array:
        """Return the (n,) final costs of a package of this revision, money."""
        row = self._row[package_id]
        if self.varies(package_id):
            score = scores.score(package_id)[None, :]
        else:
            score = np.zeros((1, self.draws.trials))
        out = np.empty_like(score)
        self._model.ranges.read(score, row, out)
        return np.asarray(out[0])


@dataclass(frozen=True, kw_only=True)
class PackagePiece:
    """One unit of packages: its share of the total for every mixture."""

    unit: PackageUnit
    moves: Moves
    old: Side
    new: Side

    @cached_property
    def families(self) -> On:
        """The families that move this piece."""
        found = set(self.moves)
        if self.unit.is_regrouped:
            found.add(Family.STRUCTURE)
        elif self.unit.before and self.unit.after:
            before, after = self.unit.before[0], self.unit.after[0]
            if not same_range(before, after):
                found.add(Family.RANGES)
            moved = (before.spent or 0.0) != (after.spent or 0.0)
            if moved and (follows_rest(before) or follows_rest(after)):
                found.add(Family.ACTUALS)
        packages = (*self.unit.before, *self.unit.after)
        if any(
            self.old.scores.rule(p.id) != self.new.scores.rule(p.id) for p in packages
        ):
            found.add(Family.DEPENDENCE)
        if any(
            self._uplifts(self.old, p) != self._uplifts(self.new, p) for p in packages
        ):
            found.add(Family.SYSTEMIC)
        return frozenset(found)

    @staticmethod
    def _uplifts(side: Side, package: WorkPackage) -> list[tuple[object, ...]]:
        return [
            (name, *figures(side.systemic.risk(name).uplift))
            for name in side.systemic.acting(package)
        ]

    def cost(self, on: On) -> Array:
        """Return the (n,) cost with systemic uplifts in one mixture, money."""
        factor = self.new if Family.SYSTEMIC in on else self.old
        total: Array | float = 0.0
        for package, cost in self.ranges(on):
            total = total + cost * factor.systemic.factor(package)
        if isinstance(total, float):
            return np.zeros(self.old.draws.trials)
        return total

    def ranges(self, on: On) -> list[tuple[WorkPackage, Array]]:
        """Return the packages of one mixture and their (n,) costs without uplifts."""
        scores = (self.new if Family.DEPENDENCE in on else self.old).scores
        base = self._base(on)
        if self.unit.is_regrouped:
            is_new = Family.STRUCTURE in on
            side = self.new if is_new else self.old
            chosen = self.unit.after if is_new else self.unit.before
            whole = self.unit.base_after if is_new else self.unit.base_before
            return [
                (
                    p,
                    _moved(
                        side.cost(p.id, scores),
                        p,
                        p.base * _ratio(base, whole),
                        p.spent,
                    ),
                )
                for p in chosen
            ]
        if not self.unit.before or not self.unit.after:
            return self._lone(on, base, scores)
        return [self._pair(on, base, scores)]

    def _base(self, on: On) -> float:
        """Return the base of the unit in one mixture."""
        moves = self.moves.keys()
        if moves <= on:
            return self.unit.base_after
        return self.unit.base_before + sum(
            amount for family, amount in self.moves.items() if family in on
        )

    def _lone(
        self, on: On, base: float, scores: RangeScores
    ) -> list[tuple[WorkPackage, Array]]:
        """Return a package that only one revision has, while it is there."""
        moved = on & self.moves.keys()
        if self.unit.after and moved:
            package, side = self.unit.after[0], self.new
        elif self.unit.before and moved != self.moves.keys():
            package, side = self.unit.before[0], self.old
        else:
            return []
        cost = side.cost(package.id, scores)
        return [(package, _moved(cost, package, base, package.spent))]

    def _pair(
        self, on: On, base: float, scores: RangeScores
    ) -> tuple[WorkPackage, Array]:
        """Return a package that both revisions have."""
        before, after = self.unit.before[0], self.unit.after[0]
        spent = (after if Family.ACTUALS in on else before).spent
        if Family.ACTUALS not in self.families:
            # Of ranges in money nothing follows it.
            spent = after.spent if base == after.base else before.spent
        source = after if Family.RANGES in on else before
        if Family.RANGES not in self.families:
            # The same range twice: the one that is there, else the larger one, so
            # that the way back is the way there.
            at = (base, spent or 0.0)
            after_is_nearer = _rest(after) >= _rest(before)
            if at == (before.base, before.spent or 0.0):
                after_is_nearer = False
            if at == (after.base, after.spent or 0.0):
                after_is_nearer = True
            source = after if after_is_nearer else before
        side = self.new if source is after else self.old
        cost = side.cost(source.id, scores)
        return after, _moved(cost, source, base, spent)


def _rest(package: WorkPackage) -> float:
    """Return what is still to be spent of a package, money."""
    return package.base - (package.spent or 0.0)


def _ratio(part: float, whole: float) -> float:
    return part / whole if whole else 1.0


def _moved(
    cost: Array, package: WorkPackage, base: float, spent: float | None
) -> Array:
    """Return the costs of a package at another base and another amount spent."""
    own_spent, spent = package.spent or 0.0, spent or 0.0
    if base == package.base and spent == own_spent:
        return cost
    if not follows_rest(package):
        own_spent = spent = 0.0
    size, new_size = package.base - own_spent, max(base - spent, 0.0)
    if size > 0.0 and new_size <= MOST_STRETCH * size:
        return spent + (cost - own_spent) * (new_size / size)
    return cost + (base - package.base)


def follows_rest(package: WorkPackage) -> bool:
    """Whether every figure of the range is written in percent of base − spent."""
    low, likely, high, outcomes = package.cost.written
    sign = "=" if package.cost.shape is ShapeName.POINTS else ":"
    figure = 1 if package.cost.shape is ShapeName.POINTS else 0
    cells = [cell.strip() for cell in (low, likely, high) if cell.strip()]
    for entry in outcomes.split(";"):
        parts = entry.split(sign)
        if len(parts) == 2:
            cells.append(parts[figure].strip())
    return bool(cells) and all(cell.endswith("%") for cell in cells)


def same_range(before: WorkPackage, after: WorkPackage) -> bool:
    """Whether two states of a package have the same range relative to their base."""
    spent = (before.spent or 0.0, after.spent or 0.0)
    same_money = before.base == after.base and spent[0] == spent[1]
    if same_money and figures(before.cost) == figures(after.cost):
        return True
    rest = (follows_rest(before), follows_rest(after))
    if rest[0] != rest[1] and any(spent):
        return False
    return _relative(before, follow_rest=rest[0]) == _relative(
        after, follow_rest=rest[1]
    )


def _relative(package: WorkPackage, *, follow_rest: bool) -> tuple[object, ...]:
    """Return the figures of a range in parts of what they are relative to."""
    cost: CostRange = package.cost
    offset = (package.spent or 0.0) if follow_rest else 0.0
    size = package.base - offset
    if size <= 0.0:
        offset, size = package.base, 1.0

    def part(money: float | None) -> float | None:
        return None if money is None else round((money - offset) / size / _ALIKE)

    def outcome(first: float, second: float) -> tuple[float | None, float | None]:
        if cost.shape is ShapeName.POINTS:
            return first, part(second)
        return part(first), second

    return (
        cost.shape,
        part(cost.low),
        part(cost.likely),
        part(cost.high),
        (cost.ends.low_percent, cost.ends.high_percent),
        tuple(outcome(*pair) for pair in cost.outcomes),
    )
