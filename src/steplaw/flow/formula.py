"""Counts written as formulas, and the form that they have from some size on."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass, field
from fractions import Fraction
from math import lcm

from steplaw.flow.names import LARGEST_PERIOD, Beyond, Names
from steplaw.flow.pieces import NOTHING, Piece, Pieces, evaluate, put, restricted, simplified
from steplaw.flow.poly import ONE, ZERO, Poly, total, var

#: Below so many sizes each value can stand in the formula by itself.
MOST_APART = 4
FAR = 100_000


@dataclass(frozen=True, slots=True)
class Formula:
    """A count as text.

    Parameters
    ----------
    text : str
        Read by sympy; holds at every size from `holds_from` on.
    main : str
        Without special cases at small sizes, for the leading term.
    holds_from : int
        Of a count in one size.
    below : dict of int to int
        Values at the sizes below.
    """

    text: str
    main: str
    holds_from: int = 0
    below: dict[int, int] = field(default_factory=dict)


@dataclass(frozen=True, slots=True)
class Tail:
    """What a count in one size is from some size on: a quasi-polynomial.

    Parameters
    ----------
    size : str
        The name of the size.
    by_rest : tuple of Poly
        A polynomial in the size for each remainder; one for a plain polynomial.
    start : int
        Size from which it holds.
    """

    size: str
    by_rest: tuple[Poly, ...]
    start: int

    @property
    def degree(self) -> int:
        """Largest power."""
        return max(p.degree for p in self.by_rest)

    @property
    def period(self) -> int:
        """Period of the coefficients."""
        return len(self.by_rest)

    def at(self, n: int) -> Fraction:
        """Work it out, also where it does not hold."""
        return self.by_rest[n % self.period].at({self.size: n})


def tail(names: Names, pieces: Pieces) -> Tail | None:
    """Give what a count in one size is from some size on, None where that is not seen.

    Parameters
    ----------
    names : Names
        What is known of the names.
    pieces : Pieces
        The count.
    """
    roots = names.roots(pieces.polys())
    sizes = [n for n in roots if names.known[n].kind == "size"]
    if len(roots) != 1 or len(sizes) != 1:
        return None
    size = sizes[0]
    try:
        flat = _without_extremes(names, pieces, size)
        derived = names.derived(flat.polys(), size)
        period = lcm(*(names.period(d, size) for d in derived), 1)
    except Beyond:
        return None
    if period > LARGEST_PERIOD:
        return None
    by_rest, start = [], 0
    for rest in range(period):
        found = _class(names, flat, size, period, rest)
        if found is None:
            return None
        by_rest.append(found[0])
        start = max(start, found[1])
    shortest = next(
        d
        for d in range(1, period + 1)
        if period % d == 0 and all(p == by_rest[k % d] for k, p in enumerate(by_rest))
    )
    out = Tail(size, tuple(by_rest[:shortest]), start)
    while start > 0 and out.at(start - 1) == evaluate(names, pieces, {size: start - 1}):
        start -= 1
    return Tail(size, out.by_rest, start)


def _without_extremes(names: Names, pieces: Pieces, size: str) -> Pieces:
    out = NOTHING
    for x in pieces.parts:
        extreme = next(
            (d for d in names.derived([x.poly, *x.when], size) if d.kind in ("least", "greatest")),
            None,
        )
        if extreme is None:
            out = out + Pieces((x,))
            continue
        sign = 1 if extreme.kind == "least" else -1
        for k, part in enumerate(extreme.parts):
            conditions = [
                (other - part) * sign - (1 if j < k else 0)
                for j, other in enumerate(extreme.parts)
                if j != k
            ]
            chosen = put(names, Pieces((x,)), {extreme.name: part})
            out = out + _without_extremes(names, restricted(names, chosen, conditions), size)
    return out


def _class(
    names: Names, pieces: Pieces, size: str, period: int, rest: int
) -> tuple[Poly, int] | None:
    """Give the polynomial for sizes of one remainder, and the size from which it holds."""
    inner = names.add("size", "")
    (key,) = inner.names
    at = put(names, pieces, {size: inner * period + rest})
    start, kept = 0, []
    for x in at.parts:
        lasting = True
        for c in x.when:
            if c.names - {key} or c.degree > 1:
                return None
            slope, free = c.coefficient(key), c.free
            lasting &= slope > 0
            change = -free / slope
            start = max(start, int(change) + 2)
        if lasting:
            if x.poly.names - {key}:
                return None
            kept.append(x.poly)
    back = (var(size) - rest) * Fraction(1, period)
    poly = total(kept).put({key: back})
    return poly, min(max(start, 0) * period + rest, FAR) if start else 0


def written(names: Names, pieces: Pieces) -> Formula:
    """Write a count as a formula.

    Parameters
    ----------
    names : Names
        What is known of the names.
    pieces : Pieces
        The count.

    Returns
    -------
    Formula
        Its text, which sympy reads.
    """
    pieces = simplified(names, pieces)
    plain = len(pieces.parts) < 2 and not any(x.when for x in pieces.parts)
    poly = pieces.parts[0].poly if pieces.parts else ZERO
    if plain and not any(names.known[n].parts for n in poly.names):
        text = names.written(poly)
        return Formula(text, text)
    found = tail(names, pieces)
    if found is not None and found.start < FAR:
        return _in_one_size(names, pieces, found)
    if plain:
        text = names.written(poly)
        return Formula(text, text)
    return _with_logarithms(names, pieces) or _in_cases(names, pieces)


def _with_logarithms(names: Names, pieces: Pieces) -> Formula | None:
    """Write a count in one size that holds logarithms of it, its conditions on the size alone."""
    roots = names.roots(pieces.polys())
    if len(roots) != 1 or any(
        c.names - roots or c.degree > 1 for x in pieces.parts for c in x.when
    ):
        return None
    (size,) = roots
    start, kept = 0, []
    for x in pieces.parts:
        for c in x.when:
            start = max(start, int(-c.free / c.coefficient(size)) + 2)
        if all(c.coefficient(size) > 0 for c in x.when):
            kept.append(x.poly)
    poly = total(kept)
    while start > 0 and names.value_of(poly, {size: start - 1}) == evaluate(
        names, pieces, {size: start - 1}
    ):
        start -= 1
    values = [_whole(evaluate(names, pieces, {size: n})) for n in range(start)]
    main = names.written(poly)
    if not values:
        return Formula(main, main)
    if len(set(values)) > MOST_APART:
        return Formula(main, main, start, dict(enumerate(values)))
    return Formula(f"Piecewise({_runs(values, names.shown(size))}, ({main}, True))", main)


def _in_one_size(names: Names, pieces: Pieces, found: Tail) -> Formula:
    name = names.shown(found.size)
    main = _main_text(names, found)
    values = [_whole(evaluate(names, pieces, {found.size: n})) for n in range(found.start)]
    if not values:
        return Formula(main, main)
    lasting = all(found.at(n) <= 0 for n in range(found.start))
    if not any(values) and lasting and found.period == 1:
        return Formula(f"Max(0, {main})", main)
    if found.period == 1 and all(v == found.at(found.start) for v in values):
        text = found.by_rest[0].text({found.size: f"Max({name}, {found.start})"})
        return Formula(text, main)
    if len(values) <= MOST_APART:
        cases = _runs(values, name)
        return Formula(f"Piecewise({cases}, ({main}, True))", main)
    return Formula(main, main, found.start, dict(enumerate(values)))


def _runs(values: Sequence[int], name: str) -> str:
    cases = []
    for n, value in enumerate(values):
        if n + 1 == len(values) or values[n + 1] != value:
            cases.append(f"({value}, {name} < {n + 1})")
    return ", ".join(cases)


def _whole(value: object) -> int:
    return int(value)  # type: ignore[call-overload, no-any-return]


def _main_text(names: Names, found: Tail) -> str:
    name = names.shown(found.size)
    if found.period == 1:
        return found.by_rest[0].text({found.size: name})
    from steplaw.law.quasi import quasi

    degree, period = found.degree, found.period
    tables = [
        [p.terms.get(_power(found.size, k), Fraction(0)) for k in range(degree + 1)]
        for p in found.by_rest
    ]
    varying = max(k for k in range(degree + 1) if len({t[k] for t in tables}) > 1)
    coefficients = [tables[0][k] for k in range(degree, -1, -1)]
    for k in range(varying, -1, -1):
        coefficients += [tables[r][k] - tables[0][k] for r in range(1, period)]
    return quasi(degree, period, varying).formula(coefficients, name)


def _power(name: str, exponent: int) -> tuple[tuple[str, int], ...]:
    return ((name, exponent),) if exponent else ONE


def _in_cases(names: Names, pieces: Pieces) -> Formula:
    always = total(x.poly for x in pieces.parts if not x.when)
    texts = [names.written(always)] if always else []
    mains = list(texts)
    for x in pieces.parts:
        if not x.when:
            continue
        text = _clipped(names, x)
        if text is None:
            when = ", ".join(f"{names.written(c)} >= 0" for c in sorted(x.when, key=Poly.text))
            closed = f"And({when})" if len(x.when) > 1 else when
            text = f"Piecewise(({names.written(x.poly)}, {closed}), (0, True))"
            mains.append(names.written(x.poly))
        else:
            mains.append(text)
        texts.append(text)
    return Formula(_sum(texts), _sum(mains))


def _sum(texts: Sequence[str]) -> str:
    out = texts[0] if texts else "0"
    for text in texts[1:]:
        out += f" - {text[1:]}" if text.startswith("-") else f" + {text}"
    return out


def _clipped(names: Names, piece: Piece) -> str | None:
    """Write a piece with one condition c >= 0 by Max(0, c) or Max(0, c + 1), if it allows."""
    if len(piece.when) != 1:
        return None
    (condition,) = piece.when
    for edge in (condition, condition + 1):
        for name in sorted(edge.names & piece.poly.names):
            c = edge.coefficient(name)
            if abs(c) != 1 or not edge.linear_in(name):
                continue
            stand_in = "the gap"
            rest = edge.put({name: ZERO})
            put_in = piece.poly.put({name: (var(stand_in) - rest) * c})
            if put_in.put({stand_in: ZERO}):
                continue
            shown = {n: names.shown(n) for n in put_in.names if n != stand_in}
            return put_in.text({**shown, stand_in: f"Max(0, {names.written(edge)})"})
    return None
