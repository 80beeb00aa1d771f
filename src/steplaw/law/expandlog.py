"""Asymptotic series of logarithms."""

from __future__ import annotations

import ast
import math

from steplaw.law.expand import (
    EXPONENTIAL,
    FACTORIAL,
    LOGLOG,
    POWER,
    constant_call,
    expand,
    log_atom,
    size_atom,
    unit,
)
from steplaw.law.growth import FLAT, Atom, Coefficient, Growth, Series, TooHard, growth_of, inverse


def logarithm_rule(node: ast.expr, args: list[ast.expr], sizes: frozenset[str]) -> Series:
    """Give log(x) as the logarithms of the leading factors of x, and what is left out."""
    if len(args) == 2:
        base = constant_call(ast.Call(ast.Name("log"), [args[1]], []))
        return logarithm_rule(node, args[:1], sizes) * inverse(base)
    inner = expand(args[0], sizes)
    first = inner.leading()
    if len(first.terms) != 1:
        raise TooHard
    monomial, c = first.single()
    result = _log_number(c)
    for atom, exponent in monomial:
        result = result + _log_of_atom(atom).scaled(exponent)
    if inner.is_single():
        return result
    lost = tuple((s, (0.0, 0.0, -1.0, 0.0, 0.0)) for s, _ in growth_of(monomial).by_size)
    smaller = [growth_of(k) for k in inner.terms if k != monomial] + list(inner.errors)
    close = all(compare_power(growth_of(monomial), g) for g in smaller)
    flat = tuple((s, FLAT) for s, _ in lost)
    return Series(result.terms, (Growth(lost if close else flat),))


def compare_power(a: Growth, b: Growth) -> bool:
    """Say whether the first outgrows the second by a full power in one size."""
    if len(a.by_size) != 1:
        return False
    size, vector = a.by_size[0]
    return vector[POWER] - b.vector(size)[POWER] >= 1 and vector[:2] == b.vector(size)[:2]


def _log_number(c: Coefficient) -> Series:
    if c <= 0:
        raise TooHard
    if c == 1:
        return Series({})
    return Series.of((Atom(f"log({c})", value=math.log(c)), 1))


def _log_of_atom(atom: Atom) -> Series:
    if not atom.growth:
        value = None if atom.value is None else math.log(atom.value)
        return Series.of((Atom(f"log({atom.text})", value=value), 1))
    if len(atom.growth) != 1:
        raise TooHard
    size, vector = atom.growth[0]
    if atom.text == size:
        return Series.of((log_atom(size), 1))
    if atom.text == f"log({size})":
        return Series.of((Atom(f"log(log({size}))", ((size, unit(LOGLOG)),)), 1))
    base, mark, exponent = atom.text.partition("**")
    if mark and exponent == size and vector[FACTORIAL] == 0:
        number = Atom(f"log({base})", value=vector[EXPONENTIAL])
        return Series.of((number, 1), (size_atom(size), 1))
    raise TooHard
