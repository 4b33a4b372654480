"""Typed sign-offs: bound to content, in turn, by different people."""

import datetime as dt
import json

import pytest

from contingency.errors import (
    BusyRecord,
    DamagedRecord,
    NoSuchRole,
    OtherSignatory,
    SamePerson,
    SignOffOutOfTurn,
)
from contingency.record import durable, sign_off_file, sign_offs
from contingency.record.sign_off_file import Content, read_sign_offs
from contingency.record.sign_offs import Role, roles_in_order

WHEN = dt.datetime(2026, 4, 2, 9, 30, tzinfo=dt.UTC)
LATER = dt.datetime(2026, 4, 20, 9, 30, tzinfo=dt.UTC)
ROLES = roles_in_order(
    [
        Role(role="prepared", name="Anna Example", position="Cost engineer"),
        Role(role="checked", name="Ben Sample"),
        Role(role="risk owner"),
        Role(role="approved"),
    ]
)
CONTENT = Content(
    inputs="a" * 64,
    results="b" * 64,
    tool="0.1.0",
    files={"estimate.toml": "1", "packages.csv": "2"},
)
CHANGED = Content(
    inputs="c" * 64,
    results="d" * 64,
    tool="0.1.0",
    files={"estimate.toml": "1", "packages.csv": "3", "events.csv": "4"},
)


def sign(folder, role, name, *, content=CONTENT, when=WHEN, **more):
    return sign_offs.sign(
        folder, role=role, name=name, when=when, roles=ROLES, content=content, **more
    )


def standings(folder, content=CONTENT):
    return sign_offs.standings(read_sign_offs(folder), roles=ROLES, content=content)


@pytest.fixture
def signed(tmp_path):
    """A folder in which every role has signed."""
    sign(tmp_path, "prepared", "Anna Example")
    sign(tmp_path, "checked", "Ben Sample", conditions="Recheck the piling rates.")
    sign(tmp_path, "risk owner", "Anna Example")
    sign(tmp_path, "approved", "Cora Specimen", position="Sponsor", comment="Agreed.")
    return tmp_path


def test_a_sign_off_is_read_back_as_it_was_given(signed):
    """Role, name, position, date, comment, conditions and content survive the file."""
    given = read_sign_offs(signed).given

    assert [s.role for s in given] == ["prepared", "checked", "risk owner", "approved"]
    assert given[0].position == "Cost engineer"  # from the estimate's line
    assert given[1].conditions == "Recheck the piling rates."
    assert (given[3].position, given[3].comment) == ("Sponsor", "Agreed.")
    assert given[3].signed_at == WHEN
    assert given[3].content == CONTENT
    assert [line.standing for line in standings(signed)] == ["in force"] * 4


def test_any_change_of_the_inputs_makes_all_lapse(signed):
    """Each lapsed sign-off says which files changed."""
    stands = standings(signed, CHANGED)

    assert {line.standing for line in stands} == {"lapsed"}
    assert stands[0].changed == ("events.csv", "packages.csv")
    assert "lapsed: events.csv, packages.csv changed since" in stands[0].sentence


def test_other_results_of_the_same_inputs_make_it_lapse(signed):
    """A sign-off is bound to the figures too; another program version is named."""
    other = Content(inputs=CONTENT.inputs, results="e" * 64, tool="0.2.0")

    assert standings(signed, other)[0].changed == (
        "results (program 0.1.0, now 0.2.0)",
    )


def test_without_results_only_the_inputs_are_compared(signed):
    """A check without simulation says that it left the results aside."""
    known = Content(inputs=CONTENT.inputs, results="", tool="0.1.0")
    line = standings(signed, known)[0]

    assert (line.standing, line.results_compared) == ("in force", False)
    assert "inputs compared, results not" in line.sentence


def test_the_day_when_a_lapse_was_noticed_is_kept(signed):
    """Noted once, with the first date; the sign-off revives with its content."""
    for when in (LATER, LATER + dt.timedelta(days=9)):
        sign_offs.note_lapses(signed, roles=ROLES, content=CHANGED, when=when)

    line = standings(signed, CHANGED)[1]
    assert line.since == LATER
    assert line.sentence.endswith("changed since, noticed on 2026-04-20.")
    assert standings(signed)[1].standing == "in force"


def test_nothing_is_written_while_nothing_lapses(signed):
    """Looking leaves the file as it is."""
    before = (signed / sign_off_file.FILE).read_bytes()
    sign_offs.note_lapses(signed, roles=ROLES, content=CONTENT, when=LATER)

    assert (signed / sign_off_file.FILE).read_bytes() == before


def test_signing_again_adds_a_line_and_counts(signed):
    """The history stays; the latest line of a role is the one in force."""
    sign(signed, "prepared", "Anna Example", content=CHANGED, when=LATER)

    assert len(read_sign_offs(signed).given) == 5
    assert [line.standing for line in standings(signed, CHANGED)] == [
        "in force",
        "lapsed",
        "lapsed",
        "lapsed",
    ]


def test_roles_sign_in_turn(tmp_path):
    """Nobody checks what is not prepared, nor approves what is not checked."""
    with pytest.raises(SignOffOutOfTurn, match='"prepared" is missing'):
        sign(tmp_path, "checked", "Ben Sample")
    sign(tmp_path, "prepared", "Anna Example")
    sign(tmp_path, "checked", "Ben Sample")
    with pytest.raises(SignOffOutOfTurn, match='"risk owner" is missing'):
        sign(tmp_path, "approved", "Cora Specimen")

    assert len(read_sign_offs(tmp_path).given) == 2


