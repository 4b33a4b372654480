"""From the contingency of one revision to that of the next, without a gap.

    as issued → method → seed and trials → prices → families → level → as it is now

Each step has its change of base and of contingency; the total is their sum.  Base
changes are sums of amounts.  Contingency changes come from substituting one family
after another with common random numbers.
"""

from __future__ import annotations

import math
from dataclasses import dataclass
from functools import cached_property

import numpy as np
from numpy.typing import NDArray
from scipy.special import stdtrit

from contingency.estimate.nouns import Estimate
from contingency.quantities.draws import BLOCK
from contingency.simulation.totals import simulate_totals
from contingency.tracking.averaging import Order, effects
from contingency.tracking.breakdown import RowEffect, break_down
from contingency.tracking.families import Family
from contingency.tracking.matching import Match
from contingency.tracking.mixtures import (
    Mixtures,
    base_by_family,
    contingencies,
    level,
    mixtures,
)

Array = NDArray[np.float64]

MOST_BLOCKS = 32
"""Blocks in which mixtures are computed at most, 131,072 trials.  A choice of ours:
with common random numbers more would change nothing that can be seen."""
CHANCE = 1e-9
"""Part of the total below which two runs with the same draws agree."""


@dataclass(frozen=True, kw_only=True, slots=True)
class Step:
    """One step of the bridge, in money of the later revision's price date."""

    family: Family
    base: float
    """Change of the base."""
    contingency: float
    """Change of the contingency."""
    noise: float
    """Half-width of the 95 % interval that the simulation leaves around
    `contingency`."""
    rows: tuple[RowEffect, ...]
    """The rows that moved; their changes sum to those of the step."""

    @property
    def total(self) -> float:
        """Change of base and contingency together."""
        return self.base + self.contingency

    @property
    def is_within_noise(self) -> bool:
        """Whether the change of contingency cannot be told from chance."""
        return 0.0 < abs(self.contingency) <= self.noise


@dataclass(frozen=True, kw_only=True, slots=True)
class Position:
    """Where a revision stands: one end of the bridge."""

    base: float
    contingency: float
    """At the target level."""
    percent: int
    """The target level."""

    @property
    def total(self) -> float:
        """Base and contingency together."""
        return self.base + self.contingency


@dataclass(frozen=True, kw_only=True, slots=True)
class IssuedFigures:
    """What was issued of the earlier revision, where that is known."""

    base: float
    contingency: float
    """At the target level, money of that revision's price date."""
    version: str
    """Of the program."""
    method: str


@dataclass(frozen=True, kw_only=True)
class Bridge:
    """The way from one revision to the next."""

    before: Position
    """Money of the earlier revision's price date."""
    after: Position
    steps: tuple[Step, ...]
    """Steps that moved anything, in published order."""
    order: Order
    at_old_level: float
    """Contingency that the later revision would have at the earlier target."""
    blocks: int
    """Blocks of 4,096 trials in which the mixtures were computed."""
    seed: int
    before_total: Array
    """(n,) simulated totals of the earlier revision, its own money, seed and trials."""
    after_total: Array
    """(n,) simulated totals of the later revision."""

    @property
    def residual(self) -> tuple[float, float]:
        """Base and contingency that no step explains; nought but for float rounding."""
        base = math.fsum(
            [self.before.base, *(s.base for s in self.steps), -self.after.base]
        )
        contingency = math.fsum(
            [
                self.before.contingency,
                *(s.contingency for s in self.steps),
                -self.after.contingency,
            ]
        )
        return -base, -contingency

    def step(self, family: Family) -> Step | None:
        """Return the step of a family, or None where it did not move."""
        return next((s for s in self.steps if s.family is family), None)


