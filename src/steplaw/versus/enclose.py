"""Formulas over a stretch of sizes: an interval that surely holds every value there."""

from __future__ import annotations

import ast
from fractions import Fraction
from functools import lru_cache
from typing import Any

from steplaw.law.evaluate import NeedSympy, Number, evaluate, parse, settle

PRECISION = 160
"""Bits that intervals are worked out with; rounding goes outwards."""


class Unenclosed(Exception):
    """No interval can be given for the formula."""


def enclose(formula: str, name: str, low: int, high: int) -> tuple[Any, Any]:
    """Enclose a formula over sizes.

    Parameters
    ----------
    formula : str
        In one size name.
    name : str
        The size name.
    low, high : int
        The first and the last size, from 1 on.

    Returns
    -------
    tuple
        Two numbers between which all values lie.

    Raises
    ------
    Unenclosed
        Where the formula holds something for which there is no rule.

    Notes
    -----
    Natural interval extension with outward rounding (Moore, Kearfott & Cloud, Introduction to
    Interval Analysis, 2009). Harmonic numbers by DeTemple's bounds (American Mathematical Monthly
    100, 1993), factorials by Robbins' (ibid. 62, 1955).
    """
    from mpmath import iv, mp

    before, iv.prec = iv.prec, PRECISION
    try:
        found = _node(parse(formula), name, low, high, iv)
        least, most = (mp.make_mpf(end) for end in found._mpi_)
        return least, most
    except (NeedSympy, ZeroDivisionError, ValueError, OverflowError, ArithmeticError) as error:
        raise Unenclosed(str(error)) from None
    finally:
        iv.prec = before


def _node(node: ast.expr, name: str, low: int, high: int, iv: Any) -> Any:
    def of(part: ast.expr) -> Any:
        return _node(part, name, low, high, iv)

    match node:
        case ast.Constant(value=int() as number):
            return iv.mpf(number)
        case ast.Constant(value=float() as number):
            return iv.mpf(repr(number))
        case ast.Name(id=found) if found == name:
            return iv.mpf([low, high])
        case ast.Name(id="E"):
            return iv.e
        case ast.Name(id="pi"):
            return iv.pi
        case ast.Name(id="EulerGamma"):
            return _gamma(iv)
        case ast.Name(id="GoldenRatio"):
            return (1 + iv.sqrt(iv.mpf(5))) / 2
        case ast.UnaryOp(op=ast.USub(), operand=operand):
            return -of(operand)
        case ast.BinOp(left=left, op=ast.Add(), right=right):
            return of(left) + of(right)
        case ast.BinOp(left=left, op=ast.Sub(), right=right):
            return of(left) - of(right)
        case ast.BinOp(left=left, op=ast.Mult(), right=right):
            return of(left) * of(right)
        case ast.BinOp(left=left, op=ast.Div(), right=right):
            return of(left) / of(right)
        case ast.BinOp(left=left, op=ast.Pow(), right=right):
            return _power(of(left), right, of(right), iv)
        case ast.Call(func=ast.Name(id="floor" | "ceiling" as rounding), args=[arg]):
            return _rounded(rounding, arg, name, low, high, iv)
        case ast.Call(func=ast.Name(id=function), args=[arg]) if function in FUNCTIONS:
            return FUNCTIONS[function](of(arg), iv)
    raise Unenclosed(ast.unparse(node))


def _power(base: Any, exponent: ast.expr, over: Any, iv: Any) -> Any:
    match exponent:
        case ast.Constant(value=int() as whole):
            return base**whole
        case ast.UnaryOp(op=ast.USub(), operand=ast.Constant(value=int() as whole)):
            return 1 / base**whole
    if not base.a > 0:
        raise Unenclosed("a power of what may not be above zero")
    return iv.exp(over * iv.log(base))


