"""Bad inputs: changes.csv, drawdown.csv and [account]."""

from tests.estimate.bad_inputs import bad
from tests.estimate.good_folder import content, setting

CHANGE_COLUMNS = "file,id,before,into,family,amount,factor,event,reason,by,on"
ENTRY_COLUMNS = "id,date,kind,amount,event,package,reason,approved_by,role,in_scope"
WHY = "New drawings,Lead"


def change(row):
    """A changes.csv of one row; reason, by and the day are added."""
    return content("changes.csv", f"{CHANGE_COLUMNS}\n{row},{WHY},2026-04-01\n")


def changes(*rows):
    """A changes.csv of several whole rows."""
    return content("changes.csv", "\n".join([CHANGE_COLUMNS, *rows]) + "\n")


def entries(*rows):
    """A drawdown.csv of several whole rows."""
    return content("drawdown.csv", "\n".join([ENTRY_COLUMNS, *rows]) + "\n")


def account(text):
    """An estimate.toml with [account]."""
    return setting("[assurance]", f"[account]\n{text}\n\n[assurance]")


HISTORY = (
    bad(
        "change_of_an_unknown_file",
        change("package,P200,,,correction,,,"),
        (
            "changes.csv:2, change P200, file",
            "word-unknown",
            '"package" is no word of this column.',
        ),
    ),
    bad(
        "change_of_an_unknown_family",
        change(",P200,,,corection,,,"),
        (
            "changes.csv:2, change P200, family",
            "word-unknown",
            '"corection" is no word of this column.',
        ),
    ),
    bad(
        "change_family_of_the_wrong_file",
        change("systemic,S1,,,correction,,,"),
        (
            "changes.csv:2, change S1, family",
            "word-unknown",
            '"correction" is no family of systemic.csv.',
        ),
    ),
    bad(
        "change_of_nothing",
        change(",,,,correction,,,"),
        (
            "changes.csv:2, change, id",
            "cell-blank",
            "The cells id, before and into are blank.",
        ),
    ),
    bad(
        "change_without_reason_and_name",
        changes(",P200,,,correction,,,,,,"),
        (
            "changes.csv:2, change P200, reason",
            "cell-blank",
            "The cell reason is blank.",
        ),
        ("changes.csv:2, change P200, by", "cell-blank", "The cell by is blank."),
    ),
    bad(
        "change_with_a_day_of_no_calendar",
        changes(f",P200,,,correction,,,,{WHY},2026-02-30"),
        ("changes.csv:2, change P200, on", "not-a-date", "is not in the calendar."),
    ),
    bad(
        "renamed_to_an_unknown_id",
        change(",,P199,P201,,,,"),
        (
            "changes.csv:2, change P201, into",
            "id-unknown",
            'packages.csv has no "P201".',
        ),
    ),
    bad(
        "renamed_from_an_id_that_is_still_there",
        change(",,P210,P200,,,,"),
        (
            "changes.csv:2, change P200, before",
            "succession-unclear",
            "P210 still stands in packages.csv.",
        ),
    ),
    bad(
        "several_packages_into_several",
        change(",,P198; P199,P200; P210,,,,"),
        (
            "changes.csv:2, change P200; P210, into",
            "succession-unclear",
            "2 before and 2 into, in packages.",
        ),
    ),
    bad(
        "split_without_a_before",
        change(",,,P200; P210,,,,"),
        (
            "changes.csv:2, change P200; P210, into",
            "succession-unclear",
            "0 before and 2 into, in packages.",
        ),
    ),
    bad(
        "systemic_risk_split",
        change("systemic,,S0,S1; S2,,,,"),
        (
            "changes.csv:2, change S1; S2, into",
            "succession-unclear",
            "1 before and 2 into, in systemic.",
        ),
    ),
    bad(
        "id_beside_before_and_into",
        change(",P200,P199,P200,,,,"),
        (
            "changes.csv:2, change P200 P200, id",
            "cell-without-meaning",
            'id "P200" stands beside before and into.',
        ),
    ),
    bad(
        "price_line_without_factor",
        change("estimate,,,,prices,,,"),
        (
            "changes.csv:2, change, factor",
            "cell-blank",
            "The line has no factor between the two price dates.",
        ),
    ),
    bad(
        "price_factor_of_nought",
        change("estimate,,,,prices,,0,"),
        ("changes.csv:2, change, factor", "amount-negative", 'The factor is "0".'),
    ),
    bad(
        "factor_of_another_family",
        change(",P200,,,correction,,1.03,"),
        (
            "changes.csv:2, change P200, factor",
            "cell-without-meaning",
            'A factor stands in a line of family "correction".',
        ),
    ),
    bad(
        "change_amount_in_percent",
        change(",P200,,,correction,3%,,"),
        (
            "changes.csv:2, change P200, amount",
            "percent-unwanted",
            '"3%" is a percent.',
        ),
    ),
    bad(
        "change_amount_without_family",
        change(",P200,,,,2000,,"),
        (
            "changes.csv:2, change P200, amount",
            "cell-without-meaning",
            "An amount stands in a line without a family of the base.",
        ),
    ),
    bad(
        "two_lines_for_all_that_is_left",
        changes(
            f",P200,,,correction,,,,{WHY},",
            f",P200,,,definition,-500,,,{WHY},",
            f",P200,,,actuals,,,,{WHY},",
        ),
        (
            "changes.csv:4, change P200, amount",
            "rest-twice",
            "Line 2 has no amount for P200 either.",
        ),
    ),
    bad(
        "change_from_an_unknown_event",
        change(",P200,,,occurred,,,E9"),
        (
            "changes.csv:2, change P200, event",
            "id-unknown",
            'events.csv has no event "E9".',
        ),
    ),
    bad(
        "entry_without_date_and_amount",
        entries("D1,,opening,,,,,,,"),
        ("drawdown.csv:2, entry D1, date", "cell-blank", "The cell date is blank."),
        (
            "drawdown.csv:2, entry D1, amount",
            "cell-blank",
            "The cell amount is blank.",
        ),
    ),
    bad(
        "entry_of_an_unknown_kind",
        entries("D1,2026-01-05,draw,500,,,,,,"),
        (
            "drawdown.csv:2, entry D1 2026-01-05, kind",
            "word-unknown",
            '"draw" is no word of this column.',
        ),
    ),
    bad(
        "entry_with_a_minus",
        entries("D1,2026-01-05,drawn,-500,E5,,,,,"),
        (
            "drawdown.csv:2, entry D1 2026-01-05, amount",
            "amount-negative",
            '"-500" is negative.',
        ),
    ),
    bad(
        "entry_of_nothing",
        entries("D1,2026-01-05,drawn,0,E5,,,,,"),
        (
            "drawdown.csv:2, entry D1 2026-01-05, amount",
            "cell-blank",
            "The amount is nought.",
        ),
    ),
    bad(
        "entry_in_percent",
        entries("D1,2026-01-05,drawn,5%,E5,,,,,"),
        (
            "drawdown.csv:2, entry D1 2026-01-05, amount",
            "percent-unwanted",
            '"5%" is a percent.',
        ),
    ),
    bad(
        "entry_twice",
        entries("D1,2026-01-05,,500,E5,,,,,", "D1,2026-01-06,,500,E5,,,,,"),
        (
            "drawdown.csv:3, entry D1 2026-01-06, id",
            "id-twice",
            'The id "D1" is also on line 2.',
        ),
    ),
    bad(
        "entry_for_an_unknown_event_and_package",
        entries("D1,2026-01-05,drawn,500,E9,P9,,,,maybe"),
        (
            "drawdown.csv:2, entry D1 2026-01-05, event",
            "id-unknown",
            'events.csv has no "E9".',
        ),
        (
            "drawdown.csv:2, entry D1 2026-01-05, package",
            "id-unknown",
            'packages.csv has no "P9".',
        ),
        (
            "drawdown.csv:2, entry D1 2026-01-05, in_scope",
            "word-unknown",
            '"maybe" is no word of this column.',
        ),
    ),
    bad(
        "account_key_unknown",
        account("minimun = []"),
        (
            "estimate.toml:48, [account] minimun",
            "key-unknown",
            '[account] has no key "minimun".',
        ),
    ),
    bad(
        "milestones_not_by_date",
        account(
            "minimum = [\n"
            '  { milestone = "Award", on = 2027-04-01, amount = 5e5 },\n'
            '  { milestone = "Start", on = 2027-03-01, amount = 4e5 },\n'
            "]"
        ),
        (
            "estimate.toml:50, [account] minimum 2 on",
            "dates-reversed",
            "2027-03-01 is not after 2027-04-01, the milestone before.",
        ),
    ),
    bad(
        "milestone_without_amount",
        account('minimum = [{ milestone = "Award", on = 2027-04-01 }]'),
        (
            "estimate.toml:48, [account] minimum 1 amount",
            "key-missing",
            "The key amount is missing.",
        ),
    ),
    bad(
        "delegation_below_nought",
        account('delegations = [{ role = "Sponsor", up_to = -1 }]'),
        (
            "estimate.toml:48, [account] delegations 1 up_to",
            "setting-out-of-range",
            "up_to is -1.",
        ),
    ),
)
