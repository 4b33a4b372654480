"""Planted faults and clean twins: ranges, their evidence, dependence, class."""

import dataclasses

from contingency.estimate.nouns import Ends, Evidence, Load, PairCorrelation
from tests.assurance.builder import (
    PACKAGES,
    cause,
    changed,
    cost,
    package,
    sound_estimate,
    sound_study,
    spoiled,
    systemic,
    with_event,
    with_package,
)
from tests.assurance.case import fault, twin

THREE_ROUND = ("P1", "P2", "P3")


def all_ranged(low, high, ids=None, **more):
    """The packages with one relative range; all, or those named."""
    return tuple(
        p.model_copy(update={"cost": cost(low * p.base, p.base, high * p.base, **more)})
        if ids is None or p.id in ids
        else p
        for p in PACKAGES
    )


def many(count):
    """So many packages, each with a range of its own."""
    return tuple(
        package(f"P{i}", f"Work {i}", 1_000_000, 0.9, 1.2 + i / 500)
        for i in range(1, count + 1)
    )


def pairs(*given):
    """Correlations of pairs of packages."""
    return tuple(PairCorrelation(a=a, b=b, correlation=r, line=2) for a, b, r in given)


def correlated(repair):
    """The sound study with correlations and the repair that they needed."""
    estimate = sound_estimate(
        general_dependence=None, correlations=pairs(("P1", "P2", 0.3))
    )
    return spoiled(estimate=estimate, correlation_repair=repair)


def scaled_drivers(count, small):
    """So many range drivers, `small` of them of no weight."""
    one = next(d for d in sound_study().drivers if d.kind == "range")
    shares = [0.001] * small + [0.5 / (count - small)] * (count - small)
    drivers = [
        dataclasses.replace(one, id=f"P{i}", variance_share=share)
        for i, share in enumerate(shares)
    ]
    return spoiled(drivers=tuple(drivers))


def upper_side(ratio):
    """The sound study with P90 so many times P50."""
    curve = list(sound_study().percentiles)
    curve[89] = ratio * curve[49]
    return spoiled(percentiles=tuple(curve))


