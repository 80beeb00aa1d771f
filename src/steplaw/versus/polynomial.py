"""Every sign change of a polynomial or quasi-polynomial over the whole sizes, proved."""

from __future__ import annotations

from fractions import Fraction
from math import lcm
from typing import TYPE_CHECKING, Any

from steplaw.versus.spans import Less, Span, joined, side

if TYPE_CHECKING:
    import sympy

LONGEST_PERIOD = 360
WRITTEN_OUT = 1000
"""Sizes of a stretch of turns that are told one by one."""


def polynomial_spans(difference: sympy.Expr, name: str, first: int) -> list[Span] | None:
    """Say over which sizes a difference is below, at and above zero.

    Parameters
    ----------
    difference : sympy.Expr
        The first figure less the second, in one integer symbol.
    name : str
        The symbol's name.
    first : int
        The smallest size.

    Returns
    -------
    list of Span or None
        All sizes from the first on, without end; None where the difference is no
        quasi-polynomial with rational coefficients.

    Notes
    -----
    The real roots are isolated by exact rational arithmetic (Collins & Akritas, Polynomial real
    root isolation using Descartes' rule of signs, 1976; sympy's own way is by continued
    fractions). Every whole size in an isolating interval is worked out; between them the sign
    cannot change. A quasi-polynomial is one polynomial for each residue.
    """
    import sympy

    size = sympy.Symbol(name, integer=True, nonnegative=True)
    period = _period(difference)
    if period is None or period > LONGEST_PERIOD:
        return None
    index = sympy.Symbol("k", integer=True, nonnegative=True)
    parts = []
    for residue in range(period):
        part = _whole_parts(difference.subs(size, period * index + residue))
        if part.has(sympy.floor, sympy.ceiling, sympy.Mod) or not part.is_polynomial(index):
            return None
        polynomial = sympy.Poly(part, index)
        if not all(c.is_Rational for c in polynomial.coeffs()):
            return None
        parts.append(polynomial)
    return _spans(parts, first)


def _period(difference: sympy.Expr) -> int | None:
    """Give a period of the coefficients; None where there is surely none."""
    import sympy

    period = 1
    for node in sympy.preorder_traversal(difference):
        if isinstance(node, sympy.floor | sympy.ceiling):
            terms = sympy.expand(node.args[0]).as_coefficients_dict().values()
            period = lcm(period, *(int(c.q) for c in terms if c.is_Rational))
        elif isinstance(node, sympy.Mod):
            if not node.args[1].is_Integer:
                return None
            period = lcm(period, int(node.args[1]))
        elif isinstance(node, sympy.Pow) and node.base == -1:
            period = lcm(period, 2)
    return period


def _whole_parts(part: Any) -> Any:
    import sympy

    for rounding in (sympy.floor, sympy.ceiling):
        part = part.replace(rounding, lambda arg, of=rounding: of(sympy.expand(arg)))
    return sympy.expand(sympy.expand_func(part))


def _spans(parts: list[sympy.Poly], first: int) -> list[Span]:
    period = len(parts)
    points = sorted(
        {n for r, part in enumerate(parts) for n in _near_roots(part, period, r, first)}
    )
    out: list[Span] = []
    start = first
    for point in [*points, None]:
        last = None if point is None else point - 1
        out += _between(parts, start, last)
        if point is not None:
            out.append(Span(point, point, _at(parts, point)))
            start = point + 1
    return joined(out)


def _near_roots(part: sympy.Poly, period: int, residue: int, first: int) -> list[int]:
    """Give the sizes of a residue that lie in or next to an isolating interval of a root."""
    import sympy

    if part.is_zero or part.degree() < 1:
        return []
    near: set[int] = set()
    for (low, high), _ in part.intervals(eps=sympy.Rational(1, 2)):
        near |= set(range(int(sympy.floor(low)), int(sympy.ceiling(high)) + 1))
    sizes = (period * k + residue for k in near)
    return [n for n in sizes if n >= first]


def _at(parts: list[sympy.Poly], size: int) -> Less:
    index, residue = divmod(size, len(parts))
    found = parts[residue].eval(index)
    return side(Fraction(int(found.p), int(found.q)))


def _between(parts: list[sympy.Poly], first: int, last: int | None) -> list[Span]:
    """Give the spans of sizes among which no residue changes its sign."""
    period = len(parts)
    if last is not None and last < first:
        return []
    if last is not None and last - first < period:
        return [Span(n, n, _at(parts, n)) for n in range(first, last + 1)]
    sides = {_at(parts, n) for n in range(first, first + period)}
    if len(sides) == 1:
        return [Span(first, last, sides.pop())]
    if last is not None and last - first < WRITTEN_OUT:
        return [Span(n, n, _at(parts, n)) for n in range(first, last + 1)]
    return [Span(first, last, "turns")]
