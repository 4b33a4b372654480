"""The files inside a PDF, taken out as if the PDF were hostile.

Nothing is repaired, no name is used as a path, and nothing is unpacked further than a
limit.  Only what a report of this program has is read: plain files in the list of
embedded files, each with one stream that is stored as it is or deflated once.  What
does not fit is refused by name, not cleaned up.

Run `read_attachments` apart (`contingency.record.apart`) for a file whose origin is
not known: limits on memory and time are set there.
"""

from __future__ import annotations

import io
import re
import zlib
from collections import Counter
from collections.abc import Iterator
from contextlib import contextmanager
from dataclasses import dataclass
from hashlib import sha256
from typing import TYPE_CHECKING, Any

from contingency.errors import ContingencyError, UnreadableReport

if TYPE_CHECKING:
    import pikepdf

    from contingency.record.apart import Answer

LARGEST_PDF = 256 * 2**20
"""Bytes of a PDF that are looked at.  These limits are own choices, far above what a
report of 300 packages has (about 1 MB)."""
LARGEST_FILE = 64 * 2**20
LARGEST_SUM = 192 * 2**20
MOST_FILES = 2000
"""Earlier revisions travel with a report, so that there may be many."""
MOST_NODES = 4000
"""Of the tree that lists the files."""
DEEPEST_TREE = 12
LONGEST_NAME = 120

_HOLDS_FILE = re.compile(rb"/EF(?![A-Za-z0-9])")

RELATIONSHIPS = frozenset(
    {"Source", "Data", "Supplement", "Alternative", "Unspecified"}
)
"""Of a file to the document: ISO 19005-3:2012, section 6.8."""


@dataclass(frozen=True, kw_only=True, slots=True)
class Attachment:
    """One file inside a PDF."""

    name: str
    """As the PDF lists it; text to be shown or compared, never a path."""
    relationship: str
    """`Source` for an input of the report, `Data` for what was made from them."""
    content: bytes


def read_attachments(pdf: bytes) -> tuple[Attachment, ...]:
    """Return the files inside a PDF, in the order of its list.

    Raises
    ------
    UnreadableReport
        unreadable-report.  The PDF is damaged or encrypted, a limit is passed, two
        files have one name, a file lies outside the list, or is stored in a way that
        no report of this program has.
    """
    with refusing_the_unforeseen(), opened(pdf) as document:
        specs = list(_listed(document))
        _refuse_files_outside(document, [spec for _, spec in specs])
        for name, count in Counter(name for name, _ in specs).items():
            if count > 1:
                raise _refused(f'two files in it are called "{_shown(name)}".')
        found: list[Attachment] = []
        left = LARGEST_SUM
        for name, spec in specs:
            content = _content(name, spec, min(left, LARGEST_FILE))
            relationship = str(spec.get("/AFRelationship", "")).lstrip("/")
            if relationship not in RELATIONSHIPS:
                raise _refused(f'the relation of "{_shown(name)}" to it is not stated.')
            left -= len(content)
            found.append(
                Attachment(name=name, relationship=relationship, content=content)
            )
    return tuple(found)


def opened(pdf: bytes) -> pikepdf.Pdf:
    """Return the parsed PDF; nothing of a damaged one is repaired.

    Raises
    ------
    UnreadableReport
        unreadable-report.
    """
    import pikepdf

    if len(pdf) > LARGEST_PDF:
        raise _refused(f"it has {len(pdf):,} bytes, more than are looked at.")
    try:
        document = pikepdf.open(
            io.BytesIO(pdf), attempt_recovery=False, suppress_warnings=True
        )
    except (pikepdf.PdfError, ValueError, TypeError, RuntimeError) as fault:
        raise _refused(f"it cannot be read ({_first_line(fault)}).") from None
    if document.is_encrypted:
        document.close()
        raise _refused("it is encrypted.")
    return document


@contextmanager
def refusing_the_unforeseen() -> Iterator[None]:
    """Turn whatever a library raises over a hostile PDF into UnreadableReport."""
    try:
        yield
    except ContingencyError:
        raise
    except Exception as fault:
        raise _refused(
            f"reading it failed ({type(fault).__name__}: {_first_line(fault)})."
        ) from fault


def all_objects(document: pikepdf.Pdf) -> Iterator[tuple[tuple[int, int], bytes]]:
    """Give number and text of every object of a PDF that is not null.

    Of a stream the text is its dictionary and the SHA-256 of its bytes as stored;
    objects that it refers to stand in it by number.
    """
    import pikepdf

    # Explicit: else a number that stands as an object of its own loses its number.
    with pikepdf.explicit_conversion():
        for thing in document.objects:
            if isinstance(thing, pikepdf.Stream):
                digest = sha256(thing.read_raw_bytes()).hexdigest().encode()
                text = pikepdf.Dictionary(dict(thing)).unparse()
                yield thing.objgen, text + b" stream " + digest
            elif isinstance(thing, pikepdf.Object):
                yield thing.objgen, bytes(thing.unparse(resolved=True))


def attachments_apart(arguments: dict[str, Any], blobs: list[bytes]) -> Answer:
    """Do `read_attachments` as a task of `contingency.record.apart`."""
    del arguments
    (pdf,) = blobs
    _limit_unpacking()
    found = read_attachments(pdf)
    rows = [[file.name, file.relationship] for file in found]
    return {"files": rows}, [file.content for file in found]


