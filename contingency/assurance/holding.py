"""Checks of the allocation and of who holds the money."""

from __future__ import annotations

from math import fsum

from contingency.assurance.declaration import (
    COMMON_PRACTICE,
    Hit,
    NotApplicable,
    Source,
    Verdict,
    input_check,
    result_check,
)
from contingency.assurance.material import Material
from contingency.assurance.settings import Settings, Threshold
from contingency.assurance.wording import counted, listed, money, percent
from contingency.estimate.nouns import Estimate

CLOSING_GAP = Threshold(
    name="closing_gap",
    default=1,
    unit="unit of the currency",
    grade="H",
    meaning="largest gap",
)
FLAT_BAND = Threshold(
    name="flat_allocation_points",
    default=1,
    unit="percentage points either way",
    grade="H",
    meaning="same percentage within",
)
FLAT_DISTANCE = Threshold(
    name="flat_allocation_distance",
    default=0.25,
    unit="",
    grade="H",
    meaning="major where shares lie apart by more than",
    most=1,
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


@result_check(
    slug="flat-allocation",
    subject="allocation and holding",
    title="Every package gets the same percentage",
    catches="Contingency spread evenly while the risk sits in a few packages.",
    rule=(
        "All packages with a base get the same percentage of it, within the band,"
        " while half the sum of the distances between share of contingency and share"
        " of variance is above the threshold."
    ),
    thresholds=(FLAT_BAND, FLAT_DISTANCE),
    severities=("major",),
    todo="Allocate by what each package adds to the level.",
    sources=(
        Source("FHWA: risks with specific costs instead of a bump", "READ"),
        Source("GAO-09-3SP: reserve goes where the risk is", "READ"),
        Source("Smart (2014) and Sandberg (2007), abstracts", "READ"),
    ),
)
def flat_allocation(material: Material, settings: Settings) -> Verdict:
    """Find allocations that give all packages one percentage."""
    rows = [row for row in material.allocation.rows if row.base > 0]
    due = fsum(row.contingency for row in material.allocation.rows)
    if len(rows) < 2 or due == 0:
        return NotApplicable("Fewer than two packages, or no contingency to allocate.")
    percents = [100 * row.contingency / row.base for row in rows]
    distance = 0.5 * fsum(
        abs(row.contingency / due - row.variance_share)
        for row in material.allocation.rows
    )
    flat = max(percents) - min(percents) <= 2 * settings.number(FLAT_BAND)
    if not flat or distance <= settings.number(FLAT_DISTANCE):
        return []
    largest = max(rows, key=lambda row: row.variance_share)
    message = (
        f"Every package gets {min(percents):.1f} % to {max(percents):.1f} % of its"
        f" base. {largest.package} {largest.name} makes up"
        f" {percent(largest.variance_share)} of the spread and gets"
        f" {percent(largest.contingency / due)} of the money."
    )
    return [Hit(severity="major", message=message)]


@result_check(
    slug="negative-shares",
    subject="allocation and holding",
    title="Negative shares",
    catches="Readers who take a negative share for an error, or errors taken for one.",
    rule="A package draws less than zero from the contingency at the target.",
    severities=("note",),
    todo="Say in the report which savings or offsets make the share negative.",
    sources=(
        Source("Smart (2014), abstract: allocation by need, semi-variance", "READ"),
    ),
)
def negative_shares(material: Material, settings: Settings) -> Verdict:
    """List packages that bring the contingency down."""
    rows = [
        row
        for row in material.allocation.rows
        if row.contingency < -settings.number(CLOSING_GAP)
    ]
    if not rows:
        return []
    currency = material.estimate.currency
    words = listed(f"{r.package} ({money(r.contingency, currency)})" for r in rows)
    message = f"{counted(len(rows), 'package')} bring the contingency down: {words}."
    ids = tuple(row.package for row in rows)
    return [Hit(severity="note", rows=ids, message=message)]


@input_check(
    slug="levels-without-holder",
    subject="allocation and holding",
    title="Money without holder or purpose",
    catches="A reserve that nobody holds, for nothing in particular.",
    rule="Each level under [contingency] has a purpose and a holder.",
    severities=("major",),
    todo="Write purpose and holder of each level.",
    sources=(
        Source("US CMS project: held centrally, not by subsystem managers", "READ"),
        Source(
            "US National Research Council (2001): no consistent policy on size or"
            " control of reserves",
            "READ",
        ),
        Source(
            "New South Wales guidance: allocate to the authority best placed", "READ"
        ),
    ),
)
def levels_without_holder(estimate: Estimate, _settings: Settings) -> Verdict:
    """Find funded levels without holder or purpose."""
    if not estimate.contingency.levels:
        return NotApplicable("No levels are listed under [contingency].")
    return [
        Hit(
            severity="major",
            where=level.name,
            message=f"{level.name} has no {' and no '.join(missing)}.",
        )
        for level in estimate.contingency.levels
        if (
            missing := [
                word
                for word, text in (("purpose", level.purpose), ("holder", level.holder))
                if not text.strip()
            ]
        )
    ]


CHECKS = (
    allocation_does_not_close,
    flat_allocation,
    negative_shares,
    levels_without_holder,
)
