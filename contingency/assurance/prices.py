"""Checks of price bases and of the age of what was put in."""

from __future__ import annotations

import datetime as dt
from dataclasses import dataclass
from typing import Literal

from contingency.assurance.declaration import (
    Hit,
    NotApplicable,
    Source,
    Verdict,
    input_check,
)
from contingency.assurance.rows import ranged_rows
from contingency.assurance.settings import Settings, Threshold, WordList
from contingency.assurance.wording import counted, listed, words_found
from contingency.estimate.nouns import PROJECT_WIDE, Estimate

USACE_AGE = Source(
    "US Army Corps of Engineers ER 1110-2-1302 (2016), paragraph 9b: updated at least"
    " yearly, fully priced anew within two years",
    "READ",
)
GAO_UPDATE = Source(
    "GAO cost guide, page on updating a risk and uncertainty analysis: before each"
    " decision point",
    "READ",
)

GROWTH_WORDS = WordList(
    name="price_growth_words",
    default=(
        "inflation; escalation; indexation; market; price; prices; currency;"
        " exchange rate"
    ),
    grade="H",
    meaning="words looked for",
)
AGE_CAUTION = Threshold(
    name="price_age_caution_months",
    default=12,
    unit="months",
    grade="G",
    meaning="caution above",
)
AGE_MAJOR = Threshold(
    name="price_age_major_months",
    default=24,
    unit="months",
    grade="G",
    meaning="major above",
)
EVIDENCE_AGE = Threshold(
    name="evidence_age_months",
    default=24,
    unit="months",
    grade="H",
    meaning="caution above",
)


@input_check(
    slug="mixed-price-bases",
    subject="base estimate",
    title="Mixed price bases",
    catches="Constant and outturn money, or money of different days, added together.",
    rule=(
        "price_basis of every package that states one is constant, and its price_date"
        " is the price date of the estimate."
    ),
    severities=("stop",),
    todo="Restate these packages in money of the estimate's price date.",
    sources=(
        Source(
            "UK rail franchise competition of 2012: a model mixed real and inflated"
            " figures",
            "READ-2nd",
        ),
        Source(
            "US Federal Highway Administration (2007): threshold in year-of-expenditure"
            " money",
            "READ",
        ),
        Source(
            "New Zealand transport agency: estimates without escalation, funding"
            " requests with it",
            "READ",
        ),
    ),
)
def mixed_price_bases(estimate: Estimate, _settings: Settings) -> Verdict:
    """Find packages that are not in constant money of the price date."""
    unlike = [
        (package.id, "outturn money")
        for package in estimate.packages
        if package.price_basis == "outturn"
    ] + [
        (package.id, f"money of {package.price_date}")
        for package in estimate.packages
        if package.price_date not in (None, estimate.price_date)
    ]
    if not unlike:
        return []
    words = listed(f"{row} ({basis})" for row, basis in unlike)
    message = (
        "These packages cannot be added to the others, which are in constant money of"
        f" {estimate.price_date}: {words}."
    )
    rows = tuple(dict.fromkeys(row for row, _ in unlike))
    return [Hit(severity="stop", rows=rows, message=message)]


@dataclass(frozen=True, kw_only=True, slots=True)
class _Carrier:
    """Something that carries price growth for some packages."""

    kind: Literal["escalation", "range", "systemic", "event"]
    id: str
    label: str
    packages: frozenset[str]
    reconciled: bool = False


@input_check(
    slug="price-growth-twice",
    subject="base estimate",
    title="Price growth counted twice",
    catches=(
        "Growth of prices in the escalation line and again in a range, a systemic risk"
        " or an event."
    ),
    rule=(
        "Carriers of price growth: packages with a price series, exclusions, causes,"
        " ranges, systemic risks and events that hold one of the words (name, cause or"
        " basis). Two of different kinds that act on one package are a pair. A"
        " systemic risk that says under covers what it covers is reconciled."
    ),
    thresholds=(GROWTH_WORDS,),
    severities=("major",),
    todo="Say which part of the price growth each of the two covers, or drop one.",
    sources=(
        Source(
            "US Army Corps of Engineers ETL 1110-2-573, appendix G: total cost without"
            " escalation and contingency",
            "READ",
        ),
        Source(
            "Australian National Audit Office, major projects: contingency used to"
            " close a gap in indexation",
            "READ",
        ),
        Source(
            "AACE International PGD 02: escalation is a method of its own", "READ-title"
        ),
    ),
)
def price_growth_twice(estimate: Estimate, settings: Settings) -> Verdict:
    """Find pairs of inputs that both carry price growth."""
    carriers = _carriers(estimate, settings.words(GROWTH_WORDS))
    if len({carrier.kind for carrier in carriers}) < 2:
        return NotApplicable("At most one kind of input carries price growth.")
    hits: list[Hit] = []
    for place, carrier in enumerate(carriers):
        earlier = next(
            (
                other
                for other in carriers[:place]
                if other.kind != carrier.kind and other.packages & carrier.packages
            ),
            None,
        )
        if earlier is not None and not carrier.reconciled:
            message = (
                f"Price growth appears in {earlier.label} and in {carrier.label}. Say"
                " which part each one covers."
            )
            hits.append(Hit(severity="major", where=carrier.id, message=message))
    return hits


