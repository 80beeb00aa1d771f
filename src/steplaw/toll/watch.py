"""What is called beside an instruction: it looks at operands and charges for them."""

from __future__ import annotations

import operator
import types
from itertools import compress, repeat
from operator import length_hint
from sys import maxsize
from typing import Any

from steplaw.toll import arrays, kinds, operands
from steplaw.toll.call import Call
from steplaw.toll.hidden import hidden
from steplaw.toll.ledger import LEDGER, NOTHING, Place
from steplaw.toll.rules import QUIET, QUIET_SO_MANY, Quiet, call_of, look_up

_PYTHON = frozenset({types.FunctionType, types.MethodType})
_C_METHOD = types.BuiltinFunctionType
_NUMBERS = frozenset({int, float, complex, bool})
#: What `int` takes at constant cost: a float has 1024 bits at most.
_ROUNDED = frozenset({int, float, bool})
_ITERATED = "sequence.index(x): x not in sequence"


@hidden
def consider(function: Any, args: tuple[Any, ...], place: Place) -> bool:
    """Tell whether a call is to be made by `charged`; note it if it has no rule."""
    found = look_up(function, args)
    if found is None:
        LEDGER.pass_over(place, _name_of(function), [kinds.size(x) for x in args])
        return False
    if isinstance(found, Quiet):
        if place.name:
            if type(function) in _PYTHON:
                place.quiet = type(function)
        elif found is QUIET or (found is QUIET_SO_MANY and _holds_nothing(function)):
            place.settle(function)
        return False
    if function is int and len(args) == 1 and type(args[0]) in _ROUNDED:
        place.other, place.calm = function, type(args[0])
        return False
    if place.name:
        place.known = _C_METHOD if type(function) is _C_METHOD else NOTHING
    elif found[1] is None and found[3]:
        place.known, place.rule = function, found[0]
        return True
    place.found = found, function
    return True


def _holds_nothing(function: Any) -> bool:
    """Tell whether a callable may be kept: that keeps no object of the program alive."""
    owner = getattr(function, "__self__", None) if type(function) is _C_METHOD else None
    return owner is None or type(owner) is types.ModuleType


@hidden
def charged(
    args: tuple[Any, ...], function: Any, place: Place, names: tuple[str, ...] | None
) -> Any:
    """Make a call that has a rule, and charge it."""
    kwargs: dict[str, Any] = {}
    if names:
        kwargs = dict(zip(names, args[-len(names) :], strict=True))
        args = args[: -len(names)]
    elif function is place.known:
        call = Call(function, None, args, kwargs, True)
        rule = place.rule
        try:
            return rule.charge(call)
        finally:
            LEDGER.charge(place, rule.operation, call.visits, call.exact)
    return _by_rule(function, args, kwargs, place)


@hidden
def consider_spread(function: Any, args: Any, place: Place) -> bool:
    """Tell whether a call with arguments spread out is to be made by `spread`."""
    if type(args) is not tuple and type(args) is not list:
        return False
    found = look_up(function, tuple(args))
    if found is QUIET_SO_MANY:
        return False
    return consider(function, tuple(args), place)


@hidden
def spread(args: Any, kwargs: dict[str, Any] | None, function: Any, place: Place) -> Any:
    """Make a call with arguments spread out, and charge it."""
    return _by_rule(function, tuple(args), kwargs or {}, place)


@hidden
def _by_rule(function: Any, args: tuple[Any, ...], kwargs: dict[str, Any], place: Place) -> Any:
    known = place.found
    place.found = None
    # Another thread may have come by meanwhile.
    if known is not None and known[1] is function and not kwargs:
        found = known[0]
    else:
        found = look_up(function, args)
    if found is None or isinstance(found, Quiet):
        if found is None:
            LEDGER.pass_over(place, _name_of(function), [kinds.size(x) for x in args])
        return function(*args, **kwargs)
    call = call_of(found, function, kwargs)
    rule = found[0]
    try:
        return rule.charge(call)
    finally:
        LEDGER.charge(place, rule.operation, call.visits, call.exact)


def _name_of(function: Any) -> str:
    kind = type(function)
    name = function.__name__ if kind in _NAMED or type in kinds.bases(kind) else kind.__name__
    owner = getattr(function, "__self__", None) if kind in kinds.BUILTIN else None
    if owner is not None and type(owner) is not types.ModuleType:
        return f"{type(owner).__name__}.{name}"
    if owner is not None and owner.__name__ != "builtins":
        return f"{owner.__name__}.{name}"
    return str(name)


_NAMED = kinds.BUILTIN | {types.MethodDescriptorType, types.MethodWrapperType}


@hidden
def receive(owner: Any, place: Place) -> None:
    """Look at what a method is loaded from, whose name has no rule."""
    if type(owner) is types.ModuleType:
        value = vars(owner).get(place.name)
        found = look_up(value, ())
        if found is None:
            LEDGER.pass_over(place, f"{owner.__name__}.{place.name}", [])
            return
        place.passed()
        return
    holder = owner if type in kinds.bases(type(owner)) else type(owner)
    value = next(
        (vars(base)[place.name] for base in kinds.bases(holder) if place.name in vars(base)), None
    )
    if type(value) is types.MethodDescriptorType:
        size = arrays.elements(owner)
        if size:
            LEDGER.charge(place, "array method", size, False)
            return
        if look_up(value, (owner,)) is None:
            name = f"{holder.__name__}.{place.name}"
            LEDGER.pass_over(place, name, [kinds.size(owner)])
            return
    place.passed()


