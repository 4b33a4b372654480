"""What the number rests on: one change at a time, fresh seeds, break points.

Every question is asked of the same trials: the first blocks of the issued run.  An
input keeps its draws whatever else changes, so the difference between two runs is
the effect of the change, with next to no noise.
"""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray
from scipy.special import stdtrit

from contingency.assurance.break_points import BreakPoint, find_break_points
from contingency.assurance.material import Material
from contingency.assurance.trial_set import TrialSet
from contingency.assurance.what_if import (
    Changed,
    after_treatment,
    before_treatment,
    with_chances,
    with_dependence,
    with_ends,
    with_shape,
    without_dependence,
    without_systemic,
)
from contingency.estimate.nouns import Estimate, ShapeName
from contingency.quantities.percentiles import rank

Array = NDArray[np.float64]

BLOCKS = 4
"""Blocks of trials for every question; ours: some 16,000 trials, in seconds."""
SEEDS = 20
LEVEL_STEP = 10
"""Points by which the target level is moved, and by which it must fall to break."""


ASSUMPTIONS = {
    "ends-at-tenths": "ends",
    "ends-at-fifths": "ends",
    "pert-as-triangular": "shape",
    "triangular-as-pert": "shape",
    "no-dependence": "dependence",
    "general-dependence-0": "dependence",
    "general-dependence-25": "dependence",
    "general-dependence-50": "dependence",
    "no-systemic-risks": "systemic risks",
    "all-before-treatment": "treatment",
    "all-after-treatment": "treatment",
    "chances-halved": "chances",
    "chances-raised": "chances",
}
"""The assumption that each question is about."""


@dataclass(frozen=True, kw_only=True, slots=True)
class WhatIf:
    """One change to the estimate and what it does to the contingency at the target."""

    slug: str
    """Permanent name of the question."""
    title: str
    """The change, in words that follow "with"."""
    contingency: float | None
    """Contingency at the target with the change, money; None where the question
    does not arise."""
    effect: float
    """Change of the contingency, money; 0 where the question does not arise."""
    half_width: float
    """Half-width of the 95 % interval of `effect` from sampling, money."""
    reason: str = ""
    """Why the question does not arise."""
    is_judgement: bool = True
    """Whether it changes an assumption, and not the level that is asked for."""


@dataclass(frozen=True, kw_only=True, slots=True)
class SeedTest:
    """The contingency at the target under fresh seeds."""

    seeds: tuple[int, ...]
    contingencies: tuple[float, ...]
    """Money, in the order of `seeds`."""
    trials: int
    """Trials of each fresh run; the issued run may have more."""
    issued: float
    """Contingency of the issued run, money."""

    @property
    def below(self) -> int:
        """Number of fresh runs with a contingency below the issued one."""
        return sum(amount < self.issued for amount in self.contingencies)

    @property
    def lowest(self) -> float:
        """Smallest contingency of a fresh run, money."""
        return min(self.contingencies)

    @property
    def highest(self) -> float:
        """Largest contingency of a fresh run, money."""
        return max(self.contingencies)


@dataclass(frozen=True, kw_only=True, slots=True)
class Robustness:
    """What the contingency at the target rests on."""

    percent: int
    """The target level, whole percent."""
    contingency: float
    """Issued contingency at the target, money."""
    trials: int
    """Trials of each question, the first of the issued run."""
    what_ifs: tuple[WhatIf, ...]
    """In the order of the report."""
    seeds: SeedTest
    break_percent: int
    """The request counts as broken once it holds only this level, whole percent."""
    break_points: tuple[BreakPoint, ...]
    """The ten largest drivers, then the common judgements."""

    @property
    def asked(self) -> tuple[WhatIf, ...]:
        """The questions that arise, in the order of the report."""
        return tuple(one for one in self.what_ifs if one.contingency is not None)

    def largest(self, count: int = 3) -> tuple[WhatIf, ...]:
        """Return the `count` assumptions that matter most, largest effect first.

        Of several changes to one assumption the one with the largest effect stands
        for it.  The largest driver left out is no assumption: drivers have a list of
        their own.
        """
        ordered = sorted(self.asked, key=lambda one: -abs(one.effect))
        first: dict[str, WhatIf] = {}
        for one in ordered:
            if one.slug in ASSUMPTIONS:
                first.setdefault(ASSUMPTIONS[one.slug], one)
        return tuple(first.values())[:count]


def what_it_rests_on(material: Material) -> Robustness:
    """Return the what-if table, the seed test and the break points of a study.

    Parameters
    ----------
    material : Material
        Results of the issued run, price-date money.

    Returns
    -------
    Robustness
        Effects are differences between runs with common random numbers, added to
        the issued contingency.  The half-width of an effect is Student's t times the
        standard error of the block's own differences.
    """
    blocks = min(BLOCKS, material.simulation.blocks)
    trials = TrialSet(material.estimate, blocks=blocks)
    percent = material.target.percent
    broken = max(percent - LEVEL_STEP, 1)
    return Robustness(
        percent=percent,
        contingency=material.target.contingency,
        trials=trials.total.size,
        what_ifs=(
            *_what_ifs(material, trials),
            _largest_driver(material),
            *_levels(material),
        ),
        seeds=_fresh_seeds(material, trials),
        break_percent=broken,
        break_points=find_break_points(material, trials, broken_percent=broken),
    )


_Question = tuple[str, str, Callable[[Estimate], Changed]]

