"""Tolls of sorting, heaps and binary search."""

from __future__ import annotations

import bisect
import heapq
from functools import cmp_to_key, partial
from itertools import repeat
from operator import length_hint
from sys import maxsize
from typing import Any

from steplaw.toll import kinds
from steplaw.toll.call import Call, Rule
from steplaw.toll.hidden import hidden


@hidden
def _compared(tick: Any, a: Any, b: Any) -> int:
    tick()
    return -1 if a < b else 1


@hidden
def _keyed(wrap: Any, key: Any, item: Any) -> Any:
    return wrap(key(item))


@hidden
def _sort(call: Call) -> Any:
    """Sort with a key that counts each comparison; the sort itself is the interpreter's own."""
    probe = repeat(None, maxsize)
    key = call.kwargs.get("key")
    wrap = cmp_to_key(partial(_compared, probe.__next__))
    call.kwargs = {**call.kwargs, "key": wrap if key is None else partial(_keyed, wrap, key)}
    try:
        return call.run()
    finally:
        call.visits += maxsize - length_hint(probe)


@hidden
def _sorted(call: Call) -> Any:
    read = call.items(0)
    try:
        return _sort(call)
    finally:
        call.visits += read()


def _depth(place: int) -> int:
    """Give how many levels of a heap stand above a place."""
    return (place + 1).bit_length() - 1


@hidden
def _push(call: Call) -> Any:
    heap, item = call.argument(0), call.argument(1)
    result = call.run()
    place = len(heap) - 1
    while place > 0 and heap[place] is not item:
        place = (place - 1) >> 1
    # Compared with the parent at each level passed, and once more where it stopped short.
    call.visits = _depth(len(heap) - 1) - _depth(place) + (place > 0)
    return result


@hidden
def _pop(call: Call) -> Any:
    size = len(call.argument(0))
    call.at_most(2 * max(size, 1).bit_length())
    return call.run()


@hidden
def _heapify(call: Call) -> Any:
    call.at_most(2 * (kinds.length(call.argument(0)) or 0))
    return call.run()


def _probes(low: int, high: int, found: int) -> int:
    """Give the probes of a binary search that ends at a place."""
    count = 0
    while low < high:
        middle = (low + high) // 2
        count += 1
        low, high = (middle + 1, high) if middle < found else (low, middle)
    return count


def _search(call: Call, found: int, size: int) -> int:
    low, high = call.argument(2, "lo", 0), call.argument(3, "hi")
    return _probes(low, size if high is None else high, found)


@hidden
def _bisect(call: Call) -> Any:
    found = call.run()
    size = kinds.length(call.argument(0, "a"))
    if size is not None and type(found) is int:
        call.visits = _search(call, found, size)
    return found


def _insort(search: Any) -> Any:
    @hidden
    def insort(call: Call) -> Any:
        values, item = call.argument(0, "a"), call.argument(1, "x")
        size = kinds.length(values) or 0
        result = call.run()
        place = size
        if type(values) is list:
            # The place shows by identity: no element is compared anew.
            while place > 0 and values[place] is not item:
                place -= 1
        call.at_most(size.bit_length() + size - place)
        return result

    return insort


RULES: dict[Any, Rule] = {
    sorted: Rule("sorted", _sorted, 1),
    (list, "sort"): Rule("list.sort", _sort),
    heapq.heappush: Rule("heappush", _push),
    heapq.heappop: Rule("heappop", _pop),
    heapq.heapify: Rule("heapify", _heapify),
    heapq.heapreplace: Rule("heapreplace", _pop),
    heapq.heappushpop: Rule("heappushpop", _pop),
    bisect.bisect_left: Rule("bisect_left", _bisect),
    bisect.bisect_right: Rule("bisect_right", _bisect),
    bisect.insort_left: Rule("insort_left", _insort("left")),
    bisect.insort_right: Rule("insort_right", _insort("right")),
}
for _name in ("_heappop_max", "_heapreplace_max"):
    if hasattr(heapq, _name):
        RULES[getattr(heapq, _name)] = Rule(_name.strip("_"), _pop)
if hasattr(heapq, "_heapify_max"):
    RULES[heapq._heapify_max] = Rule("heapify_max", _heapify)
