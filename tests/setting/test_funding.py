"""The funding table: closed in both moneys, and no part of the contingency."""

import dataclasses
import datetime as dt
from math import fsum

import numpy as np
import pytest

from contingency.estimate.nouns import PROJECT_WIDE, PriceSeries
from contingency.quantities.percentiles import percentile
from contingency.quantities.rounding import round_amount
from contingency.setting.allocation import event_amounts
from contingency.setting.funding import printed_funding
from contingency.simulation.outturn import simulate_outturn
from contingency.simulation.spending import price_mix, spending_plan
from contingency.study import run_study
from tests.simulation.estimates import a_bit_of_everything, cost_range

WINDOWS = {
    "A": (dt.date(2026, 1, 1), dt.date(2028, 6, 30), "early"),
    "B": (dt.date(2027, 2, 1), dt.date(2029, 6, 30), "late"),
    "C": (dt.date(2027, 2, 1), dt.date(2030, 12, 31), "bell"),
}


def series(name, *rate):
    """A price series with limits, or certain."""
    shape = "triangular" if len(rate) > 1 else "fixed"
    figures = rate if len(rate) > 1 else (None, rate[0], None)
    return PriceSeries(
        id=name, name=f"Prices {name}", rate=cost_range(*figures, shape=shape), line=2
    )


def funded(*rates, windows=True, **more):
    """A bit of everything with windows, and prices `a` on A and H, `b` on B."""
    whole = a_bit_of_everything(trials=8_192, **more)
    named = {"A": "a", "H": "a", "B": "b"} if rates else {}
    packages = []
    for one in whole.packages:
        start, finish, spend = WINDOWS.get(one.id, (None, None, None))
        changes = {"prices": named.get(one.id, "")}
        if windows:
            changes |= {"start": start, "finish": finish, "spend": spend}
        if one.id == "A":
            changes["spent"] = 30.0
        packages.append(one.model_copy(update=changes))
    window = {
        "window_start": dt.date(2026, 6, 1),
        "window_finish": dt.date(2027, 5, 31),
    }
    events = tuple(
        e.model_copy(update=window) if e.id in {"R1", "R5"} else e for e in whole.events
    )
    prices = tuple(series(n, *r) for n, r in zip("ab", rates, strict=False))
    return whole.model_copy(
        update={"packages": tuple(packages), "events": events, "price_series": prices}
    )


@pytest.fixture(scope="module")
def study():
    """Two uncertain price series."""
    return run_study(funded((0.0, 0.03, 0.09), (-0.02, 0.02, 0.05)))


@pytest.fixture(scope="module")
def constant():
    """The same without prices."""
    return run_study(funded())


def test_the_columns_add_up_to_base_and_contingency(study):
    """In price-date money, to the last digits of a float."""
    total = study.target.total

    assert fsum(y.base for y in study.funding) == pytest.approx(
        study.estimate.base, abs=1e-12 * total
    )
    assert fsum(y.contingency for y in study.funding) == pytest.approx(
        study.target.contingency, abs=1e-11 * total
    )
    assert fsum(y.event_contingency for y in study.funding) == pytest.approx(
        study.allocation.split.events, abs=1e-11 * total
    )


def test_each_row_adds_up_in_outturn_money(study):
    """Base, contingency and escalation on each; the rows make the amount."""
    for year in study.funding:
        assert year.total == pytest.approx(
            year.base + year.contingency + year.escalation, rel=1e-14
        )
    assert study.outturn.funding == fsum(y.total for y in study.funding)
    assert study.outturn.funding > study.target.total


def test_the_years_follow_one_another(study):
    """From the first to the last with money in them."""
    assert [year.starts for year in study.funding] == list(range(2026, 2031))
    assert [year.year for year in study.funding] == [
        "2026",
        "2027",
        "2028",
        "2029",
        "2030",
    ]


def test_a_financial_year_that_spans_two_is_printed_so(constant):
    """And holds the same money in other years."""
    shifted = run_study(funded(financial_year_starts=4))

    assert [y.year for y in shifted.funding][:2] == ["2025/26", "2026/27"]
    assert fsum(y.base for y in shifted.funding) == pytest.approx(
        fsum(y.base for y in constant.funding)
    )


