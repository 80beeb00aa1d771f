"""Tolls of operators, by their operands."""

from __future__ import annotations

from collections import deque
from operator import index
from typing import Any

from steplaw.toll import arrays, kinds, mappings, numbers

#: Searched item by item for `in`.
SCANNED = frozenset({list, tuple, deque, type({}.values())}) | kinds.ITERATORS
TEXTS = (str, bytes, bytearray)
#: Arguments of BINARY_OP (CPython's opcode.h); in place from 13 on.
ADD, AND, FLOOR, LSHIFT, MATRIX, MULTIPLY, REMAINDER, OR, POWER, RSHIFT, SUBTRACT, DIVIDE, XOR = (
    range(13)
)
IN_PLACE = 13
_SIGNS = ("+", "&", "//", "<<", "@", "*", "%", "|", "**", ">>", "-", "/", "^")
#: Operators that can make a long number from short ones.
_BY_VALUE = frozenset({LSHIFT, POWER})
LONG = 1 << kinds.SHORT_BITS
_LENGTHENS = frozenset({ADD, LSHIFT, MULTIPLY, POWER, SUBTRACT})
Charge = tuple[str, int, bool]


def makes_long(argument: int) -> bool:
    """Tell whether an operator can make a long whole number from short ones."""
    return argument % IN_PLACE in _LENGTHENS


def sign(argument: int) -> str:
    """Give the operator as it is written."""
    return _SIGNS[argument % IN_PLACE] + ("=" if argument >= IN_PLACE else "")


def binary(argument: int, left: Any, right: Any) -> Charge | None:
    """Give the charge of an operator, None where it does not grow.

    Parameters
    ----------
    argument : int
        Of BINARY_OP.
    left, right : object
        Its operands.
    """
    kind, other = type(left), type(right)
    operator, in_place = argument % IN_PLACE, argument >= IN_PLACE
    size = arrays.elements(left) or arrays.elements(right)
    if size:
        return f"array {sign(argument)}", _array_work(operator, left, right), operator != MATRIX
    if operator == ADD and kind in kinds.SEQUENCES:
        if kind is other and not (in_place and kind in (list, bytearray, deque)):
            return f"{kind.__name__} {sign(argument)}", len(left) + len(right), True
        more = kinds.length(right)
        return (f"{kind.__name__} {sign(argument)}", more, True) if more is not None else None
    if operator == MULTIPLY:
        return _repeated(argument, left, right) or _repeated(argument, right, left)
    if operator == REMAINDER and kind in (str, bytes):
        parts = right if other is tuple else (right,)
        return f"{kind.__name__} %", len(left) + sum(kinds.length(x) or 0 for x in parts), True
    if kind in (set, frozenset) and other in (set, frozenset):
        return _sets(argument, left, right)
    if kind is dict and other is dict and operator == OR:
        return f"dict {sign(argument)}", len(right) + (0 if in_place else len(left)), True
    return None


def _array_work(operator: int, left: Any, right: Any) -> int:
    a, b = arrays.elements(left) or 1, arrays.elements(right) or 1
    if operator == MATRIX and len(left.shape) and len(right.shape):
        return int(a * b // max(left.shape[-1], 1))
    return max(a, b)


def _repeated(argument: int, sequence: Any, times: Any) -> Charge | None:
    if type(sequence) not in kinds.SEQUENCES or type(times) is not int:
        return None
    return f"{type(sequence).__name__} {sign(argument)}", len(sequence) * max(times, 0), True


def _sets(argument: int, left: Any, right: Any) -> Charge | None:
    operator, in_place = argument % IN_PLACE, argument >= IN_PLACE
    name = f"{type(left).__name__} {sign(argument)}"
    if operator == AND:
        return name, mappings.in_common(left, right), True
    if operator in (OR, XOR):
        return name, len(right) + (0 if in_place else len(left)), True
    if operator == SUBTRACT:
        visits, exact = (len(right), True) if in_place else mappings.without(left, right)
        return name, visits, exact
    return None


def whole(argument: int, left: int, right: int) -> Charge | None:
    """Give the charge of an operator between whole numbers, None where they are short.

    Parameters
    ----------
    argument : int
        Of BINARY_OP.
    left, right : int
        Its operands.
    """
    if -LONG < left < LONG and -LONG < right < LONG and argument % IN_PLACE not in _BY_VALUE:
        return None
    a, b = kinds.digits(left), kinds.digits(right)
    operator = argument % IN_PLACE
    if operator in (LSHIFT, POWER):
        longest = a * right + 1 if operator == POWER else a + right // 30
    else:
        longest = max(a, b)
    if longest <= kinds.SHORT_DIGITS or (right < 0 and operator in (LSHIFT, POWER)):
        return None
    name = f"long {sign(argument)}"
    if operator == MULTIPLY:
        return name, numbers.products(a, b), min(a, b) <= numbers.CUTOFF
    if operator in (FLOOR, REMAINDER):
        return name, max(a - b + 1, 1) * b, False
    if operator == POWER:
        return name, 2 * numbers.products(longest, longest), False
    if operator == DIVIDE:
        return name, longest, False
    return name, longest, True


def comparison(argument: int, left: Any, right: Any) -> Charge | None:
    """Give the charge of a comparison, at most, None where it does not grow."""
    kind = type(left)
    size = arrays.elements(left) or arrays.elements(right)
    if size:
        return "array compared", size, True
    if kind is not type(right):
        return None
    a, b = kinds.length(left), kinds.length(right)
    if a is None or b is None:
        return None
    if left is right and kind in (str, bytes):
        return None
    return f"{kind.__name__} compared", min(a, b), False


def slice_length(size: int, start: Any, stop: Any, step: Any) -> int | None:
    """Give the length of a slice, None where its ends are no plain numbers."""
    if step is None and (start is None or type(start) is int):
        first = 0 if start is None else max(start + size, 0) if start < 0 else start
        if stop is None:
            return size - first if first < size else 0
        if type(stop) is int:
            last = max(stop + size, 0) if stop < 0 else min(stop, size)
            return last - first if first < last else 0
    if all(x is None or type(x) is int for x in (start, stop, step)) and step != 0:
        return len(range(*slice(start, stop, step).indices(size)))
    return None


def slice_written(
    values: Any, container: Any, start: Any, stop: Any, step: Any
) -> tuple[int, bool] | None:
    """Give what is written by a slice assignment and moved behind it."""
    if type(container) not in (list, bytearray):
        return None
    size, more = len(container), kinds.length(values)
    old = slice_length(size, start, stop, step)
    if old is None or more is None:
        return size + (more or 0), False
    if step is not None and step != 1:
        return more, True
    first = slice(start, stop).indices(size)[0]
    behind = size - first - old
    return more + (behind if more != old else 0), True


def deleted(container: Any, key: Any) -> tuple[int, bool] | None:
    """Give what moves up behind what is deleted from a list."""
    kind = type(container)
    if kind is deque:
        return len(container), False
    if kind not in (list, bytearray):
        return None
    size = len(container)
    if type(key) is slice:
        old = slice_length(size, key.start, key.stop, key.step)
        if old is None or (key.step is not None and key.step != 1):
            return size, False
        return size - slice(key.start, key.stop).indices(size)[0] - old, True
    if type(key) is not int:
        return None
    place = index(key) + (size if key < 0 else 0)
    return (size - place - 1, True) if 0 <= place < size else (0, True)
