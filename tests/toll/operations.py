"""Operations that grow with their operands, each with the visits that it must be charged.

`counted` ones are held to what elements count of themselves when the operation runs untouched,
the others to the length that CPython's documentation says is copied or moved.
"""

from __future__ import annotations

import bisect
import functools
import heapq
import math
import random
import re
from collections import Counter, OrderedDict, deque
from collections.abc import Callable
from contextlib import suppress
from typing import Any

from toll.elements import Element, elements

Make = Callable[[int, int], tuple[Any, ...]]


def both(n: int, at: int) -> tuple[Any, ...]:
    """Elements, and one that equals the one at a place (none of them if it is not below n)."""
    return elements(n), Element(at)


def mixed(n: int, at: int) -> tuple[Any, ...]:
    """Elements in an order that the place seeds."""
    order = elements(n)
    random.Random(at).shuffle(order)
    return (order,)


def heap(n: int, at: int) -> tuple[Any, ...]:
    """A heap, and an element to push."""
    return [Element(2 * x) for x in range(n)], Element(2 * at - 1)


def numbers(n: int, at: int) -> tuple[Any, ...]:
    """Numbers, and a place among them."""
    return list(range(n)), at


def _quietly(call: Callable[[], Any]) -> Any:
    with suppress(ValueError):
        return call()


