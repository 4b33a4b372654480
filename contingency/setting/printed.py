"""Amounts as they are printed: whole steps that add up in every direction.

The unrounded results close by themselves.  Rounded one by one they would not, and a
reader who adds a column would find a difference.  So every table is rounded as a whole
(`contingency.quantities.closed_table`); base and contingency are rounded to the nearest
step, and everything else adds up to these two.
"""

from __future__ import annotations

from dataclasses import dataclass
from math import fsum

import numpy as np
from numpy.typing import NDArray

from contingency.quantities.closed_table import closed_table
from contingency.quantities.rounding import round_amount
from contingency.setting.allocation import Allocation, SecondOpinion, Split
from contingency.setting.levels import FundingLevel

Array = NDArray[np.float64]
Steps = NDArray[np.int64]


@dataclass(frozen=True, kw_only=True, slots=True)
class PrintedLine:
    """One line of the allocation as printed, price-date money in whole steps.

    ``ranges + systemic + events = contingency = expected + margin``.
    """

    base: float
    ranges: float
    systemic: float
    events: float
    contingency: float
    expected: float
    margin: float
    second_opinion: float
    """Contingency by the conditional mean; closes over lines like the others."""


@dataclass(frozen=True, kw_only=True, slots=True)
class PrintedLevel:
    """One funded level as printed; the total is base plus contingency as printed."""

    percent: int
    contingency: float
    total: float
    above_previous: float
    """Contingency beyond that of the next lower level in the list; of the lowest
    level its whole contingency."""


@dataclass(frozen=True, kw_only=True, slots=True)
class PrintedFigures:
    """Every amount of the report that must close on paper."""

    step: float
    """Amounts are whole multiples of this."""
    total: PrintedLine
    """The split at the target and its sums."""
    shares: tuple[int, int, int]
    """Ranges, systemic and events in whole percent of the contingency; sums to 100
    (noughts where the contingency is nought)."""
    second_split: tuple[float, float, float]
    """Ranges, systemic and events by the conditional mean; sums to contingency."""
    rows: tuple[PrintedLine, ...]
    """In the order of the allocation's rows."""
    groups: tuple[PrintedLine, ...]
    """Sums of rows, in the order of the allocation's groups."""
    levels: tuple[PrintedLevel, ...]
    """In the order given."""
    percentiles: tuple[PrintedLevel, ...]
    """P01 to P99."""

    @property
    def estimate_uncertainty(self) -> float:
        """Ranges and systemic risks together."""
        return self.total.ranges + self.total.systemic

    @property
    def estimate_uncertainty_share(self) -> int:
        """Ranges and systemic risks in whole percent of the contingency."""
        return self.shares[0] + self.shares[1]

    @property
    def second_estimate_uncertainty(self) -> float:
        """Ranges and systemic risks by the conditional mean."""
        return self.second_split[0] + self.second_split[1]

    @property
    def mean(self) -> float:
        """Base and expected part together: the mean of the total as printed."""
        return self.total.base + self.total.expected

    @property
    def request(self) -> float:
        """Base and contingency together."""
        return self.total.base + self.total.contingency


def groups_of(allocation: Allocation) -> tuple[int, ...]:
    """Return for each row the number of its line in `allocation.groups`."""
    lines = {line.group: number for number, line in enumerate(allocation.groups)}
    return tuple(lines[row.group or row.name] for row in allocation.rows)


