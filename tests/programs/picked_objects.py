"""Picked calls written here: classes, calls from C code, frames, executed and very long code."""

# ruff: noqa: C417, RUF015 - these are the forms under test
# mypy: ignore-errors

from __future__ import annotations

import sys
from typing import Any

from programs.picked import picked


@picked
def executed_text() -> Any:
    space: dict[str, Any] = {}
    exec("def f(n):\n    return [k * n for k in range(n)]\nkept = f(4)", space)
    exec(compile("kept.append(eval('1 + 2'))", "<here>", "exec"), space)
    here = 5
    return space["kept"], eval("here * 2"), eval("[k + m for k in (1, 2)]", {"m": 3}), here


@picked
def metaclasses_and_descriptors() -> Any:
    log: list[Any] = []

    class Field:
        def __set_name__(self, kind: type, name: str) -> None:
            self.name = name

        def __get__(self, owner: Any, kind: Any = None) -> Any:
            return self if owner is None else owner.__dict__.get(self.name, 0)

        def __set__(self, owner: Any, value: Any) -> None:
            owner.__dict__[self.name] = value + 1

    class Kind(type):
        def __new__(mcs, name: str, bases: Any, space: Any, **named: Any) -> Any:
            log.append((name, sorted(named)))
            return super().__new__(mcs, name, bases, space)

        def __init__(cls, name: str, bases: Any, space: Any, **named: Any) -> None:
            super().__init__(name, bases, space)

        def __call__(cls, *given: Any) -> Any:
            log.append(given)
            return super().__call__(*given)

    class Vessel(metaclass=Kind, deck=2):
        load = Field()

        def __init_subclass__(cls, **named: Any) -> None:
            log.append(cls.__name__)

        def __class_getitem__(cls, item: Any) -> Any:
            return item

        def __missing__(self, key: Any) -> Any:
            return key

    class Small(Vessel, row=1):
        def __getattribute__(self, name: str) -> Any:
            log.append(name)
            return super().__getattribute__(name)

    one = Small()
    one.load = 4
    one.load += 1
    return one.load, Vessel[3], log


@picked
def finalizers() -> Any:
    import weakref

    log: list[str] = []

    class Rope:
        def __init__(self, name: str) -> None:
            self.name = name

        def __del__(self) -> None:
            log.append(self.name)

    one, two = Rope("one"), Rope("two")
    watch = weakref.ref(two, lambda _: log.append("gone"))
    del one
    one = two
    del two, one
    return log, watch()


@picked
def called_from_c() -> Any:
    class Key:
        def __init__(self, n: int) -> None:
            self.n = n

        def __hash__(self) -> int:
            return self.n % 3

        def __eq__(self, other: object) -> bool:
            return isinstance(other, Key) and self.n == other.n

        def __lt__(self, other: Key) -> bool:
            return self.n < other.n

        def __index__(self) -> int:
            return self.n

    keys = [Key(k * 7 % 10) for k in range(10)]
    return (
        [k.n for k in sorted(keys)],
        len(set(keys + keys)),
        "abcdefghijk"[keys[3]],
        max(map(lambda k: k.n, keys)),
        [*filter(lambda k: k.n % 2, keys)][0].n,
        dict.fromkeys(keys)[keys[2]],
        keys.index(Key(5)),
    )


@picked
def own_trace_of_frames() -> Any:
    def names() -> list[str]:
        frame: Any = sys._getframe()
        found = []
        while frame and frame.f_code.co_name != "own_trace_of_frames":
            found.append((frame.f_code.co_name, frame.f_lineno > 0))
            frame = frame.f_back
        return found  # type: ignore[return-value]

    return [names() for _ in range(2)], (lambda: names())(), list(map(lambda _: names(), [1]))


@picked
def traceback_places() -> Any:
    import traceback

    def left(n: int) -> float:
        return (n + 1) / (n - n)

    try:
        [left(k) for k in range(3)]
    except ZeroDivisionError as fault:
        return [
            (f.name, f.lineno, f.colno, f.end_colno)
            for f in traceback.extract_tb(fault.__traceback__)
        ]
    return None


@picked
def super_everywhere() -> Any:
    class A:
        def up(self, n: int) -> int:
            return n + 1

        @classmethod
        def made(cls) -> str:
            return cls.__name__

        @property
        def deck(self) -> int:
            return 1

    class B(A):
        def up(self, n: int) -> int:
            return super().up(n) * 2

        @classmethod
        def made(cls) -> str:
            return super().made() + "!"

        @property
        def deck(self) -> int:
            return super().deck + [super(B, self).deck for _ in range(2)][0]

    class C(B):
        def up(self, n: int) -> int:
            return super().up(n) + (lambda: super(C, self).up(1))()

    return C().up(3), C.made(), C().deck


def _far() -> str:
    lines = [f"    v{k} = n + {1000 + k}" for k in range(300)]
    body = "\n".join(lines)
    jump = "\n".join(f"        n = (n * 3 + {k}) % 1009" for k in range(300))
    return (
        f"def wide(n):\n{body}\n    return v299 - v0 + sum(v298 for _ in range(2))\n"
        f"def far(n):\n    for i in range(6):\n        if n % 2:\n            n += 1\n"
        f"            continue\n{jump}\n        if n % 7 == 1:\n            break\n"
        f"        try:\n    {jump.replace(chr(10), chr(10) + '    ')}\n"
        f"            10 // (n % 3)\n        except ZeroDivisionError:\n            n += 1\n"
        "    else:\n        n += 5\n    return n\n"
        f"def later(n):\n    while n > 2:\n{jump}\n        yield n\n"
    )


@picked
def long_and_wide() -> Any:
    space: dict[str, Any] = {}
    exec(_far(), space)
    later = space["later"](5)
    return space["wide"](3), [space["far"](k) for k in range(8)], [x for x, _ in zip(later, "abc")]  # noqa: B905
