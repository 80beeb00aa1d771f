"""Families of inputs: one pattern that makes a value of any size, and small changes to it."""

from __future__ import annotations

import random
from collections.abc import Iterator
from dataclasses import dataclass, replace
from typing import Any

from steplaw.worst import ranks
from steplaw.worst.kinds import Kind

#: Differences of neighbouring numbers: one, none, down, and those that tables of 2^k cells dislike.
DIFFERENCES = (1, 0, -1, 2, 3, 5, 7, 10, *(2**k for k in range(2, 17)), 100, 1000, 10000)
EDGES = ("path", "path back", "star", "star inward", "cycle", "tree", "complete", "one edge")


@dataclass(frozen=True, slots=True)
class Family:
    """A pattern for one argument.

    Parameters
    ----------
    form : str
        ``named``, ``grown``, ``pumped``, ``edges``, ``digits``, ``decided``, ``strategy`` or
        ``as drawn``.
    name : str
        Which of the named patterns.
    rule : tuple of Step
        Of a grown order.
    parts : triple of tuple
        Of a pumped sequence: what it begins with, what is repeated, what it ends with.
    difference : int
        What consecutive ranks lie apart, where elements are any whole numbers.
    """

    form: str
    name: str = ""
    rule: tuple[ranks.Step, ...] = ()
    parts: tuple[tuple[Any, ...], ...] = ()
    difference: int = 1

    def __str__(self) -> str:
        if self.form == "grown":
            text = ranks.said(self.rule)
        elif self.form == "pumped":
            text = _pumped_text(self.parts)
        elif self.form == "decided":
            text = "decided against the comparisons (McIlroy's adversary)"
        else:
            text = self.name or self.form
        return text if self.difference == 1 else f"{text}, {self.difference} apart"


def _pumped_text(parts: tuple[tuple[Any, ...], ...]) -> str:
    def shown(part: tuple[Any, ...]) -> str:
        if all(isinstance(x, str) and len(x) == 1 for x in part):
            return repr("".join(part))
        return repr(list(part))

    begin, unit, end = parts
    text = f"{shown(unit)} over and over"
    if begin:
        text = f"{shown(begin)}, then {text}"
    return f"{text}, then {shown(end)}" if end else text


def value(family: Family, kind: Kind, base: Any, n: int, decided: list[int] | None = None) -> Any:
    """Make the value of a family at a size.

    Parameters
    ----------
    family : Family
        The pattern.
    kind : Kind
        What kind of value is wanted.
    base : object
        What the feed drew at that size, in place of what no pattern makes.
    n : int
        The size.
    decided : list of int, optional
        The order that the adversary found at this size.
    """
    if family.form == "as drawn":
        return base
    if family.form == "edges":
        return kind.container(_edges(family.name, len(base)))
    if family.form == "digits":
        return int(family.name)
    n = len(base)
    if family.form == "pumped":
        letters = _pumped(family.parts, n)
        return "".join(letters) if kind.name == "word" else kind.container(letters)
    if family.form == "decided":
        order = decided if decided is not None else list(range(n))
    else:
        order = ranks.grown(n, family.rule) if family.rule else ranks.NAMED[family.name](n)
    return kind.container(_elements(order, kind, base, family.difference))


def _elements(order: list[int], kind: Kind, base: Any, difference: int) -> list[Any]:
    if kind.name == "permutation" or kind.alphabet:
        pool = sorted(base)
        return [pool[r] for r in order]
    return [kind.low + r * difference for r in order]


def _pumped(parts: tuple[tuple[Any, ...], ...], n: int) -> list[Any]:
    begin, unit, end = parts
    middle = max(n - len(begin) - len(end), 0)
    whole = [*begin, *(unit[i % len(unit)] for i in range(middle)), *end]
    return whole[:n] if len(whole) > n else whole


