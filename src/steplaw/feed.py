"""Feeds: what builds a subject's arguments for a size, from a seeded generator."""

from __future__ import annotations

import inspect
import random
import re
from collections.abc import Callable, Iterable, Iterator, Mapping, Sequence
from dataclasses import dataclass, field
from typing import Any, Literal

from steplaw.errors import CallError
from steplaw.expression import Args, Build, args, check, compiled, must_use
from steplaw.reference import ref_of
from steplaw.subject import Subject, locate, parse
from steplaw.wording import describe, listing, one_line

__all__ = [
    "Args",
    "Feed",
    "FeedError",
    "FeedSpec",
    "Input",
    "args",
    "bind",
    "from_callable",
    "parse_every",
    "parse_feed",
    "seed",
    "size_text",
]

FeedKind = Literal["expression", "function", "hints", "every", "python"]

_FUNCTION_FORM = re.compile(r"(?P<file>[^'\"]+\.py):(?P<name>[A-Za-z_][\w.]*)")


class FeedError(CallError):
    """A feed raised, or gave what the subject cannot take.

    Parameters
    ----------
    message, hint : str
        As for `CallError`.
    at : mapping of str to int
        The size at which it did.
    """

    def __init__(self, message: str, hint: str | None, at: Mapping[str, int]) -> None:
        super().__init__(message, hint)
        self.at = dict(at)


@dataclass(frozen=True, slots=True)
class Input:
    """The arguments of one run.

    Parameters
    ----------
    args, kwargs : tuple, dict
        Positional and keyword arguments.
    """

    args: tuple[Any, ...]
    kwargs: dict[str, Any]
    _drew: bool = False
    _rng: random.Random | None = None
    _state: tuple[Any, ...] = field(default=(), repr=False)

    @property
    def random(self) -> bool:
        """Whether chance had a part in it.

        Read it after the run: a feed may hand over an iterator that draws while it is read, or
        the generator itself. Only `random` is watched, not the generators of other libraries.
        """
        return self._drew or (self._rng is not None and self._rng.getstate() != self._state)


@dataclass(frozen=True, slots=True)
class FeedSpec:
    """A feed as it was asked for, before it is bound to a subject.

    Parameters
    ----------
    kind : {"expression", "function", "hints", "every", "python"}
        How it is written.
    text : str
        The expression, or ``FILE.py:FUNCTION``.
    function : callable, optional
        For a feed given in Python.
    """

    kind: FeedKind
    text: str
    function: Callable[..., Any] | None = None


class Feed:
    """Makes the inputs of one subject.

    Parameters
    ----------
    kind, text : str
        For the record.
    build : callable
        Takes the size and the generator and gives the feed's value.
    subject : Subject, optional
        Whose parameters each input is held against.
    """

    def __init__(
        self,
        kind: FeedKind,
        text: str,
        build: Build,
        subject: Subject | None = None,
    ) -> None:
        self.kind = kind
        self.text = text
        self._build = build
        self._subject = subject

    def make(self, at: Mapping[str, int], draw: int = 0) -> Input:
        """Make a fresh input.

        The module-level generator of `random` is seeded too, so that a feed or a subject that
        draws from it gets the same numbers again.

        Parameters
        ----------
        at : mapping of str to int
            The size.
        draw : int
            Which draw at this size; the same size and draw give the same input in any process.

        Returns
        -------
        Input
            The arguments.

        Raises
        ------
        FeedError
            If the feed raises, or its value does not fit the subject's parameters.
        """
        key = seed(at, draw)
        rng = random.Random(key)
        random.seed(key)
        before = rng.getstate()
        value = self._value(at, rng)
        after = rng.getstate()
        drew = after != before or random.getstate() != before
        return self._input(value, at, drew, rng, after)

    def every(self, at: Mapping[str, int]) -> Iterator[Input]:
        """Give all inputs of a size, one after the other.

        Parameters
        ----------
        at : mapping of str to int
            The size.

        Raises
        ------
        FeedError
            If the feed raises, or its value is not iterable.
        """
        rng = random.Random(seed(at, 0))
        value = self._value(at, rng)
        if isinstance(value, Args) or not isinstance(value, Iterable):
            raise FeedError(
                f"--every must give an iterable of inputs, not {type(value).__name__}, "
                f"at {size_text(at)}: {one_line(self.text)}",
                "as in --every '(list(p) for p in permutations(range(n)))'",
                at,
            )
        inputs = iter(value)
        while True:
            try:
                one = next(inputs, _END)
            except (Exception, SystemExit) as error:
                raise self._raised(error, at) from None
            if one is _END:
                return
            yield self._input(one, at, False, None, ())

    def _value(self, at: Mapping[str, int], rng: random.Random) -> Any:
        try:
            return self._build(at, rng)
        except CallError:
            raise
        except (Exception, SystemExit) as error:
            raise self._raised(error, at) from None

    def _raised(self, error: BaseException, at: Mapping[str, int]) -> FeedError:
        return FeedError(
            f"the feed raises {describe(error)} at {size_text(at)}",
            f"the feed is {one_line(self.text)}",
            at,
        )

    def _input(
        self,
        value: Any,
        at: Mapping[str, int],
        drew: bool,
        rng: random.Random | None,
        state: tuple[Any, ...],
    ) -> Input:
        given = value if isinstance(value, Args) else Args((value,), {})
        if self._subject is not None:
            _must_fit(given, self._subject, self.text, at)
        return Input(given.args, dict(given.kwargs), drew, rng, state)


