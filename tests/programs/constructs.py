"""Each construct of the language that compilers treat differently, by itself and small.

Every function here takes nothing, does the same on every version and returns what it worked out.
"""

# ruff: noqa - these are the forms under test
# fmt: off
# mypy: ignore-errors

from __future__ import annotations

PORTS = ("Ardal", "Bremnes", "Corran", "Dunvik")


def run(task):
    """Drive a coroutine to its end."""
    try:
        while True:
            task.send(None)
    except StopIteration as end:
        return end.value


class Pause:
    def __await__(self):
        yield 1
        yield 2
        return 3


class Tide:
    def __init__(self, most):
        self.most = most

    def __aiter__(self):
        return self

    async def __anext__(self):
        if not self.most:
            raise StopAsyncIteration
        self.most -= 1
        await Pause()
        return self.most


class Gate:
    def __enter__(self):
        return 4

    def __exit__(self, kind, fault, trail):
        return kind is KeyError

    async def __aenter__(self):
        return await Pause()

    async def __aexit__(self, kind, fault, trail):
        await Pause()
        return kind is KeyError


class Hull:
    __match_args__ = ("length", "beam")

    def __init__(self, length=40, beam=9):
        self.length = length
        self.beam = beam

    def room(self):
        return self.length * self.beam

    @classmethod
    def small(cls):
        return cls(12, 4)

    def __pos__(self):
        return self.length


class Ferry(Hull):
    def __init__(self, length=40):
        super().__init__(length)
        self.decks = 2

    def room(self):
        return super().room() * self.decks

    def named(self):
        return super(Ferry, self).room() + super(Ferry, self).__init__.__name__.count("i")

    def bound(self):
        method = super().room
        return method() + method()

    @classmethod
    def small(cls):
        hull = super().small
        return hull.__name__


def methods_of_the_class_above():
    ferry = Ferry(30)
    return ferry.room(), ferry.named(), ferry.bound(), Ferry.small()


def super_under_another_name():
    ask = super

    class Barge(Hull):
        def room(self):
            return ask(Barge, self).room() + 1

    return Barge().room()


def super_of_our_own():
    def super(*given):
        return Hull(len(given) + 1)

    class Barge(Hull):
        def room(self):
            return super(Barge, self).room()

    return Barge().room()


def super_without_a_call():
    class Barge(Hull):
        def room(self):
            above = super()
            return above.room() + above.length if hasattr(above, "length") else above.room()

    return Barge().room()


def signs():
    hull, values = Hull(), [1, -2, 3]
    return +hull, -values[0], ~values[1], [+v for v in values], not values


def tests_for_none():
    found = []
    for value in (None, 0, 3, None, "x"):
        if value is None:
            found.append(1)
        if value is not None:
            found.append(2)
        if not (value is None):
            found.append(3)
        found.append(value is None)
        found.append(4 if value is None or value else 5)
        while value is not None:
            value = None
        if None is value:
            found.append(6)
        if value == None:
            found.append(7)
    return found, [v for v in (1, None, 2) if v is not None], any(v is None for v in found)


def none_in_chains():
    out = []
    for a in (None, 1):
        for b in (None, 2):
            if a is None is b:
                out.append(1)
            if a is b is None:
                out.append(2)
            if (c := a) is None and b is not None:
                out.append(c)
            if a is not None is not b:
                out.append(3)
            assert a is None or b is None or a < b, "order"
    return out


def orders():
    a, b, c = 1, 2, 3
    return (
        a < b < c,
        a < b > c,
        a == b,
        a in (b, c),
        a not in [b, c],
        a < b == True,
        (a < b) is True,
    )


def slices():
    xs = list(range(9))
    kept = slice(1, 4)
    first = xs[1:3] + xs[:2] + xs[::2] + xs[kept] + xs[-1:]
    xs[2:4] = [7]
    xs[1:2] += [8]
    xs[::3] = [0] * len(xs[::3])
    del xs[:1]
    del xs[0]
    xs[kept] = xs[kept]
    xs[0] += xs[-1]
    xs[len(xs) :] = [1, 2]
    return first, xs, "abc"[1:], "abc"[0]


def comprehensions():
    base = 3
    squares = [v * base for v in range(4)]
    pairs = {(a, b) for a in range(3) for b in range(a) if a != b}
    table = {k: [j for j in range(k)] for k in squares}
    nested = [[x * y for x in range(3)] for y in range(2)]
    functions = [lambda v=v: v + base for v in range(3)]
    captured = [lambda: v for v in range(3)]
    single = [w for v in range(4) for w in [v * v] if w]
    return squares, sorted(pairs), table, nested, [f() for f in functions + captured], single


