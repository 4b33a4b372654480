"""prices.csv: price series, each a yearly rate with a range."""

from __future__ import annotations

from dataclasses import dataclass
from decimal import Decimal

from contingency.estimate.cells import HUNDRED, Figure
from contingency.estimate.evidence import COLUMNS as EVIDENCE
from contingency.estimate.evidence import read_evidence
from contingency.estimate.fault_list import Problem, shown
from contingency.estimate.faults import PercentMissing, RateTooLow
from contingency.estimate.folder import EstimateFolder
from contingency.estimate.nouns import CostRange, PriceSeries
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

LOWEST_SCORE = -8.3
"""Normal score below which no trial is ever drawn: ndtri(2**-54) is -8.29."""
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
            return Problem(RateTooLow, f"{text} leaves no price at all.", _REMEDY)
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
        if rate is None or not _stays_above_nothing(row, rate, ends):
            continue
        series.append(
            PriceSeries(
                id=series_id, name=name, rate=rate, evidence=evidence, line=row.line
            )
        )
    return tuple(series)


def _stays_above_nothing(row: Row, rate: CostRange, ends: EndsRule) -> bool:
    """Whether no draw of the rate takes the whole price away; notes if one does."""
    if not ends.is_readable and not row.cell("ends"):
        return True  # without a curve nothing can be said
    lowest = float(rate.distribution.at_score(LOWEST_SCORE))
    if lowest > -1.0:
        return True
    found = f"The lowest rate that this {rate.shape} range can give is "
    found += f"{100 * lowest:.4g} % a year."
    column = "outcomes" if rate.shape in LISTED else "low"
    remedy = "Narrow the range, or name a shape with limits."
    row.refuse(column, Problem(RateTooLow, found, remedy))
    return False
