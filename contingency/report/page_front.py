"""Title page and answer page: who asks for what, and how sure it is."""

from __future__ import annotations

import re
from dataclasses import dataclass, replace
from pathlib import PurePosixPath

from contingency.assurance.events import rare_large_events
from contingency.assurance.findings import Finding
from contingency.assurance.trials import unsettled_percentile
from contingency.estimate.nouns import SignOffLine
from contingency.report.charts import KINDS, Chart
from contingency.report.wording import (
    NOTHING,
    SPACE,
    Amounts,
    chance,
    clipped,
    count,
    date,
    grouped_fingerprint,
    percent,
    plural,
    sentence,
    short_fingerprint,
    signed,
)
from contingency.setting.drivers import Driver
from contingency.setting.printed import PrintedFigures
from contingency.study import Study
from contingency.tracking.families import Family

REQUIRED_ROLES = ("prepared", "checked", "approved")
"""Roles that have a line even if the estimate does not name them."""

LONGEST_CAUTION = 200
"""Characters of a caution on the answer page; longer ones are cut there only."""
STATED = 5
"""Weight of a caution that the authors state."""
LIGHTEST = 6
"""Weight of a finding that has been answered; notes are no cautions."""

MOST_LEVELS = 6
"""Funded levels that the answer page shows; the chapter Result shows all."""


@dataclass(frozen=True, kw_only=True, slots=True)
class Fact:
    """One line of the control data."""

    name: str
    words: str


@dataclass(frozen=True, kw_only=True, slots=True)
class SignOffRow:
    """One line of the sign-off block with its empty field for a seal."""

    role: str
    name: str
    position: str
    field: str
    """Name of the signature field in the PDF."""
    field_title: str
    """What the field is, for readers who hear the form."""
    statements: tuple[str, ...] = ()
    """What the typed sign-off says: when, whether it stands, conditions, comment."""


@dataclass(frozen=True, kw_only=True, slots=True)
class TypedSignOff:
    """A typed sign-off as the report shows it; a record, not a signature."""

    role: str
    name: str
    position: str
    statements: tuple[str, ...]
    """Sentences, as they are printed."""


@dataclass(frozen=True, kw_only=True, slots=True)
class TitlePage:
    """What the title page shows."""

    owner: str
    project: str
    is_long: bool
    """Whether the project's name needs smaller letters."""
    revision: str
    gate: str
    status: str
    facts: tuple[Fact, ...]
    fingerprint: str
    sign_offs: tuple[SignOffRow, ...]
    running_title: str
    """Of the page heads."""
    running_reference: str
    """Of the page feet: revision, status and the short fingerprint."""


@dataclass(frozen=True, kw_only=True, slots=True)
class LevelRow:
    """One funded level."""

    name: str
    purpose: str
    holder: str
    contingency: str
    total: str
    above_previous: str
    percent_of_base: str
    interval: str
    """95 % interval of the total."""
    is_target: bool


@dataclass(frozen=True, kw_only=True, slots=True)
class TopDriver:
    """One of the five largest drivers."""

    name: str
    kind: str
    share: str
    """Share of variance."""
    effect: str
    """Fall of the target without it."""


@dataclass(frozen=True, kw_only=True, slots=True)
class AnswerCaution:
    """One of the three cautions that the answer carries."""

    mark: str
    """Severity, or `Stated` for one that the estimate states."""
    words: str


@dataclass(frozen=True, kw_only=True, slots=True)
class AnswerPage:
    """The answer, on one page."""

    contingency: str
    release: str
    """Where the level lies if nothing is asked for above the base; else empty."""
    request: str
    base: str
    level: str
    chance_words: str
    """80 %."""
    set_by: str
    reason: str
    percent_of_base: str
    since: str
    """What moved since the revision before, one line; empty for a first revision."""
    base_is_enough: str
    middle: str
    """P10 to P90 of the total."""
    interval: str
    """95 % interval of the target's total."""
    mean: str
    chart: str
    chart_alt: str
    levels: tuple[LevelRow, ...]
    unit: str
    drivers: tuple[TopDriver, ...]
    cautions: tuple[AnswerCaution, ...]
    attention: str
    """How many findings need attention, in words."""


