"""What each generated program begins with: small helpers of many kinds, all of them plain Python.

Only the helpers that a program uses are put before it.
"""

from __future__ import annotations

import re

HELPERS: dict[str, str] = {
    "reduce": "from functools import reduce\n",
    "partial": "from functools import partial\n",
    "lru_cache": "from functools import lru_cache\n",
    "singledispatch": "from functools import singledispatch\n",
    "contextmanager": "from contextlib import contextmanager\n",
    "ExitStack": "from contextlib import ExitStack\n",
    "suppress": "from contextlib import suppress\n",
    "closing": "from contextlib import closing\n",
    "asyncio": "import asyncio\n",
    "threading": "import threading\n",
    "dataclass": "from dataclasses import dataclass\n",
    "namedtuple": "from collections import namedtuple\n",
    "wraps": "from functools import wraps\n",
    "Lost": "class Lost(Exception):\n    pass\n",
    "Late": "class Late(Lost):\n    def __init__(self, hours=1):\n"
    "        super().__init__(hours)\n        self.hours = hours\n",
    "minus": "def minus(p, q=1):\n    return p - q\n",
    "steady_range": "def steady_range(*given):\n    return range(*given)\n",
    "gathered": "def gathered(first, *rest, z=0, **named):\n"
    "    return first + len(rest) + z + sum(named.values())\n",
    "remembered": "@lru_cache(maxsize=3)\ndef remembered(p):\n"
    "    return p if p < 2 else remembered(p - 1) + p\n",
    "hop": "def hop(p):\n    return 1 if p <= 0 else skip(p - 1) + 1\n"
    "def skip(p):\n    return 0 if p <= 0 else hop(p - 1) * 2\n",
    "shared": "total = 0\ndef shared(p):\n    global total\n    total = (total + p) % 1009\n"
    "    return total\n",
    "counted": "def counted(p):\n    try:\n        for q in range(p):\n            yield q\n"
    "    finally:\n        log.append('counted')\n    return p\n",
    "bouncing": "def bouncing(p):\n    got = 0\n    while p > 0:\n        try:\n"
    "            got = yield p + (got or 0)\n        except ValueError:\n            got = 7\n"
    "        except Lost as fault:\n            raise KeyError(p) from fault\n"
    "        p -= 1\n    return got\n",
    "Plain": "class Plain:\n    def __init__(self, part):\n        self.part = part\n"
    "    def worth(self, p):\n        return p + 1\n"
    "    @property\n    def twice(self):\n        return self.part * 2\n"
    "    def __getattr__(self, name):\n        if name == 'gone':\n"
    "            raise AttributeError(name)\n        return len(name)\n",
    "Half": "class Half:\n    def __get__(self, owner, kind=None):\n"
    "        return self if owner is None else owner.part // 2\n"
    "    def __set__(self, owner, value):\n        owner.part = value * 2\n"
    "    def __set_name__(self, kind, name):\n        self.name = name\n",
    "Box": "class Box(Plain):\n    half = Half()\n    __slots__ = ()\n"
    "    __match_args__ = ('part',)\n"
    "    def __init__(self, part=1):\n        super().__init__(part)\n"
    "    def __add__(self, other):\n        if not isinstance(other, Box):\n"
    "            return NotImplemented\n        return Box(self.part + other.part)\n"
    "    def __lt__(self, other):\n        return self.part < other.part\n"
    "    def __gt__(self, other):\n        return self.part > other.part\n"
    "    def __eq__(self, other):\n        return isinstance(other, Box) and"
    " self.part == other.part\n"
    "    def __hash__(self):\n        return hash(self.part)\n"
    "    def __len__(self):\n        return abs(self.part) % 9\n"
    "    def __bool__(self):\n        return self.part != 2\n"
    "    def __call__(self, p):\n        return self.part - p\n"
    "    def __contains__(self, p):\n        return p == self.part\n"
    "    def __getitem__(self, p):\n        if p > 3:\n            raise IndexError(p)\n"
    "        return self.part + p\n"
    "    def __setitem__(self, p, value):\n        self.part = (value + p) % 50\n"
    "    def __iter__(self):\n        yield self.part\n        yield from range(2)\n",
    "Deck": "class Deck(Box):\n    @staticmethod\n    def level(p):\n        return p % 4\n"
    "    @classmethod\n    def made(cls, p):\n        return cls(cls.level(p))\n"
    "    def worth(self, p):\n        return super().worth(p) + self.half\n"
    "    @property\n    def twice(self):\n        return super().twice + 1\n"
    "    @twice.setter\n    def twice(self, value):\n        self.part = value % 40\n",
    "Gate": "class Gate:\n    def __init__(self, mode):\n        self.mode = mode\n"
    "    def __enter__(self):\n        if self.mode == 4:\n            raise Lost('gate')\n"
    "        return self.mode\n"
    "    def __exit__(self, kind, fault, trail):\n        log.append(kind and kind.__name__)\n"
    "        if self.mode == 3 and kind:\n            raise Late(3)\n"
    "        return self.mode == 2 or (self.mode == 1 and kind is ValueError)\n",
    "gate": "@contextmanager\ndef gate(mode):\n    try:\n        yield mode\n"
    "    except (ValueError, KeyError):\n        if mode == 2:\n            raise\n"
    "        log.append('gate')\n    finally:\n        log.append(mode)\n",
    "Tick": "class Tick:\n    def __init__(self, p):\n        self.p = p\n"
    "    def __await__(self):\n        for q in range(self.p):\n            yield q\n"
    "        if self.p == 3:\n            raise Lost('tick')\n        return self.p\n",
    "Stream": "class Stream:\n    def __init__(self, p):\n        self.p = p\n"
    "    def __aiter__(self):\n        return self\n"
    "    async def __anext__(self):\n        self.p -= 1\n        if self.p < 0:\n"
    "            raise StopAsyncIteration\n        await Tick(self.p % 2)\n"
    "        return self.p\n",
    "Lock": "class Lock:\n    def __init__(self, mode):\n        self.mode = mode\n"
    "    async def __aenter__(self):\n        await Tick(1)\n        return self.mode\n"
    "    async def __aexit__(self, kind, fault, trail):\n        await Tick(self.mode % 2)\n"
    "        return self.mode == 2\n",
    "poured": "async def poured(p):\n    try:\n        for q in range(p):\n"
    "            await Tick(q % 2)\n            yield q\n"
    "    finally:\n        log.append('poured')\n",
    "drive": "def drive(task, most=60):\n    sent = None\n    try:\n"
    "        for _ in range(most):\n            sent = task.send(sent)\n"
    "        task.close()\n    except StopIteration as end:\n        return end.value\n"
    "    return -1\n",
    "used": "def used(gen, way):\n    first = next(gen)\n    if way == 0:\n        return first\n"
    "    if way == 1:\n        gen.close()\n        return next(gen, 5)\n"
    "    if way < 4:\n        return gen.throw(ValueError if way == 2 else Lost)\n"
    "    if way < 6:\n        return gen.send(way)\n"
    "    if way == 6:\n        del gen\n        return 6\n"
    "    return first, [p for p in gen]\n",
    "summed": "def summed(gen):\n    return sum(p or 0 for p in gen)\n",
    "spoilt": "def spoilt(task, way):\n    if way == 0:\n        return task.throw(Lost)\n"
    "    task.send(None)\n    if way == 1:\n        return task.throw(ValueError(1))\n"
    "    return task.close()\n",
    "collected": "async def collected(stream, most):\n    got = 0\n    async for p in stream:\n"
    "        got += p or 0\n        most -= 1\n        if most < 0:\n            break\n"
    "    return got\n",
    "meddled": "async def meddled(stream, way):\n    await anext(stream)\n    if way == 0:\n"
    "        return await stream.aclose()\n    if way == 1:\n"
    "        return await stream.athrow(ValueError)\n    if way == 2:\n"
    "        return await stream.asend(4)\n    return await anext(stream, 8)\n",
    "noted": "def noted(function):\n    @wraps(function)\n    def inside(*given, **named):\n"
    "        log.append(function.__name__)\n        return function(*given, **named)\n"
    "    return inside\n",
    "doubled": "def doubled(times):\n    def wrapping(function):\n"
    "        def inside(*given):\n            value = 0\n            for _ in range(times):\n"
    "                value = function(*given)\n            return value\n"
    "        return inside\n    return wrapping\n",
    "Seat": "@dataclass(order=True)\nclass Seat:\n    row: int\n    place: int = 2\n",
    "Frozen": "@dataclass(frozen=True)\nclass Frozen:\n    row: int\n"
    "    def __post_init__(self):\n        if self.row > 40:\n"
    "            raise ValueError(self.row)\n",
    "Pair": "Pair = namedtuple('Pair', 'left right')\n",
    "kindly": "@singledispatch\ndef kindly(p):\n    return 0\n@kindly.register(int)\n"
    "def _(p):\n    return p + 1\n@kindly.register(str)\ndef _(p):\n    return len(p)\n",
}
WORD = re.compile(r"[A-Za-z_]\w*")


def prelude_for(body: str) -> str:
    """Give the helpers that a body names, and those that they name, in a working order."""
    needed: set[str] = set()
    waiting = [body]
    while waiting:
        for word in set(WORD.findall(waiting.pop())):
            if word in HELPERS and word not in needed:
                needed.add(word)
                waiting.append(HELPERS[word])
    return "log = []\n" + "".join(text for name, text in HELPERS.items() if name in needed)
