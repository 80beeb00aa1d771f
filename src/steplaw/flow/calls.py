"""Symbolic calls: builtins, methods of containers, functions whose code is known."""

from __future__ import annotations

import builtins
import inspect
from collections.abc import Callable, Mapping, Sequence
from types import CodeType

from steplaw.flow import trips
from steplaw.flow.names import Beyond
from steplaw.flow.objects import Objects
from steplaw.flow.poly import CONST_ONE, ZERO, Poly, as_poly
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
    State,
    Tup,
    Value,
)

_READING_NAMES = """
count index copy get keys values items join split rsplit splitlines strip lstrip rstrip
startswith endswith find rfind lower upper title format replace isdigit isalpha isspace
isidentifier encode decode zfill partition rpartition ljust rjust center casefold isupper
islower isalnum isdecimal isnumeric translate removeprefix removesuffix union intersection
difference symmetric_difference issubset issuperset isdisjoint reverse sort group start end span
match search fullmatch hex bit_length as_integer_ratio
"""
#: Methods that leave the number of items as it is.
READING = frozenset(_READING_NAMES.split())
#: Builtins that go over all items of their arguments.
WHOLE = frozenset(("sum", "min", "max", "list", "tuple", "sorted", "set", "frozenset", "dict"))
_PLAIN_NAMES = """
isinstance issubclass hasattr getattr type id hash repr str bytes float complex bool chr ord bin
hex oct format round callable print ascii divmod pow slice object super vars bytearray
memoryview
"""
#: Builtins that change nothing and give something unknown.
PLAIN = frozenset(_PLAIN_NAMES.split())
Keywords = Mapping[str, Value]


