"""Typed sign-offs: who signed which content, and whether they still stand.

A sign-off is a record in `sign_offs.json` beside the estimate.  It is bound to
content by two digests, of the inputs and of the results; it stands for as long as
both are what they were, and lapses when either differs.  It is a statement that
someone typed, not a cryptographic signature: that is a seal (`seals.py`).
"""

from __future__ import annotations

import datetime as dt
from collections.abc import Sequence
from dataclasses import dataclass
from pathlib import Path
from typing import Literal

from contingency.errors import (
    BusyRecord,
    NoSuchRole,
    OtherSignatory,
    SamePerson,
    SignOffOutOfTurn,
)
from contingency.record.durable import Pause, held, no_pause, write_durably
from contingency.record.persons import name_parts, same_person
from contingency.record.sign_off_file import (
    FILE,
    Content,
    Lapse,
    SignOff,
    SignOffs,
    read_sign_offs,
    written_sign_offs,
)

REQUIRED_ROLES = ("prepared", "checked", "approved")
"""Roles that every report needs, in this order; an estimate may name more."""

KEPT_APART = REQUIRED_ROLES
"""No two of these roles may be signed by one person."""

Standing = Literal["in force", "lapsed", "missing"]


@dataclass(frozen=True, kw_only=True, slots=True)
class Role:
    """One line of the sign-off block, as the estimate has it."""

    role: str
    name: str = ""
    """Who is to sign; empty if the estimate leaves it open."""
    position: str = ""


@dataclass(frozen=True, kw_only=True, slots=True)
class RoleStanding:
    """How one role stands against the content at hand."""

    role: Role
    standing: Standing
    sign_off: SignOff | None
    """The latest sign-off of the role; None if there is none."""
    changed: tuple[str, ...] = ()
    """For a lapsed one: files, or the words `inputs` or `results`, that differ."""
    since: dt.datetime | None = None
    """For a lapsed one: when the change was first noticed; None if only now."""
    results_compared: bool = True
    """False where the results were not at hand and only the inputs were compared."""

    @property
    def sentence(self) -> str:
        """The standing in words, for the page, the refusal and the command line."""
        if self.sign_off is None:
            return f'The sign-off "{self.role.role}" is missing.'
        who = f'"{self.role.role}" by {self.sign_off.name} of {_day(self.sign_off)}'
        if self.standing == "in force":
            rest = "" if self.results_compared else " (inputs compared, results not)"
            return f"The sign-off {who} is in force{rest}."
        noticed = f", noticed on {self.since:%Y-%m-%d}" if self.since else ""
        return (
            f"The sign-off {who} has lapsed: {', '.join(self.changed)} "
            f"changed since{noticed}."
        )


def roles_in_order(lines: Sequence[Role]) -> tuple[Role, ...]:
    """Return the roles of an estimate in its order, the required ones made sure of.

    A required role that the estimate does not name stands where it belongs: after
    the required roles ahead of it.
    """
    roles = list(lines)
    for i, required in enumerate(REQUIRED_ROLES):
        if not any(line.role == required for line in roles):
            before = {*REQUIRED_ROLES[:i]}
            places = [n for n, line in enumerate(roles) if line.role in before]
            roles.insert(places[-1] + 1 if places else 0, Role(role=required))
    return tuple(roles)


def standings(
    sign_offs: SignOffs, *, roles: Sequence[Role], content: Content
) -> tuple[RoleStanding, ...]:
    """Return how each role stands against `content`, in the order of `roles`.

    Parameters
    ----------
    sign_offs : SignOffs
        As read.
    roles : sequence of Role
        As `roles_in_order` gives them.
    content : Content
        What is at hand now.  Without results (empty) only the inputs are compared.
    """
    return tuple(_standing(sign_offs, role, content) for role in roles)


def sign(
    folder: Path,
    *,
    role: str,
    name: str,
    position: str = "",
    comment: str = "",
    conditions: str = "",
    when: dt.datetime,
    roles: Sequence[Role],
    content: Content,
    pause: Pause = no_pause,
) -> SignOff:
    """Record a sign-off in `folder` and return it.

    Parameters
    ----------
    folder : Path
        Where sign_offs.json lies: beside the estimate.
    role : str
        One of `roles`.
    name : str
        Who signs.  Where the estimate names a person for the role, that person.
    position, comment, conditions : str
        Printed on the report.  An empty position is taken from the estimate.
    when : datetime
        With its offset from UTC.
    roles : sequence of Role
        As `roles_in_order` gives them.
    content : Content
        The content that is signed, results included.
    pause : callable
        For tests.

    Raises
    ------
    NoSuchRole
        no-such-role.
    OtherSignatory
        other-signatory.  The name is empty, or the estimate names someone else.
    SamePerson
        same-person.  Preparer, checker and approver must be three people.
    SignOffOutOfTurn
        sign-off-out-of-turn.  A role ahead of this one is missing or has lapsed.
    BusyRecord
        busy-record.
    DamagedRecord
        damaged-record.
    """
    with held(folder / f".{FILE}.lock", what=str(folder / FILE)):
        before = _with_new_lapses(read_sign_offs(folder), roles, content, when)
        line = _role_named(role, roles)
        _refuse_other_signatory(line, name)
        stands = standings(before, roles=roles, content=content)
        _refuse_same_person(line, name, stands)
        _refuse_out_of_turn(line, stands)
        sign_off = SignOff(
            role=line.role,
            name=" ".join(name.split()),
            position=position.strip() or line.position,
            signed_at=when.replace(microsecond=0),
            comment=comment.strip(),
            conditions=conditions.strip(),
            content=content,
        )
        after = SignOffs(given=(*before.given, sign_off), lapses=before.lapses)
        write_durably(folder / FILE, written_sign_offs(after), pause=pause)
    return sign_off


