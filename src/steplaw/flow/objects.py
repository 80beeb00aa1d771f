"""Symbolic objects: their sizes, what changes them, and numbers worked out from them."""

from __future__ import annotations

import re
from collections.abc import Iterable
from dataclasses import replace

from steplaw.flow import trips
from steplaw.flow.names import Beyond, Names
from steplaw.flow.poly import ZERO, Poly, as_poly
from steplaw.flow.values import (
    NONE,
    Builtin,
    Cell,
    Const,
    Extent,
    Function,
    Items,
    Method,
    Num,
    Obj,
    Slice,
    State,
    Test,
    Tup,
    Value,
    Ways,
)

APART = "what is got from a call or as an item is none of the containers that are looped over"
MADE = ("list", "tuple", "dict", "set", "range", "iterator", "generator")
FIXED = ("range", "tuple")
_SWAPPED = {">": "<", ">=": "<=", "<": ">", "<=": ">="}
_ADD, _AND, _FLOOR, _LEFT, _TIMES, _MOD, _POWER, _RIGHT, _MINUS = 0, 1, 2, 3, 5, 6, 8, 9, 10


class Objects:
    """What is known of the objects of one derivation.

    Parameters
    ----------
    hints : mapping of str to str
        By argument of the subject: ``int``, ``container`` or ``other``, as far as known.

    Attributes
    ----------
    evidence : dict of str to set of str
        By argument: what it is used as.
    assumed : dict of str to int
        What is taken for granted, with the first line that needs it.
    """

    def __init__(self, names: Names, hints: dict[str, str]) -> None:
        self.names = names
        self.hints = hints
        self.evidence: dict[str, set[str]] = {}
        self.assumed: dict[str, int] = {}
        self.items: dict[str, Items] = {}
        self.passes: tuple[str, ...] = ()
        self.shared: set[str] = set()
        #: Objects made by the code itself: their sizes are known from their making on.
        self.born: set[str] = set()
        #: Sizes that are sizes of arguments, as people write them.
        self.argument_sizes: set[str] = set()
        #: What an attribute is a method of, if it is one.
        self.method_of: dict[str, Method] = {}
        self.line = 0
        self.at = 0
        self._scopes: dict[str, frozenset[str]] = {}
        self._lengths: dict[str, Poly] = {}
        self._lazy: dict[str, Poly] = {}
        self._numbers: dict[str, Poly] = {}
        self._count = 0

    def fresh(self, stem: str) -> str:
        """Give a key that no other object has."""
        self._count += 1
        return f"{stem}#{self._count}"

    @property
    def mark(self) -> int:
        """A mark in time, by which newer objects are told."""
        return self._count

    def is_newer(self, key: str, mark: int) -> bool:
        """Whether an object, or the state of one, was made after a mark."""
        return any(int(n) > mark for n in re.findall(r"#(\d+)", key))

    def assume(self, text: str) -> None:
        """Note what the derivation takes for granted."""
        self.assumed.setdefault(text, self.line)

    def other(self, state: State, text: str, kind: str = "other") -> Obj:
        """Give an object that nothing is known of."""
        obj = Obj(self.fresh("o"), text, kind)
        self._scopes[obj.key] = frozenset(self.passes)
        if kind in MADE:
            self.born.add(obj.key)
        return obj

    def default_extent(self, key: str) -> Extent | None:
        """Give the extent that an object has had from the start, if it was ever asked for."""
        length = self._lengths.get(key)
        return None if length is None else trips.counted(length)

    def named(self, value: Value, name: str) -> Value:
        """Give an object without a text the name of the variable that it is kept in."""
        if not isinstance(value, Obj):
            return value
        if value.kind == "list":
            # A list that is kept may have other items put in their place.
            self.items.pop(value.key, None)
        return value if value.text else replace(value, text=name)

    def constant(self, value: object) -> Value:
        """Give a constant of the code."""
        if isinstance(value, int) and not isinstance(value, bool):
            return Num(as_poly(value))
        if isinstance(value, tuple):
            return Tup(tuple(self.constant(v) for v in value))
        return Const(value)

    def made(self, state: State, kind: str, length: Poly | None, text: str = "") -> Obj:
        """Give a new object with so many items; None for a number that is not known."""
        obj = self.other(state, text, kind)
        if length is None:
            self.resized(state, obj.key, text or f"a {kind}")
        else:
            state.extents[obj.key] = trips.counted(length)
        return obj

    # -- numbers ---------------------------------------------------------------------------

    def number(self, state: State, value: Value, use: str = "") -> Poly | None:
        """Give a value as a whole number, None where it may be something else.

        Parameters
        ----------
        state : State
            Where it is asked.
        value : Value
            The value.
        use : str
            ``sure`` where the use itself proves that it is a whole number; ``likely`` where
            it shows that an argument is one.
        """
        if isinstance(value, Num):
            return value.poly
        if isinstance(value, Const) and isinstance(value.value, bool):
            return as_poly(int(value.value))
        if not isinstance(value, Obj) or value.kind in MADE:
            return None
        lazy = self._lazy.get(value.key)
        if lazy is not None:
            if use or all(self._is_whole(n) for n in lazy.names):
                for name in lazy.names:
                    if self.names.known[name].kind == "size":
                        self._seen(self.names.known[name].text, "int")
                return lazy
            return None
        if value.kind == "param":
            hint = self.hints.get(value.text)
            if hint in ("container", "other") or not (use or hint == "int"):
                return None
            self._seen(value.text, "int")
            return self._argument(value)
        return self._whole(value) if use == "sure" else None

    def _is_whole(self, name: str) -> bool:
        known = self.names.known[name]
        return known.kind != "size" or self.hints.get(known.text) == "int"

    def _seen(self, text: str, use: str) -> None:
        self.evidence.setdefault(text, set()).add(use)

    def _argument(self, value: Obj) -> Poly:
        poly = self._numbers.get(value.key)
        if poly is None:
            poly = self._numbers[value.key] = self.names.add("size", value.text, value.text)
        self.argument_sizes.add(value.text)
        self.assume(f"{value.text} is a whole number and not negative")
        return poly

    def _whole(self, value: Obj) -> Poly:
        poly = self._numbers.get(value.key)
        if poly is None:
            scope = self._scopes.get(value.key, frozenset())
            text = value.text or "a number"
            poly = self.names.add("whole", text, _identifier(text), scope)
            self._numbers[value.key] = poly
        return poly

    def combined(self, state: State, op: int, left: Value, right: Value, inplace: bool) -> Value:
        """Give the value of a binary operator."""
        a, b = self._operands(state, op, left, right)
        if a is not None and b is not None:
            poly = self._arithmetic(op, a, b)
            if poly is None:
                return self.other(state, "")
            if isinstance(left, Num | Const) and isinstance(right, Num | Const):
                return Num(poly)
            if all(self._is_whole(n) for n in poly.names):
                return Num(poly)
            obj = self.other(state, "")
            self._lazy[obj.key] = poly
            return obj
        return self._joined(state, op, left, right, inplace)

    def _operands(
        self, state: State, op: int, left: Value, right: Value
    ) -> tuple[Poly | None, Poly | None]:
        use = "likely" if op in (_FLOOR, _MOD, _RIGHT, _AND) else ""
        a, b = self.number(state, left, use), self.number(state, right, use)
        if (a is None and b is not None) or op in (_ADD, _MINUS, _TIMES):
            a = self._tentative(left) if a is None else a
        if b is None and a is not None:
            b = self._tentative(right)
        return a, b

    def _tentative(self, value: Value) -> Poly | None:
        """Give what an argument stands for if it turns out to be a whole number."""
        if not isinstance(value, Obj):
            return None
        if value.key in self._lazy:
            return self._lazy[value.key]
        if value.kind == "param" and self.hints.get(value.text) not in ("container", "other"):
            poly = self._numbers.get(value.key)
            if poly is None:
                poly = self._numbers[value.key] = self.names.add("size", value.text, value.text)
            return poly
        return None

    def _arithmetic(self, op: int, a: Poly, b: Poly) -> Poly | None:
        fixed = b.constant
        n = None if fixed is None or fixed.denominator != 1 else int(fixed)
        if op == _ADD:
            return a + b
        if op == _MINUS:
            return a - b
        if op == _TIMES:
            return a * b
        if n is None or n < 0:
            return None
        if op == _FLOOR and n:
            return self.names.floor(a, n)
        if op == _MOD and n:
            return a - self.names.floor(a, n) * n
        if op == _POWER and n <= 6:
            return _raised(a, n)
        if op == _LEFT and n < 64:
            return a * (1 << n)
        if op == _RIGHT and n < 64:
            return self.names.floor(a, 1 << n)
        if op == _AND and n and n & (n + 1) == 0:
            return a - self.names.floor(a, n + 1) * (n + 1)
        return None

    def _joined(self, state: State, op: int, left: Value, right: Value, inplace: bool) -> Value:
        """Give a sum of sequences or a repeated one, otherwise what nothing is known of."""
        if op == _TIMES:
            for one, by in ((left, right), (right, left)):
                times = self.number(state, by, "likely")
                if self._is_made(one, ("list", "tuple")) and times is not None:
                    length = self._length(state, one)
                    if length is not None:
                        if not self.names.implies(state.known, times):
                            times = self.names.greatest([times, ZERO])
                        return self.made(state, _kind(one), length * times)
        if op == _ADD and self._is_made(left, ("list", "tuple")):
            if inplace and isinstance(left, Obj) and left.kind == "list":
                self.extended(state, left, right)
                return left
            parts = [self._length(state, x) for x in (left, right)]
            if parts[0] is not None and parts[1] is not None:
                return self.made(state, _kind(left), parts[0] + parts[1])
            return self.made(state, _kind(left), None)
        if inplace and isinstance(left, Obj) and left.kind not in FIXED:
            self.changed(state, left)
        return self.other(state, "")

    def _is_made(self, value: Value, kinds: tuple[str, ...]) -> bool:
        return isinstance(value, Tup) or (isinstance(value, Obj) and value.kind in kinds)

    # -- sizes -----------------------------------------------------------------------------

    def extent(self, state: State, value: Value) -> Extent | None:
        """Give the extent of a value that is iterated over, None where it has none."""
        if isinstance(value, Tup):
            return trips.counted(as_poly(len(value.items)))
        if isinstance(value, Const):
            if isinstance(value.value, str | bytes | frozenset):
                return trips.counted(as_poly(len(value.value)))
            return None
        if not isinstance(value, Obj):
            return None
        if value.key in state.extents:
            return state.extents[value.key]
        if value.kind == "param":
            if self.hints.get(value.text) in ("int", "other"):
                return None
            self._seen(value.text, "container")
        if value.alias:
            self.resized(state, value.key, value.text)
            return state.extents[value.key]
        length = self._lengths.get(value.key)
        if length is None:
            text = value.text or f"what line {self.line} loops over"
            scope = self._scopes.get(value.key, frozenset())
            length = self.names.add("size", f"len({text})", f"len_{_identifier(text)}", scope)
            self._lengths[value.key] = length
            if value.kind in ("param", "path"):
                self.argument_sizes.add(f"len({text})")
                self.assume(f"{value.text} gives len({value.text}) items each time it is gone over")
        extent = trips.counted(length)
        state.extents[value.key] = extent
        return extent

    def _length(self, state: State, value: Value) -> Poly | None:
        extent = self.extent(state, value)
        if extent is None:
            return None
        try:
            return trips.length(self.names, extent, state.known)
        except Beyond:
            return None

    def length_of(self, state: State, value: Value) -> Value:
        """Give ``len(value)``."""
        length = self._length(state, value)
        return self.other(state, "") if length is None else Num(length)

    def resized(self, state: State, key: str, text: str) -> None:
        """Give an object a size of its own from here on."""
        shown = f"len({text}) at line {self.line}"
        stem = f"len_{_identifier(text)}_{self.line}"
        size = self.names.add("size", shown, stem, frozenset(self.passes))
        state.extents[key] = trips.counted(size)

    def changed(self, state: State, value: Value) -> None:
        """Take it that the number of items of a value may have changed."""
        if not isinstance(value, Obj) or value.kind in FIXED:
            return
        if value.kind == "other":
            self.assume(APART)
        for key in {value.key, *value.alias}:
            self._unsettle(state, key, value.text)

    def _unsettle(self, state: State, key: str, text: str) -> None:
        kept = self.items.get(key)
        if (kept is not None and kept.code is not None) or key.startswith("it#"):
            state.extents[key] = None
        else:
            self.resized(state, key, text or "it")

    def grown(self, state: State, value: Value, by: Poly) -> None:
        """Add items to a list."""
        length = self._length(state, value)
        if not isinstance(value, Obj) or length is None or value.alias:
            self.changed(state, value)
            return
        state.extents[value.key] = trips.counted(length + by)
        if value.kind == "other":
            self.assume(APART)

    def extended(self, state: State, value: Value, by: Value) -> None:
        """Add the items of one value to another."""
        more = self._length(state, by)
        self.consume(state, by)
        if more is None or (isinstance(value, Obj) and value.kind not in ("list", "param", "path")):
            self.changed(state, value)
        else:
            self.grown(state, value, more)

    def loosen(self, state: State, value: Value, read_only: bool = False) -> None:
        """Take it that code out of sight may hold a value from here on."""
        todo, seen = [value], set[str]()
        while todo and not read_only:
            value = todo.pop()
            if isinstance(value, Tup):
                todo.extend(value.items)
            elif isinstance(value, Obj):
                state.loose |= {value.key, *value.alias}
                if value.key in self.method_of and value.key not in seen:
                    seen.add(value.key)
                    todo.append(self.method_of[value.key])
            elif isinstance(value, Method):
                todo.append(value.owner)
            elif isinstance(value, Function):
                todo.extend(value.closure)
            elif isinstance(value, Cell) and value.key not in seen:
                seen.add(value.key)
                if value.key in state.cells:
                    todo.append(state.cells[value.key])

    def given(self, state: State, value: Value) -> None:
        """Take it that a value was given to code out of sight, which may have changed it."""
        held = State(cells=state.cells)
        self.loosen(held, value)
        for key in sorted(held.loose - state.loose):
            self._unsettle(state, key, value.text if isinstance(value, Obj) else "it")
            state.epochs[key] = self.fresh("e")

    def disturb(self, state: State) -> None:
        """Take it that code out of sight has run: it may have changed whatever it holds."""
        for key in sorted(state.loose):
            self._unsettle(state, key, "it")
            state.epochs[key] = self.fresh("e")

    def attribute(self, state: State, owner: Value, name: str) -> Value:
        """Give an attribute, which may be a method to call later."""
        if isinstance(owner, Const | Tup) or (isinstance(owner, Obj) and owner.kind in MADE):
            return Method(owner, name)
        found = self._attribute(state, owner, name)
        self.method_of[found.key] = Method(owner, name)
        return found

    def _attribute(self, state: State, owner: Value, name: str) -> Obj:
        if isinstance(owner, Obj) and owner.kind in ("param", "path", "global"):
            epoch = state.epochs.get(owner.key, "")
            kind = "global" if owner.kind == "global" else "path"
            return Obj(f"{owner.key}.{name}{epoch}", f"{owner.text}.{name}", kind)
        text = f"{owner.text}.{name}" if isinstance(owner, Obj) and owner.text else ""
        return self.other(state, text)

    def attributes_changed(self, state: State, owner: Value) -> None:
        """Take it that the attributes of an object may have changed."""
        if isinstance(owner, Obj):
            for key in {owner.key, *owner.alias}:
                state.epochs[key] = self.fresh("e")

    def item(self, state: State, owner: Value, place: Value) -> Value:
        """Give an item or a slice."""
        if isinstance(place, Slice):
            return self._slice(state, owner, place)
        n = self.number(state, place)
        fixed = None if n is None else n.constant
        if isinstance(owner, Tup) and fixed is not None and fixed.denominator == 1:
            k = int(fixed)
            if -len(owner.items) <= k < len(owner.items):
                return owner.items[k]
        if isinstance(owner, Obj):
            kept = self.items.get(owner.key)
            at = kept.at if kept is not None and owner.kind == "range" else None
            if at is not None and n is not None and self.names.implies(state.known, n):
                return at(n)
            if fixed is not None and owner.kind in ("param", "path"):
                epoch = state.epochs.get(owner.key, "")
                return Obj(f"{owner.key}[{fixed}]{epoch}", f"{owner.text}[{fixed}]", "path")
            text = f"{owner.text}[...]" if owner.text else ""
            return self.other(state, text)
        return self.other(state, "")

    def _slice(self, state: State, owner: Value, place: Slice) -> Value:
        extent = self.extent(state, owner)
        conditions = None if extent is None else self._sliced(state, extent, place)
        kind = _kind(owner) if isinstance(owner, Obj | Tup) else "other"
        out = self.other(state, "", kind if kind in ("list", "tuple") else "list")
        if conditions is None:
            self.resized(state, out.key, "a slice")
        else:
            state.extents[out.key] = conditions
        return out

    def _sliced(self, state: State, extent: Extent, place: Slice) -> Extent | None:
        """Give the extent of a slice with steps of 1 or -1 over all."""
        step = 1 if place.step == NONE else self.number(state, place.step)
        whole = place.start == NONE and place.stop == NONE
        if step != 1 and step != as_poly(1):
            return extent if whole and step == as_poly(-1) else None
        start = ZERO if place.start == NONE else self.number(state, place.start, "sure")
        stop = None if place.stop == NONE else self.number(state, place.stop, "sure")
        if start is None or (stop is None and place.stop != NONE):
            return None
        length = trips.length(self.names, extent, state.known)
        here = trips.PLACE
        if self.names.implies(state.known, -start - 1):
            if stop is not None:
                return None
            return (length - 1 - here, -start - 1 - here)
        if not self.names.implies(state.known, start):
            return None
        out = [length - 1 - start - here]
        if stop is not None:
            if self.names.implies(state.known, stop):
                out.append(stop - 1 - start - here)
            elif self.names.implies(state.known, -stop - 1):
                out.append(length + stop - 1 - start - here)
            else:
                return None
        return tuple(out)

    def item_stored(self, state: State, owner: Value, place: Value) -> None:
        """Put an item in its place: only a dictionary can grow by that."""
        if not isinstance(owner, Obj) or owner.kind == "list":
            return
        plain = owner.kind in ("param", "path") and not isinstance(place, Slice)
        if plain and self.number(state, place) is not None:
            self.assume(f"putting an item of {owner.text} in its place adds none")
            return
        self.changed(state, owner)

    # -- tests -----------------------------------------------------------------------------

    def compared(self, state: State, sign: str, left: Value, right: Value) -> Value:
        """Give the value of a comparison."""
        a, b = self.number(state, left), self.number(state, right)
        if a is None and b is not None and b.constant is None:
            a = self.number(state, left, "likely")
        if b is None and a is not None and a.constant is None:
            b = self.number(state, right, "likely")
        if a is None or b is None:
            return self.other(state, "")
        if sign in (">", ">="):
            a, b, sign = b, a, _SWAPPED[sign]
        gap = b - a
        if sign == "<":
            return Test(((gap - 1,),), ((-gap,),))
        if sign == "<=":
            return Test(((gap,),), ((-gap - 1,),))
        same: Ways = ((gap, -gap),)
        differ: Ways = ((gap - 1,), (-gap - 1,))
        return Test(same, differ) if sign == "==" else Test(differ, same)

    def identical(self, state: State, left: Value, right: Value, denied: bool) -> Value:
        """Give the value of ``is`` or ``is not``."""
        test = self._is_none(left) if right == NONE else None
        if test is None:
            return self.other(state, "")
        return Test(((),), ()) if test != denied else Test((), ((),))

    def _is_none(self, value: Value) -> bool | None:
        if value == NONE:
            return True
        if isinstance(value, Num | Tup | Function | Builtin | Const):
            return False
        if isinstance(value, Obj) and value.kind in MADE:
            return False
        return None

    def truth(self, state: State, value: Value) -> Test | None:
        """Give when a value counts as true, None where that is not known."""
        if isinstance(value, Test):
            return value
        if isinstance(value, Const):
            return Test(((),), ()) if value.value else Test((), ((),))
        n = self.number(state, value)
        if n is not None:
            return Test(((n - 1,), (-n - 1,)), ((n, -n),))
        sized = isinstance(value, Tup) or (
            isinstance(value, Obj)
            and value.kind in ("list", "dict", "set", "tuple", "range", "param")
            and (value.kind != "param" or self.hints.get(value.text) == "container")
        )
        extent = self.extent(state, value) if sized else None
        if extent is None:
            return None
        first = trips.at(self.names, extent, ZERO)
        return Test((first,), complement(first))

    # -- hooks -----------------------------------------------------------------------------

    def consume(self, state: State, value: Value, whole: bool = True, begun: bool = True) -> None:
        """Go over all items of a value."""
        raise NotImplementedError


def complement(conditions: Iterable[Poly]) -> Ways:
    """Give the ways in which conditions do not all hold, which exclude each other."""
    out: list[tuple[Poly, ...]] = []
    before: tuple[Poly, ...] = ()
    for c in conditions:
        out.append((*before, -c - 1))
        before = (*before, c)
    return tuple(out)


def _raised(base: Poly, exponent: int) -> Poly:
    out = as_poly(1)
    for _ in range(exponent):
        out = out * base
    return out


def _kind(value: Value) -> str:
    return value.kind if isinstance(value, Obj) else "tuple"


def _identifier(text: str) -> str:
    name = re.sub(r"\W+", "_", text).strip("_")[:40]
    return name if name and not name[0].isdigit() else f"x_{name}"
