"""The nouns of an estimate: work packages, systemic risks, risk events.

Frozen and typed.  Amounts are floats in the estimate's currency at its price
date; fractions are plain numbers (0.05 for 5 %).  Nothing here reads a file
or draws a number.
"""

from __future__ import annotations

import datetime as dt
from enum import StrEnum
from functools import cached_property
from typing import Literal, Self

from pydantic import BaseModel, ConfigDict

from contingency.quantities import shapes
from contingency.quantities.shapes import Shape

PROJECT_WIDE = "project-wide"
"""Id of the line that carries events without packages."""


class Noun(BaseModel):
    """A frozen record; unknown fields are refused."""

    model_config = ConfigDict(frozen=True, extra="forbid")

    def __copy__(self) -> Self:
        """Return a copy without what was derived, for a field may change next."""
        copied = super().__copy__()
        for name in copied.__dict__.keys() - type(self).model_fields.keys():
            del copied.__dict__[name]
        return copied


class ShapeName(StrEnum):
    """The names that the column `shape` knows."""

    PERT = "pert"
    TRIANGULAR = "triangular"
    UNIFORM = "uniform"
    NORMAL = "normal"
    LOGNORMAL = "lognormal"
    DISCRETE = "discrete"
    POINTS = "points"
    FIXED = "fixed"


class Ends(Noun):
    """What low and high mean: absolute limits, or two percentiles."""

    low_percent: int | None = None
    """Whole percent not exceeded at `low`; None for limits."""
    high_percent: int | None = None
    """Whole percent not exceeded at `high`; None for limits."""

    @property
    def are_limits(self) -> bool:
        """Whether low and high are absolute limits."""
        return self.low_percent is None

    def __str__(self) -> str:
        if self.low_percent is None or self.high_percent is None:
            return "limits"
        return f"P{self.low_percent:02d}-P{self.high_percent:02d}"


class CostRange(Noun):
    """A range as it is simulated: figures resolved, words of the file beside them."""

    shape: ShapeName
    low: float | None = None
    likely: float | None = None
    high: float | None = None
    ends: Ends = Ends()
    ends_stated: bool = True
    """False where neither the row nor [ranges] says what low and high mean; the
    range is then read as limits and an assurance check stops the sign-off."""
    outcomes: tuple[tuple[float, float], ...] = ()
    """discrete: (value, probability); points: (percent not exceeded, value)."""
    written: tuple[str, str, str, str] = ("", "", "", "")
    """The cells low, likely, high, outcomes as the file has them."""

    @cached_property
    def distribution(self) -> Shape:
        """The shape of this range, in the units of its figures."""
        return shapes.from_range(
            self.shape.value,
            low=self.low,
            likely=self.likely,
            high=self.high,
            low_percent=self.ends.low_percent,
            high_percent=self.ends.high_percent,
            outcomes=self.outcomes,
        )

    @property
    def varies(self) -> bool:
        """Whether the range has any spread."""
        return self.distribution.variance > 0.0


BasisKind = Literal["data", "analogue", "judgement"]


class Evidence(Noun):
    """Where a figure comes from."""

    basis: str = ""
    kind: BasisKind | None = None
    given_by: str = ""
    given_on: dt.date | None = None

    @property
    def is_recorded(self) -> bool:
        """Whether a basis is written down at all."""
        return bool(self.basis)

    @property
    def is_complete(self) -> bool:
        """Whether basis, kind, role and date are all there."""
        return bool(self.basis and self.kind and self.given_by and self.given_on)


class Load(Noun):
    """How strongly a package's range follows a common cause."""

    cause: str
    weight: float
    """-1 to 1; the correlation of the range's normal score with the cause's."""


class WorkPackage(Noun):
    """One work package of the base estimate."""

    id: str
    name: str
    group: str = ""
    base: float
    """Base estimate, price-date money, no allowance for risk."""
    spent: float | None = None
    """Actual cost to date, price-date money; only the rest can vary."""
    cost: CostRange
    """Range of the final cost, price-date money, what is spent included."""
    loads: tuple[Load, ...] = ()
    start: dt.date | None = None
    finish: dt.date | None = None
    spend: Literal["even", "early", "late", "bell"] | None = None
    prices: str = ""
    """Id of the price series that escalates it; blank if none does."""
    price_basis: Literal["constant", "outturn"] | None = None
    price_date: dt.date | None = None
    holds_allowance: bool | None = None
    """Answer to: does the base contain any allowance for risk?"""
    progress: float | None = None
    """Fraction of the work done, 0 to 1."""
    evidence: Evidence = Evidence()
    line: int
    """Line of packages.csv, for messages; not part of the fingerprint."""

    @property
    def label(self) -> str:
        """Id and name, as in messages."""
        return f"{self.id} {self.name}".strip()


