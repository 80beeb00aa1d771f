"""Fields: what a value of a class must be built with, by its type hints."""

from __future__ import annotations

import dataclasses
import inspect
import types
import typing
from typing import Any


def fields_of(hint: Any) -> list[tuple[str, Any]] | None:
    """Give the fields that a value must be built with.

    Parameters
    ----------
    hint : object
        A dataclass, NamedTuple, TypedDict or other class with an annotated constructor.

    Returns
    -------
    list of (str, type) or None
        Names and evaluated hints of those without a default; None if the hint has none to read.
    """
    if not isinstance(hint, type) or hint.__module__ == "builtins":
        return None
    if is_protocol(hint) or inspect.isabstract(hint):
        return None
    try:
        if dataclasses.is_dataclass(hint):
            known = typing.get_type_hints(hint, include_extras=True)
            return [
                (f.name, known[f.name])
                for f in dataclasses.fields(hint)
                if f.init
                and f.default is dataclasses.MISSING
                and f.default_factory is dataclasses.MISSING
            ]
        if typing.is_typeddict(hint):
            known = typing.get_type_hints(hint, include_extras=True)
            return [(k, v) for k, v in known.items() if k in hint.__required_keys__]  # type: ignore[attr-defined]
        if issubclass(hint, tuple) and hasattr(hint, "_field_defaults"):
            known = typing.get_type_hints(hint, include_extras=True)
            names = [f for f in hint._fields if f not in hint._field_defaults]  # type: ignore[attr-defined]
            return [(f, known[f]) for f in names]
        return _constructor(hint)
    except (NameError, KeyError, TypeError):
        return None


def is_protocol(hint: Any) -> bool:
    """Tell whether a hint is a class of `typing.Protocol`.

    Parameters
    ----------
    hint : object
        An evaluated type hint.
    """
    return isinstance(hint, type) and getattr(hint, "_is_protocol", False) is True


def _constructor(cls: type) -> list[tuple[str, Any]] | None:
    make = cls.__dict__.get("__init__") or getattr(cls, "__init__", None)
    if not isinstance(make, types.FunctionType):
        plain = [getattr(cls, name) is getattr(object, name) for name in ("__init__", "__new__")]
        return [] if all(plain) else None
    known = typing.get_type_hints(make, include_extras=True)
    fields = []
    for p in list(inspect.signature(make).parameters.values())[1:]:
        if p.kind in (p.VAR_POSITIONAL, p.VAR_KEYWORD) or p.default is not p.empty:
            continue
        if p.kind is p.POSITIONAL_ONLY:
            return None
        fields.append((p.name, known[p.name]))
    return fields