def title_page(
    study: Study,
    *,
    draft: bool,
    issued_on: str,
    tool: str,
    typed: tuple[TypedSignOff, ...] = (),
) -> TitlePage:
    """Return the title page; `issued_on` is the day of the report in words."""
    estimate = study.estimate
    status = "Draft for review" if draft else "Issued"
    facts = [
        ("Revision", estimate.revision),
        ("Gate", estimate.gate or NOTHING),
        ("Estimate class", _class_words(estimate.estimate_class)),
        ("Status", status),
        ("Data date", date(estimate.data_date)),
        ("Price date", date(estimate.price_date)),
        ("Currency", estimate.currency),
        ("Level asked for", study.target.name),
        ("Previous revision", _previous(study)),
        ("Date of this report", issued_on),
        ("Tool", tool),
        ("Trials and seed", f"{count(study.simulation.trials)}; {estimate.run.seed}"),
    ]
    return TitlePage(
        owner=clipped(estimate.owner, 80),
        project=clipped(estimate.project, 240),
        is_long=len(estimate.project) > 90,
        revision=estimate.revision,
        gate=estimate.gate,
        status=status,
        facts=tuple(Fact(name=name, words=words) for name, words in facts),
        fingerprint=grouped_fingerprint(estimate.fingerprint),
        sign_offs=sign_off_rows(estimate.sign_offs, typed),
        running_title=clipped(estimate.project, 70),
        running_reference=f"Revision {clipped(estimate.revision, 24)}  ·  {status}  ·  "
        f"Inputs {short_fingerprint(estimate.fingerprint)}",
    )


def _previous(study: Study) -> str:
    """Return the letter of the revision before, or its folder where it was not read."""
    if study.comparison is not None:
        return clipped(study.comparison.earlier.revision, 40)
    named = PurePosixPath(study.estimate.previous.replace("\\", "/")).name
    return clipped(named, 40) or NOTHING


def _class_words(estimate_class: int | None) -> str:
    return NOTHING if estimate_class is None else f"Class {estimate_class}"


def sign_off_rows(
    lines: tuple[SignOffLine, ...], typed: tuple[TypedSignOff, ...] = ()
) -> tuple[SignOffRow, ...]:
    """Return the sign-off block; each line has a field of its own for a seal."""
    given = {one.role: one for one in typed}
    named = {line.role for line in lines}
    every = [
        *lines,
        *(SignOffLine(role=role) for role in REQUIRED_ROLES if role not in named),
    ]
    taken: dict[str, int] = {}
    rows = []
    for line in every:
        stem = "sig_" + re.sub(r"[^a-z0-9]+", "_", line.role.lower()).strip("_")
        taken[stem] = taken.get(stem, 0) + 1
        signed = given.get(line.role)
        name = signed.name if signed else line.name
        rows.append(
            SignOffRow(
                role=line.role[:1].upper() + line.role[1:],
                name=name or NOTHING,
                position=signed.position if signed else line.position,
                statements=signed.statements if signed else (),
                field=stem if taken[stem] == 1 else f"{stem}_{taken[stem]}",
                field_title=f"Signature field: {line.role}, {name or 'no name given'}",
            )
        )
    return tuple(rows)


def level_rows(
    study: Study, printed: PrintedFigures, amounts: Amounts
) -> tuple[LevelRow, ...]:
    """Return the funded levels in the order of the estimate."""
    return tuple(
        LevelRow(
            name=lv.name,
            purpose=lv.purpose or NOTHING,
            holder=lv.holder or NOTHING,
            contingency=amounts.cell(row.contingency),
            total=amounts.cell(row.total),
            above_previous=amounts.cell(row.above_previous),
            percent_of_base=percent(lv.percent_of_base / 100, 1),
            interval=f"{amounts.cell(lv.low)} to {amounts.cell(lv.high)}",
            is_target=lv.percent == study.target.percent,
        )
        for lv, row in zip(study.levels, printed.levels, strict=True)
    )


def answer_page(
    study: Study, printed: PrintedFigures, amounts: Amounts, chart: Chart
) -> AnswerPage:
    """Return the answer; long texts are cut so that it stays on one page."""
    target, rule = study.target, study.estimate.contingency
    p10, p90 = (printed.percentiles[i].total for i in (9, 89))
    inputs = [d for d in study.drivers if d.kind != "cause"]
    return AnswerPage(
        contingency=amounts.full(printed.total.contingency),
        release=_release(printed.total.contingency, amounts),
        request=amounts.full(printed.request),
        base=amounts.full(printed.total.base),
        level=target.name,
        chance_words=f"{target.percent}{SPACE}%",
        set_by=clipped(rule.set_by, 120).rstrip(".") or "No authority is recorded",
        reason=sentence(clipped(rule.reason, 160)),
        percent_of_base=percent(target.percent_of_base / 100, 1),
        since=since_words(study, amounts),
        base_is_enough=chance(study.chance_base_is_enough),
        middle=f"{amounts.cell(p10)} to {amounts.cell(p90)}",
        interval=f"{amounts.cell(target.low)} to {amounts.cell(target.high)}",
        mean=amounts.cell(printed.mean),
        chart=chart.name,
        chart_alt=chart.alt,
        levels=tuple(
            replace(
                row, purpose=clipped(row.purpose, 26), holder=clipped(row.holder, 26)
            )
            for row in level_rows(study, printed, amounts)[:MOST_LEVELS]
        ),
        unit=amounts.caption,
        drivers=tuple(_top_driver(driver, amounts) for driver in inputs[:5]),
        cautions=_worst_cautions(study),
        attention=_attention(study.findings),
    )