def _edges(name: str, n: int) -> list[tuple[int, int]]:
    if name == "path":
        return [(i, i + 1) for i in range(n)]
    if name == "path back":
        return [(i + 1, i) for i in range(n - 1, -1, -1)]
    if name == "star":
        return [(0, i + 1) for i in range(n)]
    if name == "star inward":
        return [(i + 1, 0) for i in range(n)]
    if name == "cycle":
        return [(i, (i + 1) % max(n, 1)) for i in range(n)]
    if name == "tree":
        return [(i // 2, i + 1) for i in range(n)]
    if name == "one edge":
        return [(0, 1)] * n
    pairs = ((j, i) for i in range(1, n + 2) for j in range(i))
    return [next(pairs) for _ in range(n)]


def first(kind: Kind) -> Iterator[Family]:
    """Give the families to begin with."""
    yield Family("as drawn")
    if kind.name == "edges":
        yield from (Family("edges", name) for name in EDGES)
    if kind.name in ("permutation", "multiset"):
        yield from (Family("named", name) for name in ranks.NAMED)
        for place in ranks.PLACES:
            for rank in ranks.RANKS:
                for way in ranks.WAYS:
                    yield Family("grown", rule=((place, rank, way),))
    if kind.name == "multiset" and not kind.alphabet:
        yield from (Family("named", "sorted", difference=d) for d in DIFFERENCES[2:])
        yield Family("pumped", parts=((), (kind.low,), ()))
        yield Family("pumped", parts=((), (kind.low, kind.high), ()))
        yield Family("pumped", parts=((), (kind.low,), (kind.high,)))
    elif kind.name in ("multiset", "word"):
        letters = kind.alphabet[:40]
        yield from (Family("pumped", parts=((), (x,), ())) for x in letters)
        for end in (letters[-1], letters[0]):
            yield from (Family("pumped", parts=((), (x,), (end,))) for x in letters if x != end)


def changed(family: Family, kind: Kind, rng: random.Random) -> Family:
    """Give a family that differs a little.

    Parameters
    ----------
    family : Family
        The family.
    kind : Kind
        What kind of value it makes.
    rng : random.Random
        Decides.
    """
    if kind.name == "integer":
        return Family("digits", str(_integer(family, kind, rng)))
    if kind.name == "edges":
        return Family("edges", rng.choice(EDGES))
    if kind.name == "word" or (kind.name == "multiset" and rng.random() < 0.4):
        return _repumped(family, kind, rng)
    if kind.name == "multiset" and not kind.alphabet and rng.random() < 0.3:
        named = family if family.form in ("named", "grown") else Family("named", "sorted")
        return replace(named, difference=_difference(named.difference, rng))
    return _regrown(family, rng)


def _integer(family: Family, kind: Kind, rng: random.Random) -> int:
    if family.form != "digits" or rng.random() < 0.2:
        return rng.randint(kind.low, kind.high)
    number = int(family.name)
    bit = 1 << rng.randrange(max(kind.high.bit_length(), 1))
    new = rng.choice([number ^ bit, number + 1, number - 1, number + bit, number - bit])
    return min(max(new, kind.low), kind.high)


def _difference(known: int, rng: random.Random) -> int:
    return rng.choice([known * 2, known * 3, known + 1, known - 1, max(known // 2, 1), -known])


def _regrown(family: Family, rng: random.Random) -> Family:
    def step() -> ranks.Step:
        return rng.choice(ranks.PLACES), rng.choice(ranks.RANKS), rng.choice(ranks.WAYS)

    rule = list(family.rule) or [step()]
    roll = rng.random()
    if roll < 0.3 and len(rule) < 4:
        rule.insert(rng.randrange(len(rule) + 1), step())
    elif roll < 0.4 and len(rule) > 1:
        del rule[rng.randrange(len(rule))]
    elif roll < 0.5:
        rule = [step() for _ in rule]
    else:
        rule[rng.randrange(len(rule))] = step()
    return Family("grown", rule=tuple(rule), difference=family.difference)


def _repumped(family: Family, kind: Kind, rng: random.Random) -> Family:
    letters = kind.alphabet or (kind.low, kind.high, (kind.low + kind.high) // 2)
    own = [x for part in family.parts for x in part]

    def letter() -> Any:
        return rng.choice(own) if own and rng.random() < 0.5 else rng.choice(letters)

    parts = [list(p) for p in family.parts] or [[], [letter()], []]
    part = parts[rng.randrange(3)]
    roll = rng.random()
    if roll < 0.4 and len(part) < 3:
        part.insert(rng.randrange(len(part) + 1), letter())
    elif roll < 0.6 and part:
        del part[rng.randrange(len(part))]
    elif part:
        part[rng.randrange(len(part))] = letter()
    if not parts[1]:
        parts[1] = [letter()]
    return Family("pumped", parts=tuple(tuple(p) for p in parts))
