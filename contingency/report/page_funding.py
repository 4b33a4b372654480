"""Money by year: the funding table, its picture, and what it was made from."""

from __future__ import annotations

from dataclasses import dataclass
from math import fsum

from contingency.estimate.nouns import PriceSeries, ShapeName
from contingency.report.chart_funding import YearBar, funding_chart
from contingency.report.charts import Chart
from contingency.report.look import Look
from contingency.report.page_results import Picture
from contingency.report.wording import (
    NOTHING,
    Amounts,
    chance,
    date,
    level,
    percent,
)
from contingency.setting.funding import Outturn, YearAmounts, printed_funding
from contingency.setting.printed import PrintedFigures
from contingency.study import Study

MOST_BARS = 30
"""Years of the picture: what fits on a page."""


@dataclass(frozen=True, kw_only=True, slots=True)
class FundingRow:
    """One year, or all of them."""

    year: str
    base: str
    contingency: str
    on_base: str
    on_contingency: str
    total: str


@dataclass(frozen=True, kw_only=True, slots=True)
class SeriesRow:
    """One price series that a package names."""

    id: str
    name: str
    rate: str
    """The range as entered."""
    mean: str
    base: str
    evidence: str


@dataclass(frozen=True, kw_only=True, slots=True)
class WindowRow:
    """When one package spends, and at which prices."""

    id: str
    name: str
    start: str
    finish: str
    profile: str
    prices: str


@dataclass(frozen=True, kw_only=True, slots=True)
class FundingPage:
    """The funding table in both moneys."""

    unit: str
    level: str
    price_date: str
    rows: tuple[FundingRow, ...]
    total: FundingRow
    picture: Picture | None
    outturn: str
    """How sure the outturn amount is, in sentences."""
    series: tuple[SeriesRow, ...]
    windows: tuple[WindowRow, ...]
    without_window: bool
    """Whether any package has none."""


def funding_page(
    study: Study, printed: PrintedFigures, amounts: Amounts, look: Look
) -> tuple[FundingPage | None, list[Chart]]:
    """Return the funding table and its picture; None where no package has a window."""
    outturn = study.outturn
    if outturn is None:
        return None, []
    estimate = study.estimate
    years = printed_funding(
        study.funding,
        base=printed.total.base,
        contingency=printed.total.contingency,
        step=printed.step,
    )
    charts = _charts(years, amounts, look)
    page = FundingPage(
        unit=amounts.caption,
        level=level(outturn.percent),
        price_date=date(estimate.price_date),
        rows=tuple(_row(year.year, (year,), amounts) for year in years),
        total=_row("All years", years, amounts),
        picture=Picture(name=charts[0].name, alt=charts[0].alt) if charts else None,
        outturn=_outturn_words(outturn, years, amounts),
        series=_series(study, outturn, amounts),
        windows=tuple(
            WindowRow(
                id=p.id,
                name=p.name,
                start=date(p.start),
                finish=date(p.finish),
                profile=p.spend or "even",
                prices=p.prices or NOTHING,
            )
            for p in estimate.packages
            if p.start and p.finish
        ),
        without_window=not all(p.start and p.finish for p in estimate.packages),
    )
    return page, charts


def _row(name: str, years: tuple[YearAmounts, ...], amounts: Amounts) -> FundingRow:
    """Return one line of the table: one year, or several added up as printed."""
    return FundingRow(
        year=name,
        base=amounts.cell(fsum(y.base for y in years)),
        contingency=amounts.cell(fsum(y.contingency for y in years)),
        on_base=amounts.cell(fsum(y.escalation_on_base for y in years)),
        on_contingency=amounts.cell(fsum(y.escalation_on_contingency for y in years)),
        total=amounts.cell(fsum(y.total for y in years)),
    )


def _outturn_words(
    outturn: Outturn, years: tuple[YearAmounts, ...], amounts: Amounts
) -> str:
    """Return how sure the amount of the table is."""
    if not outturn.series:
        return (
            "No package names a price series, so that outturn money is money of the "
            "price date here, and nothing is added for a change of prices."
        )
    funding = amounts.full(fsum(year.total for year in years))
    low, high = amounts.full(outturn.low), amounts.full(outturn.high)
    return (
        f"The outturn amount, {funding}, holds in "
        f"{chance(outturn.chance_funding_is_enough)} of the trials when the prices of "
        f"each trial are drawn as well. The {level(outturn.percent)} of the outturn "
        f"cost is {amounts.full(outturn.level)} (95 % interval {low} to {high}), its "
        f"mean {amounts.full(outturn.mean)}."
    )


def _series(study: Study, outturn: Outturn, amounts: Amounts) -> tuple[SeriesRow, ...]:
    """Return the price series in use with what they rest on."""
    entered = {series.id: series for series in study.estimate.price_series}
    return tuple(
        SeriesRow(
            id=used.id,
            name=used.name,
            rate=_as_entered(entered[used.id]),
            mean=percent(used.rate, 2),
            base=amounts.cell(used.base),
            evidence=_evidence(entered[used.id]),
        )
        for used in outturn.series
    )


def _as_entered(series: PriceSeries) -> str:
    """Return the range of a rate in the words of the file."""
    rate = series.rate
    low, likely, high, outcomes = rate.written
    if rate.shape in {ShapeName.DISCRETE, ShapeName.POINTS}:
        return f"{rate.shape.value}: {outcomes}"
    if rate.shape is ShapeName.FIXED:
        return likely
    middle = f", likely {likely}" if likely else ""
    return f"{low} to {high}{middle} ({rate.ends}, {rate.shape.value})"


def _evidence(series: PriceSeries) -> str:
    """Return what a rate rests on, or that nothing is recorded."""
    known = series.evidence
    if not known.basis:
        return "No basis is recorded."
    given = [known.kind or "", f"given by {known.given_by}" if known.given_by else ""]
    given += [date(known.given_on)] if known.given_on else []
    said = ", ".join(word for word in given if word)
    return f"{known.basis} ({said})." if said else f"{known.basis}."


def _charts(
    years: tuple[YearAmounts, ...], amounts: Amounts, look: Look
) -> list[Chart]:
    """Return the picture; none where a part is negative, or years are too many.

    Parts of either sign cannot be laid end to end without hiding one another.
    """
    parts = [a for y in years for a in (y.base, y.contingency, y.escalation)]
    if min(parts) < 0.0 or len(years) > MOST_BARS:
        return []
    bars = tuple(
        YearBar(
            name=year.year,
            base=year.base,
            contingency=year.contingency,
            escalation=year.escalation,
            words=amounts.cell(year.total),
        )
        for year in years
    )
    said = "; ".join(f"{bar.name}: {bar.words}" for bar in bars)
    alt = f"One bar a year, base, contingency and escalation end to end. {said}."
    return [Chart(name="funding", alt=alt, drawing=funding_chart(bars, look))]
