"""Seals: digital signatures in the fields that a report was made with.

A seal is a PAdES signature (ETSI EN 319 142-1): level B-B, or B-T where a time-stamp
server adds its own statement of the time.  It is added behind the bytes of the report,
which stay as they are, so that earlier seals hold and the report as issued can still
be cut out and compared.  A typed sign-off (`sign_offs.py`) is a record; this is a
cryptographic signature.
"""

from __future__ import annotations

import datetime as dt
import io
import re
from concurrent.futures import ThreadPoolExecutor
from dataclasses import dataclass
from typing import TYPE_CHECKING, Any

from contingency.errors import AlreadySealed, NoSealField, NoTimeStamp
from contingency.record.attachments import opened, refusing_the_unforeseen
from contingency.record.certificates import SigningCertificate
from contingency.record.seal_look import draw_seal

if TYPE_CHECKING:
    from pyhanko.pdf_utils.content import PdfContent
    from pyhanko.sign.attributes import SignedAttributeProviderSpec
    from pyhanko.sign.signers import PdfSigner, SimpleSigner
    from pyhanko.sign.timestamps import TimeStamper

PREFIX = "sig_"
"""Begins the name of every field for a seal."""

DIGEST = "sha256"


@dataclass(frozen=True, kw_only=True, slots=True)
class SealField:
    """One field for a seal."""

    name: str
    """Of the field in the PDF: `sig_prepared`."""
    is_sealed: bool
    page: int
    """From 1; 0 if it lies on no page."""
    width: float
    """Points."""
    height: float

    @property
    def role(self) -> str:
        """The role as the name of the field has it."""
        return self.name.removeprefix(PREFIX)


def field_name(role: str) -> str:
    """Return the name of the field that takes the seal of a role.

    >>> field_name("prepared"), field_name("Risk owner")
    ('sig_prepared', 'sig_risk_owner')
    """
    return PREFIX + re.sub(r"[^a-z0-9]+", "_", role.lower()).strip("_")


def seal_fields(pdf: bytes) -> tuple[SealField, ...]:
    """Return the fields for seals, in the order of the form.

    Raises
    ------
    UnreadableReport
        unreadable-report.
    """
    import pikepdf

    with refusing_the_unforeseen(), opened(pdf) as document:
        form = document.Root.get("/AcroForm", pikepdf.Dictionary())
        pages = {page.objgen: i for i, page in enumerate(document.pages, start=1)}
        return tuple(
            _field(thing, pages)
            for thing in list(form.get("/Fields", pikepdf.Array()))[:100]
            if isinstance(thing, pikepdf.Dictionary) and thing.get("/FT") == "/Sig"
        )


def seal(
    pdf: bytes,
    *,
    role: str,
    certificate: SigningCertificate,
    when: dt.datetime,
    reason: str = "",
    time_stamps: TimeStamper | None = None,
) -> bytes:
    """Return the report with one seal more; its own bytes stand unchanged in front.

    Parameters
    ----------
    pdf : bytes
        A report, sealed by others or not.  Whether their seals still hold is for the
        caller to find out first (`contingency.record.seal_check`).
    role : str
        Whose field is filled.
    certificate : SigningCertificate
        As `open_certificate` gives it.
    when : datetime
        Claimed time of the seal, with its offset from UTC.
    reason : str
        Stands in the signature; by default the role.
    time_stamps : TimeStamper, optional
        Where a time stamp is asked for; see `time_stamp_server`.

    Raises
    ------
    NoSealField
        no-seal-field.  The report has no field for that role.
    AlreadySealed
        already-sealed.
    NoTimeStamp
        no-time-stamp.
    UnreadableReport
        unreadable-report.
    """
    field = _empty_field(pdf, role)
    look = draw_seal(
        name=certificate.name,
        role=role,
        when=when,
        width=field.width,
        height=field.height,
    )
    signer = _signer(
        certificate, field, look, reason=reason or role, when=when, stamps=time_stamps
    )
    # In a thread of its own, for pyHanko starts an event loop and a notebook has one.
    with ThreadPoolExecutor(max_workers=1) as thread:
        sealed = thread.submit(_signed, pdf, signer).result()
    if not sealed.startswith(pdf):
        raise RuntimeError("a seal must leave the bytes before it as they are")
    return sealed


def time_stamp_server(address: str, *, seconds: float = 20.0) -> TimeStamper:
    """Return a client of the time-stamp server at `address` (RFC 3161 over HTTP)."""
    from pyhanko.sign.timestamps import HTTPTimeStamper

    return HTTPTimeStamper(address, timeout=seconds)


def _field(thing: Any, pages: dict[Any, int]) -> SealField:  # noqa: ANN401
    left, low, right, high = (float(x) for x in thing.get("/Rect", [0, 0, 0, 0]))
    page = thing.get("/P")
    return SealField(
        name=str(thing.get("/T", "")),
        is_sealed="/V" in thing,
        page=pages.get(page.objgen, 0) if page is not None else 0,
        width=abs(right - left),
        height=abs(high - low),
    )


def _empty_field(pdf: bytes, role: str) -> SealField:
    fields = seal_fields(pdf)
    for field in fields:
        if field.name in {field_name(role), PREFIX + role}:
            if field.is_sealed:
                raise AlreadySealed(
                    where=f'the field of "{role}"',
                    found="it holds a seal.",
                    rule="Each role seals once.",
                    remedy="Use the copy of the report that lacks this seal, or issue "
                    "the report again.",
                )
            return field
    names = ", ".join(field.role for field in fields)
    raise NoSealField(
        where="the report",
        found=f'it has no field for a seal of "{role}"'
        + (f"; it has those of {names}." if names else ", nor of anyone."),
        rule="Fields for seals are made when the report is issued, one for each role.",
        remedy="Name one of these roles." if names else "Issue the report first.",
    )


