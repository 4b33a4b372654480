"""The register: a chain that only grows, and issues that survive any crash."""

import datetime as dt
import os
import signal
import stat
import subprocess
import sys
from hashlib import sha256
from pathlib import Path

import pytest

from contingency.errors import (
    AlreadyIssued,
    BusyRecord,
    DamagedRecord,
    FolderInTheWay,
)
from contingency.record import chain, register
from contingency.record.chain import read_register
from contingency.record.register import IssuedFiles, files_at_fault, issue

WHEN = dt.datetime(2026, 4, 2, 9, 30, tzinfo=dt.UTC)
ROOT = Path(__file__).parents[2]


def made(place):
    """Three files; the PDF is larger than what is written in one go."""
    return IssuedFiles(
        files={
            "report.pdf": b"%PDF-1.7\n" + place.previous.encode() + bytes(150_000),
            "results.json": b"{}\n",
            "drivers.csv": b"id\n",
        },
        report="report.pdf",
        results="results.json",
        inputs="a" * 64,
        tool="0.1.0",
        sign_offs=(
            chain.SignedBy(role="prepared", name="Anna Ünal", signed_at="2026-04-01"),
        ),
    )


def issue_one(records, revision, *, reason="", **more):
    return issue(
        records,
        project="Harbour wall",
        revision=revision,
        reason=reason,
        when=WHEN,
        make=more.pop("make", made),
        **more,
    )


@pytest.fixture
def records(tmp_path):
    """A register of three issues: A, B and B again."""
    issue_one(tmp_path, "A")
    issue_one(tmp_path, "B")
    issue_one(tmp_path, "B", reason="Wrong scope statement on page 2.")
    return tmp_path


def register_of(records):
    return read_register((records / register.FILE).read_bytes())


def test_every_issue_adds_one_line_to_the_chain(records):
    """Number, digest of the line before, issue of the revision, folder, reason."""
    lines = (records / register.FILE).read_bytes().splitlines()
    entries = register_of(records).entries

    assert register_of(records).holds
    assert [e.number for e in entries] == [1, 2, 3]
    assert [e.issue for e in entries] == [1, 1, 2]
    assert [e.folder for e in entries] == ["issued/A", "issued/B", "issued/B-2"]
    assert entries[2].reason == "Wrong scope statement on page 2."
    assert entries[0].previous == chain.FIRST
    assert entries[2].previous == sha256(lines[1]).hexdigest()
    assert entries[0].sign_offs[0].name == "Anna Ünal"


def test_the_files_are_there_read_only_and_as_registered(records):
    """Content by digest, and no one may write to them."""
    for entry in register_of(records).entries:
        assert files_at_fault(records, entry) == ()
        for name in entry.files:
            mode = (records / entry.folder / name).stat().st_mode
            assert stat.S_IMODE(mode) == 0o444
    assert sorted(p.name for p in (records / "issued").iterdir()) == ["A", "B", "B-2"]


def test_the_report_may_carry_the_line_before_its_own(records):
    """The place is known before the files are made: a sealed PDF pins the chain."""
    for entry in register_of(records).entries:
        pdf = (records / entry.folder / entry.report).read_bytes()
        assert entry.previous.encode() in pdf


def test_a_missing_and_a_changed_file_are_named(records):
    """An issued folder can be held against its line."""
    entry = register_of(records).entries[0]
    (records / entry.folder / "drivers.csv").unlink()
    (records / entry.folder / "results.json").chmod(0o644)
    (records / entry.folder / "results.json").write_bytes(b"[]\n")

    assert files_at_fault(records, entry) == (
        "drivers.csv is missing",
        "results.json differs",
    )


def test_an_issued_revision_needs_a_reason_to_be_issued_again(records):
    """Never overwritten; the message says what was issued and when."""
    before = (records / register.FILE).read_bytes()
    with pytest.raises(AlreadyIssued, match=r"B of Harbour wall .* 2026-04-02"):
        issue_one(records, "B", reason="  ")

    assert (records / register.FILE).read_bytes() == before


def test_a_folder_that_no_line_knows_stops_the_issue(records):
    """Whatever lies there is not ours to overwrite."""
    (records / "issued" / "C").mkdir()
    with pytest.raises(FolderInTheWay):
        issue_one(records, "C")

    assert len(register_of(records).entries) == 3


def test_two_revisions_with_alike_names_get_two_folders(tmp_path):
    """`B 2`, `B-2` and a second issue of B; upper and lower case on any disk."""
    for revision, reason in (("B", ""), ("B 2", ""), ("B", "a"), ("b-2", "")):
        issue_one(tmp_path, revision, reason=reason)
    folders = [entry.folder for entry in register_of(tmp_path).entries]

    assert folders == ["issued/B", "issued/B-2", "issued/B-3", "issued/b-2-2"]


@pytest.mark.parametrize("revision", ["../../away", "/etc", "..", ".", "", "a/b\\c"])
def test_no_revision_leads_out_of_the_folder(tmp_path, revision):
    """The name of a folder is ours, whatever the revision is called."""
    entry = issue_one(tmp_path, revision)

    assert (tmp_path / entry.folder).resolve().parent == tmp_path / "issued"
    assert register_of(tmp_path).entries[0].revision == revision


def test_names_of_files_cannot_be_paths(tmp_path):
    """A caller's mistake, and still nothing is written."""

    def wrong(place):
        good = made(place)
        return IssuedFiles(
            files={**good.files, "../x": b""},
            report=good.report,
            results=good.results,
            inputs=good.inputs,
            tool=good.tool,
        )

    with pytest.raises(ValueError, match="names"):
        issue_one(tmp_path, "A", make=wrong)
    assert not (tmp_path / register.FILE).exists()


