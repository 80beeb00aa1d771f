"""Asymptotic series of special numbers."""

from __future__ import annotations

import ast
import math
from fractions import Fraction

from steplaw.law.evaluate import CONSTANTS
from steplaw.law.expand import (
    EXPONENTIAL,
    FACTORIAL,
    ONE,
    POWER,
    Rule,
    constant_of,
    expand,
    opaque,
    size_atom,
    tight,
    unit,
)
from steplaw.law.expandlog import logarithm_rule
from steplaw.law.growth import FLAT, Atom, Growth, Series, TooHard, growth_of, inverse


def _linear(node: ast.expr, sizes: frozenset[str]) -> tuple[str, Fraction, Fraction] | None:
    """Read an argument as slope * size + shift."""
    series = expand(node, sizes)
    size, slope, shift = "", Fraction(0), Fraction(0)
    for monomial, c in series.terms.items():
        if not isinstance(c, Fraction):
            return None
        if not monomial:
            shift = c
        elif len(monomial) == 1 and monomial[0][1] == 1 and monomial[0][0].text in sizes:
            if size:
                return None
            size, slope = monomial[0][0].text, c
        else:
            return None
    return (size, slope, shift) if size and slope > 0 and not series.errors else None


def _below(size: str, power: float) -> Growth:
    return Growth(((size, unit(POWER, power)),))


def harmonic_rule(node: ast.expr, args: list[ast.expr], sizes: frozenset[str]) -> Series:
    """Give harmonic(x, r) as log(x) + EulerGamma, or as the zeta value of r, to leading order.

    Knuth, The Art of Computer Programming, vol. 1, 1.2.11.2.
    """
    rank = constant_of(args[1]) if len(args) > 1 else ONE
    inner = expand(args[0], sizes)
    if len(inner.terms) == 0 or not isinstance(rank, Fraction):
        raise TooHard
    if rank == 1:
        logarithm = logarithm_rule(node, args[:1], sizes)
        gamma = Atom("EulerGamma", value=CONSTANTS["EulerGamma"])
        monomial, _ = inner.leading().single()
        lost = tuple((s, (0.0, 0.0, -v[POWER], 0.0, 0.0)) for s, v in growth_of(monomial).by_size)
        out = logarithm + Series.of((gamma, 1))
        return Series(out.terms, (*out.errors, Growth(lost)))
    if rank == 2:
        first = Series.of((Atom("pi", value=math.pi), 2), times=Fraction(1, 6))
    else:
        first = Series.of((Atom(f"zeta({rank})"), 1))
    monomial, _ = inner.leading().single()
    drop = float(rank) - 1
    lost = tuple(
        (s, (0.0, 0.0, -v[POWER] * drop, 0.0, 0.0)) for s, v in growth_of(monomial).by_size
    )
    return Series(first.terms, (Growth(lost),))


def factorial_rule(node: ast.expr, args: list[ast.expr], sizes: frozenset[str]) -> Series:
    """Give factorial(n + k) beside factorial(n); others as one atom with Stirling's growth."""
    line = _linear(args[0], sizes)
    if line is None:
        raise TooHard
    size, slope, shift = line
    if slope == 1 and shift.denominator == 1:
        atom = Atom(f"factorial({size})", ((size, unit(FACTORIAL)),))
        out = Series.of((atom, 1))
        steps = range(1, shift.numerator + 1) if shift > 0 else range(0, shift.numerator, -1)
        for k in steps:
            factor = Series.of((size_atom(size), 1)) + Series.constant(Fraction(k))
            out = out * (factor if shift > 0 else inverse(factor))
        return out
    c = float(slope)
    # (c n + k)! by Stirling beside n!**c
    growth = (c, c * math.log(c), float(shift) + (1 - c) / 2, 0.0, 0.0)
    return Series.of((Atom(tight(node), ((size, growth),)), 1))


def subfactorial_rule(node: ast.expr, args: list[ast.expr], sizes: frozenset[str]) -> Series:
    """Give subfactorial(x) as factorial(x)/E."""
    out = factorial_rule(node, args, sizes) * Series.of((Atom("E", value=math.e), -1))
    key, _ = out.leading().single()
    return Series(
        out.terms, (*out.errors, Growth(tuple((s, FLAT) for s, _ in growth_of(key).by_size)))
    )


