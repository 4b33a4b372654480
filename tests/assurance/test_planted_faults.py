"""Every check: planted faults that it finds, clean twins that it lets pass."""

import pytest

from contingency.assurance.answers import STALE_ANSWERS
from contingency.assurance.registry import CHECKS
from tests.assurance.builder import findings_of, hits, outcome, sound_study
from tests.assurance.cases_base import CASES as BASE
from tests.assurance.cases_events import CASES as EVENTS
from tests.assurance.cases_level import CASES as LEVEL
from tests.assurance.cases_ranges import CASES as RANGES
from tests.assurance.cases_tracking import CASES as TRACKING

CASES = (*BASE, *RANGES, *EVENTS, *LEVEL, *TRACKING)
FAULTS = [case for case in CASES if case.severity is not None]
TWINS = [case for case in CASES if case.severity is None]
LISTS_ONLY = {"occurred-events"}
"""Checks that only list what is there: their clean twin has nothing to look at."""


def test_the_sound_estimate_is_sound():
    """What every fault is planted in trips nothing at all."""
    assert findings_of(sound_study())[0] == ()


@pytest.mark.parametrize("case", FAULTS, ids=str)
def test_a_planted_fault_is_found(case):
    """The first finding has the severity, the place and the figures."""
    given = case.given()
    found = hits(case.slug, given)

    assert found, outcome(case.slug, given)
    assert found[0].severity == case.severity
    assert case.words in found[0].message
    assert (found[0].where, found[0].rows) == (case.where, case.rows)
    assert outcome(case.slug, given).outcome == "finding"


@pytest.mark.parametrize("case", TWINS, ids=str)
def test_a_clean_twin_passes(case):
    """The check ran on it, and found nothing."""
    given = case.given()

    assert hits(case.slug, given) == []
    assert outcome(case.slug, given).outcome == "pass", outcome(case.slug, given)


@pytest.mark.parametrize("check", CHECKS, ids=lambda check: check.slug)
def test_every_check_has_a_fault_of_each_severity_and_a_twin(check):
    """No check, and no severity of a check, goes untested."""
    faults = [case for case in FAULTS if case.slug == check.slug]
    twins = [case for case in TWINS if case.slug == check.slug]

    assert {case.severity for case in faults} == set(check.severities)
    assert twins or check.slug in LISTS_ONLY


def test_no_case_names_a_check_that_does_not_exist():
    """A slip in a slug would hide a case."""
    assert {case.slug for case in CASES} <= {check.slug for check in CHECKS}
    assert STALE_ANSWERS.slug not in {case.slug for case in CASES}


def test_a_check_that_only_lists_says_so_when_there_is_nothing():
    """Without an event that happened there is nothing to confirm."""
    ended = outcome("occurred-events", sound_study())

    assert ended.outcome == "not-applicable"
    assert ended.reason == "No event has the status occurred."
