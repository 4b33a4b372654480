"""Windows, profiles and financial years, against integrals and calendars."""

import datetime as dt

import numpy as np
import pytest
from scipy.integrate import quad

from contingency.simulation.spending import (
    PROFILES,
    begin_of,
    calendar_of,
    end_of,
    spending_plan,
)
from tests.simulation.estimates import DAY, estimate, event, exact, package

PRICE = end_of(DAY)


def only(one, **more):
    """The spending of the one package of an estimate, and its years."""
    plan = spending_plan(estimate([one], trials=8_192, **more))
    return plan.to_come["A"], plan.years


def windowed(start, finish, **more):
    """Package A with a window."""
    return package("A", start=start, finish=finish, **more)


@pytest.mark.parametrize("profile", PROFILES)
def test_a_profile_is_a_density(profile):
    """All the money is spent, none before and none after."""
    density = PROFILES[profile]
    whole, _ = quad(lambda u: float(density(np.array(u))), 0.0, 1.0)

    assert whole == pytest.approx(1.0, abs=1e-12)
    assert np.all(density(np.linspace(0.0, 1.0, 101)) >= 0.0)


@pytest.mark.parametrize("profile", PROFILES)
@pytest.mark.parametrize("rate", [-0.2, 0.0, 0.04, 0.3])
def test_growth_is_the_integral_over_the_window(profile, rate):
    """Against adaptive quadrature, over four and a half years and by year."""
    start, finish = dt.date(2026, 9, 1), dt.date(2031, 2, 10)
    course, years = only(windowed(start, finish, spend=profile))
    first, last = begin_of(start), end_of(finish)

    def grown(moment):
        place = np.array((moment - first) / (last - first))
        growth = (1 + rate) ** (moment - PRICE) - 1
        return float(PROFILES[profile](place)) / (last - first) * growth

    expected, _ = quad(grown, first, last, epsabs=1e-13, limit=200)
    by_year = [
        quad(grown, max(first, y), min(last, y + 1), epsabs=1e-13)[0] for y in years
    ]

    assert course.growth(np.array([rate]))[0] == pytest.approx(expected, abs=1e-9)
    assert course.growth_by_year(years, rate) == pytest.approx(by_year, abs=1e-9)


def test_years_share_the_money_by_the_length_of_the_window_in_them():
    """Even spending: 1 July 2027 to 31 December 2028 is a third and two thirds."""
    course, years = only(windowed(dt.date(2027, 7, 2), dt.date(2028, 12, 31)))
    first = 1 - 182 / 365

    assert years == range(2027, 2029)
    assert course.by_year(years) == pytest.approx(
        [first / (1 + first), 1 / (1 + first)]
    )


@pytest.mark.parametrize(
    ("day", "begins"),
    [
        (dt.date(2027, 3, 31), 2026),
        (dt.date(2027, 4, 1), 2027),
        (dt.date(2028, 3, 31), 2027),
        (dt.date(2028, 4, 1), 2028),
    ],
)
def test_a_financial_year_begins_on_the_first_of_its_month(day, begins):
    """In common years and in leap years."""
    course, years = only(windowed(day, day), financial_year_starts=4)

    assert years == range(begins, begins + 1)
    assert course.by_year(years) == pytest.approx([1.0])


def test_a_leap_year_is_as_long_as_any_other():
    """31 December ends on the whole year."""
    assert end_of(dt.date(2028, 12, 31)) == 2029.0
    assert end_of(dt.date(2027, 12, 31)) == 2028.0
    assert begin_of(dt.date(2028, 1, 1)) == 2028.0
    assert end_of(dt.date.max) == 10_000.0


