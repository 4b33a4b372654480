"""Thresholds: set in estimate.toml, refused with the nearest name, printed."""

import pytest

from contingency.assurance.run import assurance_faults
from contingency.assurance.settings import Settings
from contingency.errors import (
    AssuranceSettingRefused,
    UnknownAssuranceSetting,
    UnusableEstimate,
)
from contingency.estimate.nouns import SourceFile
from tests.assurance.builder import (
    findings_of,
    hits,
    outcome,
    sound_estimate,
    sound_study,
    spoiled,
    with_package,
)
from tests.assurance.cases_ranges import all_ranged

MIRRORED = all_ranged(0.85, 1.15, ("P1", "P2", "P3"))


def test_a_threshold_can_be_raised():
    """67 % mirrored passes at 70 %, and the outcome says who set it."""
    estimate = sound_estimate(
        packages=MIRRORED, assurance={"mirrored_ranges_percent": 70}
    )
    ended = outcome("mirrored-ranges", estimate)

    assert ended.outcome == "pass"
    assert ended.threshold.startswith(
        "largest share with mirror-image ranges: 70 % of the ranged base"
        " (set in estimate.toml)"
    )


def test_a_threshold_can_be_lowered():
    """For a result check too."""
    estimate = sound_estimate(assurance={"base_enough_most_percent": 5})

    assert hits("base-on-the-curve", sound_study()) == []
    assert hits("base-on-the-curve", spoiled(estimate=estimate)) != []


def test_words_can_be_changed():
    """An organisation has its own word for padding."""
    estimate = with_package("P2", name="Quay wall, float").model_copy(
        update={"assurance": {"allowance_words_in_names": "Float; cushion"}}
    )

    assert hits("allowance-in-base", estimate)[0].where == "P2"


def test_the_default_is_printed_with_its_grade():
    """A house default is never presented as a standard."""
    assert "60 % of the ranged base (H: house default, not a standard)" in (
        outcome("mirrored-ranges", sound_estimate()).threshold
    )
    assert "(D: computed)" in outcome("rare-large-events", sound_study()).threshold


TOML = b"""[contingency]
mirrored_ranges_percnt = 1

[assurance]
mirrored_ranges_percnt = 70
least_median_skew = "much"
copied_ranges_major_percent = 180
small_ranges_fewest = true
uplift_words = " ; "
"""


def test_every_wrong_setting_is_reported_with_its_line():
    """Unknown name, wrong type, out of range, a switch, no words."""
    estimate = sound_estimate(
        sources=(SourceFile(name="estimate.toml", content=TOML),),
        assurance={
            "mirrored_ranges_percnt": 70,
            "least_median_skew": "much",
            "copied_ranges_major_percent": 180,
            "small_ranges_fewest": True,
            "uplift_words": " ; ",
        },
    )
    faults = assurance_faults(estimate)

    assert [type(fault) for fault in faults] == [
        UnknownAssuranceSetting,
        *[AssuranceSettingRefused] * 4,
    ]
    assert [fault.where.split(",")[0] for fault in faults] == [
        f"estimate.toml:{line}" for line in (5, 6, 7, 8, 9)
    ]
    assert faults[0].remedy == "The nearest name is mirrored_ranges_percent."
    assert faults[2].rule == ("copied_ranges_major_percent is a number from 0 to 100.")
    assert faults[3].found == "the value is True."


def test_checks_do_not_run_with_a_wrong_setting():
    """All faults at once, as for any other input."""
    with pytest.raises(UnusableEstimate) as raised:
        findings_of(sound_estimate(assurance={"nonsense": 1, "nonsuch": 2}))

    assert len(raised.value.faults) == 2
    assert raised.value.faults[0].where == "estimate.toml, [assurance] nonsense"


def test_a_setting_that_is_not_written_has_its_default():
    """Nought is a value, not an absence."""
    from contingency.assurance.ranges import MIRRORED_SHARE

    assert Settings().number(MIRRORED_SHARE) == 60
    assert Settings({"mirrored_ranges_percent": 0}).number(MIRRORED_SHARE) == 0
