"""Sizes of a run's arguments, read off values of built-in types alone."""

from __future__ import annotations

import inspect
from collections import deque
from collections.abc import Callable, Mapping, Sequence
from functools import lru_cache
from typing import Any

#: Types whose length is the number of items that going over them gives.
CONTAINERS = (list, tuple, dict, set, frozenset, str, bytes, bytearray, range, deque)


@lru_cache(maxsize=4)
def _signature(function: Callable[..., Any]) -> inspect.Signature:
    return inspect.signature(function)


def measured(
    function: Callable[..., Any], args: Sequence[Any], kwargs: Mapping[str, Any]
) -> dict[str, list[Any]]:
    """Give type and size of a call's arguments.

    Parameters
    ----------
    function : callable
        What is called.
    args, kwargs : sequence, mapping
        Its arguments.

    Returns
    -------
    dict of str to list
        By parameter: name of the type and the number, or the length. Values of other types, whose
        length could be anything's, are left out. Parameters that are one and the same container
        are left out as well.
    """
    try:
        bound = _signature(function).bind(*args, **kwargs)
    except (TypeError, ValueError):
        return {}
    bound.apply_defaults()
    found: dict[str, list[Any]] = {}
    places: dict[int, str] = {}
    for name, value in bound.arguments.items():
        kind = type(value)
        if kind is int:
            found[name] = ["int", value]
        elif kind in CONTAINERS:
            twin = places.setdefault(id(value), name)
            if twin == name or len(value) == 0:
                found[name] = [kind.__name__, len(value)]
            else:
                found.pop(twin, None)
    return found
