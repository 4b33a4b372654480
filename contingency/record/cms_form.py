"""Whether the signature inside a seal is written in the one form that it can have.

A signature (CMS, RFC 5652) has parts that it does not cover itself: algorithm names,
version numbers, the certificates that it carries along.  A reader that skips over them
would miss a changed byte there.  So each of these parts is held against what it must
be, given the parts that are covered.
"""

from __future__ import annotations

from collections.abc import Iterator, Sequence
from hashlib import sha256, sha384, sha512
from typing import Any

from asn1crypto import cms, core, tsp
from asn1crypto import x509 as asn1_x509
from cryptography import x509
from cryptography.exceptions import InvalidSignature

_CONTENT = bytes.fromhex("06 a0")
"""Tags of the parts of the whole: what it is, and the signed data."""
_SIGNED_DATA = bytes.fromhex("02 31 30 a0 31")
"""Tags of the parts of signed data: version, digests, content, certificates, signer."""
_SIGNER = bytes.fromhex("02 30 30 a0 30 04")
"""Tags of the parts of a signer: version, certificate, digest, what is signed,
algorithm, signature."""
_BESIDE = b"\xa1"
"""Tag of what stands beside a signature."""

_DIGESTS = {"sha256": sha256, "sha384": sha384, "sha512": sha512}

_ALGORITHMS = frozenset({"rsassa_pkcs1v15", "rsassa_pss", "ecdsa"})

# Attributes of a signature, by number: asn1crypto knows their names only once
# pyHanko has been imported.
_SIGNING_CERTIFICATE = "1.2.840.113549.1.9.16.2.12"
_SIGNING_CERTIFICATE_V2 = "1.2.840.113549.1.9.16.2.47"
_TIME_STAMP = "1.2.840.113549.1.9.16.2.14"


def signature_in(contents: str) -> tuple[bytes, tuple[str, ...]]:
    """Return the signature in the hexadecimal text of /Contents, and what is odd.

    Parameters
    ----------
    contents : str
        Between the angle brackets, as the file has it.
    """
    faults = []
    if contents not in {contents.upper(), contents.lower()}:
        faults.append("its hexadecimal digits mix capitals and small letters")
    try:
        padded = bytes.fromhex(contents)
    except ValueError:
        return b"", ("it is not written in hexadecimal digits",)
    if len(contents) != 2 * len(padded):
        faults.append("its hexadecimal digits are spaced out")
    length = _length(padded) if padded[:1] == b"\x30" else None
    if length is None:
        return b"", (*faults, "it does not begin as a signature does")
    if padded[length:].strip(b"\0"):
        faults.append("something stands behind it")
    return padded[:length], tuple(faults)


def form_faults(signature: bytes) -> tuple[str, ...]:
    """Return in words what is odd in the parts that a signature does not cover.

    Raises
    ------
    Exception
        Of any kind, from the libraries, where it cannot be read at all.
    """
    content = cms.ContentInfo.load(signature, strict=True)
    if content["content_type"].native != "signed_data":
        return ("it is no signature",)
    signed = content["content"]
    faults = list(_signed_data_faults(signed))
    if signed["encap_content_info"]["content_type"].native != "data":
        faults.append("it claims to hold a document of its own")
    if signed["encap_content_info"]["content"].native is not None:
        faults.append("it holds a document of its own")
    if signed["version"].native != "v1":
        faults.append("its version is another")
    if _has_odd_parts(signature, signed):
        faults.append("it has parts that no signature has")
    faults += _unsigned_faults(signed["signer_infos"][0])
    # A time stamp was made elsewhere, in whatever form of ASN.1, and is left out.
    beside = signed["signer_infos"][0]["unsigned_attrs"].dump()
    if not _is_der(signature, leaving_out=beside):
        faults.append("it is not written in the one form of DER")
    return tuple(faults)


