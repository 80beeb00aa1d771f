"""The parent's side: ask the host for runs and read its replies."""

from __future__ import annotations

import json
import os
import signal
import subprocess
import sys
from collections.abc import Callable, Iterator, Mapping, Sequence
from contextlib import suppress
from dataclasses import asdict, dataclass
from types import TracebackType
from typing import Any, Self

from steplaw.errors import CallError, SteplawError, SubjectError
from steplaw.feed import FeedSpec
from steplaw.host.limits import Failure, Limits
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
        If the subject or its feed cannot be used.
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
    ) -> None:
        if not hasattr(os, "fork"):
            raise CallError(
                "runs are made in forked processes, which this system does not have",
                "use Linux, macOS or the Windows Subsystem for Linux",
            )
        job = {
            "subject": asdict(ref),
            "feed": None if feed is None else {"kind": feed.kind, "text": feed.text},
            "names": list(names),
            "limits": asdict(limits or Limits()),
            "probes": probes,
            "first": None if first is None else dict(first),
        }
        reading, writing = os.pipe()
        command = [sys.executable, "-m", "steplaw.host", str(writing)]
        self._process = subprocess.Popen(
            command,
            stdin=subprocess.PIPE,
            pass_fds=(writing,),
            env={**os.environ, "PYTHONHASHSEED": "0", "PYTHONPATH": _import_path()},
            start_new_session=True,
        )
        os.close(writing)
        self._replies = os.fdopen(reading, encoding="utf-8")
        self._ask(job)
        self.about: dict[str, Any] = self._reply()

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
        run = None
        for reply in self._answers({"do": "count", "at": dict(at), "draw": draw}, at, draw):
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
        request = {
            "do": "time",
            "points": [dict(p) for p in points],
            "draws": draws,
            "seconds": seconds,
        }
        timings: list[dict[str, Any]] = []
        for reply in self._answers(request, points[-1], 0):
            timings = reply["timings"]
        return timings

    def _answers(self, request: Mapping[str, Any], at: Size, draw: int) -> Iterator[dict[str, Any]]:
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
            raise SubjectError("the process that runs the subject has ended") from None

    def _reply(self) -> dict[str, Any]:
        line = self._replies.readline()
        if not line:
            self._process.wait()
            raise SubjectError("the process that runs the subject has ended without an answer")
        reply: dict[str, Any] = json.loads(line)
        if "error" in reply:
            error = reply["error"]
            kinds: dict[str, type[SteplawError]] = {"SubjectError": SubjectError}
            raise kinds.get(error["kind"], CallError)(error["message"], error["hint"])
        return reply


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
