"""The rule by which each function is taken apart into a series."""

from __future__ import annotations

import ast
from fractions import Fraction

from steplaw.law.expand import ONE, POWER, Rule, depends, expand, free_names, opaque, tight, unit
from steplaw.law.expandlog import logarithm_rule
from steplaw.law.expandspecial import (
    binomial_rule,
    catalan_rule,
    factorial_rule,
    golden_rule,
    harmonic_rule,
    subfactorial_rule,
    tribonacci_rule,
)
from steplaw.law.extremes import settle_extreme
from steplaw.law.growth import FLAT, Atom, Growth, Series, TooHard, growth_of, raised


def _rounding(node: ast.expr, args: list[ast.expr], sizes: frozenset[str]) -> Series:
    """Give floor(x) as x less a fraction between 0 and 1, which is an atom of its own."""
    inner = expand(args[0], sizes)
    if not inner.terms or all(_flat(growth_of(key)) for key in inner.terms):
        return opaque(node, sizes)
    gap = ast.BinOp(node, ast.Sub(), args[0])
    text = f"({tight(gap)})"
    atom = Atom(text, tuple((n, FLAT) for n in free_names(node) if n in sizes))
    return inner + Series.of((atom, 1))


def _flat(growth: Growth) -> bool:
    return all(v <= FLAT for _, v in growth.by_size)


def _root(node: ast.expr, args: list[ast.expr], sizes: frozenset[str]) -> Series:
    return raised(expand(args[0], sizes), Fraction(1, 2))


def _extreme(node: ast.expr, args: list[ast.expr], sizes: frozenset[str]) -> Series:
    """Give Max or Min by the growth of the arguments; as one atom where they are alike."""
    assert isinstance(node, ast.Call) and isinstance(node.func, ast.Name)
    settled = settle_extreme(node.func.id, [expand(arg, sizes) for arg in args])
    if settled is not None:
        return settled
    names = [n for n in free_names(node) if n in sizes]
    if len(names) == 1:
        raise TooHard
    return opaque(node, sizes, unit(POWER, 1.0 / len(names)))


def _remainder(node: ast.expr, args: list[ast.expr], sizes: frozenset[str]) -> Series:
    if depends(args[1], sizes):
        raise TooHard
    return opaque(node, sizes)


def _absolute(node: ast.expr, args: list[ast.expr], sizes: frozenset[str]) -> Series:
    inner = expand(args[0], sizes)
    first = inner.leading()
    if len(first.terms) != 1:
        raise TooHard
    key, c = first.single()
    if any(a.growth and a.text not in sizes for a, _ in key):
        raise TooHard
    return inner if c > 0 else inner.scaled(Fraction(-1))


RULES: dict[str, Rule] = {
    "floor": _rounding,
    "ceiling": _rounding,
    "log": logarithm_rule,
    "sqrt": _root,
    "harmonic": harmonic_rule,
    "factorial": factorial_rule,
    "binomial": binomial_rule,
    "catalan": catalan_rule,
    "fibonacci": golden_rule(ONE, True),
    "lucas": golden_rule(ONE, False),
    "subfactorial": subfactorial_rule,
    "tribonacci": tribonacci_rule,
    "Max": _extreme,
    "Min": _extreme,
    "Mod": _remainder,
    "Abs": _absolute,
}
