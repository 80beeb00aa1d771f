"""Probes in all Python code of this process, and their removal.

Functions that exist are given probed code; code that comes later (imports, class bodies, `exec`,
`eval`) passes through the builtins `exec` and `eval`, which importers use as well.
"""

from __future__ import annotations

import builtins
import gc
import sys
from types import CodeType, FunctionType
from typing import Any

from steplaw.tally.registry import Registry
from steplaw.toll.hidden import hidden

_COMPILER_FLAGS = 0x1FE0000  # CO_FUTURE_*: what exec and eval take over from their caller
_OWN = "steplaw"
_real_exec = builtins.exec
_real_eval = builtins.eval
_real_compile = builtins.compile


class Installation:
    """Probes in the process, from `enter` to `leave`.

    Parameters
    ----------
    registry : Registry
        Keeps the probed code; one for the life of the process.
    """

    def __init__(self, registry: Registry) -> None:
        self.registry = registry

    def enter(self) -> None:
        """Give every Python function but steplaw's own its probed code."""
        rewrite = self.registry.rewrite
        for function in _functions():
            if not _is_own(function):
                function.__code__ = rewrite(function.__code__)
        builtins.exec = hidden(_make_exec(self.registry))
        builtins.eval = hidden(_make_eval(self.registry))

    def leave(self) -> None:
        """Give every function its original code back."""
        builtins.exec = _real_exec
        builtins.eval = _real_eval
        for function in _functions():
            original = self.registry.original(function.__code__)
            if original is not function.__code__:
                function.__code__ = original


def _functions() -> list[FunctionType]:
    return [x for x in gc.get_objects() if type(x) is FunctionType]


def _is_own(function: FunctionType) -> bool:
    name = function.__globals__.get("__name__")
    return type(name) is str and (name == _OWN or name.startswith("steplaw."))


def _make_exec(registry: Registry) -> Any:
    rewrite, frame, compile_, run = (
        registry.rewrite,
        sys._getframe,
        _real_compile,
        _real_exec,
    )
    missing: Any = None

    def exec(source: Any, globals: Any = missing, locals: Any = missing, /, **closure: Any) -> None:
        caller = frame(1)
        if globals is None:
            globals = caller.f_globals
            if locals is None:
                locals = caller.f_locals
        elif locals is None:
            locals = globals
        if isinstance(source, CodeType):
            if caller.f_globals.get("__name__", "").split(".")[0] != "steplaw":
                source = rewrite(source)
        elif isinstance(source, (str, bytes, bytearray, memoryview)):
            flags = caller.f_code.co_flags & _COMPILER_FLAGS
            source = rewrite(compile_(source, "<string>", "exec", flags, True))
        run(source, globals, locals, **closure)

    return exec


def _make_eval(registry: Registry) -> Any:
    rewrite, frame, compile_, run = (
        registry.rewrite,
        sys._getframe,
        _real_compile,
        _real_eval,
    )

    def eval(source: Any, globals: Any = None, locals: Any = None, /) -> Any:
        caller = frame(1)
        if globals is None:
            globals = caller.f_globals
            if locals is None:
                locals = caller.f_locals
        elif locals is None:
            locals = globals
        if isinstance(source, CodeType):
            source = rewrite(source)
        elif isinstance(source, (str, bytes, bytearray, memoryview)):
            flags = caller.f_code.co_flags & _COMPILER_FLAGS
            if isinstance(source, str):
                source = source.lstrip(" \t")
            else:
                source = bytes(source).lstrip(b" \t")
            source = rewrite(compile_(source, "<string>", "eval", flags, True))
        return run(source, globals, locals)

    return eval
