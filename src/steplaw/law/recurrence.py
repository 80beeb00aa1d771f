"""Linear recurrences with constant coefficients, and their closed forms.

The shortest recurrence comes from the algorithm of Berlekamp and Massey (Massey, Shift-register
synthesis and BCH decoding, IEEE Transactions on Information Theory 15, 1969), over the
rationals. Its characteristic polynomial is split into factors whose sequences have a plain name.
"""

from __future__ import annotations

from collections.abc import Callable, Sequence
from fractions import Fraction
from functools import lru_cache
from math import isqrt

from steplaw.law.exactmath import PRIME, residue
from steplaw.law.polynomial import monomial
from steplaw.law.powers import exponential
from steplaw.law.special import fibonacci, tribonacci
from steplaw.law.terms import Form, Term, times_power, write_product, write_sum

SPARE = 3
CYCLOTOMIC = {3: (1, 1, 1), 4: (1, 0, 1), 5: (1, 1, 1, 1, 1), 6: (1, -1, 1)}
FIBONACCI = (1, -1, -1)
TRIBONACCI = (1, -1, -1, -1)
EVERY_OTHER_FIBONACCI = (1, -3, 1)


def shortest_recurrence(values: Sequence[Fraction]) -> list[Fraction] | None:
    """Give the shortest linear recurrence of a sequence.

    Parameters
    ----------
    values : sequence of Fraction
        Values at consecutive sizes.

    Returns
    -------
    list of Fraction or None
        c with ``a(n) = c[0] a(n-1) + c[1] a(n-2) + ...`` at every place where enough values
        come before, or None where it would need half of the values or nearly so.
    """
    if len(values) < 2 * SPARE:
        return None
    order = len(_berlekamp_massey_mod([residue(v) for v in values]))
    if 2 * order + SPARE > len(values):
        return None
    found = _berlekamp_massey(values)
    return found if 2 * len(found) + SPARE <= len(values) else None


def _berlekamp_massey_mod(values: Sequence[int]) -> list[int]:
    current: list[int] = []
    last: list[int] = []
    last_place, last_gap = -1, 1
    for place, value in enumerate(values):
        guess = sum(c * values[place - 1 - k] for k, c in enumerate(current))
        gap = (value - guess) % PRIME
        if not gap:
            continue
        if last_place < 0:
            current, last_place, last_gap = [0] * (place + 1), place, gap
            continue
        factor = gap * pow(last_gap, -1, PRIME) % PRIME
        shift = [0] * (place - last_place - 1) + [factor] + [-factor * c % PRIME for c in last]
        shift += [0] * (len(current) - len(shift))
        new = [(s + (current[k] if k < len(current) else 0)) % PRIME for k, s in enumerate(shift)]
        if place - len(current) > last_place - len(last):
            last, last_place, last_gap = current, place, gap
        current = new
    return current


def _berlekamp_massey(values: Sequence[Fraction]) -> list[Fraction]:
    current: list[Fraction] = []
    last: list[Fraction] = []
    last_place, last_gap = -1, Fraction(1)
    for place, value in enumerate(values):
        guess = sum((c * values[place - 1 - k] for k, c in enumerate(current)), Fraction(0))
        gap = value - guess
        if not gap:
            continue
        if last_place < 0:
            current, last_place, last_gap = [Fraction(0)] * (place + 1), place, gap
            continue
        factor = gap / last_gap
        shift = [Fraction(0)] * (place - last_place - 1) + [factor] + [-factor * c for c in last]
        shift += [Fraction(0)] * (len(current) - len(shift))
        new = [s + (current[k] if k < len(current) else 0) for k, s in enumerate(shift)]
        if place - len(current) > last_place - len(last):
            last, last_place, last_gap = current, place, gap
        current = new
    return current


def consecutive(sizes: Sequence[int]) -> tuple[int, int]:
    """Give the bounds of the longest stretch of consecutive sizes, as a slice."""
    best, start = (0, 0), 0
    for k in range(1, len(sizes) + 1):
        if k == len(sizes) or sizes[k] != sizes[k - 1] + 1:
            if k - start > best[1] - best[0]:
                best = (start, k)
            start = k
    return best