def test_a_report_is_found_by_its_first_bytes(records):
    """A sealed copy is longer; another file is not in the register."""
    entry = register_of(records).entries[1]
    pdf = (records / entry.folder / entry.report).read_bytes()
    changed = pdf[:-1] + b"x"

    assert chain.entry_of(register_of(records), pdf) == entry
    assert chain.entry_of(register_of(records), pdf + b"seal") == entry
    assert chain.entry_of(register_of(records), changed) is None
    assert chain.entry_of(register_of(records), pdf[:-1]) is None


def test_two_cannot_issue_at_once(tmp_path):
    """The second is told so while the first goes on."""

    def second(step):
        if step == "folder filled":
            with pytest.raises(BusyRecord):
                issue_one(tmp_path, "B")

    issue_one(tmp_path, "A", pause=second)

    assert [e.revision for e in register_of(tmp_path).entries] == ["A"]


def test_a_fault_while_the_files_are_made_leaves_nothing(tmp_path):
    """Neither a line nor a folder."""

    def fail(_):
        raise ZeroDivisionError

    with pytest.raises(ZeroDivisionError):
        issue_one(tmp_path, "A", make=fail)
    assert not (tmp_path / "issued").exists()
    assert not (tmp_path / register.FILE).exists()


# --- Tampering ----------------------------------------------------------------------


def lines_of(records):
    return (records / register.FILE).read_bytes().splitlines(keepends=True)


@pytest.mark.parametrize(
    ("order", "line"),
    [
        ((1, 0, 2), 1),
        ((0, 2, 1), 2),
        ((2, 1, 0), 1),
        ((1, 2), 1),
        ((0, 2), 2),
        ((0, 0, 1, 2), 2),
        ((0, 1, 2, 2), 4),
    ],
    ids=str,
)
def test_lines_reordered_cut_or_doubled_break_the_chain(records, order, line):
    """From the first line that does not follow on."""
    lines = lines_of(records)
    found = read_register(b"".join(lines[i] for i in order))

    assert found.faults[0].line == line


def test_every_changed_byte_is_noticed(records):
    """One bit at each of 300 places spread over the file."""
    content = (records / register.FILE).read_bytes()
    missed = []
    for place in range(0, len(content), len(content) // 300):
        changed = bytearray(content)
        changed[place] ^= 1
        if read_register(bytes(changed)).holds:
            missed.append(place)

    assert missed == []


def test_a_line_made_anew_breaks_the_next(records):
    """Digest of its own put right, and still the chain is broken after it."""
    lines = lines_of(records)
    entry = register_of(records).entries[0]
    forged = chain.written_line(
        chain.Entry(
            **{
                name: getattr(entry, name)
                for name in chain.Entry.__dataclass_fields__
                if name != "project"
            },
            project="Another wall",
        )
    )
    found = read_register(forged + lines[1] + lines[2])

    assert [fault.line for fault in found.faults] == [2]


@pytest.mark.parametrize(
    "content",
    [
        b"\n",
        b"{}\n",
        b"null\n",
        b"[" * 50_000 + b"\n",
        b'{"format":"contingency-register/1"}\n',
        b"\xff\xfe\n",
        b"no line end",
        b'{"a":' + b"9" * 10_000 + b"}\n",
    ],
    ids=["blank", "empty", "null", "deep", "bare", "not UTF-8", "cut", "long number"],
)
def test_what_is_no_register_is_an_answer(content):
    """Never an exception."""
    assert not read_register(content).holds


def test_nothing_is_added_to_a_broken_register(records):
    """And it stays as it was found."""
    lines = lines_of(records)
    broken = lines[0] + lines[2]
    (records / register.FILE).write_bytes(broken)
    with pytest.raises(DamagedRecord, match="line 2"):
        issue_one(records, "C")

    assert (records / register.FILE).read_bytes() == broken


# --- Crashes ------------------------------------------------------------------------

DIE = """
import os, signal, sys
from pathlib import Path
from tests.record.test_register import issue_one

left = int(sys.argv[2])

def pause(step):
    global left
    if left == 0:
        os.kill(os.getpid(), signal.SIGKILL)
    left -= 1

issue_one(Path(sys.argv[1]), "C", pause=pause)
"""


def steps_of_one_issue(folder):
    folder.mkdir()
    steps = []
    issue_one(folder, "C", pause=steps.append)
    return steps


def test_a_kill_at_any_step_leaves_the_register_as_before_or_complete(tmp_path):
    """Killed at every step in turn; then the next issue clears up."""
    steps = steps_of_one_issue(tmp_path / "dry")
    assert len(steps) > 20
    committed = steps.index(f"renamed {register.FILE}")

    for killed_at, step in enumerate(steps):
        records = tmp_path / str(killed_at)
        records.mkdir()
        issue_one(records, "A")
        before = (records / register.FILE).read_bytes()
        ended = subprocess.run(
            [sys.executable, "-c", DIE, str(records), str(killed_at)],
            cwd=ROOT,
            env={**os.environ, "PYTHONPATH": str(ROOT)},
            check=False,
        )
        assert ended.returncode == -signal.SIGKILL, step

        after = (records / register.FILE).read_bytes()
        found = read_register(after)
        assert found.holds
        if killed_at < committed:
            assert after == before, step
            issue_one(records, "C")
        else:
            assert len(found.entries) == 2, step
            with pytest.raises(AlreadyIssued):
                issue_one(records, "C")

        names = sorted(p.name for p in (records / "issued").iterdir())
        assert names == ["A", "C"], step
        assert sorted(p.name for p in records.iterdir()) == [
            ".register.jsonl.lock",
            "issued",
            "register.jsonl",
        ]
        for entry in register_of(records).entries:
            assert files_at_fault(records, entry) == ()
