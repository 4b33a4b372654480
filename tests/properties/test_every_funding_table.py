"""What must hold of every funding table, whatever the windows and the prices."""

from functools import cache
from math import fsum

import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from contingency.quantities.rounding import round_amount
from contingency.setting.allocation import allocate
from contingency.setting.funding import find_funding, printed_funding
from contingency.simulation.engine import simulate
from tests.properties.strategies import spent_by_year
from tests.simulation.estimates import a_bit_of_everything

ESTIMATE = a_bit_of_everything(trials=8_192)
FEW = settings(max_examples=40, deadline=None)
tables = spent_by_year(ESTIMATE)


@cache
def run():
    """The run and its allocation, which no window and no price can move."""
    simulation = simulate(ESTIMATE)
    total = sorted(simulation.total)[-(-simulation.trials * 80 // 100) - 1]
    return simulation, allocate(ESTIMATE, simulation, percent=80, total=total)


def has_window(estimate):
    """Whether any package has both its dates."""
    return any(p.start and p.finish for p in estimate.packages)


@FEW
@given(tables)
def test_the_table_closes_in_both_moneys(estimate):
    """Columns make base and contingency, rows make outturn money, years are whole."""
    simulation, allocation = run()
    funding = find_funding(estimate, simulation, allocation)
    if funding is None:
        assert not has_window(estimate)
        return
    years = funding.years

    assert fsum(y.base for y in years) == pytest.approx(estimate.base, rel=1e-12)
    assert fsum(y.contingency for y in years) == pytest.approx(
        allocation.split.contingency, abs=1e-11 * estimate.base
    )
    for year in years:
        parts = (year.base, year.contingency, year.escalation)
        assert year.total == pytest.approx(fsum(parts), abs=1e-9)
        assert year.base >= 0.0
    starts = [year.starts for year in years]
    assert starts == list(range(starts[0], starts[-1] + 1))
    assert 0.0 <= funding.outturn.chance_funding_is_enough <= 1.0


@FEW
@given(tables, st.sampled_from([0.01, 1.0, 7.0, 100.0]))
def test_the_printed_table_closes_on_paper(estimate, step):
    """In whole steps, counted as whole numbers: no cent is lost or made."""
    simulation, allocation = run()
    free = estimate.model_copy(
        update={
            "packages": tuple(
                p.model_copy(update={"prices": ""}) for p in estimate.packages
            )
        }
    )
    funding = find_funding(free, simulation, allocation)
    if funding is None:
        return
    base = round_amount(estimate.base, step)
    contingency = round_amount(allocation.split.contingency, step)
    printed = printed_funding(
        funding.years, base=base, contingency=contingency, step=step
    )

    def steps(amounts):
        return sum(round(amount / step) for amount in amounts)

    assert steps(y.base for y in printed) == round(base / step)
    assert steps(y.contingency for y in printed) == round(contingency / step)
    assert steps(y.total for y in printed) == round((base + contingency) / step)
