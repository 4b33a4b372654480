"""What the seals of a report still prove.

For each seal: is the signature right and in its one form, by whom, does a trusted
certificate vouch for that name, and did anything but more seals come after it?
Everything is decided from the file, the trusted certificates that are passed in and
the time that is passed in; nothing is fetched.

For a file whose origin is not known run it apart (`contingency.record.apart`).
"""

from __future__ import annotations

import datetime as dt
import re
import warnings
from collections.abc import Sequence
from dataclasses import asdict, dataclass
from typing import TYPE_CHECKING, Any, cast

from contingency.errors import UnreadableReport
from contingency.record.attachments import refusing_the_unforeseen
from contingency.record.cms_form import form_faults, signature_in
from contingency.record.later_changes import (
    State,
    changes_beyond_a_seal,
    sealed_between,
    state_of,
)
from contingency.record.seals import PREFIX
from contingency.record.signature_check import Judge, Seal

if TYPE_CHECKING:
    from contingency.record.apart import Answer

MOST_SEALS = 20
"""Seals that are looked at; a report has three to six.  Own choice."""

_WHOLE_FILE_MARK = re.compile(rb"\s*%%EOF\s*\Z")


@dataclass(frozen=True, kw_only=True, slots=True)
class SealsCheck:
    """What all seals of a report prove together."""

    seals: tuple[Seal, ...]
    """In the order in which they were made."""
    open_roles: tuple[str, ...]
    """Roles whose field is still empty."""
    faults: tuple[str, ...]
    """What is odd about the file as a whole."""

    @property
    def are_intact(self) -> bool:
        """Whether the file and every seal are as they were; true without seals."""
        return not self.faults and all(seal.is_intact for seal in self.seals)


@dataclass(frozen=True, kw_only=True, slots=True)
class _Found:
    """A filled field, as the file has it."""

    name: str
    end: int
    """Where the bytes end that it covers."""
    faults: tuple[str, ...]


def check_seals(
    pdf: bytes,
    *,
    when: dt.datetime,
    trusted: Sequence[bytes] = (),
    issued_bytes: int | None = None,
    second_word: bool = True,
) -> SealsCheck:
    """Return what the seals of a report prove.

    Parameters
    ----------
    pdf : bytes
        The report.
    when : datetime
        Moment at which certificates are judged, with its offset from UTC.
    trusted : sequence of bytes
        DER of the certificates that the reader trusts; without any, names are
        shown and not judged.
    issued_bytes : int, optional
        Length of the report as issued, where the register says it: what came
        between that and the first seal is looked at too.
    second_word : bool
        Whether pyHanko's policy is asked as well: minutes for a large report.

    Raises
    ------
    UnreadableReport
        unreadable-report.
    """
    with refusing_the_unforeseen():
        return _checked(
            pdf,
            when=when,
            trusted=trusted,
            issued_bytes=issued_bytes,
            second_word=second_word,
        )


def _checked(
    pdf: bytes,
    *,
    when: dt.datetime,
    trusted: Sequence[bytes],
    issued_bytes: int | None,
    second_word: bool,
) -> SealsCheck:
    last = state_of(pdf)
    found = sorted(_found(last, pdf), key=lambda one: one.end)
    faults = [*_file_faults(pdf, last, found)]
    ends = [one.end for one in found]
    if not found and issued_bytes not in {None, len(pdf)}:
        faults.append("bytes follow the report as it was issued")
    base = issued_bytes or _first_end(pdf, found)
    states = _states(pdf, [base, *ends], last, faults)
    later = _later_faults(states, found, faults)
    own = [(*one.faults, *after) for one, after in zip(found, later, strict=True)]
    judge = Judge(
        pdf,
        when=when,
        trusted=trusted,
        second_word=second_word and not faults and not any(own),
    )
    faults += judge.faults
    seals = [judge.seal(one.name, odd) for one, odd in zip(found, own, strict=True)]
    return SealsCheck(
        seals=tuple(seals),
        open_roles=_open_roles(last),
        faults=tuple(faults),
    )


def seals_apart(arguments: dict[str, Any], blobs: list[bytes]) -> Answer:
    """Do `check_seals` as a task of `contingency.record.apart`."""
    pdf, *trusted = blobs
    check = check_seals(
        pdf,
        when=dt.datetime.fromisoformat(arguments["when"]),
        trusted=trusted,
        issued_bytes=arguments["issued_bytes"],
        second_word=arguments["second_word"],
    )
    return asdict(check), []


def seals_from(answer: dict[str, Any]) -> SealsCheck:
    """Make the result of `seals_apart` anew."""
    return SealsCheck(
        seals=tuple(
            Seal(**{**seal, "faults": tuple(seal["faults"])})
            for seal in answer["seals"]
        ),
        open_roles=tuple(answer["open_roles"]),
        faults=tuple(answer["faults"]),
    )


# --- The file -----------------------------------------------------------------------


def _found(state: State, pdf: bytes) -> list[_Found]:
    """Return every field with a value, whatever that is."""
    import pikepdf

    form = state.document.Root.get("/AcroForm", pikepdf.Dictionary())
    found: list[_Found] = []
    for field in list(form.get("/Fields", pikepdf.Array())):
        if not isinstance(field, pikepdf.Dictionary) or "/V" not in field:
            continue
        if len(found) == MOST_SEALS:
            raise UnreadableReport(
                where="the report",
                found=f"it has more than {MOST_SEALS} seals.",
                rule="A report is a PDF that this program wrote, sealed or not.",
                remedy="Ask for the file again from where it was issued.",
            )
        found.append(_field_found(field, pdf))
    return found


