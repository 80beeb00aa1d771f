"""The host: a child process that loads one subject and runs it on request.

Requests are lines of JSON on standard input; replies go to the descriptor named by the first
argument. The host imports little, so that the subject finds a process like any other.
"""

from __future__ import annotations

import importlib
import json
import os
import sys
from collections.abc import Iterator
from contextlib import nullcontext, suppress
from typing import Any

from steplaw.errors import SteplawError
from steplaw.feed import Feed, FeedSpec, bind
from steplaw.host.batch import SEARCHES
from steplaw.host.counted import CountedSubject, new_modules
from steplaw.host.fork import Reply, failure, forked_stream, silence
from steplaw.host.limits import Limits
from steplaw.host.pickled import unpickling
from steplaw.host.reach import Reach
from steplaw.subject import Subject, SubjectRef, call, forget, locate
from steplaw.wording import describe


class Host:
    """One loaded subject and what can be asked of it."""

    def __init__(self, job: dict[str, Any]) -> None:
        self.limits = Limits(**job["limits"])
        self.reach = Reach() if job["kept"] else None
        self.counted: CountedSubject | None = None
        with nullcontext() if self.reach is None else self.reach.importing():
            self.subject: Subject = locate(SubjectRef(**job["subject"]))
            self.feed = self._feed(job)
            if job["probes"]:
                self._import_late(job)
        if job["probes"]:
            self.counted = CountedSubject(self.subject, self.feed)

    def _feed(self, job: dict[str, Any]) -> Feed:
        if job["feed"] is None:
            return bind(None, self.subject, job["names"])
        spec = FeedSpec(**job["feed"])
        if spec.kind == "python":
            return unpickling(self.subject, "", spec.text)
        return bind(spec, self.subject, job["names"])

    def about(self) -> Reply:
        """Describe the subject and its feed for the record."""
        s = self.subject
        return {
            "loaded": {
                "name": s.name,
                "file": s.file,
                "line": s.line,
                "digest": s.digest,
                "doc": s.doc,
                "kind": s.kind,
                "notes": list(s.notes),
            },
            "feed": {"kind": self.feed.kind, "text": self.feed.text},
            **({} if self.reach is None else {"code": self.reach.tell([s.code.__code__])}),
        }

    def answer(self, request: dict[str, Any]) -> Iterator[Reply]:
        """Run what a request asks for."""
        if request["do"] == "time":
            timing = Limits(request["seconds"] * 3 + 30)
            return forked_stream(lambda: self._telling(self._time(request)), timing)
        assert self.counted is not None
        if request["do"] == "every":
            return self._every(self.counted, request["at"])
        if request["do"] in SEARCHES:
            return self._searched(self.counted, request)
        counted, at, draw = self.counted, request["at"], request["draw"]
        feed = self._sent(request) if "input" in request else self.feed
        return forked_stream(lambda: self._telling(counted.draw(at, draw, feed)), self.limits)

    def _every(self, counted: CountedSubject, at: dict[str, int]) -> Iterator[Reply]:
        while True:
            widened = False
            for reply in forked_stream(lambda: self._telling(counted.every(at)), self.limits):
                if "widen" in reply:
                    widened = True
                    counted.watch.widen(reply["widen"])
                elif not widened:
                    yield reply
            if not widened:
                return

    def _searched(self, counted: CountedSubject, request: dict[str, Any]) -> Iterator[Reply]:
        """Answer what a search asks; ``again`` says that all replies before it are void."""
        seconds = min(self.limits.seconds, request.get("seconds", self.limits.seconds))
        limits = Limits(seconds, self.limits.megabytes)
        while True:
            widened = False
            for reply in forked_stream(lambda: SEARCHES[request["do"]](counted, request), limits):
                if "widen" in reply:
                    widened = True
                    counted.watch.widen(reply["widen"])
                elif not widened:
                    yield reply
            if not widened:
                return
            yield {"again": True}

    def _telling(self, work: Iterator[Reply]) -> Iterator[Reply]:
        """Add to the replies of a run what it depends on, before the one that says it failed."""
        if self.reach is None:
            yield from work
            return
        last: Reply | None = None
        with self.reach.running():
            for reply in work:
                if "failed" in reply:
                    last = reply
                    break
                yield reply
        reached = None if self.counted is None else self.counted.reached()
        yield {"code": self.reach.tell(reached)}
        if last is not None:
            yield last

    def _sent(self, request: dict[str, Any]) -> Feed:
        return unpickling(self.subject, request["input"], self.feed.text, request["random"])

    def _time(self, request: dict[str, Any]) -> Iterator[Reply]:
        from steplaw.clock.timing import measure

        points, sent = request["points"], request.get("inputs")
        subject, feed = self.subject, self.feed
        feeds = {
            (tuple(at.values()), draw): unpickling(subject, text, feed.text)
            for at, texts in zip(points, sent or [[]] * len(points), strict=True)
            for draw, text in enumerate(texts)
        }

        def make(at: Any, draw: int) -> tuple[tuple[Any, ...], dict[str, Any]]:
            made = feeds.get((tuple(at.values()), draw), feed).make(at, draw)
            return tuple(made.args), dict(made.kwargs)

        def run(args: tuple[Any, ...], kwargs: dict[str, Any]) -> object:
            return call(subject, args, kwargs)

        forget(subject)
        timings = measure(
            run, make, points, budget_seconds=request["seconds"], draws=request["draws"]
        )
        yield {"timings": [timing.as_json() for timing in timings]}

    def _import_late(self, job: dict[str, Any]) -> None:
        """Import what the subject imports on its first call, so that no run pays for it."""
        if job["first"] is None:
            return
        first = job["first"]
        feed = self._sent(first) if "input" in first else self.feed

        def plain() -> Iterator[Reply]:
            with suppress(Exception):
                made = feed.make(first["at"], 0)
                call(self.subject, made.args, made.kwargs)
            yield {}

        limits = Limits(min(self.limits.seconds, 10.0), self.limits.megabytes)
        for reply in forked_stream(lambda: new_modules(plain()), limits):
            for name in reply.get("modules", ()):
                with suppress(BaseException):
                    importlib.import_module(name)


def main() -> None:
    """Serve requests until standard input ends."""
    out = os.fdopen(int(sys.argv[1]), "w", encoding="utf-8")
    requests = os.fdopen(os.dup(0), encoding="utf-8")
    os.set_inheritable(requests.fileno(), False)
    sys.argv = [""]

    def say(reply: Reply) -> None:
        out.write(json.dumps(reply) + "\n")
        out.flush()

    silence()
    host: Host | None = None
    for line in requests:
        request = json.loads(line)
        try:
            if host is None:
                host = Host(request)
                say(host.about())
                continue
            for reply in host.answer(request):
                say(reply)
        except SteplawError as error:
            kind = type(error).__name__
            say({"error": {"message": error.message, "hint": error.hint, "kind": kind}})
            if host is None:
                return
        except KeyboardInterrupt:
            return
        except BaseException as error:
            say(failure("fault", f"met a fault of steplaw itself: {describe(error)}"))


if __name__ == "__main__":
    main()
