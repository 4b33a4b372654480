"""Checks of the evidence behind the ranges."""

from __future__ import annotations

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


def _missing(evidence: Evidence) -> list[str]:
    parts = {
        "basis": evidence.basis,
        "kind of basis": evidence.kind,
        "giver": evidence.given_by,
        "date": evidence.given_on,
    }
    return [name for name, value in parts.items() if not value]


CHECKS = (ranges_without_evidence,)
