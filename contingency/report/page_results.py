"""Results: distribution, split, allocation, drivers, events beyond the level."""

from __future__ import annotations

from dataclasses import dataclass

from contingency.estimate.nouns import PROJECT_WIDE, RiskEvent
from contingency.report.charts import KINDS, Chart
from contingency.report.page_front import LevelRow, level_rows
from contingency.report.wording import (
    NOTHING,
    SPACE,
    Amounts,
    chance,
    fixed,
    level,
    percent,
    plain,
    probability,
    signed,
)
from contingency.setting.coverage import EventCoverage
from contingency.setting.drivers import Driver
from contingency.setting.levels import percent_of
from contingency.setting.printed import PrintedFigures, PrintedLine
from contingency.study import Study

PRINTED_PERCENTS = (1, *range(5, 100, 5), 99)
"""Percentiles of the table; the target joins them."""


@dataclass(frozen=True, kw_only=True, slots=True)
class Picture:
    """A chart as a page places it."""

    name: str
    alt: str


@dataclass(frozen=True, kw_only=True, slots=True)
class PercentileRow:
    """One percentile."""

    name: str
    total: str
    contingency: str
    percent_of_base: str
    is_target: bool


@dataclass(frozen=True, kw_only=True, slots=True)
class ResultPage:
    """The distribution of the total."""

    unit: str
    base_is_enough: str
    mean: str
    mean_above_base: str
    standard_deviation: str
    variation: str
    """Coefficient of variation."""
    level: str
    interval: str
    target_total: str
    cumulative: Picture
    density: Picture
    levels: tuple[LevelRow, ...]
    percentiles: tuple[tuple[PercentileRow, ...], ...]
    """Two columns of rows."""


@dataclass(frozen=True, kw_only=True, slots=True)
class SplitRow:
    """One source of the contingency."""

    name: str
    what: str
    amount: str
    share: str
    second: str
    is_sum: bool


@dataclass(frozen=True, kw_only=True, slots=True)
class SplitPage:
    """The contingency by source."""

    unit: str
    level: str
    rows: tuple[SplitRow, ...]
    expected: str
    margin: str


@dataclass(frozen=True, kw_only=True, slots=True)
class AllocationRow:
    """One line of the allocation."""

    id: str
    name: str
    base: str
    ranges: str
    systemic: str
    events: str
    contingency: str
    of_base: str
    expected: str
    margin: str
    second: str


@dataclass(frozen=True, kw_only=True, slots=True)
class AllocationGroup:
    """Rows under one heading, with their sum; a row without a group is alone."""

    rows: tuple[AllocationRow, ...]
    subtotal: AllocationRow | None


@dataclass(frozen=True, kw_only=True, slots=True)
class AllocationPage:
    """The contingency by package."""

    unit: str
    level: str
    groups: tuple[AllocationGroup, ...]
    total: AllocationRow
    picture: Picture
    picture_note: str
    has_project_wide: bool
    is_wide: bool
    """Whether the amounts are too long for an upright page."""
    has_negative: bool


@dataclass(frozen=True, kw_only=True, slots=True)
class DriverRow:
    """One driver with all its measures."""

    id: str
    name: str
    kind: str
    share: str
    mean_shift: str
    low: str
    high: str
    effect: str


@dataclass(frozen=True, kw_only=True, slots=True)
class DriversPage:
    """What drives the total."""

    unit: str
    level: str
    swing: Picture | None
    effect: Picture | None
    drivers: tuple[DriverRow, ...]
    causes: tuple[DriverRow, ...]


@dataclass(frozen=True, kw_only=True, slots=True)
class CoverageRow:
    """One threat and what the level holds for it."""

    id: str
    name: str
    chance: str
    impact: str
    funded: str
    coverage: str
    holder: str
    is_thin: bool


@dataclass(frozen=True, kw_only=True, slots=True)
class CoveragePage:
    """Events that the level does not meaningfully fund."""

    unit: str
    level: str
    has_contingency: bool
    """Whether there is an amount above the base that a cost can be large against."""
    large: str
    """Share of the contingency above which an impact is large, in words."""
    thin: str
    """Coverage below which an event is not meaningfully funded, in words."""
    thin_count: str
    """How many events that concerns, in words; empty for none."""
    has_repeated: bool
    """Whether a row is of an event that can happen more than once."""
    rows: tuple[CoverageRow, ...]


