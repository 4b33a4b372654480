"""Read an estimate folder into an Estimate, or say everything that is wrong with it.

The files depend on one another in one direction: settings and causes say how
packages are read, packages say what systemic risks, events and correlations may
name.  A fault in one file hides no fault in another; what rests on something that
could not be read is not judged.
"""

from __future__ import annotations

from collections.abc import Mapping
from pathlib import Path

from contingency.errors import UnusableEstimate
from contingency.estimate import account as drawdown_csv
from contingency.estimate import causes as causes_csv
from contingency.estimate import changes as changes_csv
from contingency.estimate import events as events_csv
from contingency.estimate import history as history_csv
from contingency.estimate import packages as packages_csv
from contingency.estimate import prices as prices_csv
from contingency.estimate import ratings as ratings_toml
from contingency.estimate import systemic as systemic_csv
from contingency.estimate.earlier import is_earlier, pushed_back
from contingency.estimate.fault_list import FaultList
from contingency.estimate.fingerprint import fingerprint
from contingency.estimate.folder import EstimateFolder
from contingency.estimate.links import tie
from contingency.estimate.modelled import Models
from contingency.estimate.nouns import Estimate, OutsideRule
from contingency.estimate.packages import PackageRules, Packages
from contingency.estimate.ranges import EndsRule
from contingency.estimate.settings import Settings, read_settings
from contingency.estimate.tables import Table, read_table

LAYOUTS = (
    packages_csv.LAYOUT,
    systemic_csv.LAYOUT,
    events_csv.LAYOUT,
    causes_csv.CAUSES,
    causes_csv.CORRELATIONS,
    prices_csv.LAYOUT,
    changes_csv.LAYOUT,
    drawdown_csv.LAYOUT,
    history_csv.LAYOUT,
)
"""The tables of an estimate folder, in the order of docs/inputs.md."""


MOST_REVISIONS = 200
"""Revisions of one chain.  A choice of ours: one a month for sixteen years."""


def read_estimate(folder: Path | str) -> Estimate:
    """Return the estimate that a folder holds.

    Parameters
    ----------
    folder : path
        One revision of one estimate: estimate.toml, packages.csv and what
        ``docs/inputs.md`` lists beside them.

    Returns
    -------
    Estimate
        Amounts in the estimate's currency at its price date; percent resolved.  Files
        of the revisions before it are among its sources, where they can be read.

    Raises
    ------
    UnusableEstimate
        unusable-estimate.  Its `faults` are all problems of the folder, in file order.
    """
    return _with_previous(Path(folder), frozenset())


def _with_previous(path: Path, passed: frozenset[Path]) -> Estimate:
    """Return the estimate in a folder with the files of the revisions before it.

    They are carried where `previous` leads to folders that can be read; where it does
    not, assurance says so, and `contingency.estimate.chain` says why.
    """
    faults = FaultList()
    estimate = _sound(EstimateFolder.open(path, faults), faults, where=str(path))
    carries = any(is_earlier(source.name) for source in estimate.sources)
    before = path / estimate.previous
    passed |= {path.resolve()}
    if carries or not estimate.previous or len(passed) >= MOST_REVISIONS:
        return estimate
    try:
        if before.resolve() in passed:
            return estimate
        earlier = _with_previous(before, passed)
    except (UnusableEstimate, OSError, ValueError):
        return estimate
    sources = (*estimate.sources, *pushed_back(earlier.sources))
    return estimate.model_copy(
        update={"sources": tuple(sorted(sources, key=lambda source: source.name))}
    )


def read_held_estimate(files: Mapping[str, bytes], *, where: str) -> Estimate:
    """Return the estimate in files that are held in memory, as of a report.

    Parameters
    ----------
    files : mapping
        Content by name.  No name is used as a path.
    where : str
        What holds them, for messages.

    Raises
    ------
    UnusableEstimate
        unusable-estimate.
    """
    faults = FaultList()
    return _sound(EstimateFolder.held(files, faults, where=where), faults, where=where)


