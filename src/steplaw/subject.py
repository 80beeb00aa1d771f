"""The subject: the function under study, found by its name and called as its user would."""

from __future__ import annotations

import functools
import hashlib
import inspect
import linecache
from collections import deque
from collections.abc import Callable, Iterator, Mapping, Sequence
from dataclasses import dataclass
from pathlib import Path
from types import FunctionType, ModuleType
from typing import Any

from steplaw.callables import Kind, functions_in, kind_of, methods_of, underlying
from steplaw.errors import CallError
from steplaw.loading import load_file, load_module, under_way
from steplaw.reference import SubjectRef, not_in_python, parse, ref_of
from steplaw.wording import close_to, listing, with_article

__all__ = [
    "Subject",
    "SubjectRef",
    "call",
    "forget",
    "from_function",
    "locate",
    "parse",
    "unread",
]

_NOTES: Mapping[Kind, str] = {
    "generator": "a generator function: the call only makes the generator, so it is run to its end",
    "coroutine": "a coroutine function: it is run to its end by asyncio.run, whose steps count too",
    "async generator": "an asynchronous generator: it is run to its end by asyncio.run, "
    "whose steps count too",
}


@dataclass(frozen=True, slots=True)
class Subject:
    """The function under study.

    Parameters
    ----------
    ref : SubjectRef
        Where it was found.
    function : callable
        What the user calls, decorators and bound classes included.
    name : str
        Qualified name, as in `ref`.
    file : str
        Source file, as its code object names it.
    line : int
        First line of its code (that of the first decorator, if it has one).
    digest : str
        SHA-256 of the source file.
    source_lines : tuple of str
        Lines of the whole file; line N is at N - 1.
    kind : {"function", "generator", "coroutine", "async generator"}
        What a call gives, and so how `call` runs it to its end.
    module : module
        The module it was found in; its names are visible to feeds.
    code : function
        The Python function under the decorators, which names file and line.
    notes : tuple of str
        Cautions for the reader of an audit.
    """

    ref: SubjectRef
    function: Callable[..., Any]
    name: str
    file: str
    line: int
    digest: str
    source_lines: tuple[str, ...]
    kind: Kind
    module: ModuleType
    code: FunctionType
    notes: tuple[str, ...] = ()

    @property
    def doc(self) -> str | None:
        """First line of the docstring, or None."""
        text = inspect.cleandoc(self.code.__doc__ or "")
        return text.splitlines()[0] if text else None


def locate(ref: SubjectRef) -> Subject:
    """Import a subject.

    Parameters
    ----------
    ref : SubjectRef
        What `parse` gave.

    Returns
    -------
    Subject
        The function, ready to be called.

    Raises
    ------
    CallError
        If there is no such file, module or function, it cannot be imported, or it has no Python
        bytecode to count.
    """
    module = load_file(ref.place) if ref.is_file else load_module(ref.place)
    return _subject(ref, module, _resolve(module, ref))


def from_function(function: Callable[..., Any]) -> Subject:
    """Find the subject of a function at hand, with a ref by which another process can import it.

    Parameters
    ----------
    function : callable
        A function, a static or class method, or a callable kept under a name in a module.

    Returns
    -------
    Subject
        As `locate` gives.

    Raises
    ------
    CallError
        If no other process could import it (a nested function, a lambda, a function of a notebook
        or of the interactive prompt, a method bound to an object), or it has no Python bytecode.
    """
    if under_way() is not None:
        raise CallError(
            f"steplaw is called while {under_way()} is being imported as the subject",
            "put that call under: if __name__ == '__main__':",
        )
    ref, module = ref_of(function)
    return _subject(ref, module, function)


def call(
    subject: Subject, args: Sequence[Any] = (), kwargs: Mapping[str, Any] | None = None
) -> Any:
    """Call a subject and run what it gives to the end.

    Parameters
    ----------
    subject : Subject
        The subject.
    args, kwargs : sequence, mapping
        Its arguments.

    Returns
    -------
    object
        The result of a function or coroutine; None for generators, which are exhausted.
    """
    result = subject.function(*args, **(kwargs or {}))
    if subject.kind == "function":
        return result
    if inspect.isgenerator(result):
        deque(result, maxlen=0)
        return None
    if inspect.iscoroutine(result) or inspect.isasyncgen(result):
        import asyncio

        return asyncio.run(_drain(result) if inspect.isasyncgen(result) else result)
    return result


