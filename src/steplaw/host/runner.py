"""The parent's side: ask the host for runs and read its replies."""

from __future__ import annotations

import json
import os
import select
import signal
import subprocess
import sys
from collections.abc import Callable, Iterator, Mapping, Sequence
from contextlib import suppress
from dataclasses import asdict, dataclass
from types import TracebackType
from typing import Any, Self, TextIO, TypeGuard

from steplaw.errors import CallError, SteplawError, SubjectError
from steplaw.feed import FeedError, FeedSpec
from steplaw.host.limits import Failure, Limits
from steplaw.host.pickled import PickledFeed
from steplaw.subject import SubjectRef
from steplaw.tally.model import Tally

Size = Mapping[str, int]


@dataclass(frozen=True, slots=True)
class Run:
    """One counted run, or all runs of a size that gave the same tally.

    Parameters
    ----------
    at : mapping of str to int
        The size.
    draw : int
        The draw, or the number of the first input that gave this tally.
    tally : Tally
        The counts.
    own_steps : int
        Steps in the subject's own body.
    sites : tuple
        Steps of every block: file, function, first line, block, line, steps.
    random : bool
        Whether the input was drawn from the generator.
    times : int
        Inputs that gave this tally.
    input : str
        The first of them, for a person to read; empty for draws.
    """

    at: Size
    draw: int
    tally: Tally
    own_steps: int
    sites: tuple[tuple[str, str, int, int, int, int], ...]
    random: bool = False
    times: int = 1
    input: str = ""
    unread: str | None = None


class RunFailed(Exception):
    """A run that did not end well.

    Parameters
    ----------
    failure : Failure
        What became of it.
    """

    def __init__(self, failure: Failure) -> None:
        super().__init__(failure.message)
        self.failure = failure