def _sound(folder: EstimateFolder | None, faults: FaultList, *, where: str) -> Estimate:
    """Return the estimate with its fingerprint, or raise all that was noted."""
    estimate = _read(folder, faults) if folder is not None else None
    if faults or estimate is None:
        raise faults.error(where)
    return estimate.model_copy(update={"fingerprint": fingerprint(estimate)})


def _read(folder: EstimateFolder, faults: FaultList) -> Estimate | None:
    """Return the estimate; None, or a part of it, where any fault was noted."""
    text = folder.text("estimate.toml")
    settings = read_settings(text, faults) if text is not None else None
    tables = {layout.file: read_table(folder, layout, faults) for layout in LAYOUTS}
    table = tables["causes.csv"]
    causes = causes_csv.read_causes(table, folder) if table else ()
    ends = _ends_rule(settings)
    table = tables["prices.csv"]
    series = prices_csv.read_prices(table, folder, ends) if table else ()
    packages = _packages(tables, folder, ends, settings)
    models = _models(tables["history.csv"], folder, settings)
    table = tables["systemic.csv"]
    risks = (
        systemic_csv.read_systemic(table, folder, ends, packages, models)
        if table
        else ()
    )
    table = tables["events.csv"]
    events = events_csv.read_events(table, folder, ends, packages) if table else ()
    events = tie(table, events) if table else events
    table = tables["correlations.csv"]
    pairs = causes_csv.read_correlations(table, packages) if table else ()
    causes_csv.refuse_both(table, tables["packages.csv"], faults)
    table = tables["changes.csv"]
    changes = changes_csv.read_changes(table, tables) if table else ()
    table, known = tables["drawdown.csv"], packages.ids if packages else None
    account = (
        drawdown_csv.read_account(table, tables["events.csv"], known) if table else ()
    )
    for name in sorted(filter(is_earlier, folder.names)):
        folder.carry(name)
    folder.refuse_misnamed()
    if faults or settings is None or packages is None:
        return None
    return Estimate(
        **settings.header,
        contingency=settings.contingency,
        ends=settings.ends,
        general_dependence=settings.general_dependence,
        run=settings.run,
        statements=settings.statements,
        sign_offs=settings.sign_offs,
        answers=settings.answers,
        assurance=settings.assurance,
        packages=packages.read,
        systemic=risks,
        events=events,
        causes=causes,
        correlations=pairs,
        price_series=series,
        changes=changes,
        account=account,
        account_rule=settings.account_rule,
        history=models.history,
        outside_rule=models.rule,
        rated_model=models.rated,
        sources=folder.sources,
    )


def _models(
    history: Table | None, folder: EstimateFolder, settings: Settings | None
) -> Models:
    """Return what a systemic risk may take its uplift from."""
    text = folder.text(ratings_toml.FILE)
    return Models(
        history=history_csv.read_history(history) if history else (),
        rule=settings.outside_rule if settings else OutsideRule(),
        rated=ratings_toml.read_ratings(text, folder.faults) if text else None,
    )


def _ends_rule(settings: Settings | None) -> EndsRule:
    """Return what low and high mean where a row does not say it."""
    if settings is None:
        return EndsRule(default=None, is_readable=False)
    return EndsRule(default=settings.ends, is_readable=settings.ends_are_readable)


def _packages(
    tables: dict[str, Table | None],
    folder: EstimateFolder,
    ends: EndsRule,
    settings: Settings | None,
) -> Packages | None:
    """Return what packages.csv holds; None where it cannot be read at all."""
    table = tables["packages.csv"]
    if table is None:
        return None
    dependence = settings.general_dependence if settings else None
    rules = PackageRules(
        ends=ends,
        causes=_ids_in("causes.csv", tables, folder),
        series=_ids_in("prices.csv", tables, folder),
        general_dependence=dependence or 0.0,
    )
    return packages_csv.read_packages(table, folder, rules)


def _ids_in(
    file: str, tables: dict[str, Table | None], folder: EstimateFolder
) -> frozenset[str] | None:
    """Return the ids of an optional table; None where its faults hide them."""
    table = tables[file]
    if table is not None:
        return table.known_ids
    return None if folder.has(file) else frozenset()
