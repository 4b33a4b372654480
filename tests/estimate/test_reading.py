"""A good folder is read column by column, whatever dialect it is written in."""

import datetime as dt

import pytest

from contingency.errors import UnusableEstimate
from contingency.estimate.nouns import Ends, PackageShare, ShapeName
from contingency.estimate.reading import LAYOUTS, read_estimate
from tests.estimate.good_folder import (
    EVIDENCE,
    TABLES,
    content,
    correlations,
    event,
    in_turn,
    package,
    risk,
    setting,
    swap,
    with_line_ends,
    with_mark,
    with_semicolons,
    write_good,
)


@pytest.fixture
def folder(tmp_path):
    """A good estimate folder."""
    return write_good(tmp_path / "estimate")


@pytest.fixture(scope="module")
def good(tmp_path_factory):
    """The good folder as it is read."""
    return read_estimate(write_good(tmp_path_factory.mktemp("good") / "estimate"))


def read_with(folder, *edits):
    """The estimate after some edits."""
    in_turn(*edits)(folder)
    return read_estimate(folder)


def range_of(estimate, package_id):
    """The range of one package."""
    return estimate.find_package(package_id).cost


def event_of(estimate, event_id):
    """One event."""
    return next(e for e in estimate.events if e.id == event_id)


def test_the_good_folder_fills_every_column():
    """What the tests below read is all that there is to read."""
    for layout in LAYOUTS:
        if layout.file in TABLES:
            filled = {c for row in TABLES[layout.file] for c in row if row[c]}
            assert set(layout.columns) - filled <= {
                "after_probability",
                "outcomes",
                "model",  # read in test_outside_files.py
            }


def test_every_setting_is_read(good):
    """estimate.toml, heading by heading."""
    assert good.project == "Hill observatory dome"
    assert good.revision == "B"
    assert good.previous == "../rev-a"
    assert good.gate == "Gate 3"
    assert good.estimate_class == 3
    assert good.currency == "EUR"
    assert good.price_date == dt.date(2026, 3, 31)
    assert good.data_date == dt.date(2026, 4, 15)
    assert good.owner == "Sky Trust"
    assert good.request_base == 3e6
    assert good.requested_total == 3.9e6
    assert good.budget_cap == 4.5e6
    rule = good.contingency
    assert (rule.target, rule.set_by, rule.reason) == (80, "Policy 4", "A single dome")
    assert rule.rounding == 1000.0
    assert [(x.percent, x.purpose, x.holder) for x in rule.levels] == [
        (50, "Delivery", "Manager"),
        (80, "Funding", "Sponsor"),
        (5, "Floor", "Nobody"),
    ]
    assert good.ends == Ends(low_percent=10, high_percent=90)
    assert good.general_dependence == 0.2
    assert (good.run.seed, good.run.tolerance) == (7, 0.002)
    assert (good.run.least, good.run.most) == (8192, 65_536)


def test_every_statement_is_read(good):
    """Scope, base, assumptions, exclusions, cautions, sign-off block, answers."""
    said = good.statements
    assert said.scope == "Dome, drive and pier."
    assert said.base == "Measured in March 2026."
    (assumption,) = said.assumptions
    assert (assumption.id, assumption.text) == ("A1", "One year.")
    assert (assumption.holder, assumption.effect) == ("PM", "S")
    assert assumption.expires == dt.date(2026, 12, 31)
    (exclusion,) = said.exclusions
    assert (exclusion.id, exclusion.text) == ("X1", "The telescope.")
    assert (exclusion.carried_by, exclusion.size) == ("University", "2 M")
    assert said.cautions == ("All made up.", "Twice made up.")
    assert [(s.role, s.name, s.position) for s in good.sign_offs] == [
        ("prepared", "A. Person", "Engineer"),
        ("checked", "", ""),
        ("approved", "", ""),
    ]
    (answer,) = good.answers
    assert (answer.check, answer.where) == ("mirrored-ranges", "P200")
    assert (answer.answer, answer.by) == ("The makers said so.", "A. Person")
    assert answer.on == dt.date(2026, 4, 16)
    assert good.assurance == {
        "some_threshold": 0.4,
        "some_switch": True,
        "some_words": "a; b",
    }


