"""Answers from the store where it has them, from a host where it has not."""

from __future__ import annotations

import hashlib
import json
import os
import platform
import sys
from collections.abc import Callable, Iterator, Mapping, Sequence
from functools import cache
from pathlib import Path
from typing import Any

import steplaw
from steplaw.host.asking import Asker, Reply, Size
from steplaw.store.database import Store

#: Failures that the same code and input bring about again.
_LASTING = ("raised", "feed", "exit")


class Kept(Asker):
    """A subject whose finished runs are kept.

    Parameters
    ----------
    store : Store
        Where they are kept.
    make : callable
        Gives what runs the subject, when something must be run.
    question : mapping
        What else tells these runs from others of the same subject.
    ahead : int
        How many runs ahead what runs the subject makes use of.
    *job, **settings
        As for `Asker`.
    """

    def __init__(
        self,
        store: Store,
        make: Callable[[], Asker],
        question: Mapping[str, Any],
        *job: Any,
        ahead: int = 0,
        **settings: Any,
    ) -> None:
        super().__init__(*job, **settings)
        self.ahead = ahead
        self._store = store
        self._make = make
        self._made: Asker | None = None
        self._asked = {
            **_surroundings(),
            **question,
            **{name: value for name, value in self.job.items() if name != "limits"},
        }
        self._questions: list[str] = []
        self._expected: set[str] = set()

    @property
    def runs(self) -> Asker:
        """What runs the subject, started at the first use."""
        if self._made is None:
            self._made = self._make()
        return self._made

    def _question(self, request: Mapping[str, Any]) -> str:
        text = json.dumps([self._asked, request], sort_keys=True)
        return hashlib.sha256(text.encode()).hexdigest()

    def introduce(self) -> Reply:
        """Give the subject as it was when it was last loaded, or load it."""
        request = {"do": "introduce"}
        question = self._question(request)
        kept = self._store.find(question)
        if kept is not None:
            return kept[0]
        reply = self.runs.load()
        if "code" in reply:
            self._keep(question, request, reply["code"], [reply])
        return reply

    def answers(self, request: Mapping[str, Any]) -> Iterator[Reply]:
        """Give the kept replies, or have it done and keep them."""
        question = self._question(request)
        kept = self._store.find(question)
        if kept is not None:
            yield from kept
            return
        self.runs.load()
        replies: list[Reply] = []
        for reply in self.runs.answers(request):
            replies.append(reply)
            if _lasts(reply):
                self._keep(question, request, _code(replies), replies)
            yield reply

    def _keep(
        self, question: str, request: Mapping[str, Any], told: Any, replies: Sequence[Reply]
    ) -> None:
        if told is None:
            return
        kept = [reply for reply in replies if "progress" not in reply]
        shown = json.dumps({k: v for k, v in request.items() if k not in ("input", "inputs")})
        if self._store.keep(question, told, kept, subject=self.subject, request=shown):
            self._questions.append(question)

    def expect(self, wanted: Sequence[tuple[Size, int | None]]) -> None:
        """Pass on what the store does not have."""
        missing = []
        for at, draw in wanted:
            question = self._question(self.request(at, draw))
            if question not in self._expected:
                self._expected.add(question)
                if self._store.find(question) is None:
                    missing.append((at, draw))
        if missing:
            self.runs.expect(missing)

    def forget(self) -> None:
        """Take out what was kept here: its runs turned out to differ from each other."""
        self._store.forget(self._questions)

    def close(self) -> None:
        """End what runs the subject."""
        if self._made is not None:
            self._made.close()


def _lasts(reply: Reply) -> bool:
    failed = reply.get("failed")
    return "done" in reply or (failed is not None and failed["kind"] in _LASTING)


def _code(replies: Sequence[Reply]) -> Any:
    """Give what the host told of the run, None where it told nothing."""
    return next((reply["code"] for reply in reversed(replies) if "code" in reply), None)


@cache
def _surroundings() -> dict[str, Any]:
    """Give what all runs of this process have in common."""
    return {
        "python": sys.version,
        "platform": [sys.platform, platform.machine()],
        "steplaw": steplaw.__version__,
        "build": _build(),
        "folder": os.getcwd(),  # noqa: PTH109
        "path": sys.path,
    }


def _build() -> str:
    """Give the digest of steplaw's own code."""
    told = hashlib.sha256()
    for path in sorted(Path(steplaw.__file__).parent.rglob("*.py")):
        told.update(path.read_bytes())
    return told.hexdigest()


def machine() -> list[Any]:
    """Give what tells the clock of this machine from others'."""
    return [platform.node(), platform.processor(), os.cpu_count()]
