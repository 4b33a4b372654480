"""What the number rests on: each answer against a run of the changed estimate."""

import dataclasses

import numpy as np
import pytest

from contingency.assurance.robustness import what_it_rests_on
from contingency.assurance.trial_set import TrialSet
from contingency.assurance.what_if import (
    most_dependence,
    with_chances,
    with_ends,
    with_shape,
    without_dependence,
)
from contingency.estimate.nouns import Ends, Load, ShapeName
from contingency.simulation import simulate
from contingency.study import run_study
from tests.assurance.builder import (
    EVENTS,
    PACKAGES,
    cause,
    changed,
    cost,
    event,
    outcome,
    rested,
    sound_estimate,
    sound_study,
    spoiled,
    systemic,
)

TREATED = changed(EVENTS, "R1", after_probability=0.1, after_impact=cost(2e5, 4e5, 9e5))


def answer(slug):
    """The answer to one question."""
    return next(one for one in rested().what_ifs if one.slug == slug)


def contingency_of(estimate, percent=80):
    """The contingency of a run of its own, with as many trials."""
    total = np.sort(simulate(estimate).total)
    return float(total[-(-total.size * percent // 100) - 1]) - estimate.base


@pytest.mark.parametrize(
    ("slug", "change"),
    [
        ("ends-at-fifths", lambda e: with_ends(e, 20)),
        (
            "pert-as-triangular",
            lambda e: with_shape(e, ShapeName.PERT, ShapeName.TRIANGULAR),
        ),
        ("general-dependence-0", {"general_dependence": 0.0}),
        ("general-dependence-50", {"general_dependence": 0.5}),
        ("no-systemic-risks", {"systemic": ()}),
        ("chances-halved", lambda e: with_chances(e, 0.5)),
        ("chances-raised", lambda e: with_chances(e, 1.5)),
    ],
)
def test_an_answer_is_the_run_of_the_changed_estimate(slug, change):
    """To the last trial: only less of it is simulated again."""
    estimate = sound_estimate()
    if isinstance(change, dict):
        variant = estimate.model_copy(update=change)
    else:
        variant = change(estimate)

    assert answer(slug).contingency == pytest.approx(contingency_of(variant), rel=1e-9)


def test_effects_are_added_to_the_issued_contingency():
    """And lie within what the blocks allow."""
    for one in rested().what_ifs:
        if one.contingency is not None:
            assert one.contingency == pytest.approx(
                rested().contingency + one.effect, rel=1e-12
            )
            assert one.half_width >= 0
            assert not one.reason


def test_widening_raises_and_certainty_lowers():
    """Signs that anybody would expect of this estimate."""
    assert answer("ends-at-fifths").effect > 0
    assert answer("general-dependence-0").effect < 0
    assert answer("general-dependence-50").effect > 0
    assert answer("no-systemic-risks").effect < 0
    assert answer("chances-halved").effect < 0 < answer("chances-raised").effect
    assert answer("level-lower").effect < 0 < answer("level-higher").effect


def test_a_question_that_does_not_arise_says_why():
    """No figure, and a reason."""
    one = answer("ends-at-tenths")

    assert one.contingency is None
    assert one.reason == "No range has ends outside P10-P90."
    assert answer("no-dependence").reason == (
        "There are no named causes and no correlations."
    )
    assert answer("general-dependence-25").reason == "The general dependence is 0.25."


def test_the_largest_driver_is_the_one_that_the_study_names():
    """With the effect of its removal."""
    largest = max(
        (d for d in sound_study().drivers if d.kind != "cause"),
        key=lambda d: abs(d.variance_share),
    )

    assert largest.id in answer("no-largest-driver").title
    assert answer("no-largest-driver").effect == -largest.removal_effect


def test_levels_come_from_the_issued_curve():
    """Ten points down and up."""
    study = sound_study()

    assert answer("level-lower").contingency == pytest.approx(
        study.percentile(70) - study.estimate.base
    )
    assert answer("level-higher").title == "P90 instead of P80"


def test_the_three_that_matter_most_are_assumptions():
    """Ordered by size; the choice of level is not an assumption."""
    largest = rested().largest()

    assert len(largest) == 3
    assert [abs(w.effect) for w in largest] == sorted(
        (abs(w.effect) for w in largest), reverse=True
    )
    assert not {w.slug for w in largest} & {"level-lower", "level-higher"}


def test_all_before_and_all_after_treatment():
    """An event with both states moves; one without stays."""
    before = sound_estimate(events=TREATED)
    after = sound_estimate(events=changed(TREATED, "R1", use="after"))
    answers = {}
    for name, estimate in (("before", before), ("after", after)):
        study = dataclasses.replace(sound_study(), estimate=estimate)
        answers[name] = {w.slug: w for w in what_it_rests_on(study).what_ifs}
    down = answers["before"]["all-after-treatment"].effect
    up = answers["after"]["all-before-treatment"].effect

    assert down < 0
    assert up == pytest.approx(-down)
    assert answers["before"]["all-before-treatment"].reason == (
        "No open event is used after treatment."
    )
    assert answers["after"]["all-after-treatment"].contingency is None


def test_fresh_seeds_scatter_around_the_issued_number():
    """Twenty of them, none the issued one, each a run of its own."""
    test = rested().seeds

    assert test.seeds == tuple(range(2, 22))
    assert len(set(test.contingencies)) == 20
    assert 0 < test.below < 20
    reseeded = sound_estimate(
        run=sound_estimate().run.model_copy(update={"seed": test.seeds[4]})
    )
    assert test.contingencies[4] == pytest.approx(contingency_of(reseeded), rel=1e-12)


def test_robustness_is_the_same_every_time():
    """Two computations, the same figures."""
    assert what_it_rests_on(sound_study()) == rested()


def test_without_fresh_seeds_the_check_does_not_run():
    """It says so instead of passing."""
    assert outcome("lucky-seed", spoiled(robustness=None)).reason == (
        "No runs with fresh seeds were made."
    )


class TestBreakPoints:
    """How far an input must move, checked by moving it."""

    def points(self):
        """Break points by id, judgements by quantity."""
        return {p.id or p.quantity: p for p in rested().break_points}

    def held(self, variant):
        """Share of the trials in which the issued total is enough."""
        total = TrialSet(variant, blocks=4).total
        return float(np.mean(total <= sound_study().target.total))

    def test_the_request_breaks_ten_points_lower(self):
        """P70 for a request at P80."""
        assert rested().break_percent == 70

    def test_a_systemic_risk_moved_to_its_break_point(self):
        """The level falls to 70 % there, to one trial."""
        point = self.points()["S1"]
        risk = sound_estimate().systemic[0]
        shape = risk.uplift
        moved = shape.model_copy(
            update={
                name: getattr(shape, name) + point.breaks_at
                for name in ("low", "likely", "high")
            }
        )
        variant = sound_estimate(systemic=(risk.model_copy(update={"uplift": moved}),))

        assert point.quantity == "uplift"
        assert self.held(variant) == pytest.approx(0.70, abs=2e-4)

    def test_an_event_moved_to_its_break_point(self):
        """Its chance, from the trials with and without it."""
        events = (*EVENTS, event("R6", "Quay wall tilts", 0.08, 4e6, 6e6, 1.1e7))
        study = run_study(sound_estimate(events=events))
        point = next(p for p in what_it_rests_on(study).break_points if p.id == "R6")
        moved = sound_estimate(
            events=changed(events, "R6", probability=point.breaks_at)
        )
        total = TrialSet(moved, blocks=4).total

        assert (point.quantity, point.now) == ("chance", 0.08)
        assert 0.08 < point.breaks_at < 1.0
        # Taken from the trials with and without it: good to a percentage point.
        assert np.mean(total <= study.target.total) == pytest.approx(0.70, abs=0.01)

    def test_all_chances_moved_to_their_break_point(self):
        """Each times the same factor."""
        point = self.points()["chances"]
        variant = with_chances(sound_estimate(), point.breaks_at)

        assert self.held(variant) == pytest.approx(0.70, abs=2e-3)

    def test_a_range_stretched_to_its_break_point(self):
        """Distances from the base times a factor."""
        point = self.points()["P2"]
        trials = TrialSet(sound_estimate(), blocks=4)
        row = [p.id for p in trials.model.packages].index("P2")
        total = np.concatenate(
            [
                d.total(trials.model)
                + (point.breaks_at - 1)
                * (d.value[row] - 14e6)
                * d.factor(trials.model)[row]
                for d in trials.drawn
            ]
        )

        assert point.quantity == "stretch"
        assert point.breaks_at > 1
        assert np.mean(total <= sound_study().target.total) == pytest.approx(
            0.70, abs=2e-4
        )

    def test_what_cannot_break_it_says_how_far_it_was_moved(self):
        """A small event, certain, leaves the request above P70."""
        small = (*EVENTS, event("R9", "A lost buoy", 0.5, 1e4, 2e4, 4e4))
        estimate = sound_estimate(events=small, systemic=())
        drivers = tuple(
            dataclasses.replace(d, id="R9", name="A lost buoy", variance_share=0.9)
            if d.id == "R4"
            else d
            for d in sound_study().drivers
            if d.id != "S1"
        )
        study = spoiled(estimate=estimate, drivers=drivers)
        point = what_it_rests_on(study).break_points[0]

        assert (point.id, point.breaks_at, point.furthest) == ("R9", None, 1.0)
        assert point.level_there > 70

    def test_there_are_at_most_ten_drivers_and_three_judgements(self):
        """Largest driver first, judgements last."""
        kinds = [point.kind for point in rested().break_points]

        assert len(kinds) == 13
        assert kinds[-3:] == ["judgement"] * 3
        assert "judgement" not in kinds[:10]


class TestChanges:
    """The changed estimates themselves."""

    def test_ends_further_in_stay(self):
        """P20 to P80 is inside P10 to P90 already."""
        inside = Ends(low_percent=20, high_percent=80)
        limits = cost(8e6, 9e6, 11e6, ends=Ends())
        estimate = sound_estimate(
            packages=changed(
                changed(PACKAGES, "P1", cost=limits),
                "P2",
                cost=cost(13e6, 14e6, 17e6, ends=inside),
            )
        )
        widened = with_ends(estimate, 10)

        assert str(widened.packages[0].cost.ends) == "P10-P90"
        assert widened.packages[1].cost.ends == inside

    def test_probabilities_stop_at_one_and_groups_at_their_sum(self):
        """0.45 and 0.30 that exclude one another, times three."""
        group = changed(changed(EVENTS, "R1", excludes=("R2",)), "R2", excludes=("R1",))
        raised = with_chances(sound_estimate(events=group), 3.0)
        chance = {e.id: e.probability for e in raised.events}

        assert chance["R1"] + chance["R2"] == pytest.approx(1.0)
        assert chance["R1"] / chance["R2"] == pytest.approx(0.30 / 0.45)
        assert chance["R3"] == pytest.approx(0.6)
        assert chance["R5"] == 1.0

    def test_a_general_dependence_is_held_to_what_loads_leave(self):
        """Loads of 0.8 leave 0.36."""
        loaded = sound_estimate(
            general_dependence=0.1,
            causes=(cause("c", "crew"),),
            packages=changed(PACKAGES, "P1", loads=(Load(cause="c", weight=0.8),)),
        )

        assert most_dependence(loaded) == pytest.approx(0.36)
        assert without_dependence(loaded).packages[0].loads == ()

    def test_a_range_without_such_a_curve_stays(self):
        """No lognormal leans so little between P20 and P80; between P10 and P80 one."""
        leaning = cost(
            1.0, 1.55, 2.0, "lognormal", Ends(low_percent=10, high_percent=80)
        )
        estimate = sound_estimate(systemic=(systemic(uplift=leaning),))
        widened = with_ends(estimate, 20)

        assert widened.systemic[0].uplift == leaning
        assert str(widened.packages[0].cost.ends) == "P20-P80"
