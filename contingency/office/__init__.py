"""The acts of the office: sign, issue, seal, verify.  One function behind each command.

A typed sign-off is a record, a seal is a cryptographic signature; the two are kept
apart everywhere.  The clock, the private key and the folder of templates come in as
arguments.
"""

from contingency.office.issuing import issue_estimate
from contingency.office.sealing import (
    SealedReport,
    seal_report,
    write_test_certificate,
)
from contingency.office.signing import (
    SignedEstimate,
    sign_estimate,
    sign_off_standings,
    typed_words,
)
from contingency.office.verifying import verify_file

__all__ = [
    "SealedReport",
    "SignedEstimate",
    "issue_estimate",
    "seal_report",
    "sign_estimate",
    "sign_off_standings",
    "typed_words",
    "verify_file",
    "write_test_certificate",
]
