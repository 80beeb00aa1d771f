"""Formulas worked out at a size, exactly wherever the formula allows it."""

from __future__ import annotations

import ast
import math
from collections.abc import Callable, Mapping
from fractions import Fraction
from functools import lru_cache
from typing import Any

from steplaw.law import special
from steplaw.law.exactlog import Log, LogRatio
from steplaw.law.model import Law
from steplaw.law.surd import Surd, square_root

Number = Fraction | float
MOST_BITS = 1_000_000
CONSTANTS = {
    "E": math.e,
    "pi": math.pi,
    "GoldenRatio": (1 + math.sqrt(5)) / 2,
    "EulerGamma": 0.5772156649015329,
}


class NeedSympy(Exception):
    """The formula holds something that only sympy can work out."""


def value(law: Law | str, at: Mapping[str, int] | int | tuple[int, ...]) -> Number:
    """Work a law out at a size.

    Parameters
    ----------
    law : Law or str
        A law with a formula, or a formula.
    at : mapping of str to int, or int, or tuple of int
        The size by name; or the sizes in the order of the law's names.

    Returns
    -------
    Fraction or float
        A fraction wherever the formula is rational at that size (floors and ceilings of
        logarithms and roots are exact at every size); a float otherwise, which is infinite
        where the number is beyond the range of floats and too long to write out.

    Raises
    ------
    ValueError
        Where the law has no formula.
    """
    formula = law if isinstance(law, str) else law.formula
    names = ("n",) if isinstance(law, str) else law.names
    if formula is None:
        raise ValueError("the law is open: it has no formula to work out")
    if isinstance(at, Mapping):
        env = dict(at)
    else:
        env = dict(zip(names, (at,) if isinstance(at, int) else at, strict=True))
    try:
        return settle(evaluate(parse(formula), env))
    except NeedSympy:
        return _by_sympy(formula, env)
    except OverflowError:
        return math.inf


@lru_cache(maxsize=4096)
def parse(formula: str) -> ast.expr:
    """Parse a formula into Python's own syntax tree."""
    return ast.parse(formula.strip(), mode="eval").body


def evaluate(node: ast.expr, env: Mapping[str, int]) -> Any:
    """Work out one node: int, Fraction, float, or an exact logarithm or surd."""
    match node:
        case ast.Constant(value=int() | float() as number):
            return number
        case ast.Name(id=name):
            if name in env:
                return env[name]
            if name in CONSTANTS:
                return CONSTANTS[name]
            raise NeedSympy(name)
        case ast.UnaryOp(op=ast.USub(), operand=operand):
            return -evaluate(operand, env)
        case ast.UnaryOp(op=ast.UAdd(), operand=operand):
            return evaluate(operand, env)
        case ast.BinOp(left=left, op=op, right=right):
            return _binary(op, evaluate(left, env), evaluate(right, env))
        case ast.Call(func=ast.Name(id=name), args=args):
            return _call(name, args, env)
    raise NeedSympy(ast.unparse(node))


def settle(number: Any) -> Number:
    """Give a finished number as a fraction or a float."""
    if isinstance(number, Log | LogRatio | Surd):
        return number.settled()
    if isinstance(number, int):
        return Fraction(number)
    return number  # type: ignore[no-any-return]


def _binary(op: ast.operator, left: Any, right: Any) -> Any:
    match op:
        case ast.Add():
            return left + right
        case ast.Sub():
            return left - right
        case ast.Mult():
            return left * right
        case ast.Div():
            if isinstance(left, int) and isinstance(right, int):
                return Fraction(left, right) if left % right else left // right
            return left / right
        case ast.Mod():
            return left % right
        case ast.Pow():
            return _power(left, right)
    raise NeedSympy(type(op).__name__)


def _power(base: Any, exponent: Any) -> Any:
    if isinstance(exponent, LogRatio):
        return exponent.power_of(base)
    if isinstance(exponent, Fraction) and exponent.denominator == 1:
        exponent = exponent.numerator
    if isinstance(exponent, int):
        if isinstance(base, int | Fraction):
            size = max(abs(base.numerator).bit_length(), base.denominator.bit_length())
            if size > 1 and size * abs(exponent) > MOST_BITS:
                raise OverflowError
            return Fraction(base) ** exponent if exponent < 0 else base**exponent
        return base**exponent
    if isinstance(exponent, Fraction) and isinstance(base, int | Fraction):
        if exponent.denominator == 2 and base >= 0:
            return square_root(base) ** exponent.numerator
        return float(base) ** float(exponent)
    return as_float(base) ** as_float(exponent)


def as_float(number: Any) -> float:
    """Give any finished or unfinished number as a float."""
    return float(settle(number))


def _call(name: str, args: list[ast.expr], env: Mapping[str, int]) -> Any:
    if name in ("floor", "ceiling"):
        return _rounded(name, args[0], env)
    function = FUNCTIONS.get(name)
    if function is None:
        raise NeedSympy(name)
    return function(*(evaluate(arg, env) for arg in args))


def _rounded(name: str, arg: ast.expr, env: Mapping[str, int]) -> int:
    match arg:
        case ast.BinOp(ast.Name(id="E"), ast.Mult(), ast.Call(ast.Name(id="factorial"), [inner])):
            whole = special.arrangements(_whole(evaluate(inner, env)))
            return whole if name == "floor" else whole + 1
    number = evaluate(arg, env)
    rounding: Callable[[Any], int] = math.floor if name == "floor" else math.ceil
    if not isinstance(number, float):
        return rounding(number)
    near = round(number)
    if math.isinf(number):
        raise OverflowError
    if abs(number - near) > 1e-9 * max(1.0, abs(number)):
        return rounding(number)
    raise NeedSympy(ast.unparse(arg))


def _whole(number: Any) -> int:
    if isinstance(number, Fraction) and number.denominator == 1:
        return number.numerator
    if not isinstance(number, int):
        raise NeedSympy("not a whole number")
    return number


def _log(number: Any, base: Any = None) -> Any:
    if base is not None:
        return _log(number) / _log(base)
    if isinstance(number, int) and number >= 1:
        return Log(Fraction(1), number)
    return math.log(as_float(number))


def _harmonic(number: Any, order: Any = 1) -> Any:
    return special.harmonic(_whole(number), _whole(order))


def _mod(number: Any, by: Any) -> Any:
    return number % by


def _on_whole(function: Callable[..., int]) -> Callable[..., int]:
    return lambda *numbers: function(*(_whole(x) for x in numbers))


FUNCTIONS: dict[str, Callable[..., Any]] = {
    "log": _log,
    "sqrt": square_root,
    "harmonic": _harmonic,
    "factorial": _on_whole(special.factorial),
    "binomial": _on_whole(special.binomial),
    "catalan": _on_whole(special.catalan),
    "fibonacci": _on_whole(special.fibonacci),
    "lucas": _on_whole(special.lucas),
    "subfactorial": _on_whole(special.subfactorial),
    "tribonacci": _on_whole(special.tribonacci),
    "Mod": _mod,
    "Max": lambda *numbers: max(numbers, key=as_float),
    "Min": lambda *numbers: min(numbers, key=as_float),
    "Abs": abs,
    "exp": lambda x: math.exp(as_float(x)),
}


def _by_sympy(formula: str, env: Mapping[str, int]) -> Number:
    import sympy

    symbols = {name: sympy.Symbol(name, integer=True, nonnegative=True) for name in env}
    expression = sympy.sympify(formula, locals=symbols)
    number = expression.subs({symbols[name]: n for name, n in env.items()})
    if number.is_Rational:
        return Fraction(int(number.p), int(number.q))
    return float(number.evalf(30))