def recurrence_forms(sizes: Sequence[int], values: Sequence[Fraction]) -> list[Form]:
    """Give the form that the recurrence of the consecutive sizes leads to, if it has one.

    Parameters
    ----------
    sizes : sequence of int
        In increasing order.
    values : sequence of Fraction
        Values at these sizes.

    Returns
    -------
    list of Form
        Empty where there is no short recurrence or no closed form by these rules.
    """
    first, last = consecutive(sizes)
    for skip in range(min(4, max(0, last - first - 2 * SPARE))):
        found = shortest_recurrence(values[first + skip : last])
        if found is None:
            continue
        terms = closed_form([Fraction(1), *(-c for c in found)])
        if terms is not None:
            return [Form("linear recurrence", terms)]
        return []
    return []


def recurrence_text(sizes: Sequence[int], values: Sequence[Fraction]) -> str:
    """Say which short recurrence the consecutive sizes obey; empty where there is none."""
    first, last = consecutive(sizes)
    found = shortest_recurrence(values[first:last])
    if found is None:
        return ""
    parts = [(c, f"T(n - {k})", "") for k, c in enumerate(found, 1)]
    return f"T(n) = {write_sum(parts)}"


def closed_form(polynomial: Sequence[Fraction]) -> tuple[Term, ...] | None:
    """Give the terms that span the solutions of a recurrence.

    Parameters
    ----------
    polynomial : sequence of Fraction
        Characteristic polynomial, highest power first.

    Returns
    -------
    tuple of Term or None
        None where a factor has no plain sequence of its own.
    """
    rest = list(polynomial)
    while len(rest) > 1 and not rest[-1]:
        rest.pop()
    terms: list[Term] = []
    for root in _candidate_roots(rest):
        rest, times = _divide_out(rest, [Fraction(1), -root])
        terms += [times_power(_geometric(root), k) for k in range(times)]
    for factor, basis in _named_factors():
        rest, times = _divide_out(rest, [Fraction(c) for c in factor])
        terms += [times_power(t, k) for k in range(times) for t in basis]
    if len(rest) == 3:
        quadratic = _quadratic(rest)
        if quadratic is None:
            return None
        terms += quadratic
    elif len(rest) > 1:
        return None
    return tuple(sorted(terms, key=_size_at_30, reverse=True)) or None


def _size_at_30(term: Term) -> Fraction:
    return abs(Fraction(term.at(30)))


def _candidate_roots(polynomial: Sequence[Fraction]) -> list[Fraction]:
    if any(c.denominator != 1 for c in polynomial):
        return [Fraction(p, q) for q in (1, 2, 3, 4) for p in range(-9, 10) if p]
    last = abs(polynomial[-1].numerator)
    divisors = [d for d in range(1, min(last, 200) + 1) if last % d == 0]
    return [Fraction(s * d) for d in divisors for s in (1, -1)]


def _geometric(root: Fraction) -> Term:
    if root == 1:
        return monomial(0)
    if root.denominator == 1:
        return exponential(root.numerator)
    return Term(f"({root})**{{n}}", lambda n: root**n)


def fibonacci_terms() -> list[Term]:
    """Give the two Fibonacci numbers that span the solutions of a(n) = a(n-1) + a(n-2)."""
    return [
        Term("fibonacci({n} + 1)", lambda n: fibonacci(n + 1)),
        Term("fibonacci({n})", fibonacci),
    ]


def every_other_fibonacci_terms() -> list[Term]:
    """Give the two sequences that span the solutions of a(n) = 3 a(n-1) - a(n-2)."""
    return [
        Term("fibonacci(2*{n} + 1)", lambda n: fibonacci(2 * n + 1)),
        Term("fibonacci(2*{n})", lambda n: fibonacci(2 * n)),
    ]