class Calls(Objects):
    """Runs symbolic calls.

    Attributes
    ----------
    globals : mapping of str to Function
        Functions of the module that nothing rebinds.
    bound : set of str
        Names that the module binds: no builtin of that name is meant.
    """

    def __init__(self, *given: object) -> None:
        super().__init__(*given)  # type: ignore[arg-type]
        self.globals: dict[str, Function] = {}
        self.bound: frozenset[str] = frozenset()
        self.keywords: tuple[str, ...] = ()
        self.unseen: dict[tuple[int, str], None] = {}

    def global_value(self, state: State, name: str) -> Value:
        """Give what a global name stands for."""
        if name in self.globals:
            return self.globals[name]
        if name not in self.bound and hasattr(builtins, name):
            return Builtin(name)
        return Obj(f"global {name}", name, "global")

    def function(
        self,
        state: State,
        code: Value,
        closure: tuple[Value, ...],
        defaults: tuple[Value, ...],
        kwdefaults: bool,
    ) -> Value:
        """Give a function that the code makes."""
        if not isinstance(code, Const) or not isinstance(code.value, CodeType):
            return self.other(state, "")
        made = code.value
        for name, cell in zip(made.co_freevars, closure, strict=False):
            if isinstance(cell, Cell) and _rebinds(made, name):
                self.shared.add(cell.key)
        return Function(made, closure, defaults, kwdefaults)

    def call(self, state: State, function: Value, args: list[Value], named: Keywords) -> Value:
        """Run a call; give its result."""
        if isinstance(function, Builtin):
            return self._builtin(state, function.name, args, named)
        if isinstance(function, Obj) and function.kind != "global":
            function = self.method_of.get(function.key, function)
        if isinstance(function, Method):
            return self._method(state, function, args, named)
        if isinstance(function, Function):
            bound = self._bind(state, function, args, named)
            if bound is not None:
                return self.call_known(state, function, bound)
        return self.call_unseen(state, function, [*args, *named.values()])

    def call_known(self, state: State, function: Function, args: list[Value]) -> Value:
        """Run a call of a function whose code is known."""
        if function.code.co_flags & inspect.CO_GENERATOR:
            obj = self.other(state, "", "generator")
            self.items[obj.key] = Items(code=function, args=tuple(args))
            state.extents[obj.key] = self.yields(state, function, args)
            return obj
        if function.code.co_flags & (inspect.CO_COROUTINE | inspect.CO_ASYNC_GENERATOR):
            return self.call_unseen(state, function, args)
        return self.inline(state, function, args)

    def call_unseen(self, state: State, function: Value, args: Sequence[Value]) -> Value:
        """Run a call of code that is not seen: it may change whatever it is given."""
        name = _told(function)
        self.unseen[self.line, name or "a call"] = None
        for value in (function, *args):
            self.given(state, value)
            self._given_away(state, value)
        self.disturb(state)
        return self.other(state, f"{name}(...)" if name else "")

    def _given_away(self, state: State, value: Value) -> None:
        if isinstance(value, Obj) and value.kind == "generator":
            self.consume(state, value, whole=False, begun=False)
        elif isinstance(value, Obj) and value.kind == "iterator":
            state.extents[value.key] = None
        elif isinstance(value, Tup):
            for item in value.items:
                self._given_away(state, item)

    def _bind(
        self, state: State, function: Function, args: list[Value], named: Keywords
    ) -> list[Value] | None:
        code = function.code
        if code.co_flags & (inspect.CO_VARARGS | inspect.CO_VARKEYWORDS):
            return None
        count = code.co_argcount + code.co_kwonlyargcount
        slots = code.co_varnames[:count]
        out: dict[str, Value] = dict(zip(slots[: code.co_argcount], args, strict=False))
        if len(args) > code.co_argcount or any(k not in slots or k in out for k in named):
            return None
        out.update(named)
        first = code.co_argcount - len(function.defaults)
        for place, value in enumerate(function.defaults):
            out.setdefault(slots[first + place], value)
        for name in slots[code.co_argcount :]:
            if function.kwdefaults:
                out.setdefault(name, self.other(state, name))
        return [out[s] for s in slots] if all(s in out for s in slots) else None

    # -- iteration -------------------------------------------------------------------------

    def iterator(self, state: State, value: Value) -> Value:
        """Give ``iter(value)``."""
        if isinstance(value, Obj) and value.kind in ("iterator", "generator"):
            return value
        if isinstance(value, Obj) and value.key.startswith("o#") and value.kind == "other":
            self.consume(state, value, whole=False)
        extent = self.extent(state, value)
        kept = self.items.get(value.key) if isinstance(value, Obj) else None
        over = frozenset({value.key}) if isinstance(value, Obj) else frozenset()
        at = self._item_of(state, value) if kept is None or kept.at is None else kept.at
        return self.iterates(state, extent, Items(at=at, over=over), _told(value))

    def iterates(self, state: State, extent: Extent | None, items: Items, text: str = "") -> Obj:
        """Give a new iterator."""
        obj = Obj(self.fresh("it"), text, "iterator")
        self._scopes[obj.key] = frozenset(self.passes)
        self.items[obj.key] = items
        self.born.add(obj.key)
        state.extents[obj.key] = extent
        return obj

    def _item_of(self, state: State, value: Value) -> Callable[[Poly], Value]:
        def at(place: Poly) -> Value:
            fixed = place.constant
            if isinstance(value, Tup) and fixed is not None and 0 <= fixed < len(value.items):
                return value.items[int(fixed)]
            return self.other(state, "")

        return at

    def taken(self, state: State, value: Value) -> tuple[Extent | None, Items]:
        """Start going over a value in C code; give its extent and its items."""
        iterator = self.iterator(state, value)
        if not isinstance(iterator, Obj):
            return None, Items()
        return state.extents.get(iterator.key), self.items[iterator.key]

    def consume(self, state: State, value: Value, whole: bool = True, begun: bool = True) -> None:
        """Go over all items of a value in C code, or over some of them."""
        if not isinstance(value, Obj) or value.kind not in ("iterator", "generator"):
            return
        kept = self.items.get(value.key)
        if kept is not None and kept.code is not None:
            self.generate(state, kept.code, list(kept.args), whole, begun)
        state.extents[value.key] = None

    # -- builtins --------------------------------------------------------------------------

    def _builtin(self, state: State, name: str, args: list[Value], named: Keywords) -> Value:
        special = _BUILTINS.get(name)
        if special is not None:
            out = special(self, state, args, named)
            if out is not None:
                return out
        if name in ("sorted", "min", "max") and "key" in named and named["key"] != NONE:
            return self._with_key(state, name, args, named)
        if name in WHOLE and len(args) == 1:
            return self._collected(state, name, args[0])
        if name in ("any", "all") and len(args) == 1:
            self.consume(state, args[0], whole=False)
            return self.other(state, "")
        if name in WHOLE or name in PLAIN:
            for value in args:
                if isinstance(value, Obj) and value.kind in ("iterator", "generator"):
                    self.consume(state, value, whole=name in WHOLE)
            if name in ("list", "tuple", "set", "dict", "frozenset") and not args:
                return self.made(state, name.replace("frozen", ""), ZERO)
            return self.other(state, f"{name}(...)")
        if isinstance(getattr(builtins, name, None), type) and name.endswith(("Error", "tion")):
            return self.other(state, name)
        return self.call_unseen(state, Builtin(name), [*args, *named.values()])

    def _with_key(self, state: State, name: str, args: list[Value], named: Keywords) -> Value:
        extent = self.extent(state, args[0]) if len(args) == 1 else None
        for value in args:
            self.consume(state, value)
        self.call_unseen(state, named["key"], [])
        out = self.other(state, f"{name}(...)", "list" if name == "sorted" else "other")
        if name == "sorted":
            if extent is None:
                self.resized(state, out.key, "sorted(...)")
            else:
                state.extents[out.key] = extent
        return out

    def _collected(self, state: State, name: str, value: Value) -> Value:
        extent = self.extent(state, value)
        kept = self.items.get(value.key) if isinstance(value, Obj) else None
        self.consume(state, value)
        if name in ("sum", "min", "max"):
            return self.other(state, f"{name}(...)")
        kind = {"sorted": "list", "frozenset": "set"}.get(name, name)
        out = self.other(state, "", kind)
        if extent is None or kind in ("set", "dict"):
            self.resized(state, out.key, f"{name}(...)")
        else:
            state.extents[out.key] = extent
            if kept is not None and kept.at is not None and name in ("list", "tuple"):
                self.items[out.key] = Items(at=kept.at)
        return out

    # -- methods ---------------------------------------------------------------------------

    def _method(self, state: State, method: Method, args: list[Value], named: Keywords) -> Value:
        owner, name = method.owner, method.name
        text = f"{owner.text}.{name}()" if isinstance(owner, Obj) and owner.text else ""
        if isinstance(owner, Obj) and owner.kind == "global":
            return self.call_unseen(state, self.attribute(state, owner, name), args)
        if name in ("append", "appendleft", "insert") and len(args) <= 2:
            self.loosen(state, args[-1] if args else NONE)
            self.grown(state, owner, CONST_ONE)
            return NONE
        if name == "pop" and not args and isinstance(owner, Obj) and owner.kind == "list":
            self.grown(state, owner, -CONST_ONE)
            return self.other(state, "")
        if name == "extend" and len(args) == 1:
            self.extended(state, owner, args[0])
            return NONE
        if name == "clear" and isinstance(owner, Obj) and owner.kind in ("list", "dict", "set"):
            state.extents[owner.key] = trips.counted(ZERO)
            return NONE
        if name in ("keys", "values", "items", "copy") and not args:
            return self._view(state, owner, name, text)
        if name in READING:
            for value in args:
                if name == "join":
                    self.consume(state, value)
                elif isinstance(value, Obj) and value.kind in ("iterator", "generator"):
                    self.consume(state, value, whole=False)
            if "key" in named and named["key"] != NONE:
                self.call_unseen(state, named["key"], [])
            return self.other(state, text.replace("()", "(...)") if args else text)
        result = self.call_unseen(state, self.attribute(state, owner, name), args)
        for value in (*named.values(), owner):
            self.given(state, value)
            self._given_away(state, value)
        self.disturb(state)
        return self.named(result, text)

    def _view(self, state: State, owner: Value, name: str, text: str) -> Value:
        extent = self.extent(state, owner)
        kind = "list" if name == "copy" else "tuple"
        if isinstance(owner, Obj) and name == "copy" and owner.kind in ("dict", "set"):
            kind = owner.kind
        out = self.other(state, text, kind)
        if extent is None:
            self.resized(state, out.key, text or "a view")
        else:
            state.extents[out.key] = extent
        if isinstance(owner, Obj) and name != "copy":
            self.assume(f"{text or name} gives one item for each of the container's")
            self.items[out.key] = Items(over=frozenset({owner.key}))
        return out

    # -- hooks -----------------------------------------------------------------------------

    def inline(self, state: State, function: Function, args: list[Value]) -> Value:
        """Run a function's code in place of a call of it."""
        raise NotImplementedError

    def yields(self, state: State, function: Function, args: list[Value]) -> Extent | None:
        """Give how many items a generator gives."""
        raise NotImplementedError

    def generate(
        self, state: State, function: Function, args: list[Value], whole: bool, begun: bool = True
    ) -> None:
        """Run a generator's code for all of its items, or for some."""
        raise NotImplementedError