_END = object()


def seed(at: Mapping[str, int], draw: int) -> str:
    """Give what the generator of one draw is seeded with, the same everywhere.

    Parameters
    ----------
    at : mapping of str to int
        The size.
    draw : int
        Which draw.
    """
    return f"steplaw {' '.join(f'{k}={at[k]}' for k in sorted(at))} draw={draw}"


def size_text(at: Mapping[str, int]) -> str:
    """Write a size as people do: ``n=4, m=8``."""
    return ", ".join(f"{name}={value}" for name, value in at.items())


def parse_feed(text: str) -> FeedSpec:
    """Read ``--feed``: an expression, or ``FILE.py:FUNCTION``.

    Parameters
    ----------
    text : str
        What was typed.

    Raises
    ------
    CallError
        If it is neither.
    """
    return _parse(text, "expression", "--feed")


def parse_every(text: str) -> FeedSpec:
    """Read ``--every``: an expression that gives an iterable of inputs.

    Parameters
    ----------
    text : str
        What was typed.

    Raises
    ------
    CallError
        If it is no expression.
    """
    return _parse(text, "every", "--every")


def from_callable(function: Callable[..., Any]) -> FeedSpec:
    """Take a Python function of the size names and ``rng`` as a feed.

    Parameters
    ----------
    function : callable
        Its parameters are the size names and ``rng``, as many of them as it asks for.

    Returns
    -------
    FeedSpec
        Of kind ``function`` where another process can import it by its text alone, otherwise of
        kind ``python``, which this process alone can bind.
    """
    try:
        ref, _ = ref_of(function)
    except CallError:
        return FeedSpec("python", getattr(function, "__qualname__", repr(function)), function)
    return FeedSpec("function" if ref.is_file else "python", str(ref), function)


def bind(spec: FeedSpec | None, subject: Subject, names: Sequence[str] = ("n",)) -> Feed:
    """Make a feed ready for a subject.

    Parameters
    ----------
    spec : FeedSpec or None
        What was asked for; None makes one from the subject's type hints.
    subject : Subject
        Whose globals the expression sees.
    names : sequence of str
        The size names.

    Returns
    -------
    Feed
        Ready to make inputs.

    Raises
    ------
    CallError
        If the feed uses a name that is not defined, or cannot be made.
    """
    if spec is None or spec.kind == "hints":
        from steplaw.hints import feed_text

        text, extra = feed_text(subject, names)
        return Feed("hints", text, compiled(text, subject, names, extra, "--feed"), subject)
    if spec.function is not None:
        return Feed(spec.kind, spec.text, _from_function(spec.function, spec.text, names), subject)
    found = _FUNCTION_FORM.fullmatch(spec.text)
    if found:
        function = _feed_function(spec.text)
        return Feed(spec.kind, spec.text, _from_function(function, spec.text, names), subject)
    option = "--every" if spec.kind == "every" else "--feed"
    build = compiled(spec.text, subject, names, {}, option)
    return Feed(spec.kind, spec.text, build, subject)


def _parse(text: str, kind: FeedKind, option: str) -> FeedSpec:
    text = text.strip()
    if not text:
        raise CallError(f"{option} is empty", f"as in {option} '[rng.random() for _ in range(n)]'")
    found = _FUNCTION_FORM.fullmatch(text)
    if found and not text.startswith("lambda"):
        parse(text)
        return FeedSpec("function" if kind == "expression" else kind, text)
    check(text, option)
    return FeedSpec(kind, text)


def _feed_function(text: str) -> Callable[..., Any]:
    found = locate(parse(text))
    if found.kind in ("coroutine", "async generator"):
        raise CallError(f"the feed {text} is asynchronous", "write it as a plain function")
    return found.function


def _from_function(function: Callable[..., Any], text: str, names: Sequence[str]) -> Build:
    wanted = _wanted(function, text, names)
    must_use([name for name, _ in wanted], names, f"the feed {text}")

    def build(at: Mapping[str, int], rng: random.Random) -> Any:
        known = {**at, "rng": rng}
        given = [known[name] for name, by_name in wanted if not by_name]
        return function(*given, **{name: known[name] for name, by_name in wanted if by_name})

    return build


def _wanted(
    function: Callable[..., Any], text: str, names: Sequence[str]
) -> list[tuple[str, bool]]:
    """List the parameters that a feed function asks for, and whether each goes by name."""
    wanted = []
    for p in inspect.signature(function).parameters.values():
        if p.kind in (p.VAR_POSITIONAL, p.VAR_KEYWORD):
            continue
        if p.name in names or p.name == "rng":
            wanted.append((p.name, p.kind is not p.POSITIONAL_ONLY))
        elif p.default is p.empty:
            raise CallError(
                f"the feed {text} asks for '{p.name}', which is neither a size "
                f"({listing(names)}) nor rng",
                f"rename it, give it a default, or name a size by --sizes '{p.name}=4..64'",
            )
    return wanted


def _must_fit(given: Args, subject: Subject, text: str, at: Mapping[str, int]) -> None:
    try:
        signature = inspect.signature(subject.function)
    except (TypeError, ValueError):
        return
    try:
        signature.bind(*given.args, **given.kwargs)
    except TypeError as error:
        shape = ", ".join(p.name for p in signature.parameters.values())
        raise FeedError(
            f"the feed does not fit {subject.name}({shape}): {one_line(error)}: {one_line(text)}",
            "several arguments are written args(a, b, key=c)",
            at,
        ) from None
