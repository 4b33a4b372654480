"""A small project, signed, issued and sealed once for all tests of the office."""

import atexit
import datetime as dt
import shutil
import tempfile
from dataclasses import dataclass
from functools import cache
from pathlib import Path

from contingency import read_estimate, run_study
from contingency.office import issue_estimate, seal_report, sign_estimate
from tests.folders import lay_out
from tests.record import pki

WHEN = dt.datetime(2026, 4, 2, 9, 30, tzinfo=dt.UTC)
LATER = dt.datetime(2026, 5, 4, 12, 0, tzinfo=dt.UTC)
SIGNERS = {
    "prepared": "Anna Example",
    "checked": "Ben Sample",
    "approved": "Cora Specimen",
}
CONDITION = "Look at the piling rates again before the order"


@dataclass(frozen=True, kw_only=True)
class Project:
    """Where everything lies, and who is who."""

    records: Path
    folder: Path
    issued: Path
    """The report as issued."""
    sealed: tuple[bytes, ...]
    """The report with no seal, one, two and three."""
    root: pki.Holder
    holders: dict


def estimate_folder(folder):
    """An estimate of two packages with every major finding answered."""
    lay_out(
        folder,
        packages=[
            {"id": "P1", "name": "Piles", "base": 1000, "low": 900, "high": 1300},
            {"id": "P2", "name": "Deck", "base": 500, "low": 400, "high": 700},
        ],
        trials=16_384,
    )
    for role, name in SIGNERS.items():
        add(
            folder,
            f'[[sign_off]]\nrole = "{role}"\nname = "{name}"\nposition = "Engineer"\n',
        )
    for finding in run_study(read_estimate(folder)).findings:
        assert finding.severity != "stop", finding.check
        if finding.needs_attention:
            add(
                folder,
                f'[[answers]]\ncheck = "{finding.check}"\nwhere = "{finding.where}"\n'
                'answer = "It is so on purpose, for a test."\nby = "Anna Example"\n'
                "on = 2026-04-01\n",
            )
    return folder


def add(folder, text):
    with (folder / "estimate.toml").open("a", encoding="utf-8") as file:
        file.write("\n" + text)


def change(folder, file, old, new):
    """Edit a file of an estimate, as an engineer would."""
    path = folder / file
    text = path.read_text(encoding="utf-8")
    assert old in text
    path.write_text(text.replace(old, new, 1), encoding="utf-8")


def sign_all(folder, *, when=WHEN):
    """Sign in every role; the checker attaches a condition."""
    for role, name in SIGNERS.items():
        sign_estimate(
            folder,
            role=role,
            name=name,
            conditions=CONDITION if role == "checked" else "",
            when=when,
        )


@cache
def project():
    """The project, made on first use; never changed by a test."""
    records = Path(tempfile.mkdtemp(prefix="contingency-office-"))
    atexit.register(shutil.rmtree, records, ignore_errors=True)
    folder = estimate_folder(records / "rev-a")
    sign_all(folder)
    entry = issue_estimate(folder, when=WHEN)
    issued = records / entry.folder / entry.report
    root = pki.holder("Example Root", is_authority=True)
    holders = {role: pki.holder(name, issuer=root) for role, name in SIGNERS.items()}
    stages, path = [issued.read_bytes()], issued
    for role, holder in holders.items():
        path = seal_report(
            path,
            role=role,
            certificate=holder.pkcs12,
            password=pki.PASSWORD,
            when=WHEN,
        ).path
        stages.append(path.read_bytes())
    return Project(
        records=records,
        folder=folder,
        issued=issued,
        sealed=tuple(stages),
        root=root,
        holders=holders,
    )