def _field_found(field: Any, pdf: bytes) -> _Found:  # noqa: ANN401
    import pikepdf

    name, value = str(field.get("/T", "")), field.V
    covered: Any = None
    faults = []
    if field.get("/FT") != "/Sig" or not name.startswith(PREFIX):
        faults.append("it stands in a field that no report has")
    numbers: list[int] = []
    if isinstance(value, pikepdf.Dictionary):
        covered = value.get("/ByteRange")
    if isinstance(covered, pikepdf.Array):
        numbers = [n for n in list(cast("Any", covered))[:5] if isinstance(n, int)]
    if len(numbers) != 4 or not 0 < numbers[1] < numbers[2] <= sum(numbers[2:]):
        return _Found(name=name, end=0, faults=(*faults, "it covers no range of bytes"))
    start, before, behind, length = numbers
    end = behind + length
    gap = pdf[before:behind]
    if start or end > len(pdf) or gap[:1] != b"<" or gap[-1:] != b">":
        faults.append("the bytes that it covers are not all but itself")
    else:
        signature, odd = signature_in(gap[1:-1].decode("latin-1"))
        faults += odd
        if not odd and bytes(value.get("/Contents", b""))[: len(signature)] != (
            signature
        ):
            faults.append("it is not the signature that its field names")
        faults += _read_form(signature) if signature else ()
    return _Found(name=name, end=min(end, len(pdf)), faults=tuple(faults))


def _read_form(signature: bytes) -> tuple[str, ...]:
    try:
        with warnings.catch_warnings():
            # What cryptography thinks of odd certificates is decided here.
            warnings.simplefilter("ignore")
            return form_faults(signature)
    except Exception as fault:  # noqa: BLE001  (a hostile file may raise anything)
        return (f"its signature cannot be read ({str(fault)[:80]})",)


def _file_faults(pdf: bytes, last: State, found: Sequence[_Found]) -> list[str]:
    import pikepdf

    faults = [*last.trailer_faults]
    if not pdf.startswith(b"%PDF-1.7") and not pdf.startswith(b"%PDF-2.0"):
        faults.append("it does not begin as a report does")
    if not _WHOLE_FILE_MARK.search(pdf[-16:]):
        faults.append("it does not end as a PDF does")
    if b"/XRefStm" in pdf:
        faults.append("it has two tables of its objects")
    if found and found[-1].end != len(pdf):
        faults.append("bytes follow the last seal")
    values = [
        thing
        for thing in last.document.objects
        if isinstance(thing, pikepdf.Dictionary) and "/ByteRange" in thing
    ]
    if len(values) != len(found):
        faults.append("it holds a signature outside of its fields")
    if len({one.end for one in found}) != len(found):
        faults.append("two seals claim the same bytes")
    return faults


def _first_end(pdf: bytes, found: Sequence[_Found]) -> int:
    """Return where the state ends that the first seal was put on."""
    if not found:
        return len(pdf)
    # The part in front of the first seal ends with the last mark of an end in it.
    head = pdf[: found[0].end]
    start = head.rfind(b"/ByteRange")
    mark = head.rfind(b"%%EOF", 0, max(start, 0))
    if mark < 0:
        return 0
    end = mark + len(b"%%EOF")
    while pdf[end : end + 1] in {b"\r", b"\n"}:
        end += 1
    return end


def _states(
    pdf: bytes, ends: Sequence[int], last: State, faults: list[str]
) -> list[State | None]:
    """Return the state at each end; None where the file cannot be cut there."""
    states: list[State | None] = []
    for end in ends:
        if end == len(pdf):
            states.append(last)
            continue
        try:
            states.append(state_of(pdf[:end]))
        except UnreadableReport:
            states.append(None)
            faults.append("it cannot be read as it stood under an earlier seal")
    if states[0] is not None and not states[0].is_first:
        faults.append("it was changed after its issue, before any seal")
    return states


def _later_faults(
    states: Sequence[State | None], found: Sequence[_Found], faults: list[str]
) -> list[list[str]]:
    """Return for each seal what changed after it beyond more seals."""
    later: list[list[str]] = [[] for _ in found]
    for i, one in enumerate(found):
        earlier, now = states[i], states[i + 1]
        if earlier is None or now is None:
            continue
        odd = list(changes_beyond_a_seal(earlier, now))
        if not odd and sealed_between(earlier, now) != (one.name,):
            odd.append(f"the seal that was added is not in the field {one.name}")
        if odd and i == 0:
            faults.append(f"it was changed when its first seal was added: {odd[0]}")
        for before in later[:i]:
            before += [f"after it: {what}" for what in odd[:5]]
    return later


def _open_roles(state: State) -> tuple[str, ...]:
    import pikepdf

    form = state.document.Root.get("/AcroForm", pikepdf.Dictionary())
    return tuple(
        str(field.T).removeprefix(PREFIX)
        for field in list(form.get("/Fields", pikepdf.Array()))
        if isinstance(field, pikepdf.Dictionary)
        and field.get("/FT") == "/Sig"
        and "/V" not in field
        and "/T" in field
    )
