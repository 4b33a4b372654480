"""Planted faults and clean twins: simulation, level, sign-off, holding, phasing."""

import dataclasses
import datetime as dt

from contingency.estimate.nouns import Level
from contingency.setting.funding import YearAmounts
from tests.assurance.builder import (
    EVENTS,
    PACKAGES,
    RULE,
    SIGN_OFFS,
    changed,
    reseeded,
    sound_estimate,
    sound_study,
    spoiled,
)
from tests.assurance.case import fault, twin


def rule(**changes):
    """The sound estimate with another rule."""
    return sound_estimate(contingency=RULE.model_copy(update=changes))


def half_width(amount, rounding=50_000.0):
    """The sound study with an interval of the target so wide."""
    target = sound_study().target
    return spoiled(
        estimate=rule(rounding=rounding),
        target=dataclasses.replace(
            target, low=target.total - amount, high=target.total + amount
        ),
    )


def simulated(**changes):
    """The sound study with other fields of the simulation."""
    return spoiled(simulation=dataclasses.replace(sound_study().simulation, **changes))


def moment(name, off):
    """The sound study whose moment misses its closed form by so much."""
    check = sound_study().cross_check
    one = getattr(check, name)
    wrong = dataclasses.replace(one, simulated=one.exact + off)
    return spoiled(cross_check=dataclasses.replace(check, **{name: wrong}))


def second_route_off():
    """The sound study whose second route gives another P80."""
    check = sound_study().cross_check
    levels = tuple(
        dataclasses.replace(
            level,
            second_route=level.simulated - 2e6,
            allowed_high=level.simulated - 1e6,
        )
        if level.percent == 80
        else level
        for level in check.levels
    )
    return spoiled(cross_check=dataclasses.replace(check, levels=levels))


def cap(gap):
    """The sound study with a ceiling that lies above the total by this share."""
    return spoiled(
        estimate=sound_estimate(budget_cap=sound_study().target.total * (1 + gap))
    )


def request(amount):
    """The sound study with a request of its own."""
    return spoiled(estimate=sound_estimate(requested_total=amount))


def sum_of_percentiles():
    """The packages' own P80 added up: 24 % and more above the base each."""
    level = [0.8]
    return sum(float(p.cost.distribution.quantile(level)[0]) for p in PACKAGES)


def heavy(request_total):
    """A study in which the packages' own percentiles lie above the target."""
    target = dataclasses.replace(
        sound_study().target,
        total=sum_of_percentiles() - 2e6,
        low=sum_of_percentiles() - 2.05e6,
        high=sum_of_percentiles() - 1.95e6,
    )
    return spoiled(
        estimate=sound_estimate(requested_total=request_total), target=target
    )


def signed(**names):
    """Sign-off lines with other names."""
    return sound_estimate(
        sign_offs=tuple(
            line.model_copy(update={"name": names.get(line.role, line.name)})
            for line in SIGN_OFFS
        )
    )


def allocated(change):
    """The sound study with each row of its allocation put through `change`."""
    table = sound_study().allocation
    return spoiled(
        allocation=dataclasses.replace(table, rows=tuple(map(change, table.rows)))
    )


def flat(row):
    """A row with the same percentage of base as all others."""
    table = sound_study().allocation
    share = sum(r.contingency for r in table.rows) / sound_study().estimate.base
    return dataclasses.replace(row, contingency=share * row.base)


def one_sided(row):
    """A row whose variance is that of the whole, if it is P2."""
    share = 1.0 if row.package == "P2" else 0.0
    return dataclasses.replace(flat(row), variance_share=share)


def years(*, off=0.0, late=0.0):
    """Three years that close, but for `off`; `late` is event money of the last."""
    base = sound_study().estimate.base
    due = sound_study().target.contingency
    amounts = ((2026, 0.5, 0.4), (2027, 0.5, 0.5), (2028, 0.0, 0.1))
    return tuple(
        YearAmounts(
            year=str(year),
            starts=year,
            base=of_base * base,
            contingency=of_due * due,
            event_contingency=late if year == 2028 else (1e6 - late) / 2,
            escalation_on_base=0.02 * of_base * base,
            escalation_on_contingency=0.0,
            total=1.02 * of_base * base + of_due * due + (off if year == 2027 else 0),
        )
        for year, of_base, of_due in amounts
    )


