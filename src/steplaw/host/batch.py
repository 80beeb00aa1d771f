"""Many given inputs counted in one fork, one figure each; and what a feed draws, written out."""

from __future__ import annotations

from collections.abc import Callable, Iterator, Mapping, Sequence
from functools import partial
from typing import TYPE_CHECKING, Any

from steplaw import costs
from steplaw import subject as subjects
from steplaw.feed import FeedError
from steplaw.host.adversary import adversary
from steplaw.host.fork import Reply, failure
from steplaw.host.held import held
from steplaw.host.strategic import strategic, strategies_in
from steplaw.host.watch import Watch, change
from steplaw.tally.assembled import tally_of
from steplaw.tally.collector import YOUNG, Undisturbed
from steplaw.tally.model import Tally
from steplaw.tally.rewrite import Probed
from steplaw.tally.snapshot import CodeCounts
from steplaw.toll.ledger import LEDGER
from steplaw.wording import describe

if TYPE_CHECKING:
    from steplaw.host.counted import CountedSubject

#: The interpreter's own, taken before it is replaced by one that puts probes in what it runs.
_EVALUATE = eval

#: What the text of an input may name beside literals.
_NAMES: dict[str, Any] = {"__builtins__": {}, "set": set, "frozenset": frozenset}


def written(counted: CountedSubject, at: Mapping[str, int], draws: int) -> Iterator[Reply]:
    """Give what the feed draws at a size, written out.

    Parameters
    ----------
    counted : CountedSubject
        The subject and its feed.
    at : mapping of str to int
        The size.
    draws : int
        How many draws.

    Yields
    ------
    dict
        ``args`` and ``kwargs`` of each draw, as text; or ``strategy`` where the feed gives
        strategies of hypothesis.
    """
    for draw in range(draws):
        try:
            made = counted.feed.make(at, draw)
        except FeedError as error:
            yield failure("feed", str(error))
            return
        if strategies_in(made):
            yield {"strategy": True}
            return
        yield {
            "args": [repr(a) for a in made.args],
            "kwargs": {k: repr(v) for k, v in made.kwargs.items()},
        }


def batch(counted: CountedSubject, inputs: Sequence[Any], figure: str) -> Iterator[Reply]:
    """Count a run on each of many inputs.

    Parameters
    ----------
    counted : CountedSubject
        The subject.
    inputs : sequence of pairs
        Arguments as a list of texts, and keyword arguments as texts by name.
    figure : str
        ``steps``, an operation class, or ``line:N``.

    Yields
    ------
    dict
        ``value`` of each input in order, or ``raised``; at the end ``widen`` where code ran that
        was not watched, and all must be counted again.
    """
    counter = Counter(counted, figure)
    for args, kwargs in inputs:
        given = [_EVALUATE(a, dict(_NAMES)) for a in args]
        named = {k: _EVALUATE(a, dict(_NAMES)) for k, a in kwargs.items()}
        counted.fresh()
        yield counter.count(partial(subjects.call, counted.subject, given, named))
    yield from counter.unwatched()


def life(counted: CountedSubject, at: Mapping[str, int], figure: str) -> Iterator[Reply]:
    """Count each operation of a life: what the subject gives, called one after the other.

    Parameters
    ----------
    counted : CountedSubject
        Its result is an iterable of operations: a callable, or a tuple of one and its arguments.
    at : mapping of str to int
        The size.
    figure : str
        As for `batch`.

    Yields
    ------
    dict
        As `batch`, for each operation.
    """
    try:
        made = counted.feed.make(at, 0)
    except FeedError as error:
        yield failure("feed", str(error))
        return
    counted.fresh()
    counter = Counter(counted, figure)
    try:
        operations = iter(subjects.call(counted.subject, made.args, made.kwargs))
        for operation in operations:
            function, *args = operation if isinstance(operation, tuple) else (operation,)
            if not callable(function):
                yield failure("raised", f"gives {function!r} where an operation should be")
                return
            reply = counter.count(partial(function, *args))
            if "raised" in reply:
                yield failure("raised", f"raised {reply['raised']} in one of its operations")
                return
            yield reply
    except (SystemExit, MemoryError):
        raise
    except BaseException as error:
        yield failure("raised", f"gives no operations: {describe(error)}")
        return
    yield from counter.unwatched()


class Counter:
    """Counts calls, one figure each.

    Parameters
    ----------
    counted : CountedSubject
        Whose registry and watch are used.
    figure : str
        The figure.
    watch : Watch, optional
        What to read, where it is not the subject's own watch.

    Attributes
    ----------
    ran : set of Probed
        The code objects that ran, as far as they were watched.
    """

    def __init__(self, counted: CountedSubject, figure: str, watch: Watch | None = None) -> None:
        self._counted = counted
        self._figure = figure
        self._known: dict[Any, int] = {}
        self._watch = watch or counted.watch
        self._watch.begin()
        self.ran: set[Probed] = set()

    def count(self, work: Callable[[], object]) -> Reply:
        """Call, and give ``value`` or what was ``raised``."""
        with Undisturbed(YOUNG):
            before = self._watch.readings()
            LEDGER.take()
            try:
                work()
            except (SystemExit, MemoryError):
                raise
            except BaseException as error:
                return {"raised": describe(error)}
            taken = LEDGER.take()
            after = self._watch.readings()
        key = change(before, after), taken
        if key not in self._known:
            codes = [
                CodeCounts(probed, before.get(probed), reading)
                for probed, reading in after.items()
                if before.get(probed) != reading
            ]
            self.ran.update(c.probed for c in codes)
            tally = tally_of(codes, taken=taken)
            self._known[key] = value_of(tally, self._figure, self._counted.subject.file)
        return {"value": self._known[key]}

    def unwatched(self) -> Iterator[Reply]:
        """Give one reply with ``widen`` where code ran that was not watched."""
        places = self._watch.unwatched()
        if places:
            yield {"widen": places}


def value_of(tally: Tally, figure: str, file: str) -> int:
    """Read one figure of a tally.

    Parameters
    ----------
    tally : Tally
        The counts.
    figure : str
        As `steplaw.costs.reader` reads, or ``line:N`` of `file`.
    file : str
        The subject's file.
    """
    if figure.startswith("line:"):
        number = int(figure.partition(":")[2])
        return sum(x.frequency for x in tally.lines if x.line == number and x.file == file)
    return int(costs.reader(figure)(tally))


#: What can be asked beside runs and timings, by the name of the request.
SEARCHES: dict[str, Callable[[CountedSubject, Mapping[str, Any]], Iterator[Reply]]] = {
    "written": lambda counted, r: written(counted, r["at"], r["draws"]),
    "batch": lambda counted, r: batch(counted, r["inputs"], r["figure"]),
    "life": lambda counted, r: life(counted, r["at"], r["figure"]),
    "adversary": lambda counted, r: adversary(counted, r["size"], r["rest"]),
    "strategy": lambda counted, r: strategic(
        counted, r["at"], r["examples"], r["seed"], partial(Counter, counted, r["figure"])
    ),
    "held": lambda counted, r: held(counted, r["at"]),
}
