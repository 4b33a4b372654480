"""From HTML to a PDF that is PDF/A-3a, PDF/UA-1 and the same bytes every time.

WeasyPrint sets the text.  What it cannot do by itself is done here, in this order:

1.  Fonts come from the templates folder only; an empty font configuration keeps those
    of the machine out.
2.  Pages fetch pictures by name and files of the templates folder, nothing else.
3.  Font names in the PDF depend on the font file and not on the version of Pango.
4.  The PDF says that it is PDF/UA-1 beside PDF/A-3a.
5.  Check boxes named ``sig_...`` become empty signature fields.
6.  Doubles and empty entries that validators or readers stumble over are removed.
7.  Objects are packed again in small streams, which makes later checks of digital
    signatures many times faster.

Steps 3 to 6 reach into private parts of WeasyPrint and pydyf, whose versions are
pinned; each has a test.
"""

from __future__ import annotations

import datetime as dt
import gc
import io
import logging
import os
import re
import tempfile
import warnings
from collections.abc import Callable, Iterator, Mapping
from contextlib import contextmanager
from dataclasses import dataclass, field
from hashlib import sha256
from pathlib import Path
from typing import Any

from contingency.errors import NoTextEngine, TemplateFault
from contingency.report.folder import FONTS, STYLE, TYPES, file_of

VARIANT = "pdf/a-3a"

UA_CLAIM = (
    '<rdf:Description rdf:about="" '
    'xmlns:pdfuaid="http://www.aiim.org/pdfua/ns/id/" pdfuaid:part="1"/>'
)
"""XMP: this file is PDF/UA-1 (ISO 14289-1:2014, clause 5)."""

UA_SCHEMA = (
    '<rdf:Description rdf:about="" '
    'xmlns:pdfaExtension="http://www.aiim.org/pdfa/ns/extension/" '
    'xmlns:pdfaSchema="http://www.aiim.org/pdfa/ns/schema#" '
    'xmlns:pdfaProperty="http://www.aiim.org/pdfa/ns/property#">'
    '<pdfaExtension:schemas><rdf:Bag><rdf:li rdf:parseType="Resource">'
    "<pdfaSchema:namespaceURI>http://www.aiim.org/pdfua/ns/id/"
    "</pdfaSchema:namespaceURI><pdfaSchema:prefix>pdfuaid</pdfaSchema:prefix>"
    "<pdfaSchema:schema>PDF/UA identification schema</pdfaSchema:schema>"
    '<pdfaSchema:property><rdf:Seq><rdf:li rdf:parseType="Resource">'
    "<pdfaProperty:category>internal</pdfaProperty:category>"
    "<pdfaProperty:description>Part of ISO 14289 that the file follows"
    "</pdfaProperty:description><pdfaProperty:name>part</pdfaProperty:name>"
    "<pdfaProperty:valueType>Integer</pdfaProperty:valueType>"
    "</rdf:li></rdf:Seq></pdfaSchema:property></rdf:li></rdf:Bag>"
    "</pdfaExtension:schemas></rdf:Description>"
)
"""XMP: what PDF/A wants to be told about a property that it does not know."""


@dataclass(frozen=True, kw_only=True, slots=True)
class AttachedFile:
    """One file that travels inside the PDF."""

    name: str
    content: bytes
    description: str
    relationship: str
    """`Source` for what the report was made from, `Data` for what it states."""


@dataclass(kw_only=True)
class Shelf:
    """What the pages may fetch, and which fonts they did fetch."""

    folder: Path
    pictures: Mapping[str, bytes]
    fonts: set[Path] = field(default_factory=set)

    def get(self, url: str) -> tuple[bytes, str]:
        """Return content and media type of ``chart:NAME`` or ``folder:NAME``.

        Raises
        ------
        TemplateFault
            template-fault.  Anything else was asked for.
        """
        kind, _, name = url.partition(":")
        if kind == "chart" and name in self.pictures:
            return self.pictures[name], TYPES[".svg"]
        if kind == "folder":
            path = file_of(self.folder, name)
            if path.suffix.lower() in TYPES:
                if path.suffix.lower() in FONTS:
                    self.fonts.add(path)
                return path.read_bytes(), TYPES[path.suffix.lower()]
        raise TemplateFault(
            where=f"templates folder, address {url[:120]!r}",
            found="A page asks for something that it cannot have.",
            rule="Pages fetch chart:NAME, or folder:FILE from their own folder.",
            remedy="Put the file into the templates folder and write folder:FILE.",
        )


