"""What can be asked of a subject: counted runs, every input of a size, timings.

Where the answers come from is left open: a process that runs the subject, the store of finished
runs, or other machines.
"""

from __future__ import annotations

from abc import ABC, abstractmethod
from collections.abc import Callable, Iterator, Mapping, Sequence
from dataclasses import asdict, dataclass, field
from types import TracebackType
from typing import Any, Self, TypeGuard

from steplaw.errors import CallError, SteplawError, SubjectError
from steplaw.feed import FeedError, FeedSpec
from steplaw.host.limits import Failure, Limits
from steplaw.host.pickled import PickledFeed
from steplaw.subject import SubjectRef
from steplaw.tally.model import Tally

Size = Mapping[str, int]
Reply = dict[str, Any]


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
    unread : str, optional
        What the subject gives that nothing has read.
    measured : mapping of str to pair
        Type and size of the first of them's arguments, by parameter.
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
    measured: Mapping[str, tuple[str, int]] = field(default_factory=dict)


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


class Asker(ABC):
    """Asks for runs of one subject.

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
        Whether runs are counted; without, the untouched function is timed.
    first : mapping of str to int, optional
        A small size, run once beforehand to find what the subject imports on its first call.
    kept : bool
        Whether the host is to tell what each answer depends on.

    Raises
    ------
    CallError
        If a feed given in Python cannot be used.
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
        self.limits = limits or Limits()
        self._names = tuple(names)
        self._sender = PickledFeed(feed, self._names) if _is_local(feed) else None
        self._about: dict[str, Any] | None = None
        self.subject = str(ref)
        self.job = {
            "subject": asdict(ref),
            "feed": None if feed is None else {"kind": feed.kind, "text": feed.text},
            "names": list(names),
            "limits": asdict(self.limits),
            "probes": probes,
            "first": self._first(first),
            "kept": kept,
        }

    #: How many runs ahead it is of use to `expect`.
    ahead = 0

    @abstractmethod
    def introduce(self) -> Reply:
        """Give the subject and its feed, as the host describes them, or an ``error``."""

    @abstractmethod
    def answers(self, request: Mapping[str, Any]) -> Iterator[Reply]:
        """Give the replies to a request, up to the one that has ``done`` or ``failed``."""

    @abstractmethod
    def close(self) -> None:
        """End whatever runs for this."""

    def expect(self, wanted: Sequence[tuple[Size, int | None]]) -> None:  # noqa: B027 - may be left
        """Hear which runs may be asked for soon; there is no need to make use of it.

        Parameters
        ----------
        wanted : sequence of (mapping, int or None)
            Size and draw; None for every input of the size.
        """

    def request(self, at: Size, draw: int | None) -> dict[str, Any]:
        """Give the request for one run, or for every input of a size where `draw` is None."""
        return _every(at) if draw is None else _count(at, draw, self._sent(at, draw))

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
            self._about = _sound(self.introduce())
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
        for reply in self.replies(_count(at, draw, sent), at, draw):
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
        for reply in self.replies(_every(at), at, 0):
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
        for reply in self.replies(request, points[-1], 0):
            timings = reply["timings"]
        return timings

    def replies(self, request: Mapping[str, Any], at: Size, draw: int) -> Iterator[Reply]:
        """Give what is replied to a request; an end that is not well raises `RunFailed`."""
        self.load()
        for reply in self.answers(request):
            if "failed" in _sound(reply):
                failed = reply["failed"]
                raise RunFailed(Failure(failed["kind"], failed["message"], dict(at), draw))
            if "done" in reply:
                return
            if "code" not in reply:
                yield reply


def _count(at: Size, draw: int, sent: Mapping[str, Any]) -> dict[str, Any]:
    return {"do": "count", "at": dict(at), "draw": draw, **sent}


def _every(at: Size) -> dict[str, Any]:
    return {"do": "every", "at": dict(at)}


def _sound(reply: Reply) -> Reply:
    """Give a reply back; raise the error that it may hold instead."""
    if "error" in reply:
        error = reply["error"]
        kinds: dict[str, type[SteplawError]] = {"SubjectError": SubjectError}
        raise kinds.get(error["kind"], CallError)(error["message"], error["hint"])
    return reply


def _is_local(feed: FeedSpec | None) -> TypeGuard[FeedSpec]:
    return feed is not None and feed.kind == "python"


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
        measured={name: (kind, size) for name, (kind, size) in reply["measured"].items()},
    )