def printed_figures(
    allocation: Allocation,
    second: SecondOpinion,
    levels: tuple[FundingLevel, ...],
    percentiles: tuple[float, ...],
    *,
    step: float,
) -> PrintedFigures:
    """Return the amounts of the report in whole steps of `step` money.

    Base and contingency are rounded to the nearest step; every other amount is
    rounded so that it adds up to these two.  A printed amount differs from the
    computed one by less than a step, save in the rare table that cannot close so.
    """
    groups = np.array(groups_of(allocation), dtype=np.int64)
    rows = allocation.rows
    exact_base = fsum(row.base for row in rows)
    base = np.array([[row.base] for row in rows]) / step
    sources = np.array([[r.ranges, r.systemic, r.events] for r in rows]) / step
    parts = np.array([[row.expected, row.margin] for row in rows]) / step
    other = np.array(second.contingency)[:, None] / step

    contingency = _nearest(allocation.split.contingency / step)
    base_steps = closed_table(base, groups, total=_nearest(float(base.sum())))
    source_steps = closed_table(sources, groups, total=contingency)
    part_steps = closed_table(
        parts, groups, total=contingency, rows=source_steps.sum(axis=1)
    )
    other_steps = closed_table(other, groups, total=contingency)
    table = np.hstack([base_steps, source_steps, part_steps, other_steps])
    funded = _printed_levels(
        {level.percent: level.contingency for level in levels},
        base=int(base_steps.sum()),
        step=step,
    )
    every = _printed_levels(
        {p: total - exact_base for p, total in enumerate(percentiles, start=1)},
        base=int(base_steps.sum()),
        step=step,
    )
    split = np.array(
        [[second.split.ranges, second.split.systemic, second.split.events]]
    )
    alone = np.zeros(1, dtype=np.int64)

    return PrintedFigures(
        step=step,
        total=_line(table.sum(axis=0), step),
        shares=_shares(allocation.split),
        second_split=_triple(
            closed_table(split / step, alone, total=contingency), step
        ),
        rows=tuple(_line(row, step) for row in table),
        groups=tuple(
            _line(table[groups == group].sum(axis=0), step)
            for group in range(groups.max() + 1)
        ),
        levels=tuple(funded[level.percent] for level in levels),
        percentiles=tuple(every.values()),
    )


def printed_change(
    contingency: float, *, issued: float, step: float
) -> tuple[float, float]:
    """Return a contingency and its distance from the issued one, in whole steps.

    The distance is that of the two printed amounts, so that it can be checked on
    paper.  `issued` is the printed contingency.

    >>> printed_change(40_140_758.0, issued=39_400_000.0, step=100_000.0)
    (40100000.0, 700000.0)
    """
    amount = round_amount(contingency, step)
    return amount, round_amount(amount - issued, step)


def _printed_levels(
    contingency: dict[int, float], *, base: int, step: float
) -> dict[int, PrintedLevel]:
    """Round each level's contingency; step from one to the next as printed."""
    amounts = {
        percent: _nearest(money / step) for percent, money in contingency.items()
    }
    ordered = sorted(amounts)
    lower = dict(zip(ordered[1:], ordered[:-1], strict=True))
    return {
        percent: PrintedLevel(
            percent=percent,
            contingency=amount * step,
            total=(base + amount) * step,
            above_previous=(amount - amounts.get(lower.get(percent, -1), 0)) * step,
        )
        for percent, amount in amounts.items()
    }


def _shares(split: Split) -> tuple[int, int, int]:
    """Return the parts of a split in whole percent that add up to 100."""
    if not split.contingency:
        return 0, 0, 0
    exact = np.array([[split.ranges, split.systemic, split.events]])
    alone = np.zeros(1, dtype=np.int64)
    table = closed_table(100.0 * exact / split.contingency, alone, total=100)
    ranges, systemic, events = (int(share) for share in table[0])
    return ranges, systemic, events


def _line(steps: Steps, step: float) -> PrintedLine:
    base, ranges, systemic, events, expected, margin, second = (int(s) for s in steps)
    return PrintedLine(
        base=base * step,
        ranges=ranges * step,
        systemic=systemic * step,
        events=events * step,
        contingency=(ranges + systemic + events) * step,
        expected=expected * step,
        margin=margin * step,
        second_opinion=second * step,
    )


def _triple(table: Steps, step: float) -> tuple[float, float, float]:
    ranges, systemic, events = (int(amount) * step for amount in table[0])
    return ranges, systemic, events


def _nearest(steps: float) -> int:
    """Return the nearest whole number, halves away from nought."""
    return round(round_amount(steps, 1.0))
