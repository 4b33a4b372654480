"""Checks of the allocation and of who holds the money."""

from __future__ import annotations

from math import fsum

from contingency.assurance.declaration import (
    COMMON_PRACTICE,
    Hit,
    Verdict,
    result_check,
)
from contingency.assurance.material import Material
from contingency.assurance.settings import Settings, Threshold
from contingency.assurance.wording import money

CLOSING_GAP = Threshold(
    name="closing_gap",
    default=1,
    unit="unit of the currency",
    grade="H",
    meaning="largest gap",
)


@result_check(
    slug="allocation-does-not-close",
    subject="allocation and holding",
    title="Allocation does not close",
    catches="Gaps from rounding, and money allocated twice or not at all.",
    rule=(
        "Packages with project-wide events, group subtotals, the split by source,"
        " expected part with margin, and the second opinion: each adds up to the"
        " contingency at the target."
    ),
    thresholds=(CLOSING_GAP,),
    severities=("stop",),
    todo="Do not use the allocation; report it with the estimate folder.",
    sources=(COMMON_PRACTICE,),
)
def allocation_does_not_close(material: Material, settings: Settings) -> Verdict:
    """Find sums that differ from the contingency at the target."""
    table, due = material.allocation, material.target.contingency
    second = material.second_opinion
    sums = {
        "the packages": fsum(row.contingency for row in table.rows),
        "the sources of the packages": fsum(
            part
            for row in table.rows
            for part in (row.ranges, row.systemic, row.events)
        ),
        "the groups": fsum(group.contingency for group in table.groups),
        "ranges, systemic risks and events": table.split.contingency,
        "expected part and margin": table.expected + table.margin,
        "the packages of the second opinion": fsum(second.contingency),
        "the sources of the second opinion": second.split.contingency,
    }
    if not table.groups:
        del sums["the groups"]
    # A sum of floats is exact only to some 1e-15 of its terms.
    allowed = settings.number(CLOSING_GAP) + 1e-12 * abs(material.target.total)
    currency = material.estimate.currency
    return [
        Hit(
            severity="stop",
            message=(
                f"Allocated plus held must equal the contingency of"
                f" {money(due, currency)}; {name} differ by"
                f" {money(value - due, currency)}."
            ),
        )
        for name, value in sums.items()
        if not abs(value - due) <= allowed
    ]


CHECKS = (allocation_does_not_close,)
