"""Checks of the way from the last revision, and of the contingency account."""

from __future__ import annotations

from contingency.assurance.declaration import (
    COMMON_PRACTICE,
    Hit,
    NotApplicable,
    Source,
    Verdict,
    input_check,
    result_check,
)
from contingency.assurance.material import Material, RevisionChange
from contingency.assurance.settings import Settings, Threshold
from contingency.assurance.wording import counted, listed, money, percent
from contingency.estimate.earlier import is_earlier
from contingency.estimate.nouns import Estimate
from contingency.setting.account import (
    account_of,
    exceeds_delegation,
    lacking,
    minimum_on,
)

GAO_UPDATE = Source(
    "GAO cost guide, step 12 and the page on updating: changes are documented and"
    " reconciled to the old baseline",
    "READ",
)
NSW_PROFILE = Source(
    "New South Wales guidance on contingency: reviewed as the risk profile changes and"
    " narrowing with definition",
    "READ",
)
NSW_AUDIT = Source("New South Wales Auditor-General 2020, light rail", "READ-2nd")
NSW_DELEGATIONS = Source("New South Wales circular on delegations", "READ")
FTA_CURVE = Source("FTA OP-35 text: minimum contingency curve", "READ")
ANAO_LOGS = Source(
    "ANAO major projects: logs tied to risks unevenly, formal sign-off seen", "READ"
)
RIGS = Source("Rigsrevisionen 3/2019: reserves that were not used", "READ")
RESTATED = Source(
    "GAO cost guide: estimates are compared in the money of one day", "MEMORY"
)

RESIDUAL_CONTINGENCY = Threshold(
    name="bridge_residual_contingency",
    default=1.0,
    unit="% of the contingency",
    grade="H",
    meaning="stop above",
)
RESIDUAL_TOTAL = Threshold(
    name="bridge_residual_total",
    default=0.1,
    unit="% of the total",
    grade="H",
    meaning="stop above",
)
UNEXPLAINED = Threshold(
    name="unexplained_base",
    default=0.1,
    unit="% of the total",
    grade="H",
    meaning="major above",
)
CUT = Threshold(
    name="contingency_cut",
    default=10.0,
    unit="% of the contingency in percent of base",
    grade="H",
    meaning="a fall above",
)
CARRIED = Threshold(
    name="carried_forward_percent",
    default=0.1,
    unit="percentage points of the base",
    grade="H",
    meaning="the same percent within",
)
RATIO = Threshold(
    name="drawdown_ratio",
    default=1.0,
    unit="times the need",
    grade="H",
    meaning="least that must be left",
)
RECOVERY = Threshold(
    name="drawdown_recovery",
    default=0.9,
    unit="times the need",
    grade="H",
    meaning="a recovery plan is due below",
)
HELD = Threshold(
    name="held_percentile",
    default=95,
    unit="as a percentile of what remains",
    grade="H",
    meaning="held too much above",
    least=51,
    most=99,
)

ROUNDING = 1e-9
"""Part of the total that is rounding of floats and no gap."""

NO_PREVIOUS = NotApplicable("There is no previous revision to compare with.")
NO_ACCOUNT = NotApplicable("The estimate keeps no contingency account.")


@result_check(
    slug="bridge-does-not-close",
    subject="revisions and account",
    title="Bridge with a hole",
    catches="Movement since the last revision that no step explains.",
    rule="Old plus all steps is new, for the base and for the contingency.",
    thresholds=(RESIDUAL_CONTINGENCY, RESIDUAL_TOTAL),
    severities=("stop", "note"),
    todo="Report it: a bridge is made to close, so a gap is a fault of the program.",
    sources=(GAO_UPDATE, NSW_AUDIT),
)
def bridge_does_not_close(material: Material, settings: Settings) -> Verdict:
    """Find a bridge whose steps do not lead from old to new."""
    change = material.change
    if change is None:
        return NO_PREVIOUS
    gap = max(abs(change.base_residual), abs(change.contingency_residual))
    total = change.base_after + change.contingency_after
    if gap <= ROUNDING * abs(total):
        return []
    allowed = min(
        settings.number(RESIDUAL_CONTINGENCY) / 100 * abs(change.contingency_after),
        settings.number(RESIDUAL_TOTAL) / 100 * abs(total),
    )
    currency = material.estimate.currency
    return [
        Hit(
            severity="stop" if gap > allowed else "note",
            message=(
                f"{money(gap, currency)} of the change since revision"
                f" {change.previous} is not explained."
            ),
        )
    ]


