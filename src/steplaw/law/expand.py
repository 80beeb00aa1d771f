"""Formulas taken apart into asymptotic series."""

from __future__ import annotations

import ast
import math
from collections.abc import Callable
from fractions import Fraction

from steplaw.law.evaluate import CONSTANTS, FUNCTIONS, NeedSympy, evaluate, settle
from steplaw.law.growth import (
    FLAT,
    Atom,
    Coefficient,
    Monomial,
    Series,
    TooHard,
    Vector,
    growth_of,
    inverse,
    is_constant,
    numeric,
    raised,
)

FACTORIAL, EXPONENTIAL, POWER, LOG, LOGLOG = range(5)
ONE = Fraction(1)
Rule = Callable[[ast.expr, list[ast.expr], frozenset[str]], Series]


def unit(place: int, amount: float = 1.0) -> Vector:
    """Give the growth vector with one entry."""
    vector = [0.0] * 5
    vector[place] = amount
    return (vector[0], vector[1], vector[2], vector[3], vector[4])


def free_names(node: ast.expr) -> tuple[str, ...]:
    """Give the names in a formula that are neither functions nor constants."""
    names = {
        n.id
        for n in ast.walk(node)
        if isinstance(n, ast.Name) and n.id not in CONSTANTS and n.id not in FUNCTIONS
    }
    return tuple(sorted(names - {"floor", "ceiling"}))


def size_atom(name: str) -> Atom:
    """Give the atom of a size itself."""
    return Atom(name, ((name, unit(POWER)),))


def log_atom(name: str) -> Atom:
    """Give the atom of the logarithm of a size."""
    return Atom(f"log({name})", ((name, unit(LOG)),))


def opaque(node: ast.expr, sizes: frozenset[str], growth: Vector = FLAT) -> Series:
    """Give a factor that swings between bounds, or is too odd to take apart, as one atom."""
    text = ast.unparse(node).replace(" ** ", "**").replace(" * ", "*").replace(" / ", "/")
    names = [n for n in free_names(node) if n in sizes]
    return Series.of((Atom(text, tuple((n, growth) for n in names) or ((" ", FLAT),)), 1))


def expand(node: ast.expr, sizes: frozenset[str]) -> Series:
    """Take a formula apart into a sum of products of atoms.

    Parameters
    ----------
    node : ast.expr
        The formula.
    sizes : frozenset of str
        The names that grow without bound; every other name is a positive constant.

    Returns
    -------
    Series
        With the growth of what was left out.

    Raises
    ------
    TooHard
        Where no rule applies.
    """
    match node:
        case ast.Constant(value=int() as number):
            return Series.constant(Fraction(number))
        case ast.Constant(value=float() as real):
            return Series.constant(real)
        case ast.Name(id=name) if name in sizes:
            return Series.of((size_atom(name), 1))
        case ast.Name(id=name):
            return Series.of((Atom(name, value=CONSTANTS.get(name)), 1))
        case ast.UnaryOp(op=ast.USub(), operand=operand):
            return expand(operand, sizes).scaled(Fraction(-1))
        case ast.BinOp(left=left, op=ast.Pow(), right=right):
            return _power(node, left, right, sizes)
        case ast.BinOp(left=left, op=op, right=right):
            return _binary(op, expand(left, sizes), expand(right, sizes))
        case ast.Call(func=ast.Name(id=name), args=args):
            return _call(node, name, args, sizes)
    raise TooHard


def _binary(op: ast.operator, left: Series, right: Series) -> Series:
    match op:
        case ast.Add():
            return left + right
        case ast.Sub():
            return left + right.scaled(Fraction(-1))
        case ast.Mult():
            return left * right
        case ast.Div():
            return left * inverse(right)
    raise TooHard


def depends(node: ast.expr, sizes: frozenset[str]) -> bool:
    """Say whether a size occurs in a node."""
    return any(n in sizes for n in free_names(node))


def constant_of(node: ast.expr) -> Fraction | float | None:
    """Give the number that a node without names stands for, else None."""
    if free_names(node):
        return None
    try:
        return settle(evaluate(node, {}))
    except (NeedSympy, OverflowError, ValueError):
        return None


def _power(node: ast.expr, left: ast.expr, right: ast.expr, sizes: frozenset[str]) -> Series:
    if not depends(right, sizes):
        exponent = constant_of(right)
        if exponent is None:
            raise TooHard
        base = expand(left, sizes)
        if isinstance(exponent, Fraction):
            return raised(base, exponent)
        return _irrational_power(node, left, right, base, exponent)
    number = constant_of(left)
    if number is None:
        raise TooHard
    return _exponential(node, left, float(number), right, sizes)


