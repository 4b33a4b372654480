"""The range of a row: its figures, what they mean, and the curve that they define."""

from __future__ import annotations

import itertools
from dataclasses import dataclass
from decimal import Decimal
from typing import Protocol

from contingency.errors import ContingencyError
from contingency.estimate.cells import (
    HUNDRED,
    Figure,
    read_ends,
    read_figure,
    read_level,
    read_pairs,
    read_probability,
)
from contingency.estimate.fault_list import Problem, listed, shown, worded
from contingency.estimate.faults import (
    AmountNegative,
    BelowSpent,
    CellWithoutMeaning,
    ChancesNotWhole,
    EndsNotPercentiles,
    PercentMissing,
    PercentOfNothing,
    PointsOutOfOrder,
    RangeIncomplete,
    RangeOutOfOrder,
    ShapeImpossible,
    UpliftTooLow,
)
from contingency.estimate.nouns import CostRange, Ends, ShapeName
from contingency.estimate.rows import Row

FIGURES = ("low", "likely", "high")
LISTED = (ShapeName.DISCRETE, ShapeName.POINTS)
"""Shapes that are given by the column `outcomes`."""
UNLIMITED = (ShapeName.NORMAL, ShapeName.LOGNORMAL)
"""Shapes whose low and high can only be percentiles."""

_ENDS_AND_LIKELY = {"low": True, "likely": True, "high": True}
NEEDED: dict[ShapeName, dict[str, bool]] = {
    ShapeName.PERT: _ENDS_AND_LIKELY,
    ShapeName.TRIANGULAR: _ENDS_AND_LIKELY,
    ShapeName.UNIFORM: {"low": True, "high": True},
    ShapeName.NORMAL: {"low": True, "likely": False, "high": True},
    ShapeName.LOGNORMAL: {"low": True, "likely": False, "high": True},
    ShapeName.FIXED: {"likely": True},
    ShapeName.DISCRETE: {"outcomes": True},
    ShapeName.POINTS: {"outcomes": True},
}
"""Columns that each shape reads; whether it must have them."""

SUM_TOLERANCE = Decimal("1e-9")
"""How far probabilities or shares may be from their sum, for each entry: thirds
written with ten digits pass."""


class Terms(Protocol):
    """How the figures of one kind of row become numbers."""

    @property
    def signed(self) -> bool:
        """Whether a plus sign means something."""

    @property
    def has_default_likely(self) -> bool:
        """Whether something stands for a blank `likely`."""

    @property
    def default_likely(self) -> Decimal | None:
        """What stands for it; None where that is unreadable, or where nothing does."""

    def number(self, figure: Figure) -> Decimal | Problem | None:
        """Return the number; None where what a percent refers to is unreadable."""


@dataclass(frozen=True, slots=True)
class PackageTerms:
    """Money, or percent of base - spent on top of what is spent."""

    base: Decimal | None
    """None where the cell has a fault of its own."""
    spent: Decimal
    signed: bool = False
    has_default_likely: bool = True

    @property
    def default_likely(self) -> Decimal | None:
        """The base stands for a blank likely."""
        return self.base

    def number(self, figure: Figure) -> Decimal | Problem | None:
        """Return the final cost of the package, money."""
        text = shown(figure.text)
        if figure.value < 0:
            remedy = "Write the amount, or its percent of the base: 90%, not -10%."
            return Problem(AmountNegative, f"{text} is negative.", remedy)
        if not figure.is_percent:
            return self._above_spent(figure.value, text)
        if self.base is None:
            return None
        if self.spent > self.base:
            found = (
                f"{text} would apply to base {worded(float(self.base))} "
                f"- spent {worded(float(self.spent))}."
            )
            remedy = "Write the final cost as an amount."
            return Problem(PercentOfNothing, found, remedy)
        value = self.spent + figure.value * (self.base - self.spent) / HUNDRED
        return self._above_spent(value, text)

    def _above_spent(self, value: Decimal, text: str) -> Decimal | Problem:
        if value >= self.spent:
            return value
        found = f"{text} is below the {worded(float(self.spent))} that is spent."
        remedy = "Write the final cost of the package, with what is spent in it."
        return Problem(BelowSpent, found, remedy)


