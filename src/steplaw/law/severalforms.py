"""Exact forms in several sizes: products of forms in each size."""

from __future__ import annotations

from collections.abc import Callable, Iterator
from dataclasses import dataclass
from functools import lru_cache
from itertools import combinations, product
from math import prod

from steplaw.law.logs import log_term, power_term
from steplaw.law.polynomial import monomial
from steplaw.law.quasi import floor_term
from steplaw.law.terms import Exact, Term, times_power

Point = tuple[int, ...]


@dataclass(frozen=True, slots=True, eq=False)
class PointTerm:
    """One function of several sizes.

    Parameters
    ----------
    text : str
        How it is written, in the size names.
    at : callable
        Its exact value at a point.
    least : int
        Smallest size, in every direction, at which it is defined.
    weight : float
        Its degree, for the order of writing.
    """

    text: str
    at: Callable[[Point], Exact]
    least: int
    weight: float


PointForm = tuple[PointTerm, ...]


def joined(terms: tuple[Term, ...], names: tuple[str, ...]) -> PointTerm:
    """Give the product of one term in each size."""
    texts = [t.text.format(n=name) for t, name in zip(terms, names, strict=True) if t.text]

    def at(point: Point) -> Exact:
        return prod(t.at(n) for t, n in zip(terms, point, strict=True))

    weight = sum(_weight(t) for t in terms)
    return PointTerm("*".join(texts), at, max(t.least for t in terms), weight)


def _weight(term: Term) -> float:
    """Give the degree of a term, read off its value at 2**20."""
    return int(term.at(1 << 20)).bit_length() / 20


def tensor(
    lists: tuple[tuple[Term, ...], ...], names: tuple[str, ...], total: int | None = None
) -> PointForm:
    """Give all products of the lists' terms, up to a total degree if one is given."""
    terms = [joined(pick, names) for pick in product(*lists)]
    if total is not None:
        terms = [t for t in terms if t.weight <= total + 0.5]
    return tuple(sorted(terms, key=lambda t: -t.weight))


def quasi_list(degree: int, period: int) -> tuple[Term, ...]:
    """Give terms of one size that span the quasi-polynomials of a degree and a period."""
    if period == 1:
        return tuple(monomial(k) for k in range(degree + 1))
    powers = [monomial(k) for k in range(degree + 2)]
    floors = [
        times_power(_shifted_floor(period, shift), k) if k else _shifted_floor(period, shift)
        for k in range(degree + 1)
        for shift in range(period - 1)
    ]
    return (*powers, *floors)


@lru_cache(maxsize=64)
def _shifted_floor(period: int, shift: int) -> Term:
    if not shift:
        return floor_term(period)
    return Term(f"floor(({{n}} + {shift})/{period})", lambda n: (n + shift) // period)


@lru_cache(maxsize=32)
def point_forms(names: tuple[str, ...], most: int) -> tuple[PointForm, ...]:
    """Give the exact forms in several sizes with at most so many coefficients.

    Parameters
    ----------
    names : tuple of str
        The size names.
    most : int
        Most coefficients.

    Returns
    -------
    tuple of PointForm
        Fewest coefficients first.
    """
    found = [form for form in _all_forms(names) if len(form) <= most]
    return tuple(sorted(found, key=len))


def _all_forms(names: tuple[str, ...]) -> Iterator[PointForm]:
    count = len(names)
    for total in range(5):
        yield tensor((quasi_list(total, 1),) * count, names, total)
    for degrees in product(range(4), repeat=count):
        yield tensor(tuple(quasi_list(d, 1) for d in degrees), names)
    for term in _extremes(names):
        for total in (0, 1, 2):
            yield (term, *tensor((quasi_list(total, 1),) * count, names, total))
    one, n = monomial(0), monomial(1)
    rich = [(one, n), *_rich_lists()]
    for lists in product(rich, repeat=count):
        if any(chosen is not rich[0] for chosen in lists):
            yield tensor(lists, names)


def _rich_lists() -> Iterator[tuple[Term, ...]]:
    one, n = monomial(0), monomial(1)
    for rounding in ("floor", "ceiling"):
        log = log_term(rounding, 2)
        yield (one, log)
        yield (one, n, log)
        yield (one, n, times_power(log, 1), power_term(rounding, 2, 2))
    for period in (2, 3, 4):
        yield (one, n, floor_term(period))
    yield (one, n, floor_term(2), times_power(floor_term(2), 1), monomial(2))


def _extremes(names: tuple[str, ...]) -> Iterator[PointTerm]:
    for i, j in combinations(range(len(names)), 2):
        for word, pick in (("Min", min), ("Max", max)):
            yield PointTerm(f"{word}({names[i]}, {names[j]})", _extreme(i, j, pick), 0, 1.0)


def _extreme(i: int, j: int, pick: Callable[..., int]) -> Callable[[Point], int]:
    return lambda point: pick(point[i], point[j])