@input_check(
    slug="previous-not-found",
    subject="revisions and account",
    title="Previous revision not found",
    catches="A change since the last revision that nobody can explain any more.",
    rule="previous names a folder, and no file of an earlier revision was found there.",
    severities=("major",),
    todo="Correct the path or that folder; contingency compare names the faults.",
    sources=(GAO_UPDATE,),
)
def previous_not_found(estimate: Estimate, _settings: Settings) -> Verdict:
    """Find an estimate whose previous revision does not travel with it."""
    if not estimate.previous:
        return NotApplicable("The estimate names no previous revision.")
    if any(is_earlier(source.name) for source in estimate.sources):
        return []
    return [
        Hit(
            severity="major",
            message=(
                f"previous is {estimate.previous}, and no revision could be read"
                " there; what changed since is not explained."
            ),
        )
    ]


@result_check(
    slug="unexplained-base-change",
    subject="revisions and account",
    title="Base changes without a reason",
    catches="A base that moved and nobody wrote down why.",
    rule="Base changes that no line of changes.csv explains, both signs added up.",
    thresholds=(UNEXPLAINED,),
    severities=("major", "note"),
    todo="Give each of these packages a line in changes.csv: family, reason, by whom.",
    sources=(GAO_UPDATE, NSW_AUDIT),
)
def unexplained_base_change(material: Material, settings: Settings) -> Verdict:
    """Find packages whose base moved without a reason."""
    change = material.change
    if change is None:
        return NO_PREVIOUS
    if not change.unexplained:
        return []
    size = sum(abs(amount) for _, amount in change.unexplained)
    total = change.base_after + change.contingency_after
    large = size > settings.number(UNEXPLAINED) / 100 * abs(total)
    rows = tuple(package for package, _ in change.unexplained)
    return [
        Hit(
            severity="major" if large else "note",
            rows=rows,
            message=(
                f"The base of {counted(len(rows), 'package')} moved by"
                f" {money(size, material.estimate.currency)} since revision"
                f" {change.previous} without a reason: {listed(rows)}."
            ),
        )
    ]


@result_check(
    slug="price-dates-without-factor",
    subject="revisions and account",
    title="Two price dates and no factor",
    catches="Growth of prices that passes for growth of the project.",
    rule="The price dates differ and no line of changes.csv gives a factor.",
    severities=("major",),
    todo="Add a line of family prices with the factor between the two price dates.",
    sources=(RESTATED,),
)
def price_dates_without_factor(material: Material, _settings: Settings) -> Verdict:
    """Find a comparison of money of two price dates."""
    change = material.change
    if change is None:
        return NO_PREVIOUS
    if not change.lacks_factor:
        return []
    return [
        Hit(
            severity="major",
            message=(
                f"Revision {change.previous} is in money of {change.price_date_before},"
                f" this one of {material.estimate.price_date}, and the earlier one"
                " cannot be restated."
            ),
        )
    ]


@result_check(
    slug="contingency-cut",
    subject="revisions and account",
    title="Contingency cut without a cause",
    catches="A contingency that was made to fit.",
    rule=(
        "Contingency in percent of base, at the earlier level, fell while no event was"
        " closed or occurred and the class did not improve."
    ),
    thresholds=(CUT,),
    severities=("major",),
    todo="Say what is known now that was not known before, or restore the ranges.",
    sources=(NSW_PROFILE, FTA_CURVE),
)
def contingency_cut(material: Material, settings: Settings) -> Verdict:
    """Find a contingency that fell although nothing was settled."""
    change = material.change
    if change is None:
        return NO_PREVIOUS
    before, after = _percents(change)
    fell = before > 0.0 and (before - after) / before > settings.number(CUT) / 100
    if not fell or change.retired or _class_improved(change):
        return []
    return [
        Hit(
            severity="major",
            message=(
                f"Contingency fell from {percent(before, 1)} to {percent(after, 1)} of"
                f" the base at P{change.level_before:02d}, but no risk was closed and"
                " the class did not improve."
            ),
        )
    ]


