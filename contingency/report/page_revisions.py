"""The pages about revisions: bridge, risks that moved, trend, contingency account."""

from __future__ import annotations

from dataclasses import dataclass

from contingency.report.chart_revisions import (
    AccountCurve,
    BridgeLine,
    CurveOf,
    TrendLine,
    account_chart,
    bridge_chart,
    trend_chart,
    two_curves_chart,
)
from contingency.report.charts import Chart
from contingency.report.look import Look
from contingency.report.page_results import Picture, picture
from contingency.report.wording import (
    NOTHING,
    SPACE,
    Amounts,
    MoneyUnit,
    chance,
    chart_unit,
    clipped,
    count,
    date,
    fixed,
    in_unit,
    level,
    listed,
    percent,
    plain,
    plural,
    probability,
    sentence,
    signed,
)
from contingency.setting.account import exceeds_delegation, lacking
from contingency.study import Study
from contingency.tracking.bridge import Step
from contingency.tracking.compare import Comparison, PrintedStep
from contingency.tracking.difference import Difference
from contingency.tracking.drawdown import Drawdown
from contingency.tracking.risks import RiskMovement, RiskState
from contingency.tracking.trend import Trend, TrendPoint

LONGEST = 160
"""Characters of a reason in a table."""
QUIET = {"unchanged"}
"""Movements that the table of risks leaves out."""


@dataclass(frozen=True, kw_only=True, slots=True)
class StepRow:
    """One step of the bridge."""

    name: str
    base: str
    contingency: str
    total: str
    noise: str
    is_chance: bool
    """Whether the change of contingency is not larger than its noise."""


@dataclass(frozen=True, kw_only=True, slots=True)
class EndRow:
    """Where a revision stands."""

    name: str
    base: str
    contingency: str
    total: str


@dataclass(frozen=True, kw_only=True, slots=True)
class MovedRow:
    """One row of the inputs that moved in a step."""

    family: str
    """Blank where it is that of the row above."""
    id: str
    name: str
    base: str
    contingency: str
    reason: str


@dataclass(frozen=True, kw_only=True, slots=True)
class RiskRow:
    """One risk that moved, or that is settled for good."""

    id: str
    name: str
    movement: str
    before: str
    after: str
    contingency: str
    base: str
    reason: str


@dataclass(frozen=True, kw_only=True, slots=True)
class CellRow:
    """One cell that differs."""

    file: str
    id: str
    field: str
    old: str
    new: str
    reason: str


@dataclass(frozen=True, kw_only=True, slots=True)
class TrendRow:
    """One revision."""

    name: str
    day: str
    estimate_class: str
    level: str
    base: str
    contingency: str
    percent: str
    total: str
    width: str
    base_enough: str


@dataclass(frozen=True, kw_only=True, slots=True)
class BridgePage:
    """The way from the revision before."""

    before: EndRow
    steps: tuple[StepRow, ...]
    after: EndRow
    at_old_level: str
    """What the contingency would be at the old level; blank where it is the same."""
    method: str
    remarks: tuple[str, ...]
    bridge: Picture
    curves: Picture
    moved: tuple[MovedRow, ...]
    risks: tuple[RiskRow, ...]
    cells: tuple[CellRow, ...]
    cells_words: str
    """How many cells differ, in a sentence."""


@dataclass(frozen=True, kw_only=True, slots=True)
class TrendPage:
    """All revisions, the oldest first."""

    rows: tuple[TrendRow, ...]
    remarks: tuple[str, ...]
    chart: Picture


@dataclass(frozen=True, kw_only=True, slots=True)
class RevisionsPage:
    """What changed since the revision before, and over all of them."""

    unit: str
    previous: str
    """Name of the revision before; blank where there is none."""
    bridge: BridgePage | None
    trend: TrendPage | None


