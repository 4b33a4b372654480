"""changes.csv, drawdown.csv and [account] are read as they are meant."""

import datetime as dt

import pytest

from contingency.estimate.nouns import (
    AccountEntry,
    AccountRule,
    Change,
    Delegation,
    Milestone,
)
from contingency.estimate.reading import read_estimate
from tests.estimate.bad_history import account, changes, entries
from tests.estimate.good_folder import in_turn, write_good


@pytest.fixture
def folder(tmp_path):
    """A good estimate folder."""
    return write_good(tmp_path / "estimate")


def test_an_estimate_without_these_files_has_no_history(folder):
    """Nothing is made up where nothing is written."""
    estimate = read_estimate(folder)

    assert estimate.changes == ()
    assert estimate.account == ()
    assert estimate.account_rule == AccountRule()


def test_changes_are_read_in_file_order(folder):
    """A reassessed base, a split, a price line and a treated event."""
    changes(
        "packages,P200,,,correction,-2500.5,,E5,Wrong rate,Lead,2026-04-03",
        "packages,,P198,P210; P300,,,,,Two contracts,PM,",
        "estimate,,,,prices,,1.034,,Index of the office,Finance,",
        "events,E1,,,treatment,,,,Anchors paid for,Site,",
    )(folder)

    first, second, third, fourth = read_estimate(folder).changes

    assert first == Change(
        id="P200",
        family="correction",
        amount=-2500.5,
        event="E5",
        reason="Wrong rate",
        by="Lead",
        on=dt.date(2026, 4, 3),
        line=2,
    )
    assert (second.before, second.into) == (("P198",), ("P210", "P300"))
    assert (third.file, third.id, third.factor) == ("estimate", "", 1.034)
    assert (fourth.file, fourth.id, fourth.family) == ("events", "E1", "treatment")


def test_the_account_is_read_by_date(folder):
    """The kind is `drawn` where nothing else is said; in_scope may stay open."""
    entries(
        "D2,2026-03-02,,1_500,E5,P210,Cable moved,A. Person,Manager,yes",
        "D1,2026-01-05,opening,200000,,,Gate 3,B. Person,Sponsor,",
    )(folder)

    first, second = read_estimate(folder).account

    assert first.kind == "opening"
    assert first.amount == 200_000.0
    assert second == AccountEntry(
        id="D2",
        date=dt.date(2026, 3, 2),
        kind="drawn",
        amount=1500.0,
        event="E5",
        package="P210",
        reason="Cable moved",
        approved_by="A. Person",
        role="Manager",
        in_scope=True,
        line=2,
    )


def test_the_rules_of_the_account_are_read(folder):
    """A role without `up_to` may approve any amount."""
    account(
        'minimum = [{ milestone = "Award", on = 2027-04-01, amount = 500_000 }]\n'
        "delegations = [\n"
        '  { role = "Manager", up_to = 50_000 },\n'
        '  { role = "Sponsor" },\n'
        "]"
    )(folder)

    assert read_estimate(folder).account_rule == AccountRule(
        minimum=(Milestone(name="Award", on=dt.date(2027, 4, 1), amount=500_000.0),),
        delegations=(
            Delegation(role="Manager", up_to=50_000.0),
            Delegation(role="Sponsor"),
        ),
    )


def test_reasons_are_part_of_the_fingerprint(folder):
    """What is signed includes what was said about the changes and the account."""
    plain = read_estimate(folder).fingerprint
    changes("packages,P200,,,correction,,,,Wrong rate,Lead,")(folder)
    with_reason = read_estimate(folder).fingerprint
    in_turn(
        changes("packages,P200,,,correction,,,,Other rate,Lead,"),
        entries("D1,2026-01-05,opening,200000,,,Gate 3,B. Person,Sponsor,"),
    )(folder)

    assert len({plain, with_reason, read_estimate(folder).fingerprint}) == 3
