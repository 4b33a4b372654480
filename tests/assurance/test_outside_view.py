"""The outside view and the back-test of a history."""

import json

import numpy as np
import pytest
from scipy import stats

from contingency.assurance.calibration import calibrate, hit_rate_interval
from contingency.assurance.outside_view import (
    outside_amounts,
    outside_view,
)
from contingency.cli import main
from contingency.errors import TooFewProjects
from contingency.estimate.nouns import ClosedProject, OutsideRule
from contingency.quantities.predictive import LognormalFit, fit_lognormal
from tests.assurance.builder import ALIKE, OUTSIDE, sound_estimate, spoiled

RATIOS = (0.94, 1.02, 1.05, 1.11, 1.13, 1.19, 1.26, 1.31, 1.48, 1.77)


def closed(*ratios, group=""):
    """Closed projects with these ratios of final cost to estimate."""
    return tuple(
        ClosedProject(id=f"H{i}", estimate=2e6, final=2e6 * r, group=group, line=2)
        for i, r in enumerate(ratios)
    )


def beside(projects=(), **rule):
    """The sound study beside a history."""
    given = OutsideRule(**ALIKE | rule)
    return spoiled(estimate=sound_estimate(history=tuple(projects), outside_rule=given))


def test_a_fit_predicts_as_the_prediction_interval_of_a_normal_sample():
    """Student's t with n - 1 degrees of freedom, spread times sqrt(1 + 1/n)."""
    fit = fit_lognormal(RATIOS)
    logs = np.log(RATIOS)
    predictive = stats.t(
        9, loc=logs.mean(), scale=logs.std(ddof=1) * np.sqrt(1 + 1 / 10)
    )

    for percent in (5, 50, 80, 95):
        assert np.log(fit.quantile(percent)) == pytest.approx(
            predictive.ppf(percent / 100)
        )
    assert fit.chance(1.3) == pytest.approx(predictive.cdf(np.log(1.3)))
    assert fit.chance(fit.quantile(80)) == pytest.approx(0.8)


def test_predictions_hold_as_often_as_they_say():
    """4,000 samples of nine: the tenth stays below P80 of the nine 80 % of the time."""
    random = np.random.Generator(np.random.PCG64(20260331))
    draws = random.normal(0.1, 0.25, size=(4_000, 10))
    held = 0
    for row in draws:
        fit = LognormalFit(
            count=9, log_mean=row[:9].mean(), log_spread=row[:9].std(ddof=1)
        )
        held += np.exp(row[9]) <= fit.quantile(80)
    error = np.sqrt(0.8 * 0.2 / 4_000)

    assert held / 4_000 == pytest.approx(0.8, abs=3 * error)


def test_amounts_of_the_outside_view_are_ratios_of_the_base():
    """In rising order, each once; beyond the ends of a table there is none."""
    study = beside(closed(*RATIOS))
    view = outside_view(study)
    table = outside_view(beside(percentiles=((50, 0.1), (80, 0.3)), source="a table"))
    amounts = outside_amounts(view, base=1e6, percents=(80, 50, 80))

    assert [one.percent for one in amounts] == [50, 80]
    assert [one.total for one in amounts] == pytest.approx(
        [1e6 * view.fit.quantile(50), 1e6 * view.fit.quantile(80)]
    )
    assert [
        (one.percent, one.ratio)
        for one in outside_amounts(table, base=1e6, percents=(10, 50, 80, 90))
    ] == [(50, 1.1), (80, 1.3)]


def test_a_history_places_base_p50_and_target():
    """Each by the chance that one more project does not exceed it."""
    study = beside(closed(*RATIOS))
    view = outside_view(study)
    base, middle, target = view.positions

    assert view.kind == "history"
    assert view.ratios == RATIOS
    assert (base.name, middle.name, target.name) == ("base", "P50", "P80")
    assert base.ratio == 1.0
    assert base.low_percent == pytest.approx(100 * view.fit.chance(1.0))
    assert target.amount == study.target.total
    assert base.low_percent < middle.low_percent < target.low_percent
    assert view.ratio(80) == pytest.approx(view.fit.quantile(80))


