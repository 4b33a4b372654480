"""A block kept trial by trial is the block that the engine sums."""

import numpy as np
import pytest

from contingency.estimate.nouns import Load
from contingency.simulation.blocks import run_block
from contingency.simulation.cost_model import build_model
from contingency.simulation.drawing import Workspace, draw_block
from tests.assurance.builder import PACKAGES, cause, sound_estimate


@pytest.mark.parametrize("block", [0, 3])
def test_totals_are_those_of_the_engine(block):
    """With a general dependence, a common cause, systemic risks and events."""
    estimate = sound_estimate(
        causes=(cause("crew", "crew"),),
        packages=tuple(
            p.model_copy(update={"loads": (Load(cause="crew", weight=0.5),)})
            for p in PACKAGES
        ),
    )
    model = build_model(estimate)
    drawn = draw_block(model, block, Workspace(model))
    engine = run_block(model, block, Workspace(model), 0.0)

    assert np.array_equal(drawn.total(model), engine.total)
    parts = (drawn.value * drawn.factor(model)).sum(axis=0)
    np.testing.assert_allclose(
        parts + drawn.events.cost.sum(axis=0), engine.total, rtol=1e-12
    )
