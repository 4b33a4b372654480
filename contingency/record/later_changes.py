"""What a later revision of a PDF may do: fill one field with a seal, and no more.

A PDF grows by revisions behind its first bytes, and a viewer shows the last one.  A
seal says nothing of what comes after it, so that must be looked at.  Here every object
of the earlier state is held against the later one, whatever it is for; all that may
differ is named below.  pyHanko's own policy, which knows what each change is good for,
is asked as well (`seal_check.py`): two programs with different readers of PDF must
both be content.

Between two states one seal is added when, and only when:

* no object is gone, and only these differ: the catalogue in /AcroForm /SigFlags,
  /Extensions and /Version; the form in /SigFlags; one widget of an empty signature
  field in /V, /AP and /F;
* each new object hangs from the new /V or /AP, and no object of the earlier state
  refers to it (a reference into the void would be a place held for later);
* the field is visible, and its /V is a signature with the keys of a signature.
"""

from __future__ import annotations

import re
from collections.abc import Iterator
from dataclasses import dataclass
from functools import cached_property
from typing import TYPE_CHECKING, Any

from contingency.record.attachments import all_objects, opened

if TYPE_CHECKING:
    import pikepdf

Number = tuple[int, int]
"""Object and generation number."""

_REFERENCE = re.compile(rb"(?<!\d)(\d{1,10}) (\d{1,5}) R\b")
_LIBRARY_STREAMS = (b"/Type /XRef", b"/Type /ObjStm")

_TRAILER_KEYS = frozenset({"/Root", "/Info", "/ID", "/Size", "/Prev"})
_XREF_STREAM_KEYS = frozenset(
    {"/Type", "/W", "/Index", "/Length", "/Filter", "/DecodeParms"}
)
_SIGNATURE_KEYS = frozenset(
    {
        "/Type",
        "/Filter",
        "/SubFilter",
        "/Contents",
        "/ByteRange",
        "/M",
        "/Name",
        "/Reason",
    }
)
_VERSIONS = frozenset({"/1.7", "/2.0"})
_HIDING_FLAGS = 1 | 2 | 32
"""Of an annotation: invisible, hidden, not shown (ISO 32000-1:2008, table 165)."""


@dataclass(frozen=True, kw_only=True)
class State:
    """All objects of a PDF as it stands at the end of one revision."""

    document: pikepdf.Pdf
    root: Number
    objects: dict[Number, bytes]
    """Each object as text, a stream with the digest of its bytes."""
    trailer_faults: tuple[str, ...]

    @cached_property
    def references(self) -> dict[Number, set[Number]]:
        """For each object the objects that it refers to."""
        return {number: _references(text) for number, text in self.objects.items()}

    @property
    def is_first(self) -> bool:
        """Whether this is the first revision of the file."""
        return "/Prev" not in self.document.trailer


def state_of(pdf: bytes) -> State:
    """Return the state of a PDF that ends with these bytes.

    Raises
    ------
    UnreadableReport
        unreadable-report.
    """
    document = opened(pdf)
    objects = dict(all_objects(document))
    odd = {*document.trailer.keys()} - _TRAILER_KEYS - _XREF_STREAM_KEYS
    return State(
        document=document,
        root=document.Root.objgen,
        objects=objects,
        trailer_faults=tuple(f"the trailer has {key}" for key in sorted(odd)),
    )


def changes_beyond_a_seal(earlier: State, later: State) -> tuple[str, ...]:
    """Return in words what differs between two states beyond one seal in its field.

    Parameters
    ----------
    earlier, later : State
        Of one file; the later one has one seal more.

    Returns
    -------
    tuple of str
        Empty if the seal is all.
    """
    return tuple(_changes(earlier, later))


def sealed_between(earlier: State, later: State) -> tuple[str, ...]:
    """Return the names of the fields that hold a seal in `later` only."""
    return tuple(
        str(earlier.document.get_object(number).get("/T", ""))
        for number in sorted(_empty_fields(earlier) - _empty_fields(later))
    )


def _changes(earlier: State, later: State) -> Iterator[str]:
    yield from later.trailer_faults
    yield from _trailer_changes(earlier, later)
    old, new = _without_containers(earlier, later)
    for number in sorted(old.keys() - new.keys()):
        yield f"object {number[0]} is gone"
    fresh = new.keys() - old.keys()
    held_open = _references(earlier.document.trailer).union(
        *(earlier.references[number] for number in old)
    )
    for number in sorted(held_open & fresh):
        yield f"object {number[0]} was referred to before it was there"

    reached: set[Number] = set()
    sealed = 0
    empty = _empty_fields(earlier)
    for number in sorted(n for n in old.keys() & new.keys() if old[n] != new[n]):
        if number == later.root:
            yield from _catalogue_changes(earlier, later)
        elif number == _form_number(earlier):
            yield from _differences(
                earlier.document.get_object(number),
                later.document.get_object(number),
                {"/SigFlags"},
                "the form",
            )
        elif number in empty:
            sealed += 1
            yield from _field_changes(number, earlier, later, fresh)
            reached |= _reached(number, later, fresh)
        else:
            yield f"object {number[0]} differs"
    if sealed != 1:
        yield f"{sealed} seals were added at once"
    for number in sorted(fresh - reached):
        yield f"object {number[0]} was added for no seal"


def _trailer_changes(earlier: State, later: State) -> Iterator[str]:
    before, after = earlier.document.trailer, later.document.trailer
    for key in ("/Root", "/Info"):
        if _reference(before.get(key)) != _reference(after.get(key)):
            yield f"the trailer has another {key}"
    first = [bytes(t.ID[0]) if "/ID" in t else b"" for t in (before, after)]
    if first[0] != first[1]:
        yield "the trailer has another /ID"


