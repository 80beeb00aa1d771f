"""Symbolic values: what a derivation knows of the things on the operand stack."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass, field, replace
from types import CodeType

from steplaw.flow.poly import Poly

#: Items exist at place ``HERE`` of a sequence where all polynomials of its extent are >= 0.
HERE = "here"
Extent = tuple[Poly, ...]
#: Ways for a test to come out, each a conjunction of ``... >= 0``; they exclude each other.
Ways = tuple[tuple[Poly, ...], ...]


@dataclass(frozen=True, slots=True)
class Num:
    """A whole number."""

    poly: Poly


@dataclass(frozen=True, slots=True)
class Const:
    """A constant that is no whole number."""

    value: object

    def __eq__(self, other: object) -> bool:
        return (
            isinstance(other, Const)
            and type(self.value) is type(other.value)
            and repr(self.value) == repr(other.value)
        )

    def __hash__(self) -> int:
        return hash(repr(self.value))


@dataclass(frozen=True, slots=True)
class Obj:
    """An object with an identity.

    Parameters
    ----------
    key : str
        Equal for the same object alone.
    text : str
        How the source writes it.
    kind : str
        ``param`` (an argument), ``path`` (an attribute or constant place of one), ``list``,
        ``tuple``, ``dict``, ``set``, ``range``, ``iterator``, ``generator`` (made here), or
        ``other``.
    alias : frozenset of str
        Keys of other objects that it may be.
    """

    key: str
    text: str
    kind: str
    alias: frozenset[str] = frozenset()


@dataclass(frozen=True, slots=True)
class Tup:
    """A tuple whose items are known."""

    items: tuple[Value, ...]


@dataclass(frozen=True, slots=True)
class Builtin:
    """A builtin that nothing has rebound."""

    name: str


@dataclass(frozen=True, slots=True)
class Method:
    """A method of an object, looked up and not yet called."""

    owner: Value
    name: str


@dataclass(frozen=True, slots=True)
class Function:
    """A Python function whose code is known."""

    code: CodeType
    closure: tuple[Value, ...] = ()
    defaults: tuple[Value, ...] = ()
    kwdefaults: bool = False


@dataclass(frozen=True, slots=True)
class Cell:
    """A variable shared with inner functions."""

    key: str


@dataclass(frozen=True, slots=True)
class Test:
    """A truth value: the ways in which it is true and in which it is false."""

    true: Ways
    false: Ways


@dataclass(frozen=True, slots=True)
class Slice:
    """The bounds of a slice."""

    start: Value
    stop: Value
    step: Value


@dataclass(frozen=True, slots=True)
class Null:
    """The empty place below a call's arguments."""


Value = Num | Const | Obj | Tup | Builtin | Method | Function | Cell | Test | Slice | Null
NULL = Null()
NONE = Const(None)


@dataclass(slots=True)
class State:
    """What is known at one place of the code.

    Parameters
    ----------
    stack : list of Value
        The operand stack of the frame.
    local : dict of int to Value
        Local variables, cells among them.
    cells : dict of str to Value
        What cells hold.
    extents : dict of str to Extent or None
        How many items objects have; None where a change made it unknown.
    known : frozenset of Poly
        What holds here (as ``... >= 0``) by the way that led here.
    loose : frozenset of str
        Objects that code out of sight may hold.
    epochs : dict of str to str
        Of arguments whose attributes may have changed: when they last did.
    """

    stack: list[Value] = field(default_factory=list)
    local: dict[int, Value] = field(default_factory=dict)
    cells: dict[str, Value] = field(default_factory=dict)
    extents: dict[str, Extent | None] = field(default_factory=dict)
    known: frozenset[Poly] = frozenset()
    loose: frozenset[str] = frozenset()
    epochs: dict[str, str] = field(default_factory=dict)

    def copy(self) -> State:
        """Give a copy that can be changed on its own."""
        return replace(
            self,
            stack=list(self.stack),
            local=dict(self.local),
            cells=dict(self.cells),
            extents=dict(self.extents),
            epochs=dict(self.epochs),
        )


@dataclass(slots=True)
class Items:
    """What is known of the items of an object.

    Parameters
    ----------
    at : callable or None
        Gives the item at a place, the place as a polynomial.
    over : frozenset of str
        Objects whose change would change an iteration that is under way.
    code : Function or None
        Of a generator: the code that gives the items.
    args : tuple of Value
        Arguments of that code.
    """

    at: Callable[[Poly], Value] | None = None
    over: frozenset[str] = frozenset()
    code: Function | None = None
    args: tuple[Value, ...] = ()
