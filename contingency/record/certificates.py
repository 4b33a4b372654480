"""Certificates: opened with their password, looked at, and made for trying out.

The private key comes in as the bytes of a PKCS#12 file and its password; it is never
written anywhere.
"""

from __future__ import annotations

import datetime as dt
from dataclasses import dataclass, field

from asn1crypto import pkcs12 as asn1_pkcs12
from cryptography import x509
from cryptography.hazmat.primitives import hashes
from cryptography.hazmat.primitives.asymmetric import ec, rsa
from cryptography.hazmat.primitives.serialization import (
    BestAvailableEncryption,
    Encoding,
    pkcs12,
)
from cryptography.x509.oid import NameOID

from contingency.errors import UnfitCertificate, WrongPassword

TEST_ONLY = "TEST ONLY"
"""Begins the name in every certificate that this program makes."""

SMALLEST_RSA = 2048
"""Bits: NIST SP 800-131A rev. 2 (2019), table 2, from memory."""

CURVES = ("secp256r1", "secp384r1", "secp521r1")

PrivateKey = rsa.RSAPrivateKey | ec.EllipticCurvePrivateKey


@dataclass(frozen=True, kw_only=True, slots=True)
class SigningCertificate:
    """What is needed to seal."""

    key: PrivateKey = field(repr=False)
    certificate: x509.Certificate
    chain: tuple[x509.Certificate, ...]
    """Certificates of the issuers, as far as the file has them."""

    @property
    def name(self) -> str:
        """Name of the holder, as the certificate has it."""
        return common_name(self.certificate.subject)

    @property
    def is_test(self) -> bool:
        """Whether this program made it for trying out."""
        return self.name.startswith(TEST_ONLY)


@dataclass(frozen=True, kw_only=True, slots=True)
class TestCertificate:
    """A certificate for trying out; it proves nothing about anybody."""

    __test__ = False  # the name begins like that of a class of tests

    pkcs12: bytes = field(repr=False)
    """Key and certificate, under the password: for `seal`."""
    pem: bytes
    """The certificate alone: for `verify --trust`."""


def open_certificate(
    content: bytes, *, password: bytes, when: dt.datetime
) -> SigningCertificate:
    """Return key and certificate of a PKCS#12 file, if they may seal at `when`.

    Parameters
    ----------
    content : bytes
        The file, usually named `.p12` or `.pfx`.
    password : bytes
        Of the file.
    when : datetime
        Time of the seal, with its offset from UTC.

    Raises
    ------
    WrongPassword
        wrong-password.
    UnfitCertificate
        unfit-certificate.  No PKCS#12 file, no key in it, expired or not yet valid,
        or not meant for signatures.
    """
    try:
        key, certificate, chain = pkcs12.load_key_and_certificates(
            content, password or None
        )
    except (ValueError, TypeError) as fault:
        if _is_pkcs12(content):
            raise WrongPassword(
                where="the certificate file",
                found="it does not open with the password given.",
                rule="The file and its password belong together.",
                remedy="Give the password that the file was made with.",
            ) from None
        raise _unfit(f"it is no PKCS#12 file ({fault}).") from None
    if key is None or certificate is None:
        raise _unfit("it holds no private key with its certificate.")
    if not _is_known(key):
        raise _unfit("its key is neither RSA of 2,048 bits or more nor a NIST curve.")
    opened = SigningCertificate(
        key=key,  # type: ignore[arg-type]  # _is_known has looked
        certificate=certificate,
        chain=tuple(chain),
    )
    for found in unfit_reasons(certificate, when):
        raise _unfit(f"the certificate of {opened.name} {found}.")
    return opened


def unfit_reasons(certificate: x509.Certificate, when: dt.datetime) -> tuple[str, ...]:
    """Return in words why a certificate may not seal at `when`; empty if it may."""
    reasons = []
    if when < certificate.not_valid_before_utc:
        reasons.append(
            f"is not valid before {certificate.not_valid_before_utc:%Y-%m-%d}"
        )
    if when > certificate.not_valid_after_utc:
        reasons.append(f"expired on {certificate.not_valid_after_utc:%Y-%m-%d}")
    try:
        usage = certificate.extensions.get_extension_for_class(x509.KeyUsage).value
    except (x509.ExtensionNotFound, ValueError):
        usage = None
    if usage and not (usage.digital_signature or usage.content_commitment):
        reasons.append("is not meant for signatures")
    return tuple(reasons)