def test_prices_move_no_bit_of_the_price_date_money(study, constant):
    """Every total, level, part and year of base and contingency."""
    assert np.array_equal(study.simulation.total, constant.simulation.total)
    assert study.levels == constant.levels
    assert study.target == constant.target
    assert study.allocation == constant.allocation
    assert study.drivers == constant.drivers
    assert [(y.base, y.contingency) for y in study.funding] == [
        (y.base, y.contingency) for y in constant.funding
    ]


def test_windows_move_no_bit_of_it_either(constant):
    """The money of the whole does not ask when it is spent."""
    still = run_study(funded(windows=False))

    assert np.array_equal(still.simulation.total, constant.simulation.total)
    assert still.target == constant.target


def test_without_windows_there_is_no_table():
    """Null in the results, and the checks of phasing say why they were not run."""
    study = run_study(funded((0.03,), (0.02,), windows=False))

    assert study.funding == ()
    assert study.outturn is None
    assert study.results()["funding"] is None
    assert study.results()["outturn"] is None
    outcome = {check.check: check.outcome for check in study.checks_run}
    assert outcome["phasing-does-not-close"] == "not-applicable"


def test_the_checks_of_phasing_apply_to_a_table(study):
    """And pass on it."""
    outcome = {check.check: check.outcome for check in study.checks_run}

    assert outcome["phasing-does-not-close"] == "pass"


def test_without_prices_outturn_is_price_date_money(constant):
    """No second pass, no escalation."""
    assert all(year.escalation == 0.0 for year in constant.funding)
    assert constant.outturn.level == constant.target.total
    assert constant.outturn.low == constant.target.low
    assert constant.outturn.series == ()
    assert constant.outturn.chance_funding_is_enough == pytest.approx(0.8, abs=1e-3)


def test_at_a_rate_of_nought_outturn_is_price_date_money_to_the_last_bit(constant):
    """The second pass draws the trials of the run again."""
    estimate = funded((0.0,), (0.0,))
    plan = spending_plan(estimate)
    blocks = constant.simulation.blocks

    for threads in (1, 2):
        total = simulate_outturn(estimate, plan, blocks=blocks, threads=threads)
        assert np.array_equal(total.ravel(), constant.simulation.total)
    study = run_study(estimate)
    assert all(year.escalation == 0.0 for year in study.funding)
    assert study.outturn.level == constant.target.total


def test_the_trials_follow_the_formula():
    """A second implementation with certain rates: each amount times its growth."""
    estimate = funded((0.04,), (0.02,))
    plan = spending_plan(estimate)
    rates = {"a": np.array([0.04]), "b": np.array([0.02])}
    # With every range, uplift and event certain the formula can be written out.
    certain = estimate.model_copy(
        update={
            "packages": tuple(
                p.model_copy(update={"cost": cost_range(likely=p.base, shape="fixed")})
                for p in estimate.packages
            ),
            "systemic": (),
            "events": (),
            "general_dependence": 0.0,
        }
    )
    expected = certain.base
    for p in certain.packages:
        if p.prices:
            spent = p.spent or 0.0
            rate = rates[p.prices]
            expected += spent * plan.spent[p.id].growth(rate)[0]
            expected += (p.base - spent) * plan.to_come[p.id].growth(rate)[0]
    found = simulate_outturn(certain, spending_plan(certain), blocks=2)

    assert found == pytest.approx(np.full_like(found, expected), rel=1e-13)


def test_the_mean_escalation_is_that_of_the_mean_amounts():
    """Rates are certain here, so the mean outturn is linear in the mean parts."""
    estimate = funded((0.04,), (0.02,))
    study = run_study(estimate)
    plan, mix = spending_plan(estimate), price_mix(estimate)
    rate = {"a": np.array([0.04]), "b": np.array([0.02])}
    simulation, expected = study.simulation, study.mean

    def grown(course, package):
        return fsum(s * course.growth(rate[name])[0] for name, s in mix[package])

    for row, p in enumerate(estimate.packages):
        spent = p.spent or 0.0
        rest = p.base + simulation.range_mean[row] + simulation.systemic_mean[row].sum()
        expected += spent * grown(plan.spent[p.id], p.id)
        expected += (rest - spent) * grown(plan.to_come[p.id], p.id)
    for e, money in zip(estimate.open_events, simulation.event_mean, strict=True):
        for share in e.shares:
            course = plan.of_event(e, share.package)
            expected += share.fraction * money * grown(course, share.package)

    assert study.outturn.mean == pytest.approx(expected, rel=1e-12)


