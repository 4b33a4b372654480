"""What chance does to a bridge, with common random numbers and without."""

from pathlib import Path

import numpy as np
import pytest

from contingency.estimate.reading import read_estimate
from contingency.tracking.averaging import effects
from contingency.tracking.bridge import half_width
from contingency.tracking.matching import match
from contingency.tracking.mixtures import mixtures
from contingency.tracking.restating import scaled
from tests.tracking.pairs import EVENTS, PACKAGES, estimate, event, package, with_row

EXAMPLE = Path(__file__).parents[2] / "example_estimates" / "island-power-link"
SEEDS = range(1_000, 1_020)


def spread(values):
    """Standard deviation over seeds."""
    return float(np.std(values, ddof=1))


def test_a_small_correction_is_seen_through_the_noise(capsys):
    """Two packages of the larger example re-priced by 5 %: 20 times less noise.

    The figure is printed; ``docs/revisions.md`` quotes it beside those of whole
    revisions, whose own size limits what common random numbers can do.
    """
    earlier = read_estimate(EXAMPLE / "rev-c")
    small = {"P330", "P640"}
    later = earlier.model_copy(
        update={
            "packages": tuple(
                p.model_copy(
                    update={"base": 1.05 * p.base, "cost": scaled(p.cost, 1.05)}
                )
                if p.id in small
                else p
                for p in earlier.packages
            )
        }
    )
    pair = match(earlier, later)
    before, after = [], []
    for seed in SEEDS:
        found = mixtures(pair, seed=seed, blocks=4, percent=80)
        before.append(found.value(frozenset())[0])
        after.append(found.value(frozenset(found.families))[0])
    common = spread(np.subtract(after, before))
    # Each with a seed of its own: the seeds of the later one moved by one.
    fresh = spread(np.subtract(np.roll(after, 1), before))

    with capsys.disabled():
        print(
            f"\n  bridge of a small correction: noise {common:,.0f} with common "
            f"random numbers, {fresh:,.0f} with fresh seeds, {fresh / common:.0f} times"
        )
    assert fresh > 20 * common


@pytest.mark.parametrize("order", ["average", "sequence"])
def test_the_noise_beside_a_step_is_what_other_seeds_show(order):
    """The half-width from blocks, against the spread over seeds."""
    later = estimate(
        packages=with_row(PACKAGES, package("P2", 600.0, 0.85, 1.6)),
        events=with_row(EVENTS, event("E1", 0.45)),
        general_dependence=0.4,
    )
    pair = match(estimate(), later)
    found, widths = [], []
    for seed in range(40):
        mixed = mixtures(pair, seed=seed, blocks=8, percent=80)
        steps = effects(mixed.families, mixed.value, order)
        found.append([step[0] for step in steps])
        widths.append([half_width(step) for step in steps])
    # 95 % of a Student t with 7 degrees of freedom lies within 2.365.
    expected = np.sqrt(np.mean(np.square(widths), axis=0)) / 2.365

    np.testing.assert_allclose(np.std(found, axis=0, ddof=1) / expected, 1.0, atol=0.45)
