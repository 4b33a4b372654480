"""Results as they travel in a report, against results computed again.

Three answers.  *Reproduced exactly*: every figure and word is the same.  *Reproduced
within sampling error*: the figures that a decision rests on differ by no more than two
runs of the same model may.  *Not reproduced*: one of them differs by more, or the
results speak of something else.

What two runs may differ by is taken from the run made now: its standard deviation,
its percentile curve, the interval of each level and the number of trials.
`SIGMAS` standard errors of a difference are allowed; independent trials are assumed,
which Latin hypercube trials are more exact than.
"""

from __future__ import annotations

import json
import math
from collections.abc import Iterator
from dataclasses import dataclass
from typing import Any, Literal

Outcome = Literal["exactly", "within sampling error", "not reproduced"]

SIGMAS = 5.0
"""Standard errors of the difference of two runs that are allowed.  Own choice: with a
few hundred figures a false alarm stays below one in ten thousand."""
TWO_RUNS = math.sqrt(2.0)
"""Standard error of a difference over that of one run."""
Z95 = 1.959963984540054
"""Half-width of a 95 % interval in standard errors."""
TAILS = 2.0
"""Standard error of a standard deviation, in sd/√n, allowed for heavy tails: a normal
total has 0.71, one of kurtosis 17 has 2: √((κ−1)/4n), from memory.  Own choice."""
SAME = 1e-9
"""Relative difference below which an exact figure counts as the same: twelve digits
are printed."""


@dataclass(frozen=True, kw_only=True, slots=True)
class Difference:
    """One figure that differs."""

    figure: str
    """Its place in the results: `target.contingency`."""
    embedded: float
    computed: float
    allowed: float
    """Largest difference that sampling explains, in the unit of the figure."""

    @property
    def size(self) -> float:
        """Absolute difference over what is allowed; above 1 it is not explained."""
        gap = abs(self.embedded - self.computed)
        if gap == 0.0:
            return 0.0
        return gap / self.allowed if self.allowed > 0.0 else math.inf


@dataclass(frozen=True, kw_only=True, slots=True)
class Comparison:
    """Embedded and computed results, held against each other."""

    outcome: Outcome
    judged: int
    """Figures that were held against an allowance."""
    largest: Difference | None
    """The largest of them, measured by its allowance; None if all are the same."""
    contradictions: tuple[str, ...]
    """What cannot be explained by sampling at all, in words."""
    embedded_version: str
    computed_version: str

    @property
    def same_version(self) -> bool:
        """Whether the report was made with this version of the program."""
        return self.embedded_version == self.computed_version


def compare_results(
    embedded: dict[str, Any], computed: dict[str, Any], *, least: int
) -> Comparison:
    """Return how two result objects compare.

    Parameters
    ----------
    embedded : dict
        `results.json` of the report, as read; it may hold anything.
    computed : dict
        The results contract of the same inputs, computed now.
    least : int
        Trials that the estimate asks for at least.

    Raises
    ------
    ValueError, KeyError, TypeError, AttributeError
        Where the embedded object is no results contract.
    """
    versions = str(embedded["tool"]["version"]), str(computed["tool"]["version"])
    contradictions = tuple(_contradictions(embedded, computed, least))
    if versions[0] == versions[1] and _text(embedded) == _text(computed):
        return _comparison("exactly", (), (), versions)
    if not contradictions and _figures_only(embedded) == _figures_only(computed):
        return _comparison("exactly", (), (), versions)
    differences = tuple(_differences(embedded, computed)) if not contradictions else ()
    beyond = any(not difference.size <= 1.0 for difference in differences)
    outcome: Outcome = (
        "not reproduced" if contradictions or beyond else "within sampling error"
    )
    return _comparison(outcome, differences, contradictions, versions)


def _comparison(
    outcome: Outcome,
    differences: tuple[Difference, ...],
    contradictions: tuple[str, ...],
    versions: tuple[str, str],
) -> Comparison:
    differing = [one for one in differences if one.size > 0.0]
    return Comparison(
        outcome=outcome,
        judged=len(differences),
        largest=max(differing, key=lambda one: one.size, default=None),
        contradictions=contradictions,
        embedded_version=versions[0],
        computed_version=versions[1],
    )


def _contradictions(
    embedded: dict[str, Any], computed: dict[str, Any], least: int
) -> Iterator[str]:
    """Give what must be the same in words and is not."""
    same_version = embedded["tool"] == computed["tool"]
    if embedded["format"] != computed["format"]:
        yield f"its results have the format {_shown(embedded['format'])}"
        return
    for key, now in computed["estimate"].items():
        then = embedded["estimate"].get(key)
        if then != now and (same_version or key != "fingerprint"):
            yield f"its results are of {key} {_shown(then)}, its inputs of {now}"
    if embedded["run"]["trials"] < least:
        yield f"its results rest on {embedded['run']['trials']} trials"
    yield from _other_lists(embedded, computed)
    theirs, mine = _found(embedded), _found(computed)
    if same_version and theirs != mine:
        checks = {one[0] for one in theirs ^ mine}
        yield f"its findings differ: {_shown(', '.join(sorted(checks)))}"