def test_uncertain_rates_widen_the_outturn_cost(study):
    """The target percentile lies above that at certain mean rates."""
    means = [s.rate.distribution.mean for s in study.estimate.price_series]
    certain = run_study(funded(*((m,) for m in means)))

    assert study.outturn.level > certain.outturn.level
    assert [year.total for year in study.funding] == pytest.approx(
        [year.total for year in certain.funding]
    )


def test_the_chance_and_the_level_are_those_of_the_trials(study):
    """Counted again."""
    plan = spending_plan(study.estimate)
    total = simulate_outturn(study.estimate, plan, blocks=study.simulation.blocks)
    outturn = study.outturn

    assert outturn.level == percentile(np.sort(total.ravel()), 80)
    assert outturn.low <= outturn.level <= outturn.high
    assert outturn.chance_funding_is_enough == np.mean(total <= outturn.funding)


def test_a_rate_is_drawn_once_a_run_and_found_by_its_name(study):
    """Another series more moves no trial of the first."""
    more = study.estimate.model_copy(
        update={"price_series": (*study.estimate.price_series, series("c", 0.5))}
    )
    plan = spending_plan(study.estimate)

    assert np.array_equal(
        simulate_outturn(study.estimate, plan, blocks=2),
        simulate_outturn(more, plan, blocks=2),
    )


def test_what_is_on_no_package_has_the_mix_of_all_prices(study):
    """By base; packages without a series count as no growth."""
    estimate = study.estimate
    mix = dict(price_mix(estimate)[PROJECT_WIDE])

    assert mix == {"a": 200.0 / estimate.base, "b": 100.0 / estimate.base}


def test_amounts_of_events_are_another_cut_of_the_allocation(study):
    """They sum to the events of the split."""
    amounts = event_amounts(study.simulation, study.allocation)

    assert fsum(amounts) == pytest.approx(study.allocation.split.events, rel=1e-12)


@pytest.mark.parametrize("step", [0.01, 1.0, 25.0])
def test_the_printed_table_closes_on_paper(study, step):
    """Every column and every row, in whole steps."""
    base = round_amount(study.estimate.base, step)
    contingency = round_amount(study.target.contingency, step)
    rows = printed_funding(study.funding, base=base, contingency=contingency, step=step)

    assert fsum(r.base for r in rows) == pytest.approx(base, abs=1e-9)
    assert fsum(r.contingency for r in rows) == pytest.approx(contingency, abs=1e-9)
    for printed, year in zip(rows, study.funding, strict=True):
        assert printed.total == pytest.approx(
            printed.base + printed.contingency + printed.escalation, abs=1e-9
        )
        for name in ("base", "contingency", "escalation_on_base"):
            amount = getattr(printed, name)
            assert amount / step == pytest.approx(round(amount / step), abs=1e-6)
            assert abs(amount - getattr(year, name)) < step


def test_the_results_have_the_table_as_the_contract_says(study):
    """Keys and figures of each year."""
    found = study.results()["funding"]

    assert [list(row) for row in found] == [
        [
            "year",
            "base",
            "contingency",
            "escalation_on_base",
            "escalation_on_contingency",
            "total",
        ]
    ] * len(study.funding)
    for row, year in zip(found, study.funding, strict=True):
        for name, value in row.items():
            expected = getattr(year, name)
            assert value == expected or value == pytest.approx(expected, rel=1e-11)


def test_money_that_is_overspent_is_no_base():
    """The base stays the base; what is spent beyond it is contingency."""
    estimate = funded()
    packages = tuple(
        p.model_copy(update={"spent": 90.0, "base": 60.0}) if p.id == "A" else p
        for p in estimate.packages
    )
    study = run_study(estimate.model_copy(update={"packages": packages}))

    assert all(year.base >= 0.0 for year in study.funding)
    assert fsum(y.base for y in study.funding) == pytest.approx(study.estimate.base)


def test_years_are_frozen(study):
    """Nothing changes a table after it was made."""
    with pytest.raises(dataclasses.FrozenInstanceError):
        study.funding[0].base = 0.0