def set_pages(
    html: str,
    shelf: Shelf,
    attached: tuple[AttachedFile, ...],
    *,
    created: dt.datetime,
    check_fonts: Callable[[frozenset[Path]], None],
) -> bytes:
    """Return the PDF of an HTML text.

    Parameters
    ----------
    html : str
        The whole report.
    shelf : Shelf
        What it may fetch.
    attached : tuple of AttachedFile
        Files that travel inside, any order.
    created : datetime
        Printed nowhere; it dates the attached files.
    check_fonts : callable
        Called with the fonts of the style sheet before any text is set, so that
        characters without a font are found by name.

    Raises
    ------
    NoTextEngine
        no-text-engine.
    TemplateFault
        template-fault.  Whatever WeasyPrint warns of is a fault of a template.
    """
    engine = _engine()
    with (
        _no_search_for_cycles(),
        _own_fonts_only(),
        _stable_font_names(),
        _faults_raised(engine),
    ):
        style_sheet, fonts = _style_sheet(engine, shelf)
        check_fonts(frozenset(shelf.fonts))
        options: dict[str, Any] = {"pdf_variant": VARIANT, "stylesheets": [style_sheet]}
        document = _laid_out(
            engine.HTML(string=html, url_fetcher=_fetcher(shelf)),
            fonts,
            options,
            engine,
        )
        _claim_ua(document)
        stamp = created.astimezone(dt.UTC)
        pdf = document.write_pdf(
            pdf_variant=VARIANT,
            attachments=[
                engine.Attachment(
                    string=one.content,
                    name=one.name,
                    description=one.description,
                    created=stamp,
                    modified=stamp,
                    relationship=one.relationship,
                )
                for one in sorted(attached, key=lambda one: one.name)
            ],
            finisher=_finish,
        )
    return _packed_again(pdf)


def _engine() -> Any:  # noqa: ANN401  (WeasyPrint has no types)
    """Return WeasyPrint with all libraries that it needs."""
    try:
        with warnings.catch_warnings():
            # A machine without fonts is as good as any other: we bring ours.
            warnings.filterwarnings("ignore", message=".*Expect ugly output.*")
            import weasyprint
            from weasyprint.text.ffi import harfbuzz_subset
    except OSError as fault:
        raise _no_engine(str(fault).splitlines()[0]) from fault
    if not harfbuzz_subset:
        raise _no_engine("cannot load library libharfbuzz-subset")
    return weasyprint


def _no_engine(found: str) -> NoTextEngine:
    return NoTextEngine(
        where="PDF report",
        found=f"{found[:1].upper()}{found[1:].rstrip('.')}.",
        rule="Text is set with Pango and HarfBuzz, which the system must have.",
        remedy="On Debian: apt-get install -y libpangoft2-1.0-0 libharfbuzz-subset0",
    )


LET_GO = (
    "table, thead, tbody, tr, th, td { break-inside: auto !important;"
    " break-before: auto !important; break-after: auto !important }"
)
"""Style that keeps no rows together, for a row that no page can hold in one piece."""


def _laid_out(source: Any, fonts: Any, options: dict[str, Any], engine: Any) -> Any:  # noqa: ANN401
    """Return the pages; where rows are longer than a page, nothing is kept together.

    WeasyPrint gives up by an assertion when something that must not be broken fits on
    no page.
    """
    try:
        return source.render(font_config=fonts, **options)
    except AssertionError:
        sheets = [*options["stylesheets"], engine.CSS(string=LET_GO)]
        return source.render(font_config=fonts, **{**options, "stylesheets": sheets})


