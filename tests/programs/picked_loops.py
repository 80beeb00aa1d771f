"""Picked calls with loops whose number of rounds must not be taken for granted."""

# mypy: ignore-errors

from __future__ import annotations

import builtins
from typing import Any

from programs.picked import picked


@picked
def range_by_another_name() -> Any:
    def shadowed(range: Any) -> int:
        total = 0
        for k in range(5):
            total += k
        return total

    def lazily(n: int) -> Any:
        yield from (n, n + 1)

    class Odd:
        def __init__(self, n: int) -> None:
            self.n = n

        def __iter__(self) -> Any:
            return iter([1, 2, 3][: self.n % 4])

        def __length_hint__(self) -> int:
            return 40

    return (
        shadowed(range),
        shadowed(lazily),
        shadowed(Odd),
        shadowed(lambda n: "678"[: n - 3] and []),
    )


@picked
def range_replaced_in_builtins() -> Any:
    def rounds(n: int) -> int:
        total = 0
        for k in range(n):
            total += k
        return total

    kept = builtins.range
    found = [rounds(4)]
    builtins.range = lambda n: kept(n * 2)
    try:
        found.append(rounds(4))
        builtins.range = list
        try:
            rounds(4)
        except TypeError as fault:
            found.append(len(str(fault)))
    finally:
        builtins.range = kept
    return found


@picked
def range_left_early_in_every_way() -> Any:
    def loop(n: int, way: int) -> Any:
        seen = 0
        for i in range(n):
            for j in range(i):
                seen += 1
                if way == 1 and seen == 4:
                    break
                if way == 2 and seen == 5:
                    return seen
                if way == 3:
                    seen += 10 // (j - 2)
            else:
                seen += 100
        return seen

    found = []
    for way in range(5):
        for n in (0, 1, 2, 6):
            try:
                found.append(loop(n, way))
            except ZeroDivisionError:
                found.append(-1)
    return found


@picked
def range_in_a_suspended_generator() -> Any:
    def pairs(n: int) -> Any:
        for i in range(n):
            for j in range(i, n):
                yield i * j

    whole = list(pairs(4))
    half = pairs(4)
    part = [next(half) for _ in range(5)]
    other = pairs(3)
    next(other)
    other.close()
    return whole, part, [x for x, _ in zip(pairs(9), range(3), strict=False)]


@picked
def range_iterators_shared() -> Any:
    def shared(n: int) -> Any:
        rounds = iter(range(n))
        seen = []
        for k in rounds:
            seen.append(k)
            for m in rounds:
                seen.append(-m)
                if m % 3 == 0:
                    break
        return seen

    def taken(n: int) -> int:
        total = 0
        numbers = range(n)
        for k in numbers:
            total += k
        for k in iter(numbers):
            total -= 2 * k
        for k in reversed(numbers):
            total += 3 * k
        return total

    return shared(12), taken(7)


@picked
def range_beyond_machine_words() -> Any:
    def loop(*given: int) -> list[int]:
        seen = []
        for k in range(*given):
            seen.append(k % 7)
            if len(seen) > 5:
                break
        return seen

    def whole(*given: int) -> int:
        total = 0
        for k in range(*given):
            total += k % 11
        return total

    big = 10**30
    return (
        loop(big, big + 4),
        loop(big),
        whole(big, big + 3),
        whole(big, big - 9, -4),
        whole(-(2**63), -(2**63) + 2),
        whole(2**63 - 2, 2**63 + 1),
    )


@picked
def range_arguments_refused() -> Any:
    def loop(given: Any, step: Any = 1) -> Any:
        total = 0
        for k in range(0, given, step):
            total += k
        return total

    class Index:
        def __init__(self, n: int) -> None:
            self.n = n

        def __index__(self) -> int:
            if self.n < 0:
                raise KeyError(self.n)
            return self.n

    found = []
    for given, step in ((3, 1), ("x", 1), (3, 0), (Index(4), 2), (Index(-1), 1), (True, 1)):
        try:
            found.append(loop(given, step))
        except (TypeError, ValueError, KeyError) as fault:
            found.append(type(fault).__name__)
    return found


@picked
def nested_loops_whose_bounds_move() -> Any:
    def moving(n: int) -> int:
        total = 0
        for i in range(n):
            for j in range(i, n):
                for k in range(j - i):
                    total += k
                n -= j > 2
            i += 5
        return total

    def calls(n: int) -> int:
        total = 0
        for i in range(n):
            for _ in range(calls(i - 1) % 3 if i else 2):
                total += i
        return total

    def swapped(n: int) -> int:
        total = 0
        try:
            for i in range(n):
                try:
                    for j in range(3):
                        total += 6 // (i - j + 1)
                finally:
                    for _ in range(2):
                        total += 1
        except ZeroDivisionError:
            for _ in range(4):
                total += 100
        return total

    return [moving(k) for k in range(6)], calls(6), [swapped(k) for k in range(6)]


@picked
def loops_interrupted_from_outside() -> Any:
    class Stop(BaseException):
        pass

    class Watched(int):
        def __add__(self, other: Any) -> Any:
            if int(other) == 3:
                raise Stop
            return Watched(int(self) + int(other))

    def loop(n: int) -> Any:
        total: Any = Watched(0)
        for k in range(n):
            total = total + k
        return int(total)

    found = []
    for n in (2, 5, 3):
        try:
            found.append(loop(n))
        except Stop:
            found.append(-1)
    return found
