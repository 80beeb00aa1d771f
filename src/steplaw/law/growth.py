"""Asymptotic series: sums of products of atoms whose growth is known."""

from __future__ import annotations

import math
from collections.abc import Iterable
from dataclasses import dataclass
from fractions import Fraction
from functools import lru_cache

# growth in one size: powers of factorial, e**(r n), n, log n, log log n
Vector = tuple[float, float, float, float, float]
FLAT: Vector = (0.0, 0.0, 0.0, 0.0, 0.0)
TINY = 1e-9


@dataclass(frozen=True, slots=True)
class Atom:
    """A factor that is not taken apart further.

    Parameters
    ----------
    text : str
        How it is written.
    growth : tuple of (str, Vector)
        Its growth in each size that it depends on; empty for a constant.
    value : float or None
        The number, for a constant whose value is known.
    """

    text: str
    growth: tuple[tuple[str, Vector], ...] = ()
    value: float | None = None


Monomial = tuple[tuple[Atom, Fraction], ...]
Coefficient = Fraction | float


class TooHard(Exception):
    """The leading term cannot be found by these rules."""


@dataclass(frozen=True, slots=True)
class Growth:
    """Growth of a monomial, by size."""

    by_size: tuple[tuple[str, Vector], ...]

    def vector(self, size: str) -> Vector:
        """Give the growth in one size."""
        return dict(self.by_size).get(size, FLAT)

    def diagonal(self) -> Vector:
        """Give the growth where all sizes grow alike."""
        columns = [v for _, v in self.by_size]
        sums = [sum(v[k] for v in columns) for k in range(5)]
        return (sums[0], sums[1], sums[2], sums[3], sums[4])


def compare(a: Vector, b: Vector) -> int:
    """Give -1, 0 or 1 as the first grows slower than, like or faster than the second."""
    for x, y in zip(a, b, strict=True):
        if abs(x - y) > TINY:
            return 1 if x > y else -1
    return 0


def dominates(a: Growth, b: Growth) -> bool:
    """Say whether the second is lost beside the first when all sizes grow without bound."""
    sizes = {s for s, _ in a.by_size} | {s for s, _ in b.by_size}
    signs = [compare(a.vector(s), b.vector(s)) for s in sizes]
    return bool(signs) and min(signs) >= 0 and max(signs) > 0


@lru_cache(maxsize=16384)
def growth_of(monomial: Monomial) -> Growth:
    """Give the growth of a product of atoms."""
    total: dict[str, list[float]] = {}
    for atom, exponent in monomial:
        for size, vector in atom.growth:
            sums = total.setdefault(size, [0.0] * 5)
            for k in range(5):
                sums[k] += vector[k] * float(exponent)
    return Growth(tuple((s, (v[0], v[1], v[2], v[3], v[4])) for s, v in sorted(total.items())))


def is_constant(monomial: Monomial) -> bool:
    """Say whether a product depends on no size."""
    return not any(atom.growth for atom, _ in monomial)


@dataclass(frozen=True, slots=True)
class Series:
    """A sum of monomials, and the growth of what was left out."""

    terms: dict[Monomial, Coefficient]
    errors: tuple[Growth, ...] = ()

    @classmethod
    def constant(cls, number: Coefficient) -> Series:
        """Give a number as a series."""
        return cls({(): number} if number else {})

    @classmethod
    def of(cls, *factors: tuple[Atom, Fraction | int], times: Coefficient = Fraction(1)) -> Series:
        """Give a product of atoms as a series."""
        return cls({_monomial((a, Fraction(e)) for a, e in factors): times})

    def __add__(self, other: Series) -> Series:
        terms = dict(self.terms)
        for key, c in other.terms.items():
            total = terms.get(key, 0) + c
            if total:
                terms[key] = total
            else:
                terms.pop(key, None)
        return Series(terms, self.errors + other.errors)

    def scaled(self, by: Coefficient) -> Series:
        """Give the series times a number."""
        return Series({k: c * by for k, c in self.terms.items()}, self.errors) if by else Series({})

    def __mul__(self, other: Series) -> Series:
        if len(self.terms) * len(other.terms) > 400:
            raise TooHard
        terms: dict[Monomial, Coefficient] = {}
        for a, x in self.terms.items():
            for b, y in other.terms.items():
                key = _monomial((*a, *b))
                total = terms.get(key, 0) + x * y
                if total:
                    terms[key] = total
                else:
                    terms.pop(key, None)
        errors = [_plus(e, growth_of(b)) for e in self.errors for b in other.terms]
        errors += [_plus(e, growth_of(a)) for e in other.errors for a in self.terms]
        errors += [_plus(e, f) for e in self.errors for f in other.errors]
        return Series(terms, tuple(dict.fromkeys(errors)))

    def leading(self) -> Series:
        """Give the monomials that no other one outgrows.

        Raises
        ------
        TooHard
            Where what was left out may matter as much.
        """
        terms = _without_cancelled(self.terms)
        growths = {key: growth_of(key) for key in terms}
        kept = {
            key: c
            for key, c in terms.items()
            if not any(dominates(g, growths[key]) for g in growths.values())
        }
        for error in self.errors:
            if not any(dominates(growths[key], error) for key in kept):
                raise TooHard
        return Series(kept)

    def is_single(self) -> bool:
        """Say whether the series is one monomial with nothing left out."""
        return len(self.terms) == 1 and not self.errors

    def single(self) -> tuple[Monomial, Coefficient]:
        """Give the only monomial and its coefficient."""
        return next(iter(self.terms.items()))


