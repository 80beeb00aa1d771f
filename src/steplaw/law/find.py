"""From observations to a law: proof, exact families, fit, or an open question."""

from __future__ import annotations

from collections.abc import Iterator, Sequence
from dataclasses import replace
from fractions import Fraction

from steplaw.law.choose import Found, search
from steplaw.law.families import forms_for
from steplaw.law.fitted import fit
from steplaw.law.growth import Vector
from steplaw.law.leading import leading_term
from steplaw.law.model import Law, Observation
from steplaw.law.proof import prove
from steplaw.law.recurrence import recurrence_forms, recurrence_text
from steplaw.law.shape import Shape

#: A recurrence is read off the values; naming its form costs about as much as a form in the list.
RECURRENCE_BITS = 8.0


def find_law(
    observations: Sequence[Observation],
    names: Sequence[str] = ("n",),
    *,
    exhaustive: bool = False,
    shape: Shape | None = None,
    orders: Sequence[Vector] = (),
) -> Law:
    """Find the law that a figure follows.

    Parameters
    ----------
    observations : sequence of Observation
        The figure at different sizes, in any order.
    names : sequence of str
        The size names.
    exhaustive : bool
        Search wider mixtures of exact families; slower, for the figure that a study is about.
    shape : Shape, optional
        The form that the structure of the code proves. Without it nothing is graded ``proved``.

    orders : sequence of Vector
        Orders of growth (see `order`) that exact counts of the same subject have; they settle ties
        between orders that fit drawn values equally well.

    Returns
    -------
    Law
        The first of these that stands: ``proved``, ``exact``, ``fitted``, ``open``.

    Notes
    -----
    Exact families are tried where every value is a count of its own or the mean over all inputs
    of its size. A formula is found on some sizes and tested on the others, the largest ones
    among them; it must be confirmed by more evidence than it takes to write it down.
    """
    merged = merge(observations)
    if not merged:
        return Law(None, None, "open", note="nothing was observed", names=tuple(names))
    if len(names) > 1:
        from steplaw.law.several import find_several

        return find_several(merged, tuple(names), shape)
    return _find_single(merged, names[0], exhaustive, shape, orders)


def merge(observations: Sequence[Observation]) -> list[Observation]:
    """Give one observation for each size, in order; those of the same size are pooled."""
    by_size: dict[tuple[int, ...], Observation] = {}
    for o in observations:
        known = by_size.get(o.at)
        by_size[o.at] = o if known is None else _pool(known, o)
    return [by_size[at] for at in sorted(by_size)]


def _pool(a: Observation, b: Observation) -> Observation:
    if a.whole or b.whole:
        return a if a.whole else b
    draws = a.draws + b.draws
    mean = (a.value * a.draws + b.value * b.draws) / draws
    square = sum(
        ((o.variance + (o.value - mean) ** 2) * o.draws for o in (a, b)), start=Fraction(0)
    )
    return Observation(
        a.at, Fraction(mean), draws, square / draws, min(a.least, b.least), max(a.most, b.most)
    )


def is_exact(o: Observation) -> bool:
    """Say whether the value is a count or an exact mean, rather than a mean of some draws."""
    return o.whole or not o.variance


def _find_single(
    merged: Sequence[Observation],
    name: str,
    exhaustive: bool,
    shape: Shape | None,
    orders: Sequence[Vector],
) -> Law:
    sizes = tuple(o.at[0] for o in merged)
    values = [Fraction(o.value) for o in merged]
    if not all(is_exact(o) for o in merged):
        return fit(merged, name, orders)
    contradiction = ""
    if shape is not None:
        proved, contradiction = prove(sizes, values, name, shape)
        if proved is not None:
            return proved
    found = search(sizes, values, forms_for(sizes, values, exhaustive))
    if found is None:
        found = search(sizes, values, recurrence_forms(sizes, values), RECURRENCE_BITS)
    if found is not None:
        return _with_note(state(found, sizes, name), contradiction)
    law = _with_note(fit(merged, name), contradiction)
    rule = recurrence_text(sizes, values)
    return _with_note(law, f"at consecutive sizes {rule}" if rule else "")


def _with_note(law: Law, note: str) -> Law:
    if not note:
        return law
    return replace(law, note=f"{law.note}; {note}" if law.note else note)


def state(found: Found, sizes: Sequence[int], name: str) -> Law:
    """Give an exact formula as a law."""
    formula = found.form.formula(found.coefficients, name)
    seen = [sizes[k] for k in sorted(found.settled + found.checked)]
    return Law(
        formula,
        leading_term(formula, (name,)),
        "exact",
        holds_from=sizes[found.first],
        settled_by=tuple(sizes[k] for k in found.settled),
        checked_at=tuple(sizes[k] for k in found.checked),
        error=0.0,
        note="; ".join(_remarks(found, sizes, seen, name)),
        details={
            "family": found.form.family,
            "coefficients": len(found.coefficients),
            "checks": len(found.checked),
        },
        names=(name,),
    )


def _remarks(found: Found, sizes: Sequence[int], seen: Sequence[int], name: str) -> Iterator[str]:
    yield f"seen up to {name} = {seen[-1]}"
    if found.first and seen[0] > found.form.least:
        yield f"does not hold below {name} = {seen[0]}"
    if found.form.note:
        yield found.form.note
    elif len(seen) > 2 and all(n > 0 and n & (n - 1) == 0 for n in seen):
        yield "every size tried is a power of two"
    elif len(seen) > 2 and all(n % 2 == seen[0] % 2 for n in seen) and seen[-1] > 2:
        yield f"every size tried is {'odd' if seen[0] % 2 else 'even'}"
