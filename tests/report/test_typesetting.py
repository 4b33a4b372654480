"""The hooks around WeasyPrint: each does what it says, and is still needed.

Where a hook works around something in WeasyPrint, a test shows the thing without it, so
that the hook can go when WeasyPrint has changed.
"""

import datetime as dt
import io
import os
import sys
from types import SimpleNamespace

import pikepdf
import pydyf
import pytest

from contingency.errors import NoTextEngine, TemplateFault
from contingency.report import typesetting
from contingency.report.folder import templates_folder
from contingency.report.typesetting import AttachedFile, Shelf, set_pages

CREATED = dt.datetime(2031, 5, 20, 9, 30, tzinfo=dt.UTC)
PAGE = (
    '<html lang="en-GB"><head><title>A page</title></head><body>'
    '<h1 id="a">A page</h1>{}</body></html>'
)
STYLE = (
    '@font-face { font-family: "Own"; '
    "src: url(folder:fonts/SourceSansPro-Regular.ttf) }"
    'body { font-family: "Own" }'
    "input { appearance: auto; width: 60mm; height: 16mm }"
)


@pytest.fixture
def shelf(tmp_path):
    """A folder with one style sheet and the fonts of the tool."""
    (tmp_path / "report.css").write_text(STYLE, encoding="utf-8")
    (tmp_path / "fonts").mkdir()
    font = templates_folder() / "fonts" / "SourceSansPro-Regular.ttf"
    (tmp_path / "fonts" / font.name).write_bytes(font.read_bytes())
    return Shelf(folder=tmp_path, pictures={})


def made(shelf, body="<p>Words</p>", attached=()):
    """The PDF of one page."""
    return set_pages(
        PAGE.format(body),
        shelf,
        tuple(attached),
        created=CREATED,
        check_fonts=lambda _fonts: None,
    )


def file(name):
    """A small file that travels inside."""
    return AttachedFile(
        name=name, content=b"1", description="A file", relationship="Source"
    )


def test_each_file_is_listed_once(shelf):
    """WeasyPrint 70 lists each attached file twice in /AF."""
    with pikepdf.open(io.BytesIO(made(shelf, attached=[file("b"), file("a")]))) as pdf:
        assert [str(spec.UF) for spec in pdf.Root.AF] == ["a", "b"]


def test_doubles_are_dropped_in_their_order():
    """Also once WeasyPrint lists them only once."""
    pdf = SimpleNamespace(
        catalog={"AF": pydyf.Array([b"3 0 R", b"5 0 R", b"3 0 R"])}, objects=[]
    )
    typesetting._drop_doubles(pdf)

    assert list(pdf.catalog["AF"]) == [b"3 0 R", b"5 0 R"]


def test_the_file_claims_both_standards(shelf):
    """PDF/A-3a and PDF/UA-1 in one description, with the schema that PDF/A asks for."""
    with pikepdf.open(io.BytesIO(made(shelf))) as pdf:
        xmp = pdf.Root.Metadata.read_bytes().decode()

    assert xmp.count("<rdf:RDF") == 1
    assert 'pdfaid:part="3"' in xmp.replace("'", '"')
    assert 'pdfaid:conformance="A"' in xmp.replace("'", '"')
    assert 'pdfuaid:part="1"' in xmp
    assert "PDF/UA identification schema" in xmp


def test_a_check_box_named_sig_becomes_an_empty_signature_field(shelf):
    """Its form element has the one reference as /K, which validators insist on."""
    body = '<p><input type="checkbox" name="sig_checked" title="Signature"></p>'
    with pikepdf.open(io.BytesIO(made(shelf, body))) as pdf:
        (field,) = pdf.Root.AcroForm.Fields
        forms = [
            thing
            for thing in pdf.objects
            if isinstance(thing, pikepdf.Dictionary) and thing.get("/S") == "/Form"
        ]

        assert str(field.FT) == "/Sig"
        assert str(field.TU) == "Signature"
        assert int(field.F) == 132
        left, bottom, right, top = (float(x) for x in field.Rect)
        assert left < right
        assert bottom < top
        assert not isinstance(forms[0].K, pikepdf.Array)


def test_other_check_boxes_stay_what_they_are(shelf):
    """An organisation may have a form of its own."""
    body = '<p><input type="checkbox" name="seen" title="Seen"></p>'
    with pikepdf.open(io.BytesIO(made(shelf, body))) as pdf:
        assert str(pdf.Root.AcroForm.Fields[0].FT) == "/Btn"


def test_font_names_follow_from_the_font_file(shelf):
    """Pango's description of the same face differs from version to version."""
    from weasyprint.pdf.fonts import Font

    before = Font.__init__
    first, second = made(shelf), made(shelf)

    assert first == second
    assert Font.__init__ is before, "the hook is taken off again"


def test_objects_lie_in_small_streams(shelf):
    """At most a hundred each, so that later checks of signatures are quick."""
    with pikepdf.open(io.BytesIO(made(shelf, "<p>Words</p>" * 400))) as pdf:
        streams = [
            int(thing.N)
            for thing in pdf.objects
            if isinstance(thing, pikepdf.Stream) and thing.get("/Type") == "/ObjStm"
        ]

    assert max(streams, default=0) <= 100


def test_the_environment_is_left_as_it_was(shelf, monkeypatch):
    """The fonts of the machine are hidden only while pages are set."""
    monkeypatch.setenv("FONTCONFIG_FILE", "/some/file")
    made(shelf)
    assert os.environ["FONTCONFIG_FILE"] == "/some/file"

    monkeypatch.delenv("FONTCONFIG_FILE")
    made(shelf)
    assert "FONTCONFIG_FILE" not in os.environ


def test_a_warning_of_the_engine_is_a_fault(shelf):
    """A letter that no font has would be an empty box on the page."""
    with pytest.raises(TemplateFault, match=r"notdef"):
        made(shelf, "<p>\N{SHIP}</p>")


def test_a_row_that_no_page_can_hold_is_broken_after_all(shelf):
    """Rather than nothing at all: the engine gives up on such rows by itself."""
    style = "tbody { break-inside: avoid } tr { break-before: avoid }"
    (shelf.folder / "report.css").write_text(STYLE + style, encoding="utf-8")
    rows = "<tr><td>Row</td></tr>" * 200
    pdf = made(shelf, f"<table><tbody>{rows}</tbody></table>")
    with pikepdf.open(io.BytesIO(pdf)) as document:
        assert len(document.pages) > 1


@pytest.mark.parametrize("missing", ["library", "subsetter"])
def test_a_missing_library_is_named_with_the_line_that_installs_it(
    missing, shelf, monkeypatch
):
    """Text is set by libraries of the system; without them nothing can be printed."""
    if missing == "library":

        class Finder:
            def find_spec(self, name, *_args):
                if name == "weasyprint":
                    text = "cannot load library 'libgobject-2.0-0': no such file"
                    raise OSError(text)

        for name in [n for n in sys.modules if n.split(".")[0] == "weasyprint"]:
            monkeypatch.delitem(sys.modules, name)
        monkeypatch.setattr(sys, "meta_path", [Finder(), *sys.meta_path])
    else:
        import weasyprint.text.ffi

        monkeypatch.setattr(weasyprint.text.ffi, "harfbuzz_subset", None)
    with pytest.raises(NoTextEngine) as fault:
        made(shelf)

    assert "annot load library" in fault.value.found
    assert (
        "apt-get install -y libpangoft2-1.0-0 libharfbuzz-subset0" in fault.value.remedy
    )