def test_a_lapsed_sign_off_ahead_blocks_the_next(signed):
    """A checker signs what the preparer signed, not something newer."""
    with pytest.raises(SignOffOutOfTurn, match="lapsed"):
        sign(signed, "checked", "Ben Sample", content=CHANGED)


@pytest.mark.parametrize(
    "name", ["Ben Sample", "SAMPLE, Ben", "Dr Bén Sample", "B. Sample"]
)
def test_the_checker_cannot_approve(tmp_path, name):
    """However the name is written."""
    sign(tmp_path, "prepared", "Anna Example")
    sign(tmp_path, "checked", "Ben Sample")
    sign(tmp_path, "risk owner", "Dan Instance")
    with pytest.raises(SamePerson):
        sign(tmp_path, "approved", name)

    assert len(read_sign_offs(tmp_path).given) == 3


def test_who_prepared_an_earlier_content_may_check_this_one(tmp_path):
    """Only sign-offs in force and the names in the estimate keep people apart."""
    free = roles_in_order([])
    for role, name, content in (
        ("prepared", "Anna Example", CONTENT),
        ("prepared", "Ben Sample", CHANGED),
        ("checked", "Anna Example", CHANGED),
    ):
        sign_offs.sign(
            tmp_path, role=role, name=name, when=WHEN, roles=free, content=content
        )

    assert len(read_sign_offs(tmp_path).given) == 3


@pytest.mark.parametrize(
    ("role", "name", "fault"),
    [
        ("reviewed", "Ben Sample", NoSuchRole),
        ("prepared", "Eve Other", OtherSignatory),
        ("prepared", " - ", OtherSignatory),
    ],
)
def test_a_sign_off_that_is_refused_leaves_no_file(tmp_path, role, name, fault):
    """A wrong role, a person whom the estimate does not name, no name at all."""
    with pytest.raises(fault):
        sign(tmp_path, role, name)

    assert not (tmp_path / sign_off_file.FILE).exists()


def test_the_three_required_roles_are_always_there():
    """An estimate may add roles; what it forgets stands where it belongs."""
    lines = [Role(role="approved"), Role(role="finance")]

    assert [line.role for line in roles_in_order(lines)] == [
        "prepared",
        "checked",
        "approved",
        "finance",
    ]
    assert [line.role for line in roles_in_order([])] == list(sign_offs.REQUIRED_ROLES)


@pytest.mark.parametrize(
    "damage",
    [
        lambda data: data.update(format="other/1"),
        lambda data: data["sign_offs"][0].pop("name"),
        lambda data: data["sign_offs"][0].update(signed_at="2026-04-02T09:30:00"),
        lambda data: data["sign_offs"][0].update(name=7),
        lambda data: data["sign_offs"][0]["content"].update(files=[]),
        lambda data: data.update(lapses=None),
    ],
    ids=["format", "no name", "no offset", "a number", "a list", "no lapses"],
)
def test_a_file_changed_by_hand_is_refused(signed, damage):
    """It is never guessed at, and never overwritten."""
    path = signed / sign_off_file.FILE
    data = json.loads(path.read_bytes())
    damage(data)
    path.write_text(json.dumps(data), encoding="utf-8")
    before = path.read_bytes()

    with pytest.raises(DamagedRecord):
        sign(signed, "prepared", "Anna Example")
    assert path.read_bytes() == before


@pytest.mark.parametrize(
    "content",
    [b"", b"\xff", b"[]", b"[" * 100_000, b"null"],
    ids=["empty", "not UTF-8", "a list", "deep", "null"],
)
def test_a_file_that_is_no_json_object_is_refused(tmp_path, content):
    """Cut short, other bytes, other JSON, nested without end."""
    (tmp_path / sign_off_file.FILE).write_bytes(content)

    with pytest.raises(DamagedRecord):
        read_sign_offs(tmp_path)


def test_two_cannot_sign_at_once(tmp_path):
    """The second is told so and nothing is lost."""

    def second(step):
        if step.startswith("rename "):
            with pytest.raises(BusyRecord):
                sign(tmp_path, "prepared", "Anna Example")

    sign(tmp_path, "prepared", "Anna Example", pause=second)

    assert len(read_sign_offs(tmp_path).given) == 1


def test_a_crash_leaves_the_old_file_or_the_new(signed):
    """Whatever step it happens in."""

    class Crash(Exception):
        pass

    steps = []
    sign(signed, "prepared", "Anna Example", pause=steps.append)
    old = (signed / sign_off_file.FILE).read_bytes()
    assert len(steps) > 4
    for crash_at in range(len(steps)):
        seen = []

        def crash(step, crash_at=crash_at, seen=seen):
            if len(seen) == crash_at:
                raise Crash
            seen.append(step)

        with pytest.raises(Crash):
            sign(signed, "prepared", "Anna Example", pause=crash)
        new = (signed / sign_off_file.FILE).read_bytes()
        complete = steps[crash_at].startswith("renamed")
        assert (new != old) == complete
        old = new


def test_the_lock_ends_with_its_holder(tmp_path):
    """Released on leaving, also by an error; nothing stale is left."""
    lock = tmp_path / "lock"
    with pytest.raises(ZeroDivisionError), durable.held(lock, what="a record"):
        _ = 1 / 0
    with (
        durable.held(lock, what="a record"),
        pytest.raises(BusyRecord),
        durable.held(lock, what="a record"),
    ):
        pass
