"""Counted runs of one subject, each in a fork: one draw, or every input of a size."""

from __future__ import annotations

import random
import sys
from collections.abc import Iterator, Mapping
from typing import Any

from steplaw import subject as subjects
from steplaw.feed import Feed, FeedError, Input
from steplaw.host.fork import Reply, failure
from steplaw.subject import Subject
from steplaw.tally.assembled import tally_of
from steplaw.tally.install import Installation
from steplaw.tally.registry import Registry
from steplaw.tally.rewrite import Probed
from steplaw.tally.snapshot import CodeCounts, Reading, Snapshot, counts_between
from steplaw.wording import describe

Size = Mapping[str, int]


class CountedSubject:
    """A subject under probes.

    Parameters
    ----------
    subject : Subject
        The subject.
    feed : Feed
        Makes its inputs.
    """

    def __init__(self, subject: Subject, feed: Feed) -> None:
        self.subject = subject
        self.feed = feed
        self.registry = Registry()
        Installation(self.registry).enter()

    def draw(self, at: Size, draw: int) -> Iterator[Reply]:
        """Count one run.

        Parameters
        ----------
        at : mapping of str to int
            The size.
        draw : int
            The draw.

        Yields
        ------
        dict
            One reply: the tally, its sites, and whether the input was drawn at random.
        """
        try:
            made = self.feed.make(at, draw)
        except FeedError as error:
            yield failure("feed", str(error))
            return
        self._fresh()
        before = Snapshot(self.registry)
        try:
            result = subjects.call(self.subject, made.args, made.kwargs)
        except Exception as error:
            yield failure("raised", _raised(error, self.subject))
            return
        codes = list(counts_between(before, Snapshot(self.registry)))
        reply = self._reply(codes)
        reply["random"] = made.random
        reply["unread"] = subjects.unread(result)
        yield reply

    def every(self, at: Size) -> Iterator[Reply]:
        """Count a run on each input of a size.

        Parameters
        ----------
        at : mapping of str to int
            The size.

        Yields
        ------
        dict
            A tally with the number of inputs that gave it and the first of them, for each
            distinct tally.
        """
        distinct: dict[Any, list[Any]] = {}
        for number, made in enumerate(self.feed.every(at)):
            text = _shown(made)
            self._fresh()
            before = self._readings()
            try:
                subjects.call(self.subject, made.args, made.kwargs)
            except Exception as error:
                yield failure("raised", f"{_raised(error, self.subject)} on input {text}")
                return
            after = self._readings()
            key = _change(before, after)
            seen = distinct.get(key)
            if seen is None:
                distinct[key] = [1, number, text, before, after]
            else:
                seen[0] += 1
            if number % 256 == 255:
                yield {"progress": number + 1}
        for times, number, text, before, after in distinct.values():
            codes = [
                CodeCounts(probed, before.get(probed), reading)
                for probed, reading in after.items()
                if before.get(probed) != reading
            ]
            reply = self._reply(codes)
            reply.update(times=times, first=number, input=text)
            yield reply

    def _fresh(self) -> None:
        subjects.forget(self.subject)
        random.seed()

    def _readings(self) -> dict[Probed, Reading]:
        return Snapshot(self.registry).readings

    def _reply(self, codes: list[CodeCounts]) -> Reply:
        tally = tally_of(codes)
        own = self.subject.code.__code__
        original = self.registry.original(own)
        return {
            "tally": tally.as_json(),
            "own_steps": sum(sum(c.instructions) for c in codes if c.probed.original == original),
            "sites": [site for c in codes for site in _sites(c)],
        }


def _sites(counts: CodeCounts) -> Iterator[list[Any]]:
    """Give the steps of every block: file, function, first line, block number, line, steps."""
    code, graph = counts.probed.original, counts.probed.graph
    for b, block in enumerate(graph.blocks):
        steps = sum(counts.instructions[block.first : block.last + 1])
        if steps:
            lines = graph.decoded.lines[block.first : block.last + 1]
            line = next((x for x in lines if x), code.co_firstlineno)
            yield [code.co_filename, code.co_qualname, code.co_firstlineno, b, line, steps]


def _change(before: dict[Probed, Reading], after: dict[Probed, Reading]) -> Any:
    changed = []
    for probed, (passes, left) in after.items():
        old = before.get(probed)
        if old is None:
            changed.append((id(probed), tuple(passes), tuple(sorted(left.items()))))
        elif old[0] != passes or old[1] != left:
            moved = tuple(b - a for a, b in zip(old[0], passes, strict=True))
            exits = {k: n - old[1].get(k, 0) for k, n in left.items()}
            changed.append((id(probed), moved, tuple(sorted(e for e in exits.items() if e[1]))))
    return tuple(changed)


def _shown(made: Input, most: int = 120) -> str:
    parts = [repr(a) for a in made.args] + [f"{k}={v!r}" for k, v in made.kwargs.items()]
    text = ", ".join(parts)
    return text if len(text) <= most else text[: most - 1] + "…"


def _raised(error: BaseException, subject: Subject) -> str:
    """Say in one line what the subject raised and where."""
    trace, place = error.__traceback__, ""
    while trace is not None:
        file = trace.tb_frame.f_code.co_filename
        if file == subject.file:
            place = f" at {file}:{trace.tb_lineno}"
        trace = trace.tb_next
    return f"raised {describe(error)}{place}"


def new_modules(work: Iterator[Reply]) -> Iterator[Reply]:
    """Do a run and give the names of the modules that it imported for the first time."""
    before = set(sys.modules)
    for _ in work:
        pass
    yield {"modules": [name for name in sys.modules if name not in before]}