@lru_cache(maxsize=1)
def _named_factors() -> list[tuple[tuple[int, ...], list[Term]]]:
    named: list[tuple[tuple[int, ...], list[Term]]] = [
        (FIBONACCI, fibonacci_terms()),
        (EVERY_OTHER_FIBONACCI, every_other_fibonacci_terms()),
        (TRIBONACCI, [Term("tribonacci({n} + 2)", lambda n: tribonacci(n + 2)),
                      Term("tribonacci({n} + 1)", lambda n: tribonacci(n + 1)),
                      Term("tribonacci({n})", tribonacci)]),
    ]  # fmt: skip
    for period, factor in CYCLOTOMIC.items():
        count = len(factor) - 1
        named.append((factor, [_cycle(period, factor, k) for k in range(count)]))
    return named


def _cycle(period: int, factor: tuple[int, ...], place: int) -> Term:
    """Give one repeating solution of a cyclotomic recurrence, written with Mod."""
    order = len(factor) - 1
    values = [1 if k == place else 0 for k in range(order)]
    while len(values) < period:
        values.append(-sum(c * values[-k] for k, c in enumerate(factor) if k))
    parts = []
    for rest, value in enumerate(values):
        # [n = rest (mod period)] as a difference of two neighbouring floors
        parts.append((Fraction(value), _floor(period - rest, period), ""))
        parts.append((Fraction(-value), _floor(period - rest - 1, period), ""))
    return Term(f"({write_sum(parts)})", lambda n: values[n % period])


def _floor(shift: int, period: int) -> str:
    return f"floor(({{n}} + {shift})/{period})" if shift else f"floor({{n}}/{period})"


def _divide_out(polynomial: list[Fraction], factor: list[Fraction]) -> tuple[list[Fraction], int]:
    times = 0
    while len(polynomial) >= len(factor):
        quotient = _exact_quotient(polynomial, factor)
        if quotient is None:
            break
        polynomial = quotient
        times += 1
    return polynomial, times


def _exact_quotient(
    polynomial: Sequence[Fraction], factor: Sequence[Fraction]
) -> list[Fraction] | None:
    rest, quotient = list(polynomial), []
    for k in range(len(polynomial) - len(factor) + 1):
        c = rest[k] / factor[0]
        quotient.append(c)
        for j, f in enumerate(factor):
            rest[k + j] -= c * f
    return None if any(rest[len(quotient) :]) else quotient


def _quadratic(polynomial: Sequence[Fraction]) -> list[Term] | None:
    """Write x**2 - p x + q with real irrational roots as powers of a + b*sqrt(d)."""
    p, q = -polynomial[1] / polynomial[0], polynomial[2] / polynomial[0]
    disc = p * p - 4 * q
    if disc <= 0 or p.denominator != 1 or q.denominator != 1:
        return None
    square, free = _square_part(disc.numerator)
    surd = f"sqrt({free})"
    root = write_product(Fraction(square, 2), surd)
    shown = f"{p / 2} " if p else ""
    plus, minus = f"({shown}+ {root})**{{n}}", f"({shown}- {root})**{{n}}"
    total = _lucas_sequence(p, q, Fraction(2), p)
    gap = _lucas_sequence(p, q, Fraction(0), Fraction(1))
    return [
        Term(f"({plus} + {minus})", total),
        Term(f"({plus} - {minus})", gap, under=write_product(Fraction(square), surd)),
    ]


def _lucas_sequence(
    p: Fraction, q: Fraction, first: Fraction, second: Fraction
) -> Callable[[int], int | Fraction]:
    def at(n: int) -> Fraction:
        a, b = first, second
        for _ in range(n):
            a, b = b, p * b - q * a
        return a

    return at


def _square_part(number: int) -> tuple[int, int]:
    """Write a number as square**2 * free with free as small as trial division finds it."""
    square, free, k = 1, number, 2
    while k <= min(isqrt(free), 10_000):
        while free % (k * k) == 0:
            free //= k * k
            square *= k
        k += 1
    return square, free
