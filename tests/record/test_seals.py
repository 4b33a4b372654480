"""Seals: added without touching what is there, and every later change noticed."""

import datetime as dt
import io
import itertools
import random
import subprocess

import pikepdf
import pytest
from cryptography.hazmat.primitives.asymmetric import rsa
from pyhanko.pdf_utils import generic
from pyhanko.pdf_utils.generic import pdf_name
from pyhanko.pdf_utils.incremental_writer import IncrementalPdfFileWriter

from contingency.errors import (
    AlreadySealed,
    NoSealField,
    NoTimeStamp,
    UnfitCertificate,
    UnreadableReport,
    WrongPassword,
)
from contingency.record.certificates import (
    make_test_certificate,
    open_certificate,
    read_trusted,
)
from contingency.record.seal_check import check_seals
from contingency.record.seals import seal, seal_fields, time_stamp_server
from tests.record import pki
from tests.record.conftest import NAMES
from tests.record.sample import ROLES, WHEN, small_report

LATER = dt.datetime(2026, 5, 1, tzinfo=dt.UTC)
YEARS_LATER = dt.datetime(2036, 5, 1, tzinfo=dt.UTC)


def check(pdf, people=None, **more):
    trusted = [people.root.der] if people else []
    return check_seals(pdf, when=more.pop("when", LATER), trusted=trusted, **more)


# --- Sealing ------------------------------------------------------------------------


def test_each_seal_stands_behind_unchanged_bytes(sealed):
    """The report as issued can be cut out of every sealed copy."""
    for before, after in itertools.pairwise(sealed):
        assert after.startswith(before)
        assert len(after) - len(before) < 20_000


def test_three_seals_all_hold(sealed, people):
    """In order, by whom, when, trusted; pyHanko's own policy agrees."""
    found = check(sealed[3], people)

    assert (found.faults, found.open_roles) == ((), ())
    assert [seal.role for seal in found.seals] == list(ROLES)
    assert [seal.signer for seal in found.seals] == [
        "Anna Example",
        "Ben Sample",
        "Cora Spec",
    ]
    assert all(seal.is_intact and seal.trusted for seal in found.seals)
    assert {seal.second_word for seal in found.seals} == {"content"}
    assert {seal.level for seal in found.seals} == {"B-B"}
    assert found.seals[1].claimed_at == "2026-04-02T10:30:00+00:00"
    assert found.seals[0].valid_until == "2031-01-01"
    assert not found.seals[0].is_test


def test_another_program_finds_the_seals_valid(sealed, tmp_path):
    """Poppler's pdfsig, which shares no code with pyHanko or qpdf."""
    path = tmp_path / "sealed.pdf"
    path.write_bytes(sealed[3])
    told = subprocess.run(
        ["pdfsig", "-nocert", path], capture_output=True, text=True, check=False
    ).stdout

    assert told.count("Signature is Valid") == 3
    assert told.count("Total document signed") == 1


def test_earlier_stages_hold_too(sealed):
    """A copy with fewer seals is an honest earlier state and says what is open."""
    assert check(sealed[0]).seals == ()
    assert check(sealed[0]).are_intact
    assert check(sealed[1]).open_roles == ("checked", "approved")
    assert check(sealed[2]).are_intact


def test_the_look_of_a_seal_says_who_and_what(sealed, tmp_path):
    """In the field, in words, and told apart from a typed sign-off."""
    path = tmp_path / "sealed.pdf"
    path.write_bytes(sealed[3])
    told = subprocess.run(
        ["pdftotext", "-layout", path, "-"], capture_output=True, check=True
    ).stdout.decode()

    for role, name in NAMES.items():
        assert name in told
        assert f"Sealed as {role}, 2026-04-02" in told
    assert told.count("Digital signature") == 3


def test_metadata_are_left_as_they_were_approved(sealed):
    """No program writes its name or the time into them."""
    with (
        pikepdf.open(io.BytesIO(sealed[0])) as before,
        pikepdf.open(io.BytesIO(sealed[3])) as after,
    ):
        assert before.Root.Metadata.read_bytes() == after.Root.Metadata.read_bytes()
        assert dict(before.docinfo) == dict(after.docinfo)


