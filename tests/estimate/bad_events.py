"""Bad inputs: events and how they are tied to one another."""

from tests.estimate.bad_inputs import bad
from tests.estimate.good_folder import event, in_turn

EVENTS = (
    bad(
        "shares_of_ninety",
        event("E1", packages="P200:60%; P310:30%"),
        (
            "events.csv:2, event E1 Storm on the hill, packages",
            "shares-not-whole",
            "The shares sum to 90 %.",
        ),
    ),
    bad(
        "share_of_an_unknown_package",
        event("E1", packages="P200:60%; P31:40%"),
        (
            "events.csv:2, event E1 Storm on the hill, packages",
            "id-unknown",
            'packages.csv has no package "P31".',
        ),
    ),
    bad(
        "share_without_percent",
        event("E1", packages="P200:0.6; P310:0.4"),
        (
            "events.csv:2, event E1 Storm on the hill, packages",
            "share-out-of-range",
            '"0.6" has no percent sign.',
        ),
    ),
    bad(
        "share_beyond_the_whole",
        event("E1", packages="P200:160%; P310:-60%"),
        (
            "events.csv:2, event E1 Storm on the hill, packages",
            "share-out-of-range",
            '"160%" lies outside 0% to 100%.',
        ),
    ),
    bad(
        "package_with_two_shares",
        event("E1", packages="P200:60%; P200:40%"),
        (
            "events.csv:2, event E1 Storm on the hill, packages",
            "list-unclear",
            'The package "P200" stands in the cell twice.',
        ),
    ),
    bad(
        "shares_missing",
        event("E1", packages="P200; P310"),
        (
            "events.csv:2, event E1 Storm on the hill, packages",
            "list-unclear",
            'The entry "P200" is not of the form a:b.',
        ),
    ),
    bad(
        "response_in_an_unknown_package",
        event("E1", response_package="P20"),
        (
            "events.csv:2, event E1 Storm on the hill, response_package",
            "id-unknown",
            'packages.csv has no package "P20".',
        ),
    ),
    bad(
        "response_cost_negative",
        event("E1", response_cost="-5"),
        (
            "events.csv:2, event E1 Storm on the hill, response_cost",
            "amount-negative",
            '"-5" is negative.',
        ),
    ),
    bad(
        "unknown_kind",
        event("E2", kind="risk"),
        (
            "events.csv:3, event E2 Pier on poor rock, kind",
            "word-unknown",
            '"risk" is no word of this column.',
        ),
    ),
    bad(
        "blank_kind",
        event("E2", kind=""),
        (
            "events.csv:3, event E2 Pier on poor rock, kind",
            "cell-blank",
            "The cell kind is blank.",
        ),
    ),
    bad(
        "frequency_of_a_single_event",
        event("E2", frequency="2"),
        (
            "events.csv:3, event E2 Pier on poor rock, frequency",
            "happens-mismatch",
            'The event happens once and has the frequency "2".',
        ),
    ),
    bad(
        "probability_of_a_repeated_event",
        event("E1", probability="50%"),
        (
            "events.csv:2, event E1 Storm on the hill, probability",
            "happens-mismatch",
            'The event happens repeatedly and has the probability "50%".',
        ),
    ),
    bad(
        "after_frequency_of_a_single_event",
        event(
            "E2", after_frequency="0.1", after_low="1", after_likely="2", after_high="3"
        ),
        (
            "events.csv:3, event E2 Pier on poor rock, after_frequency",
            "happens-mismatch",
            'The event happens once and has the frequency "0.1".',
        ),
    ),
    bad(
        "after_without_impact",
        event("E2", after_probability="10%"),
        (
            "events.csv:3, event E2 Pier on poor rock, after_low",
            "after-incomplete",
            "after_probability filled, after_low, after_likely and after_high blank.",
        ),
    ),
    bad(
        "after_without_probability",
        event("E2", after_low="10000", after_likely="20000", after_high="30000"),
        (
            "events.csv:3, event E2 Pier on poor rock, after_probability",
            "after-incomplete",
            "after_low, after_likely and after_high filled, after_probability blank.",
        ),
    ),
    bad(
        "after_out_of_order",
        event("E1", after_low="50000"),
        (
            "events.csv:2, event E1 Storm on the hill, after_low",
            "range-out-of-order",
            "after_low 50,000 is above after_likely 15,000.",
        ),
    ),
    bad(
        "use_after_without_figures",
        event("E2", use="after"),
        (
            "events.csv:3, event E2 Pier on poor rock, use",
            "after-missing",
            "The cell says after; the cells after treatment are blank.",
        ),
    ),
    bad(
        "shared_without_share",
        event("E1", retained_share=""),
        (
            "events.csv:2, event E1 Storm on the hill, retained_share",
            "retained-share-mismatch",
            "contract is shared and retained_share is blank.",
        ),
    ),
    bad(
        "share_without_sharing",
        event("E2", retained_share="50%"),
        (
            "events.csv:3, event E2 Pier on poor rock, retained_share",
            "retained-share-mismatch",
            "contract is blank and retained_share is filled.",
        ),
    ),
    bad(
        "window_reversed",
        event("E1", window_finish="2026-04-30"),
        (
            "events.csv:2, event E1 Storm on the hill, window_finish",
            "dates-reversed",
            "window_finish 2026-04-30 lies before window_start 2026-05-01.",
        ),
    ),
    bad(
        "review_reversed",
        event("E1", next_review="2026-03-01"),
        (
            "events.csv:2, event E1 Storm on the hill, next_review",
            "dates-reversed",
            "next_review 2026-03-01 lies before reviewed_on 2026-04-01.",
        ),
    ),
    bad(
        "requires_an_unknown_event",
        event("E4", requires="E22"),
        (
            "events.csv:5, event E4 Second survey, requires",
            "id-unknown",
            'events.csv has no event "E22".',
        ),
    ),
    bad(
        "requires_itself",
        event("E4", requires="E4"),
        (
            "events.csv:5, event E4 Second survey, requires",
            "self-reference",
            'The event requires itself, "E4".',
        ),
    ),
    bad(
        "requires_in_a_circle",
        event("E2", requires="E4"),
        (
            "events.csv:3, event E2 Pier on poor rock, requires",
            "requires-circle",
            "E2 requires E4 requires E2.",
        ),
    ),
    bad(
        "requires_a_closed_event",
        event("E4", requires="E6"),
        (
            "events.csv:5, event E4 Second survey, requires",
            "requires-closed",
            "The event is open; E6, which it requires, is closed.",
        ),
    ),
    bad(
        "requires_what_it_excludes",
        event("E3", requires="E2"),
        (
            "events.csv:4, event E3 Pier without piles, requires",
            "requires-excluded",
            "E3 requires E2 and excludes it.",
        ),
    ),
    bad(
        "excludes_an_unknown_event",
        event("E2", excludes="E33"),
        (
            "events.csv:3, event E2 Pier on poor rock, excludes",
            "id-unknown",
            'events.csv has no event "E33".',
        ),
    ),
    bad(
        "excludes_itself",
        event("E2", excludes="E2; E3"),
        (
            "events.csv:3, event E2 Pier on poor rock, excludes",
            "self-reference",
            'The event excludes itself, "E2".',
        ),
    ),
    bad(
        "excludes_with_a_gap",
        in_turn(event("E4", requires=""), event("E3", excludes="E4")),
        (
            "events.csv:3, event E2 Pier on poor rock, excludes",
            "excludes-incomplete",
            "E2 and E4 are not said to exclude each other.",
        ),
    ),
    bad(
        "excludes_a_repeated_event",
        event("E1", excludes="E2; E3"),
        (
            "events.csv:2, event E1 Storm on the hill, happens",
            "excludes-repeated",
            "The event happens repeatedly and excludes E2 and E3.",
        ),
    ),
    bad(
        "excludes_more_than_certain",
        event("E2", probability="0.85"),
        (
            "events.csv:3, event E2 Pier on poor rock, excludes",
            "excludes-too-likely",
            "The probabilities of E2 and E3 sum to 1.05.",
        ),
    ),
    bad(
        "excludes_what_has_occurred",
        event("E5", excludes="E2; E3"),
        (
            "events.csv:3, event E2 Pier on poor rock, status",
            "excludes-occurred",
            "The event is open; E5, which excludes it, has occurred.",
        ),
        (
            "events.csv:4, event E3 Pier without piles, status",
            "excludes-occurred",
            "The event is open; E5, which excludes it, has occurred.",
        ),
    ),
    bad(
        "requires_something_impossible_further_up",
        in_turn(event("E4", requires="E3"), event("E2", requires="E4")),
        (
            "events.csv:3, event E2 Pier on poor rock, requires",
            "requires-excluded",
            "E2 requires E3 and excludes it.",
        ),
    ),
)
