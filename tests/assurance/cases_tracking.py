"""Planted faults and clean twins: revisions and account."""

import datetime as dt

from contingency.assurance.material import RevisionChange
from contingency.estimate.earlier import pushed_back
from contingency.estimate.nouns import (
    AccountEntry,
    AccountRule,
    Delegation,
    Milestone,
    SourceFile,
)
from tests.assurance.builder import (
    DAY,
    EVENTS,
    changed,
    sound_estimate,
    sound_study,
    spoiled,
)
from tests.assurance.case import fault, twin


def moved(**changes):
    """The sound study after a revision that it follows from without a hole."""
    study = sound_study()
    base, held = study.estimate.base, study.target.contingency
    given = {
        "previous": "0",
        "price_date_before": DAY,
        "base_before": base,
        "contingency_before": 1.05 * held,
        "level_before": 80,
        "class_before": 4,
        "percentiles_before": study.percentiles,
        "balance_before": None,
        "base_after": base,
        "contingency_after": held,
        "at_old_level": held,
        "class_after": 3,
        "base_residual": 0.0,
        "contingency_residual": 1e-7,
        "unexplained": (),
        "lacks_factor": False,
        "retired": (),
        "figures_differ": True,
        "unused_lines": (),
    }
    return spoiled(change=RevisionChange(**given | changes))


def cut(**changes):
    """The sound study after a revision with a fifth more contingency."""
    held = sound_study().target.contingency
    return moved(**{"contingency_before": 1.25 * held, "class_before": 3} | changes)


def entry(amount, kind="drawn", **more):
    """An entry of the account that says everything."""
    given = {
        "id": "D1",
        "date": DAY,
        "kind": kind,
        "amount": amount,
        "event": "R1",
        "reason": "The wreck was lifted.",
        "approved_by": "E. Falk",
        "role": "Sponsor",
        "line": 2,
    }
    return AccountEntry(**given | more)


RULES = AccountRule(
    minimum=(Milestone(name="Award", on=DAY, amount=1_000_000.0),),
    delegations=(
        Delegation(role="Project manager", up_to=100_000.0),
        Delegation(role="Sponsor"),
    ),
)


def kept(*entries, **changes):
    """The sound estimate with an account."""
    return sound_estimate(account=entries, account_rule=RULES, **changes)


def left(times, **changes):
    """The sound study with so many times its contingency in the account."""
    opening = entry(times * sound_study().target.contingency, "opening", event="")
    return spoiled(estimate=kept(opening, entry(1.0, id="D2"), **changes))


def rich(before, now):
    """The sound study with so much above the base in the account, then and now."""
    study = moved(balance_before=before)
    opening = entry(now, "opening", event="")
    return spoiled(estimate=kept(opening), change=study.change)


HIGH = 0.6
"""More of the base than P95 of what remains needs."""
BASE = 43_000_000.0

TOML = SourceFile(name="estimate.toml", content=b"")