def test_fields_are_found_with_their_size(sealed):
    """Role, whether sealed, page."""
    fields = seal_fields(sealed[1])

    assert [(f.role, f.is_sealed, f.page) for f in fields] == [
        ("prepared", True, 1),
        ("checked", False, 1),
        ("approved", False, 1),
    ]
    assert fields[0].width == pytest.approx(60 / 25.4 * 72, abs=0.1)


def test_rsa_keys_seal_too(report, people):
    """The other kind of key that organisations hold."""
    one = pki.holder(
        "Rosa Example",
        issuer=people.root,
        key=rsa.generate_private_key(65537, 2048),
    )
    certificate = open_certificate(one.pkcs12, password=pki.PASSWORD, when=WHEN)
    found = check(
        seal(report, role="prepared", certificate=certificate, when=WHEN), people
    )

    assert found.are_intact
    assert found.seals[0].trusted


def test_a_time_stamp_makes_it_b_t(report, people):
    """The server's time is stated, and outlives the certificate."""
    sealed = seal(
        report,
        role="prepared",
        certificate=people.certificates["prepared"],
        when=WHEN,
        time_stamps=pki.time_stamps(people.root, moment=WHEN),
    )
    found = check(sealed, people)

    assert found.are_intact
    assert (found.seals[0].level, found.seals[0].trusted) == ("B-T", True)
    assert found.seals[0].stamped_at == WHEN.isoformat()


def test_a_server_that_does_not_answer_is_an_error(report, people):
    """Nothing is sealed halfway."""
    with pytest.raises(NoTimeStamp):
        seal(
            report,
            role="prepared",
            certificate=people.certificates["prepared"],
            when=WHEN,
            time_stamps=time_stamp_server("http://127.0.0.1:9/", seconds=2),
        )


def test_a_seal_can_be_made_inside_a_running_event_loop(report, people):
    """As in a notebook."""
    import asyncio

    async def notebook():
        return seal(
            report,
            role="prepared",
            certificate=people.certificates["prepared"],
            when=WHEN,
        )

    assert check(asyncio.run(notebook())).are_intact


def test_a_role_without_a_field_is_refused(report, people):
    """The message names the fields that there are."""
    with pytest.raises(NoSealField, match="prepared, checked, approved"):
        seal(
            report,
            role="reviewed",
            certificate=people.certificates["prepared"],
            when=WHEN,
        )
    with pytest.raises(NoSealField, match="nor of anyone"):
        seal(
            small_report(roles=()),
            role="prepared",
            certificate=people.certificates["prepared"],
            when=WHEN,
        )


def test_a_role_seals_once(sealed, people):
    """A second seal in the same field is refused."""
    with pytest.raises(AlreadySealed):
        seal(
            sealed[1],
            role="prepared",
            certificate=people.certificates["prepared"],
            when=WHEN,
        )


# --- Certificates -------------------------------------------------------------------


def test_a_wrong_password_is_told_from_a_wrong_file(people):
    """Two errors, two remedies."""
    content = people.holders["prepared"].pkcs12
    for password in (b"wrong", b"", b"\xff\x00"):
        with pytest.raises(WrongPassword):
            open_certificate(content, password=password, when=WHEN)
    for other in (b"", b"no such file", people.root.pem, content[:200]):
        with pytest.raises(UnfitCertificate):
            open_certificate(other, password=pki.PASSWORD, when=WHEN)


@pytest.mark.parametrize(
    ("more", "when", "match"),
    [
        ({"finish": WHEN}, LATER, "expired on 2026-04-02"),
        ({"start": LATER}, WHEN, "not valid before 2026-05-01"),
        ({"for_signatures": False}, WHEN, "not meant for signatures"),
    ],
    ids=["expired", "early", "other use"],
)
def test_an_unfit_certificate_is_refused(more, when, match):
    """Before anything is written."""
    one = pki.holder("Anna Example", **more)
    with pytest.raises(UnfitCertificate, match=match):
        open_certificate(one.pkcs12, password=pki.PASSWORD, when=when)


