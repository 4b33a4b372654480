"""Checks for one exposure that is counted in two places."""

from __future__ import annotations

import re
from collections.abc import Iterator
from dataclasses import dataclass
from itertools import combinations
from typing import Literal

from contingency.assurance.declaration import (
    COMMON_PRACTICE,
    Hit,
    NotApplicable,
    Source,
    Verdict,
    input_check,
)
from contingency.assurance.rows import uncertain_packages
from contingency.assurance.settings import Settings, Threshold, WordList
from contingency.assurance.wording import counted, listed, words_found
from contingency.estimate.modelled import projects_like
from contingency.estimate.nouns import PROJECT_WIDE, Estimate, RiskEvent

SIMILAR_TITLES = Threshold(
    name="similar_titles",
    default=0.6,
    unit="of the words",
    grade="H",
    meaning="titles are alike from",
    most=1,
)
UPLIFT_WORDS = WordList(
    name="uplift_words",
    default=(
        "optimism bias; optimism; bias uplift; reference class; outside view;"
        " history.csv"
    ),
    grade="H",
    meaning="words looked for",
)
EMPTY_WORDS = frozenset(
    {"a", "an", "and", "at", "by", "due", "during", "for", "from", "in", "is", "its"}
    | {"of", "on", "or", "than", "the", "to", "with"}
)
"""Words of a title that say nothing about its subject."""


@dataclass(frozen=True, kw_only=True, slots=True)
class _Tagged:
    """A row that may carry the same exposure as another one."""

    kind: Literal["range", "systemic", "event"]
    id: str
    label: str
    name: str
    causes: frozenset[str]
    packages: frozenset[str]
    event: RiskEvent | None = None
    reconciled: bool = False


@input_check(
    slug="counted-twice",
    subject="systemic risks and events",
    title="One exposure counted twice",
    catches="One cause that is present as a range, as a systemic risk and as an event.",
    rule=(
        "Two systemic risks, two events, or one of each, with titles that are alike;"
        " or, among ranges, systemic risks and events, the same cause on the same"
        " package. Linked by requires or excludes, two events are one story. A"
        " systemic risk that says under covers what it covers is reconciled."
    ),
    thresholds=(SIMILAR_TITLES,),
    severities=("major",),
    todo="Say which of the two carries the exposure, and take it out of the other.",
    sources=(
        Source(
            "AACE International RP 113R-20 (systemic against project-specific) and UK"
            " transport appraisal guidance, unit A1.2",
            "MEMORY",
        ),
        Source(
            "FTA oversight procedure: whether an adjusted item is in the register too",
            "READ",
        ),
    ),
)
def counted_twice(estimate: Estimate, settings: Settings) -> Verdict:
    """Find pairs of rows that seem to carry one exposure."""
    rows = list(_tagged(estimate))
    if len(rows) < 2:
        return NotApplicable("Fewer than two rows could carry one exposure.")
    limit = settings.number(SIMILAR_TITLES)
    # Ranges that share one cause with one other row are one story, told once.
    stories: dict[tuple[str, str, str], list[_Tagged]] = {}
    for first, second in combinations(rows, 2):
        why = _alike(first, second, limit)
        if why:
            alone = "" if first.kind == "range" else first.id
            stories.setdefault((second.id, why, alone), []).append(first)
    labels = {row.id: row.label for row in rows if row.kind != "range"}
    return [
        Hit(
            severity="major",
            where=second,
            message=(
                f"{_told(firsts)} and {labels[second]} {why}. Which one carries it?"
            ),
        )
        for (second, why, _), firsts in stories.items()
    ]


def _told(firsts: list[_Tagged]) -> str:
    if len(firsts) == 1:
        return firsts[0].label
    return f"the ranges of {listed(row.id for row in firsts)}"


def _tagged(estimate: Estimate) -> Iterator[_Tagged]:
    """Yield ranges with causes, systemic risks and open events, in this order."""
    names = {cause.id: cause.name for cause in estimate.causes}
    for p in estimate.packages:
        loads = [load.cause for load in p.loads if load.weight != 0]
        if loads and p.cost.varies:
            yield _Tagged(
                kind="range",
                id=p.id,
                label=f"the range of {p.label}",
                name=p.name,
                causes=_tags(*loads, *(names.get(load, "") for load in loads)),
                packages=frozenset({p.id}),
            )
    for s in estimate.systemic:
        yield _Tagged(
            kind="systemic",
            id=s.id,
            label=f"systemic risk {s.label}",
            name=s.name,
            causes=_tags(s.cause),
            packages=frozenset(s.packages),
            reconciled=bool(s.covers),
        )
    for e in estimate.open_events:
        yield _Tagged(
            kind="event",
            id=e.id,
            label=f"event {e.label}",
            name=e.name,
            causes=_tags(e.cause),
            packages=frozenset(share.package for share in e.shares),
            event=e,
        )


def _tags(*words: str) -> frozenset[str]:
    return frozenset(word.strip().casefold() for word in words if word.strip())


def _alike(first: _Tagged, second: _Tagged, limit: float) -> str:
    """Return in what way two rows seem to be one exposure, or nothing."""
    if first.kind == second.kind == "range":
        return ""  # sharing a cause is what causes are for
    if first.reconciled or second.reconciled or _linked(first.event, second.event):
        return ""
    shared = first.causes & second.causes
    if shared and _meet(first.packages, second.packages):
        return f"have the same cause, {min(shared)}, on the same cost"
    if "range" not in (first.kind, second.kind) and (
        likeness(first.name, second.name) >= limit
    ):
        return "have titles that are alike"
    return ""


