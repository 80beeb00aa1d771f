"""Where one exact law overtakes another: all sizes, as far as it can be settled."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass
from typing import Any

from steplaw.forecast.domain import Domain
from steplaw.versus.bracket import Bracketing
from steplaw.versus.polynomial import polynomial_spans
from steplaw.versus.spans import Span, joined


@dataclass(frozen=True, slots=True)
class Settled:
    """What two formulas settle.

    Parameters
    ----------
    spans : list of Span
        Which one is less, from the first size that both laws speak of.
    method : str
        How it was settled.
    """

    spans: list[Span]
    method: str

    @property
    def last(self) -> int | None:
        """Give the last size settled; None where it goes on for ever."""
        return self.spans[-1].last if self.spans else None


ROOTS = "real roots isolated by exact arithmetic"
ENCLOSED = "stretches of sizes enclosed by interval arithmetic"


def settle(
    a: str, b: str, name: str, domain: Domain, held: Mapping[str, int] | None = None
) -> Settled:
    """Say over which sizes each of two formulas is less.

    Parameters
    ----------
    a, b : str
        The formulas.
    name : str
        The size that is searched.
    domain : Domain
        The sizes that both laws speak of: every size from its first on, or even or odd ones.
    held : mapping, optional
        The other sizes.

    Returns
    -------
    Settled
        With the sizes themselves.
    """
    import sympy

    size = sympy.Symbol(name, integer=True, nonnegative=True)
    one, other = (_at_held(f, name, held or {}) for f in (a, b))
    start, stride = domain.size(0), 1 if domain.kind == "every" else 2
    if stride > 1:
        one, other = (f.subs(size, start + stride * size) for f in (one, other))
    difference = sympy.expand(sympy.expand_func(one - other))
    first = 0 if stride > 1 else start
    found, method = polynomial_spans(difference, name, first), ROOTS
    if found is None:
        found = Bracketing(str(one), str(other), str(difference), name).spans(first)
        method = ENCLOSED
    if stride > 1:
        found = [_mapped(span, start, stride) for span in found]
    return Settled(joined(found), method)


def _at_held(formula: str, name: str, held: Mapping[str, int]) -> Any:
    import sympy

    symbols = {k: sympy.Symbol(k, integer=True, nonnegative=True) for k in (name, *held)}
    expression = sympy.sympify(formula, locals=symbols)
    return expression.subs({symbols[k]: n for k, n in held.items()})


def _mapped(span: Span, start: int, stride: int) -> Span:
    last = None if span.last is None else start + stride * span.last
    return Span(start + stride * span.first, last, span.less)
