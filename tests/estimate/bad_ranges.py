"""Bad inputs: ranges and chances."""

from tests.estimate.bad_inputs import bad
from tests.estimate.good_folder import event, in_turn, package, risk, setting

RANGES = (
    bad(
        "no_figures",
        package("P400", shape=""),
        (
            "packages.csv:7, package P400 Permit, low",
            "range-incomplete",
            "A pert range lacks low and high.",
        ),
    ),
    bad(
        "no_high",
        package("P500", high=""),
        (
            "packages.csv:8, package P500 Wiring, high",
            "range-incomplete",
            "A lognormal range lacks high.",
        ),
    ),
    bad(
        "no_likely_in_systemic",
        risk("S1", likely=""),
        (
            "systemic.csv:2, systemic risk S1 Definition, likely",
            "range-incomplete",
            "A pert range lacks likely.",
        ),
    ),
    bad(
        "low_above_likely",
        package("P200", low="1300000"),
        (
            "packages.csv:3, package P200 Dome shell, low",
            "range-out-of-order",
            "low 1.3 M is above likely 1.26 M.",
        ),
    ),
    bad(
        "low_above_blank_likely",
        package("P100", low="110%"),
        (
            "packages.csv:2, package P100 Design, low",
            "range-out-of-order",
            "low 110% (215,000) is above likely 200,000 (blank: the base).",
        ),
    ),
    bad(
        "likely_above_high",
        package("P200", high="1255000"),
        (
            "packages.csv:3, package P200 Dome shell, likely",
            "range-out-of-order",
            "likely 1.26 M is above high 1.255 M.",
        ),
    ),
    bad(
        "likely_of_a_uniform",
        package("P310", likely="150000"),
        (
            "packages.csv:6, package P310 Track, and road, likely",
            "cell-without-meaning",
            'A uniform range has no likely; the cell says "150000".',
        ),
    ),
    bad(
        "low_of_a_discrete",
        package("P210", low="90%"),
        (
            "packages.csv:4, package P210 Drive, low",
            "cell-without-meaning",
            'A discrete range has no low; the cell says "90%".',
        ),
    ),
    bad(
        "ends_of_a_fixed",
        package("P400", ends="limits"),
        (
            "packages.csv:7, package P400 Permit, ends",
            "cell-without-meaning",
            'A fixed range has no ends; the cell says "limits".',
        ),
    ),
    bad(
        "outcomes_of_a_pert",
        package("P100", outcomes="95%:1"),
        (
            "packages.csv:2, package P100 Design, outcomes",
            "cell-without-meaning",
            'A pert range has no outcomes; the cell says "95%:1".',
        ),
    ),
    bad(
        "row_ends_in_a_wrong_word",
        package("P310", ends="limit"),
        (
            "packages.csv:6, package P310 Track, and road, ends",
            "ends-unclear",
            '"limit" does not say what low and high mean.',
        ),
    ),
    bad(
        "lognormal_between_limits",
        package("P500", ends="limits"),
        (
            "packages.csv:8, package P500 Wiring, ends",
            "ends-not-percentiles",
            "The shape is lognormal and ends says limits.",
        ),
    ),
    bad(
        "normal_without_ends",
        in_turn(package("P500", shape="normal"), setting('ends = "P10-P90"\n', "")),
        (
            "packages.csv:8, package P500 Wiring, ends",
            "ends-not-percentiles",
            "The shape is normal and ends is not stated.",
        ),
    ),
    bad(
        "normal_off_its_middle",
        package("P500", shape="normal", likely="90%"),
        (
            "packages.csv:8, package P500 Wiring, low",
            "shape-impossible",
            (
                "likely 81,000 is not the middle of a normal with low 72,000 and "
                "high 135,000, which is 103,500."
            ),
        ),
    ),
    bad(
        "lognormal_leaning_left",
        package("P500", likely="145%"),
        (
            "packages.csv:8, package P500 Wiring, low",
            "shape-impossible",
            "likely 130,500 with low 72,000 and high 135,000.",
        ),
    ),
    bad(
        "lognormal_from_nought",
        package("P500", low="0"),
        (
            "packages.csv:8, package P500 Wiring, low",
            "shape-impossible",
            "low 0 is not above 0.",
        ),
    ),
    bad(
        "pert_with_ends_on_one_side",
        package("P100", ends="P60-P90"),
        (
            "packages.csv:2, package P100 Design, low",
            "shape-impossible",
            "The ends P60 and P90 lie on one side of the median.",
        ),
    ),
    bad(
        "outcome_without_probability",
        package("P210", outcomes="95%; 130%"),
        (
            "packages.csv:4, package P210 Drive, outcomes",
            "list-unclear",
            'The entry "95%" is not of the form a:b.',
        ),
    ),
    bad(
        "outcomes_below_one",
        package("P210", outcomes="95%:0.3; 100%:0.5; 130%:0.1"),
        (
            "packages.csv:4, package P210 Drive, outcomes",
            "chances-not-whole",
            "The probabilities sum to 0.9.",
        ),
    ),
    bad(
        "outcome_with_percent_above",
        package("P210", outcomes="95%:30; 100%:70"),
        (
            "packages.csv:4, package P210 Drive, outcomes",
            "probability-out-of-range",
            '"30" is no probability.',
        ),
        (
            "packages.csv:4, package P210 Drive, outcomes",
            "probability-out-of-range",
            '"70" is no probability.',
        ),
    ),
    bad(
        "outcome_never",
        package("P210", outcomes="95%:0; 100%:1"),
        (
            "packages.csv:4, package P210 Drive, outcomes",
            "shape-impossible",
            "The outcome 380,000 has the probability 0.",
        ),
    ),
    bad(
        "blank_outcome",
        package("P210", outcomes="95%:0.3; ; 100%:0.7"),
        (
            "packages.csv:4, package P210 Drive, outcomes",
            "list-unclear",
            '"95%:0.3; ; 100%:0.7" has a blank entry.',
        ),
    ),
    bad(
        "points_falling",
        package("P300", outcomes="P05=92%; P50=104%; P95=100%"),
        (
            "packages.csv:5, package P300 Pier, outcomes",
            "points-out-of-order",
            "P95=100% does not lie above P50=104%.",
        ),
    ),
    bad(
        "points_out_of_order",
        package("P300", outcomes="P50=104%; P05=92%"),
        (
            "packages.csv:5, package P300 Pier, outcomes",
            "points-out-of-order",
            "P05=92% does not lie above P50=104%.",
        ),
    ),
    bad(
        "one_point",
        package("P300", outcomes="P50=104%"),
        (
            "packages.csv:5, package P300 Pier, outcomes",
            "points-out-of-order",
            'There is one point only, "P50=104%".',
        ),
    ),
    bad(
        "point_beyond",
        package("P300", outcomes="P05=92%; P100=120%"),
        (
            "packages.csv:5, package P300 Pier, outcomes",
            "level-unknown",
            '"P100" is no level.',
        ),
    ),
    bad(
        "low_below_spent",
        package("P100", low="40000"),
        (
            "packages.csv:2, package P100 Design, low",
            "below-spent",
            '"40000" is below the 50,000 that is spent.',
        ),
    ),
    bad(
        "all_spent_and_percent",
        package("P100", spent="250000"),
        (
            "packages.csv:2, package P100 Design, low",
            "percent-of-nothing",
            '"90%" would apply to base 200,000 - spent 250,000.',
        ),
        (
            "packages.csv:2, package P100 Design, likely",
            "below-spent",
            (
                'likely is blank, so the base stands for it: "base 200,000" is '
                "below the 250,000 that is spent."
            ),
        ),
        (
            "packages.csv:2, package P100 Design, high",
            "percent-of-nothing",
            '"130%" would apply to base 200,000 - spent 250,000.',
        ),
    ),
    bad(
        "spent_above_base_and_likely",
        package("P400", spent="12000"),
        (
            "packages.csv:7, package P400 Permit, likely",
            "below-spent",
            (
                'likely is blank, so the base stands for it: "base 10,000" is below'
                " the 12,000 that is spent."
            ),
        ),
    ),
    bad(
        "systemic_without_percent",
        risk("S1", high="10"),
        (
            "systemic.csv:2, systemic risk S1 Definition, high",
            "percent-missing",
            '"10" has no percent sign.',
        ),
    ),
    bad(
        "systemic_below_nothing",
        risk("S1", low="-120%"),
        (
            "systemic.csv:2, systemic risk S1 Definition, low",
            "uplift-too-low",
            '"-120%" is below -100%.',
        ),
    ),
    bad(
        "impact_negative",
        event("E2", low="-20000"),
        (
            "events.csv:3, event E2 Pier on poor rock, low",
            "amount-negative",
            '"-20000" is negative.',
        ),
    ),
    bad(
        "probability_of_thirty",
        event("E2", probability="30"),
        (
            "events.csv:3, event E2 Pier on poor rock, probability",
            "probability-out-of-range",
            '"30" is no probability.',
        ),
    ),
    bad(
        "probability_above_one",
        event("E2", probability="130%"),
        (
            "events.csv:3, event E2 Pier on poor rock, probability",
            "probability-out-of-range",
            '"130%" is no probability.',
        ),
    ),
    bad(
        "probability_below_nought",
        event("E2", probability="-0.1"),
        (
            "events.csv:3, event E2 Pier on poor rock, probability",
            "probability-out-of-range",
            '"-0.1" is no probability.',
        ),
    ),
    bad(
        "frequency_negative",
        event("E1", frequency="-1"),
        (
            "events.csv:2, event E1 Storm on the hill, frequency",
            "amount-negative",
            '"-1" is negative.',
        ),
    ),
    bad(
        "frequency_of_thousands",
        event("E1", frequency="20000"),
        (
            "events.csv:2, event E1 Storm on the hill, frequency",
            "frequency-too-large",
            '"20000" occurrences are expected.',
        ),
    ),
    bad(
        "frequency_in_percent",
        event("E1", frequency="150%"),
        (
            "events.csv:2, event E1 Storm on the hill, frequency",
            "percent-unwanted",
            '"150%" is a percent.',
        ),
    ),
    bad(
        "no_probability",
        event("E2", probability=""),
        (
            "events.csv:3, event E2 Pier on poor rock, probability",
            "cell-blank",
            "The event is open and has no probability.",
        ),
    ),
    bad(
        "no_frequency",
        event("E1", frequency=""),
        (
            "events.csv:2, event E1 Storm on the hill, frequency",
            "cell-blank",
            "The event is open and has no frequency.",
        ),
    ),
)
