"""One run in a forked process of its own.

Every run starts from the same state (caches, module variables, hash seed), and whatever becomes of
it (an exit, a crash, a limit) ends that process alone.
"""

from __future__ import annotations

import json
import os
import select
import signal
import time
from collections.abc import Callable, Iterator
from contextlib import suppress
from typing import Any, NoReturn

from steplaw.host.limits import MEGABYTE, Limits
from steplaw.wording import describe, one_line

Reply = dict[str, Any]


def forked_stream(work: Callable[[], Iterator[Reply]], limits: Limits) -> Iterator[Reply]:
    """Do a piece of work in a fork of this process.

    Parameters
    ----------
    work : callable
        Gives an iterator of JSON objects; one that has ``failed`` in it is its last.
    limits : Limits
        Time for all of it, and memory.

    Yields
    ------
    dict
        What `work` gave, each as it comes, and ``{"done": True}`` at the end. Work that does not
        end well ends with ``{"failed": {"kind", "message"}}`` instead.
    """
    reading, writing = os.pipe()
    pid = os.fork()
    if pid == 0:
        os.close(reading)
        _child(work, writing, limits)
    os.close(writing)
    last: Reply = {}
    status = None
    try:
        for last in _replies(reading, limits.seconds):
            yield last
            if _is_last(last):
                break
    finally:
        os.close(reading)
        status = _end(pid, patience=0.0 if _is_cut_short(last) else 1.0)
    if not _is_last(last):
        yield {"failed": _death(status)}


def _is_last(reply: Reply) -> bool:
    return "failed" in reply or "done" in reply


def _is_cut_short(reply: Reply) -> bool:
    return bool(reply.get("failed", {}).get("kind") == "time")


def _end(pid: int, patience: float) -> int:
    """Wait a moment for a child that is about to end, then end it; give its status."""
    end = time.monotonic() + patience
    while True:
        done, status = os.waitpid(pid, os.WNOHANG)
        if done:
            return status
        if time.monotonic() > end:
            with suppress(ProcessLookupError):
                os.kill(pid, signal.SIGKILL)
            return os.waitpid(pid, 0)[1]
        time.sleep(0.0005)


def _replies(reading: int, seconds: float) -> Iterator[Reply]:
    buffer = bytearray()
    end = time.monotonic() + seconds
    while True:
        left = end - time.monotonic()
        ready = select.select([reading], [], [], max(left, 0))[0]
        if not ready:
            yield failure("time", f"ran past the limit of {seconds:g} s")
            return
        chunk = os.read(reading, 1 << 20)
        if not chunk:
            return
        buffer += chunk
        *whole, rest = buffer.split(b"\n")
        buffer = bytearray(rest)
        for line in whole:
            yield json.loads(line)


def failure(kind: str, message: str) -> Reply:
    """Give the reply of work that did not end well.

    Parameters
    ----------
    kind, message : str
        As in `steplaw.host.limits.Failure`.
    """
    return {"failed": {"kind": kind, "message": message}}


def _death(status: int) -> dict[str, str]:
    if os.WIFSIGNALED(status):
        number = os.WTERMSIG(status)
        if number == signal.SIGKILL:
            return {"kind": "memory", "message": "was killed (SIGKILL), as for want of memory"}
        return {"kind": "crash", "message": f"crashed the interpreter ({_signal_name(number)})"}
    code = os.WEXITSTATUS(status)
    return {"kind": "exit", "message": f"left the process without a result (status {code})"}


def _signal_name(number: int) -> str:
    try:
        return signal.Signals(number).name
    except ValueError:
        return f"signal {number}"


def _child(work: Callable[[], Iterator[Reply]], writing: int, limits: Limits) -> NoReturn:
    signal.signal(signal.SIGINT, signal.SIG_IGN)
    silence()
    _limit_memory(limits.megabytes)
    try:
        for reply in work():
            _send(writing, reply)
            if "failed" in reply:
                break
        else:
            _send(writing, {"done": True})
    except MemoryError:
        # The frames of the subject still hold what they took: saying so takes some more.
        _lift_memory_limit()
        _send(writing, failure("memory", f"needs more than {limits.megabytes} MB of memory"))
    except SystemExit as error:
        _send(writing, failure("exit", f"called sys.exit({one_line(repr(error.code))})"))
    except BaseException as error:
        _send(writing, failure("fault", f"met a fault of steplaw itself: {describe(error)}"))
    finally:
        os._exit(0)


def _send(writing: int, reply: Reply) -> None:
    data = memoryview(json.dumps(reply).encode() + b"\n")
    while data:
        data = data[os.write(writing, data) :]


def silence() -> None:
    """Turn standard input, output and error away from the terminal."""
    null = os.open(os.devnull, os.O_RDWR)
    for number in (0, 1, 2):
        os.dup2(null, number)


def _limit_memory(megabytes: int) -> None:
    with suppress(ImportError, OSError, ValueError):
        import resource

        with open("/proc/self/statm") as file:  # noqa: PTH123 - no pathlib in the child
            held = int(file.read().split()[0]) * resource.getpagesize()
        most = resource.getrlimit(resource.RLIMIT_AS)[1]
        resource.setrlimit(resource.RLIMIT_AS, (held + megabytes * MEGABYTE, most))


def _lift_memory_limit() -> None:
    with suppress(ImportError, OSError, ValueError):
        import resource

        most = resource.getrlimit(resource.RLIMIT_AS)[1]
        resource.setrlimit(resource.RLIMIT_AS, (most, most))