_QUESTIONS: tuple[_Question, ...] = (
    (
        "ends-at-tenths",
        "every range as if its ends were P10 and P90",
        lambda e: with_ends(e, 10),
    ),
    (
        "ends-at-fifths",
        "every range as if its ends were P20 and P80",
        lambda e: with_ends(e, 20),
    ),
    (
        "pert-as-triangular",
        "every beta-PERT range read as triangular",
        lambda e: with_shape(e, ShapeName.PERT, ShapeName.TRIANGULAR),
    ),
    (
        "triangular-as-pert",
        "every triangular range read as beta-PERT",
        lambda e: with_shape(e, ShapeName.TRIANGULAR, ShapeName.PERT),
    ),
    ("no-dependence", "independent ranges", without_dependence),
    (
        "general-dependence-0",
        "a general dependence of 0",
        lambda e: with_dependence(e, 0.0),
    ),
    (
        "general-dependence-25",
        "a general dependence of 0.25",
        lambda e: with_dependence(e, 0.25),
    ),
    (
        "general-dependence-50",
        "a general dependence of 0.5",
        lambda e: with_dependence(e, 0.5),
    ),
    ("no-systemic-risks", "no systemic risks", without_systemic),
    ("all-before-treatment", "all events before treatment", before_treatment),
    ("all-after-treatment", "all events after treatment", after_treatment),
    (
        "chances-halved",
        "the chances of all events halved",
        lambda e: with_chances(e, 0.5),
    ),
    (
        "chances-raised",
        "the chances of all events raised by half",
        lambda e: with_chances(e, 1.5),
    ),
)


def _what_ifs(material: Material, trials: TrialSet) -> list[WhatIf]:
    """Return the answers to the questions that change the estimate."""
    answers: list[WhatIf] = []
    for slug, title, change in _QUESTIONS:
        changed = change(material.estimate)
        if isinstance(changed, str):
            answers.append(_not_asked(slug, title, changed))
            continue
        effect, half = _effect(
            trials.total, trials.total_of(changed), material.target.percent
        )
        answers.append(
            WhatIf(
                slug=slug,
                title=_exact_title(slug, title, changed),
                contingency=material.target.contingency + effect,
                effect=effect,
                half_width=half,
            )
        )
    return answers


def _exact_title(slug: str, title: str, changed: Estimate) -> str:
    """Return the title with the dependence that the loads left room for."""
    if slug.startswith("general-dependence"):
        return f"a general dependence of {changed.general_dependence or 0.0:.3g}"
    return title


def _not_asked(slug: str, title: str, reason: str) -> WhatIf:
    return WhatIf(
        slug=slug,
        title=title,
        contingency=None,
        effect=0.0,
        half_width=0.0,
        reason=reason,
    )


def _effect(before: Array, after: Array, percent: int) -> tuple[float, float]:
    """Return the change of a percentile and its 95 % half-width, money.

    `before` and `after` are (b, n): the same trials with and without the change.
    """
    change = quantile(after.ravel(), percent) - quantile(before.ravel(), percent)
    blocks = before.shape[0]
    if blocks < 2:
        return change, float("nan")
    differences = [
        quantile(b, percent) - quantile(a, percent)
        for a, b in zip(before, after, strict=True)
    ]
    error = np.std(differences, ddof=1) / np.sqrt(blocks)
    return change, float(stdtrit(blocks - 1, 0.975) * error)


def quantile(total: Array, percent: int) -> float:
    """Return the smallest total that `percent` of the (n,) trials do not exceed."""
    place = rank(total.size, percent) - 1
    return float(np.partition(total, place)[place])


def _largest_driver(material: Material) -> WhatIf:
    """Return what the contingency would be without its largest driver."""
    slug, title = "no-largest-driver", "the largest driver left out"
    drivers = [driver for driver in material.drivers if driver.kind != "cause"]
    if not drivers:
        return _not_asked(slug, title, "The estimate has no drivers.")
    largest = max(drivers, key=lambda driver: abs(driver.variance_share))
    return WhatIf(
        slug=slug,
        title=f"{title}: {largest.id} {largest.name}",
        contingency=material.target.contingency - largest.removal_effect,
        effect=-largest.removal_effect,
        half_width=0.0,
    )


def _levels(material: Material) -> list[WhatIf]:
    """Return the contingency ten points below and above the target."""
    answers: list[WhatIf] = []
    for step, slug in ((-LEVEL_STEP, "level-lower"), (LEVEL_STEP, "level-higher")):
        level = min(max(material.target.percent + step, 1), 99)
        effect = material.percentile(level) - material.target.total
        answers.append(
            WhatIf(
                slug=slug,
                title=f"P{level:02d} instead of {material.target.name}",
                contingency=material.target.contingency + effect,
                effect=effect,
                half_width=0.0,
                is_judgement=False,
            )
        )
    return answers


def _fresh_seeds(material: Material, trials: TrialSet) -> SeedTest:
    """Return the contingency under the twenty seeds that follow the issued one."""
    seeds = tuple(material.simulation.seed + step for step in range(1, SEEDS + 1))
    base = material.estimate.base
    return SeedTest(
        seeds=seeds,
        contingencies=tuple(
            quantile(trials.total_with_seed(seed).ravel(), material.target.percent)
            - base
            for seed in seeds
        ),
        trials=trials.total.size,
        issued=material.target.contingency,
    )