def test_a_short_key_is_refused():
    """RSA below 2,048 bits."""
    one = pki.holder("Anna", key=rsa.generate_private_key(65537, 1024))  # noqa: S505
    with pytest.raises(UnfitCertificate, match=r"2,048"):
        open_certificate(one.pkcs12, password=pki.PASSWORD, when=WHEN)


def test_a_test_certificate_says_that_it_is_one(report):
    """In its name, on the page, and in the check."""
    made = make_test_certificate("Anna Example", password=b"try", when=WHEN)
    certificate = open_certificate(made.pkcs12, password=b"try", when=LATER)
    sealed = seal(report, role="prepared", certificate=certificate, when=LATER)
    (trusted,) = read_trusted(made.pem)
    (found,) = check_seals(sealed, when=LATER, trusted=[_der(trusted)]).seals

    assert certificate.is_test
    assert found.is_test
    assert found.signer == "TEST ONLY: Anna Example"
    assert (found.is_intact, found.trusted) == (True, True)


def _der(certificate):
    from cryptography.hazmat.primitives.serialization import Encoding

    return certificate.public_bytes(Encoding.DER)


def test_a_test_certificate_wants_a_password():
    """A key is never left open, not even for trying out."""
    with pytest.raises(WrongPassword):
        make_test_certificate("Anna", password=b"", when=WHEN)


def test_no_key_shows_in_a_printed_object(people):
    """Neither key nor file appears where an object is shown or logged."""
    made = make_test_certificate("Anna", password=b"try", when=WHEN)

    assert "key=" not in repr(people.certificates["prepared"])
    assert "pkcs12" not in repr(made)


# --- Trust --------------------------------------------------------------------------


def test_trust_is_what_the_reader_brings(sealed, people):
    """None without a certificate, false under a stranger's, true under the root."""
    assert check(sealed[3]).seals[0].trusted is None
    strange = check_seals(sealed[3], when=LATER, trusted=[people.stranger.der])
    assert strange.seals[0].trusted is False
    assert strange.are_intact
    assert "vouches" in strange.seals[0].distrust


def test_an_expired_certificate_is_no_longer_trusted(sealed, people):
    """The seal is as intact as ever; who made it is no longer vouched for."""
    found = check(sealed[1], people, when=YEARS_LATER)

    assert found.are_intact
    assert found.seals[0].trusted is False
    assert found.seals[0].distrust == "its certificate expired on 2031-01-01"


# --- Changes after a seal -----------------------------------------------------------


def revised(pdf, change):
    """The PDF with one more revision behind it, made by `change(writer)`."""

    class QuietWriter(IncrementalPdfFileWriter):
        def _update_meta(self):
            pass

    writer = QuietWriter(io.BytesIO(pdf))
    change(writer)
    out = io.BytesIO()
    writer.write(out)
    return out.getvalue()


def page_of(writer):
    return writer.root["/Pages"]["/Kids"][0].get_object()


def numbers(*values):
    return generic.ArrayObject([generic.FloatObject(v) for v in values])


def paint(writer):
    page = page_of(writer)
    ink = writer.add_object(
        generic.StreamObject(stream_data=b"0 0 1 rg 100 100 200 200 re f")
    )
    page[pdf_name("/Contents")] = generic.ArrayObject([page.raw_get("/Contents"), ink])
    writer.mark_update(page.container_ref)


def comment(writer):
    page = page_of(writer)
    note = writer.add_object(
        generic.DictionaryObject(
            {
                pdf_name("/Type"): pdf_name("/Annot"),
                pdf_name("/Subtype"): pdf_name("/Text"),
                pdf_name("/Rect"): numbers(50, 50, 70, 70),
            }
        )
    )
    page["/Annots"].append(note)
    writer.mark_update(page.container_ref)


