"""Functions whose frames do not show."""

from __future__ import annotations

from collections.abc import Callable
from types import FunctionType
from typing import ParamSpec, TypeVar

from steplaw.flow import isa

P = ParamSpec("P")
R = TypeVar("R")


def hidden(function: Callable[P, R]) -> Callable[P, R]:
    """Make a function whose frames do not show in tracebacks or in `sys._getframe`.

    The interpreter takes a frame that has not reached RESUME for one that is still being set up,
    and leaves it out; without RESUME, that is the whole of it.
    """
    assert isinstance(function, FunctionType)
    code = function.__code__
    raw = bytearray(code.co_code)
    for i in range(0, len(raw), 2):
        if raw[i] == isa.RESUME:
            raw[i], raw[i + 1] = isa.OPMAP["NOP"], 0
    function.__code__ = code.replace(co_code=bytes(raw))
    return function