@result_check(
    slug="percent-carried-forward",
    subject="revisions and account",
    title="The same percent carried forward",
    catches="A percent of the last revision that was copied instead of computed.",
    rule=(
        "Contingency in percent of base is the same as in the last revision, at the"
        " same level, although inputs changed."
    ),
    thresholds=(CARRIED,),
    severities=("major",),
    todo="Show that the ranges and events were looked at again, and by whom.",
    sources=(NSW_PROFILE,),
)
def percent_carried_forward(material: Material, settings: Settings) -> Verdict:
    """Find a contingency that did not move although its inputs did."""
    change = material.change
    if change is None:
        return NO_PREVIOUS
    before, after = _percents(change)
    same = abs(after - before) < settings.number(CARRIED) / 100
    if not same or not change.figures_differ:
        return []
    return [
        Hit(
            severity="major",
            message=(
                f"Contingency is {percent(after, 1)} of the base as in revision"
                f" {change.previous}, although inputs changed."
            ),
        )
    ]


@result_check(
    slug="unused-changes",
    subject="revisions and account",
    title="Lines of changes.csv that explain nothing",
    catches="A reason that was left standing, or given for the wrong row.",
    rule="The row that a line of changes.csv names is the same in both revisions.",
    severities=("note",),
    todo="Remove these lines, or correct the ids that they name.",
    sources=(COMMON_PRACTICE,),
)
def unused_changes(material: Material, _settings: Settings) -> Verdict:
    """List reasons for rows that did not change."""
    change = material.change
    if change is None:
        return NO_PREVIOUS
    if not change.unused_lines:
        return []
    count = len(change.unused_lines)
    message = (
        f"{counted(count, 'line')} of changes.csv"
        f" {'explains' if count == 1 else 'explain'} nothing: "
        f"{listed(str(line) for line in change.unused_lines)}."
    )
    return [Hit(severity="note", message=message)]


@result_check(
    slug="drawdown-ahead",
    subject="revisions and account",
    title="Drawdown ahead of exposure",
    catches="Contingency that is used up faster than risk retires.",
    rule=(
        "What is left in the account over the contingency that the remaining work and"
        " the open events need at the target; and the balance against the minimum"
        " curve."
    ),
    thresholds=(RATIO, RECOVERY),
    severities=("major",),
    todo="Say how what remains will be paid for: more contingency, less scope or risk.",
    sources=(FTA_CURVE, Source("Noor and Tichacek, introduction", "READ")),
)
def drawdown_ahead(material: Material, settings: Settings) -> Verdict:
    """Find an account that does not cover what remains."""
    estimate = material.estimate
    account = account_of(estimate)
    if account is None:
        return NO_ACCOUNT
    need, left, currency = (
        material.target.contingency,
        account.balance,
        estimate.currency,
    )
    plan = "Write a recovery plan: more contingency, less scope, or less risk."
    hits = []
    if left < settings.number(RATIO) * need:
        hits.append(
            Hit(
                severity="major",
                message=(
                    f"Left: {money(left, currency)}. Needed at"
                    f" P{material.target.percent:02d} for what remains:"
                    f" {money(need, currency)}."
                ),
                todo=plan if left < settings.number(RECOVERY) * need else "",
            )
        )
    least = minimum_on(estimate.account_rule, estimate.data_date)
    if least is not None and left < least:
        hits.append(
            Hit(
                severity="major",
                message=(
                    f"Left: {money(left, currency)}. The minimum curve asks for"
                    f" {money(least, currency)} on {estimate.data_date}."
                ),
                todo=plan,
            )
        )
    return hits


