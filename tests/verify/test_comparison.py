"""Embedded results against computed ones: exactly, within sampling error, or not."""

import copy

import pytest

from contingency import read_estimate, run_study
from contingency.verify.comparison import compare_results
from tests.folders import lay_out

LEAST = 16_384


def results_of(folder, *, seed=1, high=1300):
    """Results of a small estimate."""
    return run_study(
        read_estimate(
            lay_out(
                folder,
                packages=[
                    {
                        "id": "P1",
                        "base": 1000,
                        "low": 900,
                        "high": high,
                        "start": "2026-07-01",
                        "finish": "2029-06-30",
                        "prices": "steel",
                    },
                    {"id": "P2", "base": 500, "low": 400, "high": 700},
                ],
                systemic=[
                    {"id": "S1", "low": "-2%", "likely": "2%", "high": "9%"},
                ],
                events=[
                    {
                        "id": "R1",
                        "kind": "threat",
                        "probability": 0.3,
                        "low": 50,
                        "likely": 80,
                        "high": 150,
                    },
                    {
                        "id": "R2",
                        "kind": "threat",
                        "probability": 0.02,
                        "low": 200,
                        "likely": 300,
                        "high": 500,
                    },
                ],
                prices=[{"id": "steel", "low": "-3%", "likely": "2%", "high": "9%"}],
                seed=seed,
                trials=LEAST,
            )
        )
    ).results()


@pytest.fixture(scope="module")
def computed(tmp_path_factory):
    return results_of(tmp_path_factory.mktemp("comparison") / "one")


@pytest.fixture
def embedded(computed):
    """A copy to be changed by one test."""
    return copy.deepcopy(computed)


def compare(embedded, computed):
    return compare_results(embedded, computed, least=LEAST)


def test_the_same_results_are_reproduced_exactly(embedded, computed):
    """Figure by figure and word by word."""
    found = compare(embedded, computed)

    assert found.outcome == "exactly"
    assert found.largest is None
    assert found.same_version


@pytest.mark.parametrize("seed", [2, 3, 4])
def test_another_seed_is_within_sampling_error(computed, tmp_path, seed):
    """Two runs of one model: what differs between them is what is allowed."""
    other = results_of(tmp_path / "other", seed=seed)
    other["run"]["seed"] = computed["run"]["seed"]
    other["estimate"] = computed["estimate"]
    other["findings"] = computed["findings"]
    found = compare(other, computed)

    assert found.outcome == "within sampling error"
    assert found.judged > 130
    assert 0.02 < found.largest.size < 1.0


def test_another_model_is_not_reproduced(computed, tmp_path):
    """One limit of one range differs by 3 % of its package."""
    other = results_of(tmp_path / "other", high=1330)
    other["estimate"] = computed["estimate"]
    other["findings"] = computed["findings"]
    found = compare(other, computed)

    assert found.outcome == "not reproduced"
    assert found.largest.size > 1.0


def test_a_last_digit_is_within_sampling_error(embedded, computed):
    """As another processor may add in another order; the figure is named."""
    embedded["mean"] *= 1 + 1e-11
    found = compare(embedded, computed)

    assert found.outcome == "within sampling error"
    assert found.largest.figure == "mean"
    assert found.largest.size < 1e-3


