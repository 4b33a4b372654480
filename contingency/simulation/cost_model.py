"""An estimate as arrays: what the engine needs, in an order of its own.

Inputs are sorted by id before anything is computed, so that the order of rows in
the files changes no bit of the result.  `package_place`, `systemic_place` and
`event_place` lead back to file order.
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from contingency.estimate.nouns import (
    Estimate,
    RiskEvent,
    SystemicRisk,
    WorkPackage,
)
from contingency.quantities.curves import Curves
from contingency.quantities.dependence import (
    factor_correlation,
    nearest_correlation,
    own_weight,
    rank_to_normal,
)
from contingency.quantities.draws import BLOCK, parabolas
from contingency.quantities.shapes import Shape

Array = NDArray[np.float64]
_Identified = WorkPackage | SystemicRisk | RiskEvent


@dataclass(frozen=True, kw_only=True)
class Dependence:
    """How the normal scores of the varying ranges hang together."""

    own: Array
    """(v, 1) weight of each range's own score."""
    weights: Array
    """(v, f) weights of the common scores."""
    common: tuple[str, ...]
    """Stream names of the f common scores."""
    root: Array | None
    """(v, v) lower Cholesky factor where pairs were given, instead of the above."""
    repair: tuple[float, str, str] | None
    """Largest change to a correlation and the pair, where the pairs contradicted."""

    def correlation(self) -> Array:
        """Return the (v, v) correlation of the normal scores."""
        if self.root is not None:
            return np.asarray(self.root @ self.root.T)
        # The general dependence is one of the common scores here.
        return factor_correlation(0.0, self.weights)


@dataclass(frozen=True, kw_only=True)
class Member:
    """One event's slice of its unit's uniform."""

    event: int
    """Row of the event."""
    start: float
    stop: float


@dataclass(frozen=True, kw_only=True)
class Unit:
    """Events decided by one uniform: a single one, or a group that exclude another."""

    stream: str
    members: tuple[Member, ...]


@dataclass(frozen=True, kw_only=True)
class Places:
    """Every stratum in which an event may happen, in the order of the impact curves.

    Axes: ``m`` pairs of event and stratum; ``x`` those near an end of an event's
    slice, whose impact scores are taken from the inverse normal itself.
    """

    cell: NDArray[np.int64]
    """(m,) place in the (units, 4096) strata laid flat."""
    shift: NDArray[np.int64]
    """(m,) from the unit's row of trials to the event's, both laid flat."""
    curve: NDArray[np.int64]
    """(m,) row in the impact curves."""
    sign: Array
    """(m,) +1 for a threat, -1 for an opportunity."""
    second: Array
    first: Array
    constant: Array
    """(m,) parabolas in the place within the stratum for the score of the impact."""
    exact: NDArray[np.int64]
    """(x,) which of the m."""
    exact_lower: Array
    """(x,) the stratum's lower end less the start of the event's slice."""
    exact_width: Array
    """(x,) the event's probability."""


@dataclass(frozen=True, kw_only=True)
class Repeated:
    """An event that may happen more than once: a Poisson count of occurrences."""

    event: int
    stream: str
    frequency: float
    chances: Array
    """Cumulative Poisson chances of 0, 1, 2, ... occurrences."""


@dataclass(frozen=True, kw_only=True)
class CostModel:
    """One estimate, ready to be simulated.

    Axes: ``k`` packages, the ``v`` varying ones first; ``s`` systemic risks; ``e``
    open events; ``g`` patterns of systemic risks that act together.
    """

    seed: int
    target: int
    packages: tuple[WorkPackage, ...]
    package_place: NDArray[np.int64]
    """(k,) row of each package of the file."""
    base: Array
    """(k, 1) base estimate."""
    ranges: Curves
    varying: int
    streams: tuple[str, ...]
    """Stream names of the varying ranges."""
    dependence: Dependence
    causes: tuple[str, ...]
    """Ids of the common causes, in file order."""

    systemic: tuple[str, ...]
    systemic_place: NDArray[np.int64]
    uplifts: Curves
    uplift_shapes: tuple[Shape, ...]
    """(s,) the distributions behind `uplifts`."""
    acts: NDArray[np.bool_]
    """(k, s) whether the risk acts on the package."""
    patterns: Array
    """(g, s) the distinct rows of `acts`, as numbers."""
    pattern_of: NDArray[np.int64]
    """(k,) the pattern of each package."""

    events: tuple[RiskEvent, ...]
    event_place: NDArray[np.int64]
    impacts: Curves
    impact_row: NDArray[np.int64]
    """(e,) row in `impacts` of each event."""
    signs: Array
    """(e,) +1 for a threat, -1 for an opportunity."""
    units: tuple[Unit, ...]
    places: Places
    """Where in the strata of the units the events happen."""
    repeated: tuple[Repeated, ...]
    parents: tuple[int | None, ...]
    """Row of the event that must have happened, if any."""
    event_order: tuple[int, ...]
    """Rows with every parent before its children."""


