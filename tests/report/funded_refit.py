"""The invented refit with spending windows and price series, for the funding table."""

import datetime as dt

from contingency.estimate.nouns import CostRange, Ends, Evidence, PriceSeries
from tests.report.ship_refit import ship_refit

SERIES = (
    PriceSeries(
        id="yard",
        name="Yard labour",
        rate=CostRange(
            shape="pert",
            low=0.01,
            likely=0.03,
            high=0.06,
            ends=Ends(low_percent=10, high_percent=90),
            written=("1%", "3%", "6%", ""),
        ),
        evidence=Evidence(
            basis="Wage rounds of ten years",
            kind="data",
            given_by="Cost lead",
            given_on=dt.date(2031, 4, 30),
        ),
        line=2,
    ),
    PriceSeries(
        id="engines",
        name="Engines",
        rate=CostRange(shape="fixed", likely=0.02, written=("", "2%", "", "")),
        line=3,
    ),
    PriceSeries(
        id="steel",
        name="Steel",
        rate=CostRange(
            shape="discrete",
            outcomes=((-0.02, 0.4), (0.05, 0.6)),
            written=("", "", "", "-2%:0.4; 5%:0.6"),
        ),
        evidence=Evidence(basis="Two market reports"),
        line=4,
    ),
)


def funded():
    """Three windows and three price series; the other packages follow them."""
    refit = ship_refit()
    windows = {
        "H100": (dt.date(2031, 9, 1), dt.date(2032, 5, 31), "early", "yard"),
        "H110": (dt.date(2032, 1, 1), dt.date(2033, 3, 31), "bell", "steel"),
        "M200": (dt.date(2032, 1, 1), dt.date(2032, 12, 31), None, "engines"),
        "S400": (None, None, None, "yard"),
    }
    packages = []
    for package in refit.packages:
        start, finish, spend, prices = windows.get(package.id, (None, None, None, ""))
        changes = {"start": start, "finish": finish, "spend": spend, "prices": prices}
        packages.append(package.model_copy(update=changes))
    return refit.model_copy(
        update={
            "packages": tuple(packages),
            "price_series": SERIES,
            "financial_year_starts": 4,
        }
    )