def test_every_column_of_a_package_is_read(good):
    """P100 fills what the other packages leave blank."""
    design = good.packages[0]
    assert (design.id, design.name, design.group) == ("P100", "Design", "Office")
    assert (design.base, design.spent) == (200_000.0, 50_000.0)
    # Percent of the 150,000 that is left, on top of the 50,000 that is spent.
    assert (design.cost.low, design.cost.high) == (185_000.0, 245_000.0)
    assert design.cost.likely == 200_000.0
    assert design.cost.ends == Ends(low_percent=5, high_percent=95)
    assert design.cost.written == ("90%", "", "130%", "")
    assert (design.start, design.finish) == (dt.date(2026, 1, 5), dt.date(2026, 9, 30))
    assert (design.spend, design.prices) == ("early", "wages")
    assert (design.price_basis, design.price_date) == (
        "constant",
        dt.date(2026, 3, 31),
    )
    assert design.holds_allowance is False
    assert design.progress == 0.25
    assert design.evidence.basis == "Hours of two domes: file:hours.csv."
    assert (design.evidence.kind, design.evidence.given_by) == ("data", "Design lead")
    assert design.evidence.given_on == dt.date(2026, 4, 2)
    assert design.evidence.is_complete
    assert design.line == 2
    assert good.base == 2_400_000.0


def test_every_shape_is_read(good):
    """Figures, ends and outcomes of each shape."""
    shell = range_of(good, "P200")
    assert shell.shape is ShapeName.TRIANGULAR
    assert (shell.low, shell.likely, shell.high) == (1.1e6, 1.26e6, 1_500_000.5)
    assert shell.ends == Ends(low_percent=10, high_percent=90)
    drive = range_of(good, "P210")
    assert drive.shape is ShapeName.DISCRETE
    assert drive.outcomes == ((380_000.0, 0.3), (400_000.0, 0.5), (520_000.0, 0.2))
    assert drive.written == ("", "", "", "95%:0.3; 100%:50%; 520000:0.2")
    pier = range_of(good, "P300")
    assert pier.outcomes == ((5.0, 276_000.0), (50.0, 312_000.0), (95.0, 420_000.0))
    road = range_of(good, "P310")
    assert (road.low, road.likely, road.high) == (120_000.0, None, 200_000.0)
    assert road.ends.are_limits
    permit = range_of(good, "P400")
    assert (permit.likely, permit.varies) == (10_000.0, False)
    wiring = range_of(good, "P500")
    assert (wiring.low, wiring.likely, wiring.high) == (72_000.0, None, 135_000.0)


def test_loads_on_causes_are_read(good):
    """Each with its sign, in the order of the cell."""
    shell = good.find_package("P200")
    assert [(load.cause, load.weight) for load in shell.loads] == [
        ("steel", 0.6),
        ("site", -0.3),
    ]
    assert [(c.id, c.name, c.basis) for c in good.causes] == [
        ("steel", "Price of steel", "One market"),
        ("site", "Site conditions", "One hill"),
    ]


def test_every_column_of_a_systemic_risk_is_read(good):
    """Fractions of the cost, negative ones too; groups and packages in file order."""
    definition, mountain = good.systemic
    assert (definition.id, definition.name) == ("S1", "Definition")
    assert (definition.uplift.low, definition.uplift.likely) == (-0.02, 0.03)
    assert definition.uplift.high == 0.1
    assert definition.uplift.written == ("-2%", "3%", "+10%", "")
    assert definition.packages == tuple(p.id for p in good.packages)
    assert definition.applies_to == ("all",)
    assert (definition.cause, definition.covers) == ("scope", "Items not drawn")
    assert definition.evidence.kind == "analogue"
    assert mountain.uplift.outcomes == ((0.0, 0.5), (0.08, 0.5))
    assert mountain.packages == ("P200", "P210", "P310")
    assert mountain.applies_to == ("Works", "P310")


def test_every_column_of_an_event_is_read(good):
    """E1 fills what the other events leave blank; percents are of the whole base."""
    storm = event_of(good, "E1")
    assert (storm.name, storm.kind) == ("Storm on the hill", "threat")
    assert (storm.happens, storm.frequency) == ("repeatedly", 1.5)
    assert storm.probability is None
    assert (storm.impact.low, storm.impact.likely) == (24_000.0, 30_000.0)
    assert storm.impact.high == 60_000.0
    assert storm.shares == (
        PackageShare(package="P200", fraction=0.6),
        PackageShare(package="P310", fraction=0.4),
    )
    assert storm.status == "open"
    assert storm.window_start == dt.date(2026, 5, 1)
    assert storm.window_finish == dt.date(2026, 10, 31)
    assert (storm.owner, storm.response) == ("Site", "Anchors")
    assert (storm.response_cost, storm.response_package) == (5_000.0, "P200")
    assert storm.response_due == dt.date(2026, 4, 30)
    assert storm.response_owner == "Site lead"
    assert (storm.after_probability, storm.after_frequency) == (None, 0.5)
    assert storm.after_impact.low == 10_000.0
    assert storm.after_impact.likely == 15_000.0
    assert storm.after_impact.high == 40_000.0
    assert storm.after_impact.written == ("10000", "15000", "40000", "")
    assert (storm.use, storm.cause) == ("after", "weather")
    assert storm.frequency_used == 0.5
    assert storm.impact_used is storm.after_impact
    assert (storm.contract, storm.retained_share) == ("shared", 0.6)
    assert (storm.clause, storm.in_scope) == ("12.3", True)
    assert storm.reviewed_on == dt.date(2026, 4, 1)
    assert storm.next_review == dt.date(2026, 7, 1)
    assert storm.held_by == "Sponsor"
    assert storm.evidence.basis == "Station records"


