"""sign, issue, seal, verify: the acts of the office."""

from __future__ import annotations

import argparse
import os
from dataclasses import asdict
from getpass import getpass
from pathlib import Path
from typing import TYPE_CHECKING

from contingency.cli.console import (
    ATTENTION,
    CAUTION,
    DONE,
    now,
    print_json,
    progress_bar,
    say,
)
from contingency.errors import NoPassword

if TYPE_CHECKING:
    from contingency.verify.verification import Verification

VARIABLE = "CONTINGENCY_SEAL_PASSWORD"
"""Environment variable that may hold a certificate's password."""


def sign(options: argparse.Namespace) -> int:
    """Record a typed sign-off bound to inputs and results."""
    from contingency.office import sign_estimate

    signed = sign_estimate(
        options.estimate,
        role=options.role,
        name=options.name,
        position=options.position,
        comment=options.comment,
        conditions=options.conditions,
        when=now(),
        threads=options.threads,
        progress=progress_bar(options),
    )
    if options.json:
        print_json(
            {
                "sign_off": asdict(signed.sign_off),
                "standings": [
                    {"role": line.role.role, "standing": line.standing}
                    for line in signed.standings
                ],
                "open_points": list(signed.open_points),
            }
        )
        return DONE
    print(f"Recorded in sign_offs.json beside the estimate {options.estimate}.")
    for line in signed.standings:
        print(f"  {line.sentence}")
    for point in signed.open_points:
        print(f"  before an issue: {point}")
    print("A typed sign-off is a record.  It is not a cryptographic signature.")
    return DONE


def issue(options: argparse.Namespace) -> int:
    """Write the final report and add it to the register."""
    from contingency.office import issue_estimate

    records = options.records or options.estimate.resolve().parent
    entry = issue_estimate(
        options.estimate,
        records=records,
        reason=options.reason,
        when=now(),
        templates=options.templates,
        threads=options.threads,
        progress=progress_bar(options),
        say=say(options),
    )
    if options.json:
        print_json(asdict(entry))
        return DONE
    print(f"{entry.project}, revision {entry.revision}: issue {entry.issue}")
    print(f"  files   {records / entry.folder}")
    print(f"  report  {entry.report}, SHA-256 {entry.pdf}")
    print(f"  line {entry.number} of {records / 'register.jsonl'}")
    print(CAUTION)
    return DONE


def seal(options: argparse.Namespace) -> int:
    """Put a digital seal into a role's field, or make a certificate to try it out."""
    from contingency.office import seal_report, write_test_certificate

    if options.make_test_certificate:
        key, public = write_test_certificate(
            options.report or Path(),
            options.make_test_certificate,
            password=_password(options),
            when=now(),
        )
        if options.json:
            print_json({"certificate": str(key), "public": str(public)})
            return DONE
        print(f"  wrote {key}, the certificate with its key, for --certificate")
        print(f"  wrote {public}, for --trust of contingency verify")
        print("It is for trying out only: anybody can make one in any name.")
        return DONE
    sealed = seal_report(
        options.report,
        role=options.role,
        certificate=options.certificate.read_bytes(),
        password=_password(options),
        when=now(),
        out=options.out,
        time_stamps=options.time_stamps,
    )
    if options.json:
        print_json({**asdict(sealed), "names_agree": sealed.names_agree})
        return DONE if sealed.names_agree else ATTENTION
    print(f"  wrote {sealed.path}")
    print(f"  sealed as {sealed.role} by {sealed.signer}, PAdES {sealed.level}")
    if sealed.is_test:
        print("  with a test certificate, which proves nobody")
    if not sealed.names_agree:
        print(f"  the typed sign-off of this role names {sealed.typed_name}")
    if sealed.open_roles:
        print(f"  still open: {', '.join(sealed.open_roles)}")
    return DONE if sealed.names_agree else ATTENTION


def verify(options: argparse.Namespace) -> int:
    """Take a report apart, compute it again, say what holds."""
    from contingency.office import verify_file

    found = verify_file(
        options.report,
        when=now(),
        register_file=options.register,
        trusted=options.trust,
        threads=options.threads,
        say=say(options),
    )
    if options.json:
        print_json(found.as_dict())
    else:
        _print_verification(found)
    return DONE if found.holds else ATTENTION


def _print_verification(found: Verification) -> None:
    title = f"{found.project}, revision {found.revision}" if found.project else ""
    if title:
        print(title)
    width = max((len(line.what) for line in found.lines), default=0)
    for line in found.lines:
        print(f"  {line.what:<{width}}  {line.outcome:<11}  {line.words}")
    print(found.bottom_line)


def _password(options: argparse.Namespace) -> bytes:
    """Return a certificate's password: from a file, the environment, or a prompt.

    Never from an argument: arguments are seen by everybody on the machine.
    """
    if options.password_file:
        path: Path = options.password_file
        try:
            text = path.read_text(encoding="utf-8")
        except OSError as error:
            raise NoPassword(
                where=str(path),
                found=f"{error.strerror or error}.",
                rule="The first line of the file is the certificate's password.",
                remedy="Check its name and permissions.",
            ) from error
        return text.split("\n", 1)[0].rstrip("\r").encode("utf-8")
    if VARIABLE in os.environ:
        return os.environ[VARIABLE].encode("utf-8")
    try:
        return getpass("Password of the certificate: ").encode("utf-8")
    except (EOFError, OSError) as error:
        raise NoPassword(
            where="contingency seal",
            found="there is no terminal to ask for the password.",
            rule="The password comes from a prompt, the environment or a file.",
            remedy=f"Set {VARIABLE}, or name a file with --password-file.",
        ) from error