CASES = (
    fault(
        "ends-undefined",
        "nobody said",
        lambda: with_package(
            "P2", cost=cost(12e6, 14e6, 18e6, ends=Ends(), ends_stated=False)
        ),
        "stop",
        "1.46 times the stated one; as P10 to P90 1.81 times; as P15 to P85 2.21",
        rows=("P2",),
    ),
    fault(
        "ends-undefined",
        "in an event",
        lambda: with_event(
            "R1", impact=cost(1e5, 2e5, 4e5, ends=Ends(), ends_stated=False)
        ),
        "stop",
        "1 row (R1)",
        rows=("R1",),
    ),
    twin(
        "ends-undefined",
        "limits, and meant",
        lambda: with_package("P2", cost=cost(12e6, 14e6, 18e6, ends=Ends())),
    ),
    fault(
        "likely-at-an-end",
        "can only rise",
        lambda: with_package("P2", cost=cost(14e6, 14e6, 18e6, ends=Ends())),
        "note",
        "1 row",
        rows=("P2",),
    ),
    twin("likely-at-an-end", "both ways", sound_estimate),
    fault(
        "impossible-values",
        "a normal event",
        lambda: with_event("R1", impact=cost(1e5, None, 1.1e6, shape="normal")),
        "caution",
        "are negative",
        where="R1",
    ),
    fault(
        "impossible-values",
        "an uplift below nothing",
        lambda: sound_estimate(
            systemic=(systemic(uplift=cost(-1.5, None, 1.6, shape="normal")),)
        ),
        "caution",
        "lie below -100 %",
        where="S1",
    ),
    twin(
        "impossible-values",
        "a normal package",
        lambda: with_package("P1", cost=cost(8e6, None, 10e6, shape="normal")),
    ),
    fault(
        "copied-ranges",
        "three of seven",
        lambda: sound_estimate(packages=all_ranged(0.9, 1.2, ("P1", "P2", "P3", "P4"))),
        "caution",
        "79 % of the base share one range (-10 % to +20 %, P10-P90): P1, P2, P3, P4",
        rows=("P1", "P2", "P3", "P4"),
    ),
    fault(
        "copied-ranges",
        "all of them",
        lambda: sound_estimate(packages=all_ranged(0.9, 1.2)),
        "major",
        "7 packages worth 100 % of the base",
        rows=tuple(p.id for p in PACKAGES),
    ),
    twin(
        "copied-ranges",
        "within one group",
        lambda: sound_estimate(packages=all_ranged(0.9, 1.2, THREE_ROUND)),
    ),
    twin(
        "copied-ranges",
        "two alike",
        lambda: sound_estimate(packages=all_ranged(0.9, 1.2, ("P1", "P2"))),
    ),
    fault(
        "mirrored-ranges",
        "as likely to fall as to rise",
        lambda: sound_estimate(packages=all_ranged(0.85, 1.15, THREE_ROUND)),
        "major",
        "67 % of the ranged money, in 3 packages (P1, P2, P3)",
        rows=THREE_ROUND,
    ),
    fault(
        "mirrored-ranges",
        "normal without a likely value",
        lambda: sound_estimate(
            packages=tuple(
                p.model_copy(
                    update={
                        "cost": cost(0.8 * p.base, None, 1.3 * p.base, shape="normal")
                    }
                )
                for p in PACKAGES
            )
        ),
        "major",
        "100 % of the ranged money",
        rows=tuple(p.id for p in PACKAGES),
    ),
    twin(
        "mirrored-ranges",
        "half of it",
        lambda: sound_estimate(packages=all_ranged(0.85, 1.15, ("P1", "P2"))),
    ),
    fault(
        "ranges-lean-down",
        "more hope than fear",
        lambda: sound_estimate(packages=all_ranged(0.7, 1.1, THREE_ROUND)),
        "major",
        "at most 0.33 times as far",
        rows=THREE_ROUND,
    ),
    twin(
        "ranges-lean-down",
        "one package",
        lambda: sound_estimate(packages=all_ranged(0.7, 1.1, ("P1",))),
    ),
    fault(
        "many-unlinked-ranges",
        "31 with nothing in common",
        lambda: sound_estimate(packages=many(31), general_dependence=0.0),
        "major",
        "31 ranges",
    ),
    twin(
        "many-unlinked-ranges",
        "31 with a general dependence",
        lambda: sound_estimate(packages=many(31)),
    ),
    twin(
        "many-unlinked-ranges",
        "30 with nothing in common",
        lambda: sound_estimate(packages=many(30), general_dependence=0.0),
    ),
    fault(
        "small-ranges",
        "13 of 25",
        lambda: scaled_drivers(25, 13),
        "caution",
        "13 of 25 package ranges",
        rows=tuple(f"P{i}" for i in range(13)),
    ),
    twin("small-ranges", "12 of 25", lambda: scaled_drivers(25, 12)),
    fault(
        "ranges-without-evidence",
        "the largest driver has none",
        lambda: spoiled(
            estimate=sound_estimate(systemic=(systemic(evidence=Evidence()),))
        ),
        "major",
        "S1 (no basis or kind of basis or giver or date)",
        rows=("S1",),
    ),
    twin(
        "ranges-without-evidence",
        "only the smallest driver has none",
        lambda: spoiled(estimate=with_event("R4", evidence=Evidence())),
    ),
    fault(
        "no-dependence",
        "not written",
        lambda: sound_estimate(general_dependence=None),
        "stop",
        "no dependence is written down",
    ),
    fault(
        "no-dependence",
        "nought on purpose",
        lambda: sound_estimate(general_dependence=0.0),
        "major",
        "would hide 33 %",
    ),
    fault(
        "no-dependence",
        "a cause of one package only",
        lambda: sound_estimate(
            general_dependence=None,
            causes=(cause("c", "crew"),),
            packages=changed(PACKAGES, "P1", loads=(Load(cause="c", weight=0.5),)),
        ),
        "stop",
        "7 uncertain packages",
    ),
    twin(
        "no-dependence",
        "a shared cause",
        lambda: sound_estimate(
            general_dependence=None,
            causes=(cause("c", "crew"),),
            packages=tuple(
                p.model_copy(update={"loads": (Load(cause="c", weight=0.5),)})
                for p in PACKAGES
            ),
        ),
    ),
    twin(
        "no-dependence",
        "five packages",
        lambda: sound_estimate(general_dependence=None, packages=PACKAGES[:5]),
    ),
    twin(
        "no-dependence",
        "correlations",
        lambda: sound_estimate(
            general_dependence=None, correlations=pairs(("P1", "P2", 0.3))
        ),
    ),
    fault(
        "weak-dependence",
        "hardly any",
        lambda: spoiled(implied_average_correlation=0.04),
        "major",
        "correlation of 0.04; published defaults are 0.2 to 0.3",
    ),
    fault(
        "weak-dependence",
        "some",
        lambda: spoiled(implied_average_correlation=0.12),
        "caution",
        "At 0.25 the contingency at P80 would be about",
    ),
    twin(
        "weak-dependence",
        "what a copula makes of 0.2",
        lambda: spoiled(implied_average_correlation=0.19),
    ),
    fault(
        "strong-dependence",
        "all as one",
        lambda: spoiled(implied_average_correlation=0.86),
        "caution",
        "0.86",
    ),
    twin("strong-dependence", "as it is", sound_study),
    fault(
        "contradictory-correlations",
        "a large repair",
        lambda: correlated((0.21, "P1", "P2")),
        "major",
        "up to 0.210, for the pair P1 and P2",
    ),
    fault(
        "contradictory-correlations",
        "a small repair",
        lambda: correlated((0.01, "P1", "P2")),
        "note",
        "up to 0.010",
    ),
    twin("contradictory-correlations", "possible", lambda: correlated(None)),
    fault(
        "dependence-twice",
        "with a general dependence",
        lambda: sound_estimate(correlations=pairs(("P1", "P2", 0.3))),
        "major",
        "1 correlation and a general dependence of 0.25",
    ),
    fault(
        "dependence-twice",
        "with a shared cause",
        lambda: sound_estimate(
            general_dependence=None,
            causes=(cause("c", "crew"),),
            packages=tuple(
                p.model_copy(update={"loads": (Load(cause="c", weight=0.5),)})
                for p in PACKAGES
            ),
            correlations=pairs(("P1", "P2", 0.3)),
        ),
        "major",
        "share the cause c",
        where="P1",
    ),
    twin(
        "dependence-twice",
        "correlations alone",
        lambda: sound_estimate(
            general_dependence=None, correlations=pairs(("P1", "P2", 0.3))
        ),
    ),
    fault(
        "ranges-tight-for-class",
        "class 5 with ranges of class 1",
        lambda: sound_estimate(estimate_class=5, packages=all_ranged(0.95, 1.1)),
        "major",
        "± 7.5 % wide on average; an estimate of class 5 usually has at least + 30 %",
    ),
    twin(
        "ranges-tight-for-class",
        "class 3",
        lambda: sound_estimate(packages=all_ranged(0.95, 1.1)),
    ),
    fault(
        "ranges-wide-for-class",
        "class 1 with ranges of class 4",
        lambda: sound_estimate(estimate_class=1, packages=all_ranged(0.8, 1.5)),
        "caution",
        "± 35 % wide",
    ),
    twin(
        "ranges-wide-for-class",
        "class 3",
        lambda: sound_estimate(packages=all_ranged(0.8, 1.5)),
    ),
    fault(
        "curve-too-steep",
        "5 % at class 3",
        lambda: upper_side(1.05),
        "major",
        "usually + 10 % or more; here P90 is 5.0 % above P50",
    ),
    twin("curve-too-steep", "as it is", sound_study),
    fault(
        "curve-too-flat",
        "40 % at class 3",
        lambda: upper_side(1.4),
        "caution",
        "usually + 30 % or less; here P90 is 40.0 % above P50",
    ),
    twin("curve-too-flat", "as it is", sound_study),
    fault(
        "narrow-curve",
        "1 % at class 3",
        lambda: spoiled(standard_deviation=0.01 * sound_study().mean),
        "caution",
        "1.0 % of its mean",
    ),
    twin("narrow-curve", "as it is", sound_study),
)
