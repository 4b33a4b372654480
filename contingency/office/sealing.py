"""Seal: a digital signature in the field of a role, on a copy of the issued report."""

from __future__ import annotations

import datetime as dt
from dataclasses import dataclass
from pathlib import Path

from contingency.errors import BrokenSeal, NotIssued
from contingency.office.paths import bytes_of, in_the_way, writing
from contingency.record import issue_note, register, sign_off_file
from contingency.record.durable import write_durably
from contingency.record.persons import same_person


@dataclass(frozen=True, kw_only=True, slots=True)
class SealedReport:
    """A report with one seal more."""

    path: Path
    """The sealed copy."""
    role: str
    signer: str
    """Name in the certificate."""
    level: str
    """PAdES B-B or B-T."""
    is_test: bool
    """Made with a certificate for trying out."""
    typed_name: str
    """Who gave the typed sign-off of this role; empty if none is inside."""
    open_roles: tuple[str, ...]
    """Roles whose field is still empty."""

    @property
    def names_agree(self) -> bool:
        """Whether the certificate may be that of the person who signed off."""
        return not self.typed_name or same_person(self.typed_name, self.signer)


def seal_report(
    path: Path,
    *,
    role: str,
    certificate: bytes,
    password: bytes,
    when: dt.datetime,
    out: Path | None = None,
    time_stamps: str = "",
) -> SealedReport:
    """Put a digital seal into the field of a role; write a sealed copy.

    The issued file stays as it is.  The copy goes beside it under a name that ends
    in `-sealed.pdf`; sealing that copy again adds to it.

    Parameters
    ----------
    path : Path
        An issued report, or a sealed copy of one.
    role : str
        Whose field is filled.
    certificate : bytes
        A PKCS#12 file.
    password : bytes
        Of that file.
    when : datetime
        Claimed time of the seal, with its offset from UTC.
    out : Path, optional
        Where the copy goes.
    time_stamps : str
        Address of a time-stamp server: then the seal has level B-T.

    Raises
    ------
    WrongPassword, UnfitCertificate
        wrong-password, unfit-certificate.
    NotIssued
        not-issued.  The PDF is a draft.
    BrokenSeal
        broken-seal.  The file was changed after an earlier seal.
    NoSealField, AlreadySealed, NoTimeStamp, UnreadableReport
        See `contingency.record.seals.seal`.
    UnusablePath
        unusable-path.  The file cannot be read, or another one is in the way.
    """
    from contingency.record.attachments import read_attachments
    from contingency.record.certificates import open_certificate
    from contingency.record.seal_check import check_seals
    from contingency.record.seals import seal, time_stamp_server

    opened = open_certificate(certificate, password=password, when=when)
    pdf = bytes_of(path)
    inside = {file.name: file.content for file in read_attachments(pdf)}
    if issue_note.read_note(inside.get(issue_note.NAME, b"")) is None:
        raise NotIssued(
            where=str(path),
            found="it carries no note of an issue: it is a draft.",
            rule="Only an issued report is sealed.",
            remedy="Issue the report with `contingency issue`, and seal the PDF in the "
            "issued folder.",
        )
    _refuse_broken(path, check_seals(pdf, when=when, second_word=False).are_intact)
    sealed = seal(
        pdf,
        role=role,
        certificate=opened,
        when=when,
        time_stamps=time_stamp_server(time_stamps) if time_stamps else None,
    )
    after = check_seals(sealed, when=when, second_word=False)
    _refuse_broken(path, after.are_intact)
    where = out or _sealed_name(path)
    _write_sealed(where, sealed)
    return SealedReport(
        path=where,
        role=role,
        signer=opened.name,
        level=after.seals[-1].level,
        is_test=opened.is_test,
        typed_name=_typed_name(inside.get(sign_off_file.FILE, b""), role),
        open_roles=after.open_roles,
    )


def write_test_certificate(
    folder: Path, name: str, *, password: bytes, when: dt.datetime
) -> tuple[Path, Path]:
    """Make a certificate for trying out; return its two files, key first.

    Parameters
    ----------
    folder : Path
        Where they go; it must exist.
    name : str
        Whom it pretends to be of.
    password : bytes
        Under which the key is kept; not empty.
    when : datetime
        First moment of its validity, with its offset from UTC.

    Raises
    ------
    WrongPassword
        wrong-password.  The password is empty.
    UnusablePath
        unusable-path.  A file of that name is there already.
    """
    from contingency.record.certificates import TEST_ONLY, make_test_certificate

    made = make_test_certificate(name, password=password, when=when)
    stem = f"{TEST_ONLY.lower().replace(' ', '-')}-{register.folder_name(name, 1)}"
    paths = (folder / f"{stem}.p12", folder / f"{stem}.pem")
    for path in paths:
        if path.exists():
            raise in_the_way(path)
    with writing(folder):
        write_durably(paths[0], made.pkcs12)
        paths[0].chmod(0o600)
        write_durably(paths[1], made.pem)
    return paths


def _sealed_name(path: Path) -> Path:
    stem = path.stem.removesuffix("-sealed")
    return path.with_name(f"{stem}-sealed{path.suffix}")


def _write_sealed(path: Path, sealed: bytes) -> None:
    """Write the copy; only an earlier stage of itself may be replaced by it."""
    if path.exists() and not sealed.startswith(bytes_of(path)):
        raise in_the_way(path)
    with writing(path.parent):
        write_durably(path, sealed)


def _refuse_broken(path: Path, are_intact: bool) -> None:  # noqa: FBT001
    if not are_intact:
        raise BrokenSeal(
            where=str(path),
            found="the file was changed after it was issued or sealed.",
            rule="A seal is put on an untouched report only.",
            remedy="Look at it with `contingency verify`, and start again from the "
            "file in the issued folder.",
        )


def _typed_name(content: bytes, role: str) -> str:
    if not content:
        return ""
    given = sign_off_file.parse_sign_offs(content, where="the report").latest(role)
    return given.name if given else ""
