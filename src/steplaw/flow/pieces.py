"""Counts as sums of polynomials, each under conditions, and their exact sums over a name."""

from __future__ import annotations

from collections.abc import Iterable, Mapping
from dataclasses import dataclass
from math import lcm

from steplaw.flow.names import LARGEST_PERIOD, Beyond, Names
from steplaw.flow.poly import CONST_ONE, ZERO, Poly, summed, var

Conditions = frozenset[Poly]
ALWAYS: Conditions = frozenset()
MOST_PIECES = 400


@dataclass(frozen=True, slots=True)
class Piece:
    """A polynomial that counts where all its conditions are >= 0."""

    when: Conditions
    poly: Poly


@dataclass(frozen=True, slots=True)
class Pieces:
    """A sum of pieces."""

    parts: tuple[Piece, ...] = ()

    def __add__(self, other: Pieces) -> Pieces:
        merged: dict[Conditions, Poly] = {}
        for part in (*self.parts, *other.parts):
            merged[part.when] = merged.get(part.when, ZERO) + part.poly
        return Pieces(tuple(Piece(w, p) for w, p in merged.items() if p))

    def __neg__(self) -> Pieces:
        return Pieces(tuple(Piece(x.when, -x.poly) for x in self.parts))

    def __sub__(self, other: Pieces) -> Pieces:
        return self + -other

    def __bool__(self) -> bool:
        return bool(self.parts)

    @property
    def names(self) -> frozenset[str]:
        """The names in it, those of conditions included."""
        return frozenset().union(
            *(x.poly.names.union(*(c.names for c in x.when)) for x in self.parts)
        )

    def polys(self) -> Iterable[Poly]:
        """Give all its polynomials and conditions."""
        for x in self.parts:
            yield x.poly
            yield from x.when


NOTHING = Pieces()


def constant(poly: Poly) -> Pieces:
    """Give a polynomial without conditions."""
    return Pieces((Piece(ALWAYS, poly),)) if poly else NOTHING


ONCE = constant(CONST_ONE)


def times(a: Pieces, b: Pieces) -> Pieces:
    """Multiply."""
    out = NOTHING
    for x in a.parts:
        out = out + Pieces(tuple(Piece(x.when | y.when, x.poly * y.poly) for y in b.parts))
    return out


def restricted(names: Names, pieces: Pieces, conditions: Iterable[Poly]) -> Pieces:
    """Keep what counts where further conditions hold."""
    added = frozenset(c.tightened() for c in conditions if not _holds_always(c))
    if any(c.constant is not None for c in added):
        return NOTHING
    return simplified(names, Pieces(tuple(Piece(x.when | added, x.poly) for x in pieces.parts)))


def _holds_always(c: Poly) -> bool:
    fixed = c.constant
    return fixed is not None and fixed >= 0


def put(names: Names, pieces: Pieces, values: Mapping[str, Poly]) -> Pieces:
    """Substitute polynomials for names."""
    out = NOTHING
    for x in pieces.parts:
        when = [names.put(c, values).tightened() for c in x.when]
        if any(c.constant is not None and c.constant < 0 for c in when):
            continue
        kept = frozenset(c for c in when if c.constant is None)
        out = out + Pieces((Piece(kept, names.put(x.poly, values)),))
    return out


def simplified(names: Names, pieces: Pieces) -> Pieces:
    """Leave out what never counts and conditions that follow from the others."""
    out = NOTHING
    for x in pieces.parts:
        if names.impossible(list(x.when)):
            continue
        out = out + Pieces((Piece(_needed(names, x.when), x.poly),))
    return _joined(names, out)


def _needed(names: Names, when: Conditions) -> Conditions:
    kept = sorted(when, key=lambda c: (-len(c.whole), c.text()))
    for c in list(kept):
        others = [k for k in kept if k is not c]
        if names.implies(others, c):
            kept = others
    return frozenset(kept)


def _joined(names: Names, pieces: Pieces) -> Pieces:
    """Join pairs of pieces that differ in one condition alone, which one has and one denies."""
    parts = list(pieces.parts)
    for i, x in enumerate(parts):
        for j in range(i + 1, len(parts)):
            y = parts[j]
            if x.poly != y.poly:
                continue
            left, right = x.when - y.when, y.when - x.when
            if len(left) == 1 and len(right) == 1 and next(iter(left)) + next(iter(right)) == -1:
                rest = [p for k, p in enumerate(parts) if k not in (i, j)]
                merged = Piece(x.when & y.when, x.poly)
                return _joined(names, Pieces((*rest, merged)))
    return pieces


