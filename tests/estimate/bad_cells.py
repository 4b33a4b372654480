"""Bad inputs: single cells."""

from tests.estimate.bad_inputs import bad
from tests.estimate.good_folder import event, in_turn, package, with_semicolons

CELLS = (
    bad(
        "blank_name",
        package("P400", name=""),
        ("packages.csv:7, package P400, name", "cell-blank", "The cell name is blank."),
    ),
    bad(
        "blank_base",
        package("P400", base=""),
        (
            "packages.csv:7, package P400 Permit, base",
            "cell-blank",
            "The cell base is blank.",
        ),
    ),
    bad(
        "blank_id",
        package("P400", id=""),
        ("packages.csv:7, package Permit, id", "cell-blank", "The cell id is blank."),
    ),
    bad(
        "text_for_a_base",
        package("P400", base="about 10000"),
        (
            "packages.csv:7, package P400 Permit, base",
            "not-a-number",
            '"about 10000" is no figure.',
        ),
    ),
    bad(
        "unit_for_a_base",
        package("P400", base="EUR 10000"),
        (
            "packages.csv:7, package P400 Permit, base",
            "not-a-number",
            '"EUR 10000" is no figure.',
        ),
    ),
    bad(
        "spaces_in_thousands",
        package("P200", base="1 250 000"),
        (
            "packages.csv:3, package P200 Dome shell, base",
            "not-a-number",
            '"1 250 000" is no figure.',
        ),
    ),
    bad(
        "bracketed_base",
        package("P400", base="(10000)"),
        (
            "packages.csv:7, package P400 Permit, base",
            "not-a-number",
            '"(10000)" is no figure.',
        ),
    ),
    bad(
        "exponent",
        package("P200", base="1.25E+06"),
        (
            "packages.csv:3, package P200 Dome shell, base",
            "not-a-number",
            '"1.25E+06" is no figure.',
        ),
    ),
    bad(
        "decimal_comma",
        package("P200", high="1500000,50"),
        (
            "packages.csv:3, package P200 Dome shell, high",
            "decimal-comma",
            '"1500000,50" has a decimal comma.',
        ),
    ),
    bad(
        "decimal_comma_in_percent",
        package("P100", high="130,5%"),
        (
            "packages.csv:2, package P100 Design, high",
            "decimal-comma",
            '"130,5%" has a decimal comma.',
        ),
    ),
    bad(
        "decimal_comma_in_probability",
        event("E2", probability="0,3"),
        (
            "events.csv:3, event E2 Pier on poor rock, probability",
            "decimal-comma",
            '"0,3" has a decimal comma.',
        ),
    ),
    bad(
        "dots_between_thousands",
        package("P200", base="1.250.000"),
        (
            "packages.csv:3, package P200 Dome shell, base",
            "dot-thousands",
            '"1.250.000" has dots between thousands.',
        ),
    ),
    bad(
        "dots_and_a_decimal_comma",
        package("P200", base="1.250.000,50"),
        (
            "packages.csv:3, package P200 Dome shell, base",
            "dot-thousands",
            '"1.250.000,50" has dots between thousands.',
        ),
    ),
    bad(
        "thousands_of_both_kinds",
        package("P200", base="1,250.000,5"),
        (
            "packages.csv:3, package P200 Dome shell, base",
            "decimal-comma",
            '"1,250.000,5" has a decimal comma, or commas in odd places.',
        ),
    ),
    bad(
        "dot_in_a_table_with_semicolons",
        in_turn(package("P400", base="10.000"), with_semicolons("packages.csv")),
        (
            "packages.csv:7, package P400 Permit, base",
            "amount-unclear",
            '"10.000" stands in a table with semicolons.',
        ),
    ),
    bad(
        "comma_in_a_table_with_semicolons",
        in_turn(package("P400", base="10,000"), with_semicolons("packages.csv")),
        (
            "packages.csv:7, package P400 Permit, base",
            "amount-unclear",
            '"10,000" stands in a table with semicolons.',
        ),
    ),
    bad(
        "formula",
        package("P200", base="=SUM(D2:D9)"),
        (
            "packages.csv:3, package P200 Dome shell, base",
            "formula-in-cell",
            '"=SUM(D2:D9)" is a formula.',
        ),
    ),
    bad(
        "broken_formula",
        package("P200", base="#REF!"),
        (
            "packages.csv:3, package P200 Dome shell, base",
            "formula-in-cell",
            '"#REF!" is a formula.',
        ),
    ),
    bad(
        "base_no_number",
        package("P200", base="NaN"),
        (
            "packages.csv:3, package P200 Dome shell, base",
            "not-finite",
            '"NaN" is no finite number.',
        ),
    ),
    bad(
        "base_infinite",
        package("P200", base="inf"),
        (
            "packages.csv:3, package P200 Dome shell, base",
            "not-finite",
            '"inf" is no finite number.',
        ),
    ),
    bad(
        "base_beyond_money",
        package("P200", base="1" + "0" * 18),
        (
            "packages.csv:3, package P200 Dome shell, base",
            "number-too-large",
            '"1000000000000000000" is too large.',
        ),
    ),
    bad(
        "base_negative",
        package("P400", base="-10000"),
        (
            "packages.csv:7, package P400 Permit, base",
            "amount-negative",
            "base -10,000 is negative.",
        ),
    ),
    bad(
        "base_in_percent",
        package("P400", base="10%"),
        (
            "packages.csv:7, package P400 Permit, base",
            "percent-unwanted",
            '"10%" is a percent.',
        ),
    ),
    bad(
        "spent_negative",
        package("P100", spent="-1"),
        (
            "packages.csv:2, package P100 Design, spent",
            "amount-negative",
            "spent -1 is negative.",
        ),
    ),
    bad(
        "plus_sign",
        package("P100", high="+30%"),
        (
            "packages.csv:2, package P100 Design, high",
            "sign-unclear",
            '"+30%" begins with a plus sign.',
        ),
    ),
    bad(
        "minus_percent",
        package("P100", low="-10%"),
        (
            "packages.csv:2, package P100 Design, low",
            "amount-negative",
            '"-10%" is negative.',
        ),
    ),
    bad(
        "date_in_another_order",
        package("P100", start="05/01/2026"),
        (
            "packages.csv:2, package P100 Design, start",
            "not-a-date",
            '"05/01/2026" is no date of that form.',
        ),
    ),
    bad(
        "date_of_day_31",
        package("P100", finish="2026-09-31"),
        (
            "packages.csv:2, package P100 Design, finish",
            "not-a-date",
            '"2026-09-31" is not in the calendar.',
        ),
    ),
    bad(
        "finish_before_start",
        package("P100", finish="2026-01-04"),
        (
            "packages.csv:2, package P100 Design, finish",
            "dates-reversed",
            "finish 2026-01-04 lies before start 2026-01-05.",
        ),
    ),
    bad(
        "unknown_shape",
        package("P310", shape="Uniform"),
        (
            "packages.csv:6, package P310 Track, and road, shape",
            "word-unknown",
            '"Uniform" is no word of this column.',
        ),
    ),
    bad(
        "unknown_profile",
        package("P100", spend="quick"),
        (
            "packages.csv:2, package P100 Design, spend",
            "word-unknown",
            '"quick" is no word of this column.',
        ),
    ),
    bad(
        "unknown_answer",
        package("P100", holds_allowance="maybe"),
        (
            "packages.csv:2, package P100 Design, holds_allowance",
            "word-unknown",
            '"maybe" is no word of this column.',
        ),
    ),
    bad(
        "unknown_basis_kind",
        package("P100", basis_kind="guess"),
        (
            "packages.csv:2, package P100 Design, basis_kind",
            "word-unknown",
            '"guess" is no word of this column.',
        ),
    ),
    bad(
        "progress_without_percent",
        package("P100", progress="0.25"),
        (
            "packages.csv:2, package P100 Design, progress",
            "share-out-of-range",
            '"0.25" has no percent sign.',
        ),
    ),
    bad(
        "progress_beyond_the_end",
        package("P100", progress="125%"),
        (
            "packages.csv:2, package P100 Design, progress",
            "share-out-of-range",
            '"125%" lies outside 0% to 100%.',
        ),
    ),
    bad(
        "id_with_a_colon",
        package("P400", id="P4:00"),
        (
            "packages.csv:7, package P4:00 Permit, id",
            "id-unusable",
            'The id "P4:00" holds a colon.',
        ),
    ),
    bad(
        "id_of_two_lines",
        package("P400", id="P4\n00"),
        (
            "packages.csv:7, package P4 00 Permit, id",
            "id-unusable",
            'The id "P4 00" holds a line break or a character that does not show.',
        ),
    ),
    bad(
        "id_reserved",
        package("P400", id="project-wide"),
        (
            "packages.csv:7, package project-wide Permit, id",
            "id-reserved",
            'The id is "project-wide".',
        ),
    ),
    bad(
        "id_twice",
        package("P400", id="P310"),
        (
            "packages.csv:7, package P310 Permit, id",
            "id-twice",
            'The id "P310" is also on line 6.',
        ),
    ),
    bad(
        "group_with_a_semicolon",
        package("P310", group="Ground; Road"),
        (
            "packages.csv:6, package P310 Track, and road, group",
            "list-unclear",
            'The group "Ground; Road" holds a semicolon or a line break.',
        ),
    ),
    bad(
        "group_called_all",
        package("P400", group="all"),
        (
            "packages.csv:7, package P400 Permit, group",
            "id-reserved",
            'The group is "all".',
        ),
    ),
)
