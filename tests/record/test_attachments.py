"""Files inside a PDF: taken out unchanged, or refused by name."""

import io
import zlib

import pikepdf
import pytest

from contingency.errors import UnreadableReport
from contingency.record import attachments
from contingency.record.attachments import read_attachments
from contingency.record.manifest import check_manifest, manifest_of
from tests.record.sample import FILES, small_report


@pytest.fixture(scope="module")
def report():
    return small_report()


def changed(pdf, change):
    """The PDF as another program would write it after `change(document)`."""
    out = io.BytesIO()
    with pikepdf.open(io.BytesIO(pdf)) as document:
        change(document)
        document.save(out, compress_streams=False)
    return out.getvalue()


def tree(document):
    return document.Root.Names.EmbeddedFiles


def spec_of(document, name):
    names = list(tree(document).Names)
    return names[[str(key) for key in names].index(name) + 1]


def test_every_file_comes_out_as_it_went_in(report):
    """Name, relationship and content."""
    found = {file.name: file for file in read_attachments(report)}

    assert sorted(found) == sorted([*FILES, "manifest.json"])
    for name, (content, relationship) in FILES.items():
        assert (found[name].content, found[name].relationship) == (
            content,
            relationship,
        )


def test_the_manifest_holds(report):
    """It lists every file but itself."""
    check = check_manifest(read_attachments(report))

    assert (check.files, check.faults) == (3, ())


def test_a_report_without_files_has_none():
    """An empty answer, and a manifest that is missed."""
    assert read_attachments(small_report(files={}, manifest=False)) == ()
    assert check_manifest(()).faults == ("manifest.json is missing",)


def test_a_list_in_branches_is_read_like_a_flat_one(report):
    """A name tree may have kids."""

    def branch(document):
        names = list(tree(document).Names)
        kids = [
            document.make_indirect(pikepdf.Dictionary(Names=pikepdf.Array(names[i:j])))
            for i, j in ((0, 4), (4, 8))
        ]
        document.Root.Names.EmbeddedFiles = pikepdf.Dictionary(Kids=pikepdf.Array(kids))

    assert read_attachments(changed(report, branch)) == read_attachments(report)


# --- Files exchanged ----------------------------------------------------------------


def with_file(pdf, name, content):
    def swap(document):
        spec_of(document, name).EF.F.write(content)

    return changed(pdf, swap)


def test_a_replaced_file_is_named(report):
    """Another content, and one of the same length."""
    for content in (b"", b"id,base\nP1,900\n"):
        found = read_attachments(with_file(report, "packages.csv", content))
        assert check_manifest(found).faults == ("packages.csv differs",)


def test_an_added_and_a_removed_file_are_named(report):
    """The manifest is held against the files both ways."""

    def add(document):
        document.attachments["more.csv"] = pikepdf.AttachedFileSpec(
            document, b"x", filename="more.csv", relationship=pikepdf.Name.Source
        )
        del document.attachments["packages.csv"]

    assert check_manifest(read_attachments(changed(report, add))).faults == (
        "more.csv is not listed",
        "packages.csv is missing",
    )


@pytest.mark.parametrize(
    "manifest",
    [
        b"",
        b"[]",
        b"null",
        b"{}",
        b'{"format": "other/1", "files": []}',
        b'{"format": "contingency-manifest/1", "files": [7]}',
        b'{"format": "contingency-manifest/1", "files": [{"name": "a"}]}',
        manifest_of({"a": b""}).replace(b"]", b',{"name":"a","bytes":0,"sha256":""}]'),
        b"[" * 100_000,
    ],
    ids=range(9),
)
def test_a_manifest_that_is_none_is_an_answer(report, manifest):
    """Never an exception."""
    found = read_attachments(with_file(report, "manifest.json", manifest))

    assert check_manifest(found).faults == ("manifest.json cannot be read",)


# --- Hostile files ------------------------------------------------------------------


def refused(pdf, match):
    with pytest.raises(UnreadableReport, match=match):
        read_attachments(pdf)


def test_two_files_of_one_name_are_refused(report):
    """Which of them is shown depends on the viewer."""

    def double(document):
        names = tree(document).Names
        names.append(pikepdf.String("packages.csv"))
        names.append(document.make_indirect(spec_of(document, "packages.csv")))

    refused(changed(report, double), 'two files in it are called "packages.csv"')


@pytest.mark.parametrize("key", ["/UF", "/F"])
def test_a_file_with_several_names_is_refused(report, key):
    """The list says one name, the file another."""

    def rename(document):
        spec_of(document, "packages.csv")[key] = pikepdf.String("events.csv")

    refused(changed(report, rename), "several names")


@pytest.mark.parametrize("name", ["", "a\nb", "x" * 200, "a\u202eb"], ids=range(4))
def test_a_name_that_cannot_be_shown_is_refused(name):
    """Empty, over several lines, endless, or turned around."""
    refused(
        changed(
            small_report(files={}, manifest=False),
            lambda document: add_file(document, name),
        ),
        "has the name",
    )


def add_file(document, name, content=b"x", **stream):
    """Add a file to the list by hand, as a hostile writer might."""
    body = document.make_stream(content, **stream)
    spec = document.make_indirect(
        pikepdf.Dictionary(
            Type=pikepdf.Name.Filespec,
            F=pikepdf.String(name),
            UF=pikepdf.String(name),
            AFRelationship=pikepdf.Name.Source,
            EF=pikepdf.Dictionary(F=body),
        )
    )
    if "/Names" not in document.Root:
        document.Root.Names = pikepdf.Dictionary()
    if "/EmbeddedFiles" not in document.Root.Names:
        document.Root.Names.EmbeddedFiles = pikepdf.Dictionary(Names=pikepdf.Array())
    tree(document).Names.append(pikepdf.String(name))
    tree(document).Names.append(spec)
    return spec