def _signed_data_faults(signed: Any) -> Iterator[str]:  # noqa: ANN401
    """Give what is odd in the uncovered parts of signed data of any kind."""
    if len(signed["signer_infos"]) != 1:
        yield "it has not one signer"
        return
    (signer,) = signed["signer_infos"]
    if signer["version"].native != "v1" or signer["sid"].name != (
        "issuer_and_serial_number"
    ):
        yield "its signer is named in an unusual way"
        return
    if not isinstance(signed["crls"], core.Void):
        yield "it carries lists of revoked certificates"
    yield from _algorithm_faults(signed, signer)
    certificates = [choice.chosen for choice in signed["certificates"]]
    if not all(isinstance(c, asn1_x509.Certificate) for c in certificates):
        yield "it carries something that is no certificate"
        return
    yield from _certificate_faults(signer, certificates)


def _algorithm_faults(signed: Any, signer: Any) -> Iterator[str]:  # noqa: ANN401
    name = signer["digest_algorithm"]["algorithm"].native
    if name not in _DIGESTS:
        yield f"its digest is {name}"
    listed = [one["algorithm"].native for one in signed["digest_algorithms"]]
    if listed != [name]:
        yield "it names several digests"
    algorithms = [signer["digest_algorithm"], *signed["digest_algorithms"]]
    for one in algorithms:
        if one["parameters"].dump() not in {b"", b"\x05\x00"}:
            yield "its digest has parameters"
    signing = signer["signature_algorithm"]
    kind = signing.signature_algo
    if kind not in _ALGORITHMS:
        yield f"its algorithm is {kind}"
    elif kind != "rsassa_pss":
        if signing["parameters"].dump() not in {b"", b"\x05\x00"}:
            yield "its algorithm has parameters"
        named = signing["algorithm"].native
        if named != kind and not named.startswith(name):
            yield "its algorithm names another digest"


def _certificate_faults(signer: Any, certificates: Sequence[Any]) -> Iterator[str]:  # noqa: ANN401
    """Give which certificates are not what the signature or each other say."""
    if len({one.dump() for one in certificates}) != len(certificates):
        yield "it carries a certificate twice"
    holder = [
        one
        for one in certificates
        if one.issuer == signer["sid"].chosen["issuer"]
        and one.serial_number == signer["sid"].chosen["serial_number"].native
    ]
    named = list(_digests_inside(signer))
    if len(holder) != 1 or not named or not _is_in(holder[0], named[:1]):
        yield "the certificate of its signer is not the one that was signed with"
        return
    loaded = [x509.load_der_x509_certificate(one.dump()) for one in certificates]
    for one, plain in zip(loaded, certificates, strict=True):
        if _is_in(plain, named):
            continue  # the signature covers its digest
        name = one.subject.rfc4514_string()
        if len(named) > 1:
            yield f"the certificate of {name} is not among those signed with"
            continue
        issuers = [other for other in loaded if other.subject == one.issuer]
        if issuers and not any(_issued(one, issuer) for issuer in issuers):
            yield f"the certificate of {name} is damaged"
        elif not issuers and all(one.subject != other.issuer for other in loaded):
            yield f"the certificate of {name} has no use"


def _digests_inside(signer: Any) -> Iterator[tuple[str, bytes]]:  # noqa: ANN401
    """Give the digests of certificates that the signature covers (RFC 5035).

    The first is that of the signer.  Seals of this program name all certificates
    that they carry; others may name the first alone, and the rest is then held
    against one another as far as that goes.
    """
    for attribute in signer["signed_attrs"]:
        kind = attribute["type"].dotted
        if kind == _SIGNING_CERTIFICATE_V2:
            new = tsp.SigningCertificateV2.load(attribute["values"][0].dump())
            for one in new["certs"]:
                name = one["hash_algorithm"]["algorithm"].native
                yield name, one["cert_hash"].native
        elif kind == _SIGNING_CERTIFICATE:
            # Time-stamp servers still use the older form, with SHA-1 (RFC 2634).
            old = tsp.SigningCertificate.load(attribute["values"][0].dump())
            for one in old["certs"]:
                yield "sha1", one["cert_hash"].native


