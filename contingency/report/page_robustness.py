"""How firm the number is: one change at a time, fresh seeds, break points."""

from __future__ import annotations

from dataclasses import dataclass

from contingency.assurance.break_points import BreakPoint
from contingency.assurance.robustness import Robustness, SeedTest, WhatIf
from contingency.report.chart_what_if import (
    ChangeLine,
    has_cut,
    seeds_chart,
    what_if_chart,
)
from contingency.report.charts import Chart
from contingency.report.look import Look
from contingency.report.page_results import Picture, picture
from contingency.report.wording import (
    NOTHING,
    SPACE,
    Amounts,
    MoneyUnit,
    capital,
    chart_unit,
    clipped,
    count,
    fixed,
    in_unit,
    level,
    listed,
    percent,
    plural,
    probability,
    signed,
)
from contingency.setting.printed import PrintedFigures, printed_change
from contingency.study import Study

LONGEST = 300
"""Characters of a change in the table."""
TOP = 3
"""Assumptions that the answer page names."""
AT_ONCE = 1e-3
"""A break point this near to the value in the estimate is reached already."""

MOVED = {
    "stretch": "distance of the range from the base",
    "uplift": "uplift in every trial, in percent of the cost acted on",
    "chance": "chance that it happens",
    "cost factor": "cost when it happens",
    "chances": "every probability and frequency",
    "dependence": "dependence between all ranges",
}
"""What is moved, in words."""


@dataclass(frozen=True, kw_only=True, slots=True)
class ChangeRow:
    """One change and what it does to the contingency."""

    words: str
    contingency: str
    difference: str
    noise: str


@dataclass(frozen=True, kw_only=True, slots=True)
class UnaskedRow:
    """One question that does not arise in this estimate."""

    words: str
    reason: str


@dataclass(frozen=True, kw_only=True, slots=True)
class BreakRow:
    """How far one input must move, alone."""

    id: str
    name: str
    moved: str
    now: str
    breaks: str
    """Where it breaks; empty if it cannot."""
    cannot: str
    """What still holds at the furthest value; empty if it breaks."""


@dataclass(frozen=True, kw_only=True, slots=True)
class RobustnessPage:
    """What the number rests on."""

    unit: str
    level: str
    issued: str
    trials: str
    top: str
    """The assumptions that matter most, for the answer page, in a sentence."""
    changes: tuple[ChangeRow, ...]
    levels: tuple[ChangeRow, ...]
    unasked: tuple[UnaskedRow, ...]
    what_if: Picture
    picture_unit: str
    """Unit of the picture; tables count finer."""
    has_cut: bool
    """Whether the picture cuts the line of a change that dwarfs the others."""
    seeds: Picture
    seeds_words: str
    """Where the issued number falls among the fresh seeds, in a sentence."""
    broken_level: str
    asked_words: str
    """What the request is, and when it counts as broken."""
    breaks: tuple[BreakRow, ...]


def robustness_page(
    study: Study, printed: PrintedFigures, amounts: Amounts, look: Look
) -> tuple[RobustnessPage | None, list[Chart]]:
    """Return what-ifs, seed test and break points with their pictures.

    None, and no picture, where the study did not look into them.
    """
    rested = study.robustness
    if rested is None:
        return None, []
    unit = _chart_unit(rested, amounts)
    what_if, seeds = _charts(study, rested, printed, amounts, look)

    def row(one: WhatIf) -> ChangeRow:
        return _change_row(one, printed, amounts)

    page = RobustnessPage(
        unit=amounts.caption,
        level=study.target.name,
        issued=amounts.full(printed.total.contingency),
        trials=count(rested.trials),
        top=_top_words(rested, printed, amounts),
        changes=tuple(row(one) for one in rested.asked if one.is_judgement),
        levels=tuple(row(one) for one in rested.asked if not one.is_judgement),
        unasked=tuple(
            UnaskedRow(words=capital(one.title), reason=one.reason)
            for one in rested.what_ifs
            if one.contingency is None
        ),
        what_if=picture(what_if),
        picture_unit=unit.caption(amounts.currency),
        has_cut=has_cut(
            tuple(_line(one, printed, amounts, unit) for one in rested.asked)
        ),
        seeds=picture(seeds),
        seeds_words=_seeds_words(rested.seeds, study, amounts),
        broken_level=level(rested.break_percent),
        asked_words=_asked_words(study, rested, amounts),
        breaks=tuple(_break_row(point) for point in rested.break_points),
    )
    return page, [what_if, seeds]


def _top_words(rested: Robustness, printed: PrintedFigures, amounts: Amounts) -> str:
    """Name the assumptions that matter most; empty where none was changed."""
    parts = []
    for one in rested.largest(TOP):
        row = _change_row(one, printed, amounts)
        parts.append(f"with {one.title}: {row.contingency}{SPACE}({row.difference})")
    if not parts:
        return ""
    return f"The contingency would be, in {amounts.caption}: {'; '.join(parts)}."


def _change_row(one: WhatIf, printed: PrintedFigures, amounts: Amounts) -> ChangeRow:
    amount, difference = printed_change(
        one.contingency or 0.0, issued=printed.total.contingency, step=amounts.step
    )
    return ChangeRow(
        words=capital(clipped(one.title, LONGEST)),
        contingency=amounts.cell(amount),
        difference=_signed(difference, amounts),
        noise=_noise(one.half_width, amounts),
    )


def _signed(amount: float, amounts: Amounts) -> str:
    return signed(amount / amounts.unit.size, amounts.unit.digits)