def _catalogue_changes(earlier: State, later: State) -> Iterator[str]:
    before, after = earlier.document.Root, later.document.Root
    yield from _differences(
        before, after, {"/AcroForm", "/Extensions", "/Version"}, "the catalogue"
    )
    if str(after.get("/Version", "/1.7")) not in _VERSIONS:
        yield f"the catalogue claims version {after.Version}"
    if _REFERENCE.search(_whole(after.get("/Extensions"))):
        yield "the extensions refer to other objects"
    if _form_number(earlier) != _form_number(later):
        yield "the form is another"
    elif _form_number(earlier) is None:
        yield from _differences(
            before.get("/AcroForm"), after.get("/AcroForm"), {"/SigFlags"}, "the form"
        )


def _field_changes(
    number: Number, earlier: State, later: State, fresh: set[Number]
) -> Iterator[str]:
    import pikepdf

    before = earlier.document.get_object(number)
    after = later.document.get_object(number)
    name = f"the field {before.get('/T', '')}"
    yield from _differences(before, after, {"/V", "/AP", "/F"}, name)
    flags = after.get("/F", 0)
    if not isinstance(flags, int) or flags & _HIDING_FLAGS:
        yield f"{name} is hidden"
    value, look = after.get("/V"), after.get("/AP")
    if (
        not isinstance(value, pikepdf.Dictionary)
        or value.objgen not in fresh
        or value.get("/Type") != "/Sig"
        or not {*value.keys()} <= _SIGNATURE_KEYS
        or _REFERENCE.search(later.objects[value.objgen])
    ):
        yield f"{name} holds something that is no seal of ours"
    if (
        not isinstance(look, pikepdf.Dictionary)
        or {*look.keys()} != {"/N"}
        or not isinstance(look.N, pikepdf.Stream)
        or look.N.get("/Subtype") != "/Form"
        or look.N.objgen not in fresh
    ):
        yield f"{name} has a look that is no look of ours"


def _differences(
    before: Any,  # noqa: ANN401  (a PDF may hold anything)
    after: Any,  # noqa: ANN401
    allowed: set[str],
    name: str,
) -> Iterator[str]:
    """Give each key of a dictionary that differs and may not."""
    import pikepdf

    if not isinstance(before, pikepdf.Dictionary) or not isinstance(
        after, pikepdf.Dictionary
    ):
        yield f"{name} is another kind of thing"
        return
    for key in sorted({*before.keys()} | {*after.keys()}):
        if key not in allowed and _whole(before.get(key)) != _whole(after.get(key)):
            yield f"{name} differs in {key}"


def _reached(number: Number, later: State, fresh: set[Number]) -> set[Number]:
    """Return the new objects that hang from the value and look of a field."""
    field = later.document.get_object(number)
    waiting = _references(*(_whole(field.get(key)) for key in ("/V", "/AP")))
    reached: set[Number] = set()
    while waiting:
        one = waiting.pop()
        if one in fresh and one not in reached:
            reached.add(one)
            waiting |= later.references[one]
    return reached


def _without_containers(
    earlier: State, later: State
) -> tuple[dict[Number, bytes], dict[Number, bytes]]:
    """Return all objects of both states, but those that only carry others.

    One that is a container in one state must be none, or absent, in the other to
    be left out; else it would be a way to exchange an object unseen.
    """
    before, after = _containers(earlier), _containers(later)
    left_out = {
        number
        for number in before | after
        if (number in before or number not in earlier.objects)
        and (number in after or number not in later.objects)
    }
    return (
        {n: text for n, text in earlier.objects.items() if n not in left_out},
        {n: text for n, text in later.objects.items() if n not in left_out},
    )


def _containers(state: State) -> set[Number]:
    """Return the streams that only carry other objects, and that nothing refers to."""
    found = {
        number
        for number, text in state.objects.items()
        if any(mark in text for mark in _LIBRARY_STREAMS) and b" stream " in text
    }
    if not found:
        return found
    others = (refs for number, refs in state.references.items() if number not in found)
    return found - _references(state.document.trailer).union(*others)


def _references(*things: Any) -> set[Number]:  # noqa: ANN401
    """Return the numbers of all objects that the things refer to.

    A string that looks like a reference counts too: that only makes this stricter.
    """
    found: set[Number] = set()
    for thing in things:
        text = thing if isinstance(thing, bytes) else _whole(thing)
        found |= {(int(a), int(b)) for a, b in _REFERENCE.findall(text)}
    return found


def _empty_fields(state: State) -> set[Number]:
    """Return the fields of the form, at its top, that wait for a seal."""
    import pikepdf

    form = state.document.Root.get("/AcroForm")
    if not isinstance(form, pikepdf.Dictionary):
        return set()
    fields = form.get("/Fields")
    if not isinstance(fields, pikepdf.Array):
        return set()
    return {
        number
        for field in list(fields)
        if isinstance(field, pikepdf.Dictionary)
        and (number := _reference(field)) is not None
        and field.get("/FT") == "/Sig"
        and field.get("/Subtype") == "/Widget"
        and "/V" not in field
    }


def _form_number(state: State) -> Number | None:
    return _reference(state.document.Root.get("/AcroForm"))


def _reference(thing: Any) -> Number | None:  # noqa: ANN401
    import pikepdf

    if isinstance(thing, pikepdf.Object) and thing.is_indirect:
        return tuple(thing.objgen)  # type: ignore[return-value]  # two numbers
    return None


def _whole(thing: Any) -> bytes:  # noqa: ANN401
    """Return a value as its dictionary holds it: a reference stays a reference."""
    import pikepdf

    if isinstance(thing, pikepdf.Object):
        return bytes(thing.unparse())
    return repr(thing).encode()
