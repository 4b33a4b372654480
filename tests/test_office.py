"""Sign, issue, seal: what is written, and what is refused with every reason named."""

import io
import json
import os
import shutil
import stat

import pikepdf
import pytest
from pypdf import PdfReader

from contingency import issued, read_estimate
from contingency.errors import (
    AlreadyIssued,
    BrokenSeal,
    IssueRefused,
    NotIssued,
    SignOffBlocked,
    UnusablePath,
    WrongPassword,
)
from contingency.office import (
    issue_estimate,
    seal_report,
    sign_estimate,
    sign_off_standings,
    typed_words,
    write_test_certificate,
)
from contingency.record import sign_offs
from contingency.record.attachments import read_attachments
from contingency.record.chain import read_register
from contingency.record.issue_note import read_note
from contingency.record.register import files_at_fault
from contingency.record.sign_off_file import parse_sign_offs
from tests.office_project import (
    CONDITION,
    LATER,
    SIGNERS,
    WHEN,
    add,
    change,
    estimate_folder,
    project,
    sign_all,
)
from tests.record import pki
from tests.record.sample import small_report


@pytest.fixture(scope="module")
def signed(tmp_path_factory):
    """An estimate that everybody has signed; copied before it is changed."""
    folder = estimate_folder(tmp_path_factory.mktemp("signed") / "rev-a")
    sign_all(folder)
    return folder


@pytest.fixture
def copy(signed, tmp_path):
    """A copy of it for one test."""
    return shutil.copytree(signed, tmp_path / "rev-a")


def text_of(pdf, page):
    return " ".join(PdfReader(io.BytesIO(pdf)).pages[page].extract_text().split())


# --- Sign ---------------------------------------------------------------------------


def test_signing_says_what_is_still_open(tmp_path):
    """Which roles are missing, after each sign-off."""
    folder = estimate_folder(tmp_path / "rev-a")
    done = sign_estimate(folder, role="prepared", name="Anna Example", when=WHEN)

    assert [line.standing for line in done.standings] == [
        "in force",
        "missing",
        "missing",
    ]
    assert done.open_points == (
        'The sign-off "checked" is missing.',
        'The sign-off "approved" is missing.',
    )


def test_nobody_signs_while_a_stop_stands(tmp_path):
    """A stop means that no sign-off is possible; nothing is written."""
    folder = estimate_folder(tmp_path / "rev-a")
    change(folder, "estimate.toml", 'name = "Ben Sample"', 'name = ""')
    with pytest.raises(SignOffBlocked, match="A stop stands: "):
        sign_estimate(folder, role="prepared", name="Anna Example", when=WHEN)

    assert not (folder / "sign_offs.json").exists()


def test_a_change_of_the_inputs_is_seen_without_a_simulation(copy):
    """`check` can say which sign-offs lapsed, by what, and since when."""
    change(copy, "packages.csv", "1300", "1400")
    for when in (WHEN, LATER):
        standings = sign_off_standings(copy, read_estimate(copy), when=when)

    assert {line.standing for line in standings} == {"lapsed"}
    assert standings[0].changed == ("packages.csv",)
    assert standings[0].since == WHEN


def test_looking_needs_no_right_to_write(copy, monkeypatch):
    """A folder that belongs to somebody else can be checked all the same."""
    change(copy, "packages.csv", "1300", "1400")

    def denied(*_, **__):
        raise PermissionError(13, "Permission denied")

    monkeypatch.setattr(sign_offs, "write_durably", denied)
    standings = sign_off_standings(copy, read_estimate(copy), when=WHEN)

    assert standings[0].standing == "lapsed"
    assert standings[0].since is None
    with pytest.raises(UnusablePath, match="Permission denied"):
        sign_estimate(copy, role="prepared", name="Anna Example", when=WHEN)


def test_records_need_a_folder_that_is_there(copy, tmp_path):
    """Said before the simulation is run."""
    with pytest.raises(UnusablePath, match="no-such-folder"):
        issue_estimate(copy, records=tmp_path / "no-such-folder", when=WHEN)


def test_the_draft_prints_how_sign_offs_stand(copy):
    """In force, with conditions; or lapsed, since when."""
    estimate = read_estimate(copy)
    words = typed_words(sign_off_standings(copy, estimate, when=LATER))
    change(copy, "packages.csv", "1300", "1400")
    lapsed = typed_words(sign_off_standings(copy, read_estimate(copy), when=LATER))

    assert words[1].statements[1] == f"Condition: {CONDITION}."
    assert "for these inputs" in words[0].statements[0]
    assert "lapsed: packages.csv changed since" in lapsed[0].statements[0]


# --- Issue --------------------------------------------------------------------------