def append_page(writer):
    pages = writer.root["/Pages"]
    pages["/Kids"].append(
        writer.add_object(
            generic.DictionaryObject(
                {
                    pdf_name("/Type"): pdf_name("/Page"),
                    pdf_name("/Parent"): writer.root.raw_get("/Pages"),
                    pdf_name("/MediaBox"): numbers(0, 0, 595, 842),
                }
            )
        )
    )
    pages[pdf_name("/Count")] = generic.NumberObject(2)
    writer.mark_update(writer.root.raw_get("/Pages"))


def change_language(writer):
    writer.root[pdf_name("/Lang")] = generic.pdf_string("fr")
    writer.update_root()


def exchange_file(writer):
    names = writer.root["/Names"]["/EmbeddedFiles"]["/Names"]
    spec = names[1].get_object()
    new = writer.add_object(generic.StreamObject(stream_data=b"id,base\nP1,1\n"))
    spec[pdf_name("/EF")] = generic.DictionaryObject({pdf_name("/F"): new})
    writer.mark_update(names.raw_get(1).reference)


def repaint_first_seal(writer):
    field = writer.root["/AcroForm"]["/Fields"][0].get_object()
    look = generic.StreamObject(
        stream_data=b"1 0 0 rg 0 0 100 100 re f",
        dict_data={
            pdf_name("/Subtype"): pdf_name("/Form"),
            pdf_name("/BBox"): numbers(0, 0, 100, 100),
        },
    )
    field[pdf_name("/AP")] = generic.DictionaryObject(
        {pdf_name("/N"): writer.add_object(look)}
    )
    writer.mark_update(writer.root["/AcroForm"]["/Fields"].raw_get(0).reference)


def move_open_field(writer):
    field = writer.root["/AcroForm"]["/Fields"][2].get_object()
    field[pdf_name("/Rect")] = numbers(0, 0, 595, 842)
    writer.mark_update(writer.root["/AcroForm"]["/Fields"].raw_get(2).reference)


def add_unused_object(writer):
    writer.add_object(generic.StreamObject(stream_data=b"unused"))


def free_object(writer):
    writer.root[pdf_name("/AF")] = generic.ArrayObject([])
    writer.update_root()


CHANGES = [
    paint,
    comment,
    append_page,
    change_language,
    exchange_file,
    repaint_first_seal,
    move_open_field,
    add_unused_object,
    free_object,
]


@pytest.mark.parametrize("change", CHANGES, ids=lambda change: change.__name__)
def test_a_change_after_the_last_seal_is_noticed(sealed, change):
    """The last seal no longer ends the file."""
    found = check(revised(sealed[2], change), second_word=False)

    assert "bytes follow the last seal" in found.faults


@pytest.mark.parametrize("change", CHANGES, ids=lambda change: change.__name__)
def test_a_change_between_two_seals_breaks_the_earlier(sealed, people, change):
    """Though a later seal covers it, and signs it in good faith."""
    changed = seal(
        revised(sealed[1], change),
        role="checked",
        certificate=people.certificates["checked"],
        when=WHEN,
    )
    found = check(changed, people)

    first, second = found.seals
    assert not first.is_intact
    assert first.faults[0].startswith("after it: ")
    assert second.is_intact


@pytest.mark.parametrize(
    "change", [paint, append_page, exchange_file], ids=lambda change: change.__name__
)
def test_a_change_between_issue_and_first_seal_is_noticed(report, people, change):
    """Whoever sealed first sealed something that was not issued."""
    changed = seal(
        revised(report, change),
        role="prepared",
        certificate=people.certificates["prepared"],
        when=WHEN,
    )
    assert "it was changed after its issue, before any seal" in check(changed).faults
    told = check(changed, issued_bytes=len(report)).faults
    assert any("when its first seal was added" in fault for fault in told)


@pytest.mark.parametrize("change", CHANGES, ids=lambda change: change.__name__)
def test_a_change_of_a_report_without_seals_is_noticed(report, change):
    """Whether or not the register says how long it was."""
    changed = revised(report, change)

    assert not check(changed).are_intact
    assert not check(changed, issued_bytes=len(report)).are_intact
    assert not check(report + b"%%EOF\n", issued_bytes=len(report)).are_intact
    assert check(report, issued_bytes=len(report)).are_intact


