"""C functions whose work does not grow with their operands: nothing to charge, nothing to list."""

from __future__ import annotations

import builtins
import cmath
import itertools
import math
import operator
import random
import sys
import time
from collections import OrderedDict, deque
from typing import Any

_CONSTANT = [
    "abs",
    "bool",
    "callable",
    "chr",
    "classmethod",
    "complex",
    "delattr",
    "enumerate",
    "filter",
    "float",
    "getattr",
    "globals",
    "hasattr",
    "id",
    "input",
    "isinstance",
    "issubclass",
    "iter",
    "len",
    "locals",
    "map",
    "next",
    "object",
    "open",
    "ord",
    "property",
    "range",
    "reversed",
    "round",
    "setattr",
    "slice",
    "staticmethod",
    "super",
    "type",
    "vars",
    "zip",
    "divmod",
    "bin",
    "hex",
    "oct",
    "memoryview",
    "__build_class__",
    "__import__",
    "print",
]
#: `exec`, `eval` and `compile` run or read whole programs.
_METHODS = {
    list: "append pop __len__ __getitem__ __setitem__ __iter__ __init__",
    tuple: "__len__ __getitem__ __iter__",
    dict: "get items keys values setdefault pop popitem __getitem__ __setitem__ __contains__ "
    "__len__ __iter__ __delitem__",
    set: "add discard remove pop __contains__ __len__",
    frozenset: "__contains__ __len__",
    deque: "append appendleft pop popleft __len__",
    OrderedDict: "get items keys values setdefault pop popitem move_to_end",
    bytearray: "append",
    int: "bit_length bit_count conjugate to_bytes as_integer_ratio __index__ __add__ __mul__",
    float: "is_integer hex as_integer_ratio conjugate __format__",
    random.Random: "random getrandbits seed",
    object: "__init__ __new__ __setattr__ __getattribute__ __init_subclass__ __reduce_ex__",
    type: "__call__ __new__ mro __subclasses__ __init__ __prepare__",
}
#: Loaded and called all the time, and at constant cost of whatever built-in type they are.
METHOD_NAMES = frozenset(
    [
        "append",
        "add",
        "discard",
        "get",
        "items",
        "keys",
        "values",
        "setdefault",
        "popitem",
        "appendleft",
        "popleft",
        "move_to_end",
        "random",
        "getrandbits",
        "bit_length",
        "bit_count",
        "is_integer",
        "send",
        "throw",
        "close",
        "__next__",
        "acquire",
        "release",
        "write",
        "flush",
        "group",
        "groups",
        "start",
        "end",
        "span",
    ]
)


def _functions() -> dict[int, Any]:
    chosen: list[Any] = [getattr(builtins, name) for name in _CONSTANT]
    for module in (math, cmath, operator, time, sys):
        chosen += [x for x in vars(module).values() if callable(x)]
    chosen += [x for x in vars(itertools).values() if isinstance(x, type)]
    return {id(x): x for x in chosen}


FUNCTIONS = _functions()
METHODS = frozenset((kind, name) for kind, names in _METHODS.items() for name in names.split())
