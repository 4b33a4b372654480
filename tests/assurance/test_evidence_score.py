"""What backs the spread: shares of variance by kind of evidence."""

import dataclasses

import pytest

from contingency.assurance.evidence import evidence_by_kind, evidence_score
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


def test_an_event_may_have_the_id_of_a_package():
    """Ids are unique in their file only; each row keeps its own evidence."""
    events = changed(
        sound_estimate().events,
        "R3",
        id="P2",
        evidence=EVIDENCE.model_copy(update={"kind": "judgement"}),
    )
    drivers = tuple(
        dataclasses.replace(d, id="P2") if (d.kind, d.id) == ("event", "R3") else d
        for d in sound_study().drivers
    )
    kinds = {
        one.kind: one
        for one in evidence_by_kind(
            spoiled(estimate=sound_estimate(events=events), drivers=drivers)
        )
    }

    assert [(d.kind, d.id) for d in kinds["judgement"].drivers] == [("event", "P2")]
    assert ("range", "P2") in [(d.kind, d.id) for d in kinds["data"].drivers]


def test_whole_percents_of_the_kinds_make_a_hundred():
    """And each is less than one percent from its share; the largest inputs first."""
    kinds = evidence_by_kind(sound_study())

    assert sum(one.percent for one in kinds) == 100
    for one in kinds:
        assert abs(one.percent - 100 * one.share) < 1
        shares = [driver.variance_share for driver in one.drivers]
        assert shares == sorted(shares, reverse=True)
        assert sum(shares) == pytest.approx(
            one.share
            * sum(
                d.variance_share
                for d in sound_study().drivers
                if d.kind != "cause" and d.variance_share > 0
            )
        )