def _without_cancelled(terms: dict[Monomial, Coefficient]) -> dict[Monomial, Coefficient]:
    """Drop groups whose constants add up to nothing, such as 1/2 - log(2)/log(4)."""
    groups: dict[Monomial, list[Monomial]] = {}
    for key in terms:
        groups.setdefault(tuple(f for f in key if f[0].growth), []).append(key)
    kept = dict(terms)
    for members in groups.values():
        if len(members) < 2:
            continue
        sizes = [numeric(terms[k], k) for k in members]
        if None in sizes:
            continue
        numbers = [x for x in sizes if x is not None]
        if abs(math.fsum(numbers)) < 1e-12 * math.fsum(map(abs, numbers)):
            for key in members:
                del kept[key]
    return kept


def numeric(coefficient: Coefficient, monomial: Monomial) -> float | None:
    """Give the constant part of a term as a float; None where a constant is unknown."""
    total = float(coefficient)
    for atom, exponent in monomial:
        if atom.growth:
            continue
        if atom.value is None:
            return None
        total *= atom.value ** float(exponent)
    return total


def _plus(a: Growth, b: Growth) -> Growth:
    sizes = sorted({s for s, _ in a.by_size} | {s for s, _ in b.by_size})
    out = []
    for size in sizes:
        x, y = a.vector(size), b.vector(size)
        out.append((size, (x[0] + y[0], x[1] + y[1], x[2] + y[2], x[3] + y[3], x[4] + y[4])))
    return Growth(tuple(out))


def _monomial(factors: Iterable[tuple[Atom, Fraction]]) -> Monomial:
    total: dict[Atom, Fraction] = {}
    for atom, exponent in factors:
        total[atom] = total.get(atom, Fraction(0)) + exponent
    return tuple(sorted(((a, e) for a, e in total.items() if e), key=lambda f: f[0].text))


def inverse(series: Series) -> Series:
    """Give 1 divided by a series, to its leading order."""
    return raised(series, Fraction(-1))


def raised(series: Series, exponent: Fraction) -> Series:
    """Give a series to a power that is a number, to its leading order."""
    if exponent.denominator == 1 and 0 <= exponent <= 12 and len(series.terms) <= 6:
        result = Series.constant(Fraction(1))
        for _ in range(exponent.numerator):
            result = result * series
        return result
    first = series.leading()
    if len(first.terms) != 1:
        raise TooHard
    monomial, c = first.single()
    key = tuple((a, e * exponent) for a, e in monomial)
    out = Series({_monomial(key): Fraction(1)}) * _number_power(c, exponent)
    if series.is_single():
        return out
    # (m (1 + r))**x = m**x (1 + x r + ...), so what is left out is m**x times the largest r
    rest = [growth_of(k) for k in series.terms if k != monomial] + list(series.errors)
    shift = growth_of(tuple((a, e * (exponent - 1)) for a, e in monomial))
    return Series(out.terms, tuple(dict.fromkeys(_plus(shift, r) for r in rest)))


def _number_power(number: Coefficient, exponent: Fraction) -> Series:
    if isinstance(number, float):
        return Series.constant(number ** float(exponent))
    if exponent.denominator == 1:
        return Series.constant(number**exponent.numerator)
    if exponent.denominator == 2 and number > 0:
        whole = number.numerator * number.denominator
        root = math.isqrt(whole)
        if root * root == whole:
            return Series.constant(Fraction(root, number.denominator) ** exponent.numerator)
        atom = Atom(f"sqrt({whole})", value=math.sqrt(whole))
        part = Series.of((atom, exponent.numerator))
        return part.scaled(Fraction(1, number.denominator) ** exponent.numerator)
    if number < 0:
        raise TooHard
    text = f"({number})**({exponent})" if number.denominator > 1 else f"{number}**({exponent})"
    return Series.of((Atom(text, value=float(number) ** float(exponent)), 1))