def _irrational_power(
    node: ast.expr, left: ast.expr, right: ast.expr, base: Series, exponent: float
) -> Series:
    """Take n**(log(3)/log(2)) and the like for atoms of their own."""
    if not isinstance(left, ast.Name) or not base.is_single():
        raise TooHard
    monomial, _ = base.single()
    text = f"{left.id}**({tight(right)})"
    vectors = tuple((s, _times(v, exponent)) for s, v in growth_of(monomial).by_size)
    return Series.of((Atom(text, vectors), 1))


def _times(vector: Vector, by: float) -> Vector:
    a, b, c, d, e = (x * by for x in vector)
    return (a, b, c, d, e)


def tight(node: ast.expr) -> str:
    """Write a node without spaces around its products and powers."""
    text = ast.unparse(node)
    return text.replace(" ** ", "**").replace(" * ", "*").replace(" / ", "/")


def _exponential(
    node: ast.expr, left: ast.expr, base: float, right: ast.expr, sizes: frozenset[str]
) -> Series:
    """Take a constant to a power that depends on the size apart."""
    if base == -1:
        return opaque(node, sizes)
    if base == 0:
        raise TooHard
    exponent = expand(right, sizes)
    if exponent.errors:
        raise TooHard
    rate = math.log(abs(base))
    result = Series.constant(ONE)
    swinging = base < 0
    total: dict[str, list[float]] = {}
    for monomial, c in exponent.terms.items():
        if is_constant(monomial):
            continue
        part = _exponent_growth(monomial, c, rate)
        if part is None:
            swinging = True
            continue
        size, vector = part
        sums = total.setdefault(size, [0.0] * 5)
        for k in range(5):
            sums[k] += vector[k]
    if swinging:
        text = tight(node)
        vectors = tuple((s, (v[0], v[1], v[2], v[3], v[4])) for s, v in total.items())
        return Series.of((Atom(text, vectors or ((" ", FLAT),)), 1))
    for monomial, c in exponent.terms.items():
        result = result * _exponential_factor(left, base, monomial, c)
    return result


def _exponent_growth(monomial: Monomial, c: Coefficient, rate: float) -> tuple[str, Vector] | None:
    """Give the growth of base**(c * monomial); None where the monomial only swings."""
    moving = [(a, e) for a, e in monomial if a.growth]
    if len(moving) != 1 or moving[0][1] != 1:
        raise TooHard
    factor = numeric(c, monomial)
    if factor is None:
        raise TooHard
    atom = moving[0][0]
    if len(atom.growth) != 1:
        raise TooHard
    size, vector = atom.growth[0]
    if atom.text == size:
        return size, unit(EXPONENTIAL, factor * rate)
    if atom.text == f"log({size})":
        return size, unit(POWER, factor * rate)
    if vector == FLAT:
        return None
    raise TooHard


def _exponential_factor(left: ast.expr, base: float, monomial: Monomial, c: Coefficient) -> Series:
    if is_constant(monomial):
        return _constant_power(left, base, monomial, c)
    part = _exponent_growth(monomial, c, math.log(base))
    assert part is not None
    size, vector = part
    if vector[POWER]:
        exponent = vector[POWER]
        if abs(exponent - round(exponent)) < 1e-12:
            return Series.of((size_atom(size), round(exponent)))
        raise TooHard
    shown = f"({tight(left)})" if not isinstance(left, ast.Name | ast.Constant) else tight(left)
    if isinstance(c, Fraction) and len(monomial) == 1:
        if c.denominator == 1 and base == int(base) and c > 0:
            text = f"{int(base) ** c.numerator}**{size}"
        else:
            inner = Series({monomial: c})
            text = f"{shown}**({_series_text(inner)})" if c != 1 else f"{shown}**{size}"
        return Series.of((Atom(text, ((size, vector),)), 1))
    raise TooHard


def _constant_power(left: ast.expr, base: float, monomial: Monomial, c: Coefficient) -> Series:
    if monomial:
        raise TooHard
    number = constant_of(left)
    if isinstance(number, Fraction) and isinstance(c, Fraction) and c.denominator == 1:
        return Series.constant(number**c.numerator)
    if isinstance(left, ast.Name) and isinstance(c, Fraction):
        return Series.of((Atom(left.id, value=base), c))
    return Series.constant(base ** float(c))


def _series_text(series: Series) -> str:
    from steplaw.law.leading import write_series

    return write_series(series)


def _call(node: ast.expr, name: str, args: list[ast.expr], sizes: frozenset[str]) -> Series:
    if not depends(node, sizes):
        return constant_call(node)
    from steplaw.law.expandrules import RULES

    rule = RULES.get(name)
    if rule is None:
        raise TooHard
    return rule(node, args, sizes)


def constant_call(node: ast.expr) -> Series:
    """Give a call that depends on no size as a constant."""
    number = constant_of(node)
    if isinstance(number, Fraction):
        return Series.constant(number)
    return Series.of((Atom(tight(node), value=number), 1))
