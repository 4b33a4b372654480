"""One study and one report of the ship refit, made once for all tests of the room."""

import datetime as dt

import pytest

from contingency.report.folder import templates_folder
from contingency.report.look import read_look
from contingency.report.pdf import write_report
from contingency.results import as_json
from contingency.study import run_study
from tests.report.ship_refit import ship_refit

CREATED = dt.datetime(2031, 5, 20, 9, 30, tzinfo=dt.UTC)


@pytest.fixture(scope="session")
def refit():
    """The study of the ship refit."""
    return run_study(ship_refit())


@pytest.fixture(scope="session")
def results(refit):
    """Its results as they are written."""
    return as_json(refit.results())


@pytest.fixture(scope="session")
def draft(refit, results):
    """Its draft report."""
    return write_report(refit, created=CREATED, results=results)


@pytest.fixture(scope="session")
def look():
    """The look that comes with the tool."""
    return read_look(templates_folder())
