"""A time-stamped seal keeps both standards; other seals are in ``test_reports.py``."""

from contingency.record.certificates import open_certificate
from contingency.record.seals import seal
from tests.office_project import WHEN, project
from tests.record import pki


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
