"""A feed made from a subject's type hints, written as a ``--feed`` expression."""

from __future__ import annotations

import collections
import collections.abc
import inspect
import re
import types
import typing
from collections.abc import Mapping, Sequence
from typing import Any

from steplaw.errors import CallError
from steplaw.recipes import CannotMake, Recipes
from steplaw.subject import Subject
from steplaw.wording import listing, one_line

_START = "[... for _ in range({size})]"


def feed_text(subject: Subject, names: Sequence[str] = ("n",)) -> tuple[str, Mapping[str, Any]]:
    """Write the feed that a subject's type hints ask for.

    An ``int`` parameter is the size itself; a container has that many elements, with nested ones
    as long; parameters with defaults keep them. With several sizes, a parameter named as a size
    takes it, and the others take the sizes in turn.

    Parameters
    ----------
    subject : Subject
        Its hints are read from the Python function under its decorators.
    names : sequence of str
        The size names.

    Returns
    -------
    text : str
        A feed expression.
    extra : mapping of str to object
        Names in it that ``--feed`` would not find by itself.

    Raises
    ------
    CallError
        If some parameter cannot be made so; its hint shows a ``--feed`` to start from.
    """
    parameters = _required(subject)
    if not parameters:
        raise CallError(
            f"{subject.ref} has no parameter without a default, so nothing grows with "
            f"{listing(names)}",
            _start(subject, names, {}),
        )
    recipes = Recipes(vars(subject.module))
    made: dict[str, str] = {}
    missing: list[str] = []
    sizes = _sizes_in_turn(parameters, names)
    for parameter, hint in parameters:
        try:
            made[parameter.name] = _argument(parameter, hint, recipes, next(sizes))
        except CannotMake as cannot:
            missing.append(f"'{parameter.name}' ({cannot})")
    if missing:
        raise CallError(
            f"no feed can be made from the type hints of {subject.ref} for {listing(missing, 4)}",
            _start(subject, names, made),
        )
    text = _joined(parameters, made)
    idle = [name for name in names if name not in _words(text)]
    if idle:
        raise CallError(
            f"the type hints of {subject.ref} give no argument that grows with {listing(idle)}",
            _start(subject, names, made),
        )
    return text, recipes.extra


def hints_of(subject: Subject) -> dict[str, Any]:
    """Read the type hints of a subject, each by itself, so that one bad one spoils no other.

    Parameters
    ----------
    subject : Subject
        The subject.

    Returns
    -------
    dict of str to object
        By parameter; a hint that cannot be evaluated is left as its string.
    """
    code = subject.code
    # Names imported for type checkers only are absent when the program runs.
    fallback = {**vars(collections), **vars(collections.abc), **vars(typing)}
    scope = {**fallback, **code.__globals__}
    hints = {}
    for name, hint in code.__annotations__.items():
        holder = types.SimpleNamespace(__annotations__={name: hint})
        try:
            hints[name] = typing.get_type_hints(holder, scope, include_extras=True)[name]
        except Exception:
            hints[name] = hint
    return hints


def _required(subject: Subject) -> list[tuple[inspect.Parameter, Any]]:
    hints = hints_of(subject)
    owner = _owner(subject)
    found = []
    for index, p in enumerate(inspect.signature(subject.function).parameters.values()):
        if p.default is not p.empty or p.kind is p.VAR_KEYWORD:
            continue
        if p.kind is p.VAR_POSITIONAL and p.name not in hints:
            continue
        hint = hints.get(p.name, p.empty)
        if index == 0 and hint is p.empty and owner is not None:
            hint = owner
        found.append((p, hint))
    return found


def _owner(subject: Subject) -> type | None:
    """Give the class whose instance an unbound method takes first."""
    *path, name = subject.ref.name.split(".")
    owner: Any = subject.module
    for part in path:
        owner = getattr(owner, part)
    if not isinstance(owner, type):
        return None
    static = inspect.getattr_static(owner, name)
    return None if isinstance(static, staticmethod | classmethod) else owner


def _sizes_in_turn(
    parameters: list[tuple[inspect.Parameter, Any]], names: Sequence[str]
) -> typing.Iterator[Sequence[str]]:
    taken = {p.name for p, _ in parameters if p.name in names}
    free = [name for name in names if name not in taken] or list(names)
    turn = 0
    for parameter, hint in parameters:
        if parameter.name in names:
            yield (parameter.name,)
            continue
        # Only what has a length takes a size, and a table takes one for each of its axes.
        yield free[turn % len(free) :] + free[: turn % len(free)]
        turn += _axes(hint)


def _axes(hint: Any) -> int:
    if hint in (bool, float, complex, type(None), inspect.Parameter.empty):
        return 0
    inner = [a for a in typing.get_args(hint) if typing.get_origin(a) in (list, tuple)]
    return 2 if typing.get_origin(hint) is list and inner else 1


def _argument(
    parameter: inspect.Parameter, hint: Any, recipes: Recipes, sizes: Sequence[str]
) -> str:
    if hint is parameter.empty:
        raise CannotMake("it has no type hint")
    if isinstance(hint, str):
        raise CannotMake(f"{one_line(hint, 40)} is not defined at run time")
    if parameter.kind is parameter.VAR_POSITIONAL:
        return f"*{recipes.whole(list[hint], sizes)}"
    text = recipes.whole(hint, sizes)
    return f"{parameter.name}={text}" if parameter.kind is parameter.KEYWORD_ONLY else text


def _joined(parameters: list[tuple[inspect.Parameter, Any]], made: Mapping[str, str]) -> str:
    if len(parameters) == 1:
        parameter = parameters[0][0]
        if parameter.kind in (parameter.POSITIONAL_ONLY, parameter.POSITIONAL_OR_KEYWORD):
            return made[parameter.name]
    return f"args({', '.join(made[p.name] for p, _ in parameters)})"


def _words(text: str) -> set[str]:
    return set(re.findall(r"\w+", text))


def _start(subject: Subject, names: Sequence[str], made: Mapping[str, str]) -> str:
    """Show a ``--feed`` to start from, with the subject's own parameter names."""
    hints = hints_of(subject)
    parts = []
    for p in inspect.signature(subject.function).parameters.values():
        if p.kind in (p.VAR_KEYWORD, p.VAR_POSITIONAL):
            if p.kind is p.VAR_POSITIONAL:
                parts.append(f"*{_START.format(size=names[0])}")
            continue
        if p.default is not p.empty and parts:
            continue
        blank = _blank(hints.get(p.name, p.empty), names)
        text = made.get(p.name, blank).removeprefix(f"{p.name}=")
        parts.append(text if p.kind is p.POSITIONAL_ONLY else f"{p.name}={text}")
    if not parts:
        return "give a function that takes its input as an argument"
    return f"start from --feed '{_quoted(', '.join(parts))}'"


def _quoted(inside: str) -> str:
    text = f"args({inside})"
    return text.replace("'", '"') if '"' not in text else text.replace("'", "'\\''")


def _blank(hint: Any, names: Sequence[str]) -> str:
    origin = typing.get_origin(hint) or hint
    if origin is inspect.Parameter.empty:
        return _START.format(size=names[0])
    if isinstance(origin, type) and issubclass(origin, collections.abc.Mapping):
        return f"{{...: ... for _ in range({names[0]})}}"
    if isinstance(origin, type) and issubclass(origin, collections.abc.Iterable):
        return _START.format(size=names[0])
    return "..."