@dataclass(frozen=True, kw_only=True, slots=True)
class EntryRow:
    """One entry of the account."""

    day: str
    id: str
    kind: str
    amount: str
    balance: str
    about: str
    """The risk or package, and the reason."""
    approved: str
    lacks: str
    """What the entry does not say; blank where it says all."""


@dataclass(frozen=True, kw_only=True, slots=True)
class ForecastRow:
    """One day of the run-down."""

    day: str
    need: str
    minimum: str
    milestone: str


@dataclass(frozen=True, kw_only=True, slots=True)
class AccountPage:
    """The contingency account against what is still needed."""

    unit: str
    day: str
    balance: str
    need: str
    level: str
    statement: str
    remarks: tuple[str, ...]
    entries: tuple[EntryRow, ...]
    forecast: tuple[ForecastRow, ...]
    chart: Picture


def revisions_page(
    study: Study, amounts: Amounts, look: Look
) -> tuple[RevisionsPage, list[Chart]]:
    """Return the page of revisions and its pictures; without pictures for a first."""
    charts: list[Chart] = []
    bridge: BridgePage | None = None
    trend: TrendPage | None = None
    found = study.comparison
    if found is not None:
        pictures = [
            _bridge_picture(found, amounts, look),
            _curves(found, amounts, look),
        ]
        bridge = _bridge_page(found, amounts, pictures)
        charts += pictures
    if study.trend is not None:
        chart = _trend_picture(study.trend, amounts, look)
        trend = _trend_page(study.trend, amounts, chart)
        charts.append(chart)
    page = RevisionsPage(
        unit=amounts.caption,
        previous=found.earlier.revision if found else "",
        bridge=bridge,
        trend=trend,
    )
    return page, charts


def account_page(
    study: Study, amounts: Amounts, look: Look
) -> tuple[AccountPage | None, list[Chart]]:
    """Return the page of the contingency account; None where none is kept."""
    found = study.drawdown
    if found is None:
        return None, []
    chart = _account_picture(found, study, amounts, look)
    page = AccountPage(
        unit=amounts.caption,
        day=date(found.account.day),
        balance=amounts.full(found.balance),
        need=amounts.full(found.need),
        level=level(found.level),
        statement=_account_words(found, amounts),
        remarks=_account_remarks(found, amounts),
        entries=_entry_rows(found, study),
        forecast=tuple(
            ForecastRow(
                day=date(point.day),
                need=amounts.cell(point.need),
                minimum=NOTHING
                if point.minimum is None
                else amounts.cell(point.minimum),
                milestone=point.milestone,
            )
            for point in found.forecast
        ),
        chart=picture(chart),
    )
    return page, [chart]


# --------------------------------------------------------------------------------------
# The bridge


def _bridge_page(
    found: Comparison, amounts: Amounts, charts: list[Chart]
) -> BridgePage:
    bridge = found.bridge
    printed = found.printed(amounts.step)
    moves_level = bridge.before.percent != bridge.after.percent
    feeding = [line for line in found.differences if line.feeds_the_result]
    return BridgePage(
        before=_end_row(found, amounts, is_after=False),
        steps=tuple(
            _step_row(step, row, amounts)
            for step, row in zip(bridge.steps, printed, strict=True)
        ),
        after=_end_row(found, amounts, is_after=True),
        at_old_level=amounts.full(bridge.at_old_level) if moves_level else "",
        method=found.method,
        remarks=_bridge_remarks(found, amounts),
        bridge=picture(charts[0]),
        curves=picture(charts[1]),
        moved=_moved_rows(found, amounts),
        risks=tuple(
            _risk_row(risk, amounts)
            for risk in found.risks
            if risk.movement not in QUIET
        ),
        cells=tuple(_cell_row(line) for line in feeding),
        cells_words=(
            f"{plural(len(found.differences), 'cell')} of the inputs differ; those "
            f"that figures are computed from, {count(len(feeding))}, are listed."
        ),
    )


