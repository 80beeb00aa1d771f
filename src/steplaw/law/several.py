"""Exact laws in several sizes, on a grid or at any points."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass, replace
from fractions import Fraction
from functools import lru_cache
from math import log2

from steplaw.law.choose import LEAST_CHECKS, MARGIN
from steplaw.law.exactmath import PRIME, Relations, bits, bits_together, relations, residue, solve
from steplaw.law.fitseveral import fit_several
from steplaw.law.leading import leading_term
from steplaw.law.model import Grade, Law, Observation
from steplaw.law.severalforms import Point, PointForm, point_forms, quasi_list, tensor
from steplaw.law.shape import Shape
from steplaw.law.terms import write_sum

LEAST_FURTHER = 2


@dataclass(frozen=True, slots=True)
class PointsFound:
    """An exact formula in several sizes with the points that found and tested it."""

    form: PointForm
    coefficients: tuple[Fraction, ...]
    settled: tuple[Point, ...]
    checked: tuple[Point, ...]
    length: float


def find_several(
    observations: Sequence[Observation], names: tuple[str, ...], shape: Shape | None
) -> Law:
    """Find a law in several sizes.

    Parameters
    ----------
    observations : sequence of Observation
        One for each point.
    names : tuple of str
        The size names.
    shape : Shape, optional
        The form that the structure of the code proves.

    Returns
    -------
    Law
        With a list for `holds_from` and points for `settled_by` and `checked_at`.
    """
    ordered = sorted(observations, key=lambda o: (sum(o.at), max(o.at), o.at))
    points = tuple(o.at for o in ordered)
    values = [Fraction(o.value) for o in ordered]
    if not all(o.whole or not o.variance for o in ordered):
        return fit_several(ordered, names)
    if shape is not None:
        proved = _prove(points, values, names, shape)
        if proved is not None:
            return proved
    found = _search_regions(points, values, names)
    if found is None:
        return fit_several(ordered, names)
    return _state(found, names, "exact", _seen(found, names))


def _seen(found: PointsFound, names: tuple[str, ...]) -> str:
    seen = (*found.settled, *found.checked)
    tops = [max(p[k] for p in seen) for k in range(len(names))]
    note = "seen up to " + ", ".join(f"{n} = {t}" for n, t in zip(names, tops, strict=True))
    if all(n > 0 and n & (n - 1) == 0 for p in seen for n in p):
        note += "; every size tried is a power of two"
    return note


def _state(found: PointsFound, names: tuple[str, ...], grade: Grade, note: str) -> Law:
    parts = [(c, t.text, "") for c, t in zip(found.coefficients, found.form, strict=True)]
    formula = write_sum(parts)
    seen = (*found.settled, *found.checked)
    return Law(
        formula,
        leading_term(formula, names),
        grade,
        holds_from=[min(p[k] for p in seen) for k in range(len(names))],
        settled_by=found.settled,
        checked_at=found.checked,
        error=0.0,
        note=note,
        details={"coefficients": len(found.form), "checks": len(found.checked)},
        names=names,
    )


def _prove(
    points: tuple[Point, ...], values: Sequence[Fraction], names: tuple[str, ...], shape: Shape
) -> Law | None:
    count = len(names)
    first = shape.holds_from
    start = (first,) * count if isinstance(first, int) else first
    kept = [k for k, p in enumerate(points) if all(a >= b for a, b in zip(p, start, strict=True))]
    if isinstance(shape.degree, int):
        lists, total = (quasi_list(shape.degree, shape.period),) * count, shape.degree
        total += 0 if shape.period == 1 else count
    else:
        lists, total = tuple(quasi_list(d, shape.period) for d in shape.degree), None
    form = tensor(lists, names, total)
    inside = tuple(points[k] for k in kept)
    found = _solve(inside, [values[k] for k in kept], form, 0.0)
    if found is None or len(found.checked) < LEAST_FURTHER:
        return None
    law = _state(found, names, "proved", shape.reason)
    return replace(law, holds_from=list(start))


def _search_regions(
    points: tuple[Point, ...], values: Sequence[Fraction], names: tuple[str, ...]
) -> PointsFound | None:
    """Search all points, then those away from the smallest sizes."""
    for least in (0, 1, 2, 3):
        kept = [k for k, p in enumerate(points) if min(p) >= least]
        outside = len(points) - len(kept)
        if least and (not outside or outside > len(points) // 2):
            continue
        inside = tuple(points[k] for k in kept)
        held = [values[k] for k in kept]
        lost = sum(bits(values[k]) for k in range(len(points)) if k not in set(kept))
        found = _search(inside, held, names)
        if found is not None and _gain(found, inside, held) - found.length >= lost:
            return found
    return None


def _gain(found: PointsFound, points: tuple[Point, ...], values: Sequence[Fraction]) -> float:
    tested = set(found.checked)
    return sum(bits(v) + 0.5 for p, v in zip(points, values, strict=True) if p in tested)


def _search(
    points: tuple[Point, ...], values: Sequence[Fraction], names: tuple[str, ...]
) -> PointsFound | None:
    residues = [residue(v) for v in values]
    best: PointsFound | None = None
    for rank, form in enumerate(point_forms(names, 2 * len(points) // 3)):
        if best is not None and len(form) > len(best.form) + 1:
            break
        if not _agrees(points, form, residues):
            continue
        found = _solve(points, values, form, log2(rank + 2))
        if found is None or not _enough(found, points, values):
            continue
        if best is None or found.length < best.length:
            best = found
    return best


def _enough(found: PointsFound, points: tuple[Point, ...], values: Sequence[Fraction]) -> bool:
    free = len(found.form)
    if len(found.checked) < max(LEAST_CHECKS, (free + 1) // 2):
        return False
    return free == 1 or _gain(found, points, values) - found.length >= MARGIN


@lru_cache(maxsize=1024)
def _relations(points: tuple[Point, ...], form: PointForm) -> Relations | None:
    if any(min(p) < t.least for p in points for t in form):
        return None
    if len(points) < len(form) + LEAST_CHECKS:
        return None
    found = relations([[residue(t.at(p)) for t in form] for p in points])
    if len(found.pivots) < len(form):
        return None
    used = {k for _, rows, _ in found.dependent for k in rows}
    return found if all(k in used for k in found.pivots) else None


def _agrees(points: tuple[Point, ...], form: PointForm, residues: Sequence[int]) -> bool:
    found = _relations(points, form)
    return found is not None and all(
        not sum(w * residues[k] for k, w in zip(used, weights, strict=True)) % PRIME
        for _, used, weights in found.dependent
    )


def _solve(
    points: tuple[Point, ...], values: Sequence[Fraction], form: PointForm, choice: float
) -> PointsFound | None:
    if not points:
        return None
    rows = [[t.at(p) for t in form] for p in points]
    solved = solve(rows, values)
    if solved is None:
        return None
    coefficients, chosen = solved
    for row, value in zip(rows, values, strict=True):
        if sum((c * x for c, x in zip(coefficients, row, strict=True) if c), Fraction(0)) != value:
            return None
    picked = set(chosen)
    return PointsFound(
        form,
        tuple(coefficients),
        tuple(p for k, p in enumerate(points) if k in picked),
        tuple(p for k, p in enumerate(points) if k not in picked),
        bits_together(coefficients) + choice,
    )
