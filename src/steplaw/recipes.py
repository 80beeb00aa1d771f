"""Expressions that make a value of a type: whole arguments, elements, and distinct keys."""

from __future__ import annotations

import collections
import collections.abc
import enum
import sys
import types
import typing
from collections.abc import Callable, Mapping, Sequence
from typing import Any

from steplaw.fields import fields_of, is_protocol

LETTERS = "'abcdefghijklmnopqrstuvwxyz'"

_LISTS = (
    list,
    collections.abc.Sequence,
    collections.abc.MutableSequence,
    collections.abc.Iterable,
    collections.abc.Collection,
    collections.abc.Sized,
    collections.abc.Container,
    collections.abc.Reversible,
)
_ITERATORS = (collections.abc.Iterator, collections.abc.Generator)
_SETS = (set, frozenset, collections.abc.Set, collections.abc.MutableSet)
_DICTS = (
    dict,
    collections.OrderedDict,
    collections.defaultdict,
    collections.Counter,
    collections.abc.Mapping,
    collections.abc.MutableMapping,
)

_OF_EVERY_PROTOCOL = {"__init__", "__subclasshook__", "_proto_hook", "_no_init_or_replace_init"}

# By module and name, so that nothing is imported that the subject does not use itself.
_ELEMENTS: Mapping[tuple[str, str], str] = {
    ("datetime", "datetime"): "{0}(2026, 1, 1) + {timedelta}(minutes=rng.randrange(525600))",
    ("datetime", "date"): "{0}.fromordinal(739617 + rng.randrange(365))",
    ("datetime", "time"): "{0}(rng.randrange(24), rng.randrange(60))",
    ("datetime", "timedelta"): "{0}(minutes=rng.randrange(1440))",
    ("decimal", "Decimal"): "{0}(rng.randrange(10000)) / 100",
    ("fractions", "Fraction"): "{0}(rng.randrange(1000), rng.randrange(1, 1000))",
    ("uuid", "UUID"): "{0}(int=rng.getrandbits(128))",
    ("random", "Random"): "rng",
}
_DISTINCT: Mapping[tuple[str, str], str] = {
    ("datetime", "datetime"): "{0}(2026, 1, 1) + {timedelta}(minutes={i})",
    ("datetime", "date"): "{0}.fromordinal(739617 + {i})",
    ("datetime", "timedelta"): "{0}(minutes={i})",
    ("decimal", "Decimal"): "{0}({i})",
    ("fractions", "Fraction"): "{0}({i})",
    ("uuid", "UUID"): "{0}(int={i})",
}


class CannotMake(Exception):
    """No expression makes a value of this type; the text says why."""


