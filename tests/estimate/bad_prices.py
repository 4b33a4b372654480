"""Bad inputs: prices.csv, the column prices and the start of the financial year."""

from tests.estimate.bad_inputs import bad
from tests.estimate.good_folder import cell, content, no_file, package, setting

WAGES = "prices.csv:2, price series wages Engineers' wages"
METAL = "prices.csv:3, price series metal Metal work"
PERMIT = "packages.csv:7, package P400 Permit"


def series(row, **values):
    """Set cells of prices.csv."""
    return cell("prices.csv", row, **values)


PRICES = (
    bad(
        "unknown_price_series",
        package("P400", prices="wage"),
        (
            f"{PERMIT}, prices",
            "id-unknown",
            'prices.csv has no series "wage".',
        ),
    ),
    bad(
        "prices_file_missing",
        no_file("prices.csv"),
        (
            "packages.csv:2, package P100 Design, prices",
            "id-unknown",
            'There is no prices.csv with the series "wages".',
        ),
    ),
    bad(
        "price_series_twice",
        content(
            "prices.csv", "id,name,likely,shape\nwages,A,2%,fixed\nwages,B,3%,fixed\n"
        ),
        (
            "prices.csv:3, price series wages B, id",
            "id-twice",
            'The id "wages" is also on line 2.',
        ),
    ),
    bad(
        "price_series_without_a_name",
        series("metal", name=""),
        ("prices.csv:3, price series metal, name", "cell-blank", "is blank"),
    ),
    bad(
        "price_rate_without_a_percent_sign",
        series("wages", likely="2.5"),
        (f"{WAGES}, likely", "percent-missing", '"2.5" has no percent sign.'),
    ),
    bad(
        "price_rates_that_fall",
        series("wages", high="2%"),
        (f"{WAGES}, likely", "range-out-of-order", "is above"),
    ),
    bad(
        "price_rate_without_a_likely",
        series("wages", likely=""),
        (f"{WAGES}, likely", "range-incomplete", "A pert range lacks likely."),
    ),
    bad(
        "price_rate_that_leaves_nothing",
        series("metal", outcomes="-100%:0.25; 2%:0.5; 6%:0.25"),
        (f"{METAL}, outcomes", "rate-out-of-range", '"-100%" leaves no price at all.'),
    ),
    bad(
        "price_rate_drawn_below_nothing",
        series("wages", low="-20%", likely="", high="20%", shape="normal"),
        (
            f"{WAGES}, low",
            "rate-out-of-range",
            "This normal range gives rates from -129.53 % to 129.53 % a year.",
        ),
    ),
    bad(
        "price_rate_beyond_reason",
        series("wages", low="", likely="2500%", high="", shape="fixed", ends=""),
        (
            f"{WAGES}, likely",
            "rate-out-of-range",
            "This fixed range gives rates from 2,500 % to 2,500 % a year.",
        ),
    ),
    bad(
        "window_in_another_millennium",
        package("P100", finish="2926-09-30"),
        (
            "packages.csv:2, package P100 Design, finish",
            "window-too-far",
            "finish is 2926-09-30.",
        ),
    ),
    bad(
        "price_series_of_an_unknown_column",
        content("prices.csv", "id,name,likely,shape,index\nwages,A,2%,fixed,\n"),
        ("prices.csv:1, column index", "column-unknown", 'no column "index"'),
    ),
    bad(
        "financial_year_of_a_thirteenth_month",
        setting("class = 3", "class = 3\nfinancial_year_starts = 13"),
        (
            "estimate.toml:8, [estimate] financial_year_starts",
            "setting-out-of-range",
            "financial_year_starts is 13.",
        ),
    ),
)