def _release(contingency: float, amounts: Amounts) -> str:
    """Say where the level lies if it does not lie above the base; empty if it does."""
    if contingency > 0.0:
        return ""
    if contingency == 0.0:
        return "at the base"
    return f"{amounts.full(-contingency)} below the base"


def since_words(study: Study, amounts: Amounts) -> str:
    """Say what moved since the revision before, as the ends of the bridge have it.

    Empty for a first revision.  Base and contingency add up to the total, and each is
    the sum of its column of the bridge.
    """
    found = study.comparison
    if found is None:
        return ""
    unit = amounts.unit

    def moved(amount: float) -> str:
        return signed(amount / unit.size, unit.digits)

    old, new = (found.printed_end(amounts.step, is_after=x) for x in (False, True))
    base, contingency = new[0] - old[0], new[1] - old[1]
    steps = zip(found.bridge.steps, found.printed(amounts.step), strict=True)
    level = [row.contingency for step, row in steps if step.family is Family.LEVEL]
    of_which = f" (of which level change {moved(level[0])})" if level else ""
    dates = found.earlier.price_date != found.later.price_date
    money = "; each in money of its own price date" if dates else ""
    return (
        f"Since revision {clipped(found.earlier.revision, 24)}: base {moved(base)}, "
        f"contingency {moved(contingency)}{of_which}, "
        f"total {moved(base + contingency)} ({amounts.caption}{money})."
    )


def _top_driver(driver: Driver, amounts: Amounts) -> TopDriver:
    return TopDriver(
        name=f"{driver.id}{SPACE}{SPACE}{clipped(driver.name, 62)}",
        kind=KINDS[driver.kind],
        share=percent(driver.variance_share),
        effect=amounts.cell(driver.removal_effect),
    )


def _worst_cautions(study: Study) -> tuple[AnswerCaution, ...]:
    """Return the three that weigh most in a decision."""
    found = [
        (
            _weight(finding),
            AnswerCaution(
                mark=finding.severity.capitalize()
                + (", answered" if finding.is_answered else ""),
                words=sentence(clipped(finding.message, LONGEST_CAUTION)),
            ),
        )
        for finding in study.findings
    ]
    found += [
        (
            STATED,
            AnswerCaution(
                mark="Stated", words=sentence(clipped(words, LONGEST_CAUTION))
            ),
        )
        for words in study.estimate.statements.cautions
    ]
    found.sort(key=lambda pair: pair[0])
    return tuple(one for weight, one in found if weight <= LIGHTEST)[:3]


def _weight(finding: Finding) -> int:
    """Return the place of a finding among the cautions; smaller weighs more.

    What stands in the way comes first, a level that is not known before all that is
    only doubted, then what the money does not cover, then what
    the checks and the authors warn of, then what has been answered.
    """
    if finding.severity == "stop":
        return 0
    if finding.check == unsettled_percentile.slug and not finding.is_answered:
        return 1
    if finding.needs_attention:
        return 2
    if finding.check == rare_large_events.slug:
        return 3
    if finding.severity == "caution" and not finding.is_answered:
        return 4
    return LIGHTEST if finding.severity in ("major", "caution") else LIGHTEST + 1


def _attention(findings: tuple[Finding, ...]) -> str:
    """Say how many findings stand in the way of a sign-off."""
    stops = sum(finding.severity == "stop" for finding in findings)
    majors = sum(
        finding.severity == "major" and not finding.is_answered for finding in findings
    )
    if not stops and not majors:
        return "No stop and no unanswered major finding stands."
    parts = [plural(stops, "stop")] * bool(stops)
    parts += [plural(majors, "unanswered major finding")] * bool(majors)
    verb = "stands" if stops + majors == 1 else "stand"
    return f"{' and '.join(parts)} {verb} against this estimate."