def _signer(
    certificate: SigningCertificate,
    field: SealField,
    look: bytes,
    *,
    reason: str,
    when: dt.datetime,
    stamps: TimeStamper | None,
) -> PdfSigner:
    from pyhanko.pdf_utils.layout import (
        AxisAlignment,
        Margins,
        SimpleBoxLayoutRule,
    )
    from pyhanko.sign.fields import SigSeedSubFilter
    from pyhanko.sign.signers import PdfSignatureMetadata, PdfSigner
    from pyhanko.stamp import StaticStampStyle

    class DatedSigner(PdfSigner):
        """Signs with the time that was passed in; pyHanko would ask the clock."""

        def init_signing_session(self, *arguments: Any, **more: Any) -> Any:  # noqa: ANN401
            session = super().init_signing_session(*arguments, **more)
            session.system_time = when.replace(microsecond=0)
            return session

    return DatedSigner(
        PdfSignatureMetadata(
            field_name=field.name,
            md_algorithm=DIGEST,
            subfilter=SigSeedSubFilter.PADES,
            reason=reason,
            name=certificate.name,
        ),
        _key_holder(certificate),
        timestamper=stamps,
        stamp_style=StaticStampStyle(
            background=_drawing(look),
            background_opacity=1.0,
            border_width=0,
            background_layout=SimpleBoxLayoutRule(
                x_align=AxisAlignment.ALIGN_MIN,
                y_align=AxisAlignment.ALIGN_MIN,
                margins=Margins(left=0, right=0, top=0, bottom=0),
            ),
        ),
    )


def _signed(pdf: bytes, signer: PdfSigner) -> bytes:
    from pyhanko.pdf_utils.incremental_writer import IncrementalPdfFileWriter
    from pyhanko.sign.timestamps import TimestampRequestError

    class QuietWriter(IncrementalPdfFileWriter):
        """Leaves the metadata of the report as they were approved."""

        def _update_meta(self) -> None:
            pass

    out = io.BytesIO()
    try:
        signer.sign_pdf(
            QuietWriter(io.BytesIO(pdf)), output=out, existing_fields_only=True
        )
    except (TimestampRequestError, OSError, TimeoutError) as fault:
        raise NoTimeStamp(
            where="the time-stamp server",
            found=f"it gave no usable answer ({fault}).",
            rule="A seal of level B-T carries the time of a time-stamp server.",
            remedy="Check the address, try again, or seal without a time stamp (B-B).",
        ) from fault
    return out.getvalue()


def _key_holder(certificate: SigningCertificate) -> SimpleSigner:
    """Pass key and certificates on as pyHanko wants them."""
    from cryptography.hazmat.primitives.serialization import (
        NoEncryption,
        pkcs12,
    )
    from pyhanko.sign.signers import SimpleSigner

    # In memory only: the plain form never leaves this function.
    plain = pkcs12.serialize_key_and_certificates(
        None,
        certificate.key,
        certificate.certificate,
        certificate.chain or None,
        NoEncryption(),
    )
    holder: SimpleSigner = SimpleSigner.load_pkcs12_data(
        plain, other_certs=(), passphrase=None
    )
    holder.signed_attr_prov_spec = _naming_all(holder)
    return holder


def _naming_all(holder: SimpleSigner) -> SignedAttributeProviderSpec:
    """Have the signature cover the digests of all certificates that it carries.

    pyHanko names that of the signer only, and a changed byte in another one would
    go unnoticed by whoever does not know it.  RFC 5035, section 5.4.1.1, allows all.
    """
    from asn1crypto import tsp
    from pyhanko.sign.attributes import (
        CMSAttributeProvider,
    )
    from pyhanko.sign.attributes import (
        SignedAttributeProviderSpec as Specification,
    )
    from pyhanko.sign.general import as_signing_certificate_v2

    carried = [holder.signing_cert, *holder.cert_registry]
    carried = list({one.dump(): one for one in carried}.values())

    class AllCertificates(CMSAttributeProvider):
        attribute_type = "signing_certificate_v2"

        async def build_attr_value(
            self,
            dry_run: bool = False,  # noqa: FBT001, FBT002, ARG002  (pyHanko's)
        ) -> tsp.SigningCertificateV2:
            named = [as_signing_certificate_v2(one)["certs"][0] for one in carried]
            return tsp.SigningCertificateV2({"certs": named})

    class NamingAll(Specification):
        def signed_attr_providers(
            self, data_digest: bytes, digest_algorithm: str
        ) -> list[CMSAttributeProvider]:
            del data_digest, digest_algorithm
            return [AllCertificates()]

    return NamingAll()


def _drawing(look: bytes) -> PdfContent:
    """Return a PDF page held in memory as content of a stamp."""
    from pyhanko.pdf_utils.content import PdfContent
    from pyhanko.pdf_utils.layout import BoxConstraints
    from pyhanko.pdf_utils.reader import PdfFileReader

    class Drawing(PdfContent):
        def render(self) -> bytes:
            reader = PdfFileReader(io.BytesIO(look))
            page = self._ensure_writer.import_page_as_xobject(reader, page_ix=0)
            self.resources.xobject["/SealLook"] = page
            left, low, right, high = (float(x) for x in page.get_object()["/BBox"])
            self.box = BoxConstraints(width=right - left, height=high - low)
            return b"/SealLook Do"

    return Drawing()