class Runner:
    """A host with one subject loaded.

    Parameters
    ----------
    ref : SubjectRef
        The subject.
    feed : FeedSpec or None
        Its feed, None for one made from type hints.
    names : sequence of str
        The size names.
    limits : Limits
        Limits on one run.
    probes : bool
        Whether the host counts; without, it times the untouched function.
    first : mapping of str to int, optional
        A small size, run once beforehand to find what the subject imports on its first call.

    Raises
    ------
    CallError
        If this system has no forks, or a feed given in Python cannot be used.

    Notes
    -----
    The host is started and left to load the subject: the first use of `about`, or the first run,
    waits for it and raises what went wrong. So several of them load at the same time.
    """

    #: Longest time to load a subject, in seconds, where the limit on a run is not above it.
    LOAD_SECONDS = 60.0

    def __init__(
        self,
        ref: SubjectRef,
        feed: FeedSpec | None,
        names: Sequence[str] = ("n",),
        limits: Limits | None = None,
        *,
        probes: bool = True,
        first: Size | None = None,
    ) -> None:
        if not hasattr(os, "fork"):
            raise CallError(
                "runs are made in forked processes, which this system does not have",
                "use Linux, macOS or the Windows Subsystem for Linux",
            )
        self._limits = limits or Limits()
        self._names = tuple(names)
        self._sender = PickledFeed(feed, self._names) if _is_local(feed) else None
        self._subject = str(ref)
        self._about: dict[str, Any] | None = None
        job = {
            "subject": asdict(ref),
            "feed": None if feed is None else {"kind": feed.kind, "text": feed.text},
            "names": list(names),
            "limits": asdict(self._limits),
            "probes": probes,
            "first": self._first(first),
        }
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

    def _first(self, at: Size | None) -> dict[str, Any] | None:
        if at is None:
            return None
        try:
            return {"at": dict(at), **self._sent(at, 0)}
        except FeedError:
            return None

    def _sent(self, at: Size, draw: int) -> dict[str, Any]:
        """Give the part of a request that holds an input made here."""
        if self._sender is None:
            return {}
        text, random = self._sender.make(at, draw)
        return {"input": text, "random": random}

    @property
    def about(self) -> dict[str, Any]:
        """The subject and its feed, as the host describes them.

        Raises
        ------
        CallError
            If the subject or its feed cannot be used.
        """
        return self.load()

    def load(self) -> dict[str, Any]:
        """Wait until the subject is loaded; give what `about` gives."""
        if self._about is None:
            seconds = max(self.LOAD_SECONDS, self._limits.seconds)
            if not select.select([self._replies], [], [], seconds)[0]:
                raise SubjectError(f"{self._subject} takes more than {seconds:g} s to import")
            self._about = self._reply()
        return self._about

    def __enter__(self) -> Self:
        return self

    def __exit__(
        self,
        kind: type[BaseException] | None,
        value: BaseException | None,
        trace: TracebackType | None,
    ) -> None:
        self.close()

    def close(self) -> None:
        """End the host and whatever runs in it."""
        with suppress(ProcessLookupError):
            os.killpg(self._process.pid, signal.SIGKILL)
        self._process.wait()
        self._replies.close()
        if self._process.stdin is not None:
            with suppress(BrokenPipeError):
                self._process.stdin.close()

    def count(self, at: Size, draw: int = 0) -> Run:
        """Count one run.

        Parameters
        ----------
        at : mapping of str to int
            The size.
        draw : int
            The draw.

        Raises
        ------
        RunFailed
            If the subject failed or ran past a limit.
        """
        try:
            sent = self._sent(at, draw)
        except FeedError as error:
            raise RunFailed(Failure("feed", str(error), dict(at), draw)) from None
        run = None
        for reply in self._answers({"do": "count", "at": dict(at), "draw": draw, **sent}, at, draw):
            run = _run(at, draw, reply)
        if run is None:
            raise RunFailed(Failure("crash", "ended without a tally", at, draw))
        return run

    def every(self, at: Size, progress: Callable[[int], None] | None = None) -> list[Run]:
        """Count a run on every input of a size; one `Run` for each distinct tally.

        Parameters
        ----------
        at : mapping of str to int
            The size.
        progress : callable, optional
            Told the number of inputs run so far.

        Raises
        ------
        RunFailed
            If the subject failed or ran past a limit.
        """
        runs = []
        for reply in self._answers({"do": "every", "at": dict(at)}, at, 0):
            if "progress" in reply:
                if progress is not None:
                    progress(reply["progress"])
            else:
                runs.append(_run(at, reply["first"], reply))
        return runs

    def time(self, points: Sequence[Size], draws: int, seconds: float) -> list[dict[str, Any]]:
        """Time the untouched function.

        Parameters
        ----------
        points : sequence of mapping
            The sizes.
        draws : int
            Draws 0 to draws-1 are used in turn.
        seconds : float
            Time for all of it.

        Returns
        -------
        list of dict
            ``at``, ``best_ns`` and ``samples`` by size.
        """
        request: dict[str, Any] = {
            "do": "time",
            "points": [dict(p) for p in points],
            "draws": draws,
            "seconds": seconds,
        }
        if self._sender is not None:
            request["inputs"] = [[self._sender.make(p, d)[0] for d in range(draws)] for p in points]
        timings: list[dict[str, Any]] = []
        for reply in self._answers(request, points[-1], 0):
            timings = reply["timings"]
        return timings

    def _answers(self, request: Mapping[str, Any], at: Size, draw: int) -> Iterator[dict[str, Any]]:
        self.load()
        self._ask(request)
        while True:
            reply = self._reply()
            if "failed" in reply:
                failed = reply["failed"]
                raise RunFailed(Failure(failed["kind"], failed["message"], dict(at), draw))
            if "done" in reply:
                return
            yield reply

    def _ask(self, request: Mapping[str, Any]) -> None:
        assert self._process.stdin is not None
        try:
            self._process.stdin.write(json.dumps(request).encode() + b"\n")
            self._process.stdin.flush()
        except BrokenPipeError:
            status = self._process.wait()
            raise SubjectError(
                f"the process that runs {self._subject} has ended ({_ended(status)})"
            ) from None

    def _reply(self) -> dict[str, Any]:
        line = self._replies.readline()
        if not line:
            status = self._process.wait()
            raise SubjectError(
                f"the process that runs {self._subject} has ended without an answer "
                f"({_ended(status)})"
            )
        reply: dict[str, Any] = json.loads(line)
        if "error" in reply:
            error = reply["error"]
            kinds: dict[str, type[SteplawError]] = {"SubjectError": SubjectError}
            raise kinds.get(error["kind"], CallError)(error["message"], error["hint"])
        return reply


def _is_local(feed: FeedSpec | None) -> TypeGuard[FeedSpec]:
    return feed is not None and feed.kind == "python"


def _ended(status: int) -> str:
    if status >= 0:
        return f"status {status}"
    try:
        return signal.Signals(-status).name
    except ValueError:
        return f"signal {-status}"


def _run(at: Size, draw: int, reply: Mapping[str, Any]) -> Run:
    return Run(
        at=dict(at),
        draw=draw,
        tally=Tally.from_json(reply["tally"]),
        own_steps=reply["own_steps"],
        sites=tuple(tuple(site) for site in reply["sites"]),
        random=reply.get("random", False),
        times=reply.get("times", 1),
        input=reply.get("input", ""),
        unread=reply.get("unread"),
    )


def _import_path() -> str:
    """Give the host the modules that this process can import, steplaw's own place included."""
    return os.pathsep.join(p for p in sys.path if p)
