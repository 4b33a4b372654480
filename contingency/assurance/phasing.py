"""Checks of money by year and of the windows of events."""

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
from contingency.assurance.holding import CLOSING_GAP
from contingency.assurance.material import Material
from contingency.assurance.settings import Settings, Threshold
from contingency.assurance.wording import money, percent
from contingency.estimate.nouns import Estimate

AFTER_WINDOW = Threshold(
    name="money_after_window_percent",
    default=25,
    unit="% of the events' contingency",
    grade="H",
    meaning="caution above",
    most=100,
)
NO_FUNDING = NotApplicable("No package has a spending window.")


@result_check(
    slug="phasing-does-not-close",
    subject="allocation and holding",
    title="Phasing and prices do not close",
    catches="Amounts by year that do not add up to what is asked for.",
    rule=(
        "Base and contingency of all years add up to base and contingency at the"
        " target; in each year base, contingency and escalation make the total."
    ),
    thresholds=(CLOSING_GAP,),
    severities=("stop",),
    todo="Do not use the funding table; report it with the estimate folder.",
    sources=(
        Source(
            "GAO-20-195G, survey of step 9: phase and convert to budget-year money",
            "READ",
        ),
        Source("New Zealand outturn rule", "READ"),
        Source("GAO-09-3SP: uncertainty is on the total, not by year", "READ"),
    ),
)
def phasing_does_not_close(material: Material, settings: Settings) -> Verdict:
    """Find sums of years that differ from the request."""
    years, currency = material.funding, material.estimate.currency
    if not years:
        return NO_FUNDING
    gaps = {
        "The base by year differs from the base": (
            fsum(year.base for year in years) - material.estimate.base
        ),
        "The contingency by year differs from the contingency at the target": (
            fsum(year.contingency for year in years) - material.target.contingency
        ),
    } | {
        f"The total of {year.year} differs from the sum of its parts": (
            year.total - fsum((year.base, year.contingency, year.escalation))
        )
        for year in years
    }
    allowed = settings.number(CLOSING_GAP) + 1e-12 * abs(material.target.total)
    return [
        Hit(severity="stop", message=f"{words} by {money(gap, currency)}.")
        for words, gap in gaps.items()
        if not abs(gap) <= allowed
    ]


@result_check(
    slug="money-after-window",
    subject="allocation and holding",
    title="Event money after the events",
    catches="Contingency that is phased like the base though the risk peaks elsewhere.",
    rule=(
        "Share of the events' contingency in years that start after the last window of"
        " an open event has closed."
    ),
    thresholds=(AFTER_WINDOW,),
    severities=("caution",),
    todo="Phase the events' contingency over their windows.",
    sources=(COMMON_PRACTICE,),
)
def money_after_window(material: Material, settings: Settings) -> Verdict:
    """Find event money in years in which no event can happen any more."""
    if not material.funding:
        return NO_FUNDING
    events = material.estimate.open_events
    windows = [event.window_finish for event in events if event.window_finish]
    if not events or len(windows) < len(events):
        return NotApplicable("Not every open event has a window.")
    last = max(windows)
    month = material.estimate.financial_year_starts or 1
    last_starts = last.year if last.month >= month else last.year - 1
    whole = fsum(year.event_contingency for year in material.funding)
    late = fsum(
        year.event_contingency for year in material.funding if year.starts > last_starts
    )
    if whole <= 0 or 100 * late <= settings.number(AFTER_WINDOW) * whole:
        return []
    message = (
        f"{percent(late / whole)} of the events' contingency,"
        f" {money(late, material.estimate.currency)}, lies in years after {last}, when"
        " the last window closes."
    )
    return [Hit(severity="caution", message=message)]


@input_check(
    slug="window-outside-work",
    subject="allocation and holding",
    title="Window outside the work",
    catches="An event that is due before its packages begin or after they are done.",
    rule=(
        "The window of an open event overlaps the dates of at least one package that"
        " it hits, where both have dates."
    ),
    severities=("caution",),
    todo="Correct the window, or the dates of the package.",
    sources=(COMMON_PRACTICE,),
)
def window_outside_work(estimate: Estimate, _settings: Settings) -> Verdict:
    """Find events that cannot meet the work that they hit."""
    hits: list[Hit] = []
    compared = 0
    for event in estimate.open_events:
        start, finish = event.window_start, event.window_finish
        packages = [
            package
            for share in event.shares
            if (package := estimate.find_package(share.package)) is not None
            and package.start is not None
            and package.finish is not None
        ]
        if (start is None and finish is None) or not packages:
            continue
        compared += 1
        meets = any(
            (finish is None or package.start is None or finish >= package.start)
            and (start is None or package.finish is None or start <= package.finish)
            for package in packages
        )
        if not meets:
            message = (
                f"The window of {event.label}, {start or 'open'} to"
                f" {finish or 'open'}, lies outside the dates of"
                f" {', '.join(package.id for package in packages)}."
            )
            hits.append(Hit(severity="caution", where=event.id, message=message))
    if not compared:
        return NotApplicable("No open event and its packages both have dates.")
    return hits


CHECKS = (phasing_does_not_close, money_after_window, window_outside_work)
