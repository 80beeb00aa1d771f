"""Tolls of lists, tuples, deques and arrays."""

from __future__ import annotations

from array import array
from collections import deque
from typing import Any

from steplaw.toll import kinds
from steplaw.toll.call import Call, Rule
from steplaw.toll.charges import (
    items_of_all,
    items_of_first,
    own_length,
    result_length,
)
from steplaw.toll.hidden import hidden


def _start(call: Call, size: int) -> tuple[int, int]:
    """Give the stretch that `index` looks at."""
    first, last = call.argument(1, "", 0), call.argument(2, "", size)
    if type(first) is not int or type(last) is not int:
        return 0, size
    low, high, _ = slice(first, last).indices(size)
    return low, max(low, high)


@hidden
def _index(call: Call) -> Any:
    low, high = _start(call, kinds.length(call.owner) or 0)
    call.visits = high - low
    found = call.run()
    call.visits = found - low + 1
    return found


@hidden
def _remove(call: Call) -> Any:
    """Charge what is looked at; the place shows by identity, so nothing is compared anew."""
    before = list(call.owner)
    call.visits = len(before)
    result = call.run()
    after = list(call.owner)
    if len(after) == len(before) - 1:
        place = _first_difference(before, after)
        while place and before[place - 1] is before[place]:
            place -= 1
        call.visits = place + 1 + (len(after) - place)
    return result


def _first_difference(before: list[Any], after: list[Any]) -> int:
    for place, (a, b) in enumerate(zip(before, after, strict=False)):
        if a is not b:
            return place
    return len(after)


def _place(call: Call, size: int) -> int | None:
    place = call.argument(0)
    if type(place) is not int:
        return None
    return max(place + size, 0) if place < 0 else min(place, size)


@hidden
def _insert(call: Call) -> Any:
    size = kinds.length(call.owner) or 0
    place = _place(call, size)
    if place is None:
        call.at_most(size)
    else:
        call.visits = size - place
    return call.run()


@hidden
def _deque_insert(call: Call) -> Any:
    """Charge both rotations about the place, the way round that is shorter."""
    size = kinds.length(call.owner) or 0
    call.at_most(size)
    return call.run()


@hidden
def _pop(call: Call) -> Any:
    size = kinds.length(call.owner) or 0
    place = _place(call, size)
    if place is None:
        call.at_most(size)
    else:
        call.visits = max(size - place - 1, 0)
    return call.run()


@hidden
def _rotate(call: Call) -> Any:
    size, by = kinds.length(call.owner) or 0, call.argument(0, "", 1)
    if type(by) is int and size:
        by %= size
        call.visits = min(by, size - by)
    return call.run()


@hidden
def _swapped(call: Call) -> Any:
    call.visits = kinds.length(call.owner) or 0
    return call.run()


RULES: dict[Any, Rule] = {
    list: Rule("list of", items_of_first, 1),
    tuple: Rule("tuple of", items_of_first, 1),
    deque: Rule("deque of", items_of_first, 1),
    array: Rule("array of", items_of_all, 2),
    (list, "index"): Rule("list.index", _index),
    (list, "count"): Rule("list.count", own_length),
    (list, "remove"): Rule("list.remove", _remove),
    (list, "insert"): Rule("list.insert", _insert),
    (list, "pop"): Rule("list.pop", _pop, 1),
    (list, "extend"): Rule("list.extend", items_of_first),
    (list, "reverse"): Rule("list.reverse", _swapped),
    (list, "copy"): Rule("list.copy", own_length),
    (list, "clear"): Rule("list.clear", own_length),
    (list, "__init__"): Rule("list of", items_of_first, 1),
    (list, "__contains__"): Rule("in list", own_length),
    (tuple, "index"): Rule("tuple.index", _index),
    (tuple, "count"): Rule("tuple.count", own_length),
    (range, "index"): Rule("range.index", result_length),
    (deque, "index"): Rule("deque.index", _index),
    (deque, "count"): Rule("deque.count", own_length),
    (deque, "remove"): Rule("deque.remove", _remove),
    (deque, "insert"): Rule("deque.insert", _deque_insert),
    (deque, "rotate"): Rule("deque.rotate", _rotate),
    (deque, "reverse"): Rule("deque.reverse", _swapped),
    (deque, "copy"): Rule("deque.copy", own_length),
    (deque, "clear"): Rule("deque.clear", own_length),
    (deque, "extend"): Rule("deque.extend", items_of_first),
    (deque, "extendleft"): Rule("deque.extendleft", items_of_first),
    (array, "index"): Rule("array.index", _index),
    (array, "count"): Rule("array.count", own_length),
    (array, "remove"): Rule("array.remove", _remove),
    (array, "insert"): Rule("array.insert", _insert),
    (array, "pop"): Rule("array.pop", _pop, 1),
    (array, "extend"): Rule("array.extend", items_of_first),
    (array, "fromlist"): Rule("array.fromlist", items_of_first),
    (array, "tolist"): Rule("array.tolist", own_length),
    (array, "tobytes"): Rule("array.tobytes", own_length),
    (array, "reverse"): Rule("array.reverse", _swapped),
}