def test_an_issue_is_refused_with_every_reason(tmp_path):
    """Missing sign-offs and unanswered majors in one message; nothing is written."""
    folder = estimate_folder(tmp_path / "rev-a")
    sign_estimate(folder, role="prepared", name="Anna Example", when=WHEN)
    text = (folder / "estimate.toml").read_text(encoding="utf-8")
    (folder / "estimate.toml").write_text(
        text[: text.index("[[answers]]")], encoding="utf-8"
    )
    with pytest.raises(IssueRefused) as refused:
        issue_estimate(folder, when=LATER)
    reasons = refused.value.reasons

    assert any(
        reason.startswith('The sign-off "prepared" by Anna Example of 2026-04-02 has ')
        for reason in reasons
    )
    assert 'The sign-off "approved" is missing.' in reasons
    assert sum("A major finding has no answer" in reason for reason in reasons) >= 2
    assert not (tmp_path / "issued").exists()
    assert not (tmp_path / "register.jsonl").exists()


def test_a_lapsed_sign_off_stops_the_issue(copy):
    """A figure changed after the signatures."""
    change(copy, "packages.csv", "1300", "1310")
    with pytest.raises(IssueRefused) as refused:
        issue_estimate(copy, when=LATER)

    assert len([r for r in refused.value.reasons if "has lapsed" in r]) == 3


def test_a_failed_cross_check_stops_the_issue(copy, monkeypatch):
    """Two ways of computing one figure disagree."""
    from contingency.simulation.cross_check import MomentCheck

    monkeypatch.setattr(MomentCheck, "passed", property(lambda _: False))
    with pytest.raises(IssueRefused) as refused:
        issue_estimate(copy, when=LATER)

    assert "A cross-check failed: mean." in refused.value.reasons


def test_an_issue_leaves_everything_that_it_should():
    """Report, results and tables, read-only; a line in the register; nothing else."""
    made = project()
    (entry,) = read_register((made.records / "register.jsonl").read_bytes()).entries

    assert sorted(entry.files) == [
        "allocation.csv",
        "basis-of-contingency.pdf",
        "drivers.csv",
        "percentiles.csv",
        "results.json",
    ]
    assert files_at_fault(made.records, entry) == ()
    for name in entry.files:
        mode = (made.records / entry.folder / name).stat().st_mode
        assert stat.S_IMODE(mode) == 0o444
    assert [(s.role, s.name) for s in entry.sign_offs] == list(SIGNERS.items())
    assert entry.inputs == read_estimate(made.folder).fingerprint


def test_an_issued_report_prints_its_sign_offs():
    """Names, dates and conditions on the title page, and no draft mark."""
    title = text_of(project().sealed[0], 0)

    for name in SIGNERS.values():
        assert name in title
    assert title.count("Signed on 2 April 2026 for these inputs and results.") == 3
    assert f"Condition: {CONDITION}." in title
    assert "Draft" not in title


def test_an_issued_report_carries_its_sign_offs_and_its_place():
    """Inside the PDF, so that nothing else is needed years later."""
    inside = {file.name: file.content for file in read_attachments(project().sealed[0])}
    note = read_note(inside["issue.json"])
    typed = parse_sign_offs(inside["sign_offs.json"], where="report")

    assert (note.number, note.revision, note.issue) == (1, "A", 1)
    assert note.previous == "0" * 64
    assert [one.role for one in typed.given] == list(SIGNERS)


def test_an_issued_report_waits_for_a_seal_of_each_role():
    """Fields of the sign-off table, empty and visible."""
    with pikepdf.open(io.BytesIO(project().sealed[0])) as document:
        fields = list(document.Root.AcroForm.Fields)

        assert [str(field.T) for field in fields] == [
            "sig_prepared",
            "sig_checked",
            "sig_approved",
        ]
        assert all(field.FT == "/Sig" and "/V" not in field for field in fields)


def test_the_same_issue_makes_the_same_bytes(copy):
    """Same inputs, version and time in another folder: the PDF is the same file."""
    entry = issue_estimate(copy, when=WHEN)

    assert (copy.parent / entry.folder / entry.report).read_bytes() == (
        project().sealed[0]
    )


def test_a_correction_is_a_new_issue_with_a_reason(copy, monkeypatch):
    """The first issue stays as it is; the second knows its place in the register."""
    notes = []

    def quick_report(*_, extra_attachments, **__):
        (note,) = [f.content for f in extra_attachments if f.name == "issue.json"]
        notes.append(read_note(note))
        return b"%PDF-1.7 " + note

    monkeypatch.setattr(issued, "write_report", quick_report)
    first = issue_estimate(copy, when=WHEN)
    with pytest.raises(AlreadyIssued):
        issue_estimate(copy, when=LATER)
    second = issue_estimate(copy, reason="Wrong logo.", when=LATER)

    assert [first.folder, second.folder] == ["issued/A", "issued/A-2"]
    assert (second.issue, second.reason) == (2, "Wrong logo.")
    assert files_at_fault(copy.parent, first) == ()
    assert (notes[1].number, notes[1].previous) == (2, second.previous)
    assert (notes[1].issue, notes[1].reason) == (2, "Wrong logo.")