def forget(subject: Subject) -> None:
    """Empty the `functools.cache` and `lru_cache` stores in the subject's module.

    Parameters
    ----------
    subject : Subject
        The subject, which may be such a function itself.
    """
    for value in [subject.function, *vars(subject.module).values()]:
        if isinstance(value, functools._lru_cache_wrapper):
            value.cache_clear()


def unread(result: object) -> str | None:
    """Say so if a result is an iterator that nobody has run, whose work is thus not counted.

    Parameters
    ----------
    result : object
        What `call` gave.
    """
    if isinstance(result, Iterator):
        return (
            f"returns {with_article(type(result).__name__)} that is not run, so its work is not "
            "counted; audit a function that runs it, such as one that returns list(...)"
        )
    return None


async def _drain(generator: Any) -> None:
    async for _ in generator:
        pass


def _subject(ref: SubjectRef, module: ModuleType, function: Callable[..., Any]) -> Subject:
    code = _checked(function, ref)
    kind = kind_of(code)
    source = _source_of(code)
    lines = tuple(line.rstrip("\n") for line in linecache.getlines(source))
    return Subject(
        ref=ref,
        function=function,
        name=ref.name,
        file=code.__code__.co_filename,
        line=code.__code__.co_firstlineno,
        digest=_digest(code, source, lines),
        source_lines=lines,
        kind=kind,
        module=module,
        code=code,
        notes=tuple(_notes(function, kind)),
    )


def _resolve(module: ModuleType, ref: SubjectRef) -> Callable[..., Any]:
    owner: Any = module
    for part in ref.name.split("."):
        if not hasattr(owner, part):
            raise _no_such_name(owner, part, ref)
        still = inspect.getattr_static(owner, part) if isinstance(owner, type) else None
        # Reading a property calls its getter with the object, so that is what is studied.
        owner = still.fget if isinstance(still, property) else getattr(owner, part)
    function: Callable[..., Any] = owner
    return function


def _checked(function: Any, ref: SubjectRef) -> FunctionType:
    if isinstance(function, type):
        methods = methods_of(function)
        what = "name one of its methods: " if methods else "it defines no methods"
        names = listing(f"{ref}.{m}" for m in methods)
        raise CallError(f"{ref} is a class, not a function", what + names)
    if isinstance(function, ModuleType):
        raise CallError(f"{ref} is a module, not a function", f"write {function.__name__}:name")
    if not callable(function):
        raise CallError(
            f"{ref} is {with_article(type(function).__name__)}, not a function", _offer(ref)
        )
    code = underlying(function)
    if code is None:
        raise not_in_python(ref)
    return code


def _offer(ref: SubjectRef) -> str | None:
    module = load_file(ref.place) if ref.is_file else load_module(ref.place)
    names = functions_in(module)
    return f"its functions are {listing(names)}" if names else None


def _no_such_name(owner: Any, part: str, ref: SubjectRef) -> CallError:
    if isinstance(owner, ModuleType):
        names = functions_in(owner)
        message = f"no function '{part}' in {ref.place}"
        wanted, prefix = ref.name, ""
    elif isinstance(owner, type):
        names = methods_of(owner)
        message = f"no method '{part}' in the class {owner.__qualname__} of {ref.place}"
        wanted, prefix = part, f"{owner.__qualname__}."
    else:
        return CallError(
            f"'{part}' cannot be reached in {ref}: only functions at the top of a file "
            "or in its classes can",
            "move it there, or name the function that it is part of",
        )
    close = close_to(wanted, names)
    if close:
        offers = " or ".join(f"{ref.place}:{prefix}{c}" for c in close)
        return CallError(message, f"did you mean {offers}?")
    return CallError(message, f"there is {listing(names)}" if names else "it defines no function")


def _notes(function: Any, kind: Kind) -> Iterator[str]:
    if kind in _NOTES:
        yield _NOTES[kind]
    if isinstance(function, functools._lru_cache_wrapper):
        yield "keeps its results (functools.cache): they are forgotten before each run"


def _source_of(code: FunctionType) -> str:
    file = code.__code__.co_filename
    # A few modules of the standard library are frozen into the interpreter, under no path.
    if file.startswith("<frozen"):
        return str(code.__globals__.get("__file__", file))
    return file


def _digest(code: FunctionType, source: str, lines: tuple[str, ...]) -> str:
    file = Path(source)
    if file.is_file():
        return hashlib.sha256(file.read_bytes()).hexdigest()
    return hashlib.sha256("\n".join(lines).encode() or code.__code__.co_code).hexdigest()
