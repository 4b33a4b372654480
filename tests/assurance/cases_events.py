"""Planted faults and clean twins: systemic risks, events, treatment, contract."""

import dataclasses
import datetime as dt

from contingency.estimate.modelled import history_uplift, rated_uplift
from contingency.estimate.nouns import (
    ClosedProject,
    Load,
    OutsideRule,
    PackageShare,
    RatedFactor,
    RatedModel,
)
from tests.assurance.builder import (
    ALIKE,
    EVENTS,
    OUTSIDE,
    PACKAGES,
    cause,
    changed,
    cost,
    event,
    package,
    sound_estimate,
    sound_study,
    spoiled,
    systemic,
    with_event,
)
from tests.assurance.case import fault, twin
from tests.assurance.cases_base import with_exclusion

ARRANGED = {
    "use": "after",
    "after_probability": 0.1,
    "after_impact": EVENTS[0].impact,
    "response": "Side-scan survey before the tender",
    "response_cost": 80_000.0,
    "response_package": "P7",
    "response_owner": "survey lead",
    "response_due": dt.date(2026, 6, 30),
}
WRECK_IN_TWO = (
    *EVENTS,
    event("R6", "In the basin: an unknown wreck", 0.2, 1e5, 2e5, 4e5),
)


def tagged(**more):
    """Two events with one cause; the first hits P1."""
    shares = (PackageShare(package="P1", fraction=1.0),)
    return (
        EVENTS[0].model_copy(update={"cause": "soil", "shares": shares}),
        EVENTS[1].model_copy(update={"cause": "Soil"} | more),
        *EVENTS[2:],
    )


def covered(id_, share):
    """The sound study in which removing an event frees this share of its cost."""
    mean = next(e for e in EVENTS if e.id == id_).impact.distribution.mean
    drivers = tuple(
        dataclasses.replace(d, removal_effect=share * mean if d.id == id_ else mean)
        for d in sound_study().drivers
    )
    return {"drivers": drivers, "target": small_contingency()}


def small_contingency(amount=3_000_000.0):
    """The target with so much contingency."""
    return dataclasses.replace(sound_study().target, contingency=amount)


def outside(middle, high):
    """The sound study beside a table with this P50 and P80."""
    rule = OUTSIDE.model_copy(update={"percentiles": ((50, middle), (80, high))})
    return spoiled(estimate=sound_estimate(outside_rule=rule))


def from_history(covered):
    """A systemic risk from nine closed projects."""
    ratios = (0.95, 1.02, 1.05, 1.11, 1.13, 1.19, 1.26, 1.31, 1.48)
    history = tuple(
        ClosedProject(
            id=f"H{i}", estimate=100, final=100 * r + covered, covered=covered, line=2
        )
        for i, r in enumerate(ratios)
    )
    uplift = history_uplift(history)
    return sound_estimate(
        history=history,
        outside_rule=OutsideRule(**ALIKE),
        systemic=(systemic(uplift=uplift, model="history", covers="all but events"),),
    )


def from_ratings(evidence):
    """A systemic risk from a rated model of one factor."""
    factor = RatedFactor(
        id="scope", name="Scope", coefficient=0.05, value=2, evidence=evidence
    )
    model = RatedModel(
        name="Own model",
        provenance="forty quays",
        form="log",
        constant=0.0,
        residual_spread=0.1,
        factors=(factor,),
    )
    risk = systemic(uplift=rated_uplift(model), model="ratings", covers="definition")
    return sound_estimate(rated_model=model, systemic=(risk,))


def boxed(count, values):
    """So many events with probabilities from a few values."""
    return tuple(
        event(f"R{i}", f"Case number {i}", values[i % len(values)], 1e5, 2e5, 4e5)
        for i in range(count)
    )


def with_systemic_share(share):
    """A study of class 4 whose systemic risks have this share of the variance."""
    drivers = tuple(
        dataclasses.replace(d, variance_share=share) if d.kind == "systemic" else d
        for d in sound_study().drivers
    )
    return spoiled(estimate=sound_estimate(estimate_class=4), drivers=drivers)


def large(events):
    """Twenty packages and these events."""
    packages = tuple(
        package(f"Q{i}", f"Work {i}", 1e6, 0.9, 1.2 + i / 200) for i in range(20)
    )
    return sound_estimate(packages=packages, events=events)


def contracts(**first):
    """All events retained, the first with these fields."""
    kept = tuple(e.model_copy(update={"contract": "retained"}) for e in EVENTS)
    return sound_estimate(events=(kept[0].model_copy(update=first), *kept[1:]))


