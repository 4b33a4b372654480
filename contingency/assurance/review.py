"""Checks of the sign-off: complete, and by different people."""

from __future__ import annotations

from itertools import combinations

from contingency.assurance.declaration import (
    Hit,
    NotApplicable,
    Source,
    Verdict,
    input_check,
)
from contingency.assurance.settings import Settings, WordList
from contingency.assurance.wording import listed
from contingency.estimate.nouns import Estimate

NSW_2016 = Source(
    "Audit Office of New South Wales (2016): reviews lacked independence", "READ"
)
GAO_SLS = Source("GAO-15-596, space launch system: no independent estimate", "READ")

ROLES = WordList(
    name="sign_off_roles",
    default="prepared; checked; approved",
    grade="H",
    meaning="roles that must sign",
)


@input_check(
    slug="sign-off-incomplete",
    subject="level and presentation",
    title="Sign-off incomplete",
    catches="A report that nobody is named to prepare, check or approve.",
    rule="[[sign_off]] has each of the roles, with a name.",
    thresholds=(ROLES,),
    severities=("stop",),
    todo="Name the person for each role under [[sign_off]].",
    sources=(
        Source("Canada, guide to costing: attestation by a financial officer", "READ"),
        NSW_2016,
    ),
)
def sign_off_incomplete(estimate: Estimate, settings: Settings) -> Verdict:
    """Find roles of the sign-off without a person."""
    named = {
        line.role.strip().lower() for line in estimate.sign_offs if line.name.strip()
    }
    missing = [role for role in settings.words(ROLES) if role not in named]
    if not missing:
        return []
    message = f"Nobody is named under [[sign_off]] as {listed(missing)}."
    return [Hit(severity="stop", message=message)]


@input_check(
    slug="review-not-independent",
    subject="level and presentation",
    title="Review not independent",
    catches="Preparers who check or approve their own work.",
    rule="The roles that must sign have different names.",
    thresholds=(ROLES,),
    severities=("stop",),
    todo="Name a second person who had no part in the estimate.",
    sources=(NSW_2016, GAO_SLS),
)
def review_not_independent(estimate: Estimate, settings: Settings) -> Verdict:
    """Find one person in two roles."""
    lines = [
        line
        for line in estimate.sign_offs
        if line.name.strip() and line.role.strip().lower() in settings.words(ROLES)
    ]
    if len(lines) < 2:
        return NotApplicable("Fewer than two people are named under [[sign_off]].")
    return [
        Hit(
            severity="stop",
            message=f"{one.name} is named both as {one.role} and as {other.role}.",
        )
        for one, other in combinations(lines, 2)
        if _person(one.name) == _person(other.name)
        and one.role.strip().lower() != other.role.strip().lower()
    ]


def _person(name: str) -> str:
    """Return a name without case, spaces and full stops, to compare it."""
    return "".join(name.casefold().replace(".", " ").split())


CHECKS = (sign_off_incomplete, review_not_independent)
