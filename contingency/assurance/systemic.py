"""Checks of the systemic risks: what comes from how the project is set up."""

from __future__ import annotations

from contingency.assurance.declaration import Hit, Source, Verdict, input_check
from contingency.assurance.settings import Settings
from contingency.assurance.wording import counted
from contingency.estimate.nouns import Estimate

RP_42R = Source(
    "AACE International RP 42R-08, Risk analysis and contingency determination"
    " using parametric estimating (draft): poor scope definition is often the"
    " greatest driver",
    "READ",
)
HOLLMANN_2007 = Source(
    "Hollmann, J. K. (2007), The Monte-Carlo challenge: a better approach, first page",
    "READ",
)
FTA_RISK = Source(
    "US Federal Transit Administration oversight procedures: a risk register alone"
    " is not enough, a model of the whole project is needed",
    "READ",
)


@input_check(
    slug="no-systemic-layer",
    subject="systemic risks and events",
    title="No systemic risks",
    catches=(
        "An analysis of line ranges and listed events only, with nothing for the"
        " definition of scope, new technology, complexity, team, market or the bias of"
        " the estimate."
    ),
    rule=(
        "systemic.csv has no rows, or every row is neutral: no spread and no uplift."
    ),
    severities=("major",),
    todo=(
        "Add the systemic risks that apply to systemic.csv with the evidence for"
        " their size, or answer why the project has none."
    ),
    sources=(RP_42R, HOLLMANN_2007, FTA_RISK),
)
def no_systemic_layer(estimate: Estimate, _settings: Settings) -> Verdict:
    """Find whether anything stands for how the project is defined and run."""
    at_work = [
        risk
        for risk in estimate.systemic
        if risk.uplift.varies or risk.uplift.distribution.mean != 0
    ]
    if at_work:
        return []
    found = (
        f"All {counted(len(estimate.systemic), 'systemic risk')} are neutral: no"
        " spread and no uplift."
        if estimate.systemic
        else "The estimate has no systemic risks."
    )
    return [
        Hit(
            severity="major",
            message=(
                f"{found} Nothing in the model stands for how well the project is"
                " defined, which past projects show to be among the largest drivers."
            ),
        )
    ]


CHECKS = (no_systemic_layer,)
