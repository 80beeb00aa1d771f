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
from contextlib import suppress
from typing import Any

from steplaw.errors import SteplawError
from steplaw.feed import Feed, FeedError, FeedSpec, bind
from steplaw.host.counted import CountedSubject, new_modules
from steplaw.host.fork import Reply, failure, forked_stream, silence
from steplaw.host.limits import Limits
from steplaw.subject import Subject, SubjectRef, call, forget, locate


class Host:
    """One loaded subject and what can be asked of it."""

    def __init__(self, job: dict[str, Any]) -> None:
        self.limits = Limits(**job["limits"])
        self.subject: Subject = locate(SubjectRef(**job["subject"]))
        spec = None if job["feed"] is None else FeedSpec(**job["feed"])
        self.feed: Feed = bind(spec, self.subject, job["names"])
        self.counted: CountedSubject | None = None
        if job["probes"]:
            self._import_late(job["first"])
            self.counted = CountedSubject(self.subject, self.feed)

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
        }

    def answer(self, request: dict[str, Any]) -> Iterator[Reply]:
        """Run what a request asks for."""
        do, at = request["do"], request.get("at", {})
        if do == "time":
            return forked_stream(lambda: self._time(request), Limits(request["seconds"] * 3 + 30))
        assert self.counted is not None
        counted = self.counted
        if do == "every":
            return forked_stream(lambda: counted.every(at), self.limits)
        return forked_stream(lambda: counted.draw(at, request["draw"]), self.limits)

    def _time(self, request: dict[str, Any]) -> Iterator[Reply]:
        from steplaw.clock.timing import measure

        subject, feed = self.subject, self.feed

        def make(at: Any, draw: int) -> tuple[tuple[Any, ...], dict[str, Any]]:
            made = feed.make(at, draw)
            return tuple(made.args), dict(made.kwargs)

        def run(args: tuple[Any, ...], kwargs: dict[str, Any]) -> object:
            return call(subject, args, kwargs)

        forget(subject)
        timings = measure(
            run,
            make,
            request["points"],
            budget_seconds=request["seconds"],
            draws=request["draws"],
        )
        yield {
            "timings": [
                {"at": dict(t.at), "best_ns": t.best_ns, "samples": t.samples, "calls": t.calls}
                for t in timings
            ]
        }

    def _import_late(self, first: dict[str, int] | None) -> None:
        """Import what the subject imports on its first call, so that no run pays for it."""
        if first is None:
            return

        def plain() -> Iterator[Reply]:
            with suppress(FeedError):
                made = self.feed.make(first, 0)
                with suppress(Exception):
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
            say(failure("host", f"steplaw's own fault: {type(error).__name__}: {error}"))
            say({"done": True})


if __name__ == "__main__":
    main()
