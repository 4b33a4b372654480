"""prices.csv: price series, each a yearly rate with a range."""

from __future__ import annotations

from dataclasses import dataclass
from decimal import Decimal

from contingency.estimate.cells import HUNDRED, Figure
from contingency.estimate.evidence import COLUMNS as EVIDENCE
from contingency.estimate.evidence import read_evidence
from contingency.estimate.fault_list import Problem, shown
from contingency.estimate.faults import PercentMissing, RateOutOfRange
from contingency.estimate.folder import EstimateFolder
from contingency.estimate.nouns import CostRange, PriceSeries, ShapeName
from contingency.estimate.ranges import LISTED, EndsRule, read_range
from contingency.estimate.rows import Row
from contingency.estimate.tables import Layout, Table

LAYOUT = Layout(
    file="prices.csv",
    noun="price series",
    columns=(
        "id",
        "name",
        "low",
        "likely",
        "high",
        "ends",
        "shape",
        "outcomes",
        *EVIDENCE,
    ),
    required=("id", "name"),
)

FURTHEST_SCORE = 8.3
"""Normal score beyond which no trial is ever drawn: ndtri(2**-54) is -8.29."""
HIGHEST_RATE = 10.0
"""Yearly rate that is still read, a fraction.  A choice of ours: prices that grow by
more have no money of a price date, and powers of it leave what a float can hold."""
_REMEDY = "Write the change of prices in one year, in percent, above -100%."


@dataclass(frozen=True, slots=True)
class RateTerms:
    """Percent by which prices change in one year."""

    signed: bool = True
    has_default_likely: bool = False
    default_likely: None = None

    def number(self, figure: Figure) -> Decimal | Problem | None:
        """Return the yearly rate, a fraction."""
        text = shown(figure.text)
        if not figure.is_percent:
            found = f"{text} has no percent sign."
            rule = "A price rate is a percent of the prices of the year before."
            remedy = f"Write {figure.value.normalize():f}% if percent are meant."
            return Problem(PercentMissing, found, remedy, rule)
        if figure.value <= -HUNDRED:
            found = f"{text} leaves no price at all."
            return Problem(RateOutOfRange, found, _REMEDY)
        return figure.value / HUNDRED


def read_prices(
    table: Table, folder: EstimateFolder, ends: EndsRule
) -> tuple[PriceSeries, ...]:
    """Return the price series that could be read, in file order."""
    taken: dict[str, int] = {}
    series = []
    for row in table.rows:
        series_id = row.id(taken)
        name = row.text("name", needed="what the prices are of")
        rate = read_range(row, RateTerms(), ends)
        evidence = read_evidence(row, folder)
        if rate is None or not _stays_in_range(row, rate, ends):
            continue
        series.append(
            PriceSeries(
                id=series_id, name=name, rate=rate, evidence=evidence, line=row.line
            )
        )
    return tuple(series)


def _stays_in_range(row: Row, rate: CostRange, ends: EndsRule) -> bool:
    """Whether every draw of the rate leaves a price within reason; notes if not."""
    if not ends.is_readable and not row.cell("ends"):
        return True  # without a curve nothing can be said
    lowest, highest = (
        float(rate.distribution.at_score(score))
        for score in (-FURTHEST_SCORE, FURTHEST_SCORE)
    )
    if lowest > -1.0 and highest <= HIGHEST_RATE:
        return True
    found = f"This {rate.shape} range gives rates from {100 * lowest:,.5g} % to "
    found += f"{100 * highest:,.5g} % a year."
    column = "outcomes" if rate.shape in LISTED else "low"
    column = "likely" if rate.shape is ShapeName.FIXED else column
    remedy = "Correct the figures, narrow the range, or name a shape with limits."
    row.refuse(column, Problem(RateOutOfRange, found, remedy))
    return False
