"""Two revisions of one small estimate, made by hand."""

import datetime as dt

from contingency.estimate.nouns import (
    Change,
    CommonCause,
    ContingencyRule,
    CostRange,
    Ends,
    Estimate,
    Load,
    PackageShare,
    RiskEvent,
    Run,
    ShapeName,
    SystemicRisk,
    WorkPackage,
)

DAY = dt.date(2026, 3, 31)
TENTHS = Ends(low_percent=10, high_percent=90)
Z90 = 1.2815515655446004
"""Normal score of the highest tenth."""
RUN = Run(seed=7, tolerance=0.5, least=16_384, most=16_384)


def pert(low, likely, high, written=("", "", "", ""), **more):
    """A beta-PERT range between P10 and P90."""
    return CostRange(
        shape=ShapeName.PERT,
        low=low,
        likely=likely,
        high=high,
        ends=TENTHS,
        written=written,
        **more,
    )


def normal(mean, deviation):
    """A normal range by its mean and standard deviation."""
    return CostRange(
        shape=ShapeName.NORMAL,
        low=mean - Z90 * deviation,
        high=mean + Z90 * deviation,
        ends=TENTHS,
    )


def package(id_, base, low=0.9, high=1.3, **more):
    """A package with a range in percent of its base, or of what is left to spend."""
    spent = more.get("spent") or 0.0
    rest = base - spent
    cost = pert(
        spent + low * rest,
        spent + rest,
        spent + high * rest,
        (f"{100 * low:g}%", "", f"{100 * high:g}%", ""),
    )
    given = {"id": id_, "name": f"Package {id_}", "base": base, "cost": cost, "line": 2}
    return WorkPackage(**given | more)


def event(id_, chance=0.3, likely=100.0, **more):
    """A threat on the whole project."""
    given = {
        "id": id_,
        "name": f"Event {id_}",
        "kind": "threat",
        "probability": chance,
        "impact": pert(0.6 * likely, likely, 1.8 * likely),
        "shares": (PackageShare(package="project-wide", fraction=1.0),),
        "line": 2,
    }
    return RiskEvent(**given | more)


def systemic(id_="S1", high=0.12, packages=("P1", "P2", "P3"), **more):
    """A systemic risk."""
    return SystemicRisk(
        id=id_,
        name=f"Systemic {id_}",
        uplift=pert(-0.02, 0.01, high),
        packages=packages,
        line=2,
        **more,
    )


def cause(id_):
    """A common cause."""
    return CommonCause(id=id_, name=id_, line=2)


def load(cause_, weight):
    """A load on a common cause."""
    return Load(cause=cause_, weight=weight)


def change(**more):
    """A line of changes.csv."""
    return Change(**{"reason": "It was so.", "by": "Lead", "line": 2} | more)


PACKAGES = (package("P1", 1000.0), package("P2", 600.0), package("P3", 400.0))
EVENTS = (event("E1"), event("E2", 0.1, 300.0))


def estimate(**changes):
    """A small estimate at P80."""
    given = {
        "project": "Two revisions",
        "revision": "A",
        "currency": "EUR",
        "price_date": DAY,
        "data_date": DAY,
        "contingency": ContingencyRule(target=80),
        "ends": TENTHS,
        "general_dependence": 0.2,
        "run": RUN,
        "packages": PACKAGES,
        "systemic": (systemic(),),
        "events": EVENTS,
    }
    return Estimate(**given | changes)


def with_row(rows, new):
    """Rows with one put in the place of the one with its id, or added."""
    if any(row.id == new.id for row in rows):
        return tuple(new if row.id == new.id else row for row in rows)
    return (*rows, new)


def without_row(rows, id_):
    """Rows without the one of that id."""
    return tuple(row for row in rows if row.id != id_)
