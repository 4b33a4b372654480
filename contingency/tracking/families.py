"""The families of movement between two revisions, in the order that is published."""

from __future__ import annotations

from enum import StrEnum


class Family(StrEnum):
    """Why base or contingency moved; the value is the word of changes.csv."""

    METHOD = "method"
    SAMPLING = "sampling"
    PRICES = "prices"
    APPROVED_SCOPE = "approved-scope"
    UNAPPROVED_SCOPE = "unapproved-scope"
    CORRECTION = "correction"
    ACTUALS = "actuals"
    DEFINITION = "definition"
    STRUCTURE = "structure"
    UNEXPLAINED = "unexplained"
    RANGES = "ranges"
    DEPENDENCE = "dependence"
    SYSTEMIC = "systemic"
    TREATMENT = "treatment"
    REASSESSED = "reassessed"
    NEW_EVENTS = "new-events"
    CLOSED_EVENTS = "closed-events"
    OCCURRED = "occurred"
    LEVEL = "level"

    @property
    def heading(self) -> str:
        """The family as it is printed."""
        return _HEADINGS[self]

    @property
    def meaning(self) -> str:
        """What the family holds, in one sentence."""
        return _MEANINGS[self]


SUBSTITUTED = tuple(
    family
    for family in Family
    if family not in {Family.METHOD, Family.SAMPLING, Family.PRICES, Family.LEVEL}
)
"""The families between the restatement and the level.  Their order is the one of the
plain sequence; the average over all orders knows no order."""

_HEADINGS: dict[Family, str] = {
    Family.METHOD: "Method or program version",
    Family.SAMPLING: "Seed and number of trials",
    Family.PRICES: "Money of another price date",
    Family.APPROVED_SCOPE: "Scope, approved",
    Family.UNAPPROVED_SCOPE: "Scope, not approved",
    Family.CORRECTION: "Corrections of the estimate",
    Family.ACTUALS: "Actual cost in place of estimate",
    Family.DEFINITION: "Better definition",
    Family.STRUCTURE: "Packages split or merged",
    Family.UNEXPLAINED: "Base changes without a reason",
    Family.RANGES: "Ranges",
    Family.DEPENDENCE: "Dependence",
    Family.SYSTEMIC: "Systemic risks",
    Family.TREATMENT: "Events treated",
    Family.REASSESSED: "Events reassessed",
    Family.NEW_EVENTS: "New events",
    Family.CLOSED_EVENTS: "Events closed",
    Family.OCCURRED: "Events that occurred",
    Family.LEVEL: "Funding level",
}

_MEANINGS: dict[Family, str] = {
    Family.METHOD: "The earlier inputs, computed anew with this version, against what "
    "was issued.",
    Family.SAMPLING: "The earlier inputs with the seed and the trials of the later "
    "revision; what is left is chance.",
    Family.PRICES: "The earlier revision brought to the price date of the later one.",
    Family.APPROVED_SCOPE: "Work added or taken out with approval.",
    Family.UNAPPROVED_SCOPE: "Work added or taken out without approval so far.",
    Family.CORRECTION: "Errors and omissions put right.",
    Family.ACTUALS: "Cost that was spent, which can no longer vary.",
    Family.DEFINITION: "The same scope, measured or priced again.",
    Family.STRUCTURE: "The same work in other packages.",
    Family.UNEXPLAINED: "Base that moved and no line of changes.csv says why.",
    Family.RANGES: "Ranges relative to the base that they belong to.",
    Family.DEPENDENCE: "General dependence, common causes, loads and correlations.",
    Family.SYSTEMIC: "Systemic risks new, gone or changed.",
    Family.TREATMENT: "Events counted after treatment, or no longer, and what the "
    "treatment costs.",
    Family.REASSESSED: "Open events with another chance or impact.",
    Family.NEW_EVENTS: "Events opened, or opened again.",
    Family.CLOSED_EVENTS: "Events that can no longer happen.",
    Family.OCCURRED: "Events that happened, and their cost in the base.",
    Family.LEVEL: "The change of the target level, alone and last.",
}