def test_a_table_brackets_them():
    """Between two of its percentiles, or beyond the last."""
    view = outside_view(
        beside(source="a table", percentiles=((50, 0.05), (80, 0.2), (90, 0.3)))
    )
    base, middle, target = view.positions

    assert (base.low_percent, base.high_percent) == (0, 50)
    assert (middle.low_percent, middle.high_percent) == (50, 80)
    assert (target.low_percent, target.high_percent) == (80, 90)
    assert view.ratio(85) == pytest.approx(1.25)
    assert view.ratio(95) is None


def test_only_the_group_is_compared_with():
    """Quays with quays."""
    others = closed(*(3 * r for r in RATIOS), group="tunnels")
    quays = tuple(
        p.model_copy(update={"id": f"Q{p.id}"}) for p in closed(*RATIOS, group="quays")
    )
    view = outside_view(beside((*others, *quays), group="quays"))

    assert view.ratios == RATIOS
    assert view.source == "history.csv, group quays"


@pytest.mark.parametrize(
    ("study", "words"),
    [
        (beside, "No closed projects and no published percentiles"),
        (
            lambda: beside(closed(*RATIOS), stage="", scope=""),
            "does not say how stage and scope are alike",
        ),
        (lambda: beside(closed(*RATIOS[:7])), "has 7 projects to compare with; 8 are"),
        (
            lambda: beside(closed(*RATIOS), group="bridges"),
            "has 0 projects to compare with",
        ),
    ],
)
def test_without_a_fair_comparison_there_is_none(study, words):
    """And it says why."""
    assert words in outside_view(study())


def test_a_back_test_leaves_each_project_out():
    """Its percent is its place on what the other nine predict."""
    result = calibrate(closed(*RATIOS))
    last = result.projects[-1]
    others = fit_lognormal(RATIOS[:-1])

    assert last.percent == pytest.approx(100 * others.chance(1.77))
    assert [record.percent for record in result.funded] == [50, 80, 90]
    for record in (*result.funded, *result.pictured):
        by_amount = sum(
            ratio
            <= fit_lognormal((*RATIOS[:i], *RATIOS[i + 1 :])).quantile(record.percent)
            for i, ratio in enumerate(RATIOS)
        )
        assert record.enough == by_amount
        assert record.low <= record.share <= record.high


def test_the_sentence_says_what_happened():
    """Count, share, interval, and whether it agrees."""
    record = calibrate(closed(*RATIOS)).funded[1]

    assert record.sentence == (
        "Funded at P80 of the others, 8 of 10 projects would have had enough"
        " (80 %; 95 % interval 44 % to 97 %), which agrees with 80 %."
    )


def test_the_interval_is_that_of_clopper_and_pearson():
    """Against scipy's own, at both ends too."""
    for enough, count in ((0, 8), (3, 8), (8, 8), (17, 20)):
        exact = stats.binomtest(enough, count).proportion_ci(0.95, "exact")

        assert hit_rate_interval(enough, count) == pytest.approx(
            (exact.low, exact.high)
        )


def test_a_handful_of_projects_is_not_tested():
    """Seven are too few."""
    with pytest.raises(TooFewProjects) as raised:
        calibrate(closed(*RATIOS[:7]))

    assert raised.value.found == "7 closed projects given."
    assert OUTSIDE.is_comparable


def test_the_command_prints_the_sentences(tmp_path, capsys):
    """Of one group of a file; as JSON the same."""
    path = tmp_path / "closed.csv"
    rows = [f"H{i},,quays,100,{100 * ratio},," for i, ratio in enumerate(RATIOS)]
    lines = ["id,name,group,estimate,final,notes", *(row[:-1] for row in rows)]
    path.write_text("\n".join([*lines, "T1,,tunnels,100,900,"]), encoding="utf-8")
    sentence = calibrate(closed(*RATIOS)).funded[1].sentence

    assert main(["calibrate", str(path), "--group", "quays"]) == 0
    assert sentence in capsys.readouterr().out
    assert main(["calibrate", str(path), "--group", "quays", "--json"]) == 0
    assert sentence in json.loads(capsys.readouterr().out)["sentences"]


def test_the_command_says_what_is_wrong(tmp_path, capsys):
    """Too few projects are status 1, a file that is not there status 2."""
    path = tmp_path / "closed.csv"
    path.write_text("id,estimate,final\nH1,100,110\n", encoding="utf-8")

    assert main(["calibrate", str(path)]) == 1
    assert "too-few-projects" in capsys.readouterr().err
    assert main(["calibrate", str(tmp_path / "none.csv")]) == 2
    assert "file-unreadable" in capsys.readouterr().err
