"""A process apart: answers come back, and nothing that happens there gets out."""

import os
import time

import pytest

from contingency.errors import NoSuchRole, TookTooLong, UnreadableReport
from contingency.record.apart import Apart

HERE = "tests.record.test_apart:"


def sleep(arguments, blobs):
    time.sleep(arguments["seconds"])
    return {}, blobs


def fill_memory(arguments, blobs):
    del blobs
    return {"bytes": len(bytearray(arguments["bytes"]))}, []


def die(arguments, blobs):
    del blobs
    os._exit(arguments["status"])


def shout(arguments, blobs):
    print("a library prints", flush=True)
    os.write(1, b"and writes\n")
    return arguments, blobs


def stumble(*_):
    raise ZeroDivisionError("a library stumbles")


def refuse(*_):
    raise NoSuchRole("a", "b", "c", "d")


def no_json(*_):
    return {"nan": float("nan")}, []


@pytest.fixture(scope="module")
def apart():
    with Apart(megabytes=2048) as process:
        yield process


def test_json_and_bytes_come_back_as_they_went(apart):
    """Large ones too, and one process does task after task."""
    blobs = [b"", bytes(3_000_000), b"\n"]
    for _ in range(2):
        assert apart.call(
            "contingency.record.apart:echo", {"a": [1, "ü"]}, blobs, seconds=60
        ) == ({"a": [1, "ü"]}, blobs)


def test_a_task_that_takes_too_long_is_ended(apart):
    """And the next one finds a new process."""
    start = time.monotonic()
    with pytest.raises(TookTooLong, match="more than 1 seconds"):
        apart.call(HERE + "sleep", {"seconds": 600}, seconds=1)
    assert time.monotonic() - start < 30

    assert apart.call(HERE + "sleep", {"seconds": 0}, seconds=60) == ({}, [])


def test_a_task_that_wants_too_much_memory_is_ended(apart):
    """The memory of the machine is not its own."""
    with pytest.raises(TookTooLong, match="2,048 MB of memory"):
        apart.call(HERE + "fill_memory", {"bytes": 8 * 2**30}, seconds=60)

    assert apart.call(HERE + "fill_memory", {"bytes": 10}, seconds=60)[0] == {
        "bytes": 10
    }


def test_a_process_that_dies_is_an_error_of_ours(apart):
    """As when a library written in C falls over a file."""
    for status in (0, 1, 139):
        with pytest.raises(UnreadableReport, match="died"):
            apart.call(HERE + "die", {"status": status}, seconds=60)


def test_what_a_library_prints_stays_there(apart):
    """It cannot get between the answers."""
    assert apart.call(HERE + "shout", {"a": 1}, seconds=60) == ({"a": 1}, [])


def test_an_unforeseen_error_is_an_unreadable_report(apart):
    """With its words, short."""
    with pytest.raises(UnreadableReport, match="ZeroDivisionError: a library"):
        apart.call(HERE + "stumble", {}, seconds=60)
    with pytest.raises(UnreadableReport):
        apart.call(HERE + "no_json", {}, seconds=60)
    with pytest.raises(UnreadableReport):
        apart.call(HERE + "no_such_task", {}, seconds=60)


def test_an_error_on_purpose_comes_through(apart):
    """With its class and its four parts."""
    with pytest.raises(NoSuchRole) as refused:
        apart.call(HERE + "refuse", {}, seconds=60)

    assert refused.value.args == ("a", "b", "c", "d")
    assert refused.value.remedy == "d"