def binomial_rule(node: ast.expr, args: list[ast.expr], sizes: frozenset[str]) -> Series:
    """Give binomial(x, k) as a product, and the central coefficients by Stirling's formula."""
    lower = constant_of(args[1])
    if isinstance(lower, Fraction) and lower.denominator == 1 and 0 <= lower <= 12:
        out, top = Series.constant(ONE), expand(args[0], sizes)
        for k in range(lower.numerator):
            out = (out * (top + Series.constant(Fraction(-k)))).scaled(Fraction(1, k + 1))
        return out
    top_line = _linear(args[0], sizes)
    if top_line is None:
        raise TooHard
    size, slope, shift = top_line
    half = f"floor({size}/2)" in tight(args[1]) or f"ceiling({size}/2)" in tight(args[1])
    pi = (Atom("pi", value=math.pi), Fraction(-1, 2))
    root = (size_atom(size), Fraction(-1, 2))
    if slope == 1 and shift == 0 and half:
        exponential = Atom(f"2**{size}", ((size, unit(EXPONENTIAL, math.log(2))),))
        two = (Atom("sqrt(2)", value=math.sqrt(2)), 1)
        out = Series.of((exponential, 1), two, pi, root)
    elif _linear(args[1], sizes) == (size, ONE, Fraction(0)) and slope == 2 and shift == 0:
        exponential = Atom(f"4**{size}", ((size, unit(EXPONENTIAL, math.log(4))),))
        out = Series.of((exponential, 1), pi, root)
    else:
        raise TooHard
    key, _ = out.single()
    lost = growth_of((*key, (size_atom(size), Fraction(-1))))
    return Series(out.terms, (lost,))


def catalan_rule(node: ast.expr, args: list[ast.expr], sizes: frozenset[str]) -> Series:
    """Give catalan(n + k) as 4**(n + k)/(sqrt(pi)*n**(3/2))."""
    line = _linear(args[0], sizes)
    if line is None or line[1] != 1 or line[2].denominator != 1:
        raise TooHard
    size, _, shift = line
    exponential = Atom(f"4**{size}", ((size, unit(EXPONENTIAL, math.log(4))),))
    pi = (Atom("pi", value=math.pi), Fraction(-1, 2))
    root = (size_atom(size), Fraction(-3, 2))
    out = Series.of((exponential, 1), pi, root, times=Fraction(4) ** shift.numerator)
    key, _ = out.single()
    return Series(out.terms, (growth_of((*key, (size_atom(size), Fraction(-1)))),))


def golden_rule(by: Fraction, root: bool) -> Rule:
    """Give the rule for Fibonacci (with root) and Lucas numbers, powers of the golden ratio."""

    def rule(node: ast.expr, args: list[ast.expr], sizes: frozenset[str]) -> Series:
        line = _linear(args[0], sizes)
        if line is None or line[1].denominator != 1:
            raise TooHard
        size, slope, shift = line
        ratio = CONSTANTS["GoldenRatio"]
        rate = float(slope) * math.log(ratio)
        exponent = size if slope == 1 else f"({slope}*{size})"
        power = Atom(f"GoldenRatio**{exponent}", ((size, unit(EXPONENTIAL, rate)),))
        factors: list[tuple[Atom, Fraction | int]] = [(power, 1)]
        factors.append((Atom("GoldenRatio", value=ratio), shift))
        if root:
            factors.append((Atom("sqrt(5)", value=math.sqrt(5)), -1))
        out = Series.of(*factors, times=by)
        return Series(out.terms, (Growth(((size, unit(EXPONENTIAL, -rate)),)),))

    return rule


def tribonacci_rule(node: ast.expr, args: list[ast.expr], sizes: frozenset[str]) -> Series:
    """Give tribonacci(n + k) as one atom with its growth."""
    line = _linear(args[0], sizes)
    if line is None or line[1] != 1:
        raise TooHard
    return opaque(node, sizes, unit(EXPONENTIAL, math.log(1.8392867552141612)))
