"""The contingency account, its minimum curve and its delegations."""

import datetime as dt

import pytest

from contingency.estimate.nouns import (
    AccountEntry,
    AccountRule,
    Delegation,
    Milestone,
)
from contingency.setting.account import (
    account_on,
    exceeds_delegation,
    lacking,
    minimum_on,
)


def entry(day, amount, kind="drawn", **more):
    """An entry of 2026 with everything that a draw needs."""
    given = {
        "date": dt.date(2026, *day),
        "amount": amount,
        "kind": kind,
        "event": "E1",
        "reason": "Flood",
        "approved_by": "A. Berg",
        "role": "Manager",
        "line": 2,
    }
    return AccountEntry(**given | more)


ENTRIES = (
    entry((1, 10), 1_000.0, "opening", event=""),
    entry((2, 1), 300.0),
    entry((3, 1), 150.0, "added"),
    entry((3, 1), 50.0),
    entry((4, 1), 200.0, "released"),
    entry((9, 1), 400.0),
)


def test_the_balance_is_what_came_in_less_what_went_out():
    """After every entry, up to and including the day."""
    account = account_on(ENTRIES, dt.date(2026, 4, 1))

    assert [line.balance for line in account.lines] == [1000, 700, 850, 800, 600]
    assert account.balance == 600.0
    assert (account.opening, account.added) == (1_000.0, 150.0)
    assert (account.drawn, account.released) == (350.0, 200.0)
    assert account.later == ENTRIES[5:]


def test_an_account_without_entries_so_far_is_empty():
    """Nothing is made up before the opening."""
    assert account_on(ENTRIES, dt.date(2025, 1, 1)).balance == 0.0


RULE = AccountRule(
    minimum=(
        Milestone(name="Award", on=dt.date(2026, 1, 1), amount=1_000.0),
        Milestone(name="Half", on=dt.date(2026, 1, 11), amount=400.0),
        Milestone(name="End", on=dt.date(2026, 1, 21), amount=0.0),
    ),
    delegations=(
        Delegation(role="Manager", up_to=100.0),
        Delegation(role="Sponsor"),
    ),
)


@pytest.mark.parametrize(
    ("day", "least"),
    [
        (dt.date(2025, 12, 31), None),
        (dt.date(2026, 1, 1), 1_000.0),
        (dt.date(2026, 1, 6), 700.0),
        (dt.date(2026, 1, 11), 400.0),
        (dt.date(2026, 1, 13), 320.0),
        (dt.date(2026, 2, 1), 0.0),
    ],
)
def test_the_minimum_is_a_straight_line_between_milestones(day, least):
    """Nothing before the first, the last amount after the last."""
    found = minimum_on(RULE, day)
    assert found == (None if least is None else pytest.approx(least))


def test_there_is_no_minimum_without_milestones():
    """A curve is the user's to give."""
    assert minimum_on(AccountRule(), dt.date(2026, 1, 1)) is None


@pytest.mark.parametrize(
    ("change", "lacks"),
    [
        ({}, ()),
        ({"event": ""}, ("a risk or a package",)),
        ({"event": "", "package": "P1"}, ()),
        ({"event": "", "kind": "released"}, ()),
        ({"reason": "", "role": ""}, ("a reason", "the approver's role")),
        ({"approved_by": ""}, ("who approved it",)),
    ],
)
def test_what_a_draw_does_not_say_is_named(change, lacks):
    """Risk or package, reason, name and role."""
    assert lacking(entry((1, 1), 5.0, **change)) == lacks


@pytest.mark.parametrize(
    ("change", "exceeds"),
    [
        ({"amount": 100.0}, False),
        ({"amount": 100.5}, True),
        ({"amount": 9e9, "role": "sponsor "}, False),
        ({"amount": 1.0, "role": "Clerk"}, True),
        ({"amount": 100.5, "kind": "added"}, False),
        ({"amount": 100.5, "role": ""}, False),
    ],
)
def test_a_draw_above_its_approvers_delegation_exceeds_it(change, exceeds):
    """A role that the rules do not name may approve nothing."""
    assert exceeds_delegation(RULE, entry((1, 1), 1.0).model_copy(update=change)) is (
        exceeds
    )


def test_without_delegations_nothing_is_exceeded():
    """The rule is the organisation's to give."""
    assert not exceeds_delegation(AccountRule(), entry((1, 1), 1e9))
