"""Picked calls with instructions and courses that programs seldom have."""

# mypy: ignore-errors

from __future__ import annotations

import sys
from typing import Any

from programs.picked import picked

RARE = """
from math import *
import os.path as place, collections.abc
x: int = 3
y: "str"
kept = [floor(pi), place.sep]
if x > 2:
    spare = 1
    del spare
try:
    del spare
except NameError:
    kept.append("no spare")
class Plain:
    a: int = 1
    b = [a2 for a2 in (1, 2)]
    if a:
        c = a + 1
        del c
    try:
        b.append(c)
    except NameError:
        b.append(x)
    def f(self, /, p, *, q=a): return (p, q, self.b)
    def g(self): return __class__.__name__
def shape(n):
    global gone
    gone = n
    del gone
    try:
        gone
    except NameError:
        pass
    return {*range(n), *(1, 2), 7, 8, 9}, {**{"a": n}, "b": 1}, (*"ab", n)
kept += [Plain().f(2), Plain().g(), shape(3)]
a = b = [0] * 4
a[1:3], b[0] = (5, 6), +x
a[-1] @= 1 if 0 else type("M", (int,), {"__rmatmul__": lambda s, o: o + 40})()
i = 0
while i < 3: i += 1
else: kept.append(i)
matrix = [[r * c for c in range(3) if c != r] for r in range(3)]
lazy = list((r, s) for r in range(3) for s in (q for q in range(r)))
kept.append((a, matrix, lazy, ~x, not x, -x, x is not None, x if x else y))
def unbound(n):
    if n:
        late = 1
    try:
        return late
    except UnboundLocalError:
        return "unbound"
def cells(n):
    def inner(): return n
    before = inner()
    del n
    try:
        return before, inner()
    except NameError:
        return before, "gone"
kept += [unbound(0), unbound(1), cells(4)]
"""

NEW = """
type Pair[T] = tuple[T, T]
def first[T: (int, str)](pair: Pair[T]) -> T:
    return pair[0]
class Stack[T]:
    items: list[T]
    def __init__(self) -> None: self.items = []
    def push[U](self, item: U) -> int:
        self.items.append(item)
        return len(self.items)
kept = [first((1, 2)), Stack[int]().push("x"), Pair.__value__, f"{f"{1 + 1}"!r:>{2 + 3}}"]
class Body:
    rows = [1, 2]
    sums = [r + s for r in rows for s in [1]]
    calls = [(lambda: r)() for r in rows]
kept += [Body.sums, Body.calls]
def clean(n):
    r = 5
    try:
        [10 // (r - n) for r in range(4)]
    except ZeroDivisionError:
        pass
    return r, [[r for r in range(r)] for r in range(3)]
kept.append(clean(2))
"""


@picked
def rare_instructions() -> Any:
    space: dict[str, Any] = {"__name__": "rare", "__annotations__": {}}
    exec(RARE, space)
    return space["kept"]


@picked
def syntax_of_newer_versions() -> Any:
    if sys.version_info < (3, 12):
        return "needs 3.12"
    space: dict[str, Any] = {"__name__": "newer"}
    exec(NEW, space)
    return space["kept"]


@picked
def typed_at_a_prompt() -> Any:
    shown: list[Any] = []
    before, sys.displayhook = sys.displayhook, shown.append
    try:
        for text in ("1 + 1", "x = 3; x * 2", "for k in range(2): k", "[k for k in (1, 2)]"):
            exec(compile(text + "\n", "<prompt>", "single"), {})
    finally:
        sys.displayhook = before
    return shown


@picked
def generators_closed_and_thrown_into() -> Any:
    log: list[Any] = []

    def stubborn() -> Any:
        while True:
            try:
                yield 1
            except GeneratorExit:
                log.append("kept on")
                yield 2
                return

    def inner(way: int) -> Any:
        try:
            got = yield "a"
            log.append(got)
            yield "b"
        except KeyError:
            if way == 1:
                raise ValueError("turned") from None
            if way == 2:
                return "returned"
            yield "caught"
        finally:
            log.append(way)
            if way == 3:
                yield "in finally"

    def outer(way: int) -> Any:
        try:
            result = yield from inner(way)
            log.append(result)
            yield result
        except ValueError as fault:
            yield str(fault)
        finally:
            log.append("outer")

    def tried(step: Any) -> None:
        try:
            log.append(step())
        except (StopIteration, RuntimeError, KeyError, GeneratorExit) as fault:
            log.append(type(fault).__name__)

    odd = stubborn()
    next(odd)
    tried(odd.close)
    tried(odd.close)
    for way in range(5):
        gen = outer(way)
        tried(lambda gen=gen: next(gen))
        if way == 4:
            tried(lambda gen=gen: gen.throw(GeneratorExit))
        else:
            tried(lambda gen=gen: gen.throw(KeyError, KeyError(1)))
            tried(lambda gen=gen: gen.send(5))
            tried(gen.close)
        tried(lambda gen=gen: next(gen))

    def busy() -> Any:
        yield next(own)

    own = busy()
    try:
        next(own)
    except ValueError as fault:
        log.append(str(fault))

    def stops() -> Any:
        yield 1
        raise StopIteration(2)

    tried(lambda: list(stops()))
    late = (1 // (k - 1) for k in range(3))
    log.append(next(late))
    try:
        next(late)
    except ZeroDivisionError:
        tried(lambda: next(late))
    return log


@picked
def coroutines_cut_short() -> Any:
    log: list[Any] = []

    class Turn:
        def __await__(self) -> Any:
            got = yield 1
            return got

    class Hold:
        def __init__(self, fails: int) -> None:
            self.fails = fails

        async def __aenter__(self) -> Any:
            await Turn()
            if self.fails == 1:
                raise KeyError("enter")
            return self

        async def __aexit__(self, kind: Any, fault: Any, trail: Any) -> Any:
            log.append(kind and kind.__name__)
            await Turn()
            if self.fails == 2:
                raise KeyError("exit")
            return self.fails == 3

    async def numbers(n: int) -> Any:
        try:
            for k in range(n):
                got = yield k
                log.append(got)
                await Turn()
        except ValueError:
            yield "caught"
        finally:
            await Turn()
            log.append("closed")

    async def job(fails: int) -> Any:
        async with Hold(fails), Hold(0):
            async for k in numbers(3):
                if k == fails - 2:
                    raise ValueError(k)
        return [k async for k in numbers(2)], {k: await Turn() async for k in numbers(2)}

    async def by_hand() -> Any:
        stream = numbers(3)
        first = await stream.asend(None)
        second = await stream.asend("sent")
        third = await stream.athrow(ValueError)
        try:
            await anext(stream)
        except StopAsyncIteration:
            log.append("ended")
        other = numbers(2)
        await anext(other)
        await other.aclose()
        return first, second, third, await anext(other, "default")

    def driven(task: Any, most: int) -> Any:
        try:
            for k in range(most):
                task.send(k if k else None)
            return task.close()
        except StopIteration as end:
            return end.value
        except (KeyError, ValueError, RuntimeError) as fault:
            return repr(fault)

    results = [driven(job(fails), most) for fails in range(6) for most in (0, 1, 3, 60)]
    task = job(0)
    task.send(None)
    try:
        task.throw(KeyError("thrown"))
    except KeyError:
        log.append("thrown out")
    return results, driven(by_hand(), 60), log
