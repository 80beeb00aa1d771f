"""Kinds of object whose lengths can be read without running anybody's code."""

from __future__ import annotations

import itertools
import re
from array import array
from collections import OrderedDict, deque
from types import BuiltinFunctionType, GeneratorType
from typing import Any

_DICT: dict[Any, Any] = {}
_EMPTY: tuple[Any, ...] = ([], (), set(), "", b"", range(0), _DICT.keys(), _DICT.values())
VIEWS: frozenset[Any] = frozenset({type(_DICT.keys()), type(_DICT.values()), type(_DICT.items())})
SIZED: frozenset[Any] = (
    frozenset(
        {list, tuple, set, frozenset, dict, str, bytes, bytearray, range, deque, array, memoryview}
    )
    | VIEWS
    | {OrderedDict}
)
COPIED_BY_SLICES: frozenset[Any] = frozenset({list, tuple, str, bytes, bytearray, array})
SEQUENCES = (list, tuple, str, bytes, bytearray, deque, array)
ITERATORS: frozenset[Any] = frozenset(
    {GeneratorType, map, filter, zip, enumerate, reversed}
    | {type(iter(x)) for x in _EMPTY}
    | {type(iter(_DICT.items())), type(iter(range(1 << 70))), type(reversed([]))}
    | {type(iter(deque())), type(reversed(deque()))}
    | {x for x in vars(itertools).values() if isinstance(x, type)}
)
#: Operands of whole numbers up to so many digits (of 30 bits) cost one step and no more.
SHORT_DIGITS = 4
SHORT_BITS = 30 * SHORT_DIGITS
SCALARS = frozenset({int, float, complex, bool, type(None), type(Ellipsis)})
#: Equality of these runs no Python code and changes nothing.
PLAIN = SCALARS | {str, bytes}
#: Functions of C, and methods of C that are told the class that defines them.
BUILTIN = frozenset({BuiltinFunctionType, type(re.compile("").search)})
_MRO = type.__dict__["__mro__"].__get__
_LEN: dict[Any, Any] = {x: x.__len__ for x in SIZED}


def bases(kind: type) -> tuple[type, ...]:
    """Give the bases of a type, itself first."""
    mro: tuple[type, ...] = _MRO(kind)
    return mro


def length(value: Any) -> int | None:
    """Give the length of a built-in container, of one derived from it too; None for others."""
    kind = type(value)
    read = _LEN.get(kind)
    if read is None:
        for base in bases(kind):
            read = _LEN.get(base)
            if read is not None:
                break
        else:
            return None
    size: int = read(value)
    return size


def digits(value: int) -> int:
    """Give the digits of a whole number, 30 bits each."""
    return max(1, -(-int.bit_length(value) // 30))


def size(value: Any) -> int:
    """Give how large an operand is, for the list of what was not charged."""
    known = length(value)
    if known is not None:
        return known
    kind = type(value)
    if kind is int:
        return digits(value) if digits(value) > SHORT_DIGITS else 0
    if kind.__module__ == "numpy" and kind.__name__ == "ndarray":
        return int(value.size)
    return 0
