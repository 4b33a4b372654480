"""The outside view: what similar projects came to, and where this one stands."""

from __future__ import annotations

from dataclasses import dataclass

from contingency.assurance.calibration import calibrate
from contingency.assurance.outside_view import (
    OutsideAmount,
    OutsidePosition,
    OutsideView,
    outside_amounts,
    outside_view,
    uplift_left,
)
from contingency.estimate.modelled import projects_like
from contingency.estimate.nouns import ClosedProject, Estimate, OutsideRule
from contingency.report.chart_outside import OutsideCurve, Place, outside_chart
from contingency.report.charts import Chart
from contingency.report.look import Look
from contingency.report.page_results import Picture, picture
from contingency.report.wording import (
    NOTHING,
    SPACE,
    Amounts,
    chance,
    fixed,
    level,
    listed,
    percent,
    plural,
    probability,
    sentence,
)
from contingency.setting.printed import PrintedFigures
from contingency.study import Study

PERCENTS = (10, 25, 50, 75, 80, 90)
"""Percentiles of the table; the target joins them."""
DRAWN = tuple(range(2, 99))
"""Percentiles of a fitted curve that are drawn."""


@dataclass(frozen=True, kw_only=True, slots=True)
class GuardRow:
    """One thing that must be alike, and how that is ensured."""

    name: str
    words: str


@dataclass(frozen=True, kw_only=True, slots=True)
class PositionRow:
    """One amount of this project on the outside curve."""

    name: str
    total: str
    of_base: str
    outside: str
    """Chance that it is enough, by the outside view."""
    is_target: bool


@dataclass(frozen=True, kw_only=True, slots=True)
class OutsideRow:
    """One percentile by both views."""

    name: str
    of_base: str
    total: str
    model: str
    """Total of this estimate's own model."""
    is_target: bool


@dataclass(frozen=True, kw_only=True, slots=True)
class ClosedRow:
    """One closed project; money of its own record."""

    id: str
    name: str
    estimate: str
    final: str
    ratio: str
    notes: str


@dataclass(frozen=True, kw_only=True, slots=True)
class UpliftRow:
    """One kind of work with its published uplift."""

    kind: str
    share: str
    upper: str
    managed: str


@dataclass(frozen=True, kw_only=True, slots=True)
class Comparison:
    """The outside view where there is one."""

    source: str
    statement: str
    """Where the request falls, in a sentence."""
    guard: tuple[GuardRow, ...]
    curve: Picture
    is_history: bool
    positions: tuple[PositionRow, ...]
    levels: tuple[OutsideRow, ...]
    projects: tuple[ClosedRow, ...]
    """Empty with a published table."""
    back_test: str
    """How the history would have served its own projects; empty with a table."""


@dataclass(frozen=True, kw_only=True, slots=True)
class OutsidePage:
    """The outside view, or why there is none."""

    unit: str
    level: str
    reason: str
    """Why there is none; empty where there is one."""
    comparison: Comparison | None
    uplifts: tuple[UpliftRow, ...]
    uplift_left: str
    """What is left of the published uplifts, percent of the base."""
    uplift_source: str
    of_base: str
    """The contingency, percent of the base."""


def outside_page(
    study: Study, printed: PrintedFigures, amounts: Amounts, look: Look
) -> tuple[OutsidePage, list[Chart]]:
    """Return the page of the outside view, and its picture where there is one."""
    rule = study.estimate.outside_rule
    view = outside_view(study)
    comparison: Comparison | None = None
    charts: list[Chart] = []
    if not isinstance(view, str):
        charts = [_chart(study, view, look)]
        comparison = _comparison(study, view, printed, amounts, charts[0])
    page = OutsidePage(
        unit=amounts.caption,
        level=study.target.name,
        reason=view if isinstance(view, str) else "",
        comparison=comparison,
        uplifts=_uplift_rows(rule),
        uplift_left=percent(uplift_left(rule.uplifts), 1),
        uplift_source=sentence(rule.source) or "No source is given.",
        of_base=percent(study.target.percent_of_base / 100, 1),
    )
    return page, charts