class Recipes:
    """Writes expressions in the names that a module sees.

    Parameters
    ----------
    scope : mapping of str to object
        The module's globals.

    Attributes
    ----------
    extra : dict of str to object
        Names used that neither the module nor an import by name gives.
    """

    def __init__(self, scope: Mapping[str, Any]) -> None:
        self.scope = scope
        self.extra: dict[str, Any] = {}
        self._open: list[type] = []

    def whole(self, hint: Any, sizes: Sequence[str]) -> str:
        """Write an argument of the size's length.

        Parameters
        ----------
        hint : type
            An evaluated type hint.
        sizes : sequence of str
            Size names, the outermost axis first; the last one serves all further axes.

        Raises
        ------
        CannotMake
            If no expression makes such a value.
        """
        hint = self._plain(hint)
        size = sizes[0]
        if hint is int:
            return size
        if hint is str:
            return f"''.join(rng.choices({LETTERS}, k={size}))"
        if hint in (bytes, bytearray):
            return (
                f"rng.randbytes({size})" if hint is bytes else f"bytearray(rng.randbytes({size}))"
            )
        made = self._container(hint, sizes)
        if made is not None:
            return made
        if typing.get_origin(hint) is tuple:
            return self._tuple(self.whole, hint, sizes)
        return self._object(hint, sizes, self.whole) or self._scalar(hint, f"{size} + 1")

    def element(self, hint: Any, sizes: Sequence[str]) -> str:
        """Write one element of a container, whose own containers are as long as the size.

        Parameters
        ----------
        hint, sizes
            As for `whole`.
        """
        hint = self._plain(hint)
        size = sizes[0]
        if hint is str:
            return f"''.join(rng.choices({LETTERS}, k=6))"
        if hint in (bytes, bytearray):
            return "rng.randbytes(8)" if hint is bytes else "bytearray(rng.randbytes(8))"
        made = self._container(hint, sizes, nested=True)
        if made is not None:
            return made
        if typing.get_origin(hint) is tuple:
            return self._tuple(self.element, hint, sizes)
        return self._object(hint, sizes, self.element) or self._scalar(hint, size)

    def distinct(self, hint: Any, i: str, sizes: Sequence[str]) -> str:
        """Write a hashable value that differs for each whole number `i`.

        Parameters
        ----------
        hint : type
            An evaluated type hint.
        i : str
            The number's name.
        sizes : sequence of str
            For the rest of a tuple or of a class of several fields.
        """
        hint = self._plain(hint)
        if hint in (int, float):
            return i if hint is int else f"float({i})"
        if hint is str:
            return f"f'key{{{i}}}'"
        if hint is bytes:
            return f"b'key%d' % {i}"
        known = _DISTINCT.get(_place(hint))
        if known is not None:
            return self._fill(known, hint, i=i)
        if typing.get_origin(hint) is tuple:
            inner = [a for a in typing.get_args(hint) if a is not Ellipsis]
            first = self.distinct(inner[0], i, sizes)
            rest = [self.element(a, sizes) for a in inner[1:]]
            return f"({', '.join([first, *rest])}{'' if rest else ','})"
        fields = fields_of(hint)
        if fields and getattr(hint, "__hash__", None) is not None:
            (name, inside), *rest_fields = fields
            parts = [f"{name}={self.distinct(inside, i, sizes)}"]
            parts += [f"{k}={self.element(v, sizes)}" for k, v in rest_fields]
            return f"{self.spell(hint)}({', '.join(parts)})"
        raise CannotMake(f"{_name(hint)} cannot be a key of which there are any number")

    def spell(self, cls: Any) -> str:
        """Write a class by a name that leads to it from the module.

        Parameters
        ----------
        cls : type
            The class.
        """
        name, module = str(cls.__qualname__), str(cls.__module__)
        if self._leads(name, cls):
            return name
        for alias, value in self.scope.items():
            if value is cls:
                return alias
        for alias, value in self.scope.items():
            if isinstance(value, types.ModuleType) and getattr(value, name, None) is cls:
                return f"{alias}.{name}"
        top = module.partition(".")[0]
        if top not in self.scope and self._leads_from(sys.modules.get(top), module, name, cls):
            return f"{module}.{name}"
        alias = name.replace(".", "_")
        self.extra[alias] = cls
        return alias

    def _leads(self, name: str, cls: Any) -> bool:
        import builtins

        first, *rest = name.split(".")
        found = self.scope.get(first, getattr(builtins, first, None))
        for part in rest:
            found = getattr(found, part, None)
        return found is cls

    def _leads_from(self, found: Any, module: str, name: str, cls: Any) -> bool:
        for part in [*module.split(".")[1:], *name.split(".")]:
            found = getattr(found, part, None)
        return found is cls

    def _plain(self, hint: Any) -> Any:
        """Look through what says the same by another name."""
        while True:
            origin: Any = typing.get_origin(hint)
            if origin in (typing.Annotated, typing.Required, typing.NotRequired, typing.Final):
                hint = typing.get_args(hint)[0]
            elif origin in (typing.Union, types.UnionType):
                hint = next(a for a in typing.get_args(hint) if a is not type(None))
            elif type(hint).__module__ == "typing" and origin and not typing.get_args(hint):
                hint = origin
            elif isinstance(hint, typing.NewType):
                hint = hint.__supertype__
            elif isinstance(hint, typing.TypeVar):
                hint = hint.__bound__ or (hint.__constraints__ or (int,))[0]
            elif type(hint).__name__ == "TypeAliasType":
                hint = hint.__value__
            elif type(origin).__name__ == "TypeAliasType":
                hint = origin.__value__[typing.get_args(hint)]
            elif is_protocol(hint) and _int_will_do(hint):
                return int
            elif hint in (list, tuple, set, frozenset, *_LISTS, *_ITERATORS, *_SETS):
                return hint[int, ...] if hint is tuple else _of(hint, int)
            elif hint in _DICTS:
                return _of(hint, int, int)
            else:
                return hint

    def _container(self, hint: Any, sizes: Sequence[str], nested: bool = False) -> str | None:
        origin, inside = typing.get_origin(hint), typing.get_args(hint)
        size, deeper = sizes[0], sizes[1:] or sizes
        if origin in _LISTS:
            return self._list(inside[0], size, deeper, nested)
        if origin in _ITERATORS:
            return f"iter({self._list(inside[0], size, deeper, nested)})"
        if origin is tuple and inside[1:] == (Ellipsis,):
            return f"tuple({self._list(inside[0], size, deeper, nested)})"
        if origin in _SETS or hint in _SETS:
            kind = "frozenset" if origin is frozenset else "set"
            return self._set(kind, inside[0], size)
        if origin in _DICTS:
            return self._dict(origin, inside, size, deeper)
        if origin is collections.deque or hint is collections.deque:
            element = inside[0] if inside else int
            made = self._list(element, size, deeper, nested)
            return f"{self.spell(collections.deque)}({made})"
        return self._array(hint, origin, size)

    def _list(self, element: Any, size: str, deeper: Sequence[str], nested: bool) -> str:
        element = self._plain(element)
        if element is int:
            # Random orders of distinct whole numbers are the usual model; rows may repeat.
            return (
                f"rng.choices(range({size}), k={size})"
                if nested
                else f"rng.sample(range({size}), {size})"
            )
        return f"[{self.element(element, deeper)} for _ in range({size})]"

    def _set(self, kind: str, element: Any, size: str) -> str:
        if self._plain(element) is int:
            return f"{kind}(rng.sample(range(4 * {size}), {size}))"
        inside = f"{self.distinct(element, 'i', (size,))} for i in range({size})"
        return f"frozenset({inside})" if kind == "frozenset" else f"{{{inside}}}"

    def _dict(self, origin: Any, inside: Any, size: str, deeper: Sequence[str]) -> str:
        if origin is collections.Counter:
            inside = (inside[0], int)
        key = self.distinct(inside[0], "i", deeper)
        value = self.element(inside[1], deeper)
        made = f"{{{key}: {value} for i in rng.sample(range({size}), {size})}}"
        if origin is collections.defaultdict:
            default = self._plain(inside[1])
            factory = self.spell(typing.get_origin(default) or default)
            return f"{self.spell(origin)}({factory}, {made})"
        if origin in (collections.OrderedDict, collections.Counter):
            return f"{self.spell(origin)}({made})"
        return made

    def _array(self, hint: Any, origin: Any, size: str) -> str | None:
        place = _place(origin or hint)
        whole_numbers = f"rng.sample(range({size}), {size})"
        if place == ("array", "array"):
            code = "d" if float in typing.get_args(hint) else "q"
            numbers = f"[rng.random() for _ in range({size})]" if code == "d" else whole_numbers
            return f"{self.spell(origin or hint)}('{code}', {numbers})"
        if place == ("numpy", "ndarray"):
            made = self.spell(sys.modules["numpy"].array)
            is_whole = "int" in repr(typing.get_args(hint)[1:])
            numbers = whole_numbers if is_whole else f"[rng.random() for _ in range({size})]"
            return f"{made}({numbers})"
        return None

    def _tuple(self, make: Callable[[Any, Sequence[str]], str], hint: Any, sizes: Any) -> str:
        parts = [make(a, sizes) for a in typing.get_args(hint)]
        return f"({', '.join(parts)}{',' if len(parts) == 1 else ''})"

    def _scalar(self, hint: Any, below: str) -> str:
        """Write one value that has no length; whole numbers stay under the size."""
        if hint in (Any, object):
            raise CannotMake(f"{_name(hint)} says nothing of what it is")
        if hint is int:
            return f"rng.randrange({below})"
        if hint is float:
            return "rng.random()"
        if hint is bool:
            return "rng.random() < 0.5"
        if hint is complex:
            return "complex(rng.random(), rng.random())"
        if hint in (None, type(None)):
            return "None"
        if typing.get_origin(hint) is typing.Literal:
            return f"rng.choice({list(typing.get_args(hint))!r})"
        if isinstance(hint, type) and issubclass(hint, enum.Enum):
            return f"rng.choice(list({self.spell(hint)}))"
        known = _ELEMENTS.get(_place(hint))
        if known is None:
            raise CannotMake(f"{_name(hint)} is not among the types that can be made")
        return self._fill(known, hint)

    def _fill(self, text: str, hint: Any, i: str = "") -> str:
        delta = ""
        if "{timedelta}" in text:
            delta = self.spell(sys.modules["datetime"].timedelta)
        return text.format("" if hint is None else self.spell(hint), timedelta=delta, i=i)

    def _object(
        self, hint: Any, sizes: Sequence[str], make: Callable[[Any, Sequence[str]], str]
    ) -> str | None:
        """Write a call of a class with annotated fields, or of an annotated constructor."""
        if not isinstance(hint, type) or _place(hint) in _ELEMENTS or issubclass(hint, enum.Enum):
            return None
        fields = fields_of(hint)
        if fields is None:
            return None
        if hint in self._open:
            raise CannotMake(f"{_name(hint)} holds another of its own kind")
        self._open.append(hint)
        try:
            parts = [f"{name}={self._field(inside, sizes, make)}" for name, inside in fields]
        finally:
            self._open.pop()
        if typing.is_typeddict(hint):
            return (
                "{"
                + ", ".join(f"'{p.partition('=')[0]}': {p.partition('=')[2]}" for p in parts)
                + "}"
            )
        return f"{self.spell(hint)}({', '.join(parts)})"

    def _field(
        self, inside: Any, sizes: Sequence[str], make: Callable[[Any, Sequence[str]], str]
    ) -> str:
        try:
            return make(inside, sizes)
        except CannotMake:
            if type(None) in typing.get_args(inside):
                return "None"
            raise


def _of(hint: Any, *inside: Any) -> Any:
    if hint is collections.Counter:
        return hint[inside[0]]
    if hint in (collections.abc.Sized,):
        return list[int]
    if hint is collections.abc.Generator:
        return hint[inside[0], None, None]
    return hint[inside if len(inside) > 1 else inside[0]]


def _place(hint: Any) -> tuple[str, str]:
    return getattr(hint, "__module__", ""), getattr(hint, "__name__", "")


def _name(hint: Any) -> str:
    return hint.__name__ if isinstance(hint, type) else str(hint)


def _int_will_do(protocol: type) -> bool:
    own = [cls for cls in protocol.__mro__ if cls not in (typing.Protocol, typing.Generic, object)]
    wanted = {name for cls in own for name, value in vars(cls).items() if callable(value)}
    return all(hasattr(int, name) for name in wanted - _OF_EVERY_PROTOCOL)