def test_money_spent_lies_before_the_data_date_and_the_rest_after():
    """The profile is cut in two, not spread anew."""
    one = windowed(dt.date(2025, 1, 1), dt.date(2026, 12, 31), spent=40.0)
    plan = spending_plan(estimate([one], trials=8_192))
    data = calendar_of(estimate([one])).data

    assert plan.years == range(2025, 2027)
    assert plan.spent["A"].by_year(plan.years) == pytest.approx(
        [1 / (data - 2025), (data - 2026) / (data - 2025)]
    )
    assert plan.to_come["A"].by_year(plan.years) == pytest.approx([0.0, 1.0])


def test_without_a_figure_for_it_nothing_is_cut():
    """A blank `spent` says nothing about the past."""
    course, years = only(windowed(dt.date(2025, 1, 1), dt.date(2026, 12, 31)))

    assert course.by_year(years) == pytest.approx([0.5, 0.5])


def test_what_the_window_has_no_room_for_falls_on_the_data_date():
    """Money left when the window is over, money spent before it began."""
    over = windowed(dt.date(2025, 1, 1), dt.date(2025, 6, 30), spent=40.0)
    early = windowed(dt.date(2027, 1, 1), dt.date(2027, 6, 30), spent=40.0)
    for one, part in ((over, "to_come"), (early, "spent")):
        plan = spending_plan(estimate([one], trials=8_192))
        course = getattr(plan, part)["A"]
        assert course.year.tolist() == [2026]
        assert course.weight.tolist() == [1.0]


def test_nothing_grows_before_the_price_date():
    """Price-date money spent earlier stays as it is."""
    one = windowed(dt.date(2024, 1, 1), DAY, spent=100.0)
    plan = spending_plan(estimate([one], trials=8_192))

    assert plan.spent["A"].growth(np.array([0.1]))[0] == 0.0


def test_packages_without_a_window_follow_those_that_have_one():
    """By what these have yet to spend."""
    plan = spending_plan(
        estimate(
            [
                windowed(dt.date(2027, 1, 1), dt.date(2027, 12, 31), base=100.0),
                package(
                    "B",
                    base=400.0,
                    spent=100.0,
                    start=dt.date(2028, 1, 1),
                    finish=dt.date(2028, 12, 31),
                ),
                package("C", base=50.0),
                package("D", base=50.0, start=dt.date(2030, 1, 1)),
            ],
            trials=8_192,
        )
    )

    assert plan.to_come["C"] is plan.project
    assert plan.to_come["D"] is plan.project
    assert plan.project.by_year(plan.years) == pytest.approx([0.0, 0.25, 0.75])


def test_an_event_is_spread_over_its_window_after_the_data_date():
    """Even where it opened before; on the data date where it is over."""
    events = (
        event(
            "R1",
            0.5,
            exact(10.0),
            window_start=dt.date(2025, 1, 1),
            window_finish=dt.date(2027, 12, 31),
        ),
        event("R2", 0.5, exact(10.0), window_finish=dt.date(2025, 12, 31)),
        event("R3", 0.5, exact(10.0), window_start=dt.date(2027, 1, 1)),
        event("R4", 0.5, exact(10.0), packages={"A": 1.0}),
        event("R5", 0.5, exact(10.0)),
    )
    one = windowed(dt.date(2027, 1, 1), dt.date(2028, 12, 31))
    plan = spending_plan(estimate([one], events, trials=8_192))
    left = 2027 - calendar_of(estimate([one])).data
    expected = {
        "R1": [left / (1 + left), 1 / (1 + left), 0.0],
        "R2": [1.0, 0.0, 0.0],
        "R3": [0.0, 0.5, 0.5],
        "R4": [0.0, 0.5, 0.5],
        "R5": [0.0, 0.5, 0.5],
    }

    for one_event in events:
        course = plan.of_event(one_event, one_event.shares[0].package)
        assert course.by_year(plan.years) == pytest.approx(expected[one_event.id])


def test_without_any_window_there_is_no_plan():
    """A single end is no window."""
    packages = [package("A"), package("B", start=dt.date(2027, 1, 1))]

    assert spending_plan(estimate(packages, trials=8_192)) is None
