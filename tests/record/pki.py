"""Certificates for the tests of seals: a root, people under it, a time-stamp server."""

import datetime as dt
from dataclasses import dataclass

from cryptography import x509
from cryptography.hazmat.primitives import hashes
from cryptography.hazmat.primitives.asymmetric import ec, rsa
from cryptography.hazmat.primitives.serialization import (
    BestAvailableEncryption,
    Encoding,
    pkcs12,
)
from cryptography.x509.oid import ExtendedKeyUsageOID, NameOID

START = dt.datetime(2026, 1, 1, tzinfo=dt.UTC)
FINISH = dt.datetime(2031, 1, 1, tzinfo=dt.UTC)
PASSWORD = b"secret"


@dataclass(frozen=True, kw_only=True)
class Holder:
    """Someone with a key and a certificate."""

    key: object
    certificate: x509.Certificate
    chain: tuple = ()

    @property
    def der(self):
        return self.certificate.public_bytes(Encoding.DER)

    @property
    def pem(self):
        return self.certificate.public_bytes(Encoding.PEM)

    @property
    def pkcs12(self):
        return pkcs12.serialize_key_and_certificates(
            b"key",
            self.key,
            self.certificate,
            self.chain,
            BestAvailableEncryption(PASSWORD),
        )


def holder(
    name,
    *,
    issuer=None,
    key=None,
    start=START,
    finish=FINISH,
    is_authority=False,
    for_signatures=True,
    for_time_stamps=False,
):
    """A holder whose certificate is issued by `issuer`, or by itself."""
    key = key or ec.generate_private_key(ec.SECP256R1())
    subject = named(name)
    builder = (
        x509.CertificateBuilder()
        .subject_name(subject)
        .issuer_name(issuer.certificate.subject if issuer else subject)
        .public_key(key.public_key())
        .serial_number(x509.random_serial_number())
        .not_valid_before(start)
        .not_valid_after(finish)
        .add_extension(
            x509.BasicConstraints(ca=is_authority, path_length=None), critical=True
        )
        .add_extension(usage(is_authority, for_signatures), critical=True)
        .add_extension(
            x509.SubjectKeyIdentifier.from_public_key(key.public_key()), critical=False
        )
    )
    if for_time_stamps:
        builder = builder.add_extension(
            x509.ExtendedKeyUsage([ExtendedKeyUsageOID.TIME_STAMPING]), critical=True
        )
    signed = builder.sign(issuer.key if issuer else key, hashes.SHA256())
    chain = (issuer.certificate, *issuer.chain) if issuer else ()
    return Holder(key=key, certificate=signed, chain=chain)


def named(name):
    return x509.Name(
        [
            x509.NameAttribute(NameOID.COUNTRY_NAME, "NL"),
            x509.NameAttribute(NameOID.ORGANIZATION_NAME, "Example Works"),
            x509.NameAttribute(NameOID.COMMON_NAME, name),
        ]
    )


def usage(is_authority, for_signatures):
    signs = for_signatures and not is_authority
    return x509.KeyUsage(
        digital_signature=signs,
        content_commitment=signs,
        key_encipherment=not signs and not is_authority,
        data_encipherment=False,
        key_agreement=False,
        key_cert_sign=is_authority,
        crl_sign=is_authority,
        encipher_only=False,
        decipher_only=False,
    )


def time_stamps(root, *, moment):
    """A time-stamp server in this process, which states `moment`."""
    from asn1crypto import keys
    from asn1crypto import x509 as asn1_x509
    from cryptography.hazmat.primitives.serialization import (
        NoEncryption,
        PrivateFormat,
    )
    from pyhanko.sign.timestamps import DummyTimeStamper
    from pyhanko_certvalidator.registry import SimpleCertificateStore

    server = holder(
        "Example time stamps",
        issuer=root,
        key=rsa.generate_private_key(65537, 2048),
        for_time_stamps=True,
    )
    plain = server.key.private_bytes(Encoding.DER, PrivateFormat.PKCS8, NoEncryption())
    store = SimpleCertificateStore()
    store.register(asn1_x509.Certificate.load(root.der))
    return DummyTimeStamper(
        asn1_x509.Certificate.load(server.der),
        keys.PrivateKeyInfo.load(plain),
        store,
        fixed_dt=moment,
    )
