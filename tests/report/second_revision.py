"""The ship refit after an earlier revision of it, with a contingency account."""

import datetime as dt

from contingency.estimate.nouns import (
    AccountEntry,
    AccountRule,
    Change,
    ContingencyRule,
    Delegation,
    Milestone,
)
from contingency.study import run_study
from contingency.tracking.trend import trend
from tests.report.ship_refit import ship_refit

DAY = dt.date(2031, 3, 31)


def earlier_refit():
    """Revision B: wider, at P70, in money of the year before, two risks younger."""
    refit = ship_refit()
    first, *others = refit.packages
    return refit.model_copy(
        update={
            "revision": "B",
            "previous": "",
            "price_date": DAY.replace(year=2030),
            "contingency": ContingencyRule(target=70),
            "general_dependence": 0.3,
            "estimate_class": 4,
            "packages": (
                first.model_copy(update={"base": 0.96 * first.base}),
                *(other.model_copy(update={"spent": None}) for other in others),
            ),
            "events": (
                *refit.events[2:],
                refit.events[0].model_copy(update={"id": "R90", "name": "Dock strike"}),
            ),
        }
    )


def later_refit():
    """Revision C with its reasons, its account and the rules of the account."""
    refit = ship_refit()

    def entry(day, amount, **more):
        given = {"id": f"D{day}", "date": DAY - dt.timedelta(days=60 - day)}
        return AccountEntry(amount=amount, line=day, **given | more)

    return refit.model_copy(
        update={
            "changes": (
                Change(
                    id=refit.packages[0].id,
                    reason="Scaffold measured.",
                    by="Yard",
                    line=2,
                ),
            ),
            "account": (
                entry(1, 9e6, kind="opening", reason="Gate 2", approved_by="Board"),
                entry(20, 4e5, event="R05", package="M220", role="Cook"),
                entry(90, 2e5, reason="Later"),
            ),
            "account_rule": AccountRule(
                minimum=(
                    Milestone(name="Docking", on=DAY, amount=8e6),
                    Milestone(name="Sea trials", on=DAY.replace(year=2032), amount=1e6),
                ),
                delegations=(Delegation(role="Sponsor"),),
            ),
        }
    )


def second_revision():
    """The study of revision C, which knows both the bridge and the trend."""
    earlier, later = earlier_refit(), later_refit()
    study = run_study(later, previous=earlier)
    # The refit was read from no folder: nothing travels with it.
    study.__dict__["trend"] = trend((earlier, later))
    return study
