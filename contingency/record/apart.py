"""Work on a hostile file in a process of its own, with a limit on time and memory.

A PDF from somewhere else can be made to keep a parser busy for ever, to unpack a few
bytes into all the memory there is, or to bring a library down.  So nothing of it is
parsed in the process of the user: the bytes go to a second process, which answers in
JSON and bytes.  It is killed when its time is over, and everything that goes wrong in
it comes back as one of our own errors.
"""

from __future__ import annotations

import importlib
import json
import os
import select
import subprocess
import sys
import time
from collections.abc import Callable, Sequence
from types import TracebackType
from typing import IO, Any, Self, cast

from contingency import errors
from contingency.errors import ContingencyError, TookTooLong, UnreadableReport

Answer = tuple[dict[str, Any], list[bytes]]
"""What a task gives back: something that JSON can hold, and bytes beside it."""

Task = Callable[[dict[str, Any], list[bytes]], Answer]
"""A function that can be called apart: JSON and bytes in, JSON and bytes out."""

_START = (
    "import sys; sys.path[:] = sys.argv[2:]; "
    "from contingency.record.apart import serve; serve(int(sys.argv[1]))"
)

_LONGEST_HEAD = 64 * 2**20
"""Bytes of JSON in one answer; more is no answer of ours."""


class Apart:
    """A process that does one task after the other; a new one after each mishap.

    Parameters
    ----------
    megabytes : int
        Memory that the process may have, addresses reserved by libraries included.

    Examples
    --------
    >>> with Apart() as apart:
    ...     apart.call("contingency.record.apart:echo", {"a": 1}, [b"b"], seconds=60)
    ({'a': 1}, [b'b'])
    """

    def __init__(self, *, megabytes: int = 4096) -> None:
        self._megabytes = megabytes
        self._process: subprocess.Popen[bytes] | None = None

    def __enter__(self) -> Self:
        return self

    def __exit__(
        self,
        kind: type[BaseException] | None,
        fault: BaseException | None,
        trace: TracebackType | None,
    ) -> None:
        self.close()

    def close(self) -> None:
        """End the process, if there is one."""
        process, self._process = self._process, None
        if process is not None:
            process.kill()
            process.wait()
            for pipe in (process.stdin, process.stdout):
                if pipe is not None:
                    pipe.close()

    def call(
        self,
        task: str,
        arguments: dict[str, Any],
        blobs: Sequence[bytes] = (),
        *,
        seconds: float,
    ) -> Answer:
        """Return what a task answers.

        Parameters
        ----------
        task : str
            `module:function`; see `Task`.
        arguments : dict
            What JSON can hold.
        blobs : sequence of bytes
            Passed on as they are.
        seconds : float
            Time until the process is killed, its start included.

        Raises
        ------
        TookTooLong
            took-too-long.  Time or memory ran out.
        UnreadableReport
            unreadable-report.  The task or a library stumbled over the file.
        ContingencyError
            Whatever the task raised on purpose.
        """
        deadline = time.monotonic() + seconds
        try:
            process = self._running()
            _send(
                cast("IO[bytes]", process.stdin),
                {"task": task, "arguments": arguments},
                blobs,
            )
            head, parts = _receive_until(process, deadline)
        except TimeoutError:
            self.close()
            raise _out_of(f"{seconds:g} seconds") from None
        except (BrokenPipeError, EOFError, ValueError):
            self.close()
            raise _stumbled("the process that read it died.") from None
        if "answer" in head:
            return head["answer"], parts
        if "memory" in head:
            self.close()
        raise _error_from(head, self._megabytes)

    def _running(self) -> subprocess.Popen[bytes]:
        if self._process is None or self._process.poll() is not None:
            self.close()
            self._process = subprocess.Popen(
                [sys.executable, "-c", _START, str(self._megabytes), *sys.path],
                stdin=subprocess.PIPE,
                stdout=subprocess.PIPE,
                stderr=subprocess.DEVNULL,
            )
        return self._process


def echo(arguments: dict[str, Any], blobs: list[bytes]) -> Answer:
    """Return what came in."""
    return arguments, blobs


