"""People with certificates and sealed reports, made once for all tests of records."""

import datetime as dt
from types import SimpleNamespace

import pytest

from contingency.record.certificates import open_certificate
from contingency.record.seals import seal
from tests.record import pki
from tests.record.sample import ROLES, WHEN, small_report

NAMES = {"prepared": "Anna Example", "checked": "Ben Sample", "approved": "Cora Spec"}


@pytest.fixture(scope="session")
def people():
    """A root, one certificate under it for each role, and a stranger's root."""
    root = pki.holder("Example Root", is_authority=True)
    holders = {role: pki.holder(name, issuer=root) for role, name in NAMES.items()}
    return SimpleNamespace(
        root=root,
        stranger=pki.holder("Stranger Root", is_authority=True),
        holders=holders,
        certificates={
            role: open_certificate(one.pkcs12, password=pki.PASSWORD, when=WHEN)
            for role, one in holders.items()
        },
    )


@pytest.fixture(scope="session")
def report():
    """A small report without seals."""
    return small_report()


@pytest.fixture(scope="session")
def sealed(report, people):
    """The report with no seal, one, two and three."""
    stages = [report]
    for i, role in enumerate(ROLES):
        stages.append(
            seal(
                stages[-1],
                role=role,
                certificate=people.certificates[role],
                when=WHEN + dt.timedelta(hours=i),
            )
        )
    return stages
