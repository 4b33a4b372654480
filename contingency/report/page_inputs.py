"""Scope, base, method and inputs: what went into the analysis, row by row."""

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
    count,
    date,
    fixed,
    listed,
    plain,
    plural,
    probability,
    sentence,
)
from contingency.setting.printed import PrintedFigures
from contingency.study import Study

KIND_WORDS = {"data": "data", "analogue": "analogue", "judgement": "judgement"}


@dataclass(frozen=True, kw_only=True, slots=True)
class ExclusionRow:
    """One exclusion."""

    id: str
    text: str
    carried_by: str
    size: str


@dataclass(frozen=True, kw_only=True, slots=True)
class AssumptionRow:
    """One assumption."""

    id: str
    text: str
    effect: str
    holder: str
    expires: str


@dataclass(frozen=True, kw_only=True, slots=True)
class ScopePage:
    """Scope, exclusions and assumptions."""

    scope: str
    coverage: str
    """How many packages and events the analysis covers, in words."""
    exclusions: tuple[ExclusionRow, ...]
    assumptions: tuple[AssumptionRow, ...]


@dataclass(frozen=True, kw_only=True, slots=True)
class BaseRow:
    """Base of one group or of a package without a group."""

    name: str
    packages: str
    base: str


@dataclass(frozen=True, kw_only=True, slots=True)
class BasePage:
    """The base estimate and what is said of it."""

    statement: str
    allowance: str
    """What the packages say of allowances in their values."""
    price_date: str
    data_date: str
    estimate_class: str
    unit: str
    rows: tuple[BaseRow, ...]
    total: str


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


@dataclass(frozen=True, kw_only=True, slots=True)
class MethodPage:
    """What varies in the words of the method."""

    shapes: tuple[str, ...]
    """Names of the shapes in use."""
    has_percentile_ends: bool
    has_systemic: bool
    has_events: bool
    has_repeated: bool
    has_links: bool
    """Whether events require or exclude one another."""
    has_correlations: bool
    has_causes: bool
    has_spent: bool
    trials: str
    block: str
    blocks: str
    seed: str
    tolerance: str
    level: str


def scope_page(estimate: Estimate) -> ScopePage:
    """Return scope, exclusions and assumptions as stated."""
    said = estimate.statements
    closed = len(estimate.events) - len(estimate.open_events)
    coverage = (
        f"The analysis covers {plural(len(estimate.packages), 'work package')}, "
        f"{plural(len(estimate.systemic), 'systemic risk')} and "
        f"{plural(len(estimate.open_events), 'open risk event')}"
    )
    if closed:
        coverage += f"; {plural(closed, 'event')} closed or occurred are listed only"
    return ScopePage(
        scope=said.scope.strip() or "No scope is stated.",
        coverage=f"{coverage}.",
        exclusions=tuple(
            ExclusionRow(
                id=x.id,
                text=x.text,
                carried_by=x.carried_by or "nobody is named",
                size=x.size or NOTHING,
            )
            for x in said.exclusions
        ),
        assumptions=tuple(
            AssumptionRow(
                id=a.id,
                text=a.text,
                effect=a.effect,
                holder=a.holder or "nobody is named",
                expires=date(a.expires) if a.expires else NOTHING,
            )
            for a in said.assumptions
        ),
    )


def base_page(study: Study, printed: PrintedFigures, amounts: Amounts) -> BasePage:
    """Return the statement of the base and its sum by group."""
    estimate = study.estimate
    packages = estimate.packages
    no = sum(p.holds_allowance is False for p in packages)
    yes = [p.id for p in packages if p.holds_allowance]
    silent = len(packages) - no - len(yes)
    parts = []
    if no:
        parts.append(
            f"{plural(no, 'package states', 'packages state')} that the value holds no "
            "allowance for risk"
        )
    if yes:
        parts.append(f"{listed(yes)} {'holds' if len(yes) == 1 else 'hold'} one")
    if silent:
        parts.append(f"{plural(silent, 'package does', 'packages do')} not say")
    members = [row.group or row.name for row in study.allocation.rows]
    lines = [
        BaseRow(
            name=group.group,
            packages=count(members.count(group.group)),
            base=amounts.cell(line.base),
        )
        for group, line in zip(study.allocation.groups, printed.groups, strict=True)
        if any(
            row.package != PROJECT_WIDE and (row.group or row.name) == group.group
            for row in study.allocation.rows
        )
    ]
    grade = estimate.estimate_class
    return BasePage(
        statement=estimate.statements.base.strip()
        or "No statement of the base estimate is given.",
        allowance=sentence("; ".join(parts)),
        price_date=date(estimate.price_date),
        data_date=date(estimate.data_date),
        estimate_class="not stated" if grade is None else str(grade),
        unit=amounts.caption,
        rows=tuple(lines),
        total=amounts.cell(printed.total.base),
    )


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
    if package.loads:
        loads = ", ".join(f"{one.cause} {plain(one.weight)}" for one in package.loads)
        notes.append(f"Follows: {loads}.")
    if package.start and package.finish:
        profile = f", {package.spend}" if package.spend else ""
        notes.append(f"Spent {_window(package.start, package.finish)}{profile}.")
    return notes


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
    return (
        *(
            NOTHING if end is None else amounts.cell(end)
            for end in (cost.low, cost.likely, cost.high)
        ),
    )  # type: ignore[return-value]  # three ends make three cells


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
    if event.held_by:
        notes.append(f"Beyond the level held by: {event.held_by}.")
    return notes


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


def method_page(study: Study) -> MethodPage:
    """Return what the words of the method depend on."""
    estimate, run = study.estimate, study.simulation
    ranges = [
        *(p.cost for p in estimate.packages),
        *(r.uplift for r in estimate.systemic),
        *(e.impact_used for e in estimate.open_events),
    ]
    used = {cost.shape for cost in ranges}
    return MethodPage(
        shapes=tuple(shape.value for shape in ShapeName if shape in used),
        has_percentile_ends=any(not cost.ends.are_limits for cost in ranges),
        has_systemic=bool(estimate.systemic),
        has_events=bool(estimate.open_events),
        has_repeated=any(e.happens == "repeatedly" for e in estimate.open_events),
        has_links=any(e.requires or e.excludes for e in estimate.open_events),
        has_correlations=bool(estimate.correlations),
        has_causes=bool(estimate.causes),
        has_spent=any(p.spent for p in estimate.packages),
        trials=count(run.trials),
        block=count(run.block),
        blocks=count(run.blocks),
        seed=str(run.seed),
        tolerance=f"{plain(100 * run.tolerance)}{SPACE}%",
        level=study.target.name,
    )