class SystemicRisk(Noun):
    """A risk from how the project is defined and run: an uplift on cost."""

    id: str
    name: str
    uplift: CostRange
    """Fractions of the cost that it acts on: 0.05 for 5 %."""
    packages: tuple[str, ...]
    """Ids of the packages that it acts on, in file order."""
    applies_to: tuple[str, ...] = ("all",)
    """The words of the file: `all`, groups or package ids."""
    model: Literal["history", "ratings"] | None = None
    """What the uplift was taken from; None where the row has its own figures."""
    cause: str = ""
    covers: str = ""
    evidence: Evidence = Evidence()
    line: int

    @property
    def label(self) -> str:
        """Id and name, as in messages."""
        return f"{self.id} {self.name}".strip()


class PackageShare(Noun):
    """The fraction of an event's cost that falls on one package."""

    package: str
    fraction: float


class RiskEvent(Noun):
    """A threat or an opportunity that may or may not happen."""

    id: str
    name: str
    kind: Literal["threat", "opportunity"]
    happens: Literal["once", "repeatedly"] = "once"
    probability: float | None = None
    """Chance that it happens (given `requires`); None when it happens repeatedly."""
    frequency: float | None = None
    """Expected number of occurrences over the project; None when it happens once."""
    impact: CostRange | None = None
    """Cost of one occurrence, price-date money, positive for both kinds."""
    shares: tuple[PackageShare, ...]
    """Fractions sum to 1; a project-wide event has the one share PROJECT_WIDE."""
    requires: str | None = None
    excludes: tuple[str, ...] = ()
    """All other members of its group of mutually exclusive events."""
    status: Literal["open", "closed", "occurred"] = "open"
    window_start: dt.date | None = None
    window_finish: dt.date | None = None
    owner: str = ""
    response: str = ""
    response_cost: float | None = None
    response_package: str | None = None
    after_probability: float | None = None
    after_frequency: float | None = None
    after_impact: CostRange | None = None
    use: Literal["before", "after"] = "before"
    cause: str = ""
    contract: Literal["retained", "transferred", "shared"] | None = None
    retained_share: float | None = None
    """Fraction of the cost that stays with the owner when `contract` is shared."""
    clause: str = ""
    in_scope: bool | None = None
    """Answer to: is the event inside the approved scope?"""
    reviewed_on: dt.date | None = None
    next_review: dt.date | None = None
    response_due: dt.date | None = None
    response_owner: str = ""
    held_by: str = ""
    """Who holds what the funding level does not pay if the event is rare and large."""
    evidence: Evidence = Evidence()
    line: int

    @property
    def label(self) -> str:
        """Id and name, as in messages."""
        return f"{self.id} {self.name}".strip()

    @property
    def is_open(self) -> bool:
        """Whether the event is simulated."""
        return self.status == "open"

    @property
    def sign(self) -> float:
        """+1 for a threat, -1 for an opportunity."""
        return 1.0 if self.kind == "threat" else -1.0

    @property
    def probability_used(self) -> float | None:
        """The probability of the state that `use` names."""
        return self.after_probability if self.use == "after" else self.probability

    @property
    def frequency_used(self) -> float | None:
        """The frequency of the state that `use` names."""
        return self.after_frequency if self.use == "after" else self.frequency

    @property
    def impact_used(self) -> CostRange:
        """The impact of the state that `use` names; only for open events."""
        impact = self.after_impact if self.use == "after" else self.impact
        if impact is None:
            msg = f"event {self.id} has no impact for use = {self.use}"
            raise ValueError(msg)
        return impact


class CommonCause(Noun):
    """A named cause that moves several ranges together."""

    id: str
    name: str
    basis: str = ""
    line: int


class PriceSeries(Noun):
    """How prices of one kind change from the price date on."""

    id: str
    name: str
    rate: CostRange
    """Compound change in one year, fraction: 0.03 for 3 % a year."""
    evidence: Evidence = Evidence()
    line: int

    @property
    def label(self) -> str:
        """Id and name, as in messages."""
        return f"{self.id} {self.name}".strip()


class PairCorrelation(Noun):
    """Spearman rank correlation between the ranges of two packages."""

    a: str
    b: str
    correlation: float
    line: int


class Level(Noun):
    """One funding level and who holds the money."""

    percent: int
    """Whole percent not exceeded: 80 for P80."""
    purpose: str = ""
    holder: str = ""

    @property
    def name(self) -> str:
        """The level as it is printed: P80."""
        return f"P{self.percent:02d}"