def result_page(
    study: Study, printed: PrintedFigures, amounts: Amounts, charts: dict[str, Chart]
) -> ResultPage:
    """Return curve, density and percentiles."""
    rows = [
        _percentile_row(study, printed, amounts, p)
        for p in sorted({*PRINTED_PERCENTS, study.target.percent})
    ]
    half = (len(rows) + 1) // 2
    target = study.target
    return ResultPage(
        unit=amounts.caption,
        base_is_enough=chance(study.chance_base_is_enough),
        mean=amounts.full(printed.mean),
        mean_above_base=amounts.full(printed.total.expected),
        standard_deviation=amounts.full(study.standard_deviation),
        variation=percent(percent_of(study.standard_deviation, study.mean) / 100, 1),
        level=target.name,
        interval=f"{amounts.cell(target.low)} to {amounts.cell(target.high)}",
        target_total=amounts.cell(printed.request),
        cumulative=picture(charts["cumulative"]),
        density=picture(charts["density"]),
        levels=level_rows(study, printed, amounts),
        percentiles=(tuple(rows[:half]), tuple(rows[half:])),
    )


def picture(chart: Chart) -> Picture:
    """Return a chart as a page places it."""
    return Picture(name=chart.name, alt=chart.alt)


def _percentile_row(
    study: Study, printed: PrintedFigures, amounts: Amounts, p: int
) -> PercentileRow:
    line = printed.percentiles[p - 1]
    return PercentileRow(
        name=level(p),
        total=amounts.cell(line.total),
        contingency=amounts.cell(line.contingency),
        percent_of_base=percent(
            percent_of(
                study.percentiles[p - 1] - study.estimate.base, study.estimate.base
            )
            / 100,
            1,
        ),
        is_target=p == study.target.percent,
    )


def split_page(study: Study, printed: PrintedFigures, amounts: Amounts) -> SplitPage:
    """Return the split with its second opinion."""
    total, cell = printed.total, amounts.cell
    words = (
        ("Estimate ranges", "spread of quantity and price of known work"),
        ("Systemic risks", "how the project is defined and run"),
        ("Risk events", "what may or may not happen, savings included"),
    )
    own = (total.ranges, total.systemic, total.events)

    def share(whole_percent: int) -> str:
        """Return a share of the contingency; of none there are no shares."""
        return f"{fixed(whole_percent)}{SPACE}%" if total.contingency > 0 else NOTHING

    rows = [
        SplitRow(
            name=name,
            what=what,
            amount=cell(amount),
            share=share(whole_percent),
            second=cell(second),
            is_sum=False,
        )
        for (name, what), amount, whole_percent, second in zip(
            words, own, printed.shares, printed.second_split, strict=True
        )
    ]
    uncertainty = SplitRow(
        name="Estimate uncertainty",
        what="ranges and systemic risks together",
        amount=cell(printed.estimate_uncertainty),
        share=share(printed.estimate_uncertainty_share),
        second=cell(printed.second_estimate_uncertainty),
        is_sum=True,
    )
    whole = SplitRow(
        name="Contingency",
        what=f"at {study.target.name}",
        amount=cell(total.contingency),
        share=share(100),
        second=cell(total.second_opinion),
        is_sum=True,
    )
    return SplitPage(
        unit=amounts.caption,
        level=study.target.name,
        rows=(*rows[:2], uncertainty, rows[2], whole),
        expected=amounts.full(total.expected),
        margin=amounts.full(total.margin),
    )