def _other_lists(embedded: dict[str, Any], computed: dict[str, Any]) -> Iterator[str]:
    """Give what the two results do not both speak of."""
    if embedded["run"]["seed"] != computed["run"]["seed"]:
        yield "its results were drawn from another seed"
    for name, key in (("levels", "level"), ("allocation", "package")):
        if [row[key] for row in embedded[name]] != [row[key] for row in computed[name]]:
            yield f"its results list other {name}"
    if embedded["target"]["level"] != computed["target"]["level"]:
        yield f"its results are for {_shown(embedded['target']['level'])}"
    if [*embedded["percentiles"]] != [*computed["percentiles"]]:
        yield "its results list other percentiles"
    same_version = embedded["tool"] == computed["tool"]
    if (embedded["funding"] or same_version) and _years(embedded) != _years(computed):
        # A version from before the table of years has none.
        yield "its results list other years"
    if embedded["cross_check"]["passed"] is not computed["cross_check"]["passed"]:
        yield "its cross-checks ended otherwise"


def _years(results: dict[str, Any]) -> list[Any]:
    """Return the years of the funding table; none where there is no table."""
    return [row["year"] for row in results["funding"] or ()]


def _found(results: dict[str, Any]) -> set[tuple[str, str, str, str]]:
    """Return what was found, without the figures inside the messages."""
    return {
        (
            str(finding["check"]),
            str(finding["severity"]),
            str(finding["where"]),
            json.dumps(finding["answer"], sort_keys=True),
        )
        for finding in results["findings"]
    }


def _differences(
    embedded: dict[str, Any], computed: dict[str, Any]
) -> Iterator[Difference]:
    """Give every judged figure with what sampling allows."""
    error = _Sampling(embedded, computed)
    plain = {
        "base": SAME * abs(computed["base"]),
        "mean": error.of_mean,
        "standard_deviation": error.of_deviation,
        "chance_base_is_enough": error.of_chance(computed["chance_base_is_enough"]),
    }
    for name, allowed in plain.items():
        yield _difference(name, embedded[name], computed[name], allowed)
    for name, total in computed["percentiles"].items():
        yield _difference(
            f"percentiles.{name}",
            embedded["percentiles"][name],
            total,
            error.of_percentile(int(name[1:])),
        )
    for theirs, mine in zip(embedded["levels"], computed["levels"], strict=True):
        yield from _level("levels." + mine["level"], theirs, mine)
    yield from _level("target", embedded["target"], computed["target"])
    at_target = _allowed_at_level(computed["target"])
    whole = error.of_part(1.0, computed["target"], at_target)
    for key in computed["split"]:
        yield _difference(
            f"split.{key}", embedded["split"][key], computed["split"][key], whole
        )
    for theirs, mine in zip(
        embedded["allocation"], computed["allocation"], strict=True
    ):
        yield from _row(theirs, mine, error, computed["target"], at_target)
    if embedded["funding"]:
        for theirs, mine in zip(embedded["funding"], computed["funding"], strict=True):
            yield from _year(theirs, mine, whole)
        yield from _outturn(embedded, computed, error, whole)


def _level(
    name: str, theirs: dict[str, Any], mine: dict[str, Any]
) -> Iterator[Difference]:
    allowed = _allowed_at_level(mine)
    for key in ("total", "contingency"):
        yield _difference(f"{name}.{key}", theirs[key], mine[key], allowed)
    # Percent of the base, by the scale between the two ways of saying it.
    scale = (
        abs(mine["percent_of_base"] / mine["contingency"])
        if mine["contingency"]
        else 0.0
    )
    yield _difference(
        f"{name}.percent_of_base",
        theirs["percent_of_base"],
        mine["percent_of_base"],
        allowed * scale + SAME,
    )


def _allowed_at_level(mine: dict[str, Any]) -> float:
    """Return what a level may differ by, from its 95 % interval."""
    low, high = mine["interval"]
    widest = max(high - mine["total"], mine["total"] - low)
    return float(SIGMAS / Z95 * TWO_RUNS * widest + SAME * abs(mine["total"]))


def _row(
    theirs: dict[str, Any],
    mine: dict[str, Any],
    error: _Sampling,
    target: dict[str, Any],
    at_target: float,
) -> Iterator[Difference]:
    name = f"allocation.{mine['package']}"
    share = abs(mine["variance_share"])
    allowed = error.of_part(share, target, at_target)
    yield _difference(
        f"{name}.base", theirs["base"], mine["base"], SAME * abs(mine["base"])
    )
    for key in ("ranges", "systemic", "events", "contingency", "expected", "margin"):
        yield _difference(f"{name}.{key}", theirs[key], mine[key], allowed)
    yield _difference(
        f"{name}.variance_share",
        theirs["variance_share"],
        mine["variance_share"],
        error.of_share(share),
    )