@dataclass(frozen=True, slots=True)
class UpliftTerms:
    """Percent of the cost that a systemic risk acts on."""

    signed: bool = True
    has_default_likely: bool = False
    default_likely: None = None

    def number(self, figure: Figure) -> Decimal | Problem | None:
        """Return the uplift, a fraction."""
        text = shown(figure.text)
        if not figure.is_percent:
            found = f"{text} has no percent sign."
            remedy = f"Write {figure.value.normalize():f}% if percent are meant."
            return Problem(PercentMissing, found, remedy)
        if figure.value < -HUNDRED:
            remedy = "Write the change in percent of the cost, -100% at the least."
            return Problem(UpliftTooLow, f"{text} is below -100%.", remedy)
        return figure.value / HUNDRED


@dataclass(frozen=True, slots=True)
class EventTerms:
    """Money of one occurrence, or percent of the project's base."""

    base: Decimal | None
    """None where a package has no readable base."""
    signed: bool = False
    has_default_likely: bool = False
    default_likely: None = None

    def number(self, figure: Figure) -> Decimal | Problem | None:
        """Return the cost of one occurrence, money."""
        if figure.value < 0:
            found = f"{shown(figure.text)} is negative."
            remedy = "Write it positive; kind = opportunity makes it a saving."
            return Problem(AmountNegative, found, remedy)
        if not figure.is_percent:
            return figure.value
        return None if self.base is None else figure.value * self.base / HUNDRED


@dataclass(frozen=True, kw_only=True, slots=True)
class EndsRule:
    """What [ranges] says about low and high."""

    default: Ends | None
    """None if nothing is said."""
    is_readable: bool
    """False where it has a fault of its own; rows that rest on it are not judged."""


def read_range(
    row: Row, terms: Terms, ends: EndsRule, *, prefix: str = ""
) -> CostRange | None:
    """Return the range of a row; None, and the faults, where it has none.

    `prefix` leads the names of the columns of figures: `after_`.
    """
    shape = _shape(row)
    if shape is None or not _is_complete(row, shape, terms, prefix):
        return None
    row_ends = _row_ends(row, ends, shape)
    outcomes = _outcomes(row, shape, terms)
    numbers = _numbers(row, shape, terms, prefix)
    if outcomes is None or numbers is None or row_ends is None:
        return None
    low, likely, high = (numbers.get(column) for column in FIGURES)
    cost = CostRange(
        shape=shape,
        low=low,
        likely=likely,
        high=high,
        ends=row_ends,
        ends_stated=bool(row.cell("ends")) or ends.default is not None,
        outcomes=outcomes,
        written=(
            *(row.cell(prefix + column) for column in FIGURES),
            row.cell("outcomes"),
        ),
    )
    if not ends.is_readable and not row.cell("ends"):
        return cost
    return cost if _has_curve(row, cost, prefix) else None


def _shape(row: Row) -> ShapeName | None:
    """Return the shape of the row; None where the word is unknown."""
    if not row.cell("shape"):
        return ShapeName.PERT
    word = row.word("shape", [shape.value for shape in ShapeName])
    return ShapeName(word) if word else None