def _style_sheet(engine: Any, shelf: Shelf) -> tuple[Any, Any]:  # noqa: ANN401
    """Return the style sheet and the font configuration that it fills."""
    from weasyprint.text.fonts import FontConfiguration

    fonts = FontConfiguration()
    style_sheet = engine.CSS(
        string=file_of(shelf.folder, STYLE).read_text(encoding="utf-8"),
        url_fetcher=_fetcher(shelf),
        font_config=fonts,
    )
    if not shelf.fonts:
        raise TemplateFault(
            where=STYLE,
            found="No @font-face names a font file of the folder.",
            rule="Fonts of the machine are not used; the report brings its own.",
            remedy="Add a @font-face with src: url(folder:fonts/NAME.ttf).",
        )
    return style_sheet, fonts


def _fetcher(shelf: Shelf) -> Any:  # noqa: ANN401
    """Return a fetcher that knows the shelf and stops at anything else."""
    from weasyprint.urls import FatalURLFetchingError, URLFetcher, URLFetcherResponse

    class ShelfFetcher(URLFetcher):  # type: ignore[misc]  # WeasyPrint has no types
        def fetch(self, url: str, headers: object = None) -> Any:  # noqa: ANN401, ARG002
            try:
                content, kind = shelf.get(url)
            except TemplateFault as fault:
                raise FatalURLFetchingError(url) from fault
            return URLFetcherResponse(url, content, {"Content-Type": kind})

    return ShelfFetcher(allowed_protocols=(), fail_on_errors=True)


@contextmanager
def _faults_raised(engine: Any) -> Iterator[None]:  # noqa: ANN401
    """Turn warnings of WeasyPrint and refused addresses into template faults."""
    from weasyprint.urls import FatalURLFetchingError

    kept: list[str] = []

    class Keep(logging.Handler):
        def emit(self, record: logging.LogRecord) -> None:
            kept.append(record.getMessage())

    logger = engine.LOGGER
    handler, level, propagate = Keep(logging.WARNING), logger.level, logger.propagate
    before = list(logger.handlers)
    logger.handlers[:] = [handler]
    logger.setLevel(logging.WARNING)
    logger.propagate = False
    try:
        yield
    except FatalURLFetchingError as refused:
        cause = refused.__cause__
        if isinstance(cause, TemplateFault):
            raise cause from None
        raise
    finally:
        logger.handlers[:] = before
        logger.setLevel(level)
        logger.propagate = propagate
    if kept:
        place = re.search(r" at (\d+):\d+", kept[0])
        raise TemplateFault(
            where=f"{STYLE}:{place[1]}" if place else "templates folder",
            found=kept[0].rstrip(".") + ".",
            rule="A page or a style sheet must be set without a single warning.",
            remedy="Correct the place, or compare it with the tool's own templates.",
        )


@contextmanager
def _no_search_for_cycles() -> Iterator[None]:
    """Let the collector of cyclic garbage rest while pages are set.

    Hundreds of thousands of boxes live until the end; looking through them again and
    again took a fifth of the time.
    """
    was_on = gc.isenabled()
    gc.disable()
    try:
        yield
    finally:
        if was_on:
            gc.enable()


@contextmanager
def _own_fonts_only() -> Iterator[None]:
    """Hide the fonts of the machine while fonts are looked up."""
    before = os.environ.get("FONTCONFIG_FILE")
    with tempfile.TemporaryDirectory(prefix="contingency-fonts-") as folder:
        path = Path(folder) / "fonts.conf"
        path.write_text("<fontconfig/>\n", encoding="ascii")
        os.environ["FONTCONFIG_FILE"] = str(path)
        try:
            yield
        finally:
            if before is None:
                del os.environ["FONTCONFIG_FILE"]
            else:
                os.environ["FONTCONFIG_FILE"] = before


@contextmanager
def _stable_font_names() -> Iterator[None]:
    """Name subset fonts after their file, for Pango's own words change by version."""
    from weasyprint.pdf.fonts import Font

    original = Font.__init__

    def named_after_file(
        self: Any,  # noqa: ANN401
        pango_font: object,
        description: object,
        font_size: object,
    ) -> None:
        original(self, pango_font, description, font_size)
        face = (self.index, self.style, self.weight, sorted(self.variations.items()))
        digest = sha256(self.file_content + repr(face).encode()).digest()
        self.hash = "".join(chr(65 + byte % 26) for byte in digest[:6])
        self.name = b"/" + self.hash.encode() + b"+" + self.name.split(b"+", 1)[1]

    Font.__init__ = named_after_file
    try:
        yield
    finally:
        Font.__init__ = original