def _rebinds(code: CodeType, name: str) -> bool:
    from steplaw.flow.module import stored_names

    return name in stored_names(code)


def _told(value: Value) -> str:
    if isinstance(value, Obj):
        return value.text
    if isinstance(value, Function):
        return value.code.co_name
    if isinstance(value, Builtin):
        return value.name
    return ""


def _range(m: Calls, s: State, args: list[Value], named: Keywords) -> Value | None:
    polys = [m.number(s, a, "sure") for a in args]
    if named or not 1 <= len(args) <= 3 or any(p is None for p in polys):
        return None
    given = [p for p in polys if p is not None]
    start, stop = (ZERO, given[0]) if len(given) == 1 else (given[0], given[1])
    fixed = given[2].constant if len(given) == 3 else CONST_ONE.constant
    if fixed is None or fixed == 0 or fixed.denominator != 1:
        return None
    step = int(fixed)
    obj = m.other(s, "range(...)", "range")
    s.extents[obj.key] = trips.of_range(start, stop, step)
    m.items[obj.key] = Items(at=lambda place: Num(start + place * step))
    return obj


def _len(m: Calls, s: State, args: list[Value], named: Keywords) -> Value | None:
    return m.length_of(s, args[0]) if len(args) == 1 else None


def _enumerate(m: Calls, s: State, args: list[Value], named: Keywords) -> Value | None:
    extra = [*args[1:], *named.values()]
    start = m.number(s, extra[0], "sure") if extra else ZERO
    if not args or start is None:
        return None
    extent, items = m.taken(s, args[0])
    first: Poly = start
    inner = items.at

    def at(place: Poly) -> Value:
        return Tup((Num(first + place), inner(place) if inner else m.other(s, "")))

    if items.code is not None:
        return None
    return m.iterates(s, extent, Items(at=at, over=items.over))


