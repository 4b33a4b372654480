"""Back-testing: had each closed project been funded at a level of the others' history.

Each project in turn is left out, the lognormal of the others is fitted, and its
final cost is placed on what they predict.  Well-founded levels hold as often as they
say.
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

from scipy.special import betaincinv

from contingency.assurance.wording import counted
from contingency.errors import TooFewProjects
from contingency.estimate.modelled import FEWEST_PROJECTS
from contingency.estimate.nouns import ClosedProject
from contingency.quantities.predictive import LognormalFit, fit_lognormal

FUNDED = (50, 80, 90)
"""Levels of which the sentence speaks."""
PICTURED = tuple(range(10, 100, 10))
"""Levels of the reliability picture."""


@dataclass(frozen=True, kw_only=True, slots=True)
class LevelRecord:
    """How often a level of the others' history was enough."""

    percent: int
    """The level, whole percent."""
    enough: int
    """Projects whose final cost it would have covered."""
    count: int
    low: float
    """Ends of the 95 % binomial interval of the chance that it is enough, 0 to 1."""
    high: float

    @property
    def share(self) -> float:
        """Share of the projects for which it was enough, 0 to 1."""
        return self.enough / self.count

    @property
    def sentence(self) -> str:
        """What happened, in words."""
        agrees = self.low <= self.percent / 100 <= self.high
        return (
            f"Funded at P{self.percent:02d} of the others,"
            f" {self.enough} of {self.count} projects would have had enough"
            f" ({100 * self.share:.0f} %; 95 % interval {100 * self.low:.0f} % to"
            f" {100 * self.high:.0f} %), which"
            f" {'agrees' if agrees else 'does not agree'} with {self.percent} %."
        )


@dataclass(frozen=True, kw_only=True, slots=True)
class ProjectRecord:
    """One closed project on what the others predict."""

    id: str
    name: str
    ratio: float
    """Final cost over estimate."""
    percent: float
    """Percent of the others' prediction that its final cost reached, 0 to 100."""


@dataclass(frozen=True, kw_only=True, slots=True)
class Calibration:
    """How a history of closed projects would have served each of them."""

    projects: tuple[ProjectRecord, ...]
    """In file order."""
    fit: LognormalFit
    """Of all projects."""
    funded: tuple[LevelRecord, ...]
    """P50, P80 and P90."""
    pictured: tuple[LevelRecord, ...]
    """P10 to P90 in tens: the points of the reliability picture."""


def calibrate(projects: Sequence[ClosedProject]) -> Calibration:
    """Return how often levels of the others' history were enough for each project.

    Parameters
    ----------
    projects : sequence of ClosedProject
        Closed projects, alike in stage, money and scope.

    Returns
    -------
    Calibration
        Intervals are those of Clopper and Pearson for independent projects.  Each
        prediction shares its history with the others: read them as a guide.

    Raises
    ------
    TooFewProjects
        too-few-projects.  A history needs `FEWEST_PROJECTS`.

    References
    ----------
    Clopper, C. J. and Pearson, E. S. (1934), The use of confidence or fiducial limits
    illustrated in the case of the binomial, Biometrika 26(4), from memory, not
    checked against the original.
    """
    if len(projects) < FEWEST_PROJECTS:
        raise TooFewProjects(
            where="history",
            found=f"{counted(len(projects), 'closed project')} given.",
            rule=f"A history is tested from {FEWEST_PROJECTS} projects on.",
            remedy="Add closed projects that are alike in stage, money and scope.",
        )
    records = tuple(
        ProjectRecord(
            id=project.id,
            name=project.name,
            ratio=project.ratio,
            percent=100 * _others(projects, place).chance(project.ratio),
        )
        for place, project in enumerate(projects)
    )
    return Calibration(
        projects=records,
        fit=fit_lognormal([project.ratio for project in projects]),
        funded=tuple(_record(records, percent) for percent in FUNDED),
        pictured=tuple(_record(records, percent) for percent in PICTURED),
    )


def hit_rate_interval(enough: int, count: int) -> tuple[float, float]:
    """Return the 95 % interval of a chance that came true `enough` times of `count`.

    >>> low, high = hit_rate_interval(9, 12)
    >>> round(low, 3), round(high, 3)
    (0.428, 0.945)
    """
    low = float(betaincinv(enough, count - enough + 1, 0.025)) if enough else 0.0
    high = 1.0
    if enough < count:
        high = float(betaincinv(enough + 1, count - enough, 0.975))
    return low, high


def _others(projects: Sequence[ClosedProject], place: int) -> LognormalFit:
    """Return the fit of all projects but the one at `place`."""
    others = [*projects[:place], *projects[place + 1 :]]
    return fit_lognormal([project.ratio for project in others])


def _record(records: Sequence[ProjectRecord], percent: int) -> LevelRecord:
    enough = sum(record.percent <= percent for record in records)
    low, high = hit_rate_interval(enough, len(records))
    return LevelRecord(
        percent=percent, enough=enough, count=len(records), low=low, high=high
    )
