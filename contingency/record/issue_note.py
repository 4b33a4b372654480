"""The note of its issue that an issued report carries: where it stands in the register.

The note travels inside the PDF as `issue.json`, under the seals.  It holds the number
of the report's line and the digest of the line before, so that a sealed report pins
everything that the register said before it.
"""

from __future__ import annotations

import json
from dataclasses import asdict, dataclass, fields

from contingency.record.register import Place

NAME = "issue.json"
FORMAT = "contingency-issue/1"


@dataclass(frozen=True, kw_only=True, slots=True)
class IssueNote:
    """Where an issued report stands in the register."""

    number: int
    """Line of the register, from 1."""
    previous: str
    """SHA-256 of the line before."""
    project: str
    revision: str
    issue: int
    """1 for the first issue of the revision."""
    reason: str
    """Why the revision was issued again."""
    issued_at: str
    """ISO 8601, with its offset from UTC."""


def written_note(place: Place, *, project: str) -> bytes:
    """Return the bytes of the note for a place in the register."""
    note = IssueNote(
        number=place.number,
        previous=place.previous,
        project=project,
        revision=place.revision,
        issue=place.issue,
        reason=place.reason,
        issued_at=place.issued_at.isoformat(),
    )
    data = {"format": FORMAT, **asdict(note)}
    return (json.dumps(data, indent=1, ensure_ascii=False) + "\n").encode()


def read_note(content: bytes) -> IssueNote | None:
    """Return the note, or None where the bytes are none."""
    try:
        data = json.loads(content)
        if data.pop("format") != FORMAT:
            return None
        note = IssueNote(**data)
    except (ValueError, KeyError, TypeError, AttributeError, RecursionError):
        return None
    kinds = {"int": int, "str": str}
    right = all(
        type(getattr(note, one.name)) is kinds[str(one.type)] for one in fields(note)
    )
    return note if right else None
