"""One seal as a signature: right or wrong, by whom, and vouched for or not.

The mathematics and the path to a trusted certificate are pyHanko's; what it says is
put into plain words here.
"""

from __future__ import annotations

import datetime as dt
import io
import logging
from collections.abc import Iterator, Sequence
from contextlib import contextmanager
from dataclasses import dataclass
from typing import TYPE_CHECKING, Any, Literal

from contingency.record.certificates import TEST_ONLY
from contingency.record.seals import PREFIX

if TYPE_CHECKING:
    from pyhanko.sign.validation.pdf_embedded import EmbeddedPdfSignature
    from pyhanko.sign.validation.status import PdfSignatureStatus

SecondWord = Literal["content", "not content", "not asked"]


@dataclass(frozen=True, kw_only=True, slots=True)
class Seal:
    """What one seal proves."""

    role: str
    signer: str
    """Name in the certificate; empty if it cannot be read."""
    organisation: str
    issuer: str
    """Who issued the certificate."""
    certificate: str
    """SHA-256 of the certificate, hexadecimal."""
    is_test: bool
    """Made with a certificate for trying out: proves nothing about anybody."""
    valid_until: str
    """Last day of the certificate, ISO 8601."""
    claimed_at: str
    """Time that the signer claims, ISO 8601; empty if none."""
    stamped_at: str
    """Time that a time-stamp server states, ISO 8601; empty without a good stamp."""
    faults: tuple[str, ...]
    """Why it no longer holds, in words; empty if it does."""
    trusted: bool | None
    """Whether a trusted certificate vouches for the signer; None if none was given."""
    distrust: str
    """Why not, in words."""
    second_word: SecondWord
    """What pyHanko's own policy says of the changes after it."""

    @property
    def level(self) -> str:
        """PAdES level: B-T with a good time stamp, else B-B."""
        return "B-T" if self.stamped_at else "B-B"

    @property
    def is_intact(self) -> bool:
        """Whether nothing but more seals came after it, and it is right itself."""
        return not self.faults


class Judge:
    """Knows the signatures of one PDF and what they are judged by.

    Parameters
    ----------
    pdf : bytes
        The report.
    when : datetime
        Moment at which certificates are judged, with its offset from UTC.
    trusted : sequence of bytes
        DER of the certificates that the reader trusts.
    second_word : bool
        Whether pyHanko's policy is asked what changed after each seal.
    """

    def __init__(
        self,
        pdf: bytes,
        *,
        when: dt.datetime,
        trusted: Sequence[bytes],
        second_word: bool,
    ) -> None:
        self._when, self._trusted = when, tuple(trusted)
        self._second_word = second_word
        self.faults: tuple[str, ...] = ()
        """Why the signatures of the file cannot be read at all."""
        self._signatures: dict[str, EmbeddedPdfSignature] = {}
        try:
            with _quiet():
                self._signatures = _signatures(pdf)
        except Exception as fault:  # noqa: BLE001  (a hostile file may raise anything)
            self.faults = (f"its seals cannot be read ({_brief(fault)})",)

    def seal(self, field: str, odd: Sequence[str]) -> Seal:
        """Return what the seal in a field proves, given what else is odd about it."""
        signature = self._signatures.get(field)
        if signature is None:
            return _unreadable(field, [*odd, "its signature cannot be read"])
        try:
            with _quiet():
                return self._judged(field, signature, odd)
        except Exception as fault:  # noqa: BLE001  (as above)
            what = f"its signature cannot be checked ({_brief(fault)})"
            return _unreadable(field, [*odd, what])

    def _judged(
        self, field: str, signature: EmbeddedPdfSignature, odd: Sequence[str]
    ) -> Seal:
        status = self._status(signature, self._when)
        stamp = status.timestamp_validity
        stamped_at = stamp.timestamp if stamp and stamp.intact and stamp.valid else None
        if stamp and stamped_at and stamp.trusted:
            # The time is proven: the certificate had to be valid then, not now.
            status = self._status(signature, stamped_at)
        word = _second_word(status) if self._second_word else "not asked"
        certificate = signature.signer_cert
        names = certificate.subject.native
        trusted, distrust = self._trust(status, certificate)
        return Seal(
            role=field.removeprefix(PREFIX),
            signer=_plain(names.get("common_name", "")),
            organisation=_plain(names.get("organization_name", "")),
            issuer=_plain(certificate.issuer.human_friendly),
            certificate=certificate.sha256.hex(),
            is_test=_plain(names.get("common_name", "")).startswith(TEST_ONLY),
            valid_until=certificate.not_valid_after.date().isoformat(),
            claimed_at=_moment(signature.self_reported_timestamp),
            stamped_at=_moment(stamped_at),
            faults=tuple(dict.fromkeys([*odd, *_wrongs(status, word)])),
            trusted=trusted,
            distrust=distrust,
            second_word=word,
        )

    def _status(
        self, signature: EmbeddedPdfSignature, moment: dt.datetime
    ) -> PdfSignatureStatus:
        from asn1crypto import x509
        from pyhanko.sign.validation import validate_pdf_signature
        from pyhanko.sign.validation.settings import KeyUsageConstraints
        from pyhanko_certvalidator import ValidationContext

        roots = [x509.Certificate.load(certificate) for certificate in self._trusted]

        def context() -> ValidationContext:
            return ValidationContext(
                trust_roots=roots,
                moment=moment,
                allow_fetching=False,
                revocation_mode="soft-fail",
            )

        return validate_pdf_signature(
            signature,
            context(),
            context(),
            key_usage_settings=KeyUsageConstraints(
                key_usage={"digital_signature", "non_repudiation"},
                match_all_key_usages=False,
            ),
            skip_diff=not self._second_word,
        )

    def _trust(
        self,
        status: PdfSignatureStatus,
        certificate: Any,  # noqa: ANN401
    ) -> tuple[bool | None, str]:
        """Return whether a trusted certificate vouches for the signer, and why not."""
        if not self._trusted:
            return None, ""
        if status.trusted:
            return True, ""
        if self._when > certificate.not_valid_after:
            last = certificate.not_valid_after
            return False, f"its certificate expired on {last:%Y-%m-%d}"
        if self._when < certificate.not_valid_before:
            return False, "its certificate was not yet valid"
        return False, "no trusted certificate vouches for its certificate"