def _claim_ua(document: Any) -> None:  # noqa: ANN401
    """Add the claim of PDF/UA-1 to the one description of the document."""
    plain = document.metadata.generate_rdf_metadata
    end = b"</rdf:RDF>"

    def with_claim(*values: object, **named: object) -> bytes:
        text: bytes = plain(*values, **named)
        head, found, tail = text.rpartition(end)
        if not found or tail.strip():
            msg = "the XMP of this WeasyPrint ends in an unknown way"
            raise RuntimeError(msg)
        return head + (UA_SCHEMA + UA_CLAIM).encode() + end

    document.metadata.generate_rdf_metadata = with_claim


def _finish(_document: object, pdf: Any) -> None:  # noqa: ANN401
    """Put the last hand to the objects of the PDF before they are written."""
    _make_signature_fields(pdf)
    _drop_doubles(pdf)


def _make_signature_fields(pdf: Any) -> None:  # noqa: ANN401
    """Turn check boxes named sig_... into empty, visible signature fields.

    WeasyPrint places and tags form fields but knows no signatures (ISO 32000-1,
    12.7.4.5).  The form element of the tags gets its one reference as /K itself, for
    validators of signatures accept only that when a field is filled later.
    """
    import pydyf

    for thing in list(pdf.objects):
        if not isinstance(thing, dict) or thing.get("FT") != "/Btn":
            continue
        if not thing["T"].string.startswith("sig_"):
            continue
        thing["FT"] = "/Sig"
        for key in ("AS", "MK", "V", "Border", "DA", "Ff"):
            thing.pop(key, None)
        x1, y1, x2, y2 = thing["Rect"]
        left, bottom = min(x1, x2), min(y1, y2)
        width, height = abs(x2 - x1), abs(y2 - y1)
        thing["Rect"] = pydyf.Array([left, bottom, left + width, bottom + height])
        thing["F"] = 4 | 128  # printed, and locked in its place
        empty = pydyf.Stream(
            [],
            {
                "Type": "/XObject",
                "Subtype": "/Form",
                "BBox": pydyf.Array([0, 0, width, height]),
            },
        )
        pdf.add_object(empty)
        thing["AP"] = pydyf.Dictionary({"N": empty.reference})
    for thing in pdf.objects:
        is_form = isinstance(thing, dict) and thing.get("S") == "/Form"
        if is_form and isinstance(thing["K"], list) and len(thing["K"]) == 1:
            thing["K"] = thing["K"][0]
    form = pdf.catalog.get("AcroForm")
    if form is not None:
        # PDF/A-3, 6.4.1: no field may ask the reader to make its looks.
        form.pop("NeedAppearances", None)
        form.pop("DR", None)


def _drop_doubles(pdf: Any) -> None:  # noqa: ANN401
    """List each attached file once, and leave out empty resource dictionaries."""
    import pydyf

    listed = pdf.catalog.get("AF")
    if listed is not None:
        once = dict.fromkeys(
            one if isinstance(one, bytes) else str(one).encode() for one in listed
        )
        pdf.catalog["AF"] = pydyf.Array(list(once))
    for thing in pdf.objects:
        if isinstance(thing, dict):
            for key in ("Pattern", "Shading", "XObject"):
                if isinstance(thing.get(key), dict) and not thing[key]:
                    del thing[key]


def _packed_again(pdf: bytes) -> bytes:
    """Write the objects again in streams of a hundred instead of one for all."""
    import pikepdf

    out = io.BytesIO()
    with pikepdf.open(io.BytesIO(pdf)) as document:
        document.save(
            out,
            object_stream_mode=pikepdf.ObjectStreamMode.generate,
            compress_streams=True,
            deterministic_id=True,
            fix_metadata_version=False,
        )
    return out.getvalue()
