"""What every check must declare, and the registry as a whole."""

import re
from math import inf

import pytest

from contingency.assurance.declaration import MARKS, InputCheck
from contingency.assurance.registry import (
    CHECKS,
    SUBJECTS,
    all_checks,
    all_settings,
)
from contingency.assurance.settings import GRADES, Settings, Threshold

LADDER = ("stop", "major", "caution", "note")
SLUG = re.compile(r"[a-z]+(-[a-z]+)*")
NAME = re.compile(r"[a-z]+(_[a-z0-9]+)*")


@pytest.mark.parametrize("check", all_checks(), ids=lambda check: check.slug)
class TestEveryCheck:
    """The contract of a check."""

    def test_the_slug_is_permanent_in_form(self, check):
        """Lower-case words joined by hyphens."""
        assert SLUG.fullmatch(check.slug)

    def test_every_part_is_written(self, check):
        """Title, catch, rule and advice are sentences of their own."""
        assert check.subject in SUBJECTS
        assert check.title
        assert not check.title.endswith(".")
        for text in (check.catches, check.rule, check.todo):
            assert text.endswith(".")
            assert "  " not in text

    def test_severities_are_steps_of_the_ladder(self, check):
        """Worst first, none twice."""
        places = [LADDER.index(severity) for severity in check.severities]

        assert places
        assert places == sorted(set(places))

    def test_the_source_is_printed_with_its_mark(self, check):
        """Whoever reads a finding sees how well its source is known."""
        assert check.sources
        for source in check.sources:
            assert MARKS[source.mark] in str(source)
            assert str(source) in check.source

    def test_what_is_known_from_memory_says_so(self, check):
        """The words that a source from memory must carry."""
        for source in check.sources:
            if source.mark == "MEMORY":
                assert "from memory, not checked against the original" in str(source)

    def test_thresholds_are_printed_with_value_and_grade(self, check):
        """Name, default, grade and meaning of each setting can be read."""
        printed = Settings().printed(check.thresholds)

        for threshold in check.thresholds:
            assert GRADES[threshold.grade] in printed
            assert threshold.meaning in printed
            if isinstance(threshold, Threshold):
                assert f"{threshold.default:g}" in printed
                assert threshold.least <= threshold.default <= threshold.most
                assert threshold.least >= 0 or threshold.most < inf


@pytest.mark.parametrize("one", all_settings(), ids=lambda one: one.name)
def test_a_setting_has_a_plain_name(one):
    """Lower-case words joined by underscores, as a toml key."""
    assert NAME.fullmatch(one.name)


def test_slugs_and_settings_are_unique():
    """A name stands for one thing; a setting shared by two checks is one object."""
    slugs = [check.slug for check in all_checks()]
    by_name = {}
    for check in all_checks():
        for one in check.thresholds:
            assert by_name.setdefault(one.name, one) is one

    assert len(slugs) == len(set(slugs))


def test_checks_come_by_subject():
    """The order of the report: subject by subject."""
    places = [SUBJECTS.index(check.subject) for check in all_checks()]

    assert places == sorted(places)


def test_the_checks_that_the_first_report_needs_are_there():
    """Slugs that estimate files answer by name never change."""
    slugs = {check.slug for check in CHECKS}

    assert slugs >= {
        "ends-undefined",
        "ranges-without-evidence",
        "copied-ranges",
        "mirrored-ranges",
        "no-dependence",
        "no-systemic-layer",
        "certain-events",
        "rare-large-events",
        "unsettled-percentile",
        "cross-check-failed",
        "allocation-does-not-close",
        "level-without-authority",
    }
    assert {type(check) is InputCheck for check in CHECKS} == {True, False}
