"""Callables: the Python function under one, what kind it is, and what a module has of them."""

from __future__ import annotations

import functools
import inspect
import sys
from types import FunctionType, ModuleType
from typing import Literal

Kind = Literal["function", "generator", "coroutine", "async generator"]


def underlying(function: object) -> FunctionType | None:
    """Find the Python function under decorators, partials and bound methods.

    Parameters
    ----------
    function : object
        A callable.

    Returns
    -------
    function or None
        None where there is no Python bytecode under it.
    """
    seen: set[int] = set()
    while id(function) not in seen:
        seen.add(id(function))
        if isinstance(function, functools.partial):
            function = function.func
        elif isinstance(function, staticmethod | classmethod) or inspect.ismethod(function):
            function = function.__func__
        elif not isinstance(function, type) and hasattr(function, "__wrapped__"):
            function = function.__wrapped__
        elif isinstance(function, FunctionType):
            return function
        elif not isinstance(function, type) and callable(function):
            function = type(function).__call__
    return None


def kind_of(code: FunctionType) -> Kind:
    """Tell what a call of a Python function gives.

    Parameters
    ----------
    code : function
        The function under any decorators.
    """
    if inspect.isasyncgenfunction(code):
        return "async generator"
    if inspect.iscoroutinefunction(code):
        return "coroutine"
    return "generator" if inspect.isgeneratorfunction(code) else "function"


def methods_of(cls: type) -> list[str]:
    """Name the methods that a class defines in Python, plain names first.

    Parameters
    ----------
    cls : type
        The class.
    """
    home = getattr(sys.modules.get(cls.__module__), "__file__", None)
    names = []
    for name, value in vars(cls).items():
        code = underlying(value.fget if isinstance(value, property) else value)
        # Those that dataclasses and named tuples get are compiled from no file of the user's.
        if code is not None and code.__code__.co_filename == home:
            names.append(name)
    return sorted(names, key=lambda name: name.startswith("_"))


def functions_in(module: ModuleType) -> list[str]:
    """Name the functions and methods that a module defines, plain names first.

    Parameters
    ----------
    module : module
        The module.
    """
    functions, methods = [], []
    for name, value in vars(module).items():
        if isinstance(value, type) and value.__module__ == module.__name__:
            methods += [f"{name}.{method}" for method in methods_of(value)]
        elif not isinstance(value, type | ModuleType) and callable(value):
            code = underlying(value)
            if code is not None and code.__module__ == module.__name__:
                functions.append(name)
    return sorted(functions + methods, key=lambda name: "_" in (name[0], name.split(".")[-1][0]))