def build_model(estimate: Estimate) -> CostModel:
    """Return the estimate as arrays."""
    by_id = sorted(estimate.packages, key=lambda p: p.id)
    ranges = Curves([p.cost.distribution for p in by_id])
    packages = tuple(by_id[i] for i in ranges.order)
    systemic = sorted(estimate.systemic, key=lambda s: s.id)
    uplifts = Curves([s.uplift.distribution for s in systemic])
    systemic = [systemic[i] for i in uplifts.order]
    acts = np.array(
        [[p.id in set(s.packages) for s in systemic] for p in packages], dtype=bool
    ).reshape(len(packages), len(systemic))
    patterns, pattern_of = np.unique(acts, axis=0, return_inverse=True)
    events = tuple(sorted(estimate.open_events, key=lambda e: e.id))
    impacts = Curves([e.impact_used.distribution for e in events])
    impact_row = np.empty(len(events), dtype=np.int64)
    impact_row[list(impacts.order)] = np.arange(len(events))
    signs = np.array([float(event.sign) for event in events])
    units, repeated = _units(events)
    parents = _parents(events)
    return CostModel(
        seed=estimate.run.seed,
        target=estimate.contingency.target,
        packages=packages,
        package_place=_places(estimate.packages, packages),
        base=np.array([[p.base] for p in packages]).reshape(-1, 1),
        ranges=ranges,
        varying=ranges.varying,
        streams=tuple(f"range/{p.id}" for p in packages[: ranges.varying]),
        dependence=dependence_of(estimate, packages[: ranges.varying]),
        causes=tuple(c.id for c in estimate.causes),
        systemic=tuple(s.id for s in systemic),
        systemic_place=_places(estimate.systemic, systemic),
        uplifts=uplifts,
        uplift_shapes=tuple(s.uplift.distribution for s in systemic),
        acts=acts,
        patterns=patterns.astype(np.float64),
        pattern_of=pattern_of.reshape(-1).astype(np.int64),
        events=events,
        event_place=_places(estimate.open_events, events),
        impacts=impacts,
        impact_row=impact_row,
        signs=signs,
        units=units,
        places=_places_of(units, impact_row, signs),
        repeated=repeated,
        parents=parents,
        event_order=_parents_first(parents),
    )


def _places(
    in_file: Sequence[_Identified], in_model: Sequence[_Identified]
) -> NDArray[np.int64]:
    """Return for each row of the file its row in the model."""
    row = {noun.id: i for i, noun in enumerate(in_model)}
    return np.array([row[noun.id] for noun in in_file], dtype=np.int64)


def dependence_of(estimate: Estimate, varying: tuple[WorkPackage, ...]) -> Dependence:
    """Return the dependence of the varying ranges (design: Gaussian copula).

    `varying` are the packages whose ranges vary, in the order of a cost model.
    """
    general = estimate.general_dependence or 0.0
    count = len(varying)
    if estimate.correlations:
        return _from_pairs(estimate, varying, general)
    weights = np.zeros((count, 1 + len(estimate.causes)))
    weights[:, 0] = np.sqrt(general)
    column = {cause.id: j for j, cause in enumerate(estimate.causes, start=1)}
    for row, package in enumerate(varying):
        for load in package.loads:
            weights[row, column[load.cause]] += load.weight
    own = own_weight(general, weights[:, 1:])
    names = ("dependence/general", *(f"cause/{c.id}" for c in estimate.causes))
    first = 0 if general > 0.0 else 1
    return Dependence(
        own=own[:, None],
        weights=weights[:, first:],
        common=names[first:],
        root=None,
        repair=None,
    )


def _from_pairs(
    estimate: Estimate, varying: tuple[WorkPackage, ...], general: float
) -> Dependence:
    """Return the dependence from pairwise rank correlations.

    Pairs that are not named have the general dependence.
    """
    count = len(varying)
    wanted = np.full((count, count), general)
    np.fill_diagonal(wanted, 1.0)
    row = {package.id: i for i, package in enumerate(varying)}
    for pair in estimate.correlations:
        if pair.a in row and pair.b in row:
            a, b = row[pair.a], row[pair.b]
            wanted[a, b] = wanted[b, a] = float(rank_to_normal(pair.correlation))
    nearest = nearest_correlation(wanted)
    return Dependence(
        own=np.zeros((count, 1)),
        weights=np.zeros((count, 0)),
        common=(),
        root=np.asarray(np.linalg.cholesky(nearest.matrix), dtype=np.float64),
        repair=None
        if nearest.pair is None
        else (
            nearest.largest_change,
            varying[nearest.pair[0]].id,
            varying[nearest.pair[1]].id,
        ),
    )