@pytest.mark.parametrize("name", ["../../evil.csv", "/etc/passwd", "C:\\x", "con"])
def test_a_name_that_looks_like_a_path_stays_a_name(name):
    """It is text; nothing here opens a file."""
    pdf = changed(
        small_report(files={}, manifest=False),
        lambda document: add_file(document, name),
    )

    assert [file.name for file in read_attachments(pdf)] == [name]


def test_a_small_file_that_unpacks_to_much_is_refused(monkeypatch):
    """Unpacking stops at the limit; the rest is never made."""
    monkeypatch.setattr(attachments, "LARGEST_FILE", 10_000)
    bomb = zlib.compress(bytes(50_000_000), 9)
    pdf = changed(
        small_report(files={}, manifest=False),
        lambda document: add_file(
            document, "big.csv", bomb, Filter=pikepdf.Name.FlateDecode
        ),
    )
    assert len(pdf) < 100_000

    refused(pdf, '"big.csv" in it unpacks to more than 10,000 bytes')


def test_all_files_together_have_a_limit(monkeypatch, report):
    """Many middling files are as bad as one large one."""
    monkeypatch.setattr(attachments, "LARGEST_SUM", 400)

    refused(report, "unpacks to more than")


def test_too_many_files_are_refused(monkeypatch, report):
    """Before any of them is unpacked."""
    monkeypatch.setattr(attachments, "MOST_FILES", 3)

    refused(report, "more than 3 files")


def test_a_list_without_end_is_refused(report):
    """A branch that is its own kid."""

    def circle(document):
        node = document.make_indirect(pikepdf.Dictionary())
        node.Kids = pikepdf.Array([node, node])
        document.Root.Names.EmbeddedFiles = node

    refused(changed(report, circle), "no end")


@pytest.mark.parametrize(
    "stream",
    [
        {"Filter": pikepdf.Name.LZWDecode},
        {"Filter": pikepdf.Name.JBIG2Decode},
        {"Filter": pikepdf.Array([pikepdf.Name.FlateDecode] * 2)},
        {
            "Filter": pikepdf.Name.FlateDecode,
            "DecodeParms": pikepdf.Dictionary(Predictor=12),
        },
    ],
    ids=["LZW", "JBIG2", "twice", "predictor"],
)
def test_unusual_packing_is_refused(stream):
    """Only what a report of this program has is unpacked."""
    pdf = changed(
        small_report(files={}, manifest=False),
        lambda document: add_file(document, "a.csv", zlib.compress(b"x"), **stream),
    )

    refused(pdf, "packed in an unusual way")


@pytest.mark.parametrize("content", [zlib.compress(b"x" * 99)[:-6], b"no zlib"])
def test_a_file_that_is_cut_or_damaged_is_refused(content):
    """The stream inside, not the PDF."""
    pdf = changed(
        small_report(files={}, manifest=False),
        lambda document: add_file(
            document, "a.csv", content, Filter=pikepdf.Name.FlateDecode
        ),
    )

    refused(pdf, "cut short|damaged")


def test_a_file_outside_the_list_is_refused(report):
    """In a comment, where some viewers show it and others do not."""

    def hide(document):
        hidden = pikepdf.Dictionary(
            Type=pikepdf.Name.Annot,
            Subtype=pikepdf.Name.FileAttachment,
            Rect=pikepdf.Array([0, 0, 9, 9]),
            FS=pikepdf.Dictionary(
                F=pikepdf.String("x"),
                EF=pikepdf.Dictionary(F=document.make_stream(b"x")),
            ),
        )
        document.pages[0].Annots = pikepdf.Array([document.make_indirect(hidden)])

    refused(changed(report, hide), "outside the list")


@pytest.mark.parametrize(
    "break_it",
    [
        lambda d: d.Root.Names.__setattr__("EmbeddedFiles", pikepdf.Array()),
        lambda d: tree(d).Names.append(pikepdf.String("odd")),
        lambda d: spec_of(d, "packages.csv").__delattr__("UF"),
        lambda d: spec_of(d, "packages.csv").__delattr__("EF"),
        lambda d: spec_of(d, "packages.csv").__delattr__("AFRelationship"),
        lambda d: spec_of(d, "packages.csv").EF.__setattr__("F", 7),
        lambda d: spec_of(d, "packages.csv").EF.__setattr__("DOS", d.make_stream(b"x")),
        lambda d: spec_of(d, "packages.csv").EF.__setattr__("UF", d.make_stream(b"x")),
    ],
    ids=range(8),
)
def test_a_list_that_is_no_list_of_ours_is_refused(report, break_it):
    """Wrong kinds, missing keys, a second stream behind one name."""
    with pytest.raises(UnreadableReport):
        read_attachments(changed(report, break_it))


def test_an_encrypted_report_is_refused(report):
    """It could show each reader something else."""
    out = io.BytesIO()
    with pikepdf.open(io.BytesIO(report)) as document:
        document.save(out, encryption=pikepdf.Encryption(owner="a", user=""))

    refused(out.getvalue(), "encrypted")


def test_a_report_above_the_limit_is_not_even_opened(monkeypatch, report):
    """Size comes first."""
    monkeypatch.setattr(attachments, "LARGEST_PDF", len(report) - 1)

    refused(report, "more than are looked at")