def _carriers(estimate: Estimate, words: tuple[str, ...]) -> list[_Carrier]:
    """Return what carries price growth, escalation first, events last."""
    everything = frozenset({p.id for p in estimate.packages} | {PROJECT_WIDE})
    found: list[_Carrier] = []
    series = {p.prices for p in estimate.packages if p.prices}
    if series:
        priced = frozenset({p.id for p in estimate.packages if p.prices})
        name = f"the price series {listed(sorted(series))}"
        found.append(
            _Carrier(
                kind="escalation", id="", label=name, packages=priced | {PROJECT_WIDE}
            )
        )
    found += [
        _Carrier(
            kind="escalation",
            id=exclusion.id,
            label=f"exclusion {exclusion.id}",
            packages=everything,
        )
        for exclusion in estimate.statements.exclusions
        if words_found(exclusion.text, words)
    ]
    moved = {
        cause.id for cause in estimate.causes if words_found(cause.name, words)
    }  # causes that are price growth by name
    found += [
        _Carrier(
            kind="range",
            id=p.id,
            label=f"the range of {p.label}",
            packages=frozenset({p.id}),
        )
        for p in estimate.packages
        if p.cost.varies
        and (
            words_found(p.evidence.basis, words)
            or any(load.cause in moved for load in p.loads)
        )
    ]
    found += [
        _Carrier(
            kind="systemic",
            id=s.id,
            label=f"systemic risk {s.label}",
            packages=frozenset(s.packages),
            reconciled=bool(s.covers),
        )
        for s in estimate.systemic
        if words_found(f"{s.name} . {s.cause}", words)
    ]
    found += [
        _Carrier(
            kind="event",
            id=e.id,
            label=f"event {e.label}",
            packages=(
                everything
                if any(share.package == PROJECT_WIDE for share in e.shares)
                else frozenset(share.package for share in e.shares)
            ),
        )
        for e in estimate.open_events
        if words_found(f"{e.name} . {e.cause}", words)
    ]
    return found


@input_check(
    slug="stale-prices",
    subject="base estimate",
    title="Old prices",
    catches="Prices older than the interval at which they should be renewed.",
    rule="Months from the price date to the data date.",
    thresholds=(AGE_CAUTION, AGE_MAJOR),
    severities=("major", "caution"),
    todo="Price the estimate anew, or bring it to a later price date.",
    sources=(USACE_AGE, GAO_UPDATE),
)
def stale_prices(estimate: Estimate, settings: Settings) -> Verdict:
    """Find whether the price date lies too far before the data date."""
    age = _months(estimate.price_date, estimate.data_date)
    if age <= settings.number(AGE_CAUTION):
        return []
    grave = age > settings.number(AGE_MAJOR)
    due = settings.number(AGE_MAJOR if grave else AGE_CAUTION)
    message = (
        f"Prices of {estimate.price_date} are {age:.0f} months old on the data date;"
        f" they should be renewed within {due:g} months."
    )
    return [Hit(severity="major" if grave else "caution", message=message)]


@input_check(
    slug="stale-evidence",
    subject="base estimate",
    title="Old evidence",
    catches="Quotations and judgements given long before the data date.",
    rule="Months from given_on to the data date, for every row that is simulated.",
    thresholds=(EVIDENCE_AGE,),
    severities=("caution",),
    todo="Ask again whoever gave the figures, and write the new date.",
    sources=(GAO_UPDATE,),
)
def stale_evidence(estimate: Estimate, settings: Settings) -> Verdict:
    """Find rows whose evidence is older than it should be."""
    dates = _given_on(estimate)
    if not dates:
        return NotApplicable("No row has a date under given_on.")
    old = {
        row: given
        for row, given in dates.items()
        if _months(given, estimate.data_date) > settings.number(EVIDENCE_AGE)
    }
    if not old:
        return []
    message = (
        f"The evidence of {counted(len(old), 'row')} is older than"
        f" {settings.number(EVIDENCE_AGE):g} months on the data date:"
        f" {listed(f'{row} ({given})' for row, given in old.items())}."
    )
    return [Hit(severity="caution", rows=tuple(old), message=message)]


@input_check(
    slug="data-date-behind-inputs",
    subject="base estimate",
    title="Analysis older than its inputs",
    catches="A risk analysis that claims to be older than the estimate it rests on.",
    rule="No given_on and no reviewed_on lies after the data date.",
    severities=("stop",),
    todo="Bring the data date to the latest of these dates and review the other rows.",
    sources=(
        GAO_UPDATE,
        Source(
            "GAO-15-596, space launch system: no plan to update an estimate of 2013",
            "READ",
        ),
    ),
)
def data_date_behind_inputs(estimate: Estimate, _settings: Settings) -> Verdict:
    """Find inputs that were given after the data date."""
    later = {
        row: given
        for row, given in _given_on(estimate).items()
        if given > estimate.data_date
    }
    later |= {
        event.id: event.reviewed_on
        for event in estimate.open_events
        if event.reviewed_on is not None and event.reviewed_on > estimate.data_date
    }
    if not later:
        return []
    message = (
        f"The data date is {estimate.data_date}, but later dates are given:"
        f" {listed(f'{row} ({given})' for row, given in later.items())}."
    )
    return [Hit(severity="stop", rows=tuple(later), message=message)]


def _given_on(estimate: Estimate) -> dict[str, dt.date]:
    """Return the date of the evidence of each row that is simulated and has one."""
    return {
        row.id: row.evidence.given_on
        for row in ranged_rows(estimate)
        if row.evidence.given_on is not None
    }


def _months(earlier: dt.date, later: dt.date) -> float:
    """Return the months between two dates, of 365.25/12 days each."""
    return (later - earlier).days / (365.25 / 12)


CHECKS = (
    mixed_price_bases,
    price_growth_twice,
    stale_prices,
    stale_evidence,
    data_date_behind_inputs,
)
