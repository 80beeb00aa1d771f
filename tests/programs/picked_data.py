"""Picked calls of the standard library: algorithms, data, classes, concurrency."""

# mypy: ignore-errors

from __future__ import annotations

import random
from typing import Any

from programs.picked import PORTS, TEXT, picked, pure


def _keys(number: int, seed: int = 1) -> list[int]:
    return random.Random(seed).choices(range(1000), k=number)


@picked
def bisect_in_python() -> Any:
    bisect = pure("bisect", "_bisect")
    keys = sorted(_keys(100))
    found = [bisect.bisect_left(keys, k) for k in range(0, 1000, 50)]
    return found, [bisect.bisect_right(keys, -k, key=lambda x: -x) for k in (1, 2)]


@picked
def insort_in_python() -> Any:
    bisect = pure("bisect", "_bisect")
    kept: list[int] = []
    for key in _keys(40):
        bisect.insort(kept, key)
    return kept


@picked
def heapq_in_python() -> Any:
    heapq = pure("heapq", "_heapq")
    heap = _keys(60)
    heapq.heapify(heap)
    popped = [heapq.heappop(heap) for _ in range(30)]
    heapq.heappush(heap, 5)
    return popped, heapq.heappushpop(heap, 3), heapq.heapreplace(heap, 900)


@picked
def heapq_merging() -> Any:
    heapq = pure("heapq", "_heapq")
    runs = [sorted(_keys(10, seed)) for seed in (1, 2, 3)]
    merged = list(heapq.merge(*runs, key=lambda x: x))
    return merged, heapq.nlargest(3, _keys(30)), heapq.nsmallest(3, _keys(30), key=str)


@picked
def statistics_many() -> Any:
    import statistics

    data = _keys(30)
    return (
        statistics.mean(data),
        statistics.median(data),
        statistics.pvariance(data),
        statistics.quantiles(data, n=5),
        statistics.multimode(data),
        statistics.linear_regression(range(30), data),
        statistics.NormalDist(2, 3).cdf(1),
    )


@picked
def statistics_raising() -> Any:
    import statistics

    try:
        return statistics.mean([])
    except statistics.StatisticsError as fault:
        return str(fault)


@picked
def fractions_sum() -> Any:
    from fractions import Fraction

    total = sum((Fraction(1, k) for k in range(1, 25)), Fraction(0))
    return total, total.limit_denominator(100), Fraction("3/7") ** 3 < Fraction(1.5)


@picked
def copy_deep() -> Any:
    import copy

    ring: list[Any] = [1, {"a": (2, [3])}, {4, 5}]
    ring.append(ring[1])
    twice = copy.deepcopy(ring)
    return twice[3] is twice[1], twice, copy.copy(ring) == ring


