"""The charts of one report, each drawn from the results and told in words.

Every chart has a text beside it that says what it shows, for readers who hear the
report and for those who search it.
"""

from __future__ import annotations

from dataclasses import dataclass

from contingency.report.canvas import Drawing
from contingency.report.chart_drivers import (
    EffectBar,
    SwingBar,
    effect_chart,
    swing_chart,
)
from contingency.report.chart_parts import (
    AllocationBar,
    Part,
    allocation_chart,
    composition_chart,
)
from contingency.report.chart_total import Mark, cumulative_chart, density_chart
from contingency.report.look import Look
from contingency.report.wording import (
    NOTHING,
    SPACE,
    Amounts,
    MoneyUnit,
    chance,
    chart_unit,
    fixed,
    in_unit,
    level,
    listed,
    plural,
)
from contingency.setting.curve import chance_of_holding, cumulative_curve, histogram
from contingency.setting.drivers import Driver
from contingency.setting.printed import PrintedFigures
from contingency.study import Study

KINDS = {
    "range": "range",
    "systemic": "systemic risk",
    "event": "event",
    "cause": "common cause",
}
"""Kinds of drivers in words."""

MOST_DRIVERS = 12
"""Bars of a driver chart; the table beside it lists all."""
MOST_CAUSES = 6
MOST_LINES = 46
"""Lines of the allocation chart: what fits on a page."""


@dataclass(frozen=True, kw_only=True, slots=True)
class Chart:
    """One chart as a page places it."""

    name: str
    """Under this name the page asks for the picture: chart:NAME."""
    alt: str
    """What it shows, in words."""
    drawing: Drawing


def total_charts(study: Study, printed: PrintedFigures, look: Look) -> list[Chart]:
    """Return the cumulative curve and the density."""
    unit = _total_unit(study, printed)
    axis_title = f"Total cost, {unit.caption(study.estimate.currency)}"
    marks = _marks(study, printed)
    p10, p90 = (printed.percentiles[i].total for i in (9, 89))
    middle_words = (
        f"P10 to P90: {in_unit(p10, unit)} to {in_unit(p90, unit)}, "
        "eight outcomes in ten"
    )
    target = study.target
    said = listed(f"{mark.name} at {in_unit(mark.amount, unit)}" for mark in marks)
    curve = Chart(
        name="cumulative",
        alt=f"Cumulative curve of the total cost, in {unit.caption(_code(study))}: "
        f"{said}. The base is enough with a chance of "
        f"{chance(study.chance_base_is_enough)}.",
        drawing=cumulative_chart(
            cumulative_curve(study.simulation.total),
            marks,
            unit=unit,
            axis_title=axis_title,
            look=look,
        ),
    )
    density = Chart(
        name="density",
        alt=f"Density of the total cost, in {unit.caption(_code(study))}, filled up to "
        f"{target.name} at {in_unit(printed.request, unit)}. {middle_words}.",
        drawing=density_chart(
            histogram(study.simulation.total),
            marks,
            (p10, p90),
            middle_words=middle_words,
            unit=unit,
            axis_title=axis_title,
            look=look,
        ),
    )
    return [curve, density]


def _code(study: Study) -> str:
    return study.estimate.currency


def _total_unit(study: Study, printed: PrintedFigures) -> MoneyUnit:
    largest = max(abs(study.percentiles[-1]), abs(study.estimate.base))
    return chart_unit(largest, printed.step)


def _marks(study: Study, printed: PrintedFigures) -> tuple[Mark, ...]:
    """Return base, mean and funded levels, cheapest first."""
    mean_holds = chance_of_holding(study.simulation.total, study.mean)
    base = Mark(
        name="Base",
        words=f"enough with {chance(study.chance_base_is_enough)}",
        amount=printed.total.base,
        chance=study.chance_base_is_enough,
    )
    mean = Mark(
        name="Mean",
        words=f"average of all outcomes, {chance(mean_holds)}",
        amount=printed.mean,
        chance=mean_holds,
    )
    levels = {lv.percent: lv for lv in (*study.levels, study.target)}.values()
    marks = [
        base,
        mean,
        *(
            Mark(
                name=lv.name,
                words=", ".join(word for word in (lv.purpose, lv.holder) if word),
                amount=printed.percentiles[lv.percent - 1].total,
                chance=lv.percent / 100,
                is_target=lv.percent == study.target.percent,
            )
            for lv in levels
        ),
    ]
    return tuple(sorted(marks, key=lambda mark: mark.amount))


def composition(printed: PrintedFigures, amounts: Amounts, look: Look) -> Chart:
    """Return the way from base to request."""
    total = printed.total

    names = ("Estimate ranges", "Systemic risks", "Risk events")
    parts = tuple(
        Part(
            name=name,
            amount=amount,
            words=f"{amounts.full(amount)}{SPACE}{SPACE}"
            + (f"{share}{SPACE}%" if total.contingency > 0.0 else NOTHING),
        )
        for name, amount, share in zip(
            names,
            (total.ranges, total.systemic, total.events),
            map(fixed, printed.shares),
            strict=True,
        )
    )

    def plain(name: str, amount: float) -> Part:
        return Part(name=name, amount=amount, words=amounts.full(amount))

    base, request = plain("Base", total.base), plain("Request", printed.request)
    contingency = plain("Contingency", total.contingency)
    return Chart(
        name="composition",
        alt=f"From base to request: base {base.words}, contingency "
        f"{contingency.words}, request {request.words}. The contingency is made of "
        f"{listed(f'{p.name.lower()} {amounts.full(p.amount)}' for p in parts)}.",
        drawing=composition_chart(base, parts, contingency, request, look),
    )