def test_ties_of_events_are_read(good):
    """What it requires as written; excludes both ways, whichever row says it."""
    assert event_of(good, "E4").requires == "E2"
    assert event_of(good, "E2").excludes == ("E3",)
    assert event_of(good, "E3").excludes == ("E2",)
    assert event_of(good, "E3").shares == (PackageShare(package="P300", fraction=1.0),)
    assert event_of(good, "E4").shares == (
        PackageShare(package="project-wide", fraction=1.0),
    )
    assert [e.id for e in good.open_events] == ["E1", "E2", "E3", "E4"]
    assert event_of(good, "E5").impact is None


def test_three_events_may_exclude_each_other(folder):
    """Two of the three rows need not repeat what the third says."""
    estimate = read_with(
        folder,
        event("E2", excludes="E3; E4", probability="0.3"),
        event("E3", excludes=""),
        event("E4", excludes="E3", requires="", probability="0.5"),
    )

    assert event_of(estimate, "E3").excludes == ("E2", "E4")
    assert event_of(estimate, "E4").excludes == ("E2", "E3")


def test_correlations_are_read(folder):
    """Pairs instead of loads."""
    estimate = read_with(folder, correlations(("P100", "P200", "0.35")))

    (pair,) = estimate.correlations
    assert (pair.a, pair.b, pair.correlation) == ("P100", "P200", 0.35)


def test_what_is_not_said_has_its_default(tmp_path):
    """The smallest estimate: two files, five keys and a level."""
    folder = tmp_path / "small"
    folder.mkdir()
    content(
        "estimate.toml",
        "[estimate]\nproject = 'S'\nrevision = '1'\ncurrency = 'CHF'\n"
        "price_date = 2026-01-01\ndata_date = 2026-01-01\n"
        "[contingency]\ntarget = 'P80'\n[simulation]\nseed = 0\n",
    )(folder)
    content("packages.csv", "id,name,base,low,high\nA,Only,100,90%,150%\n")(folder)

    small = read_estimate(folder)

    assert (small.contingency.levels, small.contingency.rounding) == ((), 1.0)
    assert (small.run.seed, small.run.tolerance) == (0, 0.001)
    assert (small.run.least, small.run.most) == (65_536, 1_048_576)
    assert small.ends is None
    assert small.general_dependence is None
    assert small.packages[0].cost.ends.are_limits
    assert small.packages[0].cost.ends_stated is False
    assert (small.systemic, small.events, small.causes) == ((), (), ())


def test_ends_of_a_row_are_stated_even_if_the_folder_says_nothing(folder):
    """Only rows that rest on [ranges] are in doubt."""
    estimate = read_with(
        folder, setting('ends = "P10-P90"\n', ""), package("P500", ends="P05-P95")
    )

    assert range_of(estimate, "P500").ends_stated
    assert range_of(estimate, "P310").ends_stated
    assert not range_of(estimate, "P200").ends_stated


def test_percentiles_may_have_one_digit(folder):
    """P5 is P05."""
    estimate = read_with(folder, package("P100", ends="P5-P95"))

    assert str(range_of(estimate, "P100").ends) == "P05-P95"


def test_figures_may_be_equal(folder):
    """A range of equal figures is a range without spread, read as it is."""
    estimate = read_with(folder, package("P200", low="5", likely="5", high="5"))

    assert range_of(estimate, "P200").low == 5.0
    assert not range_of(estimate, "P200").varies


def test_more_may_be_spent_than_the_base_if_the_range_lies_above(folder):
    """An overrun that has already happened."""
    estimate = read_with(
        folder, package("P200", spent="1300000", low="1300000", likely="1400000")
    )

    assert estimate.find_package("P200").spent == 1_300_000.0


def test_outcomes_after_treatment_are_those_before(folder):
    """There is no column for others; the chance alone falls."""
    estimate = read_with(
        folder,
        event(
            "E2",
            shape="discrete",
            outcomes="10000:0.5; 30000:0.5",
            low="",
            likely="",
            high="",
            after_probability="10%",
            use="after",
        ),
    )

    treated = event_of(estimate, "E2")
    assert treated.after_impact.outcomes == treated.impact.outcomes
    assert treated.probability_used == 0.1


def test_a_closed_event_may_keep_its_figures(folder):
    """What was thought of it stays on record."""
    estimate = read_with(
        folder, event("E6", probability="5%", low="1", likely="2", high="3")
    )

    assert event_of(estimate, "E6").impact.likely == 2.0


