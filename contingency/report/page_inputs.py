"""Inputs: everything that was entered, row by row, with its evidence."""

from __future__ import annotations

import datetime as dt
from dataclasses import dataclass

from contingency.estimate.nouns import (
    PROJECT_WIDE,
    CostRange,
    Estimate,
    Evidence,
    RiskEvent,
    ShapeName,
    SystemicRisk,
    WorkPackage,
)
from contingency.report.wording import (
    DASH,
    NOTHING,
    SPACE,
    Amounts,
    date,
    fixed,
    listed,
    plain,
    probability,
    sentence,
)
from contingency.study import Study


@dataclass(frozen=True, kw_only=True, slots=True)
class PackageRow:
    """One package and its range."""

    id: str
    name: str
    base: str
    low: str
    likely: str
    high: str
    ends: str
    shape: str
    notes: str
    """As written, spent, loads; may be empty."""
    evidence: str


@dataclass(frozen=True, kw_only=True, slots=True)
class PackageGroup:
    """Packages under one heading."""

    heading: str
    """Empty for packages without a group."""
    rows: tuple[PackageRow, ...]


@dataclass(frozen=True, kw_only=True, slots=True)
class SystemicRow:
    """One systemic risk."""

    id: str
    name: str
    low: str
    likely: str
    high: str
    ends: str
    shape: str
    applies_to: str
    evidence: str


@dataclass(frozen=True, kw_only=True, slots=True)
class EventState:
    """An event before or after treatment."""

    state: str
    chance: str
    low: str
    likely: str
    high: str
    ends: str
    shape: str
    is_used: bool


@dataclass(frozen=True, kw_only=True, slots=True)
class EventRow:
    """One event with one or two states."""

    id: str
    name: str
    kind: str
    status: str
    """Empty for an open event."""
    owner: str
    states: tuple[EventState, ...]
    notes: str
    evidence: str


@dataclass(frozen=True, kw_only=True, slots=True)
class CauseRow:
    """One common cause and the packages that follow it."""

    id: str
    name: str
    packages: str
    basis: str


@dataclass(frozen=True, kw_only=True, slots=True)
class CorrelationRow:
    """One correlation between two ranges."""

    a: str
    b: str
    correlation: str


@dataclass(frozen=True, kw_only=True, slots=True)
class InputsPage:
    """Everything that was entered."""

    unit: str
    ends: str
    packages: tuple[PackageGroup, ...]
    systemic: tuple[SystemicRow, ...]
    events: tuple[EventRow, ...]
    causes: tuple[CauseRow, ...]
    correlations: tuple[CorrelationRow, ...]
    general_dependence: str
    average_correlation: str
    repair: str
    """What was changed in the correlations, in words; empty if nothing was."""


def inputs_page(study: Study, *, step: float) -> InputsPage:
    """Return every input with its evidence, as exactly as it was entered."""
    estimate = study.estimate
    amounts = Amounts(currency=estimate.currency, step=entered_step(estimate, step))
    groups: dict[str, list[PackageRow]] = {}
    for package in estimate.packages:
        row = _package_row(package, amounts)
        groups.setdefault(package.group, []).append(row)
    general = estimate.general_dependence
    average = study.implied_average_correlation
    repair = study.correlation_repair
    return InputsPage(
        unit=amounts.caption,
        ends=_ends_words(estimate),
        packages=tuple(
            PackageGroup(heading=heading, rows=tuple(rows))
            for heading, rows in groups.items()
        ),
        systemic=tuple(_systemic_row(risk, estimate) for risk in estimate.systemic),
        events=tuple(_event_row(event, estimate, amounts) for event in estimate.events),
        causes=tuple(
            CauseRow(
                id=cause.id,
                name=cause.name,
                packages=_followers(estimate, cause.id) or "no package",
                basis=cause.basis or NOTHING,
            )
            for cause in estimate.causes
        ),
        correlations=tuple(
            CorrelationRow(a=p.a, b=p.b, correlation=fixed(p.correlation, 2))
            for p in estimate.correlations
        ),
        general_dependence="not stated" if general is None else fixed(general, 2),
        average_correlation=(
            "none, for fewer than two packages vary"
            if average is None
            else fixed(average, 2)
        ),
        repair=""
        if repair is None
        else f"The largest change is {fixed(repair[0], 3)}, between {repair[1]} and "
        f"{repair[2]}.",
    )


