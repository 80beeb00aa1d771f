"""Feed expressions: one line of Python in the size names and a seeded generator."""

from __future__ import annotations

import builtins
import importlib
import importlib.util
import itertools
import math
import random
import symtable
import sys
from collections.abc import Callable, Iterable, Mapping, Sequence
from dataclasses import dataclass
from types import ModuleType
from typing import Any

from steplaw.errors import CallError
from steplaw.subject import Subject
from steplaw.wording import close_to, describe, listing, one_line

Build = Callable[[Mapping[str, int], random.Random], Any]
# Short names that many give these modules (common practice).
SHORT_FOR = {"np": "numpy", "nx": "networkx", "pd": "pandas"}
_FIXED = ("rng", "args")


@dataclass(frozen=True, slots=True)
class Args:
    """Several arguments, as `args` gives them.

    Parameters
    ----------
    args, kwargs : tuple, dict
        Positional and keyword arguments.
    """

    args: tuple[Any, ...]
    kwargs: dict[str, Any]


def args(*a: Any, **k: Any) -> Args:
    """Give a subject several arguments from one feed.

    Returns
    -------
    Args
        The value for a feed to give.

    Examples
    --------
    >>> args([1, 2], limit=3)
    Args(args=([1, 2],), kwargs={'limit': 3})
    """
    return Args(a, k)


def check(text: str, option: str) -> None:
    """Make sure that a text is one Python expression.

    Parameters
    ----------
    text : str
        What was typed.
    option : str
        The option it was typed after.

    Raises
    ------
    CallError
        If it is not, with the place where it goes wrong.
    """
    try:
        compile(text, option, "eval")
    except SyntaxError as error:
        raise _not_an_expression(text, option, error) from None
    except (ValueError, RecursionError, MemoryError) as error:
        raise CallError(f"{option} is not an expression: {describe(error)}") from None


def compiled(
    text: str,
    subject: Subject,
    names: Sequence[str],
    extra: Mapping[str, Any],
    option: str,
) -> Build:
    """Compile an expression with the names it may use.

    Size names, ``rng`` and ``args`` come first; then the globals of the subject's module, builtins,
    the names of `itertools` and `math`, and any module that can be imported.

    Parameters
    ----------
    text : str
        The expression.
    subject : Subject
        Whose module's globals it sees.
    names : sequence of str
        The size names.
    extra : mapping of str to object
        Further names.
    option : str
        The option it was typed after; ``--every`` has no ``rng``.

    Returns
    -------
    callable
        Takes the size and the generator and gives the expression's value.

    Raises
    ------
    CallError
        If a name is not defined, or a size is not used.
    """
    code = compile(text, f"<{option}>", "eval")
    scope: dict[str, Any] = {"args": args, **extra}
    free = _free_names(text)
    must_use(free, names, f"{option} {one_line(text)}")
    given = {*names, *(("rng",) if option != "--every" else ()), *scope}
    for name in sorted(free - given):
        scope[name] = _look_up(name, subject, names, text, option)

    def build(at: Mapping[str, int], rng: random.Random) -> Any:
        return eval(code, {**scope, **at, "rng": rng})

    return build


def must_use(used: Iterable[str], names: Sequence[str], what: str) -> None:
    """Make sure that what builds an input uses every size.

    Parameters
    ----------
    used : iterable of str
        Names in use.
    names : sequence of str
        The size names.
    what : str
        What builds the input, for the message.

    Raises
    ------
    CallError
        If a size has no part in the input, which would then never grow by it.
    """
    idle = [name for name in names if name not in set(used)]
    if idle:
        raise CallError(
            f"{what} does not use the size {listing(idle)}, so its input would never grow by it",
            f"as in --feed '[rng.random() for _ in range({idle[0]})]'",
        )


def _free_names(text: str) -> set[str]:
    """Name the variables that an expression takes from outside."""
    tables = [symtable.symtable(text, "<feed>", "eval")]
    free: set[str] = set()
    made = {s.get_name() for s in tables[0].get_symbols() if s.is_assigned()}
    while tables:
        table = tables.pop()
        tables += table.get_children()
        inside = table.get_type() == "function"
        for symbol in table.get_symbols():
            if symbol.is_referenced() and (symbol.is_global() or not inside):
                free.add(symbol.get_name())
    return free - made


def _look_up(name: str, subject: Subject, names: Sequence[str], text: str, option: str) -> Any:
    for place in (vars(subject.module), vars(builtins), vars(itertools), vars(math)):
        if name in place:
            return place[name]
    module = _module(name)
    if module is not None:
        return module
    raise _undefined(name, subject, names, text, option)


def _module(name: str) -> ModuleType | None:
    if name in sys.modules:
        return sys.modules[name]
    if importlib.util.find_spec(name) is None:
        return None
    try:
        return importlib.import_module(name)
    except Exception as error:
        raise CallError(f"the module '{name}' in the feed raises {describe(error)}") from None


def _undefined(
    name: str, subject: Subject, names: Sequence[str], text: str, option: str
) -> CallError:
    message = f"{option} uses '{name}', which is not defined: {one_line(text)}"
    if name == "rng":
        return CallError(message, "--every lists all inputs of a size, so it draws nothing")
    known = {*names, *_FIXED, *vars(subject.module), *vars(builtins), *vars(itertools), *vars(math)}
    close = close_to(name, [k for k in known if not k.startswith("_")])
    if name in SHORT_FOR:
        return CallError(message, f"write {SHORT_FOR[name]}")
    if len(name) > 1 and close:
        return CallError(message, f"did you mean {' or '.join(close)}?")
    sizes = " ".join(f"{n}=4..64" for n in [*names, name])
    return CallError(
        message, f"the size here is {listing(names)}; another is named by --sizes '{sizes}'"
    )


def _not_an_expression(text: str, option: str, error: SyntaxError) -> CallError:
    lines = text.splitlines()
    number = min(max(error.lineno or 1, 1), len(lines))
    line = lines[number - 1]
    column = min(max(error.offset or 1, 1), len(line) + 1)
    at = f"column {column}" if len(lines) == 1 else f"line {number}, column {column}"
    marked = f"{line[: column - 1]} ▸ {line[column - 1 :]}".strip()
    hint = "a feed is one expression, not a statement" if _is_statement(text) else None
    return CallError(f"{option} has a syntax error at {at}: {error.msg}: {marked}", hint)


def _is_statement(text: str) -> bool:
    try:
        compile(text, "", "exec")
    except (SyntaxError, ValueError):
        return False
    return True
