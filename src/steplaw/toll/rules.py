"""Which rule a C function has."""

from __future__ import annotations

import functools
import types
from typing import Any

from steplaw.toll import (
    arrays,
    builtin,
    kinds,
    mappings,
    numbers,
    ordering,
    quiet,
    sequences,
    texts,
)
from steplaw.toll.call import Call, Rule

RULES: dict[Any, Rule] = {
    **sequences.RULES,
    **mappings.RULES,
    **texts.RULES,
    **numbers.RULES,
    **ordering.RULES,
    **builtin.RULES,
}
#: Methods that have a rule for some type: calls of these names are always looked at.
NAMES = frozenset(key[1] for key in RULES if isinstance(key, tuple)) | frozenset(
    name
    for key in RULES
    if not isinstance(key, tuple)
    for name in [getattr(key, "__name__", "")]
    if getattr(key, "__module__", "builtins") != "builtins"
)
#: Functions kept under a second name by their module.
NAMES |= {"bisect", "insort"}
_BY_ID = {id(key): rule for key, rule in RULES.items() if not isinstance(key, tuple)}
_BY_METHOD = {key: rule for key, rule in RULES.items() if isinstance(key, tuple)}


class Quiet:
    """The answer for what has nothing to charge."""


#: With any arguments; with so many of them; with these alone.
QUIET, QUIET_SO_MANY, QUIET_NOW = Quiet(), Quiet(), Quiet()
Found = tuple[Rule, Any, tuple[Any, ...], bool]


def look_up(function: Any, args: tuple[Any, ...]) -> Found | Quiet | None:
    """Give the rule of a callable.

    Parameters
    ----------
    function : object
        What is called.
    args : tuple
        Its positional arguments.

    Returns
    -------
    tuple, Quiet or None
        Rule, owner, arguments without it, and whether the function holds it; `Quiet` where there
        is nothing to charge; None for a C function without a rule.
    """
    kind = type(function)
    if kind is types.FunctionType or kind is types.MethodType:
        return QUIET
    if kind in kinds.BUILTIN:
        return _builtin(function, args)
    if kind is types.MethodDescriptorType or kind is types.WrapperDescriptorType:
        if not args:
            return QUIET_NOW
        found = _method(function.__objclass__, function.__name__)
        return (found, args[0], args[1:], False) if isinstance(found, Rule) else found
    if kind is types.MethodWrapperType:
        found = _method(type(function.__self__), function.__name__)
        return (found, function.__self__, args, True) if isinstance(found, Rule) else found
    if type in kinds.bases(kind):
        return _class(function, args)
    if kind is functools.partial:
        inner = look_up(function.func, (*function.args, *args))
        return inner if inner is QUIET or inner is None else QUIET_NOW
    if "__call__" in vars(kind) and type(vars(kind)["__call__"]) is types.FunctionType:
        return QUIET
    return _instance(kind)


def _builtin(function: Any, args: tuple[Any, ...]) -> Found | Quiet | None:
    rule = _BY_ID.get(id(function))
    if rule is not None:
        return (rule, None, args, True) if _fits(rule, args) else QUIET_SO_MANY
    if id(function) in quiet.FUNCTIONS:
        return QUIET
    owner = function.__self__
    if owner is None or type(owner) is types.ModuleType:
        return None
    rule = _BY_METHOD.get((type(owner), function.__name__))
    if rule is not None:
        return (rule, owner, args, True) if _fits(rule, args) else QUIET_SO_MANY
    holder = owner if type in kinds.bases(type(owner)) else type(owner)
    found = _method(holder, function.__name__)
    if isinstance(found, Rule):
        return (found, owner, args, True) if _fits(found, args) else QUIET_NOW
    if found is None and type(owner).__name__ == "ndarray":
        return arrays.METHOD, owner, args, True
    return found


def _fits(rule: Rule, args: tuple[Any, ...]) -> bool:
    return rule.least <= len(args) <= rule.most


def _method(holder: type, name: str) -> Rule | Quiet | None:
    for base in kinds.bases(holder):
        rule = _BY_METHOD.get((base, name))
        if rule is not None:
            return rule
        if (base, name) in quiet.METHODS:
            return QUIET_NOW
    return QUIET_NOW if name in quiet.METHOD_NAMES else None


def _class(function: type, args: tuple[Any, ...]) -> Found | Quiet | None:
    rule = _BY_ID.get(id(function))
    if rule is not None:
        return (rule, None, args, True) if _fits(rule, args) else QUIET_SO_MANY
    if id(function) in quiet.FUNCTIONS or BaseException in kinds.bases(function):
        return QUIET
    for base in kinds.bases(function):
        made = vars(base)
        if type(made.get("__init__")) is types.FunctionType or type(made.get("__new__")) in (
            types.FunctionType,
            staticmethod,
        ):
            return QUIET
        if id(base) in _BY_ID and base is not function:
            rule = _BY_ID[id(base)]
            return (rule, None, args, True) if _fits(rule, args) else QUIET_SO_MANY
        if base is object:
            return QUIET if function.__module__ not in ("numpy", "builtins") else None
    return None


def _instance(kind: type) -> Found | Quiet | None:
    for base in kinds.bases(kind):
        if type(vars(base).get("__call__")) is types.FunctionType:
            return QUIET
    return None


def call_of(found: Found, function: Any, kwargs: dict[str, Any]) -> Call:
    """Give the call that a rule makes."""
    _, owner, args, bound = found
    return Call(function, owner, args, kwargs, bound)