def entered_step(estimate: Estimate, step: float) -> float:
    """Return the largest step, at most `step`, that shows what was entered exactly.

    Amounts written in percent are not looked at: they are rounded, and the table
    shows the percentages beside them.
    """
    amounts = [package.base for package in estimate.packages]
    amounts += [p.spent for p in estimate.packages if p.spent is not None]
    costs = [package.cost for package in estimate.packages]
    costs += [e.impact for e in estimate.events if e.impact]
    costs += [e.after_impact for e in estimate.events if e.after_impact]
    for cost in costs:
        ends = zip((cost.low, cost.likely, cost.high), cost.written, strict=False)
        amounts += [x for x, cell in ends if x is not None and cell and "%" not in cell]
    for power in (1000.0, 100.0, 10.0, 1.0, 0.1):
        if power <= step and all(
            abs(x / power - round(x / power)) < 1e-6 for x in amounts
        ):
            return power
    return min(step, 0.01)


def _ends_words(estimate: Estimate) -> str:
    if estimate.ends is None:
        return "not stated; rows without their own words are read as limits"
    return _dashed(str(estimate.ends))


def _followers(estimate: Estimate, cause: str) -> str:
    return ", ".join(
        f"{package.id}{SPACE}({plain(load.weight)})"
        for package in estimate.packages
        for load in package.loads
        if load.cause == cause
    )


def _package_row(package: WorkPackage, amounts: Amounts) -> PackageRow:
    cost = package.cost
    low, likely, high = _money_ends(cost, amounts)
    return PackageRow(
        id=package.id,
        name=package.name,
        base=amounts.cell(package.base),
        low=low,
        likely=likely,
        high=high,
        ends=_ends(cost),
        shape=cost.shape.value,
        notes=" ".join(_package_notes(package, amounts)),
        evidence=evidence_words(package.evidence),
    )


def _package_notes(package: WorkPackage, amounts: Amounts) -> list[str]:
    notes = _as_written(package.cost)
    if package.spent is not None:
        notes.append(f"Spent: {amounts.cell(package.spent)}.")
    if package.progress is not None:
        notes.append(f"Work done: {probability(package.progress)}.")
    notes += _price_notes(package)
    if package.holds_allowance is not None:
        holds = "holds an" if package.holds_allowance else "holds no"
        notes.append(f"The base {holds} allowance for risk.")
    if package.loads:
        loads = ", ".join(f"{one.cause} {plain(one.weight)}" for one in package.loads)
        notes.append(f"Follows: {loads}.")
    if package.start and package.finish:
        profile = f", {package.spend}" if package.spend else ""
        notes.append(f"To be spent {_window(package.start, package.finish)}{profile}.")
    return notes


def _price_notes(package: WorkPackage) -> list[str]:
    """Return in which money the base is, where the row says so."""
    words = [f"{package.price_basis} money"] if package.price_basis else []
    words += [f"of {date(package.price_date)}"] if package.price_date else []
    return [f"Prices: {' '.join(words)}."] if words else []


def _as_written(cost: CostRange) -> list[str]:
    """Return the cells of the file where the figures in the table differ from them."""
    low, likely, high, outcomes = cost.written
    notes = []
    if any("%" in cell for cell in (low, likely, high)):
        cells = " / ".join(cell or NOTHING for cell in (low, likely, high))
        notes.append(f"Written: {cells}.")
    if outcomes:
        notes.append(f"Outcomes: {outcomes}.")
    return notes


def _window(start: dt.date | None, finish: dt.date | None) -> str:
    if start and finish:
        return f"{date(start)} to {date(finish)}"
    return f"from {date(start)}" if start else f"until {date(finish)}" if finish else ""


def _money_ends(cost: CostRange, amounts: Amounts) -> tuple[str, str, str]:
    """Return low, likely and high as a table shows them."""
    if cost.shape is ShapeName.FIXED:
        only = cost.likely if cost.likely is not None else cost.distribution.mean
        return NOTHING, amounts.cell(only), NOTHING
    low, likely, high = (
        NOTHING if end is None else amounts.cell(end)
        for end in (cost.low, cost.likely, cost.high)
    )
    return low, likely, high


def _ends(cost: CostRange) -> str:
    if cost.shape in (ShapeName.FIXED, ShapeName.DISCRETE, ShapeName.POINTS):
        return NOTHING
    return _dashed(str(cost.ends))


def _dashed(ends: str) -> str:
    return ends.replace("-", DASH)


def evidence_words(evidence: Evidence) -> str:
    """Return basis, kind, who gave it and when, in one line."""
    if not evidence.is_recorded:
        return "No basis is recorded."
    more = [
        evidence.kind or "",
        f"given by {evidence.given_by}" * bool(evidence.given_by),
    ]
    more.append(date(evidence.given_on) if evidence.given_on else "")
    rest = ", ".join(word for word in more if word)
    basis = evidence.basis.strip().rstrip(".")
    return f"{basis} ({rest})." if rest else f"{basis}."


