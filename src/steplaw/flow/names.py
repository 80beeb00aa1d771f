"""The whole numbers that a derivation speaks of, and what is known of each."""

from __future__ import annotations

from collections.abc import Callable, Iterable, Mapping, Sequence
from dataclasses import dataclass, field
from fractions import Fraction
from math import lcm
from typing import Literal

from steplaw.flow.inequalities import contradictory
from steplaw.flow.poly import Monomial, Poly, as_poly, var

Kind = Literal["size", "whole", "pass", "floor", "least", "greatest", "logarithm", "unknown"]
#: Larger periods are not worked out: the formula would fill pages.
LARGEST_PERIOD = 240


class Beyond(Exception):
    """A number of passes that the derivation has no formula for; the text says why."""


@dataclass(frozen=True, slots=True)
class Name:
    """A whole number.

    Parameters
    ----------
    name : str
        Unique in a derivation.
    kind : str
        A ``size`` (never negative) or ``whole`` number given from outside; the number of the
        ``pass`` through a loop, from 0; ``floor`` of a quotient; ``least`` or ``greatest`` of
        several; the floor of a ``logarithm``; an ``unknown`` count.
    text : str
        How people know it.
    parts : tuple of Poly
        What it is worked out from.
    divisor : int
        Of a floor; base of a logarithm.
    scope : frozenset of str
        Passes on which its value depends.
    """

    name: str
    kind: Kind
    text: str
    parts: tuple[Poly, ...] = ()
    divisor: int = 1
    scope: frozenset[str] = frozenset()