def _units(
    events: tuple[RiskEvent, ...],
) -> tuple[tuple[Unit, ...], tuple[Repeated, ...]]:
    """Return the uniforms that decide the events, in order of their first member."""
    from scipy.stats import poisson

    row = {event.id: i for i, event in enumerate(events)}
    units: list[Unit] = []
    repeated: list[Repeated] = []
    for i, event in enumerate(events):
        if event.happens == "repeatedly":
            frequency = float(event.frequency_used or 0.0)
            most = int(poisson.isf(1e-16, frequency)) + 1
            repeated.append(
                Repeated(
                    event=i,
                    stream=f"event/{event.id}",
                    frequency=frequency,
                    chances=poisson.cdf(np.arange(most + 1), frequency),
                )
            )
            continue
        whole = sorted({event.id, *event.excludes})
        group = [member for member in whole if member in row]
        if group[0] != event.id:
            continue
        start = 0.0
        members = []
        for member in group:
            stop = start + float(events[row[member]].probability_used or 0.0)
            members.append(Member(event=row[member], start=start, stop=min(stop, 1.0)))
            start = stop
        # Named after the whole group, so that closing a member moves no stream.
        units.append(Unit(stream=f"event/{whole[0]}", members=tuple(members)))
    return tuple(units), tuple(repeated)


def _parents(events: tuple[RiskEvent, ...]) -> tuple[int | None, ...]:
    """Return the row of each event's parent; one that has occurred asks nothing."""
    row = {event.id: i for i, event in enumerate(events)}
    return tuple(
        row.get(event.requires) if event.requires else None for event in events
    )


def _parents_first(parents: tuple[int | None, ...]) -> tuple[int, ...]:
    """Return the rows ordered so that parents come before their children."""
    order: list[int] = []
    seen: set[int] = set()

    def visit(row: int) -> None:
        if row in seen:
            return
        seen.add(row)
        parent = parents[row]
        if parent is not None:
            visit(parent)
        order.append(row)

    for row in range(len(parents)):
        visit(row)
    return tuple(order)


EXACT_STRATA = 32
"""Strata at either end of an event's slice that take no parabola."""


def _places_of(
    units: tuple[Unit, ...], impact_row: NDArray[np.int64], signs: Array
) -> Places:
    """Return where the events happen, sorted by impact curve and stratum."""
    parts = [
        _slice_of(unit, member)
        for unit, member in sorted(
            ((i, member) for i, unit in enumerate(units) for member in unit.members),
            key=lambda pair: int(impact_row[pair[1].event]),
        )
        if member.stop > member.start
    ]
    cells, events, lowers, widths, inner = (
        np.concatenate([part[i] for part in parts]) if parts else np.zeros(0)
        for i in range(5)
    )
    exact = np.flatnonzero(inner == 0)
    curved = np.flatnonzero(inner)
    second, first, constant = (np.zeros(cells.size) for _ in range(3))
    if curved.size:
        width = 1.0 / (BLOCK * widths[curved])
        second[curved], first[curved], constant[curved] = parabolas(
            lowers[curved] / widths[curved], width
        )
    cell, event = cells.astype(np.int64), events.astype(np.int64)
    return Places(
        cell=cell,
        shift=BLOCK * (event - cell // BLOCK),
        curve=impact_row[event],
        sign=signs[event],
        second=second,
        first=first,
        constant=constant,
        exact=exact,
        exact_lower=lowers[exact],
        exact_width=widths[exact],
    )


def _slice_of(unit: int, member: Member) -> tuple[Array, Array, Array, Array, Array]:
    """Return cells, event, lower ends, probability and whether a parabola will do."""
    first = int(np.floor(member.start * BLOCK))
    last = int(np.ceil(member.stop * BLOCK))
    stratum = np.arange(first, last)
    size = stratum.size
    inner = np.zeros(size)
    inner[EXACT_STRATA : max(size - EXACT_STRATA, EXACT_STRATA)] = 1.0
    return (
        unit * BLOCK + stratum.astype(np.float64),
        np.full(size, float(member.event)),
        stratum / BLOCK - member.start,
        np.full(size, member.stop - member.start),
        inner,
    )
