"""Checks of the evidence behind the ranges."""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING, Literal

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
from contingency.quantities.rounding import round_parts

if TYPE_CHECKING:
    # For the type checker only: `contingency check` must not load the engine.
    from contingency.setting.drivers import Driver

BackedBy = Literal["data", "analogue", "judgement", "nothing"]
KINDS: tuple[BackedBy, ...] = ("data", "analogue", "judgement", "nothing")
"""What may back a range, the best first."""

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
    evidence = _evidence_of(material)
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
        missing = _missing(evidence.get((driver.kind, driver.id), Evidence()))
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


@dataclass(frozen=True, kw_only=True, slots=True)
class EvidenceKind:
    """The inputs with one kind of evidence and their part of the variance."""

    kind: BackedBy
    share: float
    """Fraction of the variance; the four kinds sum to 1."""
    percent: int
    """The share in whole percent; the four kinds sum to 100."""
    drivers: tuple[Driver, ...]
    """Inputs of this kind that raise the variance, largest share first."""


def evidence_by_kind(material: Material) -> tuple[EvidenceKind, ...]:
    """Return what backs the spread of the total, in the order of `KINDS`.

    Shares of variance of ranges, systemic risks and events, by the kind of their
    evidence.  Inputs that reduce the variance count as nought.  Empty where nothing
    varies.
    """
    evidence = _evidence_of(material)
    backed: dict[BackedBy, list[Driver]] = {kind: [] for kind in KINDS}
    for driver in material.drivers:
        if driver.kind != "cause" and driver.variance_share > 0:
            known = evidence[driver.kind, driver.id]
            kind = known.kind if known.is_recorded and known.kind else "nothing"
            backed[kind].append(driver)
    sums = [sum(d.variance_share for d in drivers) for drivers in backed.values()]
    whole = sum(sums)
    if whole <= 0:
        return ()
    percents = round_parts([100.0 * part / whole for part in sums], step=1.0, total=100)
    return tuple(
        EvidenceKind(
            kind=kind,
            share=part / whole,
            percent=round(share),
            drivers=tuple(sorted(drivers, key=lambda d: -d.variance_share)),
        )
        for (kind, drivers), part, share in zip(
            backed.items(), sums, percents, strict=True
        )
    )


def evidence_score(material: Material) -> EvidenceScore | None:
    """Return what backs the spread of the total; None where nothing varies."""
    kinds = evidence_by_kind(material)
    if not kinds:
        return None
    return EvidenceScore(**{one.kind: one.share for one in kinds})


def _evidence_of(material: Material) -> dict[tuple[str, str], Evidence]:
    """Return the evidence by kind and id: an event may have the id of a package."""
    return {(row.kind, row.id): row.evidence for row in ranged_rows(material.estimate)}


def _missing(evidence: Evidence) -> list[str]:
    parts = {
        "basis": evidence.basis,
        "kind of basis": evidence.kind,
        "giver": evidence.given_by,
        "date": evidence.given_on,
    }
    return [name for name, value in parts.items() if not value]


CHECKS = (ranges_without_evidence,)
