"""Linear algebra over the rationals, with a prime field as a fast first sieve."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from fractions import Fraction
from math import lcm, log2

PRIME = (1 << 61) - 1


def residue(number: Fraction | int) -> int:
    """Give the image of a rational number in the field of `PRIME` elements."""
    if isinstance(number, int):
        return number % PRIME
    if number.denominator == 1:
        return number.numerator % PRIME
    return number.numerator % PRIME * pow(number.denominator, -1, PRIME) % PRIME


def bits(number: Fraction | int) -> float:
    """Give the length in bits of writing a rational number down."""
    if not number:
        return 0.5
    return 1 + _log2(1 + abs(number.numerator)) + _log2(number.denominator)


def bits_together(numbers: Sequence[Fraction]) -> float:
    """Give the length in bits of writing rational numbers down over a common denominator.

    A zero costs a whole bit: it is a term that the form need not have had.
    """
    common = lcm(*(x.denominator for x in numbers))
    return _log2(common) + sum(max(1.0, bits(int(x * common))) for x in numbers)


def _log2(whole: int) -> float:
    extra = max(0, whole.bit_length() - 900)
    return extra + log2(whole >> extra)


@dataclass(frozen=True, slots=True)
class Relations:
    """The linear relations between the rows of a matrix, read from the last row upwards.

    Parameters
    ----------
    pivots : tuple of int
        Rows that depend on no later row.
    dependent : tuple of (int, tuple of int, tuple of int)
        For every other row, last first: its index, and the rows and weights (modulo `PRIME`)
        of a combination that gives zero.
    """

    pivots: tuple[int, ...]
    dependent: tuple[tuple[int, tuple[int, ...], tuple[int, ...]], ...]


def relations(rows: Sequence[Sequence[int]]) -> Relations:
    """Find every relation of the rows modulo `PRIME`, from the last row to the first.

    Parameters
    ----------
    rows : sequence of sequence of int
        The matrix, reduced modulo `PRIME`.

    Returns
    -------
    Relations
        One relation for every row that is no pivot.
    """
    width = len(rows[0]) if rows else 0
    basis: list[tuple[int, list[int], dict[int, int]]] = []
    pivots: list[int] = []
    dependent = []
    for index in range(len(rows) - 1, -1, -1):
        row, mix = _reduce(list(rows[index]), {index: 1}, basis)
        lead = next((k for k in range(width) if row[k]), None)
        if lead is None:
            used = sorted(k for k, weight in mix.items() if weight)
            dependent.append((index, tuple(used), tuple(mix[k] for k in used)))
            continue
        inverse = pow(row[lead], -1, PRIME)
        scaled = [x * inverse % PRIME for x in row]
        basis.append((lead, scaled, {k: x * inverse % PRIME for k, x in mix.items()}))
        pivots.append(index)
    return Relations(tuple(pivots), tuple(dependent))


def _reduce(
    row: list[int], mix: dict[int, int], basis: list[tuple[int, list[int], dict[int, int]]]
) -> tuple[list[int], dict[int, int]]:
    for lead, other, othermix in basis:
        factor = row[lead]
        if factor:
            row = [(a - factor * b) % PRIME for a, b in zip(row, other, strict=True)]
            for k, x in othermix.items():
                mix[k] = (mix.get(k, 0) - factor * x) % PRIME
    return row, mix


def solve(
    rows: Sequence[Sequence[Fraction | int]], values: Sequence[Fraction | int]
) -> tuple[list[Fraction], list[int]] | None:
    """Solve a linear system with the first rows that settle it.

    Parameters
    ----------
    rows : sequence of sequence of Fraction or int
        As many columns as unknowns; more rows than columns are allowed.
    values : sequence of Fraction or int
        Right-hand sides.

    Returns
    -------
    (list of Fraction, list of int) or None
        The unknowns and the rows that settled them, or None where the rank is too small.
    """
    width = len(rows[0])
    reduced: list[tuple[int, list[Fraction]]] = []
    chosen: list[int] = []
    for index, (row, value) in enumerate(zip(rows, values, strict=True)):
        line = [Fraction(x) for x in row] + [Fraction(value)]
        for lead, other in reduced:
            if line[lead]:
                factor = line[lead]
                line = [a - factor * b for a, b in zip(line, other, strict=True)]
        found = next((k for k in range(width) if line[k]), None)
        if found is None:
            continue
        pivot = line[found]
        reduced.append((found, [x / pivot for x in line]))
        chosen.append(index)
        if len(chosen) == width:
            return _substitute(reduced, width), chosen
    return None


def _substitute(reduced: list[tuple[int, list[Fraction]]], width: int) -> list[Fraction]:
    answer = [Fraction(0)] * width
    for lead, line in reversed(reduced):
        answer[lead] = line[width] - sum(
            (line[k] * answer[k] for k in range(width) if k != lead and line[k]), Fraction(0)
        )
    return answer