def comprehension_left_by_an_exception():
    try:
        return [1 // (v - 2) for v in range(5)]
    except ZeroDivisionError:
        return [v for v in [1, 2] if v > 1]


def comprehension_in_a_class():
    class Quay:
        berths = [b for b in range(4)]
        lengths = {b: b * 10 for b in berths}
        names = tuple(f"q{b}" for b in berths)

    return Quay.berths, Quay.lengths, Quay.names


def comprehension_that_assigns():
    seen = [last := v for v in range(4)]
    total = 0
    running = [total := total + v for v in seen]
    return seen, last, running, total


def generator_expressions():
    items = (v * 2 for v in range(5))
    first = next(items)
    return first, sum(items), list(w for v in range(3) for w in range(v)), tuple(x for x in "ab")


def generators():
    def inner(n):
        got = yield from range(n)
        try:
            got = yield n
        finally:
            got = 9
        return got

    def outer():
        value = yield from inner(3)
        yield value

    other = inner(0)
    next(other)
    other.close()
    return list(outer())


def calls():
    def gathered(a, *rest, key=0, **named):
        return a + len(rest) + key + len(named)

    args, named = (1, 2), {"x": 1}
    return (
        gathered(1),
        gathered(1, 2, key=3),
        gathered(*args),
        gathered(0, *args),
        gathered(*args, *args, key=2),
        gathered(1, **named),
        gathered(*args, **named, y=2),
        gathered(a=1, z=2),
        "-".join(PORTS[:2]).replace("a", "o").split("-"),
        max([1, 2], key=lambda v: -v),
        sorted(PORTS, key=len, reverse=True)[0],
        (lambda: 5)(),
        gathered(1, 2, 3, 4, 5, 6, 7, 8, 9, 10, 11, 12, 13, 14, 15, 16, 17, 18, k=1),
    )


def displays():
    a, b = 1, [2, 3]
    return (
        [a, *b],
        (*b, a),
        {a, *b},
        {**{"a": a}, "b": b},
        [1, 2, 3, 4],
        {1, 2, 3, 4},
        {"a": a, "b": b},
        {a: 1, "c": 2},
        (a, b),
        [],
        {},
        (),
        [a],
        {"a": 1, **{}, "b": 2},
    )


def unpacking():
    a, b = 1, 2
    a, b = b, a
    a, b, c = c0 = b, a, 3
    a, b, c = c, b, a
    d, e, f, g = a, b, c, 4
    (h, i), *rest = (1, 2), 3, 4
    [j, k] = [d, e]
    first, *middle, last = range(5)
    for x, (y, z) in [(1, (2, 3))]:
        a += x + y + z
    (only,) = [7]
    a, a = b, c
    return a, b, c, c0, d, e, f, g, h, i, rest, j, k, first, middle, last, only


def texts():
    a, b, width = 3, "deck", 6
    return (
        f"{a}",
        f"{a}{b}",
        f"{a!r:>{width}}|{b:^8}",
        f"lane {a + 1} of {b!s}",
        "%s %d" % (b, a),
        "%s" % b,
        "%5.1f %r" % (a, b),
        "{} {}".format(a, b),
        f"{a=}",
        f"{'x'}{{}}" "tail",
        f"{a:}",
        f"{f'{a}'}-{b[1:]}",
        "".join([b, "s"]),
    )


def many_parts():
    a = 1
    return f"{a},{a},{a},{a},{a},{a},{a},{a},{a},{a},{a},{a},{a},{a},{a},{a},{a},{a}".count(",")


def handlers():
    out = []
    for way in (0, 1, 2, 3):
        try:
            try:
                if way == 1:
                    raise KeyError(way)
                if way == 2:
                    raise ValueError(way) from None
                out.append([][way])
            except KeyError as fault:
                out.append(fault.args[0])
            except (ValueError, OSError):
                raise
            else:
                out.append("none")
            finally:
                out.append(way)
        except (IndexError, ValueError) as fault:
            out.append(type(fault).__name__)
    return out


def groups():
    out = []
    for parts in ((ValueError(1),), (KeyError(1), ValueError(2)), (OSError(3),), ()):
        try:
            try:
                if parts:
                    raise ExceptionGroup("parts", list(parts))
            except* ValueError as some:
                out.append(len(some.exceptions))
            except* KeyError:
                out.append("key")
                raise RuntimeError("again")
            else:
                out.append("none")
        except* OSError as rest:
            out.append(len(rest.exceptions))
        except* RuntimeError:
            out.append("run")
    return out


def group_of_one():
    try:
        raise ValueError(3)
    except* ValueError as some:
        return_value = len(some.exceptions)
    return return_value


def leaving_early():
    out = []
    for k in range(6):
        try:
            if k == 1:
                continue
            if k == 4:
                break
            out.append(k)
        finally:
            out.append(-k)
    else:
        out.append("all")
    while out:
        if len(out) > 3:
            out.pop()
            continue
        break
    return out


def contexts():
    out = []
    for k in range(4):
        with Gate() as a, Gate() as b:
            out.append(a + b)
            if k == 1:
                continue
            if k == 2:
                raise KeyError(k)
            out.append(k)
    with Gate():
        return out, k


def assertions():
    out = []
    for k in range(3):
        try:
            assert k < 1
            out.append(k)
        except AssertionError:
            out.append("no")
        try:
            assert k > 1, f"too small {k}"
        except AssertionError as fault:
            out.append(str(fault))
    return out


def patterns():
    def kind(value):
        match value:
            case None:
                return "none"
            case True | False:
                return "truth"
            case 0 | 1:
                return "small"
            case int() if value > 100:
                return "large"
            case [] | ():
                return "empty"
            case [x]:
                return x
            case [x, y]:
                return x, y
            case [first, *_, last]:
                return first, last
            case {"port": str(name), **rest}:
                return name, len(rest)
            case {}:
                return "table"
            case Ferry(length=40):
                return "ferry"
            case Hull(length, beam):
                return length * beam
            case str() as text:
                return text.upper()
            case Hull.room | 3.5:
                return "odd"
            case _:
                return "other"

    values = [None, True, 1, 300, 7, [], [4], [5, 6], [1, 2, 3, 4], {"port": "Eide", "n": 1}]
    return [kind(v) for v in [*values, {"x": 1}, Ferry(40), Hull(3, 2), "deck", 3.5, 2.5]]


def pattern_of_one_case():
    out = []
    for value in ({"a": 1, "b": 2}, {"a": 1}, [1, (2, 3)], 5):
        match value:
            case {"a": a, "b": b}:
                out.append(a + b)
            case [a, (b, c)]:
                out.append(a + b + c)
    return out


def branches():
    out = []
    for a in (0, 1):
        for b in (0, 2):
            c = a and b or 3
            d = (a or b) and not c
            if a and b or not a and not b:
                out.append(c)
            elif not (a or b):
                out.append(d)
            out.append(a if b else c)
            if (a and b) == 2 and (b or a):
                out.append(4)
    while True:
        if len(out) > 3:
            break
    if 0:
        out.append("never")
    return out


def attributes():
    hull = Hull()
    hull.length += 2
    hull.name = "Eide"
    del hull.name
    setattr(hull, "beam", getattr(hull, "beam") + 1)
    hull.parts = {"a": [hull]}
    hull.parts["a"][0].length = 5
    return hull.length, hull.room(), hull.parts["a"][0].beam, hull.__class__.__name__


def decorators():
    def doubled(function):
        return lambda *given: function(*given) * 2

    def times(n):
        return lambda function: lambda *given: function(*given) * n

    @doubled
    @times(3)
    def length(a, b=2, *, c=3):
        return a + b + c

    @doubled
    def other(a: int, b: "int" = 4) -> int:
        return a + b + length(0)

    return length(1), other(2)


def closures():
    total = 0

    def add(n):
        nonlocal total
        total += n

        def again():
            return total + n

        return again

    return [add(n)() for n in range(4)]


def classes():
    class Plain:
        length: int = 4
        unit: "str"

        def __init_subclass__(cls, **given):
            cls.given = len(given)

    class Named(Plain, extra=1):
        """A class with words."""

        def own(self):
            return __class__.__name__

    return Named.given, Named().own(), sorted(Plain.__annotations__)


def imports():
    import math as m
    import os.path
    from math import floor, sqrt as root

    return m.floor(2.5), floor(root(9)), os.path.basename("a/b")


def deletions():
    xs, d = [1, 2, 3], {"a": 1, "b": 2}
    del xs[0], d["a"]
    y = 4
    del y
    return xs, d


def coroutines():
    async def added(n):
        got = 0
        for _ in range(n):
            got += await Pause()
        return got

    async def main():
        out = [await added(k) for k in range(3)]
        out += [v async for v in Tide(3)]
        table = {k: await Pause() async for k in Tide(2)}
        kept = {v async for v in Tide(3) if v}
        async with Gate() as opened:
            out.append(opened)
        async for v in Tide(2):
            out.append(v)
        else:
            out.append("end")
        return out, table, sorted(kept), [v async for v in (w async for w in Tide(2))]

    return run(main())


def nested_waits():
    async def main():
        grid = [[v async for v in Tide(k)] for k in range(3)]
        other = [[await Pause() for _ in range(k)] async for k in Tide(3)]
        try:
            return [1 // v async for v in Tide(2)]
        except ZeroDivisionError:
            return grid, other

    return run(main())


def async_generators():
    async def poured(n):
        for k in range(n):
            await Pause()
            yield k

    async def main():
        items = poured(3)
        first = await anext(items)
        rest = [v async for v in items]
        async with Gate():
            raise KeyError(1)
        return first, rest, sum([v async for v in poured(2)])

    return run(main())


def names():
    return sorted(
        name
        for name, value in globals().items()
        if callable(value)
        and not isinstance(value, type)
        and value.__module__ == __name__
        and name not in ("run", "names", "results")
    )


def results():
    """Run each construct; give what each returns."""
    return {name: repr(globals()[name]()) for name in names()}
