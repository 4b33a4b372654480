"""One running validator for all conformance tests of a session."""

import pytest

from tests.pdf_conformance.verapdf import VeraPDF


@pytest.fixture(scope="session")
def verapdf():
    """The validator; a machine without it fails the tests and says what to install."""
    validator = VeraPDF()
    yield validator
    validator.close()


@pytest.fixture
def conforms(verapdf, tmp_path):
    """Hold the bytes of a PDF against both standards that every report claims."""

    def check(pdf: bytes) -> None:
        __tracebackhide__ = True
        path = tmp_path / "report.pdf"
        path.write_bytes(pdf)
        verdicts = [verapdf.verdict(path, standard) for standard in ("3a", "ua1")]
        if not all(verdict.passed for verdict in verdicts):
            pytest.fail("\n".join(str(verdict) for verdict in verdicts))

    return check
