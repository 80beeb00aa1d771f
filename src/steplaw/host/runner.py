"""The parent's side of a host: a process that loads one subject and runs it on request."""

from __future__ import annotations

import json
import os
import select
import signal
import subprocess
import sys
from collections.abc import Iterator, Mapping, Sequence
from contextlib import suppress
from typing import Any, TextIO

from steplaw.errors import CallError, SubjectError
from steplaw.feed import FeedSpec
from steplaw.host.asking import Asker, Reply, Run, RunFailed, Size
from steplaw.host.limits import Limits
from steplaw.subject import SubjectRef

__all__ = ["HostProcess", "Run", "RunFailed", "Runner"]


class HostProcess:
    """A host: a process of its own that loads one subject and does what it is asked.

    Parameters
    ----------
    job : mapping
        As `Asker.job` gives.

    Raises
    ------
    CallError
        If this system has no forks.

    Notes
    -----
    It is started and left to load the subject: `introduce` waits for that. So several of them load
    at the same time.
    """

    #: Longest time to load a subject, in seconds, where the limit on a run is not above it.
    LOAD_SECONDS = 60.0

    def __init__(self, job: Mapping[str, Any]) -> None:
        if not hasattr(os, "fork"):
            raise CallError(
                "runs are made in forked processes, which this system does not have",
                "use Linux, macOS or the Windows Subsystem for Linux",
            )
        subject = job["subject"]
        self.subject = f"{subject['place']}:{subject['name']}"
        self._seconds = max(self.LOAD_SECONDS, job["limits"]["seconds"])
        self._process, self._replies = self._start()
        self._ask(job)

    def _start(self) -> tuple[subprocess.Popen[bytes], TextIO]:
        reading, writing = os.pipe()
        process = subprocess.Popen(
            [sys.executable, "-m", "steplaw.host", str(writing)],
            stdin=subprocess.PIPE,
            pass_fds=(writing,),
            env={**os.environ, "PYTHONHASHSEED": "0", "PYTHONPATH": _import_path()},
            start_new_session=True,
        )
        os.close(writing)
        return process, os.fdopen(reading, encoding="utf-8")

    def introduce(self) -> Reply:
        """Wait until the subject is loaded."""
        if not select.select([self._replies], [], [], self._seconds)[0]:
            raise SubjectError(f"{self.subject} takes more than {self._seconds:g} s to import")
        return self._reply()

    def answers(self, request: Mapping[str, Any]) -> Iterator[Reply]:
        """Have the host do what is asked."""
        self._ask(request)
        while True:
            reply = self._reply()
            yield reply
            if "failed" in reply or "done" in reply or "error" in reply:
                return

    def close(self) -> None:
        """End the host and whatever runs in it."""
        with suppress(ProcessLookupError):
            os.killpg(self._process.pid, signal.SIGKILL)
        self._process.wait()
        self._replies.close()
        if self._process.stdin is not None:
            with suppress(BrokenPipeError):
                self._process.stdin.close()

    def _ask(self, request: Mapping[str, Any]) -> None:
        assert self._process.stdin is not None
        try:
            self._process.stdin.write(json.dumps(request).encode() + b"\n")
            self._process.stdin.flush()
        except BrokenPipeError:
            status = self._process.wait()
            raise SubjectError(
                f"the process that runs {self.subject} has ended ({_ended(status)})"
            ) from None

    def _reply(self) -> dict[str, Any]:
        line = self._replies.readline()
        if not line:
            status = self._process.wait()
            raise SubjectError(
                f"the process that runs {self.subject} has ended without an answer "
                f"({_ended(status)})"
            )
        reply: dict[str, Any] = json.loads(line)
        return reply


class Runner(Asker):
    """Asks a host of its own.

    Parameters
    ----------
    ref, feed, names, limits, probes, first, kept
        As for `Asker`.

    Raises
    ------
    CallError
        If this system has no forks, or a feed given in Python cannot be used.
    """

    def __init__(
        self,
        ref: SubjectRef,
        feed: FeedSpec | None,
        names: Sequence[str] = ("n",),
        limits: Limits | None = None,
        *,
        probes: bool = True,
        first: Size | None = None,
        kept: bool = False,
    ) -> None:
        super().__init__(ref, feed, names, limits, probes=probes, first=first, kept=kept)
        self._host = HostProcess(self.job)

    def introduce(self) -> Reply:
        """Wait until the subject is loaded."""
        return self._host.introduce()

    def answers(self, request: Mapping[str, Any]) -> Iterator[Reply]:
        """Have the host do what is asked."""
        return self._host.answers(request)

    def close(self) -> None:
        """End the host and whatever runs in it."""
        self._host.close()


def _ended(status: int) -> str:
    if status >= 0:
        return f"status {status}"
    try:
        return signal.Signals(-status).name
    except ValueError:
        return f"signal {-status}"


def _import_path() -> str:
    """Give the host the modules that this process can import, steplaw's own place included."""
    return os.pathsep.join(p for p in sys.path if p)