def _limit_unpacking() -> None:
    """Bound what qpdf unpacks by itself, such as streams that hold objects."""
    from pikepdf.settings import set_qpdf_limits

    set_qpdf_limits(
        parser_max_nesting=200,
        parser_max_container_size=2_000_000,
        max_stream_filters=4,
        flate_max_memory=LARGEST_FILE,
        png_max_memory=LARGEST_FILE,
    )


def _listed(document: pikepdf.Pdf) -> Iterator[tuple[str, Any]]:
    """Give name and file specification of every file in the document's list."""
    import pikepdf

    top = document.Root.get("/Names", pikepdf.Dictionary()).get("/EmbeddedFiles")
    if top is None:
        return
    nodes, files = 0, 0
    waiting = [(top, 0)]
    while waiting:
        node, depth = waiting.pop()
        nodes += 1
        if nodes > MOST_NODES or depth > DEEPEST_TREE:
            raise _refused("its list of files has no end.")
        if not isinstance(node, pikepdf.Dictionary):
            raise _refused("its list of files is damaged.")
        kids = list(node.get("/Kids", pikepdf.Array()))
        waiting += [(kid, depth + 1) for kid in reversed(kids[:MOST_NODES])]
        pairs = list(node.get("/Names", pikepdf.Array()))
        if len(pairs) % 2:
            raise _refused("its list of files is damaged.")
        for key, spec in zip(pairs[::2], pairs[1::2], strict=True):
            files += 1
            if files > MOST_FILES:
                raise _refused(f"it has more than {MOST_FILES:,} files in it.")
            yield _name(key, spec), spec


def _name(key: object, spec: Any) -> str:  # noqa: ANN401  (a PDF may hold anything)
    """Return the one name of a listed file; several names are a trap for the eye."""
    import pikepdf

    if not isinstance(spec, pikepdf.Dictionary) or "/UF" not in spec:
        raise _refused("a file in its list is not described as reports do.")
    names = {str(key), str(spec.UF), str(spec.get("/F", spec.UF))}
    name = names.pop()
    if names:
        raise _refused(f'the file "{_shown(name)}" in it has several names.')
    if not name or len(name) > LONGEST_NAME or not name.isprintable():
        raise _refused(f'a file in it has the name "{_shown(name)}".')
    return name


def _content(name: str, spec: Any, most: int) -> bytes:  # noqa: ANN401  (as above)
    """Return the content of one file, unpacked up to `most` bytes."""
    import pikepdf

    files = spec.get("/EF", pikepdf.Dictionary())
    streams = [files[key] for key in files]
    if not {"/F"} <= set(files) <= {"/F", "/UF"} or any(
        not isinstance(stream, pikepdf.Stream) or stream.objgen != streams[0].objgen
        for stream in streams
    ):
        raise _refused(f'"{_shown(name)}" in it is not stored as reports do.')
    stream = streams[0]
    packing = _packing(stream)
    raw: bytes = stream.read_raw_bytes()
    if packing is None or not raw:
        content = raw
    elif packing == "/FlateDecode":
        unpack = zlib.decompressobj()
        try:
            content = unpack.decompress(raw, most + 1)
        except zlib.error as fault:
            raise _refused(f'"{_shown(name)}" in it is damaged ({fault}).') from None
        if len(content) <= most and not unpack.eof:
            raise _refused(f'"{_shown(name)}" in it is cut short.')
    else:
        raise _refused(f'"{_shown(name)}" in it is packed in an unusual way.')
    if len(content) > most:
        raise _refused(f'"{_shown(name)}" in it unpacks to more than {most:,} bytes.')
    return content


def _packing(stream: Any) -> str | None:  # noqa: ANN401  (as above)
    """Return the one filter of a stream, None for none, anything else as a word."""
    import pikepdf

    if any(key in stream for key in ("/F", "/FFilter", "/DecodeParms", "/DP")):
        return "with parameters or outside the file"
    packing = stream.get("/Filter")
    if isinstance(packing, pikepdf.Array) and len(packing) <= 1:
        packing = packing[0] if len(packing) else None
    return None if packing is None else str(packing)


def _refuse_files_outside(document: pikepdf.Pdf, specs: list[Any]) -> None:
    """Refuse a PDF with a file that its list does not name, such as in a comment."""
    known = {spec.objgen for spec in specs if spec.is_indirect}
    for number, text in all_objects(document):
        if number not in known and _HOLDS_FILE.search(text):
            raise _refused("a file is hidden in it outside the list of its files.")


def _shown(name: str) -> str:
    """Return a name from the PDF as it may be shown: short, no control characters."""
    return "".join(c if c.isprintable() else "\N{REPLACEMENT CHARACTER}" for c in name)[
        :60
    ]


def _first_line(fault: Exception) -> str:
    return (str(fault).splitlines() or [type(fault).__name__])[0][:160]


def _refused(found: str) -> UnreadableReport:
    return UnreadableReport(
        where="the report",
        found=found,
        rule="A report is a PDF that this program wrote, sealed or not.",
        remedy="Ask for the file again from where it was issued.",
    )