def build_bridge(
    pair: Match,
    earlier: Estimate,
    *,
    order: Order = "average",
    issued: IssuedFigures | None = None,
    totals: tuple[Array, Array],
) -> Bridge:
    """Return the bridge between two revisions.

    Parameters
    ----------
    pair : Match
        The revisions, matched.
    earlier : Estimate
        The earlier revision as it was read.
    order : "average" or "sequence"
        How families share what they do together.
    issued : IssuedFigures, optional
        What was issued of the earlier revision.
    totals : (n,) arrays of money
        Simulated totals of the earlier and of the later revision, each with its own
        seed and number of trials.
    """
    later = pair.later
    blocks = min(totals[1].size // BLOCK, MOST_BLOCKS)
    percent = earlier.contingency.target
    found = mixtures(pair, seed=later.run.seed, blocks=blocks, percent=percent)
    ends = _Ends(pair=pair, earlier=earlier, found=found, totals=totals)
    computed = ends.before
    before = computed
    if issued is not None:
        before = Position(
            base=issued.base, contingency=issued.contingency, percent=percent
        )
    steps = [
        _method(before, computed),
        ends.sampling(),
        ends.prices(),
        *_family_steps(found, order),
        ends.level(),
    ]
    return Bridge(
        before=before,
        after=ends.after,
        steps=tuple(step for step in steps if step is not None),
        order=order,
        at_old_level=level(totals[1], percent) - later.base,
        blocks=blocks,
        seed=later.run.seed,
        before_total=totals[0],
        after_total=totals[1],
    )


def _method(issued: Position, computed: Position) -> Step | None:
    """Return what another version of the program makes of the same inputs."""
    base = computed.base - issued.base
    contingency = computed.contingency - issued.contingency
    least = CHANCE * abs(issued.total)
    if max(abs(base), abs(contingency)) <= least:
        return None
    return Step(
        family=Family.METHOD, base=base, contingency=contingency, noise=0.0, rows=()
    )


@dataclass(frozen=True, kw_only=True)
class _Ends:
    """The two ends of the bridge and the steps next to them."""

    pair: Match
    earlier: Estimate
    found: Mixtures
    totals: tuple[Array, Array]

    @property
    def before(self) -> Position:
        """The earlier revision by its own seed and trials."""
        return self._position(self.earlier, self.totals[0])

    @property
    def after(self) -> Position:
        """The later revision by its own seed and trials."""
        return self._position(self.pair.later, self.totals[1])

    @staticmethod
    def _position(estimate: Estimate, total: Array) -> Position:
        percent = estimate.contingency.target
        return Position(
            base=estimate.base,
            contingency=level(total, percent) - estimate.base,
            percent=percent,
        )

    @cached_property
    def _first(self) -> Array:
        """Contingencies of the earlier revision with the common draws, own money."""
        relabelled, found = self.pair.relabelled, self.found
        if not self.pair.factors.move_anything:
            return found.value(frozenset())
        as_later = relabelled.model_copy(update={"run": self.pair.later.run})
        total = simulate_totals(as_later, blocks=found.old.draws.blocks)
        return contingencies(total.ravel(), relabelled.base, found.percent)

    def sampling(self) -> Step | None:
        """Return what other draws than those of the mixtures make of the two ends."""
        effect, noise = 0.0, 0.0
        percent = self.found.percent
        ends = (
            (self.earlier, self.totals[0], self._first, 1.0),
            (self.pair.later, self.totals[1], self._last(percent), -1.0),
        )
        for estimate, total, common, sign in ends:
            own = contingencies(total, estimate.base, percent)
            difference = float(common[0] - own[0])
            if abs(difference) > CHANCE * abs(estimate.base + own[0]):
                effect += sign * difference
                noise = math.hypot(noise, half_width(own), half_width(common))
        if effect == 0.0 and noise == 0.0:
            return None
        return Step(
            family=Family.SAMPLING, base=0.0, contingency=effect, noise=noise, rows=()
        )

    def _last(self, percent: int) -> Array:
        """Contingencies of the later revision with the common draws."""
        found = self.found
        everything = frozenset(found.families)
        return contingencies(found.total(everything), found.base_after, percent)

    def prices(self) -> Step | None:
        """Return what the restatement in money of the later price date does."""
        if not self.pair.factors.move_anything:
            return None
        effect = self.found.value(frozenset()) - self._first
        return Step(
            family=Family.PRICES,
            base=self.pair.earlier.base - self.pair.relabelled.base,
            contingency=float(effect[0]),
            noise=half_width(effect),
            rows=(),
        )

    def level(self) -> Step | None:
        """Return the change of the level, alone and last."""
        old, new = self.found.percent, self.after.percent
        if old == new:
            return None
        base, total = self.after.base, self.totals[1]
        effect = contingencies(total, base, new) - contingencies(total, base, old)
        return Step(
            family=Family.LEVEL,
            base=0.0,
            contingency=float(effect[0]),
            noise=half_width(effect),
            rows=(),
        )


def half_width(values: Array) -> float:
    """Return the half-width of the 95 % interval of a mean over blocks.

    `values` (1 + b,) begins with the value over all trials; the spread of the blocks
    around one another, not around it, is what chance does.
    """
    blocks = values[1:]
    if blocks.size < 2:
        return math.inf
    spread = float(np.std(blocks, ddof=1)) / math.sqrt(blocks.size)
    return float(stdtrit(blocks.size - 1, 0.975)) * spread


def _family_steps(found: Mixtures, order: Order) -> list[Step]:
    """Return the steps of the families, in published order."""
    bases = base_by_family(found)
    shares = effects(found.families, found.value, order)
    everything = frozenset(found.families)
    steps = []
    for place, (family, effect) in enumerate(zip(found.families, shares, strict=True)):
        contexts = [frozenset(found.families[:place])]
        if order == "average":
            contexts = [frozenset(), everything]
        contingency = float(effect[0])
        steps.append(
            Step(
                family=family,
                base=bases[family],
                contingency=contingency,
                noise=half_width(effect),
                rows=break_down(found, family, contingency, contexts),
            )
        )
    return steps
