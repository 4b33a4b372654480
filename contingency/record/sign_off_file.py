"""The file sign_offs.json: what it holds, read and written.

A list that only grows: signing again adds a line, and the latest line of a role
counts.  Beside it stand the notes of when a sign-off was first found to have lapsed.
"""

from __future__ import annotations

import datetime as dt
import json
from collections.abc import Mapping
from dataclasses import asdict, dataclass, field
from pathlib import Path
from typing import Any

from contingency.errors import DamagedRecord

FILE = "sign_offs.json"
FORMAT = "contingency-sign-offs/1"


@dataclass(frozen=True, kw_only=True, slots=True)
class Content:
    """What a sign-off is bound to."""

    inputs: str
    """Fingerprint of the estimate, hexadecimal SHA-256."""
    results: str
    """SHA-256 of results.json, hexadecimal; empty where nothing was computed."""
    tool: str
    """Version of the program that computed the results."""
    files: Mapping[str, str] = field(default_factory=dict)
    """SHA-256 of each input file, by name: says later which of them changed."""


@dataclass(frozen=True, kw_only=True, slots=True)
class SignOff:
    """One typed sign-off."""

    role: str
    name: str
    position: str
    signed_at: dt.datetime
    """With its offset from UTC."""
    comment: str
    conditions: str
    """What must be met for the sign-off to hold; printed on the report."""
    content: Content


@dataclass(frozen=True, kw_only=True, slots=True)
class Lapse:
    """When it was first noticed that the signed content had changed."""

    role: str
    signed_at: dt.datetime
    noticed_at: dt.datetime


@dataclass(frozen=True, kw_only=True, slots=True)
class SignOffs:
    """Everything in one sign_offs.json, oldest first."""

    given: tuple[SignOff, ...] = ()
    lapses: tuple[Lapse, ...] = ()

    def latest(self, role: str) -> SignOff | None:
        """Return the last sign-off given in this role, or None."""
        return next((s for s in reversed(self.given) if s.role == role), None)

    def find_lapse(self, sign_off: SignOff) -> Lapse | None:
        """Return the note that this sign-off was found lapsed, or None."""
        key = (sign_off.role, sign_off.signed_at)
        return next((n for n in self.lapses if (n.role, n.signed_at) == key), None)


def read_sign_offs(folder: Path) -> SignOffs:
    """Return what the sign_offs.json in `folder` holds; nothing if it is not there.

    Raises
    ------
    DamagedRecord
        damaged-record.  The file is not what this program writes.
    """
    path = folder / FILE
    try:
        content = path.read_bytes()
    except FileNotFoundError:
        return SignOffs()
    return parse_sign_offs(content, where=str(path))


def parse_sign_offs(content: bytes, *, where: str) -> SignOffs:
    """Return what the bytes of a sign_offs.json hold.

    Raises
    ------
    DamagedRecord
        damaged-record.  They are not what this program writes.
    """
    try:
        data = json.loads(content)
        _insist(data["format"] == FORMAT, f"its format is {data['format']!r}")
        return SignOffs(
            given=tuple(_sign_off(row) for row in data["sign_offs"]),
            lapses=tuple(_lapse(row) for row in data["lapses"]),
        )
    except (ValueError, KeyError, TypeError, AttributeError, RecursionError) as fault:
        raise DamagedRecord(
            where=where,
            found=f"the file cannot be read as sign-offs ({_brief(fault)}).",
            rule="The file is written by this program only.",
            remedy="Bring back the file as it was, or move it away and sign again.",
        ) from None


def written_sign_offs(sign_offs: SignOffs) -> bytes:
    """Return the bytes of sign_offs.json: JSON, one fixed form for one content."""
    data = {
        "format": FORMAT,
        "sign_offs": [_row(sign_off) for sign_off in sign_offs.given],
        "lapses": [_row(lapse) for lapse in sign_offs.lapses],
    }
    return (json.dumps(data, indent=1, ensure_ascii=False) + "\n").encode()


def _row(record: SignOff | Lapse) -> dict[str, Any]:
    """One record as JSON has it: times in ISO 8601."""
    return {
        key: value.isoformat() if isinstance(value, dt.datetime) else value
        for key, value in asdict(record).items()
    }


def _sign_off(row: Mapping[str, Any]) -> SignOff:
    words = {
        key: _text(row[key])
        for key in ("role", "name", "position", "comment", "conditions")
    }
    content = row["content"]
    return SignOff(
        **words,
        signed_at=_time(row["signed_at"]),
        content=Content(
            inputs=_text(content["inputs"]),
            results=_text(content["results"]),
            tool=_text(content["tool"]),
            files={_text(k): _text(v) for k, v in content["files"].items()},
        ),
    )


def _lapse(row: Mapping[str, Any]) -> Lapse:
    return Lapse(
        role=_text(row["role"]),
        signed_at=_time(row["signed_at"]),
        noticed_at=_time(row["noticed_at"]),
    )


def _text(value: object) -> str:
    if not isinstance(value, str):
        raise TypeError(f"{value!r} is not text")
    return value


def _insist(holds: bool, otherwise: str) -> None:  # noqa: FBT001  (a bare condition)
    if not holds:
        raise ValueError(otherwise)


def _time(value: object) -> dt.datetime:
    moment = dt.datetime.fromisoformat(_text(value))
    _insist(moment.tzinfo is not None, f"{value} has no offset from UTC")
    return moment


def _brief(fault: Exception) -> str:
    if isinstance(fault, KeyError):
        return f"{fault.args[0]!r} is missing"
    return str(fault).splitlines()[0][:100] if str(fault) else type(fault).__name__