def test_an_object_that_was_referred_to_in_advance_is_noticed(report, people):
    """A page may name contents that are not there yet, and get them with a seal."""
    held_open, number = report_with_a_gap(report)
    sealed_once = seal(
        held_open,
        role="prepared",
        certificate=people.certificates["prepared"],
        when=WHEN,
    )
    assert check(sealed_once).are_intact

    class Filler(IncrementalPdfFileWriter):
        def _update_meta(self):
            pass

    writer = Filler(io.BytesIO(sealed_once))
    ink = generic.StreamObject(stream_data=b"0 0 1 rg 0 0 300 300 re f")
    writer.objects[(0, number)] = ink
    out = io.BytesIO()
    writer.write(out)
    filled = seal(
        out.getvalue(),
        role="checked",
        certificate=people.certificates["checked"],
        when=WHEN,
    )

    first = check(filled, second_word=False).seals[0]
    assert not first.is_intact


def report_with_a_gap(pdf):
    """The report with a page whose contents name an object that is not there; which."""
    with pikepdf.open(io.BytesIO(pdf)) as document:
        number = len(document.objects) + 40
        page = document.pages[0].obj
        page.Contents = pikepdf.Array([page.Contents])
        out = io.BytesIO()
        document.save(out, object_stream_mode=pikepdf.ObjectStreamMode.disable)
    head, tail = out.getvalue().split(b"/Contents [ ", 1)
    text = head + b"/Contents [ %d 0 R " % number + tail
    # The table of objects has moved: let qpdf find them, and keep the gap.
    return rebuilt(text, size=number + 1), number


def rebuilt(text, *, size):
    """A classic cross-reference table for a PDF without object streams."""
    import re

    body = text[: text.rindex(b"xref\n")]
    if body.endswith(b"start"):
        body = body[: body.rindex(b"xref\n")]
    places = {int(m[1]): m.start() for m in re.finditer(rb"(?m)^(\d+) 0 obj", body)}
    rows = [b"0 1\n0000000000 65535 f \n"]
    rows += [b"%d 1\n%010d 00000 n \n" % (i, places[i]) for i in sorted(places)]
    old = text[text.rindex(b"trailer") :]
    trailer = re.sub(rb"/Size \d+", b"/Size %d" % size, old[: old.rindex(b"startxref")])
    return (
        body
        + b"xref\n"
        + b"".join(rows)
        + trailer
        + b"startxref\n%d\n%%%%EOF\n" % len(body)
    )


@pytest.mark.parametrize(
    "tail", [b"\n", b"%", b"junk\n%%EOF\n"], ids=["line", "byte", "junk"]
)
def test_bytes_behind_the_last_seal_are_noticed(sealed, tail):
    """Even where every reader skips them."""
    assert not check(sealed[3] + tail).are_intact


def test_a_report_saved_again_has_broken_seals(sealed):
    """Another program wrote it anew: the seals are gone for good."""
    out = io.BytesIO()
    with pikepdf.open(io.BytesIO(sealed[3])) as document:
        document.save(out)
    found = check(out.getvalue())

    assert not found.are_intact
    assert all(not seal.is_intact for seal in found.seals)


def test_every_changed_byte_of_a_sealed_report_is_noticed(sealed):
    """One bit at each of 200 places, half of them inside the last signature."""
    pdf = sealed[2]
    start = pdf.rindex(b"/Contents <") + len(b"/Contents <")
    stop = pdf.index(b">", start)
    choice = random.Random(20260402)  # noqa: S311  (places, no secrets)
    places = {*choice.sample(range(len(pdf)), 100)}
    places |= {*choice.sample(range(start, stop), 100)}
    missed = []
    for place in sorted(places):
        changed = bytearray(pdf)
        changed[place] ^= 1 << choice.randrange(7)
        try:
            found = check_seals(bytes(changed), when=LATER, second_word=False)
        except UnreadableReport:
            continue
        if found.are_intact and len(found.seals) == 2:
            missed.append(place)

    assert len(places) >= 199
    assert missed == []