class ContingencyRule(Noun):
    """Which level is asked for, who set it and why."""

    target: int
    """Whole percent."""
    set_by: str = ""
    reason: str = ""
    rounding: float = 1.0
    levels: tuple[Level, ...] = ()

    @property
    def target_name(self) -> str:
        """The target as it is printed: P80."""
        return f"P{self.target:02d}"


class Run(Noun):
    """How the simulation is run."""

    seed: int
    tolerance: float
    least: int
    most: int


class Assumption(Noun):
    """One numbered assumption."""

    id: str
    text: str
    holder: str = ""
    expires: dt.date | None = None
    effect: str = ""


class Exclusion(Noun):
    """One numbered exclusion."""

    id: str
    text: str
    carried_by: str = ""
    size: str = ""


class Statements(Noun):
    """What the estimate covers, assumes, leaves out and warns of."""

    scope: str = ""
    base: str = ""
    """Where the base estimate comes from: source, date, method, completeness."""
    assumptions: tuple[Assumption, ...] = ()
    exclusions: tuple[Exclusion, ...] = ()
    cautions: tuple[str, ...] = ()


class SignOffLine(Noun):
    """One line of the sign-off block."""

    role: str
    name: str = ""
    position: str = ""


class Answer(Noun):
    """A written answer to an assurance finding."""

    check: str
    where: str = ""
    """One row's id; empty for the whole finding."""
    answer: str
    by: str
    on: dt.date


class SourceFile(Noun):
    """A file of the folder as it was read, for the report's attachments."""

    name: str
    content: bytes


class Change(Noun):
    """One line of changes.csv: why this revision differs from the previous one."""

    file: Literal["packages", "systemic", "events", "causes", "estimate"] = "packages"
    """The file, without its ending, that the ids belong to."""
    id: str = ""
    """The row; blank for the estimate as a whole, or where `before` is given."""
    before: tuple[str, ...] = ()
    """Ids of the previous revision that were renamed, split or merged."""
    into: tuple[str, ...] = ()
    """Ids of this revision that took their place."""
    family: str = ""
    """Why the base moved: a word of docs/revisions.md; blank where it did not."""
    amount: float | None = None
    """Part of the base change that this line explains, price-date money of this
    revision, signed; None for all that the other lines leave."""
    factor: float | None = None
    """Money of this price date that buys what one unit of the earlier one bought."""
    event: str = ""
    """The event that the base change comes from."""
    reason: str
    by: str
    on: dt.date | None = None
    line: int


class AccountEntry(Noun):
    """One line of drawdown.csv: money into or out of the contingency account."""

    id: str = ""
    date: dt.date
    kind: Literal["opening", "added", "drawn", "released"] = "drawn"
    amount: float
    """Positive, in the money in which the account is kept."""
    event: str = ""
    package: str = ""
    """The package whose estimate uncertainty was drawn on."""
    reason: str = ""
    approved_by: str = ""
    role: str = ""
    in_scope: bool | None = None
    """Answer to: does the money stay inside the approved scope?"""
    line: int

    @property
    def label(self) -> str:
        """The entry's id, or its date."""
        return self.id or self.date.isoformat()


class Milestone(Noun):
    """One point of the minimum curve of the contingency account."""

    name: str
    on: dt.date
    amount: float
    """Least contingency that must be left on that day, money of the account."""


class Delegation(Noun):
    """How much one role may approve in a single draw."""

    role: str
    up_to: float | None = None
    """Money of the account; None without limit."""


class AccountRule(Noun):
    """Rules of the contingency account, from [account] in estimate.toml."""

    minimum: tuple[Milestone, ...] = ()
    """By date, rising."""
    delegations: tuple[Delegation, ...] = ()


class ClosedProject(Noun):
    """One line of history.csv: a project that is finished, like this one."""

    id: str
    name: str = ""
    group: str = ""
    estimate: float
    """Base estimate at the same gate, any money."""
    final: float
    """Final cost, in the same money as `estimate`."""
    covered: float = 0.0
    """Part of the final cost that ranges and events of the estimate at hand cover."""
    notes: str = ""
    line: int

    @property
    def ratio(self) -> float:
        """Final cost over estimate."""
        return self.final / self.estimate

    @property
    def net_ratio(self) -> float:
        """Final cost less what ranges and events cover, over estimate."""
        return (self.final - self.covered) / self.estimate


class RatedFactor(Noun):
    """One factor of a rated model, as this project is rated."""

    id: str
    name: str
    coefficient: float
    rating: str = ""
    """Name of the level; blank where a number was given."""
    value: float
    """Number of the level, or the number given."""
    evidence: str = ""

    @property
    def effect(self) -> float:
        """Coefficient times value, in the units of the model's sum."""
        return self.coefficient * self.value


