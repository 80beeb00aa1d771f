"""Inputs drawn from a strategy of hypothesis, which is told the figure that each of them had."""

from __future__ import annotations

import gc
import heapq
import sys
from collections.abc import Callable, Iterator, Mapping
from functools import partial
from types import FunctionType
from typing import TYPE_CHECKING, Any

from steplaw import subject as subjects
from steplaw.feed import FeedError, Input
from steplaw.host.fork import Reply, failure
from steplaw.host.watch import Places, Watch
from steplaw.wording import describe

if TYPE_CHECKING:
    from steplaw.host.batch import Counter
    from steplaw.host.counted import CountedSubject

Counting = Callable[[Watch], "Counter"]

#: Inputs for which all code is read, to learn which code the subject runs.
LEARNT = 4
#: The worst inputs that are handed on.
KEPT = 5


def strategies_in(made: Input) -> bool:
    """Tell whether an input is made of strategies, without importing what no feed has imported."""
    library = sys.modules.get("hypothesis.strategies")
    if library is None:
        return False
    values = (*made.args, *made.kwargs.values())
    return any(isinstance(v, library.SearchStrategy) for v in values)


def strategic(
    counted: CountedSubject,
    at: Mapping[str, int],
    examples: int,
    seed: int,
    counting: Counting,
) -> Iterator[Reply]:
    """Look for dear inputs with hypothesis' targeted search.

    Which code runs is learnt from the first inputs, so the figures only guide the search: those of
    the inputs that are handed on have to be counted again.

    Parameters
    ----------
    counted : CountedSubject
        The subject; its feed gives strategies, one for each argument.
    at : mapping of str to int
        The size.
    examples : int
        Inputs to draw.
    seed : int
        Seeds hypothesis.
    counting : callable
        Makes what counts calls, from what is to be read.

    Yields
    ------
    dict
        ``args`` and ``kwargs``, as texts, of the dearest inputs, the dearest first.

    Notes
    -----
    A. Löscher and K. Sagonas, Targeted Property-Based Testing, ISSTA 2017, is the method that
    ``hypothesis.target`` follows.
    """
    import hypothesis
    from hypothesis import strategies

    try:
        made = counted.feed.make(at, 0)
    except FeedError as error:
        yield failure("feed", str(error))
        return
    _unprobed(counted)
    arguments = strategies.tuples(*(_strategy(a) for a in made.args))
    named = strategies.fixed_dictionaries({k: _strategy(v) for k, v in made.kwargs.items()})
    best = _Best(KEPT)
    counter = _Learning(counted, counting)

    def body(args: tuple[Any, ...], kwargs: dict[str, Any]) -> None:
        # Written out first: the subject may change what it is given.
        texts = tuple(map(repr, args)), tuple((k, repr(v)) for k, v in kwargs.items())
        counted.fresh()
        value = counter.count(partial(subjects.call, counted.subject, args, kwargs))
        if value is not None:
            best.add(value, texts)
            hypothesis.target(float(value))

    quiet = hypothesis.settings(
        max_examples=examples,
        database=None,
        deadline=None,
        phases=[hypothesis.Phase.generate, hypothesis.Phase.target],
        suppress_health_check=list(hypothesis.HealthCheck),
        verbosity=hypothesis.Verbosity.quiet,
    )
    try:
        quiet(hypothesis.seed(seed)(hypothesis.given(arguments, named)(body)))()
    except (SystemExit, MemoryError):
        raise
    except BaseException as error:
        yield failure("feed", f"hypothesis cannot draw from the strategy: {describe(error)}")
        return
    for args, kwargs in best.texts():
        yield {"args": list(args), "kwargs": dict(kwargs)}


def _unprobed(counted: CountedSubject) -> None:
    """Take the probes out of hypothesis, in this fork alone: it is none of the subject's code."""
    for function in [x for x in gc.get_objects() if type(x) is FunctionType]:
        if str(function.__module__).split(".")[0] == "hypothesis":
            function.__code__ = counted.registry.original(function.__code__)


def _strategy(value: Any) -> Any:
    from hypothesis import strategies

    if isinstance(value, strategies.SearchStrategy):
        return value
    return strategies.just(value)


class _Best:
    """The inputs with the largest figures, each once."""

    def __init__(self, most: int) -> None:
        self._most = most
        self._heap: list[tuple[int, Any]] = []

    def add(self, value: int, texts: Any) -> None:
        if (value, texts) in self._heap:
            return
        heapq.heappush(self._heap, (value, texts))
        if len(self._heap) > self._most:
            heapq.heappop(self._heap)

    def texts(self) -> list[Any]:
        return [texts for _, texts in sorted(self._heap, reverse=True)]


class _Learning:
    """Reads all code around the first runs, and afterwards only what ran in these."""

    def __init__(self, counted: CountedSubject, counting: Counting) -> None:
        self._registry = counted.registry
        self._counting = counting
        self._runs = 0
        self._counter = self._watching(None)

    def _watching(self, places: Places) -> Counter:
        watch = Watch(self._registry)
        watch.places = places
        return self._counting(watch)

    def count(self, work: Callable[[], object]) -> int | None:
        """Give the figure of a call, None where it raises."""
        value: int | None = self._counter.count(work).get("value")
        self._runs += 1
        if self._runs == LEARNT:
            ran = self._counter.ran
            places = (k for k, probed in enumerate(self._registry.probed) if probed in ran)
            self._counter = self._watching(frozenset(places))
        return value