def windows(finish):
    """All events with a window that ends on this day."""
    return sound_estimate(
        events=tuple(e.model_copy(update={"window_finish": finish}) for e in EVENTS)
    )


def worked(start, finish, window_start, window_finish):
    """P1 with dates, hit by R1 with a window."""
    event = EVENTS[0].model_copy(
        update={
            "window_start": window_start,
            "window_finish": window_finish,
            "shares": (EVENTS[0].shares[0].model_copy(update={"package": "P1"}),),
        }
    )
    return sound_estimate(
        packages=changed(PACKAGES, "P1", start=start, finish=finish),
        events=(event, *EVENTS[1:]),
    )


CASES = (
    fault(
        "not-repeatable",
        "no fingerprint",
        lambda: sound_estimate(fingerprint=""),
        "stop",
        "no fingerprint",
    ),
    twin("not-repeatable", "read from files", sound_estimate),
    fault(
        "unsettled-percentile",
        "wide against the total",
        lambda: half_width(400_000),
        "major",
        "± EUR 400,000 from 16,384 trials",
    ),
    fault(
        "unsettled-percentile",
        "out of trials",
        lambda: simulated(settled=False),
        "caution",
        "before it reached the tolerance of 1.00 %",
    ),
    twin("unsettled-percentile", "settled", sound_study),
    fault(
        "cross-check-failed",
        "the mean",
        lambda: moment("mean", 1e6),
        "stop",
        "the mean by EUR 1.00 M",
    ),
    fault(
        "cross-check-failed",
        "the standard deviation",
        lambda: moment("standard_deviation", -1e6),
        "stop",
        "the standard deviation by EUR -1.00 M",
    ),
    fault(
        "cross-check-failed",
        "the second route",
        second_route_off,
        "stop",
        "P80 by EUR 2.00 M",
    ),
    fault(
        "cross-check-failed",
        "another base",
        lambda: simulated(base=44e6),
        "stop",
        "the base by EUR 1.00 M",
    ),
    twin("cross-check-failed", "agrees", sound_study),
    fault(
        "level-without-authority",
        "nothing recorded",
        lambda: rule(set_by=" ", reason=""),
        "major",
        "No authority and no reason is recorded for using P80.",
    ),
    fault(
        "level-without-authority",
        "no reason",
        lambda: rule(reason=""),
        "major",
        "No reason is recorded",
    ),
    twin("level-without-authority", "recorded", sound_estimate),
    fault("odd-level", "P63", lambda: rule(target=63), "caution", "P63"),
    twin("odd-level", "P65", lambda: rule(target=65)),
    fault(
        "total-fits-the-cap",
        "just below the ceiling",
        lambda: cap(0.002),
        "caution",
        "within 0.20 % of the ceiling",
    ),
    twin("total-fits-the-cap", "well below", lambda: cap(0.03)),
    fault(
        "lucky-seed",
        "lower than all but one",
        lambda: reseeded(1 / 19),
        "caution",
        "Only 1 of 20 fresh seeds give less than the issued EUR",
    ),
    twin("lucky-seed", "in the middle", lambda: reseeded(0.5)),
    fault(
        "added-percentiles",
        "package percentiles added up",
        lambda: heavy(sum_of_percentiles()),
        "stop",
        "which is not a level of the project",
    ),
    fault(
        "added-percentiles",
        "less than the level",
        lambda: request(sound_study().percentiles[59]),
        "major",
        "The request is really P60.",
    ),
    twin(
        "added-percentiles",
        "the level, rounded",
        lambda: request(round(sound_study().target.total, -4)),
    ),
    fault(
        "no-spread",
        "a point",
        lambda: spoiled(standard_deviation=0.0),
        "stop",
        "nothing varies",
    ),
    twin("no-spread", "a curve", sound_study),
    fault(
        "one-level-only",
        "the target alone",
        lambda: rule(levels=()),
        "note",
        "P80 is the only funded level shown.",
    ),
    twin("one-level-only", "two", sound_estimate),
    fault(
        "too-many-digits",
        "to the nearest hundred",
        lambda: half_width(60_000, rounding=100.0),
        "note",
        "to the nearest EUR 100, but P80 is known only to ± EUR 60,000",
    ),
    twin("too-many-digits", "to the nearest 50,000", sound_study),
    fault(
        "coarse-rounding",
        "to the nearest ten million",
        lambda: half_width(60_000, rounding=10_000_000.0),
        "major",
        "to the nearest EUR 10.0 M",
    ),
    twin("coarse-rounding", "to the nearest 50,000", sound_study),
    fault(
        "sign-off-incomplete",
        "nobody checks",
        lambda: sound_estimate(sign_offs=SIGN_OFFS[:1]),
        "stop",
        "as checked, approved",
    ),
    fault(
        "sign-off-incomplete",
        "a name is missing",
        lambda: signed(approved=""),
        "stop",
        "as approved",
    ),
    twin("sign-off-incomplete", "complete", sound_estimate),
    fault(
        "review-not-independent",
        "checks own work",
        lambda: signed(checked="A Berg"),
        "stop",
        "A. Berg is named both as prepared and as checked.",
    ),
    twin("review-not-independent", "three people", sound_estimate),
    fault(
        "allocation-does-not-close",
        "two units short",
        lambda: allocated(
            lambda row: dataclasses.replace(
                row, contingency=row.contingency - (2.0 if row.package == "P1" else 0)
            )
        ),
        "stop",
        "the packages differ by EUR -2.00",
    ),
    fault(
        "allocation-does-not-close",
        "not a number",
        lambda: allocated(
            lambda row: dataclasses.replace(row, contingency=float("nan"))
        ),
        "stop",
        "the packages differ by EUR not a number",
    ),
    twin("allocation-does-not-close", "closes", sound_study),
    fault(
        "flat-allocation",
        "24 % for everybody",
        lambda: allocated(one_sided),
        "major",
        "P2 Quay wall makes up 100 % of the spread and gets 33 % of the money",
    ),
    twin("flat-allocation", "by what each adds", sound_study),
    fault(
        "negative-shares",
        "an offset",
        lambda: allocated(
            lambda row: dataclasses.replace(
                row, contingency=-5e4 if row.package == "P4" else row.contingency
            )
        ),
        "note",
        "P4 (EUR -50,000)",
        rows=("P4",),
    ),
    twin("negative-shares", "none", sound_study),
    fault(
        "levels-without-holder",
        "a reserve for nothing",
        lambda: rule(levels=(*RULE.levels, Level(percent=90))),
        "major",
        "P90 has no purpose and no holder.",
        where="P90",
    ),
    twin("levels-without-holder", "all held", sound_estimate),
    fault(
        "phasing-does-not-close",
        "one year off",
        lambda: spoiled(funding=years(off=5_000.0)),
        "stop",
        "The total of 2027 differs from the sum of its parts by EUR 5,000",
    ),
    fault(
        "phasing-does-not-close",
        "a year lost",
        lambda: spoiled(funding=years()[1:]),
        "stop",
        "The base by year differs from the base by EUR -21.5 M",
    ),
    twin("phasing-does-not-close", "closes", lambda: spoiled(funding=years())),
    fault(
        "money-after-window",
        "most of it in the last year",
        lambda: spoiled(
            estimate=windows(dt.date(2027, 6, 30)), funding=years(late=6e5)
        ),
        "caution",
        "60 % of the events' contingency, EUR 600,000",
    ),
    twin(
        "money-after-window",
        "a little",
        lambda: spoiled(
            estimate=windows(dt.date(2027, 6, 30)), funding=years(late=2e5)
        ),
    ),
    fault(
        "window-outside-work",
        "after the work",
        lambda: worked(
            dt.date(2026, 5, 1),
            dt.date(2026, 9, 1),
            dt.date(2027, 1, 1),
            dt.date(2027, 3, 1),
        ),
        "caution",
        "lies outside the dates of P1",
        where="R1",
    ),
    twin(
        "window-outside-work",
        "during the work",
        lambda: worked(
            dt.date(2026, 5, 1),
            dt.date(2026, 9, 1),
            dt.date(2026, 8, 1),
            dt.date(2027, 3, 1),
        ),
    ),
)
