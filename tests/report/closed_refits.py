"""The ship refit beside other refits: a history, a rated model, published uplifts.

Invented like everything in `ship_refit`.
"""

from contingency.estimate.modelled import history_uplift, rated_uplift
from contingency.estimate.nouns import (
    ClosedProject,
    OutsideRule,
    RatedFactor,
    RatedModel,
    UpliftPart,
)
from tests.report.ship_refit import ship_refit

RATIOS = (0.97, 1.04, 1.08, 1.12, 1.15, 1.21, 1.24, 1.31, 1.44, 1.52)

HISTORY = tuple(
    ClosedProject(
        id=f"Q{i}",
        name="" if i == 3 else f"Refit of vessel {i}",
        group="research",
        estimate=20e6 + 1e6 * i,
        final=(20e6 + 1e6 * i) * ratio,
        covered=0.8e6,
        notes="Yard changed halfway" if i == 8 else "",
        line=i + 1,
    )
    for i, ratio in enumerate(RATIOS, start=1)
)

ALIKE = {
    "stage": "all at full funding, before the yard contract",
    "money": "both brought to the price date with the yard's own index",
    "scope": "without science equipment, which is left out here too",
}

RATED = RatedModel(
    name="Growth of refits by their definition",
    provenance="invented for tests from no refit at all",
    form="log",
    constant=-0.02,
    residual_spread=0.08,
    degrees=14,
    factors=(
        RatedFactor(
            id="F1",
            name="Definition of the work",
            coefficient=0.03,
            rating="fair",
            value=2.0,
            evidence="review of 12 May",
        ),
        RatedFactor(id="F2", name="Age in decades", coefficient=0.01, value=3.1),
    ),
)

TABLE = OutsideRule(
    **ALIKE,
    source="a published table of refits",
    percentiles=((20, 0.02), (50, 0.15), (80, 0.32), (90, 0.4)),
)


def beside_others(**changes):
    """The refit with ten closed refits, a rated model and uplifts by kind of work."""
    refit = ship_refit()
    first, second, *rest = refit.systemic
    modelled = (
        first.model_copy(
            update={
                "uplift": history_uplift(HISTORY),
                "model": "history",
                "covers": "growth of the work as a whole",
            }
        ),
        second.model_copy(
            update={
                "uplift": rated_uplift(RATED),
                "model": "ratings",
                "covers": "output of the yard",
            }
        ),
    )
    rule = OutsideRule(
        **ALIKE,
        source="a published study",
        uplifts=(
            UpliftPart(kind="standard", share=0.7, upper=0.24, managed=0.5),
            UpliftPart(kind="non-standard", share=0.3, upper=0.51),
        ),
    )
    return refit.model_copy(
        update={
            "systemic": (*modelled, *rest),
            "history": HISTORY,
            "outside_rule": rule,
            "rated_model": RATED,
            **changes,
        }
    )