def serve(megabytes: int) -> None:
    """Do tasks as they come in, until the other side goes away.

    Answers go to the standard output as it was at the start; whatever a library
    prints later goes nowhere.
    """
    _limit_memory(megabytes)
    answers = os.fdopen(os.dup(1), "wb")
    os.dup2(2, 1)
    while True:
        try:
            request, blobs = _receive(sys.stdin.buffer)
        except EOFError:
            return
        head, parts = _done(request, blobs)
        try:
            _send(answers, head, parts)
        except BrokenPipeError:
            return


def _done(request: dict[str, Any], blobs: list[bytes]) -> Answer:
    """Do one task; whatever it raises becomes a part of the answer."""
    module, _, name = request["task"].partition(":")
    try:
        task: Task = getattr(importlib.import_module(module), name)
        answer, parts = task(request["arguments"], blobs)
        json.dumps(answer, allow_nan=False)
    except ContingencyError as fault:
        return {"error": [type(fault).__name__, *fault.args]}, []
    except MemoryError:
        return {"memory": True}, []
    except Exception as fault:  # noqa: BLE001  (any library may raise anything)
        return {"fault": f"{type(fault).__name__}: {fault}"[:300]}, []
    else:
        return {"answer": answer}, parts


def _error_from(head: dict[str, Any], megabytes: int) -> ContingencyError:
    """Make the error anew that ended a task."""
    if "memory" in head:
        return _out_of(f"{megabytes:,} MB of memory")
    if "error" in head:
        name, *parts = head["error"]
        kind = getattr(errors, name, None)
        if isinstance(kind, type) and issubclass(kind, errors.RecordError):
            fault = kind.__new__(kind)
            ContingencyError.__init__(fault, *parts)
            return fault
        if len(parts) == 4:
            return UnreadableReport(*parts)
    return _stumbled(f"reading it failed ({head.get('fault', 'no reason given')}).")


def _out_of(limit: str) -> TookTooLong:
    return TookTooLong(
        where="the report",
        found=f"reading or computing it took more than {limit}.",
        rule="A report is taken apart within limits, as it may be hostile.",
        remedy="Raise the limit if the report is known to be large, or treat it as "
        "not verified.",
    )


def _stumbled(found: str) -> UnreadableReport:
    return UnreadableReport(
        where="the report",
        found=found,
        rule="A report is a PDF that this program wrote, sealed or not.",
        remedy="Ask for the file again from where it was issued.",
    )


def _limit_memory(megabytes: int) -> None:
    if sys.platform != "win32":
        import resource

        limit = megabytes * 2**20
        resource.setrlimit(resource.RLIMIT_AS, (limit, limit))
        resource.setrlimit(resource.RLIMIT_CORE, (0, 0))


# --- Frames: the length of the JSON, the JSON with the lengths of the bytes, the bytes


def _send(pipe: IO[bytes], head: dict[str, Any], blobs: Sequence[bytes]) -> None:
    text = json.dumps({**head, "bytes": [len(blob) for blob in blobs]}).encode()
    pipe.write(len(text).to_bytes(8, "big"))
    pipe.write(text)
    for blob in blobs:
        pipe.write(blob)
    pipe.flush()


def _receive(pipe: IO[bytes]) -> Answer:
    return _frame(lambda size: _exactly(pipe.read(size), size))


def _receive_until(process: subprocess.Popen[bytes], deadline: float) -> Answer:
    """Receive one frame, or raise TimeoutError when the deadline has passed."""
    handle = cast("IO[bytes]", process.stdout).fileno()

    def read(size: int) -> bytes:
        parts, left = [], size
        while left:
            wait = deadline - time.monotonic()
            if wait <= 0 or not select.select([handle], [], [], wait)[0]:
                raise TimeoutError
            part = os.read(handle, min(left, 2**20))
            if not part:
                raise EOFError
            parts.append(part)
            left -= len(part)
        return b"".join(parts)

    return _frame(read)


def _frame(read: Callable[[int], bytes]) -> Answer:
    length = int.from_bytes(read(8), "big")
    if length > _LONGEST_HEAD:
        raise ValueError(f"{length} bytes of JSON")
    head = json.loads(read(length))
    return head, [read(size) for size in head.pop("bytes")]


def _exactly(content: bytes, size: int) -> bytes:
    if len(content) < size:
        raise EOFError
    return content
