"""Checks of the evidence behind the ranges."""

from __future__ import annotations

from dataclasses import dataclass

from contingency.assurance.declaration import (
    Hit,
    NotApplicable,
    Source,
    Verdict,
    result_check,
)
from contingency.assurance.material import Material
from contingency.assurance.rows import ranged_rows
from contingency.assurance.settings import Settings, Threshold
from contingency.assurance.wording import counted, listed, percent
from contingency.estimate.nouns import Evidence

EVIDENCE_SHARE = Threshold(
    name="evidence_variance_percent",
    default=80,
    unit="% of the variance",
    grade="H",
    meaning="the inputs that make up the first",
    most=100,
)


@result_check(
    slug="ranges-without-evidence",
    subject="ranges",
    title="Ranges without evidence",
    catches="Figures that matter with no author, date, kind of source or reason.",
    rule=(
        "Inputs in order of their share of variance, until the shares reach the"
        " threshold. Each needs basis, basis_kind, given_by and given_on."
    ),
    thresholds=(EVIDENCE_SHARE,),
    severities=("major",),
    todo="Write down who gave the figures, when, from what, or replace them.",
    sources=(
        Source(
            "GAO-20-195G, survey of step 9: distributions rest on availability,"
            " reliability and variability of data",
            "READ",
        ),
        Source(
            "GAO-13-163T: final figures could not be traced to their sources", "READ"
        ),
    ),
)
def ranges_without_evidence(material: Material, settings: Settings) -> Verdict:
    """Find the large drivers whose evidence is not complete."""
    evidence = {row.id: row.evidence for row in ranged_rows(material.estimate)}
    drivers = sorted(
        (d for d in material.drivers if d.kind != "cause" and d.variance_share > 0),
        key=lambda driver: -driver.variance_share,
    )
    if not drivers:
        return NotApplicable("No input has any spread.")
    reached = 0.0
    bare: list[str] = []
    words: list[str] = []
    share = 0.0
    for driver in drivers:
        if 100 * reached >= settings.number(EVIDENCE_SHARE):
            break
        reached += driver.variance_share
        missing = _missing(evidence.get(driver.id, Evidence()))
        if missing:
            bare.append(driver.id)
            words.append(f"{driver.id} (no {' or '.join(missing)})")
            share += driver.variance_share
    if not bare:
        return []
    return [
        Hit(
            severity="major",
            rows=tuple(bare),
            message=(
                f"{percent(share)} of the spread rests on"
                f" {counted(len(bare), 'input')} without a complete record of"
                f" evidence: {listed(words)}."
            ),
        )
    ]


@dataclass(frozen=True, kw_only=True, slots=True)
class EvidenceScore:
    """Fractions of the variance by what backs the ranges behind it; they sum to 1."""

    data: float
    analogue: float
    judgement: float
    nothing: float
    """Behind it stands no basis, or one whose kind is not stated."""


def evidence_score(material: Material) -> EvidenceScore | None:
    """Return what backs the spread of the total; None where nothing varies.

    Shares of variance of ranges, systemic risks and events, by the kind of their
    evidence.  Inputs that reduce the variance count as nought.
    """
    evidence = {row.id: row.evidence for row in ranged_rows(material.estimate)}
    share = dict.fromkeys(("data", "analogue", "judgement", "nothing"), 0.0)
    for driver in material.drivers:
        if driver.kind != "cause" and driver.variance_share > 0:
            known = evidence[driver.id]
            backed = known.kind if known.is_recorded and known.kind else "nothing"
            share[backed] += driver.variance_share
    whole = sum(share.values())
    if whole <= 0:
        return None
    return EvidenceScore(**{kind: part / whole for kind, part in share.items()})


def _missing(evidence: Evidence) -> list[str]:
    parts = {
        "basis": evidence.basis,
        "kind of basis": evidence.kind,
        "giver": evidence.given_by,
        "date": evidence.given_on,
    }
    return [name for name, value in parts.items() if not value]


CHECKS = (ranges_without_evidence,)
