"""Small changes to one input, whatever it is made of."""

from __future__ import annotations

import random
from collections.abc import Sequence
from typing import Any

from steplaw.worst.kinds import Kind


def touched(args: Sequence[Any], kinds: Sequence[Kind], rng: random.Random) -> tuple[Any, ...]:
    """Change one argument a little.

    Parameters
    ----------
    args : sequence
        The arguments.
    kinds : sequence of Kind
        What each is.
    rng : random.Random
        Decides.
    """
    free = [p for p, kind in enumerate(kinds) if kind.name != "fixed"]
    out = list(args)
    if free:
        place = rng.choice(free)
        out[place] = _touch(args[place], kinds[place], rng)
    return tuple(out)


def _touch(value: Any, kind: Kind, rng: random.Random) -> Any:
    if kind.name == "integer":
        bit = 1 << rng.randrange(max(kind.high.bit_length(), 1))
        return min(max(value ^ bit, kind.low), kind.high)
    items = list(value)
    if len(items) < 2:
        return value
    a, b = sorted(rng.sample(range(len(items)), 2))
    roll = rng.random()
    if roll < 0.4 or (kind.name == "permutation" and roll < 0.6):
        items[a], items[b] = items[b], items[a]
    elif roll < 0.7 and kind.name != "permutation":
        items[a] = rng.choice(kind.alphabet) if kind.alphabet else items[b]
    elif roll < 0.85:
        items[a : b + 1] = reversed(items[a : b + 1])
    else:
        items.insert(b, items.pop(a))
    return "".join(items) if kind.name == "word" else kind.container(items)
