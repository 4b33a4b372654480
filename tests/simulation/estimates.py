"""Small estimates made in code, for tests of the simulation and of what follows."""

from __future__ import annotations

import datetime as dt
from typing import Any

from contingency.estimate.nouns import (
    PROJECT_WIDE,
    CommonCause,
    ContingencyRule,
    CostRange,
    Ends,
    Estimate,
    Level,
    Load,
    PackageShare,
    PairCorrelation,
    RiskEvent,
    Run,
    SystemicRisk,
    WorkPackage,
)

DAY = dt.date(2026, 3, 31)
P10_P90 = Ends(low_percent=10, high_percent=90)


def cost_range(
    low: float | None = None,
    likely: float | None = None,
    high: float | None = None,
    *,
    shape: str = "pert",
    ends: Ends | None = None,
    outcomes: tuple[tuple[float, float], ...] = (),
) -> CostRange:
    """A range; normal and lognormal read their ends as P10 and P90."""
    unbounded = shape in ("normal", "lognormal")
    return CostRange(
        shape=shape,
        low=low,
        likely=likely,
        high=high,
        ends=ends or (P10_P90 if unbounded else Ends()),
        outcomes=outcomes,
    )


def package(
    name: str, cost: CostRange | None = None, *, base: float = 100.0, **more: Any
) -> WorkPackage:
    """A package with its base; without a range it is fixed at its base."""
    loads = tuple(
        Load(cause=cause, weight=weight)
        for cause, weight in more.pop("loads", {}).items()
    )
    return WorkPackage(
        id=name,
        name=f"Package {name}",
        base=base,
        cost=cost or cost_range(likely=base, shape="fixed"),
        loads=loads,
        line=2,
        **more,
    )


def event(
    name: str, probability: float | None, impact: CostRange, **more: Any
) -> RiskEvent:
    """An event; `packages` maps package ids to fractions, none is project-wide."""
    shares = more.pop("packages", {PROJECT_WIDE: 1.0})
    return RiskEvent(
        id=name,
        name=f"Event {name}",
        kind=more.pop("kind", "threat"),
        probability=probability,
        impact=impact,
        shares=tuple(PackageShare(package=p, fraction=f) for p, f in shares.items()),
        line=2,
        **more,
    )


def exact(value: float) -> CostRange:
    """An impact that is known."""
    return cost_range(likely=value, shape="fixed")


def systemic(name: str, uplift: CostRange, packages: tuple[str, ...]) -> SystemicRisk:
    """A systemic risk on the packages named."""
    return SystemicRisk(
        id=name, name=f"Systemic {name}", uplift=uplift, packages=packages, line=2
    )


def cause(name: str) -> CommonCause:
    """A common cause."""
    return CommonCause(id=name, name=f"Cause {name}", line=2)


def pair(a: str, b: str, correlation: float) -> PairCorrelation:
    """A rank correlation between two packages."""
    return PairCorrelation(a=a, b=b, correlation=correlation, line=2)


def estimate(
    packages: list[WorkPackage],
    events: tuple[RiskEvent, ...] = (),
    *,
    target: int = 80,
    trials: int = 65_536,
    seed: int = 1,
    **more: Any,
) -> Estimate:
    """An estimate that runs exactly `trials` trials unless `run` says otherwise."""
    run = more.pop("run", Run(seed=seed, tolerance=1.0, least=trials, most=trials))
    return Estimate(
        project="A made-up project",
        revision="A",
        currency="EUR",
        price_date=DAY,
        data_date=DAY,
        contingency=ContingencyRule(
            target=target,
            levels=tuple(Level(percent=p) for p in (50, 80, 90)),
        ),
        ends=Ends(),
        general_dependence=more.pop("general_dependence", 0.0),
        run=run,
        packages=tuple(packages),
        events=tuple(events),
        **more,
    )


def a_bit_of_everything(**more: Any) -> Estimate:
    """Every shape and every kind of event in one small estimate."""
    packages = [
        package("A", cost_range(80, 100, 150)),
        package("B", cost_range(90, 100, 130, shape="triangular"), loads={"c1": 0.6}),
        package("C", cost_range(80, None, 140, shape="lognormal"), loads={"c1": 0.4}),
        package("D", cost_range(80, None, 120, shape="normal"), loads={"c2": -0.5}),
        package("E", cost_range(90, None, 130, shape="uniform")),
        package(
            "F",
            cost_range(shape="points", outcomes=((5, 92.0), (50, 104.0), (95, 140.0))),
        ),
        package(
            "G",
            cost_range(shape="discrete", outcomes=((95, 0.3), (100, 0.5), (130, 0.2))),
        ),
        package("H"),
    ]
    events = (
        event("R1", 0.3, cost_range(20, 40, 90), packages={"A": 0.6, "B": 0.4}),
        event("R2", 0.5, exact(30.0), requires="R1"),
        event("R3", 0.2, cost_range(10, 20, 60), excludes=("R4",)),
        event("R4", 0.4, exact(15.0), excludes=("R3",), packages={"D": 1.0}),
        event("R5", None, cost_range(2, 5, 12), happens="repeatedly", frequency=1.7),
        event("R6", 0.25, cost_range(10, 20, 40), kind="opportunity"),
        event("R7", 0.9, exact(1000.0), status="closed"),
    )
    risks = (
        systemic("S1", cost_range(-0.02, 0.03, 0.12), tuple("ABCDEFGH")),
        systemic("S2", cost_range(0.0, 0.05, 0.1, shape="triangular"), ("A", "C")),
    )
    more.setdefault("general_dependence", 0.2)
    return estimate(
        packages, events, systemic=risks, causes=(cause("c1"), cause("c2")), **more
    )
