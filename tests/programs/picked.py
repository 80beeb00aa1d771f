"""Hand-picked calls of code that no one here wrote, and of a few awkward constructs of our own.

Each is a function of no arguments that does the same on every call and returns what it worked out.
"""

from __future__ import annotations

import importlib
import sys
from collections.abc import Callable
from typing import Any

Call = Callable[[], Any]
CALLS: dict[str, Call] = {}
#: Names of picked calls that need a package which may be absent.
NEEDS: dict[str, str] = {}


def picked(function: Call) -> Call:
    CALLS[function.__name__] = function
    return function


def needs(package: str) -> Callable[[Call], Call]:
    def picking(function: Call) -> Call:
        NEEDS[function.__name__] = package
        return picked(function)

    return picking


def _load() -> None:
    for part in ("data", "text", "own", "objects", "loops", "rare", "packages"):
        importlib.import_module(f"programs.picked_{part}")


def picked_call(name: str) -> Call:
    """Give the picked call of a name."""
    _load()
    return CALLS[name]


def names() -> list[str]:
    """Give the names of all picked calls."""
    _load()
    return list(CALLS)


def pure(module: str, *blocked: str) -> Any:
    """Import a module of the standard library without its C half."""
    marker = f"{module} in Python alone"
    if marker not in sys.modules:
        names = (module, *blocked)
        kept = {name: sys.modules.pop(name) for name in names if name in sys.modules}
        for name in blocked:
            sys.modules[name] = None  # type: ignore[assignment]
        try:
            sys.modules[marker] = importlib.import_module(module)
        finally:
            for name in names:
                sys.modules.pop(name, None)
            sys.modules.update(kept)
    return sys.modules[marker]


PORTS = ["Ardal", "Bremnes", "Corran", "Dunvik", "Eide", "Farsund"]
TEXT = (
    "The planning office keeps one table of sailings for each vessel. A booking names a sailing, "
    "a deck and the metres of lane that its lorry takes; cargo that waits is moved to the next "
    "sailing with room, and the transfer table gives what the detour costs. "
)
