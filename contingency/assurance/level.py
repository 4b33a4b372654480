"""Checks of the level that is asked for and how the answer is presented."""

from __future__ import annotations

from contingency.assurance.declaration import Hit, Source, Verdict, input_check
from contingency.assurance.settings import Settings
from contingency.estimate.nouns import Estimate

GAO_LEVEL = Source(
    "GAO cost guide, page on cost contingency: decision-makers choose, and no level"
    " is best practice for all",
    "READ",
)
FINANCE_AU = Source(
    "Australian Department of Finance, Defining P50 and P80: one consistent level for"
    " all projects",
    "READ",
)


@input_check(
    slug="level-without-authority",
    subject="level and presentation",
    title="Level without authority",
    catches="A level that is used because it always was.",
    rule="[contingency] names who set the level (set_by) and why (reason).",
    severities=("major",),
    todo=(
        "Name the policy or decision with the role that took it and its date under"
        " set_by, and the reason under reason."
    ),
    sources=(
        GAO_LEVEL,
        FINANCE_AU,
        Source(
            "US Weapon Systems Acquisition Reform Act of 2009: the level and the"
            " reason are disclosed",
            "MEMORY",
        ),
    ),
)
def level_without_authority(estimate: Estimate, _settings: Settings) -> Verdict:
    """Find whether someone with authority chose the level, for a reason."""
    rule = estimate.contingency
    missing = [
        words
        for words, text in (
            ("authority", rule.set_by.strip()),
            ("reason", rule.reason.strip()),
        )
        if not text
    ]
    if not missing:
        return []
    message = f"No {' and no '.join(missing)} is recorded for using {rule.target_name}."
    return [Hit(severity="major", message=message)]


CHECKS = (level_without_authority,)
