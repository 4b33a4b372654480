"""A small sound estimate, and hands to spoil it with.

`sound_estimate` trips no check.  Each test plants one fault in a copy of it.
"""

import dataclasses
import datetime as dt
from functools import cache

from contingency.assurance.findings import CheckOutcome, Finding
from contingency.assurance.robustness import Robustness, what_it_rests_on
from contingency.assurance.run import run_checks, run_input_checks
from contingency.estimate.nouns import (
    Answer,
    CommonCause,
    ContingencyRule,
    CostRange,
    Ends,
    Estimate,
    Evidence,
    Exclusion,
    Level,
    OutsideRule,
    PackageShare,
    RiskEvent,
    Run,
    ShapeName,
    SignOffLine,
    SourceFile,
    Statements,
    SystemicRisk,
    WorkPackage,
)
from contingency.study import Study, run_study

DAY = dt.date(2026, 3, 31)
"""Price date and data date."""
TENTHS = Ends(low_percent=10, high_percent=90)
EVIDENCE = Evidence(
    basis="three offers of January",
    kind="data",
    given_by="estimator",
    given_on=dt.date(2026, 1, 20),
)


def cost(low, likely, high, shape="pert", ends=TENTHS, **more):
    """A range of money or of fractions."""
    return CostRange(
        shape=ShapeName(shape), low=low, likely=likely, high=high, ends=ends, **more
    )


def package(id_, name, base, low, high, **more):
    """A package whose low and high are given as ratios of the base."""
    given = {"cost": cost(low * base, base, high * base), "evidence": EVIDENCE} | more
    return WorkPackage(id=id_, name=name, base=base, line=2, **given)


def event(id_, name, chance, low, likely, high, **more):
    """A threat on the whole project, with owner and evidence."""
    given = {
        "kind": "threat",
        "probability": chance,
        "impact": cost(low, likely, high),
        "shares": (PackageShare(package="project-wide", fraction=1.0),),
        "owner": "project manager",
        "evidence": EVIDENCE,
    } | more
    return RiskEvent(id=id_, name=name, line=2, **given)


def systemic(id_="S1", name="Definition of scope", **more):
    """A systemic risk that acts on every package."""
    given = {
        "uplift": cost(-0.03, 0.02, 0.15),
        "packages": tuple(p.id for p in PACKAGES),
        "evidence": EVIDENCE,
    } | more
    return SystemicRisk(id=id_, name=name, line=2, **given)


PACKAGES = (
    package("P1", "Dredging", 9_000_000, 0.92, 1.25, group="Works"),
    package("P2", "Quay wall", 14_000_000, 0.90, 1.30, group="Works"),
    package("P3", "Crane rails", 6_000_000, 0.94, 1.16, group="Works"),
    package("P4", "Switchgear", 5_000_000, 0.95, 1.22, group="Plant"),
    package("P5", "Owner team", 4_000_000, 0.93, 1.20, group="Team"),
    package("P6", "Commissioning", 2_000_000, 0.90, 1.35, group="Team"),
    package("P7", "Design", 3_000_000, 0.96, 1.28, group="Team"),
)

EVENTS = (
    event("R1", "Unknown wreck in the basin", 0.30, 600_000, 1_100_000, 2_600_000),
    event("R2", "Late delivery of rails", 0.45, 200_000, 500_000, 900_000),
    event("R3", "Storm during the piling season", 0.20, 300_000, 700_000, 1_900_000),
    event("R4", "Second crane test needed", 0.15, 100_000, 150_000, 400_000),
    event(
        "R5",
        "Reuse of the old fenders",
        0.35,
        200_000,
        300_000,
        500_000,
        kind="opportunity",
    ),
)

STATEMENTS = Statements(
    scope="One new quay with rails.",
    base="Priced bill of quantities.",
    exclusions=(
        Exclusion(
            id="X1",
            text="Land, utilities, taxes, third parties and later removal.",
            carried_by="port authority",
        ),
    ),
)

RULE = ContingencyRule(
    target=80,
    set_by="Capital policy of the board, 12 May 2025",
    reason="One project in a small programme.",
    rounding=50_000,
    levels=(
        Level(percent=50, purpose="Delivery target", holder="Project manager"),
        Level(percent=80, purpose="Approved funding", holder="Sponsor"),
    ),
)

SIGN_OFFS = (
    SignOffLine(role="prepared", name="A. Berg", position="Cost engineer"),
    SignOffLine(role="checked", name="C. Dahl", position="Reviewer"),
    SignOffLine(role="approved", name="E. Falk", position="Sponsor"),
)


ALIKE = {
    "stage": "estimates of gate 3",
    "money": "money of the gate's price date",
    "scope": "scope as approved at the gate",
}
OUTSIDE = OutsideRule(
    source="a published table", percentiles=((50, 0.12), (80, 0.27)), **ALIKE
)


def sound_estimate(**changes):
    """A fresh estimate that trips no check, with fields of your own."""
    given = {
        "project": "Quay extension",
        "revision": "A",
        "estimate_class": 3,
        "currency": "EUR",
        "price_date": DAY,
        "data_date": DAY,
        "contingency": RULE,
        "ends": TENTHS,
        "general_dependence": 0.25,
        "run": Run(seed=1, tolerance=0.01, least=16_384, most=16_384),
        "statements": STATEMENTS,
        "sign_offs": SIGN_OFFS,
        "packages": PACKAGES,
        "systemic": (systemic(),),
        "events": EVENTS,
        "outside_rule": OUTSIDE,
        "sources": (SourceFile(name="estimate.toml", content=b""),),
        "fingerprint": "0" * 64,
    } | changes
    return Estimate(**given)


def changed(rows, id_, **changes):
    """The rows with new fields in the one called `id_`."""
    assert any(row.id == id_ for row in rows)
    return tuple(
        row.model_copy(update=changes) if row.id == id_ else row for row in rows
    )


def with_package(id_, **changes):
    """The sound estimate with one package changed."""
    return sound_estimate(packages=changed(PACKAGES, id_, **changes))


def with_event(id_, **changes):
    """The sound estimate with one event changed."""
    return sound_estimate(events=changed(EVENTS, id_, **changes))


@cache
def sound_study() -> Study:
    """The study of the sound estimate; simulated once."""
    return run_study(sound_estimate())


def spoiled(**changes):
    """The sound study with other results."""
    return dataclasses.replace(sound_study(), **changes)


@cache
def rested() -> Robustness:
    """What the number of the sound study rests on."""
    return what_it_rests_on(sound_study())


def reseeded(issued):
    """The sound study, its issued contingency a quantile of those of fresh seeds."""
    seeds = rested().seeds
    amount = sorted(seeds.contingencies)[round(issued * 19)]
    test = dataclasses.replace(seeds, issued=amount)
    return spoiled(robustness=dataclasses.replace(rested(), seeds=test))


def findings_of(
    given: Estimate | Study,
) -> tuple[tuple[Finding, ...], tuple[CheckOutcome, ...]]:
    """Findings and outcomes of an estimate alone, or of a study."""
    if isinstance(given, Study):
        return run_checks(given)
    return run_input_checks(given)


def hits(slug, given):
    """The findings of one check."""
    return [finding for finding in findings_of(given)[0] if finding.check == slug]


def outcome(slug, given):
    """How one check ended."""
    return next(one for one in findings_of(given)[1] if one.check == slug)


def answered(check, where="", answer="Known and accepted."):
    """An answer to a check, or to one row of it."""
    return Answer(check=check, where=where, answer=answer, by="A. Berg", on=DAY)


def cause(id_, name):
    """A common cause."""
    return CommonCause(id=id_, name=name, line=2)