# Name: how its operands are made, what is done, and which doings of the elements it is.
COUNTED: dict[str, tuple[Make, Callable[..., Any], tuple[str, ...]]] = {
    "x in list": (both, lambda xs, x: x in xs, ("eq",)),
    "x not in list": (both, lambda xs, x: x not in xs, ("eq",)),
    "x in tuple": (lambda n, at: (tuple(elements(n)), Element(at)), lambda t, x: x in t, ("eq",)),
    "x in deque": (lambda n, at: (deque(elements(n)), Element(at)), lambda t, x: x in t, ("eq",)),
    "x in values": (
        lambda n, at: (dict(enumerate(elements(n))), Element(at)),
        lambda d, x: x in d.values(),
        ("eq",),
    ),
    "x in iterator": (both, lambda xs, x: x in iter(xs), ("eq",)),
    "list.index": (both, lambda xs, x: _quietly(lambda: xs.index(x)), ("eq",)),
    "list.index from 1": (both, lambda xs, x: _quietly(lambda: xs.index(x, 1)), ("eq",)),
    "tuple.index": (
        lambda n, at: (tuple(elements(n)), Element(at)),
        lambda t, x: _quietly(lambda: t.index(x)),
        ("eq",),
    ),
    "deque.index": (
        lambda n, at: (deque(elements(n)), Element(at)),
        lambda t, x: _quietly(lambda: t.index(x)),
        ("eq",),
    ),
    "list.count": (both, lambda xs, x: xs.count(x), ("eq",)),
    "tuple.count": (
        lambda n, at: (tuple(elements(n)), Element(at)),
        lambda t, x: t.count(x),
        ("eq",),
    ),
    "deque.count": (
        lambda n, at: (deque(elements(n)), Element(at)),
        lambda t, x: t.count(x),
        ("eq",),
    ),
    "list.sort": (mixed, lambda xs: xs.sort(), ("lt",)),
    "list.sort reversed": (mixed, lambda xs: xs.sort(reverse=True), ("lt",)),
    "list.sort by key": (mixed, lambda xs: xs.sort(key=lambda x: x), ("lt",)),
    "bisect_left": (both, lambda xs, x: bisect.bisect_left(xs, x), ("lt", "gt")),
    "bisect_right": (both, lambda xs, x: bisect.bisect_right(xs, x), ("lt", "gt")),
    "heappush": (heap, lambda h, x: heapq.heappush(h, x), ("lt",)),
    "set of": (lambda n, at: (elements(n),), lambda xs: set(xs), ("hash",)),
    "frozenset of": (lambda n, at: (elements(n),), lambda xs: frozenset(xs), ("hash",)),
    "set.update": (lambda n, at: (set(), elements(n)), lambda s, xs: s.update(xs), ("hash",)),
    "dict.fromkeys": (lambda n, at: (elements(n),), lambda xs: dict.fromkeys(xs), ("hash",)),
    "set spread": (lambda n, at: (elements(n),), lambda xs: {*xs}, ("hash",)),
    "Counter of": (lambda n, at: (elements(n),), lambda xs: Counter(xs), ()),
    "sum": (lambda n, at: (elements(n),), lambda xs: sum(xs, Element(0)), ("add",)),
    "sum of an iterator": (lambda n, at: (elements(n),), lambda xs: sum(iter(xs)), ("add",)),
    "prod": (lambda n, at: (elements(n),), lambda xs: math.prod(xs), ("mul",)),
    "reduce": (
        lambda n, at: (elements(n),),
        lambda xs: functools.reduce(lambda a, b: a + b, xs, 0),
        ("add",),
    ),
}
#: Counted one item more often than compared: the first is compared with nothing.
ONE_MORE: dict[str, tuple[Make, Callable[..., Any], tuple[str, ...]]] = {
    "min": (mixed, lambda xs: min(xs), ("lt",)),
    "max": (mixed, lambda xs: max(xs), ("gt",)),
    "max of an iterator": (mixed, lambda xs: max(iter(xs)), ("gt",)),
}
# Name: how its operands are made, what is done, and the length by n and place.
LENGTHS: dict[str, tuple[Make, Callable[..., Any], Callable[[int, int], int]]] = {
    "slice from": (numbers, lambda xs, i: xs[i:], lambda n, i: max(n - i, 0)),
    "slice to": (numbers, lambda xs, i: xs[:i], lambda n, i: min(n, i)),
    "slice by two": (numbers, lambda xs, i: xs[::2], lambda n, i: (n + 1) // 2),
    "slice back": (numbers, lambda xs, i: xs[::-1], lambda n, i: n),
    "text slice": (lambda n, i: ("x" * n, i), lambda s, i: s[i:], lambda n, i: max(n - i, 0)),
    "insert": (numbers, lambda xs, i: xs.insert(i, 0), lambda n, i: max(n - i, 0)),
    "pop at": (
        numbers,
        lambda xs, i: xs.pop(i) if i < len(xs) else None,
        lambda n, i: n - i - 1 if i < n else 0,
    ),
    "pop first": (lambda n, i: ([0] * (n + 1),), lambda xs: xs.pop(0), lambda n, i: n),
    "del at": (
        lambda n, i: ([0] * (n + i + 1), i),
        lambda xs, i: xs.__class__ and _delete(xs, i),
        lambda n, i: n,
    ),
    "remove": (
        lambda n, i: (list(range(n + i + 1)), i),
        lambda xs, i: xs.remove(i),
        lambda n, i: i + 1 + n,
    ),
    "extend": (numbers, lambda xs, i: xs.extend([0] * i), lambda n, i: 2 * i),
    "extend by an iterator": (
        lambda n, i: ([], iter(range(n))),
        lambda xs, it: xs.extend(it),
        lambda n, i: n,
    ),
    "list + list": (
        lambda n, i: ([0] * n, [0] * i),
        lambda a, b: a + b,
        lambda n, i: n + i,
    ),
    "list += list": (lambda n, i: ([0] * n, [0] * i), lambda a, b: _add(a, b), lambda n, i: i),
    "tuple + tuple": (lambda n, i: ((0,) * n, (0,) * i), lambda a, b: a + b, lambda n, i: n + i),
    "text + text": (lambda n, i: ("a" * n, "b" * i), lambda a, b: a + b, lambda n, i: n + i),
    "bytes + bytes": (lambda n, i: (b"a" * n, b"b" * i), lambda a, b: a + b, lambda n, i: n + i),
    "list * number": (lambda n, i: ([0] * n, i), lambda a, k: a * k, lambda n, i: n * i),
    "number * text": (lambda n, i: (i, "x" * n), lambda k, s: k * s, lambda n, i: n * i),
    "list of": (lambda n, i: (range(n),), lambda r: list(r), lambda n, i: n),
    "list of an iterator": (lambda n, i: (range(n),), lambda r: list(map(int, r)), None),
    "tuple of": (lambda n, i: (range(n),), lambda r: tuple(r), lambda n, i: n),
    "deque of": (lambda n, i: (range(n),), lambda r: deque(r), lambda n, i: n),
    "bytes of": (lambda n, i: ([1] * n,), lambda xs: bytes(xs), lambda n, i: n),
    "bytearray of": (lambda n, i: (b"x" * n,), lambda b: bytearray(b), lambda n, i: n),
    "dict of pairs": (
        lambda n, i: ([(k, k) for k in range(n)],),
        lambda xs: dict(xs),
        lambda n, i: n,
    ),
    "OrderedDict of": (
        lambda n, i: ([(k, k) for k in range(n)],),
        lambda xs: OrderedDict(xs),
        lambda n, i: n,
    ),
    "list.copy": (numbers, lambda xs, i: xs.copy(), lambda n, i: n),
    "dict.copy": (lambda n, i: (dict.fromkeys(range(n)),), lambda d: d.copy(), lambda n, i: n),
    "set.copy": (lambda n, i: (set(range(n)),), lambda s: s.copy(), lambda n, i: n),
    "list.reverse": (numbers, lambda xs, i: xs.reverse(), lambda n, i: n),
    "list.clear": (numbers, lambda xs, i: xs.clear(), lambda n, i: n),
    "list spread": (numbers, lambda xs, i: [0, *xs], lambda n, i: n),
    "dict spread": (
        lambda n, i: (dict.fromkeys(range(n)),),
        lambda d: {"x": 1, **d},
        lambda n, i: n,
    ),
    "unpacked": (lambda n, i: ([0] * (n + 1),), lambda xs: _first(xs), lambda n, i: n + 1),
    "dict.update": (
        lambda n, i: ({}, dict.fromkeys(range(n))),
        lambda d, e: d.update(e),
        lambda n, i: n,
    ),
    "dict | dict": (
        lambda n, i: (dict.fromkeys(range(n)), dict.fromkeys(range(i))),
        lambda a, b: a | b,
        lambda n, i: n + i,
    ),
    "set & set": (
        lambda n, i: (set(range(n)), set(range(i))),
        lambda a, b: a & b,
        lambda n, i: min(n, i),
    ),
    "set | set": (
        lambda n, i: (set(range(n)), set(range(i))),
        lambda a, b: a | b,
        lambda n, i: n + i,
    ),
    "slice assigned": (
        lambda n, i: ([0] * n, [1] * i),
        lambda xs, ys: _assign(xs, ys),
        lambda n, i: i + (n if i else 0),
    ),
    "any": (
        lambda n, i: ([False] * i + [True] * n,),
        lambda xs: any(xs),
        lambda n, i: i + (n > 0),
    ),
    "all": (
        lambda n, i: ([True] * i + [False] * n,),
        lambda xs: all(xs),
        lambda n, i: i + (n > 0),
    ),
    "any of an iterator": (
        lambda n, i: ([False] * i + [True] * n,),
        lambda xs: any(x for x in xs),
        lambda n, i: i + (n > 0),
    ),
    "join": (lambda n, i: (["ab"] * n,), lambda xs: "".join(xs), lambda n, i: 2 * n),
    "upper": (lambda n, i: ("x" * n,), lambda s: s.upper(), lambda n, i: n),
    "split": (lambda n, i: ("x " * n,), lambda s: s.split(), lambda n, i: 2 * n),
    "replace": (lambda n, i: ("x" * n,), lambda s: s.replace("x", "yy"), lambda n, i: 3 * n),
    "f-string": (lambda n, i: ("x" * n, "y" * i), lambda a, b: f"{a}{b}", lambda n, i: n + i),
    "deque.rotate": (
        lambda n, i: (deque(range(n + 1)), i),
        lambda d, k: d.rotate(k),
        lambda n, i: min(i % (n + 1), n + 1 - i % (n + 1)),
    ),
    "fsum": (lambda n, i: ([0.5] * n,), lambda xs: math.fsum(xs), lambda n, i: n),
}
# Bounds: never below what the elements count.
BOUNDS: dict[str, tuple[Make, Callable[..., Any], tuple[str, ...]]] = {
    "list == list": (lambda n, at: (elements(n), elements(n)), lambda a, b: a == b, ("eq",)),
    "list < list": (lambda n, at: (elements(n), elements(n)), lambda a, b: a < b, ("eq",)),
    "tuple == tuple": (
        lambda n, at: (tuple(elements(n)), (*elements(min(n, at)), *elements(max(n - at, 0)))),
        lambda a, b: a == b,
        ("eq",),
    ),
    "heappop": (
        lambda n, at: (elements(n + 1),),
        lambda h: heapq.heappop(h),
        ("lt",),
    ),
    "heapify": (mixed, lambda h: heapq.heapify(h), ("lt",)),
    "heapreplace": (
        lambda n, at: (elements(n + 1), Element(at)),
        lambda h, x: heapq.heapreplace(h, x),
        ("lt",),
    ),
    "insort": (both, lambda xs, x: bisect.insort(xs, x), ("lt", "gt")),
}
LENGTHS["list of an iterator"] = (
    lambda n, i: (range(n),),
    lambda r: list(iter(r)),
    lambda n, i: n,
)


_PATTERN = re.compile("b")


def _found(s: str) -> Any:
    return _PATTERN.search(s)


LENGTHS_AT_MOST = {"re search": (lambda n, i: ("a" * n,), _found, lambda n, i: n)}


def _delete(xs: list[Any], i: int) -> None:
    del xs[i]


def _add(a: list[Any], b: list[Any]) -> list[Any]:
    a += b
    return a


def _assign(xs: list[Any], ys: list[Any]) -> None:
    xs[0:0] = ys


def _first(xs: list[Any]) -> Any:
    first, *_rest = xs
    return first