def test_everything_that_was_read_is_kept_byte_for_byte(folder):
    """The report attaches these, evidence included."""
    content("notes.txt", b"not asked for")(folder)

    estimate = read_estimate(folder)

    assert [source.name for source in estimate.sources] == [
        "causes.csv",
        "estimate.toml",
        "events.csv",
        "hours.csv",
        "packages.csv",
        "prices.csv",
        "systemic.csv",
    ]
    for source in estimate.sources:
        assert source.content == (folder / source.name).read_bytes()
    assert EVIDENCE["hours.csv"] in [source.content for source in estimate.sources]


@pytest.mark.parametrize(
    "dialect",
    [
        in_turn(*(with_mark(file) for file in (*TABLES, "estimate.toml"))),
        in_turn(*(with_line_ends(file, "\r\n") for file in (*TABLES, "estimate.toml"))),
        in_turn(*(with_line_ends(file, "\r") for file in TABLES)),
        in_turn(*(with_semicolons(file) for file in TABLES)),
        swap("packages.csv", "P400,Permit", '"P400"," Permit "'),
        swap("packages.csv", "P400,Permit", "# a comment, of two cells\nP400,Permit"),
        swap("packages.csv", "P400,Permit", "#\n\nP400,Permit"),
        swap("packages.csv", "id,name", "# at the head; of the file\nid,name"),
        swap(
            "packages.csv",
            "P400,Permit",
            '"# a comment, as a spreadsheet saves it"' + "," * 23 + "\nP400,Permit",
        ),
        swap("packages.csv", "1_250_000", '"1,250,000"'),
        swap("packages.csv", "1_250_000", "1250000.00"),
        swap("packages.csv", "95%:0.3; 100%:50%", "95 %:30%;100%: 0.50"),
    ],
    ids=[
        "byte-order marks",
        "Windows line ends",
        "old line ends",
        "semicolons",
        "quotes and spaces",
        "comment",
        "blank line",
        "comment above the header",
        "comment in quotes",
        "grouped thousands",
        "noughts",
        "spacing of outcomes",
    ],
)
def test_the_dialect_changes_nothing(dialect, folder, good):
    """What is meant is read, and has the same fingerprint but for written cells."""
    dialect(folder)

    estimate = read_estimate(folder)

    assert estimate.packages[1].base == good.packages[1].base
    assert [p.cost.distribution for p in estimate.packages] == [
        p.cost.distribution for p in good.packages
    ]
    assert [e.id for e in estimate.events] == [e.id for e in good.events]


def test_a_trailing_blank_column_holds_nothing(folder):
    """Spreadsheets leave separators at the end of every row."""
    text = (folder / "causes.csv").read_text(encoding="utf-8")
    content("causes.csv", text.replace("\n", ",,\n"))(folder)

    assert len(read_estimate(folder).causes) == 2


def test_columns_may_come_in_any_order(folder, good):
    """Cells are found by name."""
    lines = (folder / "causes.csv").read_text(encoding="utf-8").splitlines()
    turned = [",".join(reversed(line.split(","))) for line in lines]
    content("causes.csv", "\n".join(turned))(folder)

    assert read_estimate(folder).causes == good.causes


def test_the_base_of_a_risk_says_what_percent_of_an_event_means(folder):
    """An event's percent follows the base of the project."""
    before = event_of(read_estimate(folder), "E1").impact.low
    after = event_of(read_with(folder, package("P400", base="210000")), "E1")

    assert before == 24_000.0
    assert after.impact.low == 26_000.0


def test_a_systemic_risk_on_everything_needs_no_word(folder):
    """Blank is all."""
    estimate = read_with(folder, risk("S1", applies_to=""))

    assert estimate.systemic[0].applies_to == ("all",)


def test_a_string_is_a_path_too(folder):
    """`read_estimate("folder")` is what a notebook types."""
    assert read_estimate(str(folder)).revision == "B"
    with pytest.raises(UnusableEstimate):
        read_estimate(str(folder) + "-that-is-not-there")


def test_price_series_are_read_with_their_rates(folder):
    """Rates are fractions a year; a package names its series."""
    wages, metal = read_estimate(folder).price_series

    assert (wages.id, wages.name) == ("wages", "Engineers' wages")
    assert (wages.rate.low, wages.rate.likely, wages.rate.high) == (0.015, 0.025, 0.04)
    assert wages.evidence.is_complete
    assert metal.rate.outcomes == ((-0.01, 0.25), (0.02, 0.5), (0.06, 0.25))


def test_a_year_is_a_calendar_year_unless_it_is_said(folder):
    """None where nothing is said, so that old fingerprints stand."""
    assert read_estimate(folder).financial_year_starts is None

    setting("class = 3", "class = 3\nfinancial_year_starts = 4")(folder)

    assert read_estimate(folder).financial_year_starts == 4