def _meet(a: frozenset[str], b: frozenset[str]) -> bool:
    return PROJECT_WIDE in a or PROJECT_WIDE in b or bool(a & b)


def _linked(a: RiskEvent | None, b: RiskEvent | None) -> bool:
    """Return whether two events are tied together by the register itself."""
    if a is None or b is None:
        return False
    return (
        a.id in b.excludes
        or b.id in a.excludes
        or a.requires == b.id
        or b.requires == a.id
    )


def likeness(a: str, b: str) -> float:
    """Return the shared words of two titles over all their words, 0 to 1.

    Jaccard's index of the sets of words, without short words that say nothing.

    >>> likeness("Late delivery of the main winch", "Main winch: late delivery")
    1.0
    """
    first, second = words_of(a), words_of(b)
    if not first or not second:
        return 0.0
    return len(first & second) / len(first | second)


def words_of(text: str) -> frozenset[str]:
    """Return the words of a title that say something, lower case."""
    return frozenset(re.findall(r"\w+", text.casefold())) - EMPTY_WORDS


@input_check(
    slug="uplift-without-statement",
    subject="systemic risks and events",
    title="Uplift on top of the simulation",
    catches=(
        "A percentage from past projects added to simulated contingency, two"
        " allowances for one tendency."
    ),
    rule=(
        "A systemic risk with one of the words in its name, cause or basis says under"
        " covers what it covers."
    ),
    thresholds=(UPLIFT_WORDS,),
    severities=("major",),
    todo=(
        "Write under covers whether the uplift stands instead of ranges and events,"
        " is a floor under them or comes on top, and why."
    ),
    sources=(
        Source(
            "UK transport analysis guidance, annex of 2003: an uplift even after full"
            " analysis",
            "READ",
        ),
        Source(
            "UK transport appraisal guidance, unit A1.2: analysis and uplift are"
            " reconciled",
            "READ-title",
        ),
        Source("Edinburgh Tram Inquiry, chapter on risk and optimism bias", "READ"),
        COMMON_PRACTICE,
    ),
)
def uplift_without_statement(estimate: Estimate, settings: Settings) -> Verdict:
    """Find uplifts that do not say what they cover."""
    if not estimate.systemic:
        return NotApplicable("The estimate has no systemic risks.")
    hits: list[Hit] = []
    for risk in estimate.systemic:
        text = f"{risk.name} . {risk.cause} . {risk.evidence.basis}"
        found = words_found(text, settings.words(UPLIFT_WORDS))
        if found and not risk.covers:
            message = (
                f"{risk.label} is an uplift by its words ({found[0]}) and is added to"
                " ranges and events. Nothing says how they relate."
            )
            hits.append(Hit(severity="major", where=risk.id, message=message))
    return hits


@input_check(
    slug="history-not-net",
    subject="systemic risks and events",
    title="History on top of ranges and events",
    catches=(
        "The whole overrun of past projects as a systemic risk, while ranges and"
        " events pay for a part of it again."
    ),
    rule=(
        "A systemic risk with model = history, in an estimate with ranges or open"
        " events: the closed projects compared with say under covered what ranges and"
        " events of this estimate cover of their final cost."
    ),
    severities=("major",),
    todo=(
        "Fill the column covered of history.csv, with 0 where nothing is covered; or"
        " say in an answer why ranges and events cover nothing of the past overruns."
    ),
    sources=(
        Source(
            "UK transport appraisal guidance, unit A1.2: analysis and uplift are"
            " reconciled",
            "READ-title",
        ),
        COMMON_PRACTICE,
    ),
)
def history_not_net(estimate: Estimate, _settings: Settings) -> Verdict:
    """Find histories that hold what ranges and events pay for too."""
    risks = [risk for risk in estimate.systemic if risk.model == "history"]
    if not risks:
        return NotApplicable("No systemic risk is taken from history.csv.")
    projects = projects_like(estimate.history, estimate.outside_rule)
    if any(project.covered > 0 for project in projects):
        return []
    ranges = len(uncertain_packages(estimate))
    events = len(estimate.open_events)
    if not ranges and not events:
        return []
    return [
        Hit(
            severity="major",
            where=risk.id,
            message=(
                f"{risk.label} is the whole overrun of"
                f" {counted(len(projects), 'closed project')}, on top of"
                f" {counted(ranges, 'range')} and {counted(events, 'open event')}."
            ),
        )
        for risk in risks
    ]


@input_check(
    slug="ratings-without-evidence",
    subject="systemic risks and events",
    title="Ratings without evidence",
    catches="A rated model that gives any answer its user likes.",
    rule="Each factor of ratings.toml has evidence, where a systemic risk rests on it.",
    severities=("major",),
    todo="Write under evidence why the project is rated so, by whom and when.",
    sources=(
        Source(
            "AACE International RP 42R-08 (draft): ratings of scope definition and"
            " complexity",
            "READ",
        ),
        COMMON_PRACTICE,
    ),
)
def ratings_without_evidence(estimate: Estimate, _settings: Settings) -> Verdict:
    """Find factors that are rated without a reason."""
    model = estimate.rated_model
    if model is None or all(risk.model != "ratings" for risk in estimate.systemic):
        return NotApplicable("No systemic risk is taken from ratings.toml.")
    bare = [factor.id for factor in model.factors if not factor.evidence]
    if not bare:
        return []
    message = (
        f"{counted(len(bare), 'factor')} of {model.name} have no evidence for their"
        f" rating: {listed(bare)}."
    )
    return [Hit(severity="major", rows=tuple(bare), message=message)]


CHECKS = (
    counted_twice,
    uplift_without_statement,
    history_not_net,
    ratings_without_evidence,
)
