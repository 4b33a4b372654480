"""Bad inputs: estimate.toml."""

from tests.estimate.bad_inputs import bad
from tests.estimate.good_folder import setting

SETTINGS = (
    bad(
        "toml_without_a_quote",
        setting('"Gate 3"', '"Gate 3'),
        ("estimate.toml:6", "toml-syntax", "The line cannot be read"),
    ),
    bad(
        "toml_key_twice",
        setting("seed = 7", "seed = 7\nseed = 8"),
        ("estimate.toml:33", "toml-syntax", "The line cannot be read"),
    ),
    bad(
        "toml_open_list",
        setting('"Twice made up."]', '"Twice made up."'),
        ("estimate.toml:47", "toml-syntax", "The line cannot be read"),
    ),
    bad(
        "toml_nested_too_deeply",
        setting('"All made up."', "[" * 5_000),
        ("estimate.toml", "toml-syntax", "Brackets are nested too deeply."),
    ),
    bad(
        "toml_huge_number",
        setting("seed = 7", "seed = " + "7" * 5_000),
        ("estimate.toml", "toml-syntax", "The line cannot be read"),
    ),
    bad(
        "unknown_key",
        setting("revision =", "revison ="),
        (
            "estimate.toml:4, [estimate] revison",
            "key-unknown",
            '[estimate] has no key "revison".',
        ),
    ),
    bad(
        "key_under_another_heading",
        setting("rounding = 1000", "rounding = 1000\nseed = 3"),
        (
            "estimate.toml:21, [contingency] seed",
            "key-unknown",
            '[contingency] has no key "seed".',
        ),
    ),
    bad(
        "unknown_heading",
        setting("[statements]", "[statement]"),
        (
            "estimate.toml:36, statement",
            "key-unknown",
            'estimate.toml has no heading or key "statement".',
        ),
    ),
    bad(
        "key_above_all_headings",
        setting("[estimate]\n", "target = 'P80'\n[estimate]\n"),
        (
            "estimate.toml:2, target",
            "key-unknown",
            'estimate.toml has no heading or key "target".',
        ),
    ),
    bad(
        "missing_key",
        setting('target = "P80"\n', ""),
        (
            "estimate.toml:16, [contingency] target",
            "key-missing",
            "The key target is missing.",
        ),
    ),
    bad(
        "missing_heading",
        setting(
            (
                "[simulation]\n"
                "seed = 7\n"
                "tolerance = 0.002\n"
                "trials = { least = 8192, most = 65_536 }\n"
            ),
            "",
        ),
        (
            "estimate.toml, [simulation]",
            "key-missing",
            "The heading [simulation] is missing.",
        ),
    ),
    bad(
        "blank_project",
        setting("Hill observatory dome", " "),
        (
            "estimate.toml:3, [estimate] project",
            "cell-blank",
            "The text project is blank.",
        ),
    ),
    bad(
        "seed_in_quotes",
        setting("seed = 7", 'seed = "7"'),
        (
            "estimate.toml:32, [simulation] seed",
            "kind-wrong",
            'seed is the text "7", not a whole number.',
        ),
    ),
    bad(
        "seed_with_a_point",
        setting("seed = 7", "seed = 7.0"),
        (
            "estimate.toml:32, [simulation] seed",
            "kind-wrong",
            "seed is 7.0, not a whole number.",
        ),
    ),
    bad(
        "seed_below_nought",
        setting("seed = 7", "seed = -1"),
        ("estimate.toml:32, [simulation] seed", "setting-out-of-range", "seed is -1."),
    ),
    bad(
        "seed_too_large",
        setting("seed = 7", "seed = 18446744073709551616"),
        (
            "estimate.toml:32, [simulation] seed",
            "setting-out-of-range",
            "seed is 18446744073709551616.",
        ),
    ),
    bad(
        "seed_beyond_printing",
        setting("seed = 7", "seed = 0x" + "f" * 5_000),
        (
            "estimate.toml:32, [simulation] seed",
            "setting-out-of-range",
            "seed is a number of more than 40 digits.",
        ),
    ),
    bad(
        "date_in_quotes",
        setting("price_date = 2026-03-31", 'price_date = "2026-03-31"'),
        (
            "estimate.toml:9, [estimate] price_date",
            "kind-wrong",
            'price_date is the text "2026-03-31", not a day.',
        ),
    ),
    bad(
        "date_with_a_time",
        setting("data_date = 2026-04-15", "data_date = 2026-04-15T10:00:00"),
        (
            "estimate.toml:10, [estimate] data_date",
            "kind-wrong",
            "data_date is the time 2026-04-15 10:00:00, not a day.",
        ),
    ),
    bad(
        "date_not_in_the_calendar",
        setting("price_date = 2026-03-31", "price_date = 2026-03-32"),
        ("estimate.toml:9", "toml-syntax", "The line cannot be read"),
    ),
    bad(
        "class_beyond_five",
        setting("class = 3", "class = 6"),
        ("estimate.toml:7, [estimate] class", "setting-out-of-range", "class is 6."),
    ),
    bad(
        "class_true",
        setting("class = 3", "class = true"),
        (
            "estimate.toml:7, [estimate] class",
            "kind-wrong",
            "class is true, not a whole number.",
        ),
    ),
    bad(
        "unknown_currency",
        setting('"EUR"', '"EURO"'),
        (
            "estimate.toml:8, [estimate] currency",
            "currency-unknown",
            '"EURO" is no ISO 4217 code in use.',
        ),
    ),
    bad(
        "small_currency",
        setting('"EUR"', '"eur"'),
        (
            "estimate.toml:8, [estimate] currency",
            "currency-unknown",
            '"eur" is no ISO 4217 code in use.',
        ),
    ),
    bad(
        "currency_of_the_metals",
        setting('"EUR"', '"XAU"'),
        (
            "estimate.toml:8, [estimate] currency",
            "currency-unknown",
            '"XAU" is no ISO 4217 code in use.',
        ),
    ),
    bad(
        "target_without_p",
        setting('target = "P80"', "target = 80"),
        (
            "estimate.toml:17, [contingency] target",
            "level-unknown",
            '"80" is no level.',
        ),
    ),
    bad(
        "target_of_a_hundred",
        setting('target = "P80"', 'target = "P100"'),
        (
            "estimate.toml:17, [contingency] target",
            "level-unknown",
            '"P100" is no level.',
        ),
    ),
    bad(
        "level_of_nought",
        setting('"P5"', '"P0"'),
        (
            "estimate.toml:24, [contingency] levels 3 level",
            "level-unknown",
            '"P0" is no level.',
        ),
    ),
    bad(
        "level_twice",
        setting('"P5"', '"P50"'),
        (
            "estimate.toml:24, [contingency] levels 3 level",
            "level-twice",
            "The level P50 stands in an earlier line.",
        ),
    ),
    bad(
        "level_without_its_key",
        setting('level = "P5", ', ""),
        (
            "estimate.toml:24, [contingency] levels 3 level",
            "key-missing",
            "The key level is missing.",
        ),
    ),
    bad(
        "levels_not_a_list",
        setting(
            (
                "levels = [\n"
                '  { level = "P50", purpose = "Delivery", holder = "Manager" },\n'
                '  { level = "P80", purpose = "Funding", holder = "Sponsor" },\n'
                '  { level = "P5", purpose = "Floor", holder = "Nobody" },\n'
                "]"
            ),
            'levels = "P50"',
        ),
        (
            "estimate.toml:21, [contingency] levels",
            "kind-wrong",
            'levels is the text "P50", not a list.',
        ),
    ),
    bad(
        "levels_of_texts",
        setting('{ level = "P5", purpose = "Floor", holder = "Nobody" }', '"P5"'),
        (
            "estimate.toml:24, [contingency] levels 3",
            "kind-wrong",
            'The entry is the text "P5", not a table of keys.',
        ),
    ),
    bad(
        "rounding_nought",
        setting("rounding = 1000", "rounding = 0"),
        (
            "estimate.toml:20, [contingency] rounding",
            "setting-out-of-range",
            "rounding is 0.",
        ),
    ),
    bad(
        "rounding_infinite",
        setting("rounding = 1000", "rounding = inf"),
        ("estimate.toml:20, [contingency] rounding", "not-finite", "rounding is inf."),
    ),
    bad(
        "request_below_nought",
        setting("request_base = 3_000_000", "request_base = -3"),
        (
            "estimate.toml:12, [estimate] request_base",
            "setting-out-of-range",
            "request_base is -3.",
        ),
    ),
    bad(
        "ends_in_a_wrong_word",
        setting('ends = "P10-P90"', 'ends = "80 percent"'),
        (
            "estimate.toml:28, [ranges] ends",
            "ends-unclear",
            '"80 percent" does not say what low and high mean.',
        ),
    ),
    bad(
        "ends_falling",
        setting('ends = "P10-P90"', 'ends = "P90-P10"'),
        ("estimate.toml:28, [ranges] ends", "ends-unclear", '"P90-P10" does not rise.'),
    ),
    bad(
        "general_dependence_above_one",
        setting("general_dependence = 0.2", "general_dependence = 1.2"),
        (
            "estimate.toml:29, [ranges] general_dependence",
            "setting-out-of-range",
            "general_dependence is 1.2.",
        ),
    ),
    bad(
        "general_dependence_no_number",
        setting("general_dependence = 0.2", "general_dependence = nan"),
        (
            "estimate.toml:29, [ranges] general_dependence",
            "not-finite",
            "general_dependence is nan.",
        ),
    ),
    bad(
        "tolerance_nought",
        setting("tolerance = 0.002", "tolerance = 0.0"),
        (
            "estimate.toml:33, [simulation] tolerance",
            "setting-out-of-range",
            "tolerance is 0.",
        ),
    ),
    bad(
        "trials_no_multiple",
        setting("least = 8192", "least = 10_000"),
        (
            "estimate.toml:34, [simulation] trials least",
            "trials-not-in-blocks",
            "least is 10,000, which is 2.44 blocks.",
        ),
    ),
    bad(
        "trials_falling",
        setting("least = 8192", "least = 131_072"),
        (
            "estimate.toml:34, [simulation] trials least",
            "trials-out-of-order",
            "least 131,072 is above most 65,536.",
        ),
    ),
    bad(
        "trials_far_too_many",
        setting("most = 65_536", "most = 1_000_000_000"),
        (
            "estimate.toml:34, [simulation] trials most",
            "setting-out-of-range",
            "most is 1000000000.",
        ),
    ),
    bad(
        "trials_a_number",
        setting("{ least = 8192, most = 65_536 }", "65_536"),
        (
            "estimate.toml:34, [simulation] trials",
            "kind-wrong",
            "trials is 65536, not a table of keys.",
        ),
    ),
    bad(
        "assumption_without_text",
        setting('text = "One year.", ', ""),
        (
            "estimate.toml:40, [statements] assumptions 1 text",
            "key-missing",
            "The key text is missing.",
        ),
    ),
    bad(
        "assumption_twice",
        setting(
            "assumptions = [", 'assumptions = [\n  { id = "A1", text = "Again." },'
        ),
        (
            "estimate.toml:41, [statements] assumptions 2 id",
            "id-twice",
            'The id "A1" stands in an earlier line.',
        ),
    ),
    bad(
        "exclusion_with_a_blank_id",
        setting('id = "X1"', 'id = ""'),
        (
            "estimate.toml:43, [statements] exclusions 1 id",
            "cell-blank",
            "The text id is blank.",
        ),
    ),
    bad(
        "caution_no_text",
        setting('"Twice made up."', "7"),
        (
            "estimate.toml:45, [statements] cautions 2",
            "kind-wrong",
            "The entry is 7, not a text.",
        ),
    ),
    bad(
        "unprintable_text",
        setting('"Gate 3"', '"Gate \\u0007"'),
        (
            "estimate.toml:6, [estimate] gate",
            "control-character",
            "The character U+0007 stands in the text.",
        ),
    ),
    bad(
        "threshold_a_list",
        setting("some_threshold = 0.4", "some_threshold = [0.4]"),
        (
            "estimate.toml:48, [assurance] some_threshold",
            "kind-wrong",
            'The threshold "some_threshold" is no single value.',
        ),
    ),
    bad(
        "no_line_for_approved",
        setting('role = "approved"', 'role = "owner"'),
        (
            "estimate.toml:52, sign_off",
            "sign-off-incomplete",
            "The block has no line for approved.",
        ),
    ),
    bad(
        "role_twice",
        setting('role = "approved"', 'role = "checked"'),
        (
            "estimate.toml:52, sign_off",
            "sign-off-incomplete",
            "The block has no line for approved.",
        ),
        (
            "estimate.toml:61, [[sign_off]] 3 role",
            "sign-off-incomplete",
            'The role "checked" stands in an earlier line.',
        ),
    ),
    bad(
        "answer_without_a_day",
        setting("on = 2026-04-16\n", ""),
        ("estimate.toml:63, [[answers]] 1 on", "key-missing", "The key on is missing."),
    ),
    bad(
        "sign_off_a_text",
        setting(
            (
                "[[sign_off]]\n"
                'role = "prepared"\n'
                'name = "A. Person"\n'
                'position = "Engineer"\n'
                "\n"
                "[[sign_off]]\n"
                'role = "checked"\n'
                "\n"
                "[[sign_off]]\n"
                'role = "approved"\n'
            ),
            '[sign_off]\nrole = "prepared"\n',
        ),
        (
            "estimate.toml:52, sign_off",
            "kind-wrong",
            "sign_off is a table of keys, not a list.",
        ),
    ),
)