def _noise(half_width: float, amounts: Amounts) -> str:
    """Return a half-width, without a false nought; nothing where none was taken."""
    if not half_width > 0:
        return NOTHING
    if half_width < amounts.step / 2:
        return f"below {amounts.cell(amounts.step)}"
    return amounts.cell(half_width)


def _seeds_words(seeds: SeedTest, study: Study, amounts: Amounts) -> str:
    low, high = amounts.cell(seeds.lowest), amounts.cell(seeds.highest)
    return (
        f"{_fresh(seeds)} with {count(seeds.trials)} trials each gave {low} to {high} "
        f"{amounts.caption}. The issued contingency, from "
        f"{count(study.simulation.trials)} trials, lies above {seeds.below} of "
        "them."
    )


def _fresh(seeds: SeedTest) -> str:
    return plural(len(seeds.seeds), "fresh seed")


def _asked_words(study: Study, rested: Robustness, amounts: Amounts) -> str:
    """Say what the request is, and when it counts as broken."""
    own, lower = study.target.name, level(rested.break_percent)
    asked = study.estimate.requested_total
    if asked is not None:
        return (
            f"The total asked for is {amounts.full(asked)}, which is not simply {own}; "
            f"it counts as broken once it is a {lower} only."
        )
    return (
        f"The request is {own} itself, so that the least adverse move takes it below "
        f"that level by a hair; it counts as broken ten points lower, as a {lower}, "
        "which is this tool's choice."
    )


def _break_row(point: BreakPoint) -> BreakRow:
    cannot = ""
    if point.breaks_at is None:
        furthest = _value(point, point.furthest)
        cannot = f"cannot: at {furthest} still enough in {point.level_there} of 100"
    return BreakRow(
        id=point.id,
        name=point.name,
        moved=_moved(point),
        now=_value(point, point.now),
        breaks="" if point.breaks_at is None else _breaks(point, point.breaks_at),
        cannot=cannot,
    )


def _moved(point: BreakPoint) -> str:
    if point.quantity == "stretch" and point.kind == "judgement":
        return "distance of every range from its base"
    if point.quantity == "cost factor" and point.furthest < point.now:
        return "saving when it happens"
    return MOVED[point.quantity]


def _breaks(point: BreakPoint, at: float) -> str:
    onwards = point.now - at if point.furthest < point.now else at - point.now
    return "is broken already" if onwards < AT_ONCE else _value(point, at)


def _value(point: BreakPoint, value: float) -> str:
    """Return a value of the quantity that is moved, as it is printed."""
    if point.quantity == "uplift":
        return f"+{percent(value, 1)}" if value > 0 else percent(value)
    if point.quantity == "chance":
        return probability(round(value, 3))
    if point.quantity == "dependence":
        return fixed(value, 2)
    return f"× {fixed(value, 2)}"


def _charts(
    study: Study,
    rested: Robustness,
    printed: PrintedFigures,
    amounts: Amounts,
    look: Look,
) -> tuple[Chart, Chart]:
    """Return the picture of the changes and that of the fresh seeds."""
    unit = _chart_unit(rested, amounts)
    issued = printed.total.contingency
    seeds = rested.seeds
    lines = {one.slug: _line(one, printed, amounts, unit) for one in rested.asked}
    caption = unit.caption(amounts.currency)
    axis_title = f"Contingency at {study.target.name}, {caption}"
    issued_words = f"Issued {in_unit(issued, unit)}"
    largest = [lines[one.slug] for one in rested.largest(5)]
    spanned = f"{in_unit(seeds.lowest, unit)} to {in_unit(seeds.highest, unit)}"
    return (
        Chart(
            name="what-if",
            alt=f"Change of the contingency at {study.target.name} with one assumption "
            "changed at a time, largest first: "
            + listed(f"{one.name} {one.words}" for one in largest)
            + f", in {caption}.",
            drawing=what_if_chart(
                tuple(lines[w.slug] for w in rested.asked if w.is_judgement),
                tuple(lines[w.slug] for w in rested.asked if not w.is_judgement),
                issued=rested.contingency,
                issued_words=issued_words,
                seeds=(seeds.lowest, seeds.highest),
                seeds_words=f"{_fresh(seeds)}: {spanned}",
                unit=unit,
                axis_title=axis_title,
                look=look,
            ),
        ),
        Chart(
            name="seeds",
            alt=f"Contingency at {study.target.name} under {_fresh(seeds)}: "
            f"{spanned}, in {caption}; the issued one, {in_unit(issued, unit)}, lies "
            f"above {seeds.below} of them.",
            drawing=seeds_chart(
                seeds.contingencies,
                issued=seeds.issued,
                issued_words=issued_words,
                unit=unit,
                axis_title=axis_title,
                look=look,
            ),
        ),
    )


def _chart_unit(rested: Robustness, amounts: Amounts) -> MoneyUnit:
    largest = max(abs(one.contingency or 0.0) for one in rested.what_ifs)
    return chart_unit(largest, amounts.step)


def _line(
    one: WhatIf, printed: PrintedFigures, amounts: Amounts, unit: MoneyUnit
) -> ChangeLine:
    _, difference = printed_change(
        one.contingency or 0.0, issued=printed.total.contingency, step=amounts.step
    )
    return ChangeLine(
        name=capital(clipped(one.title, LONGEST)),
        effect=one.effect,
        half_width=one.half_width if one.half_width > 0 else 0.0,
        words=signed(difference / unit.size, unit.digits),
    )