def _is_complete(row: Row, shape: ShapeName, terms: Terms, prefix: str) -> bool:
    """Whether the row fills the columns that the shape reads, and no others."""
    needed = NEEDED[shape]
    missing, useless = [], []
    for column in (*FIGURES, "outcomes"):
        name = column if column == "outcomes" else prefix + column
        if row.cell(name) and column not in needed:
            useless.append(name)
        elif (
            not row.cell(name)
            and needed.get(column)
            and not (column == "likely" and terms.has_default_likely)
        ):
            missing.append(name)
    if row.cell("ends") and "low" not in needed:
        useless.append("ends")
    for name in useless:
        found = f"A {shape} range has no {name}; the cell says {shown(row.cell(name))}."
        remedy = "Empty the cell, or name another shape."
        row.refuse(name, Problem(CellWithoutMeaning, found, remedy))
    if missing:
        found = f"A {shape} range lacks {listed(missing, 'and')}."
        reads = listed([c for c in needed if c != "outcomes"] or ["outcomes"], "and")
        remedy = f"Fill in {listed(missing, 'and')}: {shape} reads {reads}"
        if not prefix and len(missing) > 1:
            remedy += "; or write fixed under shape if the figure is certain"
        row.refuse(missing[0], Problem(RangeIncomplete, found, f"{remedy}."))
    return not missing and not useless


def _row_ends(row: Row, ends: EndsRule, shape: ShapeName) -> Ends | None:
    """Return what low and high of this row mean; None where it cannot be read."""
    if "low" not in NEEDED[shape]:
        return Ends()
    text = row.cell("ends")
    if text:
        found = row.accept("ends", read_ends(text))
    elif not ends.is_readable:
        return Ends()
    else:
        found = ends.default or Ends()
    if found is not None and found.are_limits and shape in UNLIMITED:
        says = "says limits" if text or ends.default else "is not stated"
        problem = Problem(
            EndsNotPercentiles,
            f"The shape is {shape} and ends {says}.",
            "Write percentiles under ends, such as P10-P90, or name another shape.",
        )
        row.refuse("ends", problem)
        return None
    return found


def _numbers(
    row: Row, shape: ShapeName, terms: Terms, prefix: str
) -> dict[str, float] | None:
    """Return low, likely and high as numbers, in order; None where they are not."""
    numbers: dict[str, Decimal] = {}
    complete = True
    for column in FIGURES:
        name = prefix + column
        if column not in NEEDED[shape]:
            continue
        if not row.cell(name):
            complete &= _take_default(row, shape, terms, column, numbers)
            continue
        figure = row.figure(name, signed=terms.signed)
        number = row.accept(name, terms.number(figure)) if figure else None
        if number is None:
            complete = False
        else:
            numbers[column] = number
    in_order = _is_in_order(row, numbers, prefix)
    if not complete or not in_order:
        return None
    return {column: float(number) for column, number in numbers.items()}


def _take_default(
    row: Row,
    shape: ShapeName,
    terms: Terms,
    column: str,
    numbers: dict[str, Decimal],
) -> bool:
    """Put the base for a blank likely; False where that cannot be."""
    if not NEEDED[shape][column]:
        return True
    if terms.default_likely is None:
        return False
    base = f"base {worded(float(terms.default_likely))}"
    stand_in = Figure(terms.default_likely, is_percent=False, text=base)
    number = terms.number(stand_in)
    if isinstance(number, Problem):
        found = f"likely is blank, so the base stands for it: {number.found}"
        row.refuse(column, Problem(number.kind, found, number.remedy))
        return False
    if number is not None:
        numbers[column] = number
    return True


def _is_in_order(row: Row, numbers: dict[str, Decimal], prefix: str) -> bool:
    """Whether the figures that could be read rise; notes the first that falls."""
    present = [column for column in FIGURES if column in numbers]
    for lower, upper in itertools.pairwise(present):
        if numbers[lower] <= numbers[upper]:
            continue
        column = prefix + (lower if row.cell(prefix + lower) else upper)
        found = (
            f"{_worded(row, prefix + lower, numbers[lower])} is above "
            f"{_worded(row, prefix + upper, numbers[upper])}."
        )
        remedy = "Swap or correct the figures; a certain cost has the shape fixed."
        row.refuse(column, Problem(RangeOutOfOrder, found, remedy))
        return False
    return True


def _worded(row: Row, column: str, number: Decimal) -> str:
    """Return a figure as messages name it: low 95% (11.8 M)."""
    text = row.cell(column)
    if not text:
        return f"{column} {worded(float(number))} (blank: the base)"
    if not text.endswith("%"):
        return f"{column} {worded(float(number))}"
    as_money = row.noun in {"package", "event"}
    return (
        f"{column} {text} ({worded(float(number))})"
        if as_money
        else (f"{column} {text}")
    )