def make_test_certificate(
    name: str, *, password: bytes, when: dt.datetime, days: int = 365
) -> TestCertificate:
    """Make a self-signed certificate for trying out, clearly named as such.

    Parameters
    ----------
    name : str
        Stands behind the words TEST ONLY in the certificate.
    password : bytes
        Of the file; not empty.
    when : datetime
        First moment of its validity, with its offset from UTC.
    days : int
        How long it is valid.
    """
    if not password:
        raise WrongPassword(
            where="the test certificate",
            found="the password is empty.",
            rule="A private key is kept under a password, for a test too.",
            remedy="Give a password.",
        )
    key = ec.generate_private_key(ec.SECP256R1())
    plain = " ".join(name.split())[: 64 - len(TEST_ONLY) - 2]  # 64: limit of a name
    subject = x509.Name(
        [
            x509.NameAttribute(NameOID.ORGANIZATION_NAME, "Nobody: a test certificate"),
            x509.NameAttribute(NameOID.COMMON_NAME, f"{TEST_ONLY}: {plain}"),
        ]
    )
    start = when.astimezone(dt.UTC).replace(microsecond=0)
    certificate = (
        x509.CertificateBuilder()
        .subject_name(subject)
        .issuer_name(subject)
        .public_key(key.public_key())
        .serial_number(x509.random_serial_number())
        .not_valid_before(start)
        .not_valid_after(start + dt.timedelta(days=days))
        .add_extension(x509.BasicConstraints(ca=False, path_length=None), critical=True)
        .add_extension(_for_signatures(), critical=True)
        .add_extension(
            x509.SubjectKeyIdentifier.from_public_key(key.public_key()), critical=False
        )
        .sign(key, hashes.SHA256())
    )
    return TestCertificate(
        pkcs12=pkcs12.serialize_key_and_certificates(
            plain.encode(), key, certificate, None, BestAvailableEncryption(password)
        ),
        pem=certificate.public_bytes(Encoding.PEM),
    )


def read_trusted(content: bytes) -> tuple[x509.Certificate, ...]:
    """Return the certificates of a PEM or DER file that a reader trusts.

    Raises
    ------
    UnfitCertificate
        unfit-certificate.  The file holds none.
    """
    try:
        if b"-----BEGIN" in content:
            return tuple(x509.load_pem_x509_certificates(content))
        return (x509.load_der_x509_certificate(content),)
    except ValueError as fault:
        raise UnfitCertificate(
            where="the trusted certificates",
            found=f"the file cannot be read ({fault}).",
            rule="Trusted certificates come as PEM or DER.",
            remedy="Ask whoever issues the certificates of your organisation for the "
            "file of their own certificate.",
        ) from None


def common_name(name: x509.Name) -> str:
    """Return the common name, or the whole name where there is none."""
    found = name.get_attributes_for_oid(NameOID.COMMON_NAME)
    return str(found[-1].value) if found else name.rfc4514_string()


def _for_signatures() -> x509.KeyUsage:
    return x509.KeyUsage(
        digital_signature=True,
        content_commitment=True,
        key_encipherment=False,
        data_encipherment=False,
        key_agreement=False,
        key_cert_sign=False,
        crl_sign=False,
        encipher_only=False,
        decipher_only=False,
    )


def _is_known(key: object) -> bool:
    if isinstance(key, rsa.RSAPrivateKey):
        return key.key_size >= SMALLEST_RSA
    return isinstance(key, ec.EllipticCurvePrivateKey) and key.curve.name in CURVES


def _is_pkcs12(content: bytes) -> bool:
    """Whether the bytes have the outer form of such a file, password aside."""
    try:
        outer = asn1_pkcs12.Pfx.load(content, strict=True)
        return outer["version"].native == "v3" and bool(outer["auth_safe"].native)
    except (ValueError, TypeError, KeyError):
        return False


def _unfit(found: str) -> UnfitCertificate:
    return UnfitCertificate(
        where="the certificate file",
        found=found,
        rule="A seal is made with the private key of a valid certificate for "
        "signatures.",
        remedy="Use a PKCS#12 file (.p12 or .pfx) from whoever issues certificates "
        "in your organisation.",
    )
