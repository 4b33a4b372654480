"""Common random numbers of a bridge: every named stream once, for all its blocks.

Both revisions draw from the streams of the later one's seed.  What is the same in
both then costs the same in every trial, and only what changed moves the total.
"""

from __future__ import annotations

import numpy as np
from numpy.typing import NDArray

from contingency.estimate.nouns import Estimate, SystemicRisk, WorkPackage
from contingency.quantities.dependence import rank_to_normal
from contingency.quantities.draws import BLOCK, Source, scores, strata
from contingency.simulation.cost_model import CostModel

Array = NDArray[np.float64]


class Draws:
    """Normal scores of named streams, in trial order, kept once made."""

    def __init__(self, seed: int, blocks: int) -> None:
        self.seed = seed
        self.blocks = blocks
        self._source = Source(seed)
        self._kept: dict[str, Array] = {}

    @property
    def trials(self) -> int:
        """Number of trials, n."""
        return self.blocks * BLOCK

    def normal(self, name: str) -> Array:
        """Return the (n,) scores of a stream over all blocks."""
        if name not in self._kept:
            self._kept[name] = np.concatenate(
                [
                    scores(strata(self._source, [name], block))[0]
                    for block in range(self.blocks)
                ]
            )
        return self._kept[name]


class RangeScores:
    """Scores behind the ranges under the dependence of one revision.

    `strangers` are packages whose range varies in the other revision only.  They take
    the general dependence of this one, and their loads on causes that it knows.
    """

    def __init__(
        self,
        estimate: Estimate,
        model: CostModel,
        strangers: tuple[WorkPackage, ...],
        draws: Draws,
    ) -> None:
        self._draws = draws
        dependence = model.dependence
        own = [p.id for p in model.packages[: model.varying]]
        self._rows: dict[str, tuple[float, tuple[tuple[str, float], ...]]] = {}
        self._root: Array | None = None
        self._order: tuple[str, ...] = ()
        if dependence.root is not None:
            self._order = (*own, *(p.id for p in strangers))
            self._root = _longer_root(dependence.root, self._order, estimate)
            return
        for i, name in enumerate(own):
            weights = zip(dependence.common, dependence.weights[i], strict=True)
            pairs = tuple((c, float(w)) for c, w in weights if w != 0.0)
            self._rows[name] = (float(dependence.own[i, 0]), pairs)
        for package in strangers:
            self._rows[package.id] = _stranger(package, estimate)

    def rule(self, package_id: str) -> object:
        """Return what the score of a package is made of; the same rule, same score."""
        if self._root is None:
            return self._rows.get(package_id)
        row = self._order.index(package_id) if package_id in self._order else None
        if row is None:
            return None
        line = self._root[row, : row + 1]
        return tuple(zip(self._order[: row + 1], line.tolist(), strict=True))

    def score(self, package_id: str) -> Array:
        """Return the (n,) scores of a package's range."""
        if self._root is not None:
            row = self._order.index(package_id)
            total = np.zeros_like(self._draws.normal(f"range/{package_id}"))
            for name, weight in zip(self._order, self._root[row], strict=True):
                if weight != 0.0:
                    total += weight * self._draws.normal(f"range/{name}")
            return total
        own, common = self._rows[package_id]
        score = own * self._draws.normal(f"range/{package_id}")
        for name, weight in common:
            score += weight * self._draws.normal(name)
        return np.asarray(score)


def _stranger(
    package: WorkPackage, estimate: Estimate
) -> tuple[float, tuple[tuple[str, float], ...]]:
    """Return own weight and common weights of a package of the other revision."""
    general = estimate.general_dependence or 0.0
    mine = estimate.find_package(package.id)
    known = {cause.id for cause in estimate.causes}
    loads = [
        (f"cause/{load.cause}", load.weight)
        for load in (mine or package).loads
        if load.cause in known
    ]
    squares = sum(weight**2 for _, weight in loads)
    if general + squares > 1.0 + 1e-9:
        loads, squares = [], 0.0
    common = [("dependence/general", float(np.sqrt(general)))] if general else []
    own = float(np.sqrt(max(0.0, 1.0 - general - squares)))
    return own, (*common, *loads)


def _longer_root(root: Array, order: tuple[str, ...], estimate: Estimate) -> Array:
    """Return a Cholesky factor with rows for strangers below those of the revision.

    The rows of the revision stay as they are, so that its own draws do.  A stranger
    has the correlations that are given for it, else the general dependence; where no
    such correlations are possible together, weaker ones of the same pattern.
    """
    mine = root.shape[0]
    general = estimate.general_dependence or 0.0
    row = {name: i for i, name in enumerate(order)}
    wanted = np.full((len(order), len(order)), general)
    for pair in estimate.correlations:
        if pair.a in row and pair.b in row:
            a, b = row[pair.a], row[pair.b]
            wanted[a, b] = wanted[b, a] = float(rank_to_normal(pair.correlation))
    np.fill_diagonal(wanted, 1.0)
    longer = np.zeros_like(wanted)
    longer[:mine, :mine] = root
    for strength in (1.0, 0.75, 0.5, 0.25, 0.0):
        across = np.linalg.solve(root, strength * wanted[:mine, mine:]).T
        rest = wanted[mine:, mine:] * strength
        np.fill_diagonal(rest, 1.0)
        left = rest - across @ across.T
        if not left.size or np.linalg.eigvalsh(left)[0] > 1e-12:
            longer[mine:, :mine] = across
            longer[mine:, mine:] = np.linalg.cholesky(left) if left.size else left
            break
    return longer


class SystemicFactors:
    """What the systemic risks of one revision put on the cost of each package."""

    def __init__(self, estimate: Estimate, model: CostModel, draws: Draws) -> None:
        self._draws = draws
        self._model = model
        self._risks = {risk.id: risk for risk in estimate.systemic}
        self._row = {name: i for i, name in enumerate(model.systemic)}
        self._mine = frozenset(p.id for p in estimate.packages)
        self._uplifts: dict[str, Array] = {}
        self._factors: dict[tuple[str, ...], Array] = {}

    @property
    def names(self) -> tuple[str, ...]:
        """Ids of all risks of the revision, in file order."""
        return tuple(self._risks)

    def acting(self, package: WorkPackage) -> tuple[str, ...]:
        """Return the ids of the risks that act on a package of either revision."""
        return tuple(
            sorted(i for i, r in self._risks.items() if self._acts(r, package))
        )

    def _acts(self, risk: SystemicRisk, package: WorkPackage) -> bool:
        """Whether a risk acts; on a package of the other revision by its words."""
        if package.id in self._mine:
            return package.id in risk.packages
        return bool({"all", package.id, package.group or "all"} & {*risk.applies_to})

    def risk(self, name: str) -> SystemicRisk:
        """Return one risk."""
        return self._risks[name]

    def uplift(self, name: str) -> Array:
        """Return the (n,) uplifts of one risk, fractions."""
        if name not in self._uplifts:
            score = self._draws.normal(f"systemic/{name}")[None, :].copy()
            out = np.empty_like(score)
            self._model.uplifts.read(score, self._row[name], out)
            self._uplifts[name] = out[0]
        return self._uplifts[name]

    def factor(self, package: WorkPackage) -> Array | float:
        """Return the (n,) factor on a package: 1 and all uplifts that act on it."""
        acting = self.acting(package)
        if not acting:
            return 1.0
        if acting not in self._factors:
            total = 1.0 + self.uplift(acting[0])
            for name in acting[1:]:
                total += self.uplift(name)
            self._factors[acting] = total
        return self._factors[acting]
