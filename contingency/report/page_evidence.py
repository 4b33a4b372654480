"""What backs the spread, and where modelled systemic risks come from."""

from __future__ import annotations

from dataclasses import dataclass

from contingency.assurance.evidence import EvidenceKind, evidence_by_kind
from contingency.estimate.nouns import Estimate, RatedFactor, RatedModel, SystemicRisk
from contingency.report.wording import (
    NOTHING,
    SPACE,
    count,
    listed,
    percent,
    plain,
    sentence,
)
from contingency.study import Study

MEANINGS = {
    "data": "measured, tendered or counted for this project",
    "analogue": "taken over from another project or place",
    "judgement": "somebody's opinion, recorded with a name and a reason",
    "nothing": "no basis is recorded, or its kind is not stated",
}
"""What each kind of evidence is."""
LARGEST = 3
"""Inputs of a kind that are named."""
MODELS = {"history": "closed projects (history.csv)", "ratings": "the rated model"}
SHOWN = (10, 50, 80, 90)
"""Percentiles of a modelled uplift that the table shows."""


@dataclass(frozen=True, kw_only=True, slots=True)
class EvidenceRow:
    """One kind of evidence."""

    kind: str
    meaning: str
    inputs: str
    share: str
    largest: str


@dataclass(frozen=True, kw_only=True, slots=True)
class ModelledRow:
    """One systemic risk whose uplift comes from a model."""

    id: str
    name: str
    source: str
    covers: str
    uplifts: tuple[str, ...]
    """At the percentiles of the heading."""


@dataclass(frozen=True, kw_only=True, slots=True)
class FactorRow:
    """One factor of the rated model."""

    id: str
    name: str
    rating: str
    evidence: str
    coefficient: str
    effect: str


@dataclass(frozen=True, kw_only=True, slots=True)
class RatedPart:
    """The rated model that a systemic risk rests on."""

    name: str
    risks: str
    form: str
    factors: tuple[FactorRow, ...]
    constant: str
    expected: str
    """Constant and all effects together."""
    spread: str
    provenance: str


@dataclass(frozen=True, kw_only=True, slots=True)
class EvidencePage:
    """The evidence score, and systemic risks from evidence."""

    line: str
    """The score in one sentence; empty where nothing varies."""
    kinds: tuple[EvidenceRow, ...]
    heads: tuple[str, ...]
    """Names of the percentiles of modelled uplifts."""
    modelled: tuple[ModelledRow, ...]
    rated: RatedPart | None


def evidence_page(study: Study) -> EvidencePage:
    """Return the evidence score and the models behind systemic risks."""
    estimate = study.estimate
    kinds = evidence_by_kind(study)
    return EvidencePage(
        line=_line(kinds),
        kinds=tuple(_kind_row(one) for one in kinds),
        heads=tuple(f"P{percentage}" for percentage in SHOWN),
        modelled=tuple(_modelled_row(r) for r in estimate.systemic if r.model),
        rated=_rated_part(estimate),
    )


def _line(kinds: tuple[EvidenceKind, ...]) -> str:
    """Return the score in one sentence, the best kind first."""
    if not kinds:
        return ""
    first, *rest = [f"{one.percent}{SPACE}%" for one in kinds]
    others = zip(rest, ("on analogues", "on judgement", "on nothing"), strict=True)
    parts = [f"{share} {words}" for share, words in others]
    return listed([f"{first} of the variance rests on data", *parts]) + "."


def _kind_row(one: EvidenceKind) -> EvidenceRow:
    names = [f"{d.id}{SPACE}{d.name}" for d in one.drivers[:LARGEST]]
    return EvidenceRow(
        kind=one.kind.capitalize(),
        meaning=MEANINGS[one.kind],
        inputs=count(len(one.drivers)),
        share=f"{one.percent}{SPACE}%",
        largest="; ".join(names) or NOTHING,
    )


def _modelled_row(risk: SystemicRisk) -> ModelledRow:
    curve = risk.uplift.distribution
    return ModelledRow(
        id=risk.id,
        name=risk.name,
        source=MODELS[risk.model or ""],
        covers=sentence(risk.covers),
        uplifts=tuple(percent(float(curve.quantile(p / 100)), 1) for p in SHOWN),
    )


def _rated_part(estimate: Estimate) -> RatedPart | None:
    """Return the rated model; None where no systemic risk rests on it."""
    model = estimate.rated_model
    risks = [risk.id for risk in estimate.systemic if risk.model == "ratings"]
    if model is None or not risks:
        return None
    return RatedPart(
        name=model.name,
        risks=listed(risks),
        form=(
            "The sum is the logarithm of one plus the uplift."
            if model.form == "log"
            else "The sum is the uplift."
        ),
        factors=tuple(_factor_row(factor) for factor in model.factors),
        constant=plain(model.constant),
        expected=plain(model.expected),
        spread=_spread(model),
        provenance=sentence(model.provenance),
    )


def _factor_row(factor: RatedFactor) -> FactorRow:
    value = plain(factor.value)
    return FactorRow(
        id=factor.id,
        name=factor.name,
        rating=f"{factor.rating} ({value})" if factor.rating else value,
        evidence=sentence(factor.evidence) or "No evidence is recorded.",
        coefficient=plain(factor.coefficient),
        effect=plain(factor.effect),
    )


def _spread(model: RatedModel) -> str:
    known = (
        "taken as known"
        if model.degrees is None
        else f"estimated on {count(model.degrees)} degrees of freedom"
    )
    return f"{plain(model.residual_spread)}, {known}"