@contextmanager
def _quiet() -> Iterator[None]:
    """Keep pyHanko from writing to the log what is answered here in words."""
    loggers = [logging.getLogger(name) for name in ("pyhanko", "pyhanko_certvalidator")]
    levels = [logger.level for logger in loggers]
    for logger in loggers:
        logger.setLevel(logging.CRITICAL + 1)
    try:
        yield
    finally:
        for logger, level in zip(loggers, levels, strict=True):
            logger.setLevel(level)


def _signatures(pdf: bytes) -> dict[str, EmbeddedPdfSignature]:
    """Return the signatures as pyHanko reads them, by the name of the field."""
    from pyhanko.pdf_utils.reader import PdfFileReader

    reader = PdfFileReader(io.BytesIO(pdf))
    return {one.field_name: one for one in reader.embedded_signatures}


def _second_word(status: PdfSignatureStatus) -> SecondWord:
    """Return whether pyHanko's policy allows what came after a seal."""
    from pyhanko.sign.diff_analysis import ModificationLevel
    from pyhanko.sign.validation.status import SignatureCoverageLevel

    level, coverage = status.modification_level, status.coverage
    allowed = (
        level is not None
        and level <= ModificationLevel.FORM_FILLING
        and coverage is not None
        and coverage >= SignatureCoverageLevel.ENTIRE_REVISION
        and status.docmdp_ok is not False
    )
    return "content" if allowed else "not content"


def _wrongs(status: PdfSignatureStatus, word: SecondWord) -> list[str]:
    """Say what is wrong with a signature, by what pyHanko found."""
    wrongs = []
    if not status.intact:
        wrongs.append("the bytes that it covers were changed")
    elif not status.valid:
        wrongs.append("its signature is wrong")
    stamp = status.timestamp_validity
    if stamp is not None and not (stamp.intact and stamp.valid):
        wrongs.append("its time stamp is wrong")
    if word == "not content":
        wrongs.append("the second look at later changes, pyHanko's, finds some")
    return wrongs


def _unreadable(field: str, faults: Sequence[str]) -> Seal:
    return Seal(
        role=field.removeprefix(PREFIX),
        signer="",
        organisation="",
        issuer="",
        certificate="",
        is_test=False,
        valid_until="",
        claimed_at="",
        stamped_at="",
        faults=tuple(faults),
        trusted=None,
        distrust="",
        second_word="not asked",
    )


def _moment(moment: dt.datetime | None) -> str:
    return moment.isoformat() if moment else ""


def _plain(name: object) -> str:
    """Return a name from a certificate as it may be shown."""
    text = name[-1] if isinstance(name, list) and name else name
    return "".join(c for c in str(text) if c.isprintable())[:200]


def _brief(fault: Exception) -> str:
    return f"{type(fault).__name__}: {fault}"[:120]