def note_lapses(
    folder: Path, *, roles: Sequence[Role], content: Content, when: dt.datetime
) -> SignOffs:
    """Write down which sign-offs are found lapsed for the first time; return all.

    Nothing is written if nothing new has lapsed, nor where the folder cannot be
    written to or somebody is signing: whoever only looks must be able to.

    Raises
    ------
    DamagedRecord
        damaged-record.
    """
    before = read_sign_offs(folder)
    if _with_new_lapses(before, roles, content, when) == before:
        return before
    try:
        with held(folder / f".{FILE}.lock", what=str(folder / FILE)):
            after = _with_new_lapses(read_sign_offs(folder), roles, content, when)
            write_durably(folder / FILE, written_sign_offs(after))
    except (OSError, BusyRecord):
        return before
    return after


def _standing(sign_offs: SignOffs, role: Role, content: Content) -> RoleStanding:
    sign_off = sign_offs.latest(role.role)
    if sign_off is None:
        return RoleStanding(role=role, standing="missing", sign_off=None)
    changed = _changes(sign_off.content, content)
    if not changed:
        return RoleStanding(
            role=role,
            standing="in force",
            sign_off=sign_off,
            results_compared=bool(content.results),
        )
    lapse = sign_offs.find_lapse(sign_off)
    return RoleStanding(
        role=role,
        standing="lapsed",
        sign_off=sign_off,
        changed=changed,
        since=lapse.noticed_at if lapse else None,
        results_compared=bool(content.results),
    )


def _changes(signed: Content, now: Content) -> tuple[str, ...]:
    """Say what differs between the content signed and the content at hand, in words."""
    if signed.inputs != now.inputs:
        names = sorted({*signed.files, *now.files})
        files = [n for n in names if signed.files.get(n) != now.files.get(n)]
        return tuple(files) or ("inputs",)
    if now.results and signed.results != now.results:
        if signed.tool != now.tool:
            return (f"results (program {signed.tool}, now {now.tool})",)
        return ("results",)
    return ()


def _with_new_lapses(
    sign_offs: SignOffs, roles: Sequence[Role], content: Content, when: dt.datetime
) -> SignOffs:
    found = [
        Lapse(
            role=line.role.role,
            signed_at=line.sign_off.signed_at,
            noticed_at=when.replace(microsecond=0),
        )
        for line in standings(sign_offs, roles=roles, content=content)
        if line.standing == "lapsed" and line.since is None and line.sign_off
    ]
    if not found:
        return sign_offs
    return SignOffs(given=sign_offs.given, lapses=(*sign_offs.lapses, *found))


def _role_named(role: str, roles: Sequence[Role]) -> Role:
    for line in roles:
        if line.role == role:
            return line
    raise NoSuchRole(
        where=f'sign-off "{role}"',
        found="the estimate has no sign-off line with that role.",
        rule="The roles and their order come from estimate.toml, [[sign_off]].",
        remedy="Use one of: " + ", ".join(line.role for line in roles) + ".",
    )


def _refuse_other_signatory(line: Role, name: str) -> None:
    if not name_parts(name):
        raise OtherSignatory(
            where=f'sign-off "{line.role}"',
            found=f'"{name}" is not a name.',
            rule="A sign-off carries the name of the person who gives it.",
            remedy="Give the name in full.",
        )
    if line.name and not same_person(line.name, name):
        raise OtherSignatory(
            where=f'sign-off "{line.role}"',
            found=f"{name} is not the person named for it, {line.name}.",
            rule="A role is signed by the person whom the estimate names for it.",
            remedy="Let that person sign, or change [[sign_off]] in estimate.toml "
            "(earlier sign-offs then lapse).",
        )


def _refuse_same_person(line: Role, name: str, stands: Sequence[RoleStanding]) -> None:
    if line.role not in KEPT_APART:
        return
    for other in stands:
        role = other.role
        if role.role == line.role or role.role not in KEPT_APART:
            continue
        in_force = other.sign_off if other.standing == "in force" else None
        for their_name in (in_force.name if in_force else "", role.name):
            if same_person(name, their_name):
                raise SamePerson(
                    where=f'sign-off "{line.role}"',
                    found=f'{name} and {their_name}, who stands for "{role.role}", '
                    "may be one person.",
                    rule="Preparer, checker and approver are three different people.",
                    remedy="Let another person sign; if they are two people, write "
                    "both names in full.",
                )


def _refuse_out_of_turn(line: Role, stands: Sequence[RoleStanding]) -> None:
    for ahead in stands:
        if ahead.role.role == line.role:
            return
        if ahead.standing != "in force":
            raise SignOffOutOfTurn(
                where=f'sign-off "{line.role}"',
                found=ahead.sentence,
                rule="Roles sign in the order of estimate.toml, each the same content.",
                remedy=f'Let "{ahead.role.role}" sign first.',
            )


def _day(sign_off: SignOff) -> str:
    return f"{sign_off.signed_at:%Y-%m-%d}"
