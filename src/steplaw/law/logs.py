"""Floors and ceilings of logarithms and roots: halving, doubling, trees, trial division."""

from __future__ import annotations

from collections.abc import Callable
from functools import lru_cache
from math import isqrt

from steplaw.law.polynomial import monomial
from steplaw.law.quasi import floor_term
from steplaw.law.terms import Form, Term, times_power

BASES = (2, 3, 4, 5, 10)
ONE, N, N2 = monomial(0), monomial(1), monomial(2)


def floor_log(n: int, base: int) -> int:
    """Give the largest k with ``base**k <= n`` for n of at least 1."""
    if base == 2:
        return n.bit_length() - 1
    k, power = 0, base
    while power <= n:
        power *= base
        k += 1
    return k


def ceiling_log(n: int, base: int) -> int:
    """Give the smallest k with ``base**k >= n`` for n of at least 1."""
    return 0 if n == 1 else floor_log(n - 1, base) + 1


@lru_cache(maxsize=64)
def log_term(rounding: str, base: int, exponent: int = 1) -> Term:
    """Give the rounded logarithm to a base, to a power.

    Parameters
    ----------
    rounding : {"floor", "ceiling"}
        Which way it is rounded.
    base : int
        Base of the logarithm.
    exponent : int
        Power of the rounded number.
    """
    function = floor_log if rounding == "floor" else ceiling_log
    text = _log_text(rounding, base) + (f"**{exponent}" if exponent > 1 else "")
    return Term(text, lambda n: function(n, base) ** exponent, least=1)


@lru_cache(maxsize=64)
def power_term(rounding: str, base: int, of: int) -> Term:
    """Give a number `of` to the power of a rounded logarithm to a base."""
    function = floor_log if rounding == "floor" else ceiling_log
    text = f"{of}**{_log_text(rounding, base)}"
    return Term(text, lambda n: of ** function(n, base), least=1)


def _log_text(rounding: str, base: int) -> str:
    return f"{rounding}(log({{n}})/log({base}))"


def _levels(base: int) -> Callable[[int], int]:
    return lambda n: floor_log(n, base) if n > 0 else -1


@lru_cache(maxsize=1)
def log_forms() -> tuple[Form, ...]:
    """Give the forms with rounded logarithms."""
    forms = []
    for base in BASES:
        for rounding in ("floor", "ceiling"):
            sets = _binary_sets(rounding) if base == 2 else _other_sets(rounding, base)
            forms += [Form("logarithmic", terms, levels=_levels(base)) for terms in sets]
    floor2, ceiling2 = log_term("floor", 2), log_term("ceiling", 2)
    both = ((floor2, ceiling2, ONE), (N, floor2, ceiling2, ONE))
    forms += [Form("logarithmic", terms, levels=_levels(2)) for terms in both]
    return tuple(forms)


def _binary_sets(rounding: str) -> list[tuple[Term, ...]]:
    log, square = log_term(rounding, 2), log_term(rounding, 2, 2)
    cube = log_term(rounding, 2, 3)
    power = power_term(rounding, 2, 2)
    nlog, n2log = times_power(log, 1), times_power(log, 2)
    half = floor_term(2)
    sets: list[tuple[Term, ...]] = [
        (log, ONE),
        (power, ONE),
        (N, log, ONE),
        (N, power, ONE),
        (square, log, ONE),
        (cube, square, log, ONE),
        (nlog, N, ONE),
        (nlog, log, ONE),
        (nlog, N, log, ONE),
        (nlog, N, power, ONE),
        (nlog, power, log, ONE),
        (N, power, log, ONE),
        (N, square, log, ONE),
        (nlog, N, power, log, ONE),
        (N2, N, log, ONE),
        (N2, N, power, ONE),
        (N2, nlog, N, ONE),
        (N2, nlog, N, log, ONE),
        (N2, nlog, N, power, ONE),
        (N2, nlog, N, power, log, ONE),
        (n2log, N2, N, ONE),
        (n2log, N2, nlog, N, log, ONE),
        (times_power(square, 1), nlog, N, ONE),
        (times_power(square, 1), nlog, N, power, ONE),
        (times_power(square, 1), nlog, N, square, log, ONE),
        (N, half, log, ONE),
        (nlog, N, half, ONE),
        (nlog, N, half, log, ONE),
        (nlog, N, half, power, log, ONE),
    ]
    for of in (3, 4, 7):
        other = power_term(rounding, 2, of)
        sets += [(other, ONE), (other, power, ONE), (other, power, log, ONE), (other, N, ONE)]
    four = power_term(rounding, 2, 4)
    sets += [
        (power_term(rounding, 2, 7), four, ONE),
        (power_term(rounding, 2, 7), four, power, ONE),
    ]
    return sets


def _other_sets(rounding: str, base: int) -> list[tuple[Term, ...]]:
    log, power = log_term(rounding, base), power_term(rounding, base, base)
    nlog = times_power(log, 1)
    return [
        (log, ONE),
        (N, log, ONE),
        (nlog, N, ONE),
        (nlog, N, log, ONE),
        (nlog, N, power, ONE),
        (nlog, N, power, log, ONE),
        (power, log, ONE),
        (N, power, ONE),
        (N, power, log, ONE),
    ]


@lru_cache(maxsize=8)
def root_term(rounding: str, exponent: int = 1) -> Term:
    """Give the rounded square root of the size, to a power."""
    text = f"{rounding}(sqrt({{n}}))" + (f"**{exponent}" if exponent > 1 else "")
    if rounding == "floor":
        return Term(text, lambda n: isqrt(n) ** exponent)
    return Term(text, lambda n: (isqrt(n - 1) + 1 if n else 0) ** exponent)


@lru_cache(maxsize=1)
def root_forms() -> tuple[Form, ...]:
    """Give the forms with rounded square roots."""
    forms = []
    for rounding in ("floor", "ceiling"):
        root, square = root_term(rounding), root_term(rounding, 2)
        cube = root_term(rounding, 3)
        nroot = times_power(root, 1)
        for terms in (
            (root, ONE),
            (N, root, ONE),
            (N, square, root, ONE),
            (nroot, N, ONE),
            (nroot, N, root, ONE),
            (N2, N, root, ONE),
            (nroot, N, cube, square, root, ONE),
        ):
            forms.append(Form("square root", terms, levels=isqrt))
    return tuple(forms)
