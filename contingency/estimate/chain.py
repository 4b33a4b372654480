"""The revisions of one estimate: follow `previous` from folder to folder."""

from __future__ import annotations

from pathlib import Path

from contingency.errors import NoPrevious, RevisionCircle
from contingency.estimate.earlier import files_of_previous
from contingency.estimate.nouns import Estimate
from contingency.estimate.reading import (
    MOST_REVISIONS,
    read_estimate,
    read_held_estimate,
)


def read_chain(folder: Path | str) -> tuple[Estimate, ...]:
    """Return the estimate in a folder and all revisions before it, the oldest first.

    `previous` in estimate.toml is read relative to the folder that it stands in.

    Raises
    ------
    NoPrevious
        no-previous.  `previous` names a folder that is not there.
    RevisionCircle
        revision-circle.  The chain leads back to a revision that it has passed.
    UnusableEstimate
        unusable-estimate.  A revision cannot be read; the message names its folder.
    """
    here = Path(folder)
    chain = [read_estimate(here)]
    passed = [here.resolve()]
    while chain[-1].previous:
        named = here / chain[-1].previous
        where = f"{here / 'estimate.toml'}, [estimate] previous"
        if not named.is_dir():
            raise NoPrevious(
                where=where,
                found=f'There is no folder "{chain[-1].previous}" there.',
                rule="previous names the folder of the revision before, relative to "
                "its own.",
                remedy="Correct the path, or remove the line for the first revision.",
            )
        if named.resolve() in passed or len(chain) >= MOST_REVISIONS:
            raise RevisionCircle(
                where=where,
                found=f'"{chain[-1].previous}" leads back to a revision that is '
                "already in the chain, or the chain has no end.",
                rule="Each revision names the one before it, down to the first.",
                remedy="Remove previous from the first revision, or correct a path.",
            )
        here = named
        passed.append(named.resolve())
        chain.append(read_estimate(named))
    return tuple(reversed(chain))


def previous_of(estimate: Estimate) -> Estimate | None:
    """Return the revision just before, from the files that travel with an estimate.

    None where none travels with it: the estimate is the first revision, or `previous`
    names a folder that was not there or could not be read.

    Raises
    ------
    UnusableEstimate
        unusable-estimate.  The files that are carried are no sound estimate.
    """
    files = files_of_previous(estimate.sources)
    if not files:
        return None
    where = f"the revision before {estimate.revision}"
    return read_held_estimate(files, where=where)


def carried_chain(estimate: Estimate) -> tuple[Estimate, ...]:
    """Return the estimate and all revisions that travel with it, the oldest first."""
    chain = [estimate]
    while (before := previous_of(chain[-1])) is not None:
        chain.append(before)
    return tuple(reversed(chain))