def _end_row(found: Comparison, amounts: Amounts, *, is_after: bool) -> EndRow:
    """Return an end of the bridge in the rounding in which the steps close."""
    end = found.bridge.after if is_after else found.bridge.before
    revision = (found.later if is_after else found.earlier).revision
    base, contingency = found.printed_end(amounts.step, is_after=is_after)
    return EndRow(
        name=f"Revision {revision}, {level(end.percent)}",
        base=amounts.cell(base),
        contingency=amounts.cell(contingency),
        total=amounts.cell(base + contingency),
    )


def _step_row(step: Step, row: PrintedStep, amounts: Amounts) -> StepRow:
    return StepRow(
        name=step.family.heading,
        base=_moved(row.base, amounts),
        contingency=_moved(row.contingency, amounts),
        total=_moved(row.total, amounts),
        noise=_noise(step.noise, amounts),
        is_chance=step.is_within_noise,
    )


def _moved(amount: float, amounts: Amounts) -> str:
    """Return a change with its sign, in the unit of the tables."""
    unit = amounts.unit
    return signed(amount / unit.size, unit.digits)


def _noise(noise: float, amounts: Amounts) -> str:
    """Return noise to two figures, in the unit of the tables; blank if next to none."""
    unit = amounts.unit
    if noise < 1e-3 * unit.size:
        return ""
    return plain(float(f"{noise / unit.size:.2g}"))


def _bridge_remarks(found: Comparison, amounts: Amounts) -> tuple[str, ...]:
    remarks = []
    if found.lacks_factor:
        remarks.append(
            f"Revision {found.earlier.revision} is in money of "
            f"{date(found.earlier.price_date)}, this one of "
            f"{date(found.later.price_date)}, and no factor is given: growth of prices "
            "is inside the other steps."
        )
    if found.unexplained_base:
        remarks.append(
            f"Base of {amounts.full(found.unexplained_base)} moved without a reason in "
            "changes.csv."
        )
    return tuple(remarks)


def _moved_rows(found: Comparison, amounts: Amounts) -> tuple[MovedRow, ...]:
    """Return the rows behind the steps; the reason is that of the row."""
    said = {
        (line.file.rpartition(".")[0], line.id): line.reason
        for line in found.differences
        if line.reason
    }
    rows = []
    for step in found.bridge.steps:
        for i, row in enumerate(step.rows):
            rows.append(
                MovedRow(
                    family=step.family.heading if i == 0 else "",
                    id=row.id,
                    name=row.name,
                    base=_moved(row.base, amounts) if row.base else "",
                    contingency=_moved(row.contingency, amounts),
                    reason=clipped(said.get((row.file, row.id), ""), LONGEST),
                )
            )
    return tuple(rows)


def _risk_row(risk: RiskMovement, amounts: Amounts) -> RiskRow:
    reason = risk.reason or risk.evidence
    if risk.on:
        reason = f"{date(risk.on)}: {reason}" if reason else date(risk.on)
    return RiskRow(
        id=risk.id,
        name=risk.name,
        movement=risk.movement,
        before=_state(risk.old, amounts),
        after=_state(risk.new, amounts),
        contingency=_moved(risk.contingency, amounts) if risk.contingency else "",
        base=_moved(risk.base, amounts) if risk.base else "",
        reason=clipped(reason, LONGEST),
    )


def _state(state: RiskState | None, amounts: Amounts) -> str:
    """Return chance and mean impact of an event as one revision has it."""
    if state is None:
        return NOTHING
    if state.mean_impact is None:
        return state.status
    likely = "" if state.chance is None else plain(state.chance)
    if state.chance is not None and state.chance <= 1.0:
        likely = probability(state.chance)
    return f"{likely} of {amounts.cell(state.mean_impact)}"


def _cell_row(line: Difference) -> CellRow:
    return CellRow(
        file=line.file,
        id=line.id or NOTHING,
        field=line.field,
        old=clipped(line.old, 40) or NOTHING,
        new=clipped(line.new, 40) or NOTHING,
        reason=clipped(line.reason, LONGEST),
    )