def _comparison(
    study: Study,
    view: OutsideView,
    printed: PrintedFigures,
    amounts: Amounts,
    chart: Chart,
) -> Comparison:
    estimate, target = study.estimate, study.target.percent
    is_history = view.kind == "history"
    return Comparison(
        source=view.source,
        statement=_statement(study, view),
        guard=tuple(
            GuardRow(name=name, words=sentence(words))
            for name, words in zip(
                ("Stage", "Money", "Scope"), view.comparable, strict=True
            )
        ),
        curve=picture(chart),
        is_history=is_history,
        positions=tuple(
            PositionRow(
                name=_named(one, study),
                total=amounts.cell(one.amount),
                of_base=percent(one.ratio, 1),
                outside=_outside_words(one, view),
                is_target=one.name == study.target.name,
            )
            for one in view.positions
        ),
        levels=tuple(
            _outside_row(one, printed, amounts, is_target=one.percent == target)
            for one in outside_amounts(
                view, base=estimate.base, percents=(*PERCENTS, target)
            )
        ),
        projects=_closed_rows(estimate) if is_history else (),
        back_test=_back_test(estimate) if is_history else "",
    )


def _named(one: OutsidePosition, study: Study) -> str:
    """Return an amount's name; the target level is what is asked for."""
    if one.name == study.target.name:
        return f"Request ({one.name})"
    return one.name.capitalize()


def _outside_words(one: OutsidePosition, view: OutsideView) -> str:
    """Return the chance that an amount is enough, by the outside view."""
    if view.kind == "history":
        return chance(one.low_percent / 100)
    if one.low_percent == 0:
        return f"below {fixed(one.high_percent)}{SPACE}%"
    if one.high_percent == 100:
        return f"{fixed(one.low_percent)}{SPACE}% or more"
    return f"{fixed(one.low_percent)}{SPACE}% to {fixed(one.high_percent)}{SPACE}%"


def _statement(study: Study, view: OutsideView) -> str:
    """Say where the request falls on both curves."""
    asked = [one for one in view.positions if one.name == study.target.name]
    if not asked:
        return "The base is nought, so that no ratio to it can be placed."
    given = "closed projects, taken alone, give"
    if view.kind == "table":
        given = "published percentiles give"
    return (
        f"This estimate's own model gives the request a chance of "
        f"{study.target.percent}{SPACE}% of being enough; the {given} it "
        f"{_outside_words(asked[0], view)}."
    )


def _outside_row(
    one: OutsideAmount, printed: PrintedFigures, amounts: Amounts, *, is_target: bool
) -> OutsideRow:
    return OutsideRow(
        name=level(one.percent),
        of_base=percent(one.ratio, 1),
        total=amounts.cell(one.total),
        model=amounts.cell(printed.percentiles[one.percent - 1].total),
        is_target=is_target,
    )


def _closed_rows(estimate: Estimate) -> tuple[ClosedRow, ...]:
    """Return the closed projects compared with, in file order."""
    projects = projects_like(estimate.history, estimate.outside_rule)
    digits = 0 if all(_is_whole(project) for project in projects) else 2
    return tuple(
        ClosedRow(
            id=project.id,
            name=project.name or NOTHING,
            estimate=fixed(project.estimate, digits),
            final=fixed(project.final, digits),
            ratio=percent(project.ratio, 1),
            notes=project.notes,
        )
        for project in projects
    )


def _is_whole(project: ClosedProject) -> bool:
    return project.estimate.is_integer() and project.final.is_integer()


def _back_test(estimate: Estimate) -> str:
    """Return the sentences of the back-test of the history on itself."""
    projects = projects_like(estimate.history, estimate.outside_rule)
    return " ".join(record.sentence for record in calibrate(projects).funded)


def _uplift_rows(rule: OutsideRule) -> tuple[UpliftRow, ...]:
    return tuple(
        UpliftRow(
            kind=part.kind,
            share=probability(part.share),
            upper=probability(part.upper),
            managed=probability(part.managed),
        )
        for part in rule.uplifts
    )


def _chart(study: Study, view: OutsideView, look: Look) -> Chart:
    """Return the outside curve with base, P50 and request on it."""
    is_history = view.kind == "history"
    drawn = [(p, view.ratio(p)) for p in DRAWN] if is_history else view.points
    places = tuple(
        Place(
            name=_named(one, study),
            ratio=one.ratio,
            span=(one.low_percent, one.high_percent),
            ratio_words=percent(one.ratio),
            words=f"{_outside_words(one, view)} by the outside view",
            is_target=one.name == study.target.name,
        )
        for one in view.positions
    )
    return Chart(
        name="outside",
        alt="Final cost of similar projects in percent of their base: "
        + listed(
            f"{place.name} {place.ratio_words}, enough with {place.words}"
            for place in places
        )
        + ".",
        drawing=outside_chart(
            OutsideCurve(
                points=tuple((p, ratio) for p, ratio in drawn if ratio is not None),
                given=view.ratios,
                given_words=f"{plural(len(view.ratios), 'closed project')}, one stroke "
                "each",
                are_points_given=not is_history,
            ),
            places,
            "Final cost, % of the base estimate",
            look,
        ),
    )