@hidden
def contains(item: Any, container: Any, place: Place) -> bool:
    """Look for an item and charge the place where it is found; nothing is compared twice."""
    kind = type(container)
    if kind in operands.SCANNED:
        return _scan(item, container, place)
    if kind in operands.TEXTS:
        size = kinds.length(container) or 0
        LEDGER.charge(place, f"in {kind.__name__}", size, False)
    elif arrays.elements(container):
        LEDGER.charge(place, "in array", container.size, False)
    else:
        place.settle(kind)
    found: bool = operator.contains(container, item)
    return found is bool(place.argument == 0)


@hidden
def _scan(item: Any, container: Any, place: Place) -> bool:
    kind = type(container)
    probe = repeat(True, maxsize)
    size = kinds.length(container)
    searched = compress(container, probe) if size is None else container
    visits, found = size or 0, False
    try:
        # The same comparisons in the same order as `in` makes them (CPython's list_contains and
        # _PySequence_IterSearch), with the place at the end.
        visits = operator.indexOf(searched, item) + 1
        found = True
    except ValueError as error:
        if error.args != (_ITERATED,):
            raise
        visits = maxsize - length_hint(probe) if size is None else size
    finally:
        LEDGER.charge(place, f"in {kind.__name__}", visits)
    return found is bool(place.argument == 0)


@hidden
def binary(left: Any, right: Any, place: Place) -> None:
    """Charge an operator by its operands."""
    kind = type(left)
    if kind is int and type(right) is int:
        charge = operands.whole(place.argument, left, right)
        if charge is not None:
            _met_long(place)
            LEDGER.charge(place, *charge)
        elif operands.makes_long(place.argument):
            place.whole = not place.long
        elif not LEDGER.long_met:
            LEDGER.short.append(place)
            place.settle(int)
        return
    if kind is int and type(right) in _NUMBERS:
        if operands.makes_long(place.argument):
            place.whole = not place.long
        elif not LEDGER.long_met:
            LEDGER.short.append(place)
            place.settle(int)
        return
    charge = operands.binary(place.argument, left, right)
    if charge is not None:
        LEDGER.charge(place, *charge)
    elif kind is not int:
        place.settle(kind)


def _met_long(place: Place) -> None:
    """Look at whole numbers everywhere from now on: some have got long."""
    place.long, place.whole = True, False
    if not LEDGER.long_met:
        LEDGER.long_met = True
        for other in LEDGER.short:
            other.quiet = other.other = NOTHING
        LEDGER.short.clear()


@hidden
def result(value: Any, place: Place) -> None:
    """Charge an operator by its result, where its operands were taken for short whole numbers."""
    kind = type(value)
    if kind is int:
        long = kinds.digits(value)
        if long > kinds.SHORT_DIGITS:
            _met_long(place)
        if long > 2 * kinds.SHORT_DIGITS:
            # No product of short numbers is as long: an operand came from elsewhere, already long.
            LEDGER.charge(place, f"long {operands.sign(place.argument)}", long * long, False)
        return
    place.whole = False
    if kind in kinds.SEQUENCES:
        name = f"{kind.__name__} {operands.sign(place.argument)}"
        LEDGER.charge(place, name, len(value), place.argument < operands.IN_PLACE)
    elif kinds.length(value) is not None or arrays.elements(value):
        size = arrays.elements(value) or kinds.length(value) or 0
        LEDGER.pass_over(place, f"{kind.__name__} {operands.sign(place.argument)}", [size])


@hidden
def compare(left: Any, right: Any, place: Place) -> None:
    """Charge a comparison of sequences, at most."""
    kind = type(left)
    charge = operands.comparison(place.argument, left, right)
    if charge is not None:
        LEDGER.charge(place, *charge)
    elif kind in kinds.SCALARS or (kinds.length(left) is None and not arrays.elements(left)):
        place.settle(kind)


@hidden
def part(container: Any, start: Any, stop: Any, step: Any, place: Place) -> None:
    """Charge a slice that is read."""
    if type(container) in kinds.COPIED_BY_SLICES:
        visits = operands.slice_length(len(container), start, stop, step)
        if visits is None:
            LEDGER.charge(place, "slice", len(container), False)
        else:
            LEDGER.charge(place, "slice", visits)
        return
    size = kinds.length(container)
    if size is not None and type(container) is not memoryview and type(container) is not range:
        LEDGER.charge(place, "slice", size, False)


@hidden
def put(values: Any, container: Any, start: Any, stop: Any, step: Any, place: Place) -> None:
    """Charge a slice that is assigned: what is written, and what moves behind it."""
    charge = operands.slice_written(values, container, start, stop, step)
    if charge is not None:
        LEDGER.charge(place, "slice assigned", *charge)


@hidden
def delete(container: Any, key: Any, place: Place) -> None:
    """Charge what moves up behind a deleted item or slice."""
    charge = operands.deleted(container, key)
    if charge is not None:
        LEDGER.charge(place, "deleted", *charge)
    elif kinds.length(container) is None or type(container) is dict:
        place.settle(type(container))


@hidden
def items(value: Any, place: Place) -> None:
    """Charge the items of an operand that is spread out, added or copied."""
    size = kinds.length(value)
    if size:
        LEDGER.charge(place, place.name, size)


@hidden
def texts(values: tuple[Any, ...], place: Place) -> None:
    """Charge the parts of an f-string."""
    LEDGER.charge(place, "f-string", sum([len(x) for x in values]))
