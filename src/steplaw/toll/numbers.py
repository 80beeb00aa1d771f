"""Tolls of long whole numbers, by their digits of 30 bits."""

from __future__ import annotations

import math
from typing import Any

from steplaw.toll import kinds
from steplaw.toll.call import Call, Rule
from steplaw.toll.hidden import hidden

#: CPython's KARATSUBA_CUTOFF (Objects/longobject.c).
CUTOFF = 70


def products(a: int, b: int) -> int:
    """Give the digit products of a multiplication: by the school's way, by Karatsuba's above.

    Parameters
    ----------
    a, b : int
        Digits of the factors.
    """
    a, b = min(a, b), max(a, b)
    if a <= CUTOFF:
        return a * b
    if 2 * a <= b:
        return (b // a) * products(a, a) + products(a, b % a) if b % a else b // a * products(a, a)
    half = b - (b >> 1)
    return 3 * products(half, half)


@hidden
def _to_int(call: Call) -> Any:
    """Charge text read: by the square of its length, as digits are added one group at a time."""
    text = call.argument(0)
    result = call.run()
    size = kinds.length(text)
    if size is not None and type(result) is int:
        long = kinds.digits(result)
        call.at_most(size + (long * long if long > kinds.SHORT_DIGITS else 0))
    return result


def decimal_work(value: int) -> int:
    """Give the digit steps, at most, of writing a whole number in tens."""
    long = kinds.digits(value)
    return long * long if long > kinds.SHORT_DIGITS else 0


@hidden
def _to_str(call: Call) -> Any:
    value = call.argument(0)
    result = call.run()
    if type(value) is int:
        call.at_most(decimal_work(value))
    elif type(value) is not str:
        call.at_most(kinds.length(result) or 0)
    return result


@hidden
def _by_result(call: Call) -> Any:
    """Charge a long result by its digits, each made from all those before, at most."""
    result = call.run()
    if type(result) is int:
        long = kinds.digits(result)
        call.at_most(products(long, long) if long > kinds.SHORT_DIGITS else 0)
    return result


@hidden
def _bytes_in(call: Call) -> Any:
    call.visits = kinds.length(call.argument(0)) or 0
    return call.run()


@hidden
def _common(call: Call) -> Any:
    long = [kinds.digits(x) for x in call.args if type(x) is int]
    call.at_most(max(long, default=0) ** 2 if max(long, default=0) > kinds.SHORT_DIGITS else 0)
    return call.run()


@hidden
def _power(call: Call) -> Any:
    modulus, exponent = call.argument(2, "mod"), call.argument(1, "exp")
    if type(modulus) is int and type(exponent) is int:
        long = kinds.digits(modulus)
        if long > kinds.SHORT_DIGITS:
            call.at_most(3 * max(int.bit_length(exponent), 1) * products(long, long))
        return call.run()
    return _by_result(call)


RULES: dict[Any, Rule] = {
    int: Rule("int of", _to_int, 1),
    str: Rule("str of", _to_str, 1),
    repr: Rule("repr of", _to_str, 1),
    format: Rule("format of", _to_str, 1),
    pow: Rule("pow", _power),
    math.factorial: Rule("factorial", _by_result),
    math.comb: Rule("comb", _by_result),
    math.perm: Rule("perm", _by_result),
    math.gcd: Rule("gcd", _common),
    math.lcm: Rule("lcm", _common),
    math.isqrt: Rule("isqrt", _common),
    (int, "from_bytes"): Rule("int.from_bytes", _bytes_in),
}
