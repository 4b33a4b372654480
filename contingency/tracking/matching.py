"""Which row of one revision is which row of the other.

Ids are permanent: the same id is the same thing.  Where changes.csv says that a row
got another id, the earlier revision is given the new one, so that its draws and its
history go on; packages and events that were split or merged are paired as groups.
"""

from __future__ import annotations

from collections.abc import Callable, Mapping
from dataclasses import dataclass

from contingency.estimate.nouns import Change, Estimate, WorkPackage
from contingency.tracking.restating import Factors, factors_of, restated

NewIds = Mapping[str, Mapping[str, str]]
"""New id by old id, by file."""


@dataclass(frozen=True, kw_only=True, slots=True)
class PackageUnit:
    """Packages of the two revisions that are the same work."""

    before: tuple[WorkPackage, ...]
    """One; none if new; several if merged."""
    after: tuple[WorkPackage, ...]
    """One; none if gone; several if split."""

    @property
    def is_regrouped(self) -> bool:
        """Whether the work was split or merged."""
        return len(self.before) > 1 or len(self.after) > 1

    @property
    def ids(self) -> tuple[str, ...]:
        """All ids, those of the later revision first."""
        return tuple(dict.fromkeys(p.id for p in (*self.after, *self.before)))

    @property
    def name(self) -> str:
        """Name of the work as it is called now."""
        return "; ".join(p.name for p in self.after or self.before)

    @property
    def key(self) -> str:
        """The ids as one text."""
        now = ", ".join(p.id for p in self.after)
        if not self.is_regrouped:
            return now or self.before[0].id
        return f"{', '.join(p.id for p in self.before)} → {now}"

    @property
    def base_before(self) -> float:
        """Base of the earlier revision, money."""
        return sum(p.base for p in self.before)

    @property
    def base_after(self) -> float:
        """Base of the later revision, money."""
        return sum(p.base for p in self.after)


@dataclass(frozen=True, kw_only=True, slots=True)
class Match:
    """Two revisions with the same id for the same thing."""

    relabelled: Estimate
    """The earlier revision with the ids of the later one where rows were renamed."""
    earlier: Estimate
    """The same in money of the later revision's price date."""
    later: Estimate
    factors: Factors
    """Between the two price dates."""
    renamed: NewIds
    units: tuple[PackageUnit, ...]
    """In the order of the later file, what is gone at the end."""
    event_successors: Mapping[str, str]
    """For each event that was split or merged, before and after: its group's name."""

    def old_id(self, file: str, new: str) -> str:
        """Return the id that a row had in the earlier revision."""
        for old, name in self.renamed.get(file, {}).items():
            if name == new:
                return old
        return new


def match(earlier: Estimate, later: Estimate) -> Match:
    """Return the two revisions with their rows paired, in money of the later one."""
    renamed: dict[str, dict[str, str]] = {}
    regrouped: list[Change] = []
    for change in later.changes:
        if len(change.before) == len(change.into) == 1:
            renamed.setdefault(change.file, {})[change.before[0]] = change.into[0]
        elif change.before:
            regrouped.append(change)
    relabelled = with_ids(earlier, renamed)
    factors = factors_of(relabelled, later)
    in_new_money = restated(relabelled, factors)
    return Match(
        relabelled=relabelled,
        earlier=in_new_money,
        later=later,
        factors=factors,
        renamed=renamed,
        units=_units(in_new_money, later, regrouped),
        event_successors={
            event: f"{', '.join(c.before)} → {', '.join(c.into)}"
            for c in regrouped
            if c.file == "events"
            for event in (*c.before, *c.into)
        },
    )


def _units(
    earlier: Estimate, later: Estimate, regrouped: list[Change]
) -> tuple[PackageUnit, ...]:
    """Return the packages paired, what is gone last."""
    old = {p.id: p for p in earlier.packages}
    new = {p.id: p for p in later.packages}
    group: dict[str, Change] = {}
    for change in regrouped:
        if change.file == "packages":
            group |= dict.fromkeys((*change.before, *change.into), change)
    units: dict[int | str, PackageUnit] = {}
    for name in (*new, *old):
        joint = group.get(name)
        key = name if joint is None else joint.line
        if key in units:
            continue
        before = (name,) if joint is None else joint.before
        after = (name,) if joint is None else joint.into
        units[key] = PackageUnit(
            before=tuple(old[i] for i in before if i in old),
            after=tuple(new[i] for i in after if i in new),
        )
    return tuple(units.values())


def with_ids(estimate: Estimate, new_ids: NewIds) -> Estimate:
    """Return the estimate with other ids, wherever they stand."""
    if not any(new_ids.values()):
        return estimate
    package = _renamer(new_ids.get("packages", {}))
    risk = _renamer(new_ids.get("systemic", {}))
    event = _renamer(new_ids.get("events", {}))
    cause = _renamer(new_ids.get("causes", {}))
    return estimate.model_copy(
        update={
            "packages": tuple(
                p.model_copy(
                    update={
                        "id": package(p.id),
                        "loads": tuple(
                            load.model_copy(update={"cause": cause(load.cause)})
                            for load in p.loads
                        ),
                    }
                )
                for p in estimate.packages
            ),
            "systemic": tuple(
                s.model_copy(
                    update={
                        "id": risk(s.id),
                        "packages": tuple(package(p) for p in s.packages),
                        "applies_to": tuple(package(w) for w in s.applies_to),
                    }
                )
                for s in estimate.systemic
            ),
            "events": tuple(
                e.model_copy(
                    update={
                        "id": event(e.id),
                        "requires": event(e.requires) if e.requires else None,
                        "excludes": tuple(event(x) for x in e.excludes),
                        "shares": tuple(
                            s.model_copy(update={"package": package(s.package)})
                            for s in e.shares
                        ),
                        "response_package": package(e.response_package)
                        if e.response_package
                        else e.response_package,
                    }
                )
                for e in estimate.events
            ),
            "causes": tuple(
                c.model_copy(update={"id": cause(c.id)}) for c in estimate.causes
            ),
            "correlations": tuple(
                c.model_copy(update={"a": package(c.a), "b": package(c.b)})
                for c in estimate.correlations
            ),
        }
    )


def _renamer(new_ids: Mapping[str, str]) -> Callable[[str], str]:
    """Return what gives an id its new one, or itself."""
    return lambda name: new_ids.get(name, name)