class RatedModel(Noun):
    """A user's own model of the systemic uplift, from ratings.toml."""

    name: str
    provenance: str
    """Who derived it, from which projects, when."""
    form: Literal["log", "linear"]
    """log: the sum is the logarithm of 1 + uplift; linear: it is the uplift."""
    constant: float
    residual_spread: float
    """Standard deviation of what the model leaves open, in the units of its sum."""
    degrees: int | None = None
    """Degrees of freedom of `residual_spread`; None where they are not known."""
    factors: tuple[RatedFactor, ...] = ()

    @property
    def expected(self) -> float:
        """Constant and all effects together, in the units of the model's sum."""
        from math import fsum

        return fsum((self.constant, *(factor.effect for factor in self.factors)))


class UpliftPart(Noun):
    """One kind of work in a published percentage uplift."""

    kind: str
    share: float
    """Fraction of the base that is of this kind."""
    upper: float
    """Published uplift of this kind before risks are managed, fraction of the base."""
    managed: float = 0.0
    """Fraction of the uplift that managed risks take away."""


class OutsideRule(Noun):
    """What [outside_view] of estimate.toml says about the projects compared with."""

    stage: str = ""
    """How it is ensured that estimates are of the same stage as this one."""
    money: str = ""
    """How it is ensured that estimate and final cost are in the same money."""
    scope: str = ""
    """How it is ensured that estimate and final cost have the same scope."""
    group: str = ""
    """The group of history.csv to compare with; blank for all of it."""
    source: str = ""
    """Where the percentiles or the uplifts come from."""
    percentiles: tuple[tuple[int, float], ...] = ()
    """(whole percent not exceeded, final cost over base less 1), rising."""
    uplifts: tuple[UpliftPart, ...] = ()

    @property
    def is_comparable(self) -> bool:
        """Whether stage, money and scope are all declared."""
        return bool(self.stage and self.money and self.scope)


class Estimate(Noun):
    """One revision of one estimate, as read from its folder."""

    project: str
    revision: str
    previous: str = ""
    gate: str = ""
    estimate_class: int | None = None
    currency: str
    price_date: dt.date
    data_date: dt.date
    owner: str = ""
    request_base: float | None = None
    """Base cost of the whole request, where packages cover only part of it."""
    requested_total: float | None = None
    """Total that is asked for, where it is not simply the target level."""
    budget_cap: float | None = None
    """A ceiling that was known before the analysis, price-date money."""
    financial_year_starts: int | None = None
    """Month in which a financial year begins, 1 to 12; None for calendar years."""

    contingency: ContingencyRule
    ends: Ends | None
    """What low and high mean unless a row says otherwise; None if not stated."""
    general_dependence: float | None
    """One overall correlation between ranges; None if not stated."""
    run: Run
    statements: Statements = Statements()
    sign_offs: tuple[SignOffLine, ...] = ()
    answers: tuple[Answer, ...] = ()
    assurance: dict[str, float | int | str | bool] = {}
    """Thresholds set under [assurance], by name."""

    packages: tuple[WorkPackage, ...]
    systemic: tuple[SystemicRisk, ...] = ()
    events: tuple[RiskEvent, ...] = ()
    causes: tuple[CommonCause, ...] = ()
    correlations: tuple[PairCorrelation, ...] = ()
    price_series: tuple[PriceSeries, ...] = ()

    changes: tuple[Change, ...] = ()
    """What changes.csv says about the way from the previous revision to this one."""
    account: tuple[AccountEntry, ...] = ()
    """The contingency account to date, from drawdown.csv, by date."""
    account_rule: AccountRule = AccountRule()

    history: tuple[ClosedProject, ...] = ()
    """Closed projects, from history.csv."""
    outside_rule: OutsideRule = OutsideRule()
    rated_model: RatedModel | None = None
    """The model behind systemic risks with model = ratings, from ratings.toml."""

    sources: tuple[SourceFile, ...] = ()
    """Every file that was read, byte for byte; sorted by name."""
    fingerprint: str = ""
    """SHA-256, hexadecimal, over the canonical form of everything that was read."""

    @cached_property
    def base(self) -> float:
        """Sum of the packages' base estimates, price-date money."""
        from math import fsum

        return fsum(package.base for package in self.packages)

    @cached_property
    def open_events(self) -> tuple[RiskEvent, ...]:
        """The events that are simulated, in file order."""
        return tuple(event for event in self.events if event.is_open)

    @cached_property
    def groups(self) -> tuple[str, ...]:
        """Names of the package groups, in file order."""
        return tuple(dict.fromkeys(p.group for p in self.packages if p.group))

    def find_package(self, package_id: str) -> WorkPackage | None:
        """Return the package with this id, or None."""
        return next((p for p in self.packages if p.id == package_id), None)
