"""The difference list: what an auditor reads cell by cell."""

from contingency.estimate.nouns import (
    AccountRule,
    ContingencyRule,
    CostRange,
    Evidence,
    Level,
    PairCorrelation,
    PriceSeries,
    ShapeName,
    Statements,
)
from contingency.tracking.cells import cells_of
from contingency.tracking.difference import differences
from contingency.tracking.matching import match
from tests.tracking.pairs import (
    DAY,
    EVENTS,
    PACKAGES,
    cause,
    change,
    estimate,
    event,
    load,
    package,
    with_row,
)


def listed(later):
    """What differs from the small estimate: (file, id, field, old, new)."""
    found = differences(match(estimate(), later))
    return {(d.file, d.id, d.field): (d.old, d.new) for d in found}


def test_cells_are_shown_as_the_file_has_them():
    """Percent stays percent, and only what differs is listed."""
    later = estimate(packages=with_row(PACKAGES, package("P2", 650.0, 0.9, 1.4)))

    assert listed(later) == {
        ("packages.csv", "P2", "base"): ("600", "650"),
        ("packages.csv", "P2", "high"): ("130%", "140%"),
    }


def test_ranges_without_a_file_are_shown_by_their_figures():
    """And the columns are those of the file."""
    row = event("E1", after_probability=0.1, use="after", after_impact=EVENTS[1].impact)
    cells = cells_of(row)

    assert (cells["low"], cells["likely"], cells["high"]) == ("60", "100", "180")
    assert cells["after_high"] == "540"
    assert cells["ends"] == "P10-P90"
    assert cells["packages"] == "project-wide:1"
    assert "id" not in cells
    assert "line" not in cells


def test_listed_outcomes_have_the_sign_of_their_shape():
    """An equals sign for points, a colon for discrete outcomes."""
    points = CostRange(shape=ShapeName.POINTS, outcomes=((5, 90.0), (95, 140.0)))
    discrete = CostRange(shape=ShapeName.DISCRETE, outcomes=((90.0, 0.5), (140.0, 0.5)))

    assert cells_of(package("P1", 1.0, cost=points))["outcomes"] == "5=90; 95=140"
    assert cells_of(package("P1", 1.0, cost=discrete))["outcomes"] == "90:0.5; 140:0.5"


def test_loads_evidence_and_answers_are_cells_too():
    """Everything that a reviewer may ask about."""
    basis = Evidence(basis="Offer", kind="data", given_by="PM", given_on=DAY)
    row = package("P2", 600.0, loads=(load("crew", -0.25),), evidence=basis)
    later = estimate(
        causes=(cause("crew"),),
        packages=with_row(PACKAGES, row.model_copy(update={"holds_allowance": False})),
    )

    assert listed(later) == {
        ("packages.csv", "P2", "causes"): ("", "crew:-0.25"),
        ("packages.csv", "P2", "basis"): ("", "Offer"),
        ("packages.csv", "P2", "basis_kind"): ("", "data"),
        ("packages.csv", "P2", "given_by"): ("", "PM"),
        ("packages.csv", "P2", "given_on"): ("", "2026-03-31"),
        ("packages.csv", "P2", "holds_allowance"): ("", "no"),
        ("causes.csv", "crew", "row"): ("", "crew"),
    }


def test_settings_have_dotted_keys():
    """Target, levels, statements, seed, pairs; what always differs is left out."""
    later = estimate(
        revision="B",
        previous="../rev-a",
        data_date=DAY.replace(month=7),
        contingency=ContingencyRule(
            target=90, levels=(Level(percent=90, holder="PM"),)
        ),
        general_dependence=0.4,
        statements=Statements(scope="More.", cautions=("Beware.",)),
        correlations=(PairCorrelation(a="P2", b="P1", correlation=0.5, line=2),),
        account_rule=AccountRule(),
    )

    assert listed(later) == {
        ("estimate.toml", "", "contingency.target"): ("80", "90"),
        ("estimate.toml", "", "contingency.levels P90.percent"): ("", "90"),
        ("estimate.toml", "", "contingency.levels P90.holder"): ("", "PM"),
        ("estimate.toml", "", "general_dependence"): ("0.2", "0.4"),
        ("estimate.toml", "", "statements.scope"): ("", "More."),
        ("estimate.toml", "", "statements.cautions 1"): ("", "Beware."),
        ("correlations.csv", "P1 and P2", "row"): ("", "there"),
    }


def test_a_reason_goes_to_the_keys_that_it_is_about():
    """A named key, a heading, what is computed from, or the price date."""
    later = estimate(
        contingency=ContingencyRule(target=90, reason="Single link"),
        general_dependence=0.4,
        gate="Gate 3",
        price_date=DAY.replace(year=2027),
        changes=(
            change(file="estimate", id="contingency", reason="Board."),
            change(file="estimate", reason="Six causes named.", line=3),
            change(
                file="estimate", family="prices", factor=1.1, reason="Index.", line=4
            ),
        ),
    )
    said = {d.field: d.reason for d in differences(match(estimate(), later))}

    assert said == {
        "contingency.target": "Board. Six causes named.",
        "contingency.reason": "Board.",
        "general_dependence": "Six causes named.",
        "gate": "",
        "price_date": "Index.",
    }


def test_rows_that_come_and_go_are_one_line_each():
    """With their names."""
    later = estimate(packages=(*PACKAGES[:2], package("P4", 50.0)))

    assert listed(later) == {
        ("packages.csv", "P4", "row"): ("", "Package P4"),
        ("packages.csv", "P3", "row"): ("Package P3", ""),
    }


def test_money_of_another_price_date_is_listed_as_it_was_written():
    """The list is about the files; the bridge restates."""
    later = estimate(
        price_date=DAY.replace(year=2027),
        changes=(change(file="estimate", family="prices", factor=1.1),),
    )

    assert listed(later) == {
        ("estimate.toml", "", "price_date"): ("2026-03-31", "2027-03-31")
    }


def test_price_series_and_the_financial_year_are_listed():
    """A new series as a row, a new month as a key of estimate.toml."""
    rate = CostRange(shape=ShapeName.FIXED, likely=0.03, written=("", "3%", "", ""))
    later = estimate().model_copy(
        update={
            "price_series": (PriceSeries(id="steel", name="Steel", rate=rate, line=2),),
            "financial_year_starts": 4,
        }
    )
    found = listed(later)

    assert ("prices.csv", "steel", "row") in found
    assert found["estimate.toml", "", "financial_year_starts"] == ("", "4")