def _bridge_picture(found: Comparison, amounts: Amounts, look: Look) -> Chart:
    bridge = found.bridge
    lines = [_end_line(found, amounts, is_after=False)]
    for step, row in zip(bridge.steps, found.printed(amounts.step), strict=True):
        lines.append(
            BridgeLine(
                name=step.family.heading,
                base=row.base,
                contingency=row.contingency,
                words=_moved(row.total, amounts),
                is_end=False,
            )
        )
    lines.append(_end_line(found, amounts, is_after=True))
    largest = sorted(lines[1:-1], key=lambda x: -abs(x.contingency))[:3]
    return Chart(
        name="bridge",
        alt=f"Base and contingency from {lines[0].name} to {lines[-1].name}, in "
        f"{amounts.caption}. Largest steps of the contingency: "
        + listed(f"{x.name} {_moved(x.contingency, amounts)}" for x in largest)
        + ".",
        drawing=bridge_chart(
            tuple(lines), look, heads=("Base", "Contingency", "Total")
        ),
    )


def _end_line(found: Comparison, amounts: Amounts, *, is_after: bool) -> BridgeLine:
    base, contingency = found.printed_end(amounts.step, is_after=is_after)
    row = _end_row(found, amounts, is_after=is_after)
    return BridgeLine(
        name=row.name,
        base=base,
        contingency=contingency,
        words=row.total,
        is_end=True,
    )


def _curves(found: Comparison, amounts: Amounts, look: Look) -> Chart:
    old, new = found.curves()
    bridge = found.bridge
    unit = chart_unit(bridge.after.total, amounts.step)
    ends = []
    for revision, curve, end in (
        (found.earlier.revision, old, bridge.before),
        (found.later.revision, new, bridge.after),
    ):
        ends.append(
            CurveOf(
                name=f"Revision {revision}",
                curve=curve,
                request=end.total,
                chance=end.percent / 100,
                words=f"{level(end.percent)} at {in_unit(end.total, unit)}",
            )
        )
    return Chart(
        name="two-curves",
        alt="Cumulative curves of the total cost of both revisions, in "
        f"{unit.caption(found.currency)}: "
        + listed(f"{one.name}, {one.words}" for one in ends)
        + ".",
        drawing=two_curves_chart(
            ends[0],
            ends[1],
            unit=unit,
            axis_title=f"Total cost, {unit.caption(found.currency)}",
            look=look,
        ),
    )


# --------------------------------------------------------------------------------------
# The trend


def _trend_page(trend: Trend, amounts: Amounts, chart: Chart) -> TrendPage:
    remarks = list(trend.remarks)
    if trend.changes_price_date:
        remarks.append("Each revision is in money of its own price date.")
    return TrendPage(
        rows=tuple(_trend_row(point, amounts) for point in trend.points),
        remarks=tuple(remarks),
        chart=picture(chart),
    )


def _trend_row(point: TrendPoint, amounts: Amounts) -> TrendRow:
    return TrendRow(
        name=point.revision,
        day=date(point.data_date),
        estimate_class=str(point.estimate_class or NOTHING),
        level=level(point.level),
        base=amounts.cell(point.base),
        contingency=amounts.cell(point.contingency),
        percent=percent(point.percent_of_base / 100, 1),
        total=amounts.cell(point.total),
        width=percent(point.width, 1),
        base_enough=chance(point.chance_base_is_enough),
    )


def _trend_picture(trend: Trend, amounts: Amounts, look: Look) -> Chart:
    unit = chart_unit(max(p.p90 for p in trend.points), amounts.step)
    lines = tuple(
        TrendLine(
            name=f"Revision {point.revision}",
            base=point.base,
            p10=point.p10,
            p90=point.p90,
            request=point.total,
            words=f"{fixed(100 * point.width, 1)}{SPACE}%",
        )
        for point in trend.points
    )
    return Chart(
        name="trend",
        alt=f"Total cost of all revisions, in {unit.caption(trend.currency)}: "
        + listed(
            f"revision {p.revision} from {in_unit(p.p10, unit)} to "
            f"{in_unit(p.p90, unit)}, base {in_unit(p.base, unit)}, request "
            f"{in_unit(p.total, unit)}"
            for p in trend.points
        )
        + ".",
        drawing=trend_chart(
            lines,
            unit=unit,
            axis_title=f"Total cost, {unit.caption(trend.currency)}",
            look=look,
        ),
    )


