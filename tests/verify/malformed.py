"""Fifty PDFs that no honest program writes, by what is wrong with them."""

import io
import random
import warnings
import zlib
from functools import cache, partial

import pikepdf
from pikepdf import Array, Dictionary, Name

from contingency.record.certificates import make_test_certificate, open_certificate
from contingency.record.seals import seal
from tests.record.sample import WHEN, small_report


@cache
def sound():
    """The small report with one seal."""
    made = make_test_certificate("Anna Example", password=b"try", when=WHEN)
    certificate = open_certificate(made.pkcs12, password=b"try", when=WHEN)
    return seal(small_report(), role="prepared", certificate=certificate, when=WHEN)


def cut(share):
    """Only the first part of the file."""
    pdf = sound()
    return pdf[: int(len(pdf) * share)]


def behind(share):
    """Only the last part of the file."""
    pdf = sound()
    return pdf[int(len(pdf) * share) :]


def noise(seed):
    """A hundred random bytes at random places."""
    choice = random.Random(seed)  # noqa: S311  (noise, no secrets)
    pdf = bytearray(sound())
    for _ in range(100):
        pdf[choice.randrange(len(pdf))] = choice.randrange(256)
    return bytes(pdf)


def swapped(old, new):
    """Every occurrence of some bytes exchanged."""
    pdf = sound()
    assert old in pdf, old
    return pdf.replace(old, new)


def last_swapped(old, new):
    """The last occurrence of some bytes exchanged."""
    head, _, tail = sound().rpartition(old)
    return head + new + tail


def edited(change):
    """The report as qpdf writes it after a change of its objects."""
    out = io.BytesIO()
    with pikepdf.open(io.BytesIO(sound())) as document:
        change(document)
        with warnings.catch_warnings():
            warnings.simplefilter("ignore")  # qpdf finds these files odd too
            document.save(out, compress_streams=False)
    return out.getvalue()


def by_hand(*objects, trailer=b"/Root 1 0 R"):
    """A PDF of these objects, numbered from 1, with a table that fits."""
    out = b"%PDF-1.7\n"
    places = []
    for number, text in enumerate(objects, start=1):
        places.append(len(out))
        out += b"%d 0 obj\n%s\nendobj\n" % (number, text)
    table = len(out)
    out += b"xref\n0 %d\n0000000000 65535 f \n" % (len(objects) + 1)
    out += b"".join(b"%010d 00000 n \n" % place for place in places)
    size = len(objects) + 1
    return out + b"trailer\n<< /Size %d %s >>\nstartxref\n%d\n%%%%EOF\n" % (
        size,
        trailer,
        table,
    )


def stream(content, **more):
    extra = b" ".join(b"/%s %s" % (k.encode(), v) for k, v in more.items())
    return b"<< /Length %d %s >>\nstream\n%s\nendstream" % (
        len(content),
        extra,
        content,
    )


PAGES = b"<< /Type /Pages /Kids [] /Count 0 >>"
ROOT = b"<< /Type /Catalog /Pages 2 0 R %s >>"
BOMB = zlib.compress(bytes(200_000_000), 9)


def field_of(document, i=0):
    return document.Root.AcroForm.Fields[i]


def files_of(document):
    return document.Root.Names.EmbeddedFiles


def own_kid(document):
    document.Root.Pages.Kids.append(document.Root.Pages)


def deep_tree(document):
    node = document.make_indirect(Dictionary(Names=Array()))
    for _ in range(300):
        node = document.make_indirect(Dictionary(Kids=Array([node])))
    document.Root.Names.EmbeddedFiles = node


def many_fields(document):
    one = field_of(document)
    for _ in range(3000):
        document.Root.AcroForm.Fields.append(one)


def odd_range(*numbers):
    def change(document):
        field_of(document).V.ByteRange = Array(list(numbers))

    return change


def put(path, value):
    """Set a key somewhere under the catalogue."""

    def change(document):
        thing = document.Root
        *way, last = path
        for key in way:
            thing = thing[key]
        thing[last] = value

    return change