def sum_over(names: Names, pieces: Pieces, name: str) -> Pieces:
    """Add up over all whole values of a name that the conditions allow.

    Parameters
    ----------
    names : Names
        What is known of the names.
    pieces : Pieces
        What is added up.
    name : str
        The running name.

    Returns
    -------
    Pieces
        The exact sum, in the other names.

    Raises
    ------
    Beyond
        If there is no bound, or no formula that this derivation knows.
    """
    out = NOTHING
    for x in pieces.parts:
        out = out + _sum_piece(names, x, name)
        if len(out.parts) > MOST_PIECES:
            raise Beyond("too many cases to tell apart")
    return simplified(names, out)


def _sum_piece(names: Names, piece: Piece, name: str) -> Pieces:
    derived = names.derived([piece.poly, *piece.when], name)
    for d in derived:
        if d.kind in ("least", "greatest"):
            return _by_extreme(names, piece, name, d.name)
    if derived:
        period = lcm(*(names.period(d, name) for d in derived))
        return _by_rest(names, piece, name, period)
    lows, highs, others = _bounds(names, piece.when, name)
    if not lows or not highs:
        raise Beyond("nothing bounds the passes")
    out = NOTHING
    for low, low_is in _choices(lows, 1):
        for high, high_is in _choices(highs, -1):
            when = others | {c.tightened() for c in (*low_is, *high_is, high - low + 1)}
            if any(c.constant is not None and c.constant < 0 for c in when):
                continue
            kept = frozenset(c for c in when if c.constant is None)
            if names.impossible(list(kept)):
                continue
            out = out + Pieces((Piece(kept, summed(piece.poly, name, low, high)),))
    return out


def _bounds(
    names: Names, when: Conditions, name: str
) -> tuple[list[Poly], list[Poly], frozenset[Poly]]:
    """Split conditions into lower bounds, upper bounds and those without the name."""
    lows, highs, others = [], [], set()
    for c in _needed(names, when):
        if name not in c.names:
            others.add(c)
            continue
        if not c.linear_in(name):
            raise Beyond("a bound that is no linear function of the passes")
        a = c.coefficient(name)
        rest = c.put({name: ZERO})
        bound = names.floor(rest, abs(int(a)))
        if a > 0:
            lows.append(-bound)
        else:
            highs.append(bound)
    if names.nonnegative(name):
        lows = [low for low in lows if not names.implies(others, -low)] or [ZERO]
        lows += [] if any(names.implies(others, low) for low in lows) else [ZERO]
    return lows, highs, frozenset(others)


def _choices(bounds: list[Poly], sign: int) -> Iterable[tuple[Poly, list[Poly]]]:
    """Give each bound with the conditions under which it is the tightest, ties to the first."""
    for k, bound in enumerate(bounds):
        yield (
            bound,
            [
                (bound - other) * sign - (1 if j < k else 0)
                for j, other in enumerate(bounds)
                if j != k
            ],
        )


def _by_extreme(names: Names, piece: Piece, name: str, extreme: str) -> Pieces:
    known = names.known[extreme]
    sign = 1 if known.kind == "least" else -1
    out = NOTHING
    for part, conditions in _choices(list(known.parts), -sign):
        chosen = put(names, Pieces((piece,)), {extreme: part})
        kept = restricted(names, chosen, conditions)
        out = out + sum_over(names, kept, name)
    return out


def _by_rest(names: Names, piece: Piece, name: str, period: int) -> Pieces:
    if period > LARGEST_PERIOD:
        raise Beyond(f"a period of {period}")
    out = NOTHING
    for rest in range(period):
        inner = names.add("whole", "", scope=names.known[name].scope)
        (key,) = inner.names
        at = put(names, Pieces((piece,)), {name: inner * period + rest})
        if names.nonnegative(name):
            at = restricted(names, at, [inner * period + rest])
        out = out + sum_over(names, simplified(names, at), key)
    return out


def evaluate(names: Names, pieces: Pieces, sizes: Mapping[str, int]) -> object:
    """Work a count out at sizes."""
    return sum(
        names.value_of(x.poly, sizes)
        for x in pieces.parts
        if all(names.value_of(c, sizes) >= 0 for c in x.when)
    )


def free_of(names: Names, pieces: Pieces, passes: Iterable[str]) -> bool:
    """Whether a count does not depend on the passes through some loops."""
    wanted = set(passes)
    return not any(names.known[n].scope & wanted for n in pieces.names)


def pass_number(names: Names, text: str, outer: frozenset[str]) -> str:
    """Add the number of the pass through a loop; its scope holds the loops around it too."""
    poly = names.add("pass", text, "t", outer)
    (key,) = poly.names
    known = names.known[key]
    names.known[key] = type(known)(key, "pass", text, scope=outer | {key})
    return key


__all__ = [
    "ALWAYS",
    "NOTHING",
    "ONCE",
    "Piece",
    "Pieces",
    "constant",
    "evaluate",
    "free_of",
    "pass_number",
    "put",
    "restricted",
    "simplified",
    "sum_over",
    "times",
    "var",
]
