"""The same trials again and again: totals of an estimate and of its variants."""

from __future__ import annotations

from dataclasses import replace
from functools import cached_property

import numpy as np
from numpy.typing import NDArray

from contingency.estimate.nouns import CostRange, Estimate, ShapeName
from contingency.simulation.cost_model import CostModel, build_model, dependence_of
from contingency.simulation.drawing import DrawnBlock, Workspace, draw_block
from contingency.simulation.events import draw_events

Array = NDArray[np.float64]


class TrialSet:
    """The first blocks of an estimate's run, kept trial by trial.

    Axes: ``b`` blocks, ``n`` trials of a block; money of the price date.
    """

    def __init__(self, estimate: Estimate, *, blocks: int) -> None:
        self.estimate = estimate
        self.blocks = range(blocks)
        self.model: CostModel = build_model(estimate)
        work = Workspace(self.model)
        self.drawn: tuple[DrawnBlock, ...] = tuple(
            draw_block(self.model, block, work) for block in self.blocks
        )
        self.total: Array = np.stack([d.total(self.model) for d in self.drawn])
        """(b, n) total cost."""

    @cached_property
    def event_cost(self) -> Array:
        """(b, n) cost of all events."""
        return np.stack([d.events.cost.sum(axis=0) for d in self.drawn])

    def total_of(self, variant: Estimate) -> Array:
        """Return (b, n) totals of a variant on the same draws.

        What the variant leaves alone is not simulated again: events where only they
        change, and the curves where only the dependence does.
        """
        same_work = variant.packages == self.estimate.packages
        same_risks = variant.systemic == self.estimate.systemic
        same_links = (
            variant.general_dependence == self.estimate.general_dependence
            and variant.correlations == self.estimate.correlations
            and variant.causes == self.estimate.causes
        )
        if same_work and same_risks and same_links:
            return self.total - self.event_cost + self._events_of(variant)
        if same_work and same_risks and variant.events == self.estimate.events:
            return self._totals(self._with_links(variant))
        if same_work and not variant.systemic and same_links:
            bare = np.stack([drawn.value.sum(axis=0) for drawn in self.drawn])
            return bare + self.event_cost
        return self._totals(build_model(variant))

    def total_with_seed(self, seed: int) -> Array:
        """Return (b, n) totals of the estimate under another seed."""
        return self._totals(replace(self.model, seed=seed))

    def _with_links(self, variant: Estimate) -> CostModel:
        varying = self.model.packages[: self.model.varying]
        return replace(self.model, dependence=dependence_of(variant, varying))

    def _totals(self, model: CostModel) -> Array:
        work = Workspace(model)
        return np.stack(
            [draw_block(model, block, work).total(model) for block in self.blocks]
        )

    def _events_of(self, variant: Estimate) -> Array:
        """Return (b, n) cost of all events of a variant."""
        model = build_model(_events_alone(variant))
        work = Workspace(model)
        return np.stack(
            [
                draw_events(model, block, work.source).cost.sum(axis=0)
                for block in self.blocks
            ]
        )


def _events_alone(estimate: Estimate) -> Estimate:
    """Return the estimate with one fixed package: events ask for nothing else."""
    fixed = CostRange(shape=ShapeName.FIXED, likely=0.0)
    package = estimate.packages[0].model_copy(update={"cost": fixed, "loads": ()})
    return estimate.model_copy(
        update={
            "packages": (package,),
            "systemic": (),
            "causes": (),
            "correlations": (),
            "general_dependence": None,
        }
    )