def allocation_picture(
    study: Study, printed: PrintedFigures, groups: tuple[int, ...], look: Look
) -> tuple[Chart, str]:
    """Return the allocation as a picture, and what it leaves out, in words."""
    amounts = Amounts(currency=_code(study), step=printed.step)
    rows = study.allocation.rows
    bars: list[AllocationBar] = []
    for number, group in enumerate(study.allocation.groups):
        members = [i for i, g in enumerate(groups) if g == number]
        alone = len(members) == 1 and not rows[members[0]].group
        line = printed.groups[number]
        bars.append(
            AllocationBar(
                name=_row_name(study, members[0]) if alone else group.group,
                expected=line.expected,
                margin=line.margin,
                contingency=line.contingency,
                words=amounts.cell(line.contingency),
                is_group=True,
            )
        )
        if not alone:
            bars += [
                AllocationBar(
                    name=_row_name(study, i),
                    expected=printed.rows[i].expected,
                    margin=printed.rows[i].margin,
                    contingency=printed.rows[i].contingency,
                    words=amounts.cell(printed.rows[i].contingency),
                    is_group=False,
                )
                for i in members
            ]
    note = ""
    if len(bars) > MOST_LINES:
        only_groups = [bar for bar in bars if bar.is_group]
        fewer = only_groups if 3 < len(only_groups) <= MOST_LINES else bars
        kept = sorted(fewer, key=lambda bar: -abs(bar.contingency))[:MOST_LINES]
        note = f"The {plural(len(kept), 'largest line')} of {len(bars)} are drawn."
        bars = [bar for bar in fewer if bar in kept]
    largest = sorted(bars, key=lambda bar: -abs(bar.contingency))[:3]
    said = listed(f"{bar.name} {bar.words}" for bar in largest)
    return (
        Chart(
            name="allocation",
            alt=f"Contingency by package and group, in {amounts.caption}: expected "
            f"part and margin. Largest: {said}.",
            drawing=allocation_chart(tuple(bars), look),
        ),
        note,
    )


def _row_name(study: Study, row: int) -> str:
    line = study.allocation.rows[row]
    is_package = study.estimate.find_package(line.package) is not None
    return f"{line.package}{SPACE}{SPACE}{line.name}" if is_package else line.name


def driver_charts(
    study: Study, printed: PrintedFigures, amounts: Amounts, look: Look
) -> list[Chart]:
    """Return swing and effect on the target; none if nothing varies."""
    inputs = [d for d in study.drivers if d.kind != "cause"]
    causes = [d for d in study.drivers if d.kind == "cause"][:MOST_CAUSES]
    if not inputs:
        return []
    unit = _total_unit(study, printed)
    by_swing = sorted(inputs, key=lambda d: -abs(d.swing[1] - d.swing[0]))
    by_effect = sorted(inputs, key=lambda d: -abs(d.removal_effect))
    by_swing, by_effect = by_swing[:MOST_DRIVERS], by_effect[:MOST_DRIVERS]
    mean = f"Mean total {in_unit(printed.mean, unit)} {unit.word}".strip()
    return [
        Chart(
            name="swing",
            alt="Swing of the mean total cost: "
            + listed(
                f"{d.id} {in_unit(d.swing[0], unit)} to {in_unit(d.swing[1], unit)}"
                for d in by_swing[:5]
            )
            + f", in {unit.caption(_code(study))}.",
            drawing=swing_chart(
                tuple(_swing(d, unit) for d in by_swing),
                tuple(_swing(d, unit) for d in causes),
                mean=study.mean,
                mean_words=mean,
                look=look,
            ),
        ),
        Chart(
            name="effect",
            alt=f"Fall of {level(study.target.percent)} without each driver: "
            + listed(f"{d.id} {amounts.cell(d.removal_effect)}" for d in by_effect[:5])
            + f", in {amounts.caption}.",
            drawing=effect_chart(
                tuple(_effect(d, amounts) for d in by_effect),
                tuple(_effect(d, amounts) for d in causes),
                look,
            ),
        ),
    ]


def _driver_name(driver: Driver) -> str:
    return f"{driver.id}{SPACE}{SPACE}{driver.name}"


def _swing(driver: Driver, unit: MoneyUnit) -> SwingBar:
    low, high = driver.swing
    return SwingBar(
        name=_driver_name(driver),
        low=low,
        high=high,
        low_words=in_unit(low, unit),
        high_words=in_unit(high, unit),
    )


def _effect(driver: Driver, amounts: Amounts) -> EffectBar:
    return EffectBar(
        name=_driver_name(driver),
        effect=driver.removal_effect,
        words=amounts.cell(driver.removal_effect),
    )