# --- Seal ---------------------------------------------------------------------------


def seal(path, role="prepared", **more):
    holder = project().holders[role]
    return seal_report(
        path,
        role=role,
        certificate=more.pop("certificate", holder.pkcs12),
        password=more.pop("password", pki.PASSWORD),
        when=WHEN,
        **more,
    )


@pytest.fixture
def report(tmp_path):
    """A copy of the issued report."""
    path = tmp_path / "report.pdf"
    path.write_bytes(project().sealed[0])
    return path


def test_a_seal_goes_into_a_copy(report):
    """The issued file stays; the copy grows with each seal."""
    first = seal(report)
    second = seal(first.path, "checked")

    assert report.read_bytes() == project().sealed[0]
    assert first.path == second.path == report.with_name("report-sealed.pdf")
    assert second.path.read_bytes().startswith(report.read_bytes())
    assert (first.signer, first.level, first.names_agree) == (
        "Anna Example",
        "B-B",
        True,
    )
    assert second.open_roles == ("approved",)


def test_a_seal_by_somebody_else_is_told(report):
    """The certificate need not bear the name of the typed sign-off; it is said."""
    other = pki.holder("Eve Other", issuer=project().root)
    done = seal(report, certificate=other.pkcs12)

    assert (done.typed_name, done.names_agree) == ("Anna Example", False)


def test_nothing_is_overwritten_by_a_seal(report, tmp_path):
    """Only an earlier stage of the same copy."""
    other = tmp_path / "other.pdf"
    other.write_bytes(b"mine")
    with pytest.raises(UnusablePath):
        seal(report, out=other)

    assert other.read_bytes() == b"mine"


def test_a_report_changed_after_a_seal_gets_no_other(tmp_path):
    """A seal on top would vouch for the change."""
    path = tmp_path / "report.pdf"
    path.write_bytes(project().sealed[1] + b"% more\n")
    with pytest.raises(BrokenSeal):
        seal(path, "checked")


def test_a_draft_gets_no_seal(tmp_path):
    """It has the fields and carries no note of an issue."""
    path = tmp_path / "draft.pdf"
    path.write_bytes(small_report())
    with pytest.raises(NotIssued):
        seal(path)


def test_a_wrong_password_seals_nothing(report):
    """And leaves no file."""
    with pytest.raises(WrongPassword):
        seal(report, password=b"wrong")

    assert [path.name for path in report.parent.iterdir()] == ["report.pdf"]


def test_a_file_that_is_not_there_is_an_error_of_ours(tmp_path):
    """With its name."""
    with pytest.raises(UnusablePath, match=r"none\.pdf"):
        seal(tmp_path / "none.pdf")


def test_a_test_certificate_is_written_under_a_name_that_says_so(tmp_path):
    """Two files, the key readable by its owner alone; never overwritten."""
    key, public = write_test_certificate(
        tmp_path, "Anna Example", password=b"try", when=WHEN
    )

    assert key.name == "test-only-Anna-Example.p12"
    assert public.read_bytes().startswith(b"-----BEGIN CERTIFICATE-----")
    assert stat.S_IMODE(key.stat().st_mode) == 0o600
    with pytest.raises(UnusablePath):
        write_test_certificate(tmp_path, "Anna Example", password=b"try", when=WHEN)


def test_the_records_are_plain_json():
    """Readable without this program."""
    made = project()
    lines = (made.records / "register.jsonl").read_text(encoding="utf-8").splitlines()

    assert json.loads(lines[0])["format"] == "contingency-register/1"
    data = json.loads((made.folder / "sign_offs.json").read_text(encoding="utf-8"))
    assert data["format"] == "contingency-sign-offs/1"
    assert not os.access(made.records / ".register.jsonl.next", os.F_OK)


def test_sign_offs_are_no_input(signed):
    """Signing does not change the fingerprint, or no sign-off could ever stand."""
    names = [source.name for source in read_estimate(signed).sources]

    assert "sign_offs.json" not in names


def test_an_added_answer_makes_sign_offs_lapse(copy):
    """An answer is printed on the report, so it is part of what was signed."""
    add(
        copy,
        '[[answers]]\ncheck = "weak-dependence"\nwhere = "P1"\nanswer = "More."\n'
        'by = "Anna Example"\non = 2026-04-03\n',
    )
    standings = sign_off_standings(copy, read_estimate(copy), when=LATER)

    assert {line.standing for line in standings} == {"lapsed"}
    assert standings[0].changed == ("estimate.toml",)