@picked
def graphlib_order() -> Any:
    from graphlib import CycleError, TopologicalSorter

    links = {k: [k // 2, k // 3] for k in range(6, 40)}
    order = list(TopologicalSorter(links).static_order())
    try:
        TopologicalSorter({1: [2], 2: [3], 3: [1]}).prepare()
    except CycleError as fault:
        return order, fault.args
    return order


@picked
def collections_many() -> Any:
    from collections import ChainMap, Counter, OrderedDict, UserDict, UserList, namedtuple

    berth = namedtuple("berth", "port length")
    chain = ChainMap({"a": 1}, {"b": 2})
    counted = Counter(TEXT) - Counter("sailing")
    return (
        berth("Eide", 90)._replace(length=80),
        sorted(chain.items()),
        counted.most_common(3),
        UserDict(a=1) | {"b": 2},
        UserList([3, 1]) + [2],  # noqa: RUF005
        OrderedDict(a=1) == OrderedDict(a=1),
        sorted((counted & Counter("abc")).elements()),
    )


@picked
def ordered_dict_in_python() -> Any:
    collections = pure("collections", "_collections")
    ordered = collections.OrderedDict((port, len(port)) for port in PORTS)
    ordered.move_to_end("Ardal")
    ordered.popitem(last=False)
    del ordered["Eide"]
    return list(ordered.items()), list(reversed(ordered)), repr(ordered)


@picked
def dataclass_making() -> Any:
    import dataclasses

    @dataclasses.dataclass(order=True, frozen=True)
    class Berth:
        port: str
        length: int = 90
        tags: list[str] = dataclasses.field(default_factory=list, compare=False)

    one, two = Berth("Eide"), Berth("Eide", 80, ["x"])
    try:
        one.length = 3
    except dataclasses.FrozenInstanceError as fault:
        said = str(fault)
    return two < one, dataclasses.replace(one, length=2), dataclasses.asdict(two), hash(two), said


@picked
def enum_making() -> Any:
    import enum

    class Deck(enum.IntEnum):
        LOW = 1
        MID = enum.auto()

    class Load(enum.Flag):
        CAR = enum.auto()
        LORRY = enum.auto()
        ANY = CAR | LORRY

    try:
        Deck(9)
    except ValueError as fault:
        said = str(fault)
    return Deck["LOW"], Deck(2).name, Load.ANY & ~Load.CAR, list(Load), said


@picked
def datetime_in_python() -> Any:
    dt = pure("datetime", "_datetime")
    day = dt.datetime(2026, 2, 27, 22, 15) + dt.timedelta(days=3, minutes=130)
    zone = dt.timezone(dt.timedelta(hours=2))
    return (
        day.isoformat(),
        day.replace(tzinfo=zone).utctimetuple(),
        dt.date(2026, 1, 1).isocalendar(),
        dt.datetime.fromisoformat("2026-12-01T04:05:06.007"),
        day.strftime("%Y-%j"),
        dt.timedelta(hours=50) // dt.timedelta(minutes=7),
    )


@picked
def decimal_in_python() -> Any:
    import _pydecimal as decimal

    with decimal.localcontext() as context:
        context.prec = 20
        two = decimal.Decimal(2)
        parts = [two.sqrt(), two.ln(), decimal.Decimal("1e3") / 7, two**5, -two % 3]
    try:
        decimal.Decimal("x")
    except decimal.InvalidOperation as fault:
        parts.append(type(fault).__name__)
    return [str(part) for part in parts]


@picked
def pickle_in_python() -> Any:
    import io
    import pickle

    out = io.BytesIO()
    pickle._Pickler(out, 4).dump({"a": [1, 2.5, "x", (None, True)], "b": {3: b"y"}, "c": 1 << 70})
    return pickle._Unpickler(io.BytesIO(out.getvalue())).load()


@picked
def random_in_python() -> Any:
    source = random.Random(7)
    deck = list(range(20))
    source.shuffle(deck)
    return deck, source.sample(deck, 5), source.gauss(0, 1), source.betavariate(2, 3)


@picked
def functools_many() -> Any:
    import functools

    @functools.lru_cache(maxsize=4)
    def paths(n: int) -> int:
        return 1 if n < 2 else paths(n - 1) + paths(n - 2)

    @functools.total_ordering
    class Berth:
        def __init__(self, length: int) -> None:
            self.length = length

        def __eq__(self, other: object) -> bool:
            return isinstance(other, Berth) and self.length == other.length

        def __lt__(self, other: Berth) -> bool:
            return self.length < other.length

        @functools.cached_property
        def area(self) -> int:
            return self.length * 12

    one, two = Berth(1), Berth(2)
    return (
        [paths(k) for k in range(12)],
        paths.cache_info(),
        one >= two,
        one.area + one.area,
        sorted([3, 1, 2], key=functools.cmp_to_key(lambda a, b: b - a)),
        functools.reduce(lambda a, b: a * b, range(1, 6)),
    )


@picked
def lru_cache_in_python() -> Any:
    functools = pure("functools", "_functools")

    def squared(n: int) -> int:
        return n * n

    kept = functools._lru_cache_wrapper(squared, 3, False, functools._CacheInfo)
    return [kept(k % 5) for k in range(20)], kept.cache_info()


@picked
def singledispatch_kinds() -> Any:
    import functools

    @functools.singledispatch
    def said(value: object) -> str:
        return "?"

    said.register(int, lambda value: "int")
    said.register(list, lambda value: "list")
    return [said(value) for value in (1, True, [2], "x", 2.5)]


@picked
def contextlib_many() -> Any:
    import contextlib

    log: list[Any] = []

    @contextlib.contextmanager
    def moored(name: str) -> Any:
        log.append(name)
        try:
            yield name.upper()
        except KeyError:
            log.append("key")
        finally:
            log.append("off")

    with contextlib.ExitStack() as stack:
        stack.enter_context(moored("a"))
        stack.callback(log.append, 1)
        stack.enter_context(contextlib.suppress(ValueError))
        with moored("b"), moored("c"):
            raise KeyError(1)
    try:
        with moored("d"):
            raise ValueError
    except ValueError:
        log.append("value")
    return log


@picked
def inspect_signature() -> Any:
    import inspect
    import textwrap

    signature = inspect.signature(textwrap.TextWrapper.__init__)
    bound = signature.bind(None, 30, tabsize=4)
    bound.apply_defaults()
    return str(signature), len(bound.arguments)


@picked
def asyncio_running() -> Any:
    import asyncio

    async def sailing(n: int) -> int:
        await asyncio.sleep(0)
        if n == 2:
            raise ValueError(n)
        return n

    async def day() -> Any:
        queue: asyncio.Queue[int] = asyncio.Queue()
        done = await asyncio.gather(*(sailing(n) for n in range(4)), return_exceptions=True)
        queue.put_nowait(3)
        try:
            async with asyncio.TaskGroup() as group:
                group.create_task(sailing(2))
        except* ValueError as faults:
            number = len(faults.exceptions)
        return [repr(x) for x in done], await queue.get(), number

    return asyncio.run(day())


@picked
def threads_joined() -> Any:
    import queue
    import threading

    waiting: queue.SimpleQueue[int] = queue.SimpleQueue()

    def work(n: int) -> None:
        waiting.put(sum(k * k for k in range(n)))

    for n in range(4):
        crew = threading.Thread(target=work, args=(n,))
        crew.start()
        crew.join()
    return [waiting.get() for _ in range(4)]


@picked
def fresh_import() -> Any:
    import importlib
    import sys

    for name in [n for n in sys.modules if n == "colorsys" or n.startswith("wsgiref")]:
        del sys.modules[name]
    colours = importlib.import_module("colorsys")
    importlib.import_module("wsgiref.util")
    return colours.rgb_to_hsv(0.2, 0.4, 0.6)
