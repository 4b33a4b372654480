"""The cost of events in a mixture of two revisions, trial by trial.

Events that require or exclude one another, in either revision, are drawn together;
each may stand as in the earlier or as in the later revision.
"""

from __future__ import annotations

from collections.abc import Iterable, Mapping
from dataclasses import dataclass, field

import numpy as np
from numpy.typing import NDArray

from contingency.estimate.nouns import (
    CostRange,
    Estimate,
    RiskEvent,
    ShapeName,
    WorkPackage,
)
from contingency.quantities.draws import Source
from contingency.simulation.cost_model import build_model
from contingency.simulation.events import draw_events
from contingency.tracking.families import Family
from contingency.tracking.matching import Match
from contingency.tracking.moves import event_family
from contingency.tracking.scores import Draws

Array = NDArray[np.float64]

_NOTHING = WorkPackage(
    id="nothing",
    name="",
    base=0.0,
    cost=CostRange(shape=ShapeName.FIXED, likely=0.0),
    line=0,
)
"""Stands where a model needs a package and the events alone are drawn."""


@dataclass(frozen=True, kw_only=True)
class EventPiece:
    """Events that are tied to one another: their share of the total."""

    ids: tuple[str, ...]
    before: Mapping[str, RiskEvent]
    after: Mapping[str, RiskEvent]
    family_of: Mapping[str, Family]
    """Family by event, of those that moved."""
    shell: Estimate
    """An estimate whose events are put in turn."""
    draws: Draws
    _kept: dict[frozenset[str], Array] = field(default_factory=dict)

    @property
    def families(self) -> frozenset[Family]:
        """The families that move this piece."""
        return frozenset(self.family_of.values())

    def cost(self, on: frozenset[Family]) -> Array:
        """Return the (n,) cost of all its events in one mixture, money."""
        later = frozenset(i for i, f in self.family_of.items() if f in on)
        return self.cost_with(later)

    def cost_with(self, later: frozenset[str]) -> Array:
        """Return the (n,) cost with these of the moved events as in the later revision.

        Events that did not move are as in the later one; their draws are the same.
        """
        if later not in self._kept:
            self._kept[later] = self._drawn(later)
        return self._kept[later]

    def _drawn(self, later: frozenset[str]) -> Array:
        chosen = {}
        for name in self.ids:
            as_later = name in later or name not in self.family_of
            state = (self.after if as_later else self.before).get(name)
            if state is not None:
                chosen[name] = state
        events = mixed(chosen)
        if not events:
            return np.zeros(self.draws.trials)
        model = build_model(self.shell.model_copy(update={"events": events}))
        source = Source(self.draws.seed)
        return np.concatenate(
            [
                draw_events(model, block, source).cost.sum(axis=0)
                for block in range(self.draws.blocks)
            ]
        )


def mixed(chosen: Mapping[str, RiskEvent]) -> tuple[RiskEvent, ...]:
    """Return the open events of a mixture, fit to be drawn together.

    An event whose condition is closed or not there cannot happen and is left out.
    Whatever one member of a group says about excluding holds for the whole group.
    """
    live = {name: e for name, e in chosen.items() if e.is_open}
    while True:
        stuck = [
            name
            for name, event in live.items()
            if event.requires
            and event.requires not in live
            and not _has_occurred(chosen.get(event.requires))
        ]
        if not stuck:
            break
        for name in stuck:
            del live[name]
    result = []
    for group in _groups(live.values()):
        together = {i for name in group for i in (name, *live[name].excludes)}
        for name in group:
            event = live[name]
            if len(group) > 1:
                others = tuple(sorted(together - {name}))
                event = event.model_copy(update={"excludes": others})
            result.append(event)
    return tuple(result)


def _has_occurred(event: RiskEvent | None) -> bool:
    return event is not None and event.status == "occurred"


def _groups(events: Iterable[RiskEvent]) -> list[list[str]]:
    """Return the ids of the events, those that exclude one another together."""
    return joined({e.id: {*e.excludes} for e in events})


def joined(ties: Mapping[str, set[str]]) -> list[list[str]]:
    """Return the names in groups that ties connect; ties to other names are nothing."""
    both: dict[str, set[str]] = {name: set() for name in ties}
    for name, others in ties.items():
        for other in others & ties.keys():
            both[name].add(other)
            both[other].add(name)
    groups, seen = [], set()
    for name in ties:
        if name in seen:
            continue
        group, waiting = {name}, [name]
        while waiting:
            fresh = both[waiting.pop()] - group
            group |= fresh
            waiting += fresh
        seen |= group
        groups.append([other for other in ties if other in group])
    return groups


def event_pieces(match: Match, draws: Draws) -> tuple[EventPiece, ...]:
    """Return the events of both revisions, those tied together as one piece."""
    before = {e.id: e for e in match.earlier.events}
    after = {e.id: e for e in match.later.events}
    ties: dict[str, set[str]] = {name: set() for name in (*after, *before)}
    for event in (*before.values(), *after.values()):
        ties[event.id] |= {*event.excludes}
        if event.requires:
            ties[event.id].add(event.requires)
    shell = match.later.model_copy(
        update={
            "packages": (_NOTHING,),
            "systemic": (),
            "causes": (),
            "correlations": (),
        }
    )
    family = {
        name: event_family(match, before.get(name), after.get(name)) for name in ties
    }
    return tuple(
        EventPiece(
            ids=tuple(group),
            before={i: before[i] for i in group if i in before},
            after={i: after[i] for i in group if i in after},
            family_of={i: f for i in group if (f := family[i]) is not None},
            shell=shell,
            draws=draws,
        )
        for group in joined(ties)
    )