def _rounded(rounding: str, arg: ast.expr, name: str, low: int, high: int, iv: Any) -> Any:
    """Round both ends: exactly where the argument surely rises, else outwards."""
    if _rises(arg, name):
        whole = ast.Call(ast.Name(rounding), [arg], [])
        ends = [_exact(ast.fix_missing_locations(whole), name, n) for n in (low, high)]
        return iv.mpf([int(ends[0]), int(ends[1])])
    from mpmath.libmp import to_int

    least, most = _node(arg, name, low, high, iv)._mpi_
    first, last = to_int(least, "f"), to_int(most, "c")
    return iv.mpf([first, last])


def _exact(node: ast.expr, name: str, size: int) -> Number:
    found = settle(evaluate(node, {name: size}))
    if not isinstance(found, Fraction):
        raise Unenclosed("a rounding that is not exact")
    return found


def _rises(node: ast.expr, name: str) -> bool:
    """Say whether an expression surely rises with the size, from its structure alone."""
    match node:
        case ast.Name(id=found):
            return found == name
        case ast.BinOp(left=left, op=ast.Add(), right=right):
            return all(_rises(x, name) or _is_number(x) for x in (left, right))
        case ast.BinOp(left=left, op=ast.Sub() | ast.Div(), right=right):
            return _rises(left, name) and _is_number(right)
        case ast.BinOp(left=left, op=ast.Mult(), right=right):
            return (_is_number(left) and _rises(right, name)) or (
                _rises(left, name) and _is_number(right)
            )
        case ast.Call(func=ast.Name(id="log" | "sqrt"), args=[arg]):
            return _rises(arg, name)
    return False


def _is_number(node: ast.expr) -> bool:
    """Say whether an expression is a number above zero."""
    match node:
        case ast.Constant(value=int() | float() as number):
            return number > 0
        case ast.Call(func=ast.Name(id="log"), args=[ast.Constant(value=int() as number)]):
            return number > 1
        case ast.BinOp(left=left, op=ast.Mult() | ast.Div() | ast.Add(), right=right):
            return _is_number(left) and _is_number(right)
    return False


@lru_cache(maxsize=1)
def _gamma_digits() -> str:
    import mpmath

    with mpmath.workprec(PRECISION + 40):
        return str(mpmath.nstr(mpmath.euler, 50))


def _gamma(iv: Any) -> Any:
    near = iv.mpf(_gamma_digits())
    return near + iv.mpf([-1, 1]) / iv.mpf(10) ** 45


def _harmonic(over: Any, iv: Any) -> Any:
    """Enclose by ln(n + 1/2) + gamma + 1/(24 (n + 1)^2) < H(n) < the same with 1/(24 n^2)."""
    if not over.a >= 1:
        raise Unenclosed("a harmonic number below 1")
    middle = iv.log(over + iv.mpf(1) / 2) + _gamma(iv)
    low = middle + 1 / (24 * (over + 1) ** 2)
    high = middle + 1 / (24 * over**2)
    return iv.mpf([low.a, high.b])


def _factorial(over: Any, iv: Any) -> Any:
    """Enclose by Stirling's formula times e^(1/(12 n + 1)) and e^(1/(12 n))."""
    if not over.a >= 1:
        raise Unenclosed("a factorial below 1")
    log = iv.log(2 * iv.pi * over) / 2 + over * (iv.log(over) - 1)
    low = iv.exp(log + 1 / (12 * over + 1))
    high = iv.exp(log + 1 / (12 * over))
    return iv.mpf([low.a, high.b])


def _log(over: Any, iv: Any) -> Any:
    if not over.a > 0:
        raise Unenclosed("a logarithm of what may not be above zero")
    return iv.log(over)


def _sqrt(over: Any, iv: Any) -> Any:
    if not over.a >= 0:
        raise Unenclosed("a root of what may be below zero")
    return iv.sqrt(over)


def _exp(over: Any, iv: Any) -> Any:
    return iv.exp(over)


FUNCTIONS: dict[str, Any] = {
    "log": _log,
    "sqrt": _sqrt,
    "exp": _exp,
    "harmonic": _harmonic,
    "factorial": _factorial,
}
