"""Tolls of sets and dicts."""

from __future__ import annotations

import collections
from collections import OrderedDict
from typing import Any

from steplaw.toll import kinds
from steplaw.toll.call import Call, Rule
from steplaw.toll.charges import (
    items_and_own,
    items_of_all,
    items_of_first,
    own_length,
)
from steplaw.toll.hidden import hidden

SETS = (set, frozenset)


def is_set(value: Any) -> bool:
    """Tell whether a value is a set of the interpreter's own."""
    return type(value) in SETS


def in_common(a: Any, b: Any) -> int:
    """Give the items looked at to find what two sets have in common: those of the smaller."""
    return min(len(a), len(b))


def without(a: Any, b: Any) -> tuple[int, bool]:
    """Give the items looked at for `a - b`, and whether that is exact.

    Where `a` is far the larger it is copied and the items of `b` are taken out, else each item of
    `a` is looked up (CPython's Objects/setobject.c, set_difference).
    """
    if len(a) >> 2 > len(b):
        return len(a) + len(b), True
    return len(a), True


@hidden
def _intersection(call: Call) -> Any:
    if len(call.args) == 1 and is_set(call.args[0]):
        call.visits = in_common(call.owner, call.args[0])
        return call.run()
    return items_of_all(call)


@hidden
def _difference(call: Call) -> Any:
    if len(call.args) == 1 and type(call.args[0]) in (*SETS, dict):
        call.visits, call.exact = without(call.owner, call.args[0])
        return call.run()
    return items_and_own(call)


@hidden
def _difference_update(call: Call) -> Any:
    return items_of_all(call)


@hidden
def _subset(call: Call) -> Any:
    """Charge the smaller side, at most; a larger set cannot be within a smaller one."""
    other = call.argument(0)
    size = kinds.length(call.owner) or 0
    if is_set(other):
        call.at_most(0 if size > len(other) else size)
        return call.run()
    read = call.items(0)
    try:
        return call.run()
    finally:
        call.at_most(size + read())


@hidden
def _superset(call: Call) -> Any:
    other = call.argument(0)
    if is_set(other):
        size = kinds.length(call.owner) or 0
        call.at_most(0 if len(other) > size else len(other))
        return call.run()
    read = call.items(0)
    try:
        return call.run()
    finally:
        call.at_most(read())


@hidden
def _disjoint(call: Call) -> Any:
    other = call.argument(0)
    if is_set(other):
        call.at_most(in_common(call.owner, other))
        return call.run()
    read = call.items(0, early=True)
    try:
        return call.run()
    finally:
        call.visits = read()


@hidden
def _count_elements(call: Call) -> Any:
    read = call.items(1)
    try:
        return call.run()
    finally:
        call.visits = read()


RULES: dict[Any, Rule] = {
    set: Rule("set of", items_of_first, 1),
    frozenset: Rule("frozenset of", items_of_first, 1),
    dict: Rule("dict of", items_of_first, 1),
    OrderedDict: Rule("OrderedDict of", items_of_first, 1),
    (dict, "update"): Rule("dict.update", items_of_first),
    (dict, "copy"): Rule("dict.copy", own_length),
    (dict, "clear"): Rule("dict.clear", own_length),
    (dict, "fromkeys"): Rule("dict.fromkeys", items_of_first),
    (dict, "__init__"): Rule("dict of", items_of_first, 1),
    (OrderedDict, "update"): Rule("OrderedDict.update", items_of_first),
    (OrderedDict, "copy"): Rule("OrderedDict.copy", own_length),
    (OrderedDict, "clear"): Rule("OrderedDict.clear", own_length),
    (OrderedDict, "fromkeys"): Rule("OrderedDict.fromkeys", items_of_first),
}
for _kind in SETS:
    _name = _kind.__name__
    RULES |= {
        (_kind, "union"): Rule(f"{_name}.union", items_and_own),
        (_kind, "intersection"): Rule(f"{_name}.intersection", _intersection),
        (_kind, "difference"): Rule(f"{_name}.difference", _difference),
        (_kind, "symmetric_difference"): Rule(f"{_name}.symmetric_difference", items_and_own),
        (_kind, "issubset"): Rule(f"{_name}.issubset", _subset),
        (_kind, "issuperset"): Rule(f"{_name}.issuperset", _superset),
        (_kind, "isdisjoint"): Rule(f"{_name}.isdisjoint", _disjoint),
        (_kind, "copy"): Rule(f"{_name}.copy", own_length),
    }
RULES |= {
    (set, "update"): Rule("set.update", items_of_all),
    (set, "intersection_update"): Rule("set.intersection_update", _intersection),
    (set, "difference_update"): Rule("set.difference_update", _difference_update),
    (set, "symmetric_difference_update"): Rule("set.symmetric_difference_update", items_of_all),
    (set, "clear"): Rule("set.clear", own_length),
    collections._count_elements: Rule("count elements", _count_elements),  # type: ignore[attr-defined]
}
