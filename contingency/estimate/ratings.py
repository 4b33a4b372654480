"""ratings.toml: a model that turns ratings of the project into a systemic uplift.

The user brings the model: factors, levels, coefficients, residual spread, and where
they come from.  Nothing of it is built in.
"""

from __future__ import annotations

import math
import tomllib
from typing import Literal, cast

from contingency.estimate.fault_list import FaultList, Place, Problem, instead, shown
from contingency.estimate.faults import IdTwice, RatingUnclear, TomlSyntax
from contingency.estimate.nouns import RatedFactor, RatedModel
from contingency.estimate.sections import Section
from contingency.estimate.toml_lines import KeyLines

FILE = "ratings.toml"

RATING_KEYS: dict[str, tuple[str, ...]] = {
    "model": (
        "name",
        "provenance",
        "form",
        "constant",
        "residual_spread",
        "degrees",
    ),
    "factors": (
        "id",
        "name",
        "coefficient",
        "levels",
        "rating",
        "value",
        "evidence",
    ),
}
"""The keys under each heading of ratings.toml, in the order of docs/inputs.md."""
RATING_REQUIRED: dict[str, tuple[str, ...]] = {
    "model": ("name", "provenance", "form", "constant", "residual_spread"),
    "factors": ("id", "name", "coefficient"),
}
FORMS = ("log", "linear")


def read_ratings(text: str, faults: FaultList) -> RatedModel | None:
    """Return the rated model of ratings.toml; None, and the faults, if it has none."""
    try:
        values = tomllib.loads(text)
    except (ValueError, RecursionError):
        found = "The file cannot be read as TOML."
        remedy = "Check quotes, brackets, commas and doubled keys."
        faults.add(Place(FILE), Problem(TomlSyntax, found, remedy))
        return None
    root = Section(
        name="",
        values=values,
        path=(),
        lines=KeyLines(text),
        faults=faults,
        file=FILE,
    )
    root.check_keys(RATING_KEYS, ("model", "factors"), {})
    model = root.inside("model")
    factors = _factors(root)
    if model is None:
        return None
    model.check_keys(RATING_KEYS["model"], RATING_REQUIRED["model"], {})
    form = model.text("form")
    if form and form not in FORMS:
        found = f"{shown(form)} is no form of a model."
        problem = Problem(RatingUnclear, found, instead(form, FORMS, "Write log."))
        model.refuse("form", problem)
        return None
    spread = model.number_within("residual_spread", 0.0, math.inf, low_included=False)
    constant = model.number("constant")
    degrees = model.whole_within("degrees", 1, 10**6)
    name = model.text("name", needed=True)
    provenance = model.text("provenance", needed=True)
    if spread is None or constant is None or not form:
        return None
    return RatedModel(
        name=name,
        provenance=provenance,
        form=cast("Literal['log', 'linear']", form),
        constant=constant,
        residual_spread=spread,
        degrees=degrees,
        factors=factors,
    )


def _factors(root: Section) -> tuple[RatedFactor, ...]:
    """Return the factors that could be read, in file order."""
    factors: list[RatedFactor] = []
    for line in root.each("factors"):
        line.check_keys(RATING_KEYS["factors"], RATING_REQUIRED["factors"], {})
        identity = line.text("id", needed=True)
        if identity and identity in {factor.id for factor in factors}:
            found = f"The id {shown(identity)} stands twice."
            line.refuse("id", Problem(IdTwice, found, "Give one of them another id."))
        coefficient, value = line.number("coefficient"), _value(line)
        if coefficient is not None and value is not None:
            factors.append(
                RatedFactor(
                    id=identity,
                    name=line.text("name", needed=True),
                    coefficient=coefficient,
                    rating=line.text("rating"),
                    value=value,
                    evidence=line.text("evidence"),
                )
            )
    return tuple(factors)


def _value(line: Section) -> float | None:
    """Return the number that a factor is rated with: a value, or a level's number."""
    levels = line.inside("levels")
    numbers: dict[str, float] = {}
    if levels is not None:
        for name in levels.values:
            number = levels.number(name)
            if number is not None:
                numbers[name] = number
    has_rating, has_value = "rating" in line.values, "value" in line.values
    if has_rating == has_value:
        found = "Rating and value are both there."
        if not has_rating:
            found = "Neither rating nor value is there."
        problem = Problem(RatingUnclear, found, "Write one of the two.")
        line.refuse("rating" if has_rating else "", problem)
        return None
    if has_value:
        return line.number("value")
    rating = line.text("rating", needed=True)
    if rating and rating not in numbers:
        found = f"{shown(rating)} is no level of this factor."
        remedy = instead(rating, numbers, "Write one of its levels.")
        line.refuse("rating", Problem(RatingUnclear, found, remedy))
    return numbers.get(rating)
