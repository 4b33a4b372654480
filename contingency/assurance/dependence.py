"""Checks of what makes costs move together."""

from __future__ import annotations

from contingency.assurance.declaration import (
    Hit,
    NotApplicable,
    Source,
    Verdict,
    input_check,
)
from contingency.assurance.rows import ranges_are_linked, uncertain_packages
from contingency.assurance.settings import Settings, Threshold
from contingency.assurance.wording import counted, percent
from contingency.estimate.nouns import Estimate

MOST_INDEPENDENT = Threshold(
    name="most_independent_packages",
    default=5,
    unit="uncertain packages",
    grade="H",
    meaning="most packages that may be independent",
)


@input_check(
    slug="no-dependence",
    subject="dependence",
    title="No dependence at all",
    catches="Independence by default, which makes a total look safer than it is.",
    rule=(
        "More uncertain packages than the threshold, and no general dependence, no"
        " cause shared by two packages and no correlation. A stop where"
        " general_dependence is not written; where 0 is written on purpose, a major"
        " finding that a signed justification answers."
    ),
    thresholds=(MOST_INDEPENDENT,),
    severities=("stop", "major"),
    todo=(
        "Write general_dependence under [ranges], or name the common causes in"
        " causes.csv. If the costs truly do not move together, write 0 and answer"
        " this finding with the reason."
    ),
    sources=(
        Source("GAO-20-195G, survey of step 9", "READ"),
        Source(
            "Australian national guidance on public private partnerships:"
            " disregarding interdependence is a frequent error that understates risk",
            "READ",
        ),
        Source("Coleman and Gupta (1994), on correlation in cost risk", "READ"),
    ),
)
def no_dependence(estimate: Estimate, settings: Settings) -> Verdict:
    """Find whether many ranges are simulated as if they were independent."""
    count = len(uncertain_packages(estimate))
    if count < 2:
        return NotApplicable("Fewer than two packages have a range.")
    if ranges_are_linked(estimate) or count <= settings.number(MOST_INDEPENDENT):
        return []
    # Share of the total's sigma hidden if n equal costs truly have correlation
    # 0.2: 1 - 1/sqrt(1 + (n - 1) 0.2), closed form.
    hidden = 1.0 - (1.0 + (count - 1) * 0.2) ** -0.5
    written = estimate.general_dependence is not None
    return [
        Hit(
            severity="major" if written else "stop",
            message=(
                f"{counted(count, 'uncertain package')} are simulated as if they moved"
                " independently"
                + (
                    ", because general_dependence = 0 is written."
                    if written
                    else "; no dependence is written down."
                )
                + " If costs of equal size truly had a correlation of 0.2, this would"
                f" hide {percent(hidden)} of the spread that they add to the total."
            ),
        )
    ]


CHECKS = (no_dependence,)
