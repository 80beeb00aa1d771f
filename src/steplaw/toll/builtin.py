"""Tolls of the built-in functions over iterables, and of the modules math, itertools and copy."""

from __future__ import annotations

import functools
import itertools
import math
import operator
from typing import Any

from steplaw.toll import kinds
from steplaw.toll.call import Call, Rule
from steplaw.toll.charges import items_of_all, items_of_first, items_until_settled
from steplaw.toll.hidden import hidden


@hidden
def _one_iterable(call: Call) -> Any:
    return items_of_first(call) if len(call.args) == 1 else call.run()


@hidden
def _reduce(call: Call) -> Any:
    read = call.items(1)
    try:
        return call.run()
    finally:
        call.visits = read()


@hidden
def _chosen(call: Call) -> Any:
    """Charge the pool that is copied when the iterator is made."""
    read = [call.items(number) for number in range(len(call.args))]
    try:
        return call.run()
    finally:
        call.visits = sum(x() for x in read)


@hidden
def _hash(call: Call) -> Any:
    """Charge a tuple's items, or a text at most (its hash is kept from then on)."""
    value = call.argument(0)
    size = kinds.length(value) or 0
    if type(value) is tuple:
        call.visits = size
    elif type(value) in (str, bytes, frozenset):
        call.at_most(size)
    return call.run()


RULES: dict[Any, Rule] = {
    sum: Rule("sum", items_of_first, 1),
    min: Rule("min", _one_iterable, 1, 1),
    max: Rule("max", _one_iterable, 1, 1),
    any: Rule("any", items_until_settled, 1),
    all: Rule("all", items_until_settled, 1),
    functools.reduce: Rule("reduce", _reduce, 2),
    math.fsum: Rule("fsum", items_of_first, 1),
    math.prod: Rule("prod", items_of_first, 1),
    math.dist: Rule("dist", items_of_all, 2),
    itertools.product: Rule("product", _chosen, 1),
    itertools.permutations: Rule("permutations", items_of_first, 1),
    itertools.combinations: Rule("combinations", items_of_first, 1),
    itertools.combinations_with_replacement: Rule(
        "combinations_with_replacement", items_of_first, 1
    ),
    operator.countOf: Rule("countOf", items_of_first, 2),
    operator.indexOf: Rule("indexOf", items_until_settled, 2),
    hash: Rule("hash", _hash, 1),
}
if hasattr(math, "sumprod"):
    RULES[math.sumprod] = Rule("sumprod", items_of_all, 2)