def _year(
    theirs: dict[str, Any], mine: dict[str, Any], whole: float
) -> Iterator[Difference]:
    """Give one year: the base is certain, the contingency is a part of the whole."""
    exact = SAME * abs(mine["total"])
    # What grows on a part of the contingency errs as the part does.
    growth = abs(mine["total"] / (mine["base"] + mine["contingency"] or 1.0))
    grown = whole * max(growth, 1.0)
    for key, allowed in (
        ("base", exact),
        ("contingency", whole),
        ("escalation_on_base", exact),
        ("escalation_on_contingency", grown),
        ("total", grown),
    ):
        name = f"funding.{mine['year']}.{key}"
        yield _difference(name, theirs[key], mine[key], allowed)


def _outturn(
    embedded: dict[str, Any],
    computed: dict[str, Any],
    error: _Sampling,
    whole: float,
) -> Iterator[Difference]:
    """Give the simulated outturn cost; its level errs as its own interval says.

    The mean errs less than a level in the tail.  The chance errs twice: by its own
    trials, and by the amount that it is the chance of.
    """
    theirs, mine = embedded["outturn"], computed["outturn"]
    growth = abs(mine["funding"] / (computed["target"]["total"] or 1.0))
    chance = mine["chance_funding_is_enough"]
    for key, allowed in (
        ("funding", whole * max(growth, 1.0)),
        ("mean", _allowed_at_level(mine)),
        ("total", _allowed_at_level(mine)),
        ("chance_funding_is_enough", 2.0 * error.of_chance(chance)),
    ):
        yield _difference(f"outturn.{key}", theirs[key], mine[key], allowed)


def _difference(
    figure: str, embedded: object, computed: float, allowed: float
) -> Difference:
    if isinstance(embedded, bool) or not isinstance(embedded, int | float):
        raise TypeError(f"{figure} is {_shown(embedded)}")
    return Difference(
        figure=figure,
        embedded=float(embedded),
        computed=float(computed),
        allowed=allowed,
    )


class _Sampling:
    """What sampling alone may make two runs of one model differ by."""

    def __init__(self, embedded: dict[str, Any], computed: dict[str, Any]) -> None:
        # All from the run made now: a forged result must not widen what is allowed.
        # Its number of trials counts, as far as the estimate allows so few.
        runs = (embedded["run"]["trials"], computed["run"]["trials"])
        self._trials = max(min(int(trials) for trials in runs), 1)
        self._deviation = float(computed["standard_deviation"])
        self._mean = float(computed["mean"])
        self._curve = [float(total) for total in computed["percentiles"].values()]
        self._error = SIGMAS * TWO_RUNS / math.sqrt(self._trials)

    @property
    def of_mean(self) -> float:
        """Allowed for the mean, money."""
        return self._error * self._deviation + SAME * abs(self._mean)

    @property
    def of_deviation(self) -> float:
        """Allowed for the standard deviation, money."""
        return TAILS * self._error * self._deviation

    def of_chance(self, chance: float) -> float:
        """Return what a chance between 0 and 1 may differ by."""
        spread = max(chance * (1.0 - chance), 1.0 / self._trials)
        return self._error * math.sqrt(spread)

    def of_percentile(self, percent: int) -> float:
        """Return how far the curve goes over the error of the percentile's rank."""
        steps = 100.0 * self.of_chance(percent / 100.0)
        here = self._at(percent)
        around = max(self._at(percent + steps) - here, here - self._at(percent - steps))
        return around + SAME * abs(here)

    def of_share(self, share: float) -> float:
        """Return what a slope on the total may differ by: √(1−ρ²) is taken as 1."""
        return self._error * math.sqrt(share + 1.0 / self._trials)

    def of_part(self, share: float, target: dict[str, Any], at_target: float) -> float:
        """Return what a part of the contingency may differ by.

        The part is its mean, plus its share of the distance from the mean to the
        level; each of the three has its error.
        """
        distance = abs(float(target["total"]) - self._mean)
        return (
            self.of_share(share) * (self._deviation + distance)
            + share * (at_target + self.of_mean)
            + SAME * abs(self._mean)
        )

    def _at(self, percent: float) -> float:
        """Return the curve between its points; beyond them it goes on as it ended."""
        place = percent - 1.0
        low = min(max(math.floor(place), 0), len(self._curve) - 2)
        rise = self._curve[low + 1] - self._curve[low]
        if place < 0.0 or place > len(self._curve) - 1:
            # Tails bend: allow the last five points' rise for each point beyond.
            ends = self._curve[:6] if place < 0.0 else self._curve[-6:]
            rise = ends[-1] - ends[0]
        return self._curve[low] + (place - low) * rise


def _figures_only(results: dict[str, Any]) -> str:
    """Return the results without what another version may say otherwise."""
    left_out = {"tool", "findings", "checks_run"}
    return _text(
        {
            **{key: value for key, value in results.items() if key not in left_out},
            "estimate": {**results["estimate"], "fingerprint": ""},
            "run": {**results["run"], "method": ""},
        }
    )


def _text(results: dict[str, Any]) -> str:
    return json.dumps(results, sort_keys=True, allow_nan=False)


def _shown(value: object) -> str:
    text = str(value)
    return "".join(c if c.isprintable() else "?" for c in text)[:60]