@dataclass
class Names:
    """All names of a derivation.

    Attributes
    ----------
    known : dict of str to Name
        By name.
    spelt : dict of str to str
        How formulas write names that mean something else to sympy.
    """

    known: dict[str, Name] = field(default_factory=dict)
    spelt: dict[str, str] = field(default_factory=dict)
    _derived: dict[tuple[object, ...], str] = field(default_factory=dict)
    _implied: dict[tuple[frozenset[Poly], Poly], bool] = field(default_factory=dict)
    _count: int = 0

    def add(
        self, kind: Kind, text: str, wanted: str = "", scope: frozenset[str] = frozenset()
    ) -> Poly:
        """Add a name that nothing is known of but its kind; give it as a polynomial."""
        name = wanted if wanted and wanted not in self.known else self._fresh(wanted or kind[0])
        self.known[name] = Name(name, kind, text, scope=scope)
        return var(name)

    def _fresh(self, stem: str) -> str:
        while True:
            self._count += 1
            name = f"{stem}_{self._count}"
            if name not in self.known:
                return name

    def scope(self, polys: Iterable[Poly]) -> frozenset[str]:
        """Give the passes that polynomials depend on."""
        return frozenset().union(*(self.known[n].scope for p in polys for n in p.names))

    def _derive(self, kind: Kind, parts: tuple[Poly, ...], divisor: int = 1) -> Poly:
        key = (kind, parts, divisor)
        name = self._derived.get(key)
        if name is None:
            name = self._derived[key] = self._fresh(kind[0])
            self.known[name] = Name(name, kind, "", parts, divisor, self.scope(parts))
        return var(name)

    def floor(self, top: Poly, divisor: int) -> Poly:
        """Give floor(top/divisor), whole multiples of the divisor taken out."""
        scale = top.denominator()
        top, divisor = top * scale, divisor * scale
        whole: dict[Monomial, int] = {}
        rest: dict[Monomial, int] = {}
        for m, c in top.whole.items():
            whole[m], rest[m] = divmod(c, divisor)
        left_over = Poly(rest)
        if left_over.constant is not None:
            return Poly(whole)
        return Poly(whole) + self._derive("floor", (left_over,), divisor)

    def least(self, parts: Sequence[Poly]) -> Poly:
        """Give the least of several numbers."""
        return self._extreme("least", parts)

    def greatest(self, parts: Sequence[Poly]) -> Poly:
        """Give the greatest of several numbers."""
        return self._extreme("greatest", parts)

    def _extreme(self, kind: Kind, parts: Sequence[Poly]) -> Poly:
        sign = 1 if kind == "least" else -1
        kept = list(dict.fromkeys(parts))
        for p in list(kept):
            others = [q for q in kept if q != p]
            if any(self.implies((), (p - q) * sign) for q in others):
                kept.remove(p)
        if len(kept) == 1:
            return kept[0]
        return self._derive(kind, tuple(sorted(kept, key=lambda p: p.text())))

    def logarithm(self, top: Poly, low: int, base: int) -> Poly:
        """Give floor(log(top/low) to the base), and 0 where top < low."""
        if top.constant is not None:
            n, out = top.constant, 0
            while n >= low * base:
                n, out = n / base, out + 1
            return as_poly(out)
        return self._derive("logarithm", (top, as_poly(low)), base)

    def put(self, poly: Poly, values: Mapping[str, Poly]) -> Poly:
        """Substitute in a polynomial and in the names that it is made with."""
        touched = {
            name: self._rebuilt(self.known[name], values)
            for name in poly.names
            if name not in values and self.depends(name, values)
        }
        return poly.put({**touched, **values})

    def _rebuilt(self, name: Name, values: Mapping[str, Poly]) -> Poly:
        parts = [self.put(p, values) for p in name.parts]
        if name.kind == "floor":
            return self.floor(parts[0], name.divisor)
        if name.kind == "logarithm":
            return self.logarithm(parts[0], int(name.parts[1].free), name.divisor)
        return self._extreme(name.kind, parts)

    def depends(self, name: str, on: Iterable[str]) -> bool:
        """Whether a name is one of some names or is worked out from them."""
        wanted = set(on)
        if name in wanted:
            return True
        return any(self.depends(k, wanted) for p in self.known[name].parts for k in p.names)

    def derived(self, polys: Iterable[Poly], on: str) -> list[Name]:
        """Give the names worked out from one name that stand in polynomials."""
        found = {n for p in polys for n in p.names if n != on and self.depends(n, (on,))}
        return [self.known[n] for n in sorted(found)]

    def period(self, name: Name, on: str) -> int:
        """Give the period of a floor in one of the names it is worked out from."""
        if name.kind != "floor":
            raise Beyond(f"{self.shown(name.name)} inside a loop")
        inner = self.derived(name.parts, on)
        return name.divisor * lcm(*(self.period(n, on) for n in inner), 1)

    def facts(self, polys: Iterable[Poly]) -> list[Poly]:
        """Give what is known (as polynomials >= 0) of all names in polynomials."""
        out: list[Poly] = []
        todo = [n for p in polys for n in p.names]
        seen: set[str] = set()
        while todo:
            key = todo.pop()
            if key in seen:
                continue
            seen.add(key)
            name = self.known[key]
            out += self._facts_of(name)
            todo += [n for p in name.parts for n in p.names]
        return out

    def _facts_of(self, name: Name) -> list[Poly]:
        me = var(name.name)
        if name.kind in ("size", "pass", "unknown", "logarithm"):
            return [me]
        if name.kind == "floor":
            over = name.parts[0] - me * name.divisor
            return [over, -over + (name.divisor - 1)]
        if name.kind == "least":
            floor = [me] if all(self.implies((), p) for p in name.parts) else []
            return [p - me for p in name.parts] + floor
        if name.kind == "greatest":
            return [me - p for p in name.parts]
        return []

    def nonnegative(self, name: str) -> bool:
        """Whether a name is known to be at least 0 by its kind."""
        return self.known[name].kind in ("size", "pass", "unknown", "logarithm")

    def implies(self, given: Iterable[Poly], wanted: Poly) -> bool:
        """Whether ``wanted >= 0`` follows from ``given >= 0``; False where that is not seen."""
        fixed = wanted.constant
        if fixed is not None and fixed >= 0:
            return True
        key = (frozenset(given), wanted)
        found = self._implied.get(key)
        if found is None:
            found = self.impossible([*key[0], -wanted - 1])
            self._implied[key] = found
        return found

    def impossible(self, given: Sequence[Poly]) -> bool:
        """Whether polynomials cannot all be >= 0; False where that is not seen."""
        facts = self.facts(given)
        rows = [p.tightened() for p in (*given, *facts)]
        products = {m for p in rows for m in p.whole if len(m) > 1 or (m and m[0][1] > 1)}
        for m in products:
            if all(e % 2 == 0 or self.nonnegative(n) for n, e in m):
                rows.append(Poly({m: 1}))
        return contradictory(rows)

    def shown(self, name: str) -> str:
        """Give a name as sympy reads it."""
        known = self.known[name]
        if not known.parts:
            return self.spelt.get(name, name)
        parts = [self.written(p) for p in known.parts]
        if known.kind == "floor":
            inner = parts[0] if parts[0].isidentifier() else f"({parts[0]})"
            return f"floor({inner}/{known.divisor})"
        if known.kind == "logarithm":
            low = int(known.parts[1].free)
            inner = f"Max({parts[0]}, {low})" + (f"/{low}" if low != 1 else "")
            return f"floor(log({inner})/log({known.divisor}))"
        word = "Min" if known.kind == "least" else "Max"
        return f"{word}({', '.join(parts)})"

    def written(self, poly: Poly) -> str:
        """Write a polynomial for sympy."""
        return poly.text({n: self.shown(n) for n in poly.names})

    def roots(self, polys: Iterable[Poly]) -> frozenset[str]:
        """Give the names that polynomials come down to."""
        out: set[str] = set()
        for p in polys:
            for n in p.names:
                known = self.known[n]
                out |= self.roots(known.parts) if known.parts else {n}
        return frozenset(out)

    def value(self, name: str, sizes: Mapping[str, int]) -> Fraction:
        """Work a name out at sizes."""
        known = self.known[name]
        if not known.parts:
            return Fraction(sizes[name])
        parts = [self.value_of(p, sizes) for p in known.parts]
        if known.kind == "floor":
            return Fraction((parts[0] / known.divisor).__floor__())
        if known.kind == "logarithm":
            low, out = parts[1], 0
            while parts[0] >= low * known.divisor ** (out + 1):
                out += 1
            return Fraction(out)
        pick: Callable[[list[Fraction]], Fraction] = min if known.kind == "least" else max
        return pick(parts)

    def value_of(self, poly: Poly, sizes: Mapping[str, int]) -> Fraction:
        """Work a polynomial out at sizes."""
        return poly.at({n: self.value(n, sizes) for n in poly.names})