def allocation_page(
    study: Study,
    printed: PrintedFigures,
    amounts: Amounts,
    chart: Chart,
    picture_note: str,
) -> AllocationPage:
    """Return the allocation by package and group."""
    allocation = study.allocation
    groups = []
    for group, line in zip(allocation.groups, printed.groups, strict=True):
        members = [
            (row, shown)
            for row, shown in zip(allocation.rows, printed.rows, strict=True)
            if (row.group or row.name) == group.group
        ]
        has_heading = bool(members[0][0].group)
        rows = tuple(
            _allocation_row(
                "" if row.package == PROJECT_WIDE else row.package,
                row.name,
                shown,
                percent_of(row.contingency, row.base),
                amounts,
            )
            for row, shown in members
        )
        of_base = percent_of(group.contingency, group.base)
        subtotal = (
            _allocation_row("", group.group, line, of_base, amounts)
            if has_heading
            else None
        )
        groups.append(AllocationGroup(rows=rows, subtotal=subtotal))
    longest = max(len(amounts.cell(x)) for x in (printed.request, printed.total.base))
    return AllocationPage(
        unit=amounts.caption,
        level=study.target.name,
        groups=tuple(groups),
        total=_allocation_row(
            "", "All", printed.total, study.target.percent_of_base, amounts
        ),
        picture=picture(chart),
        picture_note=picture_note,
        has_project_wide=any(r.package == PROJECT_WIDE for r in allocation.rows),
        is_wide=longest > 8,
        has_negative=any(row.contingency < 0 for row in printed.rows),
    )


def _allocation_row(
    id_: str, name: str, line: PrintedLine, of_base: float, amounts: Amounts
) -> AllocationRow:
    cell = amounts.cell
    return AllocationRow(
        id=id_,
        name=name,
        base=cell(line.base),
        ranges=cell(line.ranges),
        systemic=cell(line.systemic),
        events=cell(line.events),
        contingency=cell(line.contingency),
        of_base=percent(of_base / 100) if line.base else NOTHING,
        expected=cell(line.expected),
        margin=cell(line.margin),
        second=cell(line.second_opinion),
    )


def drivers_page(
    study: Study, amounts: Amounts, charts: dict[str, Chart]
) -> DriversPage:
    """Return all drivers; causes apart."""
    swing, effect = charts.get("swing"), charts.get("effect")
    return DriversPage(
        unit=amounts.caption,
        level=study.target.name,
        swing=picture(swing) if swing else None,
        effect=picture(effect) if effect else None,
        drivers=tuple(
            _driver_row(d, amounts) for d in study.drivers if d.kind != "cause"
        ),
        causes=tuple(
            _driver_row(d, amounts) for d in study.drivers if d.kind == "cause"
        ),
    )


def _driver_row(driver: Driver, amounts: Amounts) -> DriverRow:
    return DriverRow(
        id=driver.id,
        name=driver.name,
        kind=KINDS[driver.kind],
        share=percent(driver.variance_share, 1),
        mean_shift=signed(driver.mean_shift / amounts.unit.size, amounts.unit.digits),
        low=amounts.cell(driver.swing[0]),
        high=amounts.cell(driver.swing[1]),
        effect=amounts.cell(driver.removal_effect),
    )


def coverage_page(
    study: Study,
    covered: tuple[EventCoverage, ...],
    amounts: Amounts,
    *,
    large: float,
    thin: float,
) -> CoveragePage:
    """Return what the level holds for each threat, the dearest first."""
    ordered = sorted(covered, key=lambda one: -one.mean_impact)
    thin_ones = [one.event.id for one in ordered if one.is_thinly_funded]
    return CoveragePage(
        unit=amounts.caption,
        level=study.target.name,
        has_contingency=study.target.contingency > 0.0,
        large=f"{plain(100 * large)}{SPACE}%",
        thin=f"{plain(100 * thin)}{SPACE}%",
        thin_count=", ".join(thin_ones),
        has_repeated=any(one.event.happens == "repeatedly" for one in ordered),
        rows=tuple(
            CoverageRow(
                id=one.event.id,
                name=one.event.name,
                chance=_chance_used(one.event),
                impact=amounts.cell(one.mean_impact),
                funded=amounts.cell(one.funded),
                coverage=percent(one.coverage),
                holder=one.event.held_by or NOTHING,
                is_thin=one.is_thinly_funded,
            )
            for one in ordered
        ),
    )


def _chance_used(event: RiskEvent) -> str:
    if event.frequency_used is not None:
        return f"{plain(event.frequency_used)} times"
    return probability(event.probability_used or 0.0)
