"""Bad inputs: causes, correlations, systemic risks and evidence."""

from tests.estimate.bad_inputs import bad
from tests.estimate.good_folder import (
    a_folder_instead,
    content,
    correlations,
    in_turn,
    no_file,
    of_size,
    package,
    risk,
)

LINKS = (
    bad(
        "unknown_cause",
        package("P200", causes="steal:0.6"),
        (
            "packages.csv:3, package P200 Dome shell, causes",
            "id-unknown",
            'causes.csv has no cause "steal".',
        ),
    ),
    bad(
        "causes_file_missing",
        no_file("causes.csv"),
        (
            "packages.csv:3, package P200 Dome shell, causes",
            "id-unknown",
            'There is no causes.csv with the cause "steel".',
        ),
        (
            "packages.csv:3, package P200 Dome shell, causes",
            "id-unknown",
            'There is no causes.csv with the cause "site".',
        ),
        (
            "packages.csv:8, package P500 Wiring, causes",
            "id-unknown",
            'There is no causes.csv with the cause "steel".',
        ),
    ),
    bad(
        "cause_twice",
        package("P200", causes="steel:0.6; steel:0.1"),
        (
            "packages.csv:3, package P200 Dome shell, causes",
            "list-unclear",
            'The cause "steel" stands in the cell twice.',
        ),
    ),
    bad(
        "cause_without_load",
        package("P200", causes="steel"),
        (
            "packages.csv:3, package P200 Dome shell, causes",
            "list-unclear",
            'The entry "steel" is not of the form a:b.',
        ),
    ),
    bad(
        "load_beyond_one",
        package("P200", causes="steel:1.2"),
        (
            "packages.csv:3, package P200 Dome shell, causes",
            "load-out-of-range",
            "The load steel:1.2 lies outside -1 to 1.",
        ),
    ),
    bad(
        "load_no_number",
        package("P200", causes="steel:much"),
        (
            "packages.csv:3, package P200 Dome shell, causes",
            "not-a-number",
            '"much" is no figure.',
        ),
    ),
    bad(
        "loads_too_strong",
        package("P200", causes="steel:0.8; site:0.5"),
        (
            "packages.csv:3, package P200 Dome shell, causes",
            "loads-too-strong",
            (
                "The squares of the loads sum to 0.89; the general dependence is "
                "0.2; together they exceed 1."
            ),
        ),
    ),
    bad(
        "loads_and_correlations",
        content("correlations.csv", "a,b,correlation\nP100,P200,0.3\n"),
        (
            "correlations.csv",
            "loads-and-correlations",
            "packages.csv gives loads on causes, first on line 3.",
        ),
    ),
    bad(
        "pair_of_one",
        correlations(("P100", "P100", "0.3")),
        (
            "correlations.csv:2, pair P100 P100, b",
            "self-reference",
            'Both packages of the pair are "P100".',
        ),
    ),
    bad(
        "pair_twice",
        correlations(("P100", "P200", "0.3"), ("P200", "P100", "0.4")),
        (
            "correlations.csv:3, pair P200 P100, b",
            "pair-twice",
            "The pair also stands on line 2.",
        ),
    ),
    bad(
        "pair_with_an_unknown_package",
        correlations(("P100", "P900", "0.3")),
        (
            "correlations.csv:2, pair P100 P900, b",
            "id-unknown",
            'packages.csv has no package "P900".',
        ),
    ),
    bad(
        "correlation_beyond_one",
        correlations(("P100", "P200", "-1.5")),
        (
            "correlations.csv:2, pair P100 P200, correlation",
            "load-out-of-range",
            '"-1.5" lies outside -1 to 1.',
        ),
    ),
    bad(
        "correlation_blank",
        correlations(("P100", "P200", "")),
        (
            "correlations.csv:2, pair P100 P200, correlation",
            "cell-blank",
            "The cell correlation is blank.",
        ),
    ),
    bad(
        "applies_to_nothing_known",
        risk("S2", applies_to="Work; P310"),
        (
            "systemic.csv:3, systemic risk S2 Mountain work, applies_to",
            "id-unknown",
            'No group or package is called "Work".',
        ),
    ),
    bad(
        "applies_to_all_and_more",
        risk("S2", applies_to="all; P310"),
        (
            "systemic.csv:3, systemic risk S2 Mountain work, applies_to",
            "applies-to-unclear",
            "The word all stands beside others.",
        ),
    ),
    bad(
        "applies_to_twice",
        risk("S2", applies_to="P310; P310"),
        (
            "systemic.csv:3, systemic risk S2 Mountain work, applies_to",
            "applies-to-unclear",
            '"P310" stands in the cell twice.',
        ),
    ),
    bad(
        "group_named_like_a_package",
        in_turn(package("P400", group="P310"), risk("S2", applies_to="P310")),
        (
            "systemic.csv:3, systemic risk S2 Mountain work, applies_to",
            "applies-to-unclear",
            '"P310" is a group and the id of a package.',
        ),
    ),
    bad(
        "evidence_of_50_mb",
        of_size("hours.csv", 50),
        (
            "packages.csv:2, package P100 Design, basis",
            "file-too-large",
            '"hours.csv" has 50.0 MB; at most 32 are read.',
        ),
    ),
    bad(
        "evidence_missing",
        package("P100", basis="See file:hour.csv"),
        (
            "packages.csv:2, package P100 Design, basis",
            "evidence-missing",
            'The folder holds no file "hour.csv".',
        ),
    ),
    bad(
        "evidence_elsewhere",
        package("P100", basis="file:../hours.csv"),
        (
            "packages.csv:2, package P100 Design, basis",
            "evidence-name",
            'The file is named "../hours.csv".',
        ),
    ),
    bad(
        "evidence_a_folder",
        a_folder_instead("hours.csv"),
        (
            "packages.csv:2, package P100 Design, basis",
            "not-a-file",
            '"hours.csv" is a folder.',
        ),
    ),
    bad(
        "evidence_without_a_name",
        package("P100", basis="See file: hours"),
        (
            "packages.csv:2, package P100 Design, basis",
            "evidence-name",
            "No name stands right after file:.",
        ),
    ),
)