MALFORMED = {
    "empty": lambda: b"",
    "no PDF": lambda: b"not a PDF at all\n" * 50,
    "a ZIP": lambda: b"PK\x03\x04" + bytes(200),
    "head only": lambda: b"%PDF-1.7\n%\xe2\xe3\xcf\xd3\n",
    "end only": lambda: b"%%EOF\n",
    "noughts": lambda: bytes(100_000),
    **{f"cut at {i} tenths": partial(cut, i / 10) for i in range(1, 10)},
    **{f"begins at {i} tenths": partial(behind, i / 10) for i in (1, 5, 9)},
    **{f"noise {seed}": partial(noise, seed) for seed in range(8)},
    "junk before": lambda: b"junk\n" * 300 + sound(),
    "twice": lambda: sound() + sound(),
    "startxref to itself": lambda: last_swapped(b"startxref\n", b"startxref\n9"),
    "startxref far away": lambda: last_swapped(
        b"startxref\n", b"startxref\n99999999999999999999"
    ),
    "Prev to itself": lambda: last_swapped(b"/Prev ", b"/Prev 1"),
    "huge size": lambda: last_swapped(b"/Size ", b"/Size 99999999"),
    "negative width": lambda: last_swapped(b"/W [ 1 8 2 ]", b"/W [ 1-8 2 ]"),
    "wide table": lambda: last_swapped(b"/W [ 1 8 2 ]", b"/W [ 9 9 9 ]"),
    "no streams": lambda: swapped(b"endstream", b"endstraem"),
    "no objects": lambda: swapped(b" obj", b" jbo"),
    "pages in a circle": lambda: edited(own_kid),
    "files without end": lambda: edited(deep_tree),
    "three thousand fields": lambda: edited(many_fields),
    "form is a number": lambda: edited(put(["/AcroForm"], 7)),
    "fields are a name": lambda: edited(put(["/AcroForm", "/Fields"], Name.Odd)),
    "names are a text": lambda: edited(put(["/Names"], pikepdf.String("x"))),
    "files are an array": lambda: edited(put(["/Names", "/EmbeddedFiles"], Array())),
    "negative range": lambda: edited(odd_range(0, -5, 10, 20)),
    "huge range": lambda: edited(odd_range(0, 10**15, 10**15 + 5, 10**15)),
    "short range": lambda: edited(odd_range(0, 1)),
    "text for a range": lambda: edited(
        lambda d: field_of(d).V.__setattr__("ByteRange", pikepdf.String("0 1 2 3"))
    ),
    "no signature": lambda: edited(
        lambda d: field_of(d).V.__setattr__("Contents", pikepdf.String(b""))
    ),
    "a seal that is a page": lambda: edited(
        lambda d: field_of(d).__setattr__("V", d.pages[0].obj)
    ),
    "no catalogue": lambda: by_hand(b"null", PAGES),
    "catalogue in a circle": lambda: by_hand(b"1 0 R", PAGES),
    "deep array": lambda: by_hand(ROOT % (b"/X " + b"[" * 100_000), PAGES),
    "deep dictionary": lambda: by_hand(ROOT % (b"/X " + b"<< /A " * 50_000), PAGES),
    "a long number": lambda: by_hand(ROOT % (b"/X " + b"9" * 1_000_000), PAGES),
    "a bomb of objects": lambda: by_hand(
        ROOT % b"",
        PAGES,
        stream(BOMB, Type=b"/ObjStm", N=b"9999", First=b"9", Filter=b"/FlateDecode"),
    ),
    "a bomb of a page": lambda: by_hand(
        ROOT % b"",
        b"<< /Type /Pages /Kids [ 3 0 R ] /Count 1 >>",
        b"<< /Type /Page /Parent 2 0 R /MediaBox [0 0 9 9] /Contents 4 0 R >>",
        stream(BOMB, Filter=b"/FlateDecode"),
    ),
    "a file outside": lambda: by_hand(
        ROOT % b"/Names << /EmbeddedFiles << /Names [ (a) 3 0 R ] >> >>",
        PAGES,
        b"<< /Type /Filespec /F (a) /UF (a) /AFRelationship /Source "
        b"/EF << /F 4 0 R >> >>",
        b"<< /Length 0 /F (/etc/passwd) >>\nstream\n\nendstream",
    ),
    "encrypted": lambda: by_hand(
        ROOT % b"", PAGES, trailer=b"/Root 1 0 R /Encrypt << /Filter /Standard >>"
    ),
    "a script": lambda: by_hand(
        ROOT % b"/OpenAction << /S /JavaScript /JS (app.alert(1)) >>", PAGES
    ),
}
