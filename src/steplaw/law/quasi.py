"""Quasi-polynomials: polynomials whose coefficients repeat with the size (Ehrhart)."""

from __future__ import annotations

import itertools
from collections import Counter
from collections.abc import Callable, Sequence
from fractions import Fraction
from functools import lru_cache
from math import floor, lcm

from steplaw.law.polynomial import monomial
from steplaw.law.terms import Form, Term, power, product, write_sum


@lru_cache(maxsize=1024)
def _residue_term(exponent: int, period: int, rest: int) -> Term:
    text = product(power(exponent), f"[{{n}} mod {period} = {rest}]")
    return Term(text, _indicator(exponent, period, rest))


def _indicator(exponent: int, period: int, rest: int) -> Callable[[int], int]:
    return lambda n: n**exponent if n % period == rest else 0


@lru_cache(maxsize=16)
def floor_term(period: int) -> Term:
    """Give the term floor(n/period)."""
    return Term(f"floor({{n}}/{period})", lambda n: n // period)


@lru_cache(maxsize=512)
def quasi(degree: int, period: int, varying: int) -> Form:
    """Give the form of a quasi-polynomial.

    Parameters
    ----------
    degree : int
        Largest power.
    period : int
        Period of the coefficients.
    varying : int
        Largest power whose coefficient repeats; higher ones are fixed.

    Returns
    -------
    Form
        With ``degree + 1 + (period - 1) * (varying + 1)`` free coefficients.
    """
    fixed = [monomial(k) for k in range(degree, -1, -1)]
    moving = [
        _residue_term(k, period, rest) for k in range(varying, -1, -1) for rest in range(1, period)
    ]

    def write(coefficients: Sequence[Fraction], name: str) -> str:
        return _write(coefficients, name, degree, period, varying)

    return Form("quasi-polynomial", (*fixed, *moving), write)


def quasi_polynomials(most_terms: int, largest_period: int = 12) -> list[Form]:
    """Give the forms with at most so many coefficients, fewest first."""
    forms = []
    for period in range(2, largest_period + 1):
        for degree in range(5):
            for varying in range(degree + 1):
                if degree + 1 + (period - 1) * (varying + 1) <= most_terms:
                    forms.append(quasi(degree, period, varying))
    return sorted(forms, key=lambda form: len(form.terms))


def _write(
    coefficients: Sequence[Fraction], name: str, degree: int, period: int, varying: int
) -> str:
    fixed = {degree - k: c for k, c in enumerate(coefficients[: degree + 1])}
    rest = list(coefficients[degree + 1 :])
    offsets = {
        power_: [Fraction(0), *rest[index * (period - 1) : (index + 1) * (period - 1)]]
        for index, power_ in enumerate(range(varying, -1, -1))
    }
    if not any(any(offsets[k]) for k in range(1, varying + 1)):
        single = _single_floor(fixed, offsets[0], period, name)
        if single is not None:
            return single
    return _floor_sum(fixed, offsets, period, name)


def _single_floor(
    fixed: dict[int, Fraction], offsets: list[Fraction], period: int, name: str
) -> str | None:
    """Write value = floor(P(n)) where the repeating part is only a rounding."""
    values = [
        sum((c * n**k for k, c in fixed.items()), offsets[n % period])
        for n in range(lcm(period, *(c.denominator for c in fixed.values())))
    ]
    if any(v.denominator != 1 for v in values) or max(offsets) - min(offsets) >= 1:
        return None
    ways = []
    for word, shift in (("floor", max(offsets)), ("ceiling", min(offsets))):
        inner = {**fixed, 0: fixed[0] + shift}
        whole = {k: Fraction(floor(c)) for k, c in inner.items()}
        part = {k: inner[k] - whole[k] for k in inner}
        outer = _polynomial_parts(whole, name)
        held = write_sum(_polynomial_parts(part, name))
        ways.append(write_sum(sorted_parts(outer, (Fraction(1), f"{word}({held})", ""), part)))
    return min(ways, key=len)


def sorted_parts(
    outer: list[tuple[Fraction, str, str]],
    rounded: tuple[Fraction, str, str],
    part: dict[int, Fraction],
) -> list[tuple[Fraction, str, str]]:
    """Put the rounded part behind the powers that are at least as large."""
    degree = max((k for k, c in part.items() if c), default=0)
    outer_degrees = [_degree_of(text) for _, text, _ in outer]
    place = sum(1 for d in outer_degrees if d >= degree and d > 0)
    return [*outer[:place], rounded, *outer[place:]]


def _degree_of(text: str) -> int:
    if not text:
        return 0
    return int(text.partition("**")[2] or 1)


def _polynomial_parts(
    coefficients: dict[int, Fraction], name: str
) -> list[tuple[Fraction, str, str]]:
    return [(coefficients[k], power(k, name), "") for k in sorted(coefficients, reverse=True)]


def _floor_sum(
    fixed: dict[int, Fraction], offsets: dict[int, list[Fraction]], period: int, name: str
) -> str:
    """Write the repeating coefficients with floor((n + k)/period).

    The indicator of ``n = r (mod period)`` is a difference of two neighbouring floors, and the
    floors for k = 0..period-1 add up to n (Hermite's identity), so the commonest weight is
    taken out of all of them.
    """
    remainder = _remainder(fixed, offsets, period, name)
    if remainder is not None:
        return remainder
    tables = {exponent: _floor_weights(values, period) for exponent, values in offsets.items()}
    ways = [{}] if not tables else _choices(tables)
    texts = [_floor_text_sum(fixed, tables, common, period, name) for common in ways]
    return min(texts, key=len)


def _remainder(
    fixed: dict[int, Fraction], offsets: dict[int, list[Fraction]], period: int, name: str
) -> str | None:
    """Write c*Mod(n, period) + constant where nothing else is left."""
    steps = {b - a for a, b in itertools.pairwise(offsets[0])}
    others = any(any(offsets[k]) for k in offsets if k) or any(fixed[k] for k in fixed if k)
    if others or len(steps) != 1:
        return None
    return write_sum([(steps.pop(), f"Mod({name}, {period})", ""), (fixed[0], "", "")])


def _choices(tables: dict[int, tuple[list[Fraction], Fraction]]) -> list[dict[int, Fraction]]:
    """Give the ways of taking one weight out of all floors, the commonest and the others."""
    ways: list[dict[int, Fraction]] = [{}]
    for exponent, (weights, _) in tables.items():
        counted = [w for w, _ in Counter(weights).most_common(3)]
        ways = [{**way, exponent: w} for way in ways for w in counted][:64]
    return ways


def _floor_text_sum(
    fixed: dict[int, Fraction],
    tables: dict[int, tuple[list[Fraction], Fraction]],
    common: dict[int, Fraction],
    period: int,
    name: str,
) -> str:
    total = dict(fixed)
    floors: dict[int, dict[int, Fraction]] = {}
    for exponent, (weights, extra) in tables.items():
        taken = common[exponent]
        total[exponent + 1] = total.get(exponent + 1, Fraction(0)) + taken
        total[exponent] = total.get(exponent, Fraction(0)) + extra
        floors[exponent] = {k: w - taken for k, w in enumerate(weights) if w != taken}
    parts = []
    for exponent in sorted({*total, *(k + 1 for k in floors)}, reverse=True):
        parts.append((total.get(exponent, Fraction(0)), power(exponent, name), ""))
        for shift, weight in floors.get(exponent - 1, {}).items():
            text = product(power(exponent - 1, name), _floor_text(shift, period, name))
            parts.append((weight, text, ""))
    return write_sum(parts)


def _floor_weights(by_rest: list[Fraction], period: int) -> tuple[list[Fraction], Fraction]:
    """Turn a repeating value into weights of floor((n + k)/period), k = 0..period-1."""
    weights = [Fraction(0)] * period
    extra = Fraction(0)
    for rest, value in enumerate(by_rest):
        if not value:
            continue
        # [n = rest] = floor((n + period - rest)/period) - floor((n + period - rest - 1)/period)
        if rest == 0:
            weights[0] += value
            extra += value
        else:
            weights[period - rest] += value
        weights[period - rest - 1] -= value
    return weights, extra


def _floor_text(shift: int, period: int, name: str) -> str:
    if shift == 0:
        return f"floor({name}/{period})"
    if shift == period - 1:
        return f"ceiling({name}/{period})"
    return f"floor(({name} + {shift})/{period})"
