"""Counted runs of one subject, each in a fork: one draw, or every input of a size."""

from __future__ import annotations

import gc
import random
import sys
from collections.abc import Iterator, Mapping
from types import CodeType
from typing import Any

from steplaw import subject as subjects
from steplaw.feed import Feed, FeedError, Input
from steplaw.host.fork import Reply, failure
from steplaw.host.measured import measured
from steplaw.host.strategic import strategies_in
from steplaw.host.watch import Watch, change
from steplaw.subject import Subject
from steplaw.tally.assembled import tally_of
from steplaw.tally.collector import YOUNG, Undisturbed
from steplaw.tally.install import Installation
from steplaw.tally.registry import Registry
from steplaw.tally.snapshot import CodeCounts, Snapshot, counts_between
from steplaw.toll.ledger import LEDGER, Taken
from steplaw.wording import describe

Size = Mapping[str, int]

ONLY_WORST = (
    "the feed gives a strategy of hypothesis, which no law can be held against: "
    "let it draw values from rng (steplaw worst alone takes strategies)"
)


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
        self.registry = Registry(watched=True)
        Installation(self.registry).enter()
        self.watch = Watch(self.registry)
        gc.collect()
        self._loaded = Snapshot(self.registry)

    def reached(self) -> list[CodeType]:
        """Give the code that ran since the subject was loaded, its feed's included."""
        unclear: list[str] = []
        counts = counts_between(self._loaded, Snapshot(self.registry), unclear)
        return [c.probed.original for c in counts]

    def draw(self, at: Size, draw: int, feed: Feed | None = None) -> Iterator[Reply]:
        """Count one run.

        Parameters
        ----------
        at : mapping of str to int
            The size.
        draw : int
            The draw.
        feed : Feed, optional
            What makes the input, where it is not the subject's own feed.

        Yields
        ------
        dict
            One reply: the tally, its sites, and whether the input was drawn at random.
        """
        try:
            made = (feed or self.feed).make(at, draw)
        except FeedError as error:
            yield failure("feed", str(error))
            return
        if strategies_in(made):
            yield failure("feed", ONLY_WORST)
            return
        self.fresh()
        sizes = measured(self.subject.function, made.args, made.kwargs)
        with Undisturbed(YOUNG):
            before = Snapshot(self.registry)
            LEDGER.take()
            try:
                result = subjects.call(self.subject, made.args, made.kwargs)
            except (SystemExit, MemoryError):
                raise
            except BaseException as error:
                yield failure("raised", _raised(error, self.subject))
                return
            taken = LEDGER.take()
            codes = list(counts_between(before, Snapshot(self.registry)))
        reply = self._reply(codes, taken)
        reply["random"] = made.random
        reply["measured"] = sizes
        reply["unread"] = subjects.unread(result)
        yield reply

    def every(self, at: Size) -> Iterator[Reply]:
        """Count a run on each input of a size; see `_every`, which a feed that raises leaves."""
        try:
            yield from self._every(at)
        except FeedError as error:
            yield failure("feed", str(error))

    def _every(self, at: Size) -> Iterator[Reply]:
        """Count a run on each input of a size.

        Parameters
        ----------
        at : mapping of str to int
            The size.

        Yields
        ------
        dict
            A tally with the number of inputs that gave it and the first of them, for each
            distinct tally; or only ``widen``, the places of code objects that ran unwatched, where
            it must all be done again.
        """
        distinct: dict[Any, list[Any]] = {}
        inputs = enumerate(self.feed.every(at))
        # The feed's own code comes under probes when it first runs, which is before `begin`.
        one = next(inputs, None)
        self.watch.begin()
        while one is not None:
            number, made = one
            text = _shown(made)
            sizes = measured(self.subject.function, made.args, made.kwargs)
            self.fresh()
            with Undisturbed(YOUNG):
                before = self.watch.readings()
                LEDGER.take()
                try:
                    subjects.call(self.subject, made.args, made.kwargs)
                except (SystemExit, MemoryError):
                    raise
                except BaseException as error:
                    yield failure("raised", f"{_raised(error, self.subject)} on input {text}")
                    return
                taken = LEDGER.take()
                after = self.watch.readings()
            key = change(before, after), taken
            seen = distinct.setdefault(key, [0, number, text, sizes, before, after])
            seen[0] += 1
            if seen[3] != sizes:
                seen[3] = {k: v for k, v in sizes.items() if seen[3].get(k) == v}
            if number % 256 == 255:
                yield {"progress": number + 1}
            one = next(inputs, None)
        unwatched = self.watch.unwatched()
        if unwatched:
            yield {"widen": unwatched}
            return
        for (_, taken), (times, number, text, sizes, before, after) in distinct.items():
            codes = [
                CodeCounts(probed, before.get(probed), reading)
                for probed, reading in after.items()
                if before.get(probed) != reading
            ]
            reply = self._reply(codes, taken)
            reply.update(times=times, first=number, input=text, measured=sizes)
            yield reply

    def fresh(self) -> None:
        """Forget kept results, and let the subject's own randomness be its own.

        The feed has seeded the module `random`; a subject that draws from it would otherwise get
        the same numbers in every run, and look as if its tally were repeatable.
        """
        subjects.forget(self.subject)
        random.seed()

    def _reply(self, codes: list[CodeCounts], taken: Taken) -> Reply:
        tally = tally_of(codes, taken=taken)
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
            # What the start of a call raises, such as too deep a recursion, has no line.
            line = trace.tb_lineno or trace.tb_frame.f_code.co_firstlineno
            place = f" at {file}:{line}"
        trace = trace.tb_next
    return f"raised {describe(error)}{place}"


def new_modules(work: Iterator[Reply]) -> Iterator[Reply]:
    """Do a run and give the names of the modules that it imported for the first time.

    Parameters
    ----------
    work : iterator
        The run.

    Yields
    ------
    dict
        One reply with ``modules``.
    """
    before = set(sys.modules)
    for _ in work:
        pass
    yield {"modules": [name for name in sys.modules if name not in before]}
