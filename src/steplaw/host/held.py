"""What a run holds at its peak: elements in containers, and memory."""

from __future__ import annotations

import sys
import tracemalloc
from collections import deque
from collections.abc import Iterable, Iterator, Mapping
from types import FrameType
from typing import TYPE_CHECKING, Any

from steplaw import subject as subjects
from steplaw.feed import FeedError
from steplaw.host.fork import Reply, failure
from steplaw.wording import describe

if TYPE_CHECKING:
    from steplaw.host.counted import CountedSubject

CONTAINERS = (list, tuple, dict, set, frozenset, deque, bytearray)


def held(counted: CountedSubject, at: Mapping[str, int]) -> Iterator[Reply]:
    """Run the subject twice: under tracemalloc, and looked at before each line.

    Parameters
    ----------
    counted : CountedSubject
        The subject.
    at : mapping of str to int
        The size.

    Yields
    ------
    dict
        ``memory``, the peak in bytes beyond what was held before, and ``elements``, the most
        elements held in containers that the input did not have.
    """
    try:
        first, second = counted.feed.make(at, 0), counted.feed.make(at, 0)
    except FeedError as error:
        yield failure("feed", str(error))
        return
    try:
        counted.fresh()
        tracemalloc.start()
        before = tracemalloc.get_traced_memory()[0]
        result = subjects.call(counted.subject, first.args, first.kwargs)
        memory = tracemalloc.get_traced_memory()[1] - before
        tracemalloc.stop()
        del result
        counted.fresh()
        watch = _Watch([*second.args, *second.kwargs.values()])
        sys.settrace(watch.trace)
        try:
            result = subjects.call(counted.subject, second.args, second.kwargs)
        finally:
            sys.settrace(None)
        watch.look([result])
    except (SystemExit, MemoryError):
        raise
    except BaseException as error:
        yield failure("raised", f"raised {describe(error)}")
        return
    yield {"memory": max(memory, 0), "elements": watch.most}


class _Watch:
    """The most elements seen in the containers that the frames under way can reach."""

    def __init__(self, given: list[Any]) -> None:
        self._given = given
        self._had = {key: len(c) for key, c in _reached([given]).items()}
        self.most = 0

    def trace(self, frame: FrameType, event: str, argument: object) -> Any:
        if frame.f_globals.get("__name__", "").startswith("steplaw."):
            return None
        self.look(self._frames(frame))
        return self.trace

    def _frames(self, frame: FrameType | None) -> Iterator[Any]:
        while frame is not None:
            if frame.f_globals.get("__name__", "").startswith("steplaw."):
                return
            yield from frame.f_locals.values()
            frame = frame.f_back

    def look(self, roots: Iterable[Any]) -> None:
        """Count what is held now."""
        found = _reached([self._given, *roots])
        count = sum(max(len(c) - self._had.get(key, 0), 0) for key, c in found.items())
        self.most = max(self.most, count)


def _reached(roots: Iterable[Any]) -> dict[int, Any]:
    """Give the containers that can be reached, by identity."""
    found: dict[int, Any] = {}
    seen: set[int] = set()
    todo = list(roots)
    while todo:
        one = todo.pop()
        if id(one) in seen:
            continue
        seen.add(id(one))
        if isinstance(one, CONTAINERS):
            found[id(one)] = one
            if isinstance(one, dict):
                todo += one.values()
                todo += [k for k in one if isinstance(k, tuple)]
            elif not isinstance(one, bytearray):
                todo += [x for x in one if isinstance(x, CONTAINERS) or hasattr(x, "__dict__")]
        elif type(one).__module__ != "builtins" and not isinstance(one, type):
            # An object's attributes are its own elements' holders, not elements themselves.
            todo += getattr(one, "__dict__", {}).values()
            for kind in type(one).__mro__:
                names = kind.__dict__.get("__slots__", ())
                for name in (names,) if isinstance(names, str) else names:
                    todo.append(getattr(one, name, None))
    return found
