"""Polynomials over the rationals in named whole numbers."""

from __future__ import annotations

from collections.abc import Iterable, Mapping
from fractions import Fraction
from functools import lru_cache
from math import comb, gcd, lcm

Monomial = tuple[tuple[str, int], ...]
ONE: Monomial = ()


class Poly:
    """A polynomial; immutable and hashable.

    Parameters
    ----------
    terms : mapping of monomial to number
        A monomial is a sorted tuple of (name, exponent); zero coefficients are dropped.

    Notes
    -----
    Kept as whole numbers over one common divisor: fractions would take most of the time.
    """

    __slots__ = ("_hash", "_names", "over", "whole")

    def __init__(self, terms: Mapping[Monomial, Fraction | int]) -> None:
        over = lcm(*(c.denominator for c in terms.values())) if terms else 1
        self.over = over
        self.whole = {m: c.numerator * (over // c.denominator) for m, c in terms.items() if c}
        self._hash: int | None = None
        self._names: frozenset[str] | None = None

    @classmethod
    def _of(cls, whole: dict[Monomial, int], over: int = 1) -> Poly:
        """Make one of whole numbers over a common divisor."""
        out = cls.__new__(cls)
        whole = {m: c for m, c in whole.items() if c}
        if over != 1:
            common = gcd(over, *whole.values())
            if common != 1:
                over //= common
                whole = {m: c // common for m, c in whole.items()}
        out.whole, out.over, out._hash, out._names = whole, over, None, None
        return out

    @property
    def terms(self) -> dict[Monomial, Fraction]:
        """Coefficients by monomial."""
        return {m: Fraction(c, self.over) for m, c in self.whole.items()}

    def __bool__(self) -> bool:
        return bool(self.whole)

    def __eq__(self, other: object) -> bool:
        return isinstance(other, Poly) and self.over == other.over and self.whole == other.whole

    def __hash__(self) -> int:
        if self._hash is None:
            self._hash = hash((self.over, frozenset(self.whole.items())))
        return self._hash

    def __repr__(self) -> str:
        return f"Poly({self.text()})"

    def __add__(self, other: Poly | int | Fraction) -> Poly:
        other = as_poly(other)
        over = lcm(self.over, other.over)
        mine, theirs = over // self.over, over // other.over
        out = {m: c * mine for m, c in self.whole.items()}
        for m, c in other.whole.items():
            out[m] = out.get(m, 0) + c * theirs
        return Poly._of(out, over)

    def __neg__(self) -> Poly:
        return Poly._of({m: -c for m, c in self.whole.items()}, self.over)

    def __sub__(self, other: Poly | int | Fraction) -> Poly:
        return self + -as_poly(other)

    def __mul__(self, other: Poly | int | Fraction) -> Poly:
        other = as_poly(other)
        out: dict[Monomial, int] = {}
        for m, c in self.whole.items():
            for k, d in other.whole.items():
                key = _times(m, k)
                out[key] = out.get(key, 0) + c * d
        return Poly._of(out, self.over * other.over)

    def __pow__(self, exponent: int) -> Poly:
        out = CONST_ONE
        for _ in range(exponent):
            out = out * self
        return out

    @property
    def constant(self) -> Fraction | None:
        """The value of a constant polynomial, None for any other."""
        if not self.whole:
            return Fraction(0)
        if len(self.whole) == 1 and ONE in self.whole:
            return Fraction(self.whole[ONE], self.over)
        return None

    @property
    def names(self) -> frozenset[str]:
        """The names in it."""
        if self._names is None:
            self._names = frozenset(name for m in self.whole for name, _ in m)
        return self._names

    @property
    def degree(self) -> int:
        """Largest total degree."""
        return max((sum(e for _, e in m) for m in self.whole), default=0)

    @property
    def free(self) -> Fraction:
        """The constant term."""
        return Fraction(self.whole.get(ONE, 0), self.over)

    def coefficient(self, name: str) -> Fraction:
        """Give the coefficient of a name that stands alone."""
        return Fraction(self.whole.get(((name, 1),), 0), self.over)

    def in_powers(self, name: str) -> list[Poly]:
        """Give the coefficients of the powers of a name, the 0th first."""
        out: list[dict[Monomial, int]] = [{}]
        for m, c in self.whole.items():
            exponent = next((e for k, e in m if k == name), 0)
            rest = tuple(f for f in m if f[0] != name)
            while len(out) <= exponent:
                out.append({})
            out[exponent][rest] = c
        return [Poly._of(t, self.over) for t in out]

    def linear_in(self, name: str) -> bool:
        """Whether a name stands in it alone and to the first power, if at all."""
        return all(m == ((name, 1),) for m in self.whole if any(k == name for k, _ in m))

    def put(self, values: Mapping[str, Poly]) -> Poly:
        """Substitute polynomials for names."""
        if self.names.isdisjoint(values):
            return self
        grouped: dict[Monomial, dict[Monomial, int]] = {}
        for m, c in self.whole.items():
            gone = tuple(f for f in m if f[0] in values)
            grouped.setdefault(gone, {})[tuple(f for f in m if f[0] not in values)] = c
        out = ZERO
        powers: dict[tuple[str, int], Poly] = {}
        for gone, rest in grouped.items():
            part = Poly._of(rest, self.over)
            for name, e in gone:
                part = part * _power(powers, values, name, e)
            out = out + part
        return out

    def at(self, values: Mapping[str, int | Fraction]) -> Fraction:
        """Work it out."""
        out: int | Fraction = 0
        for m, whole in self.whole.items():
            c: int | Fraction = whole
            for name, e in m:
                c = c * values[name] ** e
            out += c
        return Fraction(out) / self.over

    def denominator(self) -> int:
        """Give the least number that makes all coefficients whole."""
        return self.over

    def tightened(self) -> Poly:
        """Give the strongest form of ``self >= 0`` over whole numbers: whole coprime factors."""
        common = gcd(*(c for m, c in self.whole.items() if m))
        if common <= 1:
            return self if self.over == 1 else Poly._of(dict(self.whole))
        out = {m: c // common for m, c in self.whole.items()}  # the constant is rounded down
        return Poly._of(out)

    def text(self, shown: Mapping[str, str] | None = None) -> str:
        """Write it for sympy, the highest degree first."""
        shown = shown or {}
        ordered = sorted(self.terms, key=lambda m: (-sum(e for _, e in m), m))
        out = ""
        for m in ordered:
            c = self.terms[m]
            body = _written(abs(c), [(shown.get(k, k), e) for k, e in m])
            if out:
                out += f" - {body}" if c < 0 else f" + {body}"
            else:
                out = f"-{body}" if c < 0 else body
        return out or "0"


def _power(
    known: dict[tuple[str, int], Poly], values: Mapping[str, Poly], name: str, exponent: int
) -> Poly:
    found = known.get((name, exponent))
    if found is None:
        value = values[name]
        found = value if exponent == 1 else _power(known, values, name, exponent - 1) * value
        known[name, exponent] = found
    return found


def _written(c: Fraction, factors: list[tuple[str, int]]) -> str:
    parts = [] if c.numerator == 1 and factors else [str(c.numerator)]
    for text, exponent in sorted(factors):
        closed = text if text.isidentifier() or _is_call(text) else f"({text})"
        parts.append(closed if exponent == 1 else f"{closed}**{exponent}")
    upper = "*".join(parts)
    return upper if c.denominator == 1 else f"{upper}/{c.denominator}"


def _is_call(text: str) -> bool:
    """Whether a text is one call, so that it needs no brackets as a factor."""
    name, bracket, rest = text.partition("(")
    if not bracket or not name.isidentifier():
        return False
    depth = 1
    for place, character in enumerate(rest):
        depth += {"(": 1, ")": -1}.get(character, 0)
        if depth == 0:
            return place == len(rest) - 1
    return False


def _times(a: Monomial, b: Monomial) -> Monomial:
    if not a or not b:
        return a or b
    merged = dict(a)
    for name, e in b:
        merged[name] = merged.get(name, 0) + e
    return tuple(sorted(merged.items()))


def as_poly(value: Poly | int | Fraction) -> Poly:
    """Give a number as a constant polynomial."""
    return value if isinstance(value, Poly) else Poly({ONE: Fraction(value)})


def var(name: str) -> Poly:
    """Give the polynomial that is one name."""
    return Poly({((name, 1),): Fraction(1)})


def total(parts: Iterable[Poly]) -> Poly:
    """Add polynomials."""
    out = ZERO
    for part in parts:
        out = out + part
    return out


ZERO = Poly({})
CONST_ONE = Poly({ONE: 1})


@lru_cache(maxsize=64)
def power_sum(exponent: int) -> tuple[Fraction, ...]:
    """Give the polynomial S with S(x) = 0**k + 1**k + ... + x**k for the exponent k.

    Parameters
    ----------
    exponent : int
        k.

    Returns
    -------
    tuple of Fraction
        Coefficients of x**0, x**1, ... As a polynomial identity S(x) - S(x - 1) = x**k holds for
        every x, so that S(-1) = 0.

    Notes
    -----
    Faulhaber's formula (Graham, Knuth & Patashnik, Concrete Mathematics, 6.5), here by Pascal's
    recurrence on (x + 1)**(k + 1) - x**(k + 1).
    """
    k = exponent
    # (x+1)**(k+1) = sum over j <= k of C(k+1, j) * S_j(x), with 0**0 = 1.
    out = [Fraction(comb(k + 1, j)) for j in range(k + 2)]
    for j in range(k):
        for place, c in enumerate(power_sum(j)):
            out[place] -= comb(k + 1, j) * c
    return tuple(c / (k + 1) for c in out)


def summed(poly: Poly, name: str, low: Poly, high: Poly) -> Poly:
    """Give the sum of a polynomial over ``low <= name <= high``, for ``high >= low - 1``.

    Parameters
    ----------
    poly : Poly
        What is added up.
    name : str
        The running name.
    low, high : Poly
        First and last value.
    """
    out = ZERO
    for k, c in enumerate(poly.in_powers(name)):
        if not c:
            continue
        s = power_sum(k)
        below = low - 1
        part = ZERO
        for place, factor in enumerate(s):
            if factor and place:
                part = part + (high**place - below**place) * factor
        out = out + c * part
    return out