# --------------------------------------------------------------------------------------
# The account


def _account_words(found: Drawdown, amounts: Amounts) -> str:
    """Say whether what is left covers what is needed."""
    ratio = found.ratio
    if ratio is None:
        return "Nothing is needed any more for what remains."
    covers = "covers" if found.surplus >= 0 else "does not cover"
    return (
        f"On {date(found.account.day)} the account holds "
        f"{amounts.full(found.balance)}. The work that remains and the events that are "
        f"open need {amounts.full(found.need)} at {level(found.level)}. What is left "
        f"{covers} that: it is {percent(ratio)} of the need."
    )


def _account_remarks(found: Drawdown, amounts: Amounts) -> tuple[str, ...]:
    remarks = []
    if found.minimum is not None:
        state = "below" if found.is_below_minimum else "not below"
        remarks.append(
            f"The minimum curve asks for {amounts.full(found.minimum)} on that day; "
            f"the balance is {state} it."
        )
    if found.without_window and found.forecast:
        remarks.append(
            f"{count(len(found.without_window))} of the packages and events have no "
            "window after the data date and stay in the run-down in full."
        )
    remarks += [f"{label} occurred and no draw names it." for label in found.not_drawn]
    remarks += [
        f"{label} was drawn for, is still open and is not treated."
        for label in found.drawn_not_occurred
    ]
    if found.account.later:
        names = listed(entry.label for entry in found.account.later)
        remarks.append(f"Entries after the data date do not count: {names}.")
    return tuple(remarks)


def _entry_rows(found: Drawdown, study: Study) -> tuple[EntryRow, ...]:
    rule = study.estimate.account_rule
    rows = []
    for line in found.account.lines:
        entry = line.entry
        takes = entry.kind in {"drawn", "released"}
        lacks = list(lacking(entry))
        if exceeds_delegation(rule, entry):
            lacks.append("an approval within the delegation")
        about = f"{entry.event} {entry.package}".strip()
        reason = sentence(entry.reason)
        rows.append(
            EntryRow(
                day=date(entry.date),
                id=entry.id or NOTHING,
                kind=entry.kind,
                amount=signed(-entry.amount if takes else entry.amount),
                balance=fixed(line.balance),
                about=f"{about}: {reason}" if about and reason else about or reason,
                approved=", ".join(x for x in (entry.approved_by, entry.role) if x)
                or NOTHING,
                lacks=listed(lacks),
            )
        )
    return tuple(rows)


def _account_picture(
    found: Drawdown, study: Study, amounts: Amounts, look: Look
) -> Chart:
    opening = max(line.balance for line in found.account.lines)
    unit: MoneyUnit = chart_unit(max(opening, found.need, 1.0), amounts.step)
    curve = AccountCurve(
        balance=tuple((line.entry.date, line.balance) for line in found.account.lines),
        need=tuple((point.day, point.need) for point in found.forecast)
        or ((found.account.day, found.need),),
        minimum=tuple((m.on, m.amount) for m in study.estimate.account_rule.minimum),
        today=found.account.day,
    )
    return Chart(
        name="account",
        alt=f"Contingency account, in {unit.caption(found.currency)}: "
        f"{in_unit(found.balance, unit)} left on {date(found.account.day)}, "
        f"{in_unit(found.need, unit)} needed at {level(found.level)}.",
        drawing=account_chart(
            curve, unit=unit, unit_words=unit.caption(found.currency), look=look
        ),
    )
