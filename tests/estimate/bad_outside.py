"""Bad inputs: history.csv and [outside_view]."""

from tests.estimate.bad_inputs import bad
from tests.estimate.good_folder import content, setting

COLUMNS = "id,name,group,estimate,final,notes"


def projects(*rows):
    """A history.csv of several whole rows."""
    return content("history.csv", "\n".join([COLUMNS, *rows]) + "\n")


def outside(text):
    """An estimate.toml with [outside_view]."""
    return setting("[assurance]", f"[outside_view]\n{text}\n\n[assurance]")


OUTSIDE = (
    bad(
        "project_without_final_cost",
        projects("H1,Pier,,100,,"),
        (
            "history.csv:2, project H1 Pier, final",
            "cell-blank",
            "The cell final is blank.",
        ),
    ),
    bad(
        "project_of_no_cost",
        projects("H1,Pier,,100,0,"),
        ("history.csv:2, project H1 Pier, final", "cell-blank", 'The amount is "0".'),
    ),
    bad(
        "project_in_percent",
        projects("H1,Pier,,100,115%,"),
        (
            "history.csv:2, project H1 Pier, final",
            "percent-unwanted",
            '"115%" is a percent.',
        ),
    ),
    bad(
        "project_twice",
        projects("H1,Pier,,100,115,", "H1,Dome,,90,95,"),
        (
            "history.csv:3, project H1 Dome, id",
            "id-twice",
            'The id "H1" is also on line 2.',
        ),
    ),
    bad(
        "outside_percentiles_that_fall",
        outside("percentiles = { P50 = 30, P80 = 20 }"),
        (
            "estimate.toml:48, [outside_view] percentiles P80",
            "points-out-of-order",
            "P80 is 20, below 30 at P50.",
        ),
    ),
    bad(
        "one_outside_percentile",
        outside("percentiles = { P50 = 30 }"),
        (
            "estimate.toml:48, [outside_view] percentiles",
            "points-out-of-order",
            "One percentile is given.",
        ),
    ),
    bad(
        "outside_percentile_unknown",
        outside("percentiles = { P50 = 30, p80 = 40, P90 = 50 }"),
        (
            "estimate.toml:48, [outside_view] percentiles p80",
            "key-unknown",
            '[outside_view] percentiles has no key "p80".',
        ),
    ),
    bad(
        "uplift_shares_short_of_the_whole",
        outside(
            'uplifts = [ { kind = "a", share = 30, upper = 51 },'
            ' { kind = "b", share = 60, upper = 24 } ]'
        ),
        (
            "estimate.toml:48, [outside_view] uplifts",
            "shares-not-whole",
            "The shares add up to 90 %.",
        ),
    ),
    bad(
        "uplift_of_no_kind",
        outside("uplifts = [ { share = 100, upper = 51 } ]"),
        (
            "estimate.toml:48, [outside_view] uplifts 1 kind",
            "key-missing",
            "The key kind is missing.",
        ),
    ),
    bad(
        "outside_key_unknown",
        outside('stge = "gate 3"'),
        (
            "estimate.toml:48, [outside_view] stge",
            "key-unknown",
            '[outside_view] has no key "stge".',
        ),
    ),
)
