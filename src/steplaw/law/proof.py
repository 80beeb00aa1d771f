"""Proof by counting: with the form known, enough exact counts settle every coefficient."""

from __future__ import annotations

from collections.abc import Sequence
from fractions import Fraction

from steplaw.law.exactmath import solve
from steplaw.law.leading import leading_term
from steplaw.law.model import Law
from steplaw.law.polynomial import polynomial
from steplaw.law.quasi import quasi
from steplaw.law.shape import Shape
from steplaw.law.terms import Form

LEAST_FURTHER = 2


def prove(
    sizes: Sequence[int], values: Sequence[Fraction], name: str, shape: Shape
) -> tuple[Law | None, str]:
    """Settle the coefficients of a proved form by exact counts.

    Parameters
    ----------
    sizes : sequence of int
        In increasing order.
    values : sequence of Fraction
        Exact counts at these sizes.
    name : str
        The size name.
    shape : Shape
        The form that the structure of the code fixes.

    Returns
    -------
    (Law or None, str)
        The proved law; or None and a note that says what stands in the way.
    """
    first = shape.holds_from if isinstance(shape.holds_from, int) else shape.holds_from[0]
    degree = shape.degree if isinstance(shape.degree, int) else shape.degree[0]
    kept = [k for k, n in enumerate(sizes) if n >= first]
    form = polynomial(degree) if shape.period == 1 else quasi(degree, shape.period, degree)
    rows = [[term.at(sizes[k]) for term in form.terms] for k in kept]
    solved = solve(rows, [values[k] for k in kept]) if rows else None
    if solved is None or len(kept) < len(form.terms) + LEAST_FURTHER:
        return None, _wanting(shape, sizes, first, name)
    coefficients, chosen = solved
    for row, k in zip(rows, kept, strict=True):
        if sum((c * x for c, x in zip(coefficients, row, strict=True)), Fraction(0)) != values[k]:
            return None, f"the counts contradict the derived form at {name} = {sizes[k]}"
    settled = {kept[k] for k in chosen}
    form, coefficients = _reduced(form, coefficients, shape.period)
    start = _extended(form, coefficients, sizes, values, kept[0])
    formula = form.formula(coefficients, name)
    tests = tuple(n for k, n in enumerate(sizes) if k >= start and k not in settled)
    law = Law(
        formula,
        leading_term(formula, (name,)),
        "proved",
        holds_from=first if start == kept[0] else sizes[start],
        settled_by=tuple(sizes[k] for k in sorted(settled)),
        checked_at=tests,
        error=0.0,
        note=shape.reason,
        details={"family": form.family, "degree": degree, "period": shape.period},
        names=(name,),
    )
    return law, ""


def _wanting(shape: Shape, sizes: Sequence[int], first: int, name: str) -> str:
    missing = [n for n in shape.sizes(LEAST_FURTHER) if n not in set(sizes)]
    listed = ", ".join(map(str, missing[:8])) + (", ..." if len(missing) > 8 else "")
    return f"a proof needs more counts, for example at {name} = {listed}"


def _reduced(
    form: Form, coefficients: Sequence[Fraction], period: int
) -> tuple[Form, list[Fraction]]:
    """Write the same function in the smallest form that holds it."""
    kept = list(coefficients)
    terms = list(form.terms)
    while len(terms) > 1 and not kept[0] and period == 1:
        del kept[0], terms[0]
    if period == 1:
        return polynomial(len(terms) - 1), kept
    return form, kept


def _extended(
    form: Form,
    coefficients: Sequence[Fraction],
    sizes: Sequence[int],
    values: Sequence[Fraction],
    start: int,
) -> int:
    """Give the first position from which the counts agree, below the proved start too."""
    while start > 0:
        n = sizes[start - 1]
        total = sum(
            (c * t.at(n) for c, t in zip(coefficients, form.terms, strict=True)), Fraction(0)
        )
        if total != values[start - 1] or sizes[start] != n + 1:
            break
        start -= 1
    return start
