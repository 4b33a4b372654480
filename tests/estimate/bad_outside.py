"""Bad inputs: history.csv and [outside_view]."""

from tests.estimate.bad_inputs import bad
from tests.estimate.good_folder import content, in_turn, risk, setting

COLUMNS = "id,name,group,estimate,final,covered,notes"


def projects(*rows):
    """A history.csv of several whole rows."""
    return content("history.csv", "\n".join([COLUMNS, *rows]) + "\n")


def outside(text):
    """An estimate.toml with [outside_view]."""
    return setting("[assurance]", f"[outside_view]\n{text}\n\n[assurance]")


RATED = """\
[model]
name = "Own model"
provenance = "Forty domes, closed 2010 to 2024"
form = "log"
constant = 0.02
residual_spread = 0.12
degrees = 36

[[factors]]
id = "scope"
name = "Definition of scope"
coefficient = 0.05
levels = { poor = 3, fair = 2, good = 1 }
rating = "fair"
evidence = "Review of 3 March"

[[factors]]
id = "crew"
name = "Share of new crew"
coefficient = 0.1
value = 0.25
"""


def ratings(old="", new="", text=RATED):
    """A ratings.toml with one text put for another."""
    assert old in text
    return content("ratings.toml", text.replace(old, new, 1))


def modelled(model, **more):
    """Risk S2 takes its uplift from a model."""
    given = {"model": model, "shape": "", "outcomes": "", "covers": "All but storms"}
    return risk("S2", **given | more)


OUTSIDE = (
    bad(
        "covered_more_than_the_final_cost",
        projects("H1,Pier,,100,115,115,"),
        (
            "history.csv:2, project H1 Pier, covered",
            "amount-unclear",
            'The amount is "115".',
        ),
    ),
    bad(
        "ratings_that_are_not_there",
        modelled("ratings"),
        (
            "systemic.csv:3, systemic risk S2 Mountain work, model",
            "model-missing",
            "There is no ratings.toml that can be read.",
        ),
    ),
    bad(
        "history_that_is_not_declared",
        in_turn(modelled("history"), projects("H1,Pier,,100,115,,")),
        (
            "systemic.csv:3, systemic risk S2 Mountain work, model",
            "model-missing",
            "[outside_view] does not declare stage, money and scope.",
        ),
    ),
    bad(
        "history_of_one_project",
        in_turn(
            modelled("history"),
            projects("H1,Pier,,100,115,,"),
            outside('stage = "a"\nmoney = "b"\nscope = "c"'),
        ),
        (
            "systemic.csv:3, systemic risk S2 Mountain work, model",
            "model-missing",
            "history.csv has too few projects to compare with: 1 of 8.",
        ),
    ),
    bad(
        "model_beside_figures",
        in_turn(ratings(), modelled("ratings", low="2%", covers="")),
        (
            "systemic.csv:3, systemic risk S2 Mountain work, low",
            "cell-without-meaning",
            'The uplift is taken from ratings; low says "2%".',
        ),
        (
            "systemic.csv:3, systemic risk S2 Mountain work, covers",
            "cell-blank",
            "The cell covers is blank.",
        ),
    ),
    bad(
        "model_unknown",
        modelled("rating"),
        (
            "systemic.csv:3, systemic risk S2 Mountain work, model",
            "word-unknown",
            '"rating" is no word of this column.',
        ),
    ),
    bad(
        "rating_of_no_level",
        ratings('"fair"\n', '"far"\n'),
        (
            "ratings.toml:14, [[factors]] 1 rating",
            "rating-unclear",
            '"far" is no level of this factor.',
        ),
    ),
    bad(
        "rating_and_value",
        ratings("value = 0.25", 'value = 0.25\nrating = "new"'),
        (
            "ratings.toml:22, [[factors]] 2 rating",
            "rating-unclear",
            "Rating and value are both there.",
        ),
    ),
    bad(
        "model_of_no_form",
        ratings('"log"', '"logarithm"'),
        (
            "ratings.toml:4, [model] form",
            "rating-unclear",
            '"logarithm" is no form of a model.',
        ),
    ),
    bad(
        "model_without_provenance",
        ratings('provenance = "Forty domes, closed 2010 to 2024"\n'),
        (
            "ratings.toml:1, [model] provenance",
            "key-missing",
            "The key provenance is missing.",
        ),
    ),
    bad(
        "model_without_spread",
        ratings("residual_spread = 0.12", "residual_spread = 0"),
        (
            "ratings.toml:6, [model] residual_spread",
            "setting-out-of-range",
            "residual_spread is 0.",
        ),
    ),
    bad(
        "factor_twice",
        ratings('id = "crew"', 'id = "scope"'),
        (
            "ratings.toml:18, [[factors]] 2 id",
            "id-twice",
            'The id "scope" stands twice.',
        ),
    ),
    bad(
        "factor_key_unknown",
        ratings("coefficient = 0.1\n", "coeficient = 0.1\n"),
        (
            "ratings.toml:20, [[factors]] 2 coeficient",
            "key-unknown",
            '[[factors]] 2 has no key "coeficient".',
        ),
    ),
    bad(
        "ratings_that_are_no_toml",
        ratings('name = "Own model"', 'name = "Own model'),
        ("ratings.toml", "toml-syntax", "The file cannot be read as TOML."),
    ),
    bad(
        "project_without_final_cost",
        projects("H1,Pier,,100,,,"),
        (
            "history.csv:2, project H1 Pier, final",
            "cell-blank",
            "The cell final is blank.",
        ),
    ),
    bad(
        "project_of_no_cost",
        projects("H1,Pier,,100,0,,"),
        ("history.csv:2, project H1 Pier, final", "cell-blank", 'The amount is "0".'),
    ),
    bad(
        "project_in_percent",
        projects("H1,Pier,,100,115%,,"),
        (
            "history.csv:2, project H1 Pier, final",
            "percent-unwanted",
            '"115%" is a percent.',
        ),
    ),
    bad(
        "project_twice",
        projects("H1,Pier,,100,115,,", "H1,Dome,,90,95,,"),
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
