"""Picked calls written here for what is awkward to count: generators, exceptions, coroutines."""

# ruff: noqa: UP028, B012, F841, SIM105 - these are the forms under test
# mypy: ignore-errors

from __future__ import annotations

import sys
from typing import Any

from programs.picked import picked


@picked
def unfinished_generator() -> Any:
    def sailings() -> Any:
        try:
            for hour in range(100):
                yield hour
        finally:
            log.append("dropped")

    log: list[str] = []
    first = sailings()
    second = sailings()
    third = sailings()
    seen = [next(first), next(first), next(second)]
    del first
    second.close()
    try:
        third.throw(KeyError)
    except KeyError:
        log.append("never begun")
    return seen, log


@picked
def raised_in_a_comprehension_in_a_with_in_a_finally() -> Any:
    class Gate:
        def __enter__(self) -> Gate:
            return self

        def __exit__(self, kind: Any, fault: Any, trail: Any) -> bool:
            log.append(kind)
            return False

    log: list[Any] = []
    try:
        try:
            log.append(1)
        finally:
            with Gate():
                log.append([10 // (k - 2) for k in range(5)])
    except ZeroDivisionError as fault:
        log.append(fault.__traceback__ is not None)
    return repr(log)


@picked
def exception_past_a_named_handler_in_a_range() -> Any:
    def loaded(room: int) -> int:
        for k in range(room):
            try:
                10 // (k - 3)
            except KeyError as fault:
                pass
        return room

    found: list[Any] = []
    for room in (3, 9, 2, 5):
        try:
            found.append(loaded(room))
        except ZeroDivisionError:
            try:
                raise IndexError(room)
            except IndexError as fault:
                found.append(repr(fault.__context__))
        found.append(sys.exc_info()[0])
    return found


@picked
def finally_that_returns() -> Any:
    def lost(way: int) -> Any:
        for k in range(4):
            try:
                if way == k:
                    raise ValueError(k)
                if way == k + 10:
                    return "early"
                continue
            except KeyError:
                return "never"
            finally:
                if way % 10 == k:
                    return k * 100
                if way == 20:
                    break
        return "end"

    return [lost(way) for way in (0, 2, 11, 13, 20, 30)]


@picked
def return_inside_nested_with_and_for() -> Any:
    import contextlib

    @contextlib.contextmanager
    def held(n: int) -> Any:
        try:
            yield n
        finally:
            log.append(n)

    def found(limit: int) -> int | None:
        for a in range(4):
            with held(a) as one, held(a + 10):
                for b in range(a):
                    if one * b > limit:
                        return b
        return None

    log: list[int] = []
    return [found(k) for k in range(8)], log


@picked
def delegation() -> Any:
    def inner(n: int) -> Any:
        got = 0
        while n:
            try:
                got += (yield n) or 0
            except ValueError:
                got -= 100
            n -= 1
        return got

    def outer() -> Any:
        first = yield from inner(3)
        second = yield from inner(2)
        yield from ()
        yield from [first, second]
        return first * second

    gen = outer()
    seen = [next(gen), gen.send(5), gen.throw(ValueError), gen.send(7), gen.send(1)]
    while True:
        try:
            seen.append(next(gen))
        except StopIteration as end:
            return seen, end.value


@picked
def async_by_hand() -> Any:
    class Turn:
        def __init__(self, n: int) -> None:
            self.n = n

        def __await__(self) -> Any:
            for k in range(self.n):
                yield k
            return self.n

    class Hold:
        async def __aenter__(self) -> int:
            return await Turn(1)

        async def __aexit__(self, kind: Any, fault: Any, trail: Any) -> bool:
            await Turn(2)
            return kind is ValueError

    async def stream(n: int) -> Any:
        try:
            for k in range(n):
                await Turn(k % 2)
                yield k
        finally:
            log.append("closed")

    async def main() -> Any:
        total = 0
        async with Hold() as held:
            async for k in stream(5):
                total += k + held
                if k == 3:
                    raise ValueError(k)
        squares = [k * k async for k in stream(4) if k % 2]
        sums = {k: await Turn(k) for k in range(3)}
        generator = stream(3)
        first = await anext(generator)
        await generator.aclose()
        return total, squares, sums, first

    log: list[str] = []
    task = main()
    sent = 0
    while True:
        try:
            task.send(None)
            sent += 1
        except StopIteration as end:
            return end.value, sent, log


@picked
def exception_groups() -> Any:
    def split(group: BaseException | None) -> list[Any]:
        log: list[Any] = []
        try:
            try:
                if group:
                    raise group
                log.append("none")
            except* ValueError as found:
                log.append([str(x) for x in found.exceptions])
                raise
            except* (KeyError, OSError) as found:
                log.append(len(found.exceptions))
            else:
                log.append("else")
            finally:
                log.append("finally")
        except BaseException as left:
            log.append(repr(left))
        return log

    inner = ExceptionGroup("in", [ValueError(3), KeyError(4)])
    return [
        split(group)
        for group in (
            None,
            ValueError(1),
            OSError(2),
            ExceptionGroup("a", [inner, TypeError(5)]),
            ExceptionGroup("b", [KeyError(6)]),
        )
    ]


@picked
def matching() -> Any:
    class Berth:
        __match_args__ = ("port", "length")

        def __init__(self, port: str, length: int) -> None:
            self.port, self.length = port, length

    def said(thing: Any) -> Any:
        match thing:
            case 0 | 1:
                return "few"
            case [a, b] if a == b:
                return "pair"
            case [first, *rest]:
                return first, len(rest)
            case {"port": str(port), **rest}:
                return port, sorted(rest)
            case Berth("Eide" as port, length) if length > 80:
                return port, length
            case Berth(length=n):
                return n
            case str() as text if text.isupper():
                return text.lower()
            case None:
                return "none"
            case _:
                return "other"

    things = (0, 1, [2, 2], [2, 3], (5,), {"port": "Ardal", "z": 1}, {"port": 3})
    more = (Berth("Eide", 90), Berth("Eide", 20), "ABC", "abc", None, 2.5, [])
    return [said(thing) for thing in (*things, *more)]
