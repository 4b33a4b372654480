"""Planted faults and clean twins: the base estimate, prices and ages."""

import datetime as dt

from contingency.estimate.nouns import Exclusion, Load
from tests.assurance.builder import (
    DAY,
    EVENTS,
    EVIDENCE,
    PACKAGES,
    STATEMENTS,
    cause,
    changed,
    cost,
    event,
    package,
    sound_estimate,
    spoiled,
    systemic,
    with_event,
    with_package,
)
from tests.assurance.case import fault, twin

BASIS = EVIDENCE.model_copy
RESERVE = package("P8", "Management reserve", 1_000_000, 0.9, 1.2)
BACKUP = package("P8", "Contingency power supply", 1_000_000, 0.9, 1.2)


def with_exclusion(text, id_="X2"):
    """The statements with one more exclusion."""
    more = Exclusion(id=id_, text=text, carried_by="owner")
    exclusions = (*STATEMENTS.exclusions, more)
    return STATEMENTS.model_copy(update={"exclusions": exclusions})


def spent(amount, progress=None, **more):
    """P2, base 14 M, with an actual cost."""
    return with_package("P2", spent=amount, progress=progress, **more)


CASES = (
    fault(
        "contingency-as-input",
        "a reserve among the packages",
        lambda: sound_estimate(packages=(*PACKAGES, RESERVE)),
        "stop",
        "EUR 1.00 M",
        where="P8",
    ),
    fault(
        "contingency-as-input",
        "declared to be work",
        lambda: sound_estimate(
            packages=(
                *PACKAGES,
                BACKUP.model_copy(update={"holds_allowance": False}),
            )
        ),
        "major",
        "contingency by its name",
        where="P8",
    ),
    twin(
        "contingency-as-input",
        "reserve pumps",
        lambda: with_package("P3", name="Reserve pumps"),
    ),
    fault(
        "allowance-in-base",
        "declared",
        lambda: with_package("P4", holds_allowance=True),
        "major",
        "holds_allowance says yes",
        where="P4",
    ),
    fault(
        "allowance-in-base",
        "in the name",
        lambda: with_package("P4", name="Switchgear and design development"),
        "major",
        "design development",
        where="P4",
    ),
    fault(
        "allowance-in-base",
        "in the basis",
        lambda: with_package(
            "P4", evidence=BASIS(update={"basis": "offer with 5 % allowance"})
        ),
        "major",
        "allowance",
        where="P4",
    ),
    twin(
        "allowance-in-base",
        "explained",
        lambda: with_package(
            "P4", name="Risk management office", holds_allowance=False
        ),
    ),
    fault(
        "base-on-the-curve",
        "padded",
        lambda: spoiled(chance_base_is_enough=0.62),
        "major",
        "62.0 %",
    ),
    fault(
        "base-on-the-curve",
        "next to impossible",
        lambda: spoiled(chance_base_is_enough=0.004),
        "caution",
        "0.4 %",
    ),
    twin(
        "base-on-the-curve", "at the limit", lambda: spoiled(chance_base_is_enough=0.5)
    ),
    fault(
        "spent-still-uncertain",
        "done but ranged",
        lambda: spent(13_000_000, 1.0),
        "major",
        "the work is done",
        where="P2",
    ),
    fault(
        "spent-still-uncertain",
        "begun without actuals",
        lambda: spent(None, 0.4),
        "major",
        "40 % of the work is done",
        where="P2",
    ),
    fault(
        "spent-still-uncertain",
        "range below the actuals",
        lambda: spent(13_500_000),
        "major",
        "EUR 13.5 M is spent already",
        where="P2",
    ),
    fault(
        "spent-still-uncertain",
        "more spent than expected",
        lambda: spent(15_000_000, cost=cost(None, 15_000_000, None, shape="fixed")),
        "major",
        "nothing more is expected",
        where="P2",
    ),
    twin("spent-still-uncertain", "rest varies", lambda: spent(4_000_000, 0.3)),
    fault(
        "cost-not-covered",
        "part left out",
        lambda: sound_estimate(request_base=50_000_000),
        "major",
        "EUR 7.00 M is not covered",
    ),
    fault(
        "cost-not-covered",
        "more than is asked for",
        lambda: sound_estimate(request_base=40_000_000),
        "major",
        "not in the request",
    ),
    twin(
        "cost-not-covered",
        "nearly all",
        lambda: sound_estimate(request_base=43_400_000),
    ),
    fault(
        "cost-families-silent",
        "no word of removal or of land",
        lambda: sound_estimate(
            statements=STATEMENTS.model_copy(update={"exclusions": ()})
        ),
        "caution",
        "land, utilities, third party, tax, closure",
    ),
    twin("cost-families-silent", "all named", sound_estimate),
    fault(
        "mixed-price-bases",
        "outturn money",
        lambda: with_package("P1", price_basis="outturn"),
        "stop",
        "P1 (outturn money)",
        rows=("P1",),
    ),
    fault(
        "mixed-price-bases",
        "another day",
        lambda: with_package("P1", price_date=dt.date(2024, 1, 1)),
        "stop",
        "money of 2024-01-01",
        rows=("P1",),
    ),
    twin(
        "mixed-price-bases",
        "stated and alike",
        lambda: with_package("P1", price_basis="constant", price_date=DAY),
    ),
    fault(
        "price-growth-twice",
        "price series and event",
        lambda: sound_estimate(
            packages=changed(PACKAGES, "P3", prices="steel"),
            events=(*EVENTS, event("R6", "Steel inflation", 0.3, 1e5, 2e5, 4e5)),
        ),
        "major",
        "the price series steel and in event R6",
        where="R6",
    ),
    fault(
        "price-growth-twice",
        "cause and systemic risk",
        lambda: sound_estimate(
            causes=(cause("mk", "market"),),
            packages=changed(PACKAGES, "P3", loads=(Load(cause="mk", weight=0.4),)),
            systemic=(systemic(name="Tender market"),),
        ),
        "major",
        "the range of P3 Crane rails and in systemic risk S1",
        where="S1",
    ),
    fault(
        "price-growth-twice",
        "excluded and in the basis of a range",
        lambda: sound_estimate(
            statements=with_exclusion("Escalation after the price date."),
            packages=changed(
                PACKAGES, "P5", evidence=BASIS(update={"basis": "with wage indexation"})
            ),
        ),
        "major",
        "exclusion X2 and in the range of P5",
        where="P5",
    ),
    twin(
        "price-growth-twice",
        "reconciled",
        lambda: sound_estimate(
            packages=changed(PACKAGES, "P3", prices="steel"),
            systemic=(systemic(name="Tender market", covers="number of bidders"),),
        ),
    ),
    twin(
        "price-growth-twice",
        "on different packages",
        lambda: sound_estimate(
            packages=changed(PACKAGES, "P3", prices="steel"),
            systemic=(systemic(name="Tender market", packages=("P1",)),),
        ),
    ),
    fault(
        "stale-prices",
        "a year and a half",
        lambda: sound_estimate(price_date=dt.date(2024, 9, 30)),
        "caution",
        "18 months old",
    ),
    fault(
        "stale-prices",
        "two and a half years",
        lambda: sound_estimate(price_date=dt.date(2023, 9, 30)),
        "major",
        "within 24 months",
    ),
    twin(
        "stale-prices",
        "eleven months",
        lambda: sound_estimate(price_date=dt.date(2025, 4, 30)),
    ),
    fault(
        "stale-evidence",
        "an offer of three years ago",
        lambda: with_package(
            "P2", evidence=BASIS(update={"given_on": dt.date(2023, 2, 1)})
        ),
        "caution",
        "P2 (2023-02-01)",
        rows=("P2",),
    ),
    twin("stale-evidence", "fresh", sound_estimate),
    fault(
        "data-date-behind-inputs",
        "evidence of next month",
        lambda: with_package(
            "P2", evidence=BASIS(update={"given_on": dt.date(2026, 4, 20)})
        ),
        "stop",
        "P2 (2026-04-20)",
        rows=("P2",),
    ),
    fault(
        "data-date-behind-inputs",
        "review of next month",
        lambda: with_event("R1", reviewed_on=dt.date(2026, 4, 20)),
        "stop",
        "R1 (2026-04-20)",
        rows=("R1",),
    ),
    twin(
        "data-date-behind-inputs",
        "reviewed that day",
        lambda: with_event("R1", reviewed_on=DAY),
    ),
)