def scopes(first):
    """All events inside the scope, the first as given."""
    inside = tuple(e.model_copy(update={"in_scope": True}) for e in EVENTS)
    return sound_estimate(
        events=(inside[0].model_copy(update={"in_scope": first}), *inside[1:])
    )


CASES = (
    fault(
        "no-systemic-layer",
        "none at all",
        lambda: sound_estimate(systemic=()),
        "major",
        "The estimate has no systemic risks.",
    ),
    fault(
        "no-systemic-layer",
        "one at its neutral value",
        lambda: sound_estimate(
            systemic=(systemic(uplift=cost(None, 0.0, None, shape="fixed")),)
        ),
        "major",
        "All 1 systemic risk are neutral",
    ),
    twin("no-systemic-layer", "one at work", sound_estimate),
    fault(
        "thin-systemic-layer",
        "10 % at class 4",
        lambda: with_systemic_share(0.10),
        "caution",
        "10 % of the variance of an estimate of class 4",
    ),
    twin("thin-systemic-layer", "30 % at class 4", lambda: with_systemic_share(0.30)),
    fault(
        "outside-view-gap",
        "far below what others needed",
        lambda: outside(0.4, 0.57),
        "major",
        "+40 % at P50 and +57 % at P80 (a published table); this model allows +14 %",
    ),
    fault(
        "outside-view-gap",
        "less than half of it",
        lambda: outside(0.2, 0.57),
        "caution",
        "+25 %.",
    ),
    fault(
        "outside-view-gap",
        "more than others ever needed",
        lambda: outside(0.02, 0.1),
        "caution",
        "+2 % at P50 and +10 % at P80",
    ),
    fault(
        "outside-view-gap",
        "nothing to compare with",
        lambda: spoiled(estimate=sound_estimate(outside_rule=OutsideRule())),
        "note",
        "No closed projects and no published percentiles are given.",
    ),
    twin("outside-view-gap", "as others", lambda: outside(0.12, 0.27)),
    fault(
        "counted-twice",
        "titles alike",
        lambda: sound_estimate(events=WRECK_IN_TWO),
        "major",
        "have titles that are alike",
        where="R6",
    ),
    fault(
        "counted-twice",
        "same cause on the same cost",
        lambda: sound_estimate(events=tagged()),
        "major",
        "have the same cause, soil, on the same cost",
        where="R2",
    ),
    fault(
        "counted-twice",
        "systemic risk and event",
        lambda: sound_estimate(systemic=(systemic(cause="soil"),), events=tagged()),
        "major",
        "systemic risk S1 Definition of scope and event R1",
        where="R1",
    ),
    fault(
        "counted-twice",
        "two ranges and an event",
        lambda: sound_estimate(
            causes=(cause("soil", "Soil"),),
            packages=changed(
                changed(PACKAGES, "P1", loads=(Load(cause="soil", weight=0.4),)),
                "P2",
                loads=(Load(cause="soil", weight=0.4),),
            ),
            events=changed(EVENTS, "R1", cause="soil"),
        ),
        "major",
        "the ranges of P1, P2 and event R1 Unknown wreck in the basin have the same",
        where="R1",
    ),
    twin(
        "counted-twice",
        "one cause, different packages",
        lambda: sound_estimate(
            events=tagged(shares=(PackageShare(package="P3", fraction=1.0),))
        ),
    ),
    twin(
        "counted-twice",
        "linked by requires",
        lambda: sound_estimate(events=tagged(requires="R1")),
    ),
    twin(
        "counted-twice",
        "linked by excludes",
        lambda: sound_estimate(events=tagged(excludes=("R1",))),
    ),
    twin(
        "counted-twice",
        "reconciled",
        lambda: sound_estimate(
            systemic=(systemic(cause="soil", covers="all but the wreck"),),
            events=tagged(shares=(PackageShare(package="P3", fraction=1.0),)),
        ),
    ),
    fault(
        "uplift-without-statement",
        "optimism bias",
        lambda: sound_estimate(systemic=(systemic(name="Optimism bias"),)),
        "major",
        "optimism bias",
        where="S1",
    ),
    twin(
        "uplift-without-statement",
        "with a statement",
        lambda: sound_estimate(
            systemic=(systemic(name="Optimism bias", covers="instead of events"),)
        ),
    ),
    fault(
        "history-not-net",
        "the whole overrun",
        lambda: from_history(covered=0.0),
        "major",
        "the whole overrun of 9 closed projects, on top of 7 ranges and 5 open events",
        where="S1",
    ),
    twin("history-not-net", "net", lambda: from_history(covered=5.0)),
    fault(
        "ratings-without-evidence",
        "one factor",
        lambda: from_ratings(evidence=""),
        "major",
        "1 factor of Own model have no evidence for their rating: scope",
        rows=("scope",),
    ),
    twin(
        "ratings-without-evidence",
        "a review",
        lambda: from_ratings(evidence="review of 3 March"),
    ),
    fault(
        "certain-events",
        "certain",
        lambda: with_event("R2", probability=1.0),
        "major",
        "R2 Late delivery of rails is certain",
        where="R2",
    ),
    fault(
        "certain-events",
        "nearly certain",
        lambda: with_event("R2", probability=0.93),
        "caution",
        "a chance of 93 %",
        where="R2",
    ),
    twin(
        "certain-events",
        "certain once another has happened",
        lambda: with_event("R2", probability=1.0, requires="R1"),
    ),
    twin("certain-events", "likely", lambda: with_event("R2", probability=0.89)),
    fault(
        "weightless-events",
        "cannot happen",
        lambda: with_event("R2", probability=0.0),
        "note",
        "cannot happen",
        where="R2",
    ),
    fault(
        "weightless-events",
        "costs nothing",
        lambda: with_event("R2", impact=cost(None, 0.0, None, shape="fixed")),
        "note",
        "costs nothing",
        where="R2",
    ),
    twin("weightless-events", "as they are", sound_estimate),
    fault(
        "rare-large-events",
        "nobody holds it",
        lambda: spoiled(**covered("R1", 0.05)),
        "major",
        "P80 holds EUR 76,300 of that (5 %). Nobody is named",
        where="R1",
    ),
    fault(
        "rare-large-events",
        "somebody holds it",
        lambda: spoiled(
            estimate=with_event("R1", held_by="Port authority reserve"),
            **covered("R1", 0.05),
        ),
        "note",
        "The rest is held by Port authority reserve.",
        where="R1",
    ),
    twin("rare-large-events", "funded", lambda: spoiled(**covered("R1", 0.30))),
    twin(
        "rare-large-events",
        "small",
        lambda: spoiled(**covered("R1", 0.05) | {"target": small_contingency(7e6)}),
    ),
    fault(
        "dead-risks",
        "window over",
        lambda: with_event("R3", window_finish=dt.date(2026, 2, 28)),
        "major",
        "closed on 2026-02-28",
        where="R3",
    ),
    twin(
        "dead-risks",
        "window open",
        lambda: with_event("R3", window_finish=dt.date(2026, 3, 31)),
    ),
    twin(
        "dead-risks",
        "closed in time",
        lambda: with_event("R3", window_finish=dt.date(2026, 2, 1), status="closed"),
    ),
    fault(
        "occurred-events",
        "one happened",
        lambda: with_event("R3", status="occurred"),
        "note",
        "1 event happened and is no longer simulated: R3 Storm",
        rows=("R3",),
    ),
    fault(
        "register-not-reviewed",
        "a hundred days ago",
        lambda: with_event("R1", reviewed_on=dt.date(2025, 12, 20)),
        "caution",
        "more than 90 days",
        rows=("R1",),
    ),
    fault(
        "register-not-reviewed",
        "review missed",
        lambda: with_event(
            "R1", reviewed_on=dt.date(2026, 2, 1), next_review=dt.date(2026, 3, 1)
        ),
        "caution",
        "missed the next one: R1",
        rows=("R1",),
    ),
    twin(
        "register-not-reviewed",
        "in time",
        lambda: with_event(
            "R1", reviewed_on=dt.date(2026, 2, 1), next_review=dt.date(2026, 5, 1)
        ),
    ),
    fault(
        "no-opportunities",
        "threats only",
        lambda: sound_estimate(events=EVENTS[:4]),
        "note",
        "All 4 open events are threats",
    ),
    twin("no-opportunities", "one", sound_estimate),
    fault(
        "no-threats",
        "savings only",
        lambda: sound_estimate(events=EVENTS[4:]),
        "caution",
        "All 1 open event are opportunities",
    ),
    fault(
        "no-threats",
        "nothing at all",
        lambda: sound_estimate(events=()),
        "caution",
        "no open events",
    ),
    twin("no-threats", "some", sound_estimate),
    fault(
        "few-events",
        "four for twenty packages",
        lambda: large(EVENTS[:4]),
        "caution",
        "4 open events for 20 packages",
    ),
    twin("few-events", "five for twenty packages", lambda: large(EVENTS)),
    fault(
        "scoring-boxes",
        "sixteen from five",
        lambda: sound_estimate(events=boxed(16, (0.05, 0.2, 0.4, 0.6, 0.8))),
        "caution",
        "come from 5 values: 0.05, 0.2, 0.4, 0.6, 0.8",
    ),
    twin(
        "scoring-boxes",
        "sixteen from six",
        lambda: sound_estimate(events=boxed(16, (0.05, 0.2, 0.4, 0.6, 0.8, 0.1))),
    ),
    fault(
        "treatment-not-funded",
        "nothing arranged",
        lambda: with_event(
            "R1", **ARRANGED | {"response_cost": None, "response_due": None}
        ),
        "major",
        "no cost and no date",
        where="R1",
    ),
    fault(
        "treatment-not-funded",
        "in no package",
        lambda: with_event("R1", **ARRANGED | {"response_package": None}),
        "major",
        "no package that pays for it",
        where="R1",
    ),
    twin("treatment-not-funded", "arranged", lambda: with_event("R1", **ARRANGED)),
    twin(
        "treatment-not-funded",
        "free of charge",
        lambda: with_event(
            "R1", **ARRANGED | {"response_package": None, "response_cost": 0.0}
        ),
    ),
    fault(
        "treatment-overdue",
        "due last month",
        lambda: with_event("R1", **ARRANGED | {"response_due": dt.date(2026, 2, 28)}),
        "major",
        "was due on 2026-02-28",
        where="R1",
    ),
    twin("treatment-overdue", "due in June", lambda: with_event("R1", **ARRANGED)),
    fault(
        "treatment-makes-worse",
        "exchanged",
        lambda: with_event("R1", **ARRANGED | {"after_probability": 0.5}),
        "stop",
        "EUR 458,000 before and EUR 763,000 after treatment",
        where="R1",
    ),
    fault(
        "treatment-makes-worse",
        "an opportunity made smaller",
        lambda: with_event("R5", after_probability=0.1, after_impact=EVENTS[4].impact),
        "stop",
        "EUR 120,000 before and EUR 34,200 after treatment",
        where="R5",
    ),
    twin("treatment-makes-worse", "better", lambda: with_event("R1", **ARRANGED)),
    fault(
        "treatment-paid-not-counted",
        "paid but before",
        lambda: with_event("R1", **ARRANGED | {"use": "before"}),
        "caution",
        "P7 pays EUR 80,000 for the response to R1",
        where="R1",
    ),
    twin("treatment-paid-not-counted", "counted", lambda: with_event("R1", **ARRANGED)),
    fault(
        "transferred-risk-funded",
        "passed on and funded",
        lambda: contracts(contract="transferred", clause="clause 12.3"),
        "major",
        "transferred (clause 12.3) but still draws contingency",
        where="R1",
    ),
    twin("transferred-risk-funded", "retained", contracts),
    fault(
        "contract-share-missing",
        "begun and left",
        lambda: contracts(contract=None),
        "major",
        "Of 5 open events 1 does not say who",
        rows=("R1",),
    ),
    fault(
        "contract-share-missing",
        "a mature class",
        lambda: sound_estimate(estimate_class=2),
        "major",
        "Of 5 open events 5 do not",
        rows=("R1", "R2", "R3", "R4", "R5"),
    ),
    fault(
        "contract-share-missing",
        "shared, but how",
        lambda: contracts(contract="shared", clause="clause 9"),
        "major",
        "the retained share is not stated",
        where="R1",
    ),
    fault(
        "contract-share-missing",
        "without a clause",
        lambda: contracts(contract="shared", retained_share=0.5),
        "caution",
        "without a clause of the contract: R1",
        rows=("R1",),
    ),
    twin(
        "contract-share-missing",
        "complete",
        lambda: contracts(contract="shared", retained_share=0.5, clause="clause 9"),
    ),
    fault(
        "scope-as-risk",
        "outside the scope",
        lambda: scopes(first=False),
        "major",
        "lies outside the approved scope",
        where="R1",
    ),
    fault(
        "scope-as-risk",
        "not said",
        lambda: scopes(first=None),
        "caution",
        "Of 5 open events 1 does not say whether",
        rows=("R1",),
    ),
    twin("scope-as-risk", "inside", lambda: scopes(first=True)),
    fault(
        "excluded-yet-funded",
        "the wreck is excluded",
        lambda: sound_estimate(
            statements=with_exclusion("Any unknown wreck found in the basin.")
        ),
        "major",
        "Exclusion X2 holds 100 % of the words of R1",
        where="R1",
    ),
    twin("excluded-yet-funded", "something else", sound_estimate),
    fault(
        "held-twice",
        "named by its id",
        lambda: sound_estimate(statements=with_exclusion("Insured: R1.")),
        "stop",
        "is carried by owner, but it is funded here too",
        where="R1",
    ),
    twin(
        "held-twice",
        "a longer id",
        lambda: sound_estimate(statements=with_exclusion("Insured: R12 and R1-b.")),
    ),
)
