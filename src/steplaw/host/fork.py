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
from typing import Any, NoReturn

from steplaw.host.limits import MEGABYTE, Limits
from steplaw.wording import describe

Reply = dict[str, Any]


def forked(work: Callable[[], Reply], limits: Limits) -> Reply:
    """Run a piece of work in a fork of this process.

    Parameters
    ----------
    work : callable
        Gives a JSON object.
    limits : Limits
        Time and memory.

    Returns
    -------
    dict
        What `work` gave, or ``{"failed": {"kind", "message"}}``.
    """
    replies = list(forked_stream(lambda: iter((work(),)), limits))
    return replies[-1]


def forked_stream(work: Callable[[], Iterator[Reply]], limits: Limits) -> Iterator[Reply]:
    """Run work that gives several replies, each passed on as it comes; see `forked`."""
    reading, writing = os.pipe()
    pid = os.fork()
    if pid == 0:
        os.close(reading)
        _child(work, writing, limits)
    os.close(writing)
    ended = False
    try:
        for reply in _replies(reading, limits.seconds):
            ended = "failed" in reply or "done" in reply
            yield reply
            if "failed" in reply and reply["failed"]["kind"] == "time":
                break
    finally:
        os.close(reading)
        if not _gone(pid):
            os.kill(pid, signal.SIGKILL)
            _, status = os.waitpid(pid, 0)
        else:
            status = _STATUS.pop(pid)
    if not ended:
        yield {"failed": _death(status)}


_STATUS: dict[int, int] = {}


def _gone(pid: int, patience: float = 0.5) -> bool:
    """Whether a child has ended, waiting a moment for one that is about to."""
    end = time.monotonic() + patience
    while True:
        done, status = os.waitpid(pid, os.WNOHANG)
        if done:
            _STATUS[pid] = status
            return True
        if time.monotonic() > end:
            return False
        time.sleep(0.001)


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
    """Give the reply of a run that failed."""
    return {"failed": {"kind": kind, "message": message}}


def _death(status: int) -> dict[str, str]:
    if os.WIFSIGNALED(status):
        number = os.WTERMSIG(status)
        name = signal.Signals(number).name
        if number == signal.SIGKILL:
            return {"kind": "memory", "message": "was killed (SIGKILL), as for want of memory"}
        return {"kind": "crash", "message": f"crashed the interpreter ({name})"}
    code = os.WEXITSTATUS(status)
    return {"kind": "exit", "message": f"left the process without a result (status {code})"}


def _child(work: Callable[[], Iterator[Reply]], writing: int, limits: Limits) -> NoReturn:
    signal.signal(signal.SIGINT, signal.SIG_IGN)
    silence()
    _limit_memory(limits.megabytes)
    try:
        for reply in work():
            _send(writing, reply)
        _send(writing, {"done": True})
    except MemoryError:
        _send(writing, failure("memory", f"needs more than {limits.megabytes} MB of memory"))
    except SystemExit as error:
        _send(writing, failure("exit", f"called sys.exit({error.code!r})"))
    except BaseException as error:
        _send(writing, failure("raised", describe(error)))
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
    try:
        import resource

        with open("/proc/self/statm") as file:  # noqa: PTH123 - no pathlib in the child
            held = int(file.read().split()[0]) * resource.getpagesize()
        limit = held + megabytes * MEGABYTE
        resource.setrlimit(resource.RLIMIT_AS, (limit, limit))
    except (ImportError, OSError, ValueError):
        return
