"""Written answers: matched, stale, to a stop, to nothing that exists."""

import pytest

from contingency.errors import UnknownCheckAnswered, UnusableEstimate
from tests.assurance.builder import (
    EVENTS,
    answered,
    changed,
    findings_of,
    hits,
    outcome,
    sound_estimate,
    sound_study,
    spoiled,
)
from tests.assurance.cases_ranges import all_ranged

MIRRORED = {"packages": all_ranged(0.85, 1.15, ("P1", "P2", "P3"))}
TWO_CERTAIN = changed(changed(EVENTS, "R2", probability=1.0), "R4", probability=1.0)


def answered_by(*answers, **changes):
    """The sound estimate with faults and answers."""
    return sound_estimate(answers=answers, **changes)


def test_a_major_without_an_answer_needs_attention():
    """So does one that was answered for another check."""
    (finding,) = hits("mirrored-ranges", answered_by(**MIRRORED))

    assert finding.needs_attention
    assert not finding.is_answered


def test_one_answer_covers_a_whole_finding():
    """An answer without a row."""
    answer = answered("mirrored-ranges")
    (finding,) = hits("mirrored-ranges", answered_by(answer, **MIRRORED))

    assert finding.answer == answer
    assert not finding.needs_attention


def test_an_answer_to_one_row_leaves_the_others_open():
    """It is kept with the finding, which still needs attention."""
    answer = answered("mirrored-ranges", "P2")
    estimate = answered_by(answer, **MIRRORED)
    (finding,) = hits("mirrored-ranges", estimate)

    assert finding.row_answers == (answer,)
    assert finding.needs_attention
    assert hits("stale-answers", estimate) == []


def test_answers_to_every_row_cover_the_finding():
    """Row by row is as good as once for all."""
    answers = [answered("mirrored-ranges", row) for row in ("P1", "P2", "P3")]
    (finding,) = hits("mirrored-ranges", answered_by(*answers, **MIRRORED))

    assert finding.row_answers == tuple(answers)
    assert not finding.needs_attention


def test_a_finding_of_a_row_takes_the_answer_of_that_row():
    """An answer to the whole check serves the others."""
    row, whole = answered("certain-events", "R2"), answered("certain-events")
    first, second = hits("certain-events", answered_by(whole, row, events=TWO_CERTAIN))

    assert (first.where, first.answer) == ("R2", row)
    assert (second.where, second.answer) == ("R4", whole)


def test_a_stop_is_never_answered_away():
    """The answer is printed, the stop stands."""
    answer = answered("no-dependence")
    (finding,) = hits("no-dependence", answered_by(answer, general_dependence=None))

    assert finding.answer == answer
    assert finding.severity == "stop"
    assert finding.needs_attention


def test_an_answer_to_what_no_longer_fires_is_stale():
    """It names the check, the person and the day."""
    (finding,) = hits("stale-answers", answered_by(answered("mirrored-ranges")))

    assert finding.severity == "caution"
    assert "The answer that A. Berg gave on 2026-03-31 to mirrored-ranges" in (
        finding.message
    )
    assert outcome("stale-answers", answered_by()).outcome == "pass"


def test_an_answer_to_a_row_that_no_longer_fires_is_stale():
    """Although the check still fires for other rows."""
    estimate = answered_by(answered("mirrored-ranges", "P7"), **MIRRORED)
    (finding,) = hits("stale-answers", estimate)

    assert finding.where == "P7"


def test_an_answer_to_a_check_that_did_not_run_is_not_stale():
    """Without a simulation nothing is known about it."""
    estimate = answered_by(answered("unsettled-percentile"))

    assert hits("stale-answers", estimate) == []
    assert len(hits("stale-answers", spoiled(estimate=estimate))) == 1


def test_an_answer_to_a_check_that_does_not_exist_is_an_input_error():
    """With the nearest name."""
    with pytest.raises(UnusableEstimate) as raised:
        findings_of(answered_by(answered("mirror-ranges")))
    (fault,) = raised.value.faults

    assert isinstance(fault, UnknownCheckAnswered)
    assert fault.remedy == "The nearest name is mirrored-ranges."


def test_the_order_is_the_same_every_time():
    """Findings and outcomes, run twice on equal estimates."""
    estimates = [
        sound_estimate(general_dependence=None, estimate_class=5, events=TWO_CERTAIN)
        for _ in range(2)
    ]

    assert findings_of(estimates[0]) == findings_of(estimates[1])
    assert findings_of(sound_study()) == findings_of(sound_study())