def _systemic_row(risk: SystemicRisk, estimate: Estimate) -> SystemicRow:
    uplift = risk.uplift
    cells = tuple(
        NOTHING if end is None else f"{plain(100 * end)}{SPACE}%"
        for end in (uplift.low, uplift.likely, uplift.high)
    )
    everything = len(risk.packages) == len(estimate.packages)
    return SystemicRow(
        id=risk.id,
        name=risk.name,
        low=cells[0],
        likely=cells[1],
        high=cells[2],
        ends=_ends(uplift),
        shape=uplift.shape.value,
        applies_to="all packages" if everything else ", ".join(risk.applies_to),
        evidence=evidence_words(risk.evidence),
    )


def _event_row(event: RiskEvent, estimate: Estimate, amounts: Amounts) -> EventRow:
    states = [
        _event_state(
            event,
            "Before treatment",
            event.probability,
            event.frequency,
            event.impact,
            amounts,
            is_used=event.use == "before",
        )
    ]
    if event.after_impact is not None or event.use == "after":
        states.append(
            _event_state(
                event,
                "After treatment",
                event.after_probability,
                event.after_frequency,
                event.after_impact,
                amounts,
                is_used=event.use == "after",
            )
        )
    return EventRow(
        id=event.id,
        name=event.name,
        kind=event.kind,
        status="" if event.is_open else event.status,
        owner=event.owner or "no owner",
        states=tuple(states),
        notes=" ".join(_event_notes(event, estimate, amounts)),
        evidence=evidence_words(event.evidence),
    )


def _event_state(
    event: RiskEvent,
    state: str,
    chance: float | None,
    frequency: float | None,
    impact: CostRange | None,
    amounts: Amounts,
    *,
    is_used: bool,
) -> EventState:
    low, likely, high = (
        _money_ends(impact, amounts) if impact else (NOTHING, NOTHING, NOTHING)
    )
    repeated = event.happens == "repeatedly"
    times = f"{plain(frequency)} times" if frequency is not None else NOTHING
    once = probability(chance) if chance is not None else NOTHING
    return EventState(
        state=state,
        chance=times if repeated else once,
        low=low,
        likely=likely,
        high=high,
        ends=_ends(impact) if impact else NOTHING,
        shape=impact.shape.value if impact else NOTHING,
        is_used=is_used and event.is_open,
    )


def _event_notes(event: RiskEvent, estimate: Estimate, amounts: Amounts) -> list[str]:
    notes = _as_written(event.impact) if event.impact else []
    shares = [
        f"{share.package}{SPACE}{probability(share.fraction)}"
        for share in event.shares
        if share.package != PROJECT_WIDE
    ]
    notes.append(f"Falls on {', '.join(shares)}." if shares else "Project-wide.")
    if event.requires:
        notes.append(f"Only if {event.requires} happens.")
    if event.excludes:
        notes.append(f"Not together with {listed(event.excludes)}.")
    if event.window_start or event.window_finish:
        notes.append(f"Window: {_window(event.window_start, event.window_finish)}.")
    if event.response:
        notes.append(f"Response: {_response(event, estimate, amounts)}.")
    if event.contract:
        share = event.retained_share
        part = f", {probability(share)} retained" if share is not None else ""
        clause = f" ({event.clause})" if event.clause else ""
        notes.append(f"By contract {event.contract}{part}{clause}.")
    elif event.clause:
        notes.append(f"Contract: {event.clause}.")
    if event.in_scope is not None:
        where = "Inside" if event.in_scope else "Outside"
        notes.append(f"{where} the approved scope.")
    notes += _review_notes(event)
    if event.held_by:
        notes.append(f"Beyond the level held by: {event.held_by}.")
    return notes


def _review_notes(event: RiskEvent) -> list[str]:
    """Return when the event was looked at and when it will be again, where given."""
    words = [f"Reviewed on {date(event.reviewed_on)}"] if event.reviewed_on else []
    words += [f"next review {date(event.next_review)}"] if event.next_review else []
    return [sentence(", ".join(words))] if words else []


def _response(event: RiskEvent, estimate: Estimate, amounts: Amounts) -> str:
    words = [event.response.rstrip(".")]
    if event.response_cost is not None:
        words.append(f"cost {amounts.full(event.response_cost)}")
    if event.response_package:
        package = estimate.find_package(event.response_package)
        words.append(f"in {package.id if package else event.response_package}")
    if event.response_owner:
        words.append(event.response_owner)
    if event.response_due:
        words.append(f"due {date(event.response_due)}")
    return ", ".join(words)