def _outcomes(
    row: Row, shape: ShapeName, terms: Terms
) -> tuple[tuple[float, float], ...] | None:
    """Return the outcomes of a row as its shape takes them; None where unreadable."""
    if shape is ShapeName.DISCRETE:
        return _discrete(row, terms)
    if shape is ShapeName.POINTS:
        return _points(row, terms)
    return ()


def _discrete(row: Row, terms: Terms) -> tuple[tuple[float, float], ...] | None:
    """Return (value, probability) of each outcome, in the order of the cell."""
    pairs = row.accept(
        "outcomes", read_pairs(row.cell("outcomes"), ":", "95%:0.3; 100%:0.7")
    )
    if pairs is None:
        return None
    values = [_value(row, terms, text) for text, _ in pairs]
    chances = [row.accept("outcomes", read_probability(text)) for _, text in pairs]
    if None in values or None in chances:
        return None
    total = sum((chance for chance in chances if chance is not None), Decimal(0))
    if abs(total - 1) > SUM_TOLERANCE * len(pairs):
        found = f"The probabilities sum to {total.normalize():f}."
        remedy = "Correct them, or add the outcome that is missing."
        row.refuse("outcomes", Problem(ChancesNotWhole, found, remedy))
        return None
    return tuple(
        (float(value), float(chance))
        for value, chance in zip(values, chances, strict=True)
        if value is not None and chance is not None
    )


def _points(row: Row, terms: Terms) -> tuple[tuple[float, float], ...] | None:
    """Return (percent not exceeded, value) of each point, rising in both."""
    pairs = row.accept(
        "outcomes", read_pairs(row.cell("outcomes"), "=", "P05=92%; P95=140%")
    )
    if pairs is None:
        return None
    levels = [row.accept("outcomes", read_level(text)) for text, _ in pairs]
    values = [_value(row, terms, text) for _, text in pairs]
    points = [
        (level, value)
        for level, value in zip(levels, values, strict=True)
        if level is not None and value is not None
    ]
    if len(points) < len(pairs):
        return None
    if len(points) < 2:
        found = f"There is one point only, {shown(row.cell('outcomes'))}."
        remedy = "Add the percentiles that are known, such as P10, P50 and P90."
        row.refuse("outcomes", Problem(PointsOutOfOrder, found, remedy))
        return None
    for i in range(1, len(points)):
        if points[i - 1][0] >= points[i][0] or points[i - 1][1] >= points[i][1]:
            earlier, later = ("=".join(pairs[j]) for j in (i - 1, i))
            found = f"{later} does not lie above {earlier}."
            remedy = "Write the points in rising order, and correct those that fall."
            row.refuse("outcomes", Problem(PointsOutOfOrder, found, remedy))
            return None
    return tuple((float(level), float(value)) for level, value in points)


def _value(row: Row, terms: Terms, text: str) -> Decimal | None:
    """Return the value of one outcome."""
    figure = row.accept(
        "outcomes",
        read_figure(text, signed=terms.signed, semicolons=row.semicolons),
    )
    return row.accept("outcomes", terms.number(figure)) if figure else None


def _has_curve(row: Row, cost: CostRange, prefix: str) -> bool:
    """Whether the shape can be built; notes why not.

    The curve is kept by the range, so it is built once.
    """
    try:
        _ = cost.distribution
    except ContingencyError as error:
        problem = Problem(ShapeImpossible, error.found, error.remedy, error.rule)
    except (ValueError, ArithmeticError) as error:
        found = f"No {cost.shape} curve has these figures ({error})."
        remedy = "Correct the figures, or name another shape."
        problem = Problem(ShapeImpossible, found, remedy)
    else:
        return True
    column = "outcomes" if cost.shape in LISTED else prefix + "low"
    row.refuse(column, problem)
    return False
