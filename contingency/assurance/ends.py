"""Checks of the ends of ranges: what they mean and where they lie."""

from __future__ import annotations

import numpy as np

from contingency.assurance.declaration import (
    COMMON_PRACTICE,
    Hit,
    Source,
    Verdict,
    input_check,
)
from contingency.assurance.rows import ranged_rows
from contingency.assurance.settings import Settings, Threshold
from contingency.assurance.wording import counted, listed, percent
from contingency.estimate.nouns import Estimate

IMPOSSIBLE_DRAWS = Threshold(
    name="impossible_draws_percent",
    default=1,
    unit="% of the draws",
    grade="H",
    meaning="largest share",
    most=100,
)


@input_check(
    slug="ends-undefined",
    subject="ranges",
    title="Low and high without a stated meaning",
    catches=(
        "A low and a high that one person meant as limits and another as"
        " percentiles. The same figures then give different contingencies."
    ),
    rule=(
        "Every row with a low and a high has `ends`, in its own row or under"
        " [ranges]. There is no default."
    ),
    severities=("stop",),
    todo=(
        "Ask the person who gave the range how often the cost may fall outside it,"
        " and write limits, P05-P95, P10-P90 or P15-P85 under `ends`."
    ),
    sources=(
        Source(
            "Joint Agency Cost Schedule Risk and Uncertainty Handbook: eliciting and"
            " interpreting bounds",
            "READ-title",
        ),
    ),
)
def ends_undefined(estimate: Estimate, _settings: Settings) -> Verdict:
    """Find rows whose low and high have no stated meaning."""
    rows = [row for row in ranged_rows(estimate) if not row.range.ends_stated]
    if not rows:
        return []
    # Widening of a symmetric triangle whose stated ends are P5, P10 or P15:
    # 1 / (1 - sqrt(2 q)), closed form.
    factors = [1.0 / (1.0 - np.sqrt(2.0 * q)) for q in (0.05, 0.10, 0.15)]
    return [
        Hit(
            severity="stop",
            rows=tuple(row.id for row in rows),
            message=(
                f"Nothing says what low and high mean for"
                f" {counted(len(rows), 'row')} ({listed(row.id for row in rows)});"
                " they were read as limits. If a symmetric range was meant as P05 to"
                f" P95, its true half-width is {factors[0]:.2f} times the stated one;"
                f" as P10 to P90 {factors[1]:.2f} times; as P15 to P85"
                f" {factors[2]:.2f} times."
            ),
        )
    ]


@input_check(
    slug="likely-at-an-end",
    subject="ranges",
    title="Likely value at an end of the range",
    catches="A range that can only rise, or only fall, from its likely value.",
    rule="low = likely or likely = high, in a range with spread.",
    severities=("note",),
    todo="Say why the cost cannot move the other way, or give both ends.",
    sources=(COMMON_PRACTICE,),
)
def likely_at_an_end(estimate: Estimate, _settings: Settings) -> Verdict:
    """Find ranges whose likely value is one of their ends."""
    rows = [
        row
        for row in ranged_rows(estimate)
        if row.range.likely is not None
        and row.range.likely in (row.range.low, row.range.high)
        and row.range.varies
    ]
    if not rows:
        return []
    message = (
        f"In {counted(len(rows), 'row')} the likely value is an end of the range:"
        f" {listed(row.id for row in rows)}."
    )
    return [Hit(severity="note", rows=tuple(row.id for row in rows), message=message)]


@input_check(
    slug="impossible-values",
    subject="ranges",
    title="Ranges that reach impossible values",
    catches=(
        "A distribution that runs below zero, where a package would earn money or a"
        " threat would help. Nothing is cut off by the simulation."
    ),
    rule=(
        "Share of the draws below zero, for packages and events, or below -100 % for"
        " systemic risks."
    ),
    thresholds=(IMPOSSIBLE_DRAWS,),
    severities=("caution",),
    todo="Choose a shape with limits, or ends that describe the cost as it can be.",
    sources=(Source("handbook practice: truncation is reported", "MEMORY"),),
)
def impossible_values(estimate: Estimate, settings: Settings) -> Verdict:
    """Find ranges with draws that no cost can have."""
    hits: list[Hit] = []
    for row in ranged_rows(estimate):
        floor = -1.0 if row.kind == "systemic" else 0.0
        below = float(row.range.distribution.cdf(np.array([floor - 1e-12]))[0])
        if 100 * below > settings.number(IMPOSSIBLE_DRAWS):
            message = (
                f"{percent(below, 1)} of the draws of {row.label} lie below"
                f" {percent(floor)}."
                if floor
                else f"{percent(below, 1)} of the draws of {row.label} are negative."
            )
            hits.append(Hit(severity="caution", where=row.id, message=message))
    return hits


CHECKS = (ends_undefined, likely_at_an_end, impossible_values)