CASES = (
    fault(
        "previous-not-found",
        "folder_is_gone",
        lambda: sound_estimate(previous="../rev-0"),
        "major",
        "previous is ../rev-0, and no revision could be read there",
    ),
    twin(
        "previous-not-found",
        "its_files_travel_along",
        lambda: sound_estimate(
            previous="../rev-0", sources=(*pushed_back((TOML,)), TOML)
        ),
    ),
    fault(
        "bridge-does-not-close",
        "gap_of_two_million",
        lambda: moved(contingency_residual=2e6),
        "stop",
        "EUR 2.00 M of the change since revision 0 is not explained.",
    ),
    fault(
        "bridge-does-not-close",
        "gap_in_the_base",
        lambda: moved(base_residual=-5.0),
        "note",
        "EUR 5.00 of the change",
    ),
    twin("bridge-does-not-close", "rounding_of_floats", moved),
    fault(
        "unexplained-base-change",
        "two_packages",
        lambda: moved(unexplained=(("P1", 500_000.0), ("P2", -400_000.0))),
        "major",
        "The base of 2 packages moved by EUR 900,000 since revision 0",
        rows=("P1", "P2"),
    ),
    fault(
        "unexplained-base-change",
        "small_change",
        lambda: moved(unexplained=(("P6", 1_000.0),)),
        "note",
        "EUR 1,000",
        rows=("P6",),
    ),
    twin("unexplained-base-change", "every_change_has_a_reason", moved),
    fault(
        "price-dates-without-factor",
        "another_year",
        lambda: moved(lacks_factor=True, price_date_before=dt.date(2025, 3, 31)),
        "major",
        "in money of 2025-03-31, this one of 2026-03-31",
    ),
    twin("price-dates-without-factor", "one_price_date", moved),
    fault(
        "contingency-cut",
        "a_fifth_less",
        cut,
        "major",
        "at P80, but no risk was closed and the class did not improve",
    ),
    twin("contingency-cut", "a_risk_was_closed", lambda: cut(retired=("R9",))),
    twin("contingency-cut", "the_class_improved", lambda: cut(class_before=4)),
    twin("contingency-cut", "a_twentieth_less", moved),
    fault(
        "percent-carried-forward",
        "same_percent",
        lambda: moved(contingency_before=sound_study().target.contingency),
        "major",
        "of the base as in revision 0, although inputs changed.",
    ),
    twin(
        "percent-carried-forward",
        "nothing_changed",
        lambda: moved(
            contingency_before=sound_study().target.contingency, figures_differ=False
        ),
    ),
    twin("percent-carried-forward", "another_percent", moved),
    fault(
        "unused-changes",
        "two_lines",
        lambda: moved(unused_lines=(4, 7)),
        "note",
        "2 lines of changes.csv explain nothing: 4, 7.",
    ),
    twin("unused-changes", "every_line_explains", moved),
    fault(
        "drawdown-ahead",
        "four_fifths_left",
        lambda: left(0.8),
        "major",
        "Needed at P80 for what remains",
    ),
    fault(
        "drawdown-ahead",
        "below_the_minimum_curve",
        lambda: spoiled(
            estimate=sound_estimate(
                account=(entry(9e9, "opening", event=""),),
                account_rule=AccountRule(
                    minimum=(Milestone(name="Award", on=DAY, amount=2e10),)
                ),
            )
        ),
        "major",
        "The minimum curve asks for",
    ),
    twin("drawdown-ahead", "more_than_needed", lambda: left(1.1)),
    fault(
        "draws-not-justified",
        "above_the_delegation",
        lambda: kept(entry(100_001.0, role="project manager")),
        "stop",
        "is above what the project manager may approve.",
        where="D1",
    ),
    fault(
        "draws-not-justified",
        "no_risk_named",
        lambda: kept(entry(5.0, event="")),
        "major",
        "Entry D1, drawn, does not name a risk or a package.",
        where="D1",
    ),
    fault(
        "draws-not-justified",
        "outside_the_scope",
        lambda: kept(entry(5.0, in_scope=False)),
        "major",
        "is for work outside the approved scope.",
        where="D1",
    ),
    twin("draws-not-justified", "complete", lambda: kept(entry(1e9))),
    fault(
        "occurred-without-draw",
        "r2_occurred",
        lambda: kept(entry(5.0), events=changed(EVENTS, "R2", status="occurred")),
        "caution",
        "1 event occurred and no draw names it: R2 Late delivery of rails.",
        rows=("R2",),
    ),
    twin(
        "occurred-without-draw",
        "r1_was_drawn",
        lambda: kept(entry(5.0), events=changed(EVENTS, "R1", status="occurred")),
    ),
    fault(
        "holding-too-much",
        "at_two_revisions",
        lambda: rich(HIGH * BASE, HIGH * BASE),
        "caution",
        "above the P95 of what remains at two revisions running",
    ),
    twin("holding-too-much", "only_now", lambda: rich(0.1 * BASE, HIGH * BASE)),
    twin("holding-too-much", "only_before", lambda: rich(HIGH * BASE, 0.1 * BASE)),
)