def _is_in(certificate: Any, named: Sequence[tuple[str, bytes]]) -> bool:  # noqa: ANN401
    digests = {
        **{
            name: digest(certificate.dump()).digest()
            for name, digest in _DIGESTS.items()
        },
        "sha1": certificate.sha1,
    }
    return any(digests.get(name) == digest for name, digest in named)


def _issued(certificate: x509.Certificate, issuer: x509.Certificate) -> bool:
    try:
        certificate.verify_directly_issued_by(issuer)
    except (InvalidSignature, ValueError, TypeError):
        return False
    return True


def _unsigned_faults(signer: Any) -> Iterator[str]:  # noqa: ANN401
    """Give what is odd beside the signature: only one time stamp may stand there."""
    attributes = signer["unsigned_attrs"]
    if isinstance(attributes, core.Void):
        return
    kinds = [attribute["type"].dotted for attribute in attributes]
    if kinds != [_TIME_STAMP] or len(attributes[0]["values"]) != 1:
        yield "something other than one time stamp stands beside it"
        return
    token = cms.ContentInfo.load(attributes[0]["values"][0].dump())
    if token["content_type"].native != "signed_data":
        yield "its time stamp is no signature"
        return
    for fault in _signed_data_faults(token["content"]):
        yield f"in its time stamp: {fault}"
    if token["content"]["version"].native != "v3":  # RFC 5652, section 5.1
        yield "the version of its time stamp is another"
    stamped_by = token["content"]["signer_infos"][0]["unsigned_attrs"]
    if not isinstance(stamped_by, core.Void):
        yield "something stands beside its time stamp"


def _is_der(part: bytes, *, leaving_out: bytes) -> bool:
    """Whether lengths are definite and as short as can be, all the way down."""
    place = 0
    while place < len(part):
        size = _length(part[place:])
        tag = part[place]
        if size is None or tag == 0 or tag & 0x1F == 0x1F:
            return False
        whole = part[place : place + size]
        is_made_of_parts = tag & 0x20 and whole != leaving_out
        if is_made_of_parts and not _is_der(_inside(whole), leaving_out=leaving_out):
            return False
        place += size
    return True


def _has_odd_parts(signature: bytes, signed: Any) -> bool:  # noqa: ANN401
    """Whether something stands in a signature that a reader would skip over."""
    (signer,) = signed["signer_infos"]
    return (
        _tags(signature) != _CONTENT
        or _tags(_inside(signed.dump())) != _SIGNED_DATA
        or _tags(signer.dump()) not in {_SIGNER, _SIGNER + _BESIDE}
    )


def _tags(whole: bytes) -> bytes:
    """Return the tags of the parts of a DER object that is made of parts."""
    inside, place, tags = _inside(whole), 0, bytearray()
    while place < len(inside):
        size = _length(inside[place:])
        if size is None:
            return b""
        tags.append(inside[place])
        place += size
    return bytes(tags)


def _inside(whole: bytes) -> bytes:
    """Return what a DER object holds; nothing where its length is none."""
    size = _length(whole)
    if size is None:
        return b""
    return whole[2 + (whole[1] & 0x7F if whole[1] > 0x7F else 0) : size]


def _length(padded: bytes) -> int | None:
    """Return the length of the DER object at the start; None if there is none."""
    if len(padded) < 2:
        return None
    first = padded[1]
    if first < 0x80:
        return 2 + first if 2 + first <= len(padded) else None
    size = first & 0x7F
    if not 1 <= size <= 4 or len(padded) < 2 + size or padded[2] == 0:
        return None
    length = int.from_bytes(padded[2 : 2 + size], "big")
    whole = 2 + size + length
    return whole if length >= 0x80 and whole <= len(padded) else None
