"""Scope, base estimate and method: what the analysis covers and how it works."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

from contingency.estimate.nouns import PROJECT_WIDE, Estimate, ShapeName, WorkPackage
from contingency.report.wording import (
    NOTHING,
    SPACE,
    Amounts,
    count,
    date,
    listed,
    plain,
    plural,
    sentence,
)
from contingency.setting.printed import PrintedFigures
from contingency.study import Study


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
    grouped_by: str
    """What a row is: a group, a package, or either."""
    heading: str
    """The same as the heading of a column."""
    has_groups: bool
    rows: tuple[BaseRow, ...]
    total: str


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
        rest = plural(closed, "event is", "events are")
        coverage += f"; {rest} closed or occurred, and only listed"
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
        parts.append(
            f"{plural(silent, 'package does', 'packages do')} not say whether the "
            "value holds an allowance for risk"
        )
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
    row_is = _grouped_by(packages)
    return BasePage(
        statement=estimate.statements.base.strip()
        or "No statement of the base estimate is given.",
        allowance=sentence("; ".join(parts)),
        price_date=date(estimate.price_date),
        data_date=date(estimate.data_date),
        estimate_class="not stated" if grade is None else str(grade),
        unit=amounts.caption,
        grouped_by=row_is,
        heading=row_is.capitalize(),
        has_groups=row_is != "package",
        rows=tuple(lines),
        total=amounts.cell(printed.total.base),
    )


def _grouped_by(packages: Sequence[WorkPackage]) -> str:
    """Return what the rows of the base are, by whether the packages name a group."""
    grouped = [bool(package.group) for package in packages]
    if all(grouped):
        return "group"
    return "group or package" if any(grouped) else "package"


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
