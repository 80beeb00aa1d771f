"""References: where a subject is, as people write it and as another process can import it."""

from __future__ import annotations

import functools
import inspect
import re
import sys
from dataclasses import dataclass
from pathlib import Path
from types import FunctionType, ModuleType
from typing import Any

from steplaw.callables import methods_of, underlying
from steplaw.errors import CallError
from steplaw.loading import module_name_of
from steplaw.wording import listing, with_article

FORMS = "write path/to/file.py:name, package.module:name or ...:Class.method"


@dataclass(frozen=True, slots=True)
class SubjectRef:
    """Where a subject is and what it is called there.

    Parameters
    ----------
    place : str
        Path of a source file, or dotted name of a module.
    name : str
        Qualified name in it, such as ``trios`` or ``Fleet.assign``.
    is_file : bool
        Whether `place` is a path.
    """

    place: str
    name: str
    is_file: bool

    def __str__(self) -> str:
        return f"{self.place}:{self.name}"


def parse(text: str) -> SubjectRef:
    """Read a subject as it is written on the command line.

    Parameters
    ----------
    text : str
        ``path/to/file.py:name``, ``package.module:name``, or either with ``Class.method``.

    Raises
    ------
    CallError
        If it has none of these forms.
    """
    place, colon, name = text.strip().rpartition(":")
    if not colon or not place:
        raise CallError(f"'{text}' names no function", _form_hint(name if colon == "" else place))
    if not name:
        raise CallError(f"'{text}' names no function", _form_hint(place))
    is_file = place.endswith(".py") or "/" in place or "\\" in place or Path(place).is_file()
    if "<locals>" in name or "<lambda>" in name:
        raise CallError(
            f"'{name}' is made while another function runs, so it cannot be called from outside",
            "name the function that makes it, or move it to the top of its file",
        )
    if not all(part.isidentifier() for part in name.split(".")):
        raise CallError(f"'{name}' is not the name of a function", FORMS)
    if not is_file and not all(part.isidentifier() for part in place.split(".")):
        raise CallError(f"'{place}' is neither a path to a .py file nor a module's name", FORMS)
    return SubjectRef(place, name, is_file)


def _form_hint(place: str) -> str:
    if place.endswith(".py") and Path(place).is_file():
        names = _names_in_source(place)
        if names:
            return f"add one of its functions, as in {place}:{names[0]} (it has {listing(names)})"
    return FORMS


def _names_in_source(place: str) -> list[str]:
    source = Path(place).read_text(encoding="utf-8", errors="replace")
    return re.findall(r"^(?:async )?def (\w+)", source, re.M)


def ref_of(function: Any) -> tuple[SubjectRef, ModuleType]:
    """Find the name by which another process can import a function at hand.

    Parameters
    ----------
    function : callable
        The function.

    Returns
    -------
    ref : SubjectRef
        By file where that leads to the same module, otherwise by module.
    module : module
        The module it was found in here.

    Raises
    ------
    CallError
        If there is no such name, or the function has no Python bytecode.
    """
    code = _code_of(function)
    for home in _homes(function, code):
        module = sys.modules.get(home)
        name = _name_in(module, function) if module is not None else None
        if module is not None and name is not None:
            return _ref_in(module, name), module
    raise _out_of_reach(function, code)


def _code_of(function: Any) -> FunctionType:
    if isinstance(function, type):
        name = function.__name__
        methods = methods_of(function)
        hint = f"give one of its methods: {name}.{methods[0]}" if methods else "give a function"
        raise CallError(f"{name} is a class, not a function", hint)
    if not callable(function):
        raise CallError(f"{with_article(type(function).__name__)} is not a function")
    code = underlying(function)
    if code is None:
        raise not_in_python(getattr(function, "__name__", type(function).__name__))
    if inspect.ismethod(function) and not isinstance(function.__self__, type):
        cls = type(function.__self__).__name__
        raise CallError(
            f"{cls}.{function.__name__} is bound to one object, which another process has not",
            f"give {cls}.{function.__name__}, and the object as the feed's first argument",
        )
    return code


def not_in_python(name: object) -> CallError:
    """Say that a callable has no bytecode.

    Parameters
    ----------
    name : object
        What it is called.
    """
    return CallError(
        f"{name} is written in C or another compiled language: it has no Python bytecode to count",
        "name a Python function that calls it",
    )


def _homes(function: Any, code: FunctionType) -> list[str]:
    """Name the modules that a callable may be kept in, the likeliest first."""
    owner = function.__self__ if inspect.ismethod(function) else function
    homes = [getattr(owner, "__module__", None), code.__module__, "__main__"]
    return [home for home in homes if isinstance(home, str)]


def _name_in(module: ModuleType, function: Any) -> str | None:
    if inspect.ismethod(function):
        owner: Any = function.__self__
        qualified = f"{owner.__qualname__}.{function.__name__}"
    else:
        qualified = str(getattr(function, "__qualname__", "<none>"))
    if "<" not in qualified:
        found: Any = module
        for part in qualified.split("."):
            found = getattr(found, part, None)
        # A class method is bound anew at each look-up: equal, but not the same object.
        if found is function or (inspect.ismethod(function) and found == function):
            return qualified
    return next((n for n, value in vars(module).items() if value is function), None)


def _ref_in(module: ModuleType, name: str) -> SubjectRef:
    file = getattr(module, "__file__", None)
    is_source = file is not None and file.endswith(".py") and Path(file).is_file()
    if module.__name__ == "__main__" and not is_source:
        raise CallError(
            f"{name} is defined at the prompt or in a notebook, where no other process "
            "can import it",
            "put it in a .py file and import it from there",
        )
    if is_source:
        path = Path(str(file)).resolve()
        # A package without __init__.py has dots in its name that its path does not show.
        if "." not in module.__name__ or module_name_of(path)[1] == module.__name__:
            return SubjectRef(str(path), name, True)
    return SubjectRef(module.__name__, name, False)


def _out_of_reach(function: Any, code: FunctionType) -> CallError:
    name = str(getattr(function, "__qualname__", code.__qualname__))
    if isinstance(function, functools.partial):
        why, what = "a partial without a name of its own", "give it a name"
    elif "<lambda>" in name:
        why, what = "a lambda without a name of its own", "write it as a def"
    elif "<locals>" in name:
        why, what = "made while another function runs", "move it"
    else:
        why, what = "not what its name leads to in its module", "give it a name of its own"
    return CallError(
        f"{name} is {why}, so no other process can import it", f"{what} at the top of a .py file"
    )