FORGED = [
    ("base", lambda r: r.update(base=r["base"] * 1.001)),
    ("mean", lambda r: r.update(mean=r["mean"] * 1.02)),
    ("chance", lambda r: r.update(chance_base_is_enough=0.99)),
    ("P50", lambda r: r["percentiles"].update(P50=r["percentiles"]["P56"])),
    ("target", lambda r: r["target"].update(contingency=r["target"]["total"])),
    ("level", lambda r: r["levels"][0].update(total=r["levels"][1]["total"])),
    ("split", lambda r: r["split"].update(events=r["split"]["ranges"] * 2)),
    ("row", lambda r: r["allocation"][0].update(ranges=0.0)),
    ("share", lambda r: r["allocation"][1].update(variance_share=0.9)),
    ("year", lambda r: r["funding"][0].update(base=r["funding"][1]["base"])),
    ("phasing", lambda r: r["funding"][0].update(contingency=999.0)),
    ("escalation", lambda r: r["funding"][1].update(escalation_on_base=0.0)),
    ("outturn", lambda r: r["outturn"].update(total=r["target"]["total"])),
    ("enough", lambda r: r["outturn"].update(chance_funding_is_enough=0.9)),
    ("infinite", lambda r: r.update(mean=1e300)),
]


@pytest.mark.parametrize(
    "forge", [forge for _, forge in FORGED], ids=[name for name, _ in FORGED]
)
def test_each_forged_figure_is_not_reproduced(embedded, computed, forge):
    """By more than sampling explains."""
    forge(embedded)

    assert compare(embedded, computed).outcome == "not reproduced"


CONTRADICTED = [
    ("format", lambda r: r.update(format="other/1")),
    ("revision", lambda r: r["estimate"].update(revision="Z")),
    ("fingerprint", lambda r: r["estimate"].update(fingerprint="0" * 64)),
    ("seed", lambda r: r["run"].update(seed=99)),
    ("trials", lambda r: r["run"].update(trials=1)),
    ("packages", lambda r: r["allocation"].pop()),
    ("levels", lambda r: r["levels"].pop()),
    ("percentiles", lambda r: r["percentiles"].pop("P07")),
    ("target", lambda r: r["target"].update(level="P50")),
    ("years", lambda r: r["funding"].pop()),
    ("no years", lambda r: r.update(funding=None)),
    ("cross-check", lambda r: r["cross_check"].update(passed=False)),
    ("findings", lambda r: r["findings"].pop()),
]


@pytest.mark.parametrize(
    "contradict",
    [change for _, change in CONTRADICTED],
    ids=[name for name, _ in CONTRADICTED],
)
def test_each_contradiction_is_told(embedded, computed, contradict):
    """What no sampling can explain is said in words."""
    contradict(embedded)
    found = compare(embedded, computed)

    assert found.outcome == "not reproduced"
    assert found.contradictions


def test_a_wide_interval_in_the_report_widens_nothing(embedded, computed):
    """What is allowed comes from the run made now."""
    embedded["target"]["interval"] = [0.0, 1e9]
    embedded["standard_deviation"] = computed["standard_deviation"]
    embedded["target"]["total"] *= 1.05

    assert compare(embedded, computed).outcome == "not reproduced"


def test_another_version_may_word_its_findings_otherwise(embedded, computed):
    """Figures are compared, words and fingerprint are not, and it is said."""
    embedded["tool"] = {"name": "contingency", "version": "0.0.9"}
    embedded["findings"] = []
    embedded["estimate"]["fingerprint"] = "0" * 64
    found = compare(embedded, computed)

    assert (found.outcome, found.same_version) == ("exactly", False)
    assert (found.embedded_version, found.computed_version) == (
        "0.0.9",
        computed["tool"]["version"],
    )


@pytest.mark.parametrize(
    "ruin",
    [
        lambda r: r.clear(),
        lambda r: r.pop("percentiles"),
        lambda r: r.update(tool=[]),
        lambda r: r["percentiles"].update(P50="many"),
        lambda r: r["percentiles"].update(P50=True),
        lambda r: r.update(levels=None),
        lambda r: r["run"].update(trials="many"),
        lambda r: r.update(allocation=[{}] * len(r["allocation"])),
    ],
    ids=range(8),
)
def test_what_is_no_result_is_refused(embedded, computed, ruin):
    """By one of the errors that the caller turns into a line."""
    ruin(embedded)
    with pytest.raises((ValueError, KeyError, TypeError, AttributeError)):
        compare(embedded, computed)
