"""Issued and sealed reports keep PDF/A-3a and PDF/UA-1 at every stage.

Drafts are in ``test_reports.py``.
"""

import pytest

from contingency.record.certificates import open_certificate
from contingency.record.seals import seal
from tests.office_project import WHEN, project
from tests.record import pki


@pytest.mark.parametrize("seals", [0, 1, 3])
def test_an_issued_report_with_seals(seals, conforms):
    """As issued, with the first seal and with all three."""
    conforms(project().sealed[seals])


def test_an_issued_report_with_a_time_stamped_seal(conforms):
    """PAdES B-T: the time stamp lies inside the signature."""
    made = project()
    certificate = open_certificate(
        made.holders["prepared"].pkcs12, password=pki.PASSWORD, when=WHEN
    )
    conforms(
        seal(
            made.sealed[0],
            role="prepared",
            certificate=certificate,
            when=WHEN,
            time_stamps=pki.time_stamps(made.root, moment=WHEN),
        )
    )