def _zip(m: Calls, s: State, args: list[Value], named: Keywords) -> Value | None:
    if any(isinstance(a, Obj) and a.kind in ("iterator", "generator") for a in args):
        return None
    parts = [m.taken(s, a) for a in args]
    extents = [e for e, _ in parts]
    if not args or any(e is None for e in extents):
        return None
    getters = [items.at for _, items in parts]

    def at(place: Poly) -> Value:
        return Tup(tuple(g(place) if g else m.other(s, "") for g in getters))

    over = frozenset[str]().union(*(items.over for _, items in parts))
    joined = tuple(dict.fromkeys(p for e in extents if e for p in e))
    return m.iterates(s, joined, Items(at=at, over=over))


def _reversed(m: Calls, s: State, args: list[Value], named: Keywords) -> Value | None:
    if len(args) != 1:
        return None
    extent, items = m.taken(s, args[0])
    inner = items.at
    try:
        length = None if extent is None else trips.length(m.names, extent, s.known)
    except Beyond:
        length = None

    def at(place: Poly) -> Value:
        if inner is None or length is None:
            return m.other(s, "")
        return inner(length - 1 - place)

    if items.code is not None:
        return None
    return m.iterates(s, extent, Items(at=at, over=items.over))


def _extreme(which: str) -> Callable[[Calls, State, list[Value], Keywords], Value | None]:
    def give(m: Calls, s: State, args: list[Value], named: Keywords) -> Value | None:
        polys = [m.number(s, a) for a in args]
        if any(p is not None and p.constant is None for p in polys):
            polys = [m.number(s, a, "likely") for a in args]
        if len(args) < 2 or named or any(p is None for p in polys):
            return None
        known = [p for p in polys if p is not None]
        return Num(m.names.least(known) if which == "min" else m.names.greatest(known))

    return give


def _abs(m: Calls, s: State, args: list[Value], named: Keywords) -> Value | None:
    n = m.number(s, args[0]) if len(args) == 1 else None
    if n is None:
        return None
    return Num(n if m.names.implies(s.known, n) else m.names.greatest([n, -n]))


def _int(m: Calls, s: State, args: list[Value], named: Keywords) -> Value | None:
    n = m.number(s, args[0]) if len(args) == 1 else None
    return None if n is None else Num(n)


def _iter(m: Calls, s: State, args: list[Value], named: Keywords) -> Value | None:
    return m.iterator(s, args[0]) if len(args) == 1 else None


def _next(m: Calls, s: State, args: list[Value], named: Keywords) -> Value | None:
    if args and isinstance(args[0], Obj):
        m.consume(s, args[0], whole=False)
    return m.other(s, "")


def _map(m: Calls, s: State, args: list[Value], named: Keywords) -> Value | None:
    parts = [m.taken(s, a) for a in args[1:]]
    if not parts or any(e is None or i.code is not None for e, i in parts):
        return None
    function = args[0]
    if not isinstance(function, Builtin) or function.name not in PLAIN | {"int", "len", "abs"}:
        m.call_unseen(s, function, [])
    over = frozenset[str]().union(*(i.over for _, i in parts))
    joined = tuple(dict.fromkeys(p for e, _ in parts if e for p in e))
    return m.iterates(s, joined, Items(over=over))


_BUILTINS: dict[str, Callable[[Calls, State, list[Value], Keywords], Value | None]] = {
    "range": _range,
    "len": _len,
    "enumerate": _enumerate,
    "zip": _zip,
    "reversed": _reversed,
    "min": _extreme("min"),
    "max": _extreme("max"),
    "abs": _abs,
    "int": _int,
    "iter": _iter,
    "next": _next,
    "map": _map,
}

__all__ = ["Calls", "as_poly"]
