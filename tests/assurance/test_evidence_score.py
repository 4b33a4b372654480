"""What backs the spread: shares of variance by kind of evidence."""

import dataclasses

import pytest

from contingency.assurance.evidence import evidence_score
from contingency.estimate.nouns import Evidence
from tests.assurance.builder import (
    EVIDENCE,
    PACKAGES,
    changed,
    sound_estimate,
    sound_study,
    spoiled,
    systemic,
)


def share_of(*ids):
    """The variance share of these drivers in the sound study."""
    return sum(
        d.variance_share
        for d in sound_study().drivers
        if d.id in ids and d.kind != "cause"
    )


def test_each_kind_gets_the_variance_of_its_rows():
    """One package by analogue, the systemic risk by judgement, one event by nothing."""
    packages = changed(
        PACKAGES, "P2", evidence=EVIDENCE.model_copy(update={"kind": "analogue"})
    )
    judged = systemic(evidence=EVIDENCE.model_copy(update={"kind": "judgement"}))
    events = sound_estimate().events
    estimate = sound_estimate(
        packages=packages,
        systemic=(judged,),
        events=changed(events, "R3", evidence=Evidence(kind="data")),
    )
    score = evidence_score(spoiled(estimate=estimate))
    whole = sum(
        max(d.variance_share, 0) for d in sound_study().drivers if d.kind != "cause"
    )

    assert score.analogue == pytest.approx(share_of("P2") / whole)
    assert score.judgement == pytest.approx(share_of("S1") / whole)
    assert score.nothing == pytest.approx(share_of("R3") / whole)
    assert sum(dataclasses.astuple(score)) == pytest.approx(1.0)


def test_a_point_has_no_score():
    """Nothing varies, so nothing backs it."""
    assert evidence_score(spoiled(drivers=())) is None