@input_check(
    slug="draws-not-justified",
    subject="revisions and account",
    title="Draws without a risk or an approval",
    catches="Contingency used as petty cash.",
    rule=(
        "Each entry of drawdown.csv says which risk or package, why, and who approved"
        " it in which role, within that role's delegation, inside the approved scope."
    ),
    severities=("stop", "major"),
    todo="Complete the entry, have it approved by the right role, or take it back.",
    sources=(ANAO_LOGS, NSW_DELEGATIONS),
)
def draws_not_justified(estimate: Estimate, _settings: Settings) -> Verdict:
    """Find entries that lack a reason or an approval."""
    if not estimate.account:
        return NO_ACCOUNT
    hits = []
    for entry in estimate.account:
        what = f"Entry {entry.label}, {entry.kind},"
        if exceeds_delegation(estimate.account_rule, entry):
            amount = money(entry.amount, estimate.currency)
            message = f"{what} of {amount} is above what the {entry.role} may approve."
            hits.append(Hit(severity="stop", where=entry.id, message=message))
        if lacks := lacking(entry):
            message = f"{what} does not name {listed(lacks)}."
            hits.append(Hit(severity="major", where=entry.id, message=message))
        if entry.kind == "drawn" and entry.in_scope is False:
            message = f"{what} is for work outside the approved scope."
            hits.append(Hit(severity="major", where=entry.id, message=message))
    return hits


@input_check(
    slug="occurred-without-draw",
    subject="revisions and account",
    title="Events that occurred and were not drawn",
    catches="Cost of a risk that reached the base and left the contingency whole.",
    rule="Every event with the status occurred is named by a draw.",
    severities=("caution",),
    todo="Record the draw with its approval, or say why the event cost nothing.",
    sources=(ANAO_LOGS,),
)
def occurred_without_draw(estimate: Estimate, _settings: Settings) -> Verdict:
    """Find events that happened and that the account knows nothing of."""
    if not estimate.account:
        return NO_ACCOUNT
    drawn = {entry.event for entry in estimate.account if entry.kind == "drawn"}
    silent = [
        event
        for event in estimate.events
        if event.status == "occurred" and event.id not in drawn
    ]
    if not silent:
        return []
    message = (
        f"{counted(len(silent), 'event')} occurred and no draw names"
        f" {'it' if len(silent) == 1 else 'them'}:"
        f" {listed(event.label for event in silent)}."
    )
    rows = tuple(event.id for event in silent)
    return [Hit(severity="caution", rows=rows, message=message)]


@result_check(
    slug="holding-too-much",
    subject="revisions and account",
    title="Holding too much",
    catches="Money that is locked up and could be used elsewhere.",
    rule=(
        "What is left in the account is above a high percentile of what remains, at"
        " this revision and at the last one."
    ),
    thresholds=(HELD,),
    severities=("caution",),
    todo="Propose a release, or say what the money is kept for.",
    sources=(RIGS, NSW_PROFILE),
)
def holding_too_much(material: Material, settings: Settings) -> Verdict:
    """Find an account that holds more than what remains can need."""
    account = account_of(material.estimate)
    change = material.change
    if account is None:
        return NO_ACCOUNT
    if change is None or change.balance_before is None:
        return NotApplicable("No previous revision keeps a contingency account.")
    at = int(settings.number(HELD))
    base = material.estimate.base
    left, need = account.balance, material.percentile(at) - base
    need_before = change.percentiles_before[at - 1] - change.base_before
    if left <= need or change.balance_before <= need_before:
        return []
    spare = max(0.0, left - (material.percentile(90) - base))
    currency = material.estimate.currency
    return [
        Hit(
            severity="caution",
            message=(
                f"Left: {money(left, currency)}, above the P{at} of what remains at"
                f" two revisions running. {money(spare, currency)} could be released"
                " and still cover P90 of what remains."
            ),
        )
    ]


def _percents(change: RevisionChange) -> tuple[float, float]:
    """Return contingency over base before and after, at the earlier level."""
    before = change.contingency_before / change.base_before
    return before, change.at_old_level / change.base_after


def _class_improved(change: RevisionChange) -> bool:
    before, after = change.class_before, change.class_after
    return before is not None and after is not None and after < before


CHECKS = (
    previous_not_found,
    bridge_does_not_close,
    unexplained_base_change,
    price_dates_without_factor,
    contingency_cut,
    percent_carried_forward,
    unused_changes,
    drawdown_ahead,
    draws_not_justified,
    occurred_without_draw,
    holding_too_much,
)
