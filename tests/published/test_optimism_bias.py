"""Published uplifts for optimism bias: tables and worked examples.

Source     Mott MacDonald (2002), Review of large public procurement in the UK, as
           taken over by HM Treasury's supplementary Green Book guidance (table 2 and
           three worked examples, read in a government's online book); Transport
           Scotland, STAG technical database, table 13.4 (read); Flyvbjerg and COWI
           (2004) for the UK Department for Transport (percentiles in full from
           memory, two of them confirmed by pages that were read); the Edinburgh tram
           line 2 forecast of 2004 (read in an encyclopedia; its base of GBP 255 m is
           from memory, and implied by its two results).
Taken      uplifts in percent of capital cost or works duration, and the results of
           the worked examples: mix of building types; works duration with managed
           risk areas; contract award; reference-class P50 and P80.
Precision  as printed: 0.1 percentage point, 0.1 month, GBP 1 m.
Errata     the source rounds 4.08 % to 4 % in the contract award example.
"""

import pytest

from contingency.assurance.outside_view import outside_view, table_ratio, uplift_left
from contingency.estimate.nouns import OutsideRule, UpliftPart
from tests.assurance.builder import ALIKE, sound_estimate, spoiled

UPPER = {
    "non-standard buildings": (0.39, 0.51),
    "standard buildings": (0.04, 0.24),
    "non-standard civil engineering": (0.25, 0.66),
    "standard civil engineering": (0.20, 0.44),
    "equipment and development": (0.54, 2.00),
}
"""Upper bounds: works duration, capital cost."""

BY_STAGE = {"roads": (0.44, 0.15, 0.03), "fixed links": (0.66, 0.23, 0.06)}
"""Transport Scotland, stages 1, 2, 3."""

DFT_2004 = {
    "roads": ((50, 0.15), (60, 0.24), (70, 0.27), (80, 0.32), (90, 0.45)),
    "rail": ((50, 0.40), (60, 0.45), (70, 0.51), (80, 0.57), (90, 0.68)),
    "fixed links": ((50, 0.23), (60, 0.26), (70, 0.34), (80, 0.55), (90, 0.83)),
}
"""Uplift by percent not exceeded; from memory but for P50 and the P80 of rail."""


def part(kind, share, *, of_duration=False, managed=0.0):
    """One kind of work with its published upper bound."""
    duration, capital = UPPER[kind]
    return UpliftPart(
        kind=kind,
        share=share,
        upper=duration if of_duration else capital,
        managed=managed,
    )


def test_a_building_of_two_kinds():
    """30 % non-standard, 70 % standard: 32.1 % on cost, 14.5 % on duration."""
    for of_duration, printed in ((False, 32.1), (True, 14.5)):
        mix = [
            part("non-standard buildings", 0.3, of_duration=of_duration),
            part("standard buildings", 0.7, of_duration=of_duration),
        ]

        assert 100 * uplift_left(mix) == pytest.approx(printed, abs=0.05)


def test_works_duration_with_managed_risk_areas():
    """28 months become 38.9 unmanaged, and 36.3 with 23.8 % managed away."""
    managed = 0.01 * (5 * 1.0 + 2 * 1.0 + 22 * 0.4 + 5 * 1.0 + 3 * 1.0)
    unmanaged = part("non-standard buildings", 1.0, of_duration=True)
    left = unmanaged.model_copy(update={"managed": managed})

    assert managed == pytest.approx(0.238, abs=1e-12)
    assert 28 * (1 + uplift_left([unmanaged])) == pytest.approx(38.9, abs=0.05)
    assert 100 * uplift_left([left]) == pytest.approx(29.7, abs=0.05)
    assert 28 * (1 + uplift_left([left])) == pytest.approx(36.3, abs=0.05)


def test_contract_award():
    """GBP 100 m with 92 % of 51 % managed away: 104 m, with its cost of 7 m 111 m."""
    left = uplift_left([part("non-standard buildings", 1.0, managed=0.92)])

    assert 100 * left == pytest.approx(4, abs=0.5)
    assert 100 * (1 + left) == pytest.approx(104, abs=0.5)
    assert 100 * (1 + left) + 7 == pytest.approx(111, abs=0.5)


@pytest.mark.parametrize("kind", BY_STAGE)
def test_two_publications_agree_on_the_median(kind):
    """Stage 2 of Transport Scotland is P50 of the Department for Transport."""
    assert table_ratio(DFT_2004[kind], 50) == BY_STAGE[kind][1]


@pytest.mark.parametrize(("percent", "printed"), [(50, 357), (80, 400)])
def test_the_edinburgh_tram_forecast(percent, printed):
    """GBP 255 m, uplifted by the rail table."""
    rail = [(p, 1 + over) for p, over in DFT_2004["rail"]]

    assert 255 * table_ratio(rail, percent) == pytest.approx(printed, abs=0.5)


def test_a_published_table_is_an_outside_view():
    """The rail table beside an estimate: 40 % at P50, nothing beyond P90."""
    rule = OutsideRule(source="DfT 2004", percentiles=DFT_2004["rail"], **ALIKE)
    view = outside_view(spoiled(estimate=sound_estimate(outside_rule=rule)))

    assert view.ratio(50) == pytest.approx(1.40)
    assert view.ratio(80) == pytest.approx(1.57)
    assert view.ratio(95) is None
    assert view.positions[-1].high_percent == 50
