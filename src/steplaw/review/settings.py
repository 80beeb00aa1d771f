"""Settings of one study: each key held to what `steplaw audit` takes."""

from __future__ import annotations

import math
import re
from collections.abc import Callable, Mapping
from fractions import Fraction
from pathlib import Path
from typing import Any

from steplaw.costs import read_costs
from steplaw.errors import CallError
from steplaw.feed import parse_every, parse_feed
from steplaw.reference import parse
from steplaw.sizes import plan
from steplaw.study import check_figure
from steplaw.wording import close_to, one_line


class Fault(CallError):
    """A fault of the configuration, before it is known where in the file it stands.

    Parameters
    ----------
    message, hint : str
        As for `CallError`.
    key : tuple of str
        The key, from the table that is being read.
    """

    def __init__(self, message: str, hint: str | None, key: tuple[str, ...] = ()) -> None:
        super().__init__(message, hint)
        self.key = key


def check(table: Mapping[str, Any], root: Path) -> None:
    """Hold the settings of one study to what they may be.

    Parameters
    ----------
    table : mapping
        Keys and values as the file has them.
    root : Path
        The folder that paths are taken from.

    Raises
    ------
    Fault
        At the first key that cannot be used.
    """
    for key, value in table.items():
        reader = _READERS.get(key)
        if reader is None:
            raise Fault(f"there is no setting '{key}'", _meant(key), (key,))
        try:
            reader(value, root)
        except Fault as fault:
            raise Fault(fault.message, fault.hint, (key, *fault.key)) from None
        except CallError as fault:
            raise Fault(_as_key(fault.message), _as_key(fault.hint), (key,)) from None
    for one, other in (("feed", "every"), ("figure", "costs")):
        if one in table and other in table:
            later = max(one, other, key=list(table).index)
            raise Fault(f"{one} and {other} cannot be given together", "leave one out", (later,))
    if table.get("only_sizes") and "sizes" in table:
        _bare(lambda: plan(sizes_of(table["sizes"]), True), "sizes")


def check_name(name: str) -> None:
    """Refuse a name that could be taken for something else on the command line.

    Parameters
    ----------
    name : str
        Name of a study.

    Raises
    ------
    Fault
        With a name to take instead.
    """
    if re.fullmatch(r"\w[\w.-]*", name):
        return
    better = re.sub(r"\W+", "-", name).strip("-") or "clashes"
    raise Fault(
        f"'{one_line(name)}' cannot be the name of a study",
        f"names are of letters, digits, - and _, such as {better}",
    )


def read_tolerance(value: Any) -> Fraction:
    """Give the share by which figures may rise.

    Parameters
    ----------
    value : int, float or str
        A share such as 0.02, or a text such as "2 %".

    Raises
    ------
    Fault
        If it is none.
    """
    hint = 'write tolerance = 0.02 or tolerance = "2 %"'
    if isinstance(value, str):
        told = re.fullmatch(r"\s*(\d+(?:\.\d+)?)\s*%\s*", value)
        if told is None:
            raise Fault(f"'{one_line(value)}' is not a share", hint)
        return Fraction(told[1]) / 100
    if isinstance(value, bool) or not isinstance(value, int | float) or not math.isfinite(value):
        raise Fault(f"{value!r} is not a share", hint)
    if value < 0:
        raise Fault(f"{value} is below 0", hint)
    if value >= 1:
        raise Fault(f"{value} is a share of {value * 100:g} %", f'write tolerance = "{value:g} %"')
    return Fraction(str(value))


def _as_key(text: str | None) -> str:
    """Give a message about an option of the command line as one about a key."""
    plain = re.sub(r"^--(?:sizes|feed|every)(?::? |$)", "", text or "")
    return re.sub(r"--(sizes|feed|every|draws)\b", r"\1", plain).strip()


def _meant(key: str) -> str:
    close = close_to(key, _READERS)
    words = {"function": "subject", "target": "subject", "timeout": "limit_seconds"}
    if close or key in words:
        return f"did you mean {' or '.join(close) or words[key]}?"
    return f"settings are {', '.join(_READERS)}"


def _text(example: str, parse_text: Callable[[str], object]) -> Callable[[Any, Path], None]:
    def read(value: Any, root: Path) -> None:
        if not isinstance(value, str):
            raise Fault(f"a text is needed, not {one_line(repr(value), 60)}", f"write {example}")
        try:
            parse_text(value)
        except CallError as fault:
            raise CallError(fault.message, fault.hint or f"write {example}") from None

    return read


def _flag(example: str) -> Callable[[Any, Path], None]:
    def read(value: Any, root: Path) -> None:
        if not isinstance(value, bool):
            raise Fault(
                f"{one_line(repr(value), 60)} is neither true nor false", f"write {example}"
            )

    return read


def _number(example: str, whole: bool) -> Callable[[Any, Path], None]:
    def read(value: Any, root: Path) -> None:
        if isinstance(value, bool) or not isinstance(value, int if whole else int | float):
            what = "a whole number" if whole else "a number"
            raise Fault(f"{what} is needed, not {one_line(repr(value), 60)}", f"write {example}")
        if not math.isfinite(value) or value <= 0:
            raise Fault(f"{value} is not above 0", f"write {example}")

    return read


def _sizes(value: Any, root: Path) -> None:
    """Hold sizes to the forms of ``--sizes``, numbers, and a table of these by size name."""
    if isinstance(value, Mapping):
        if not value:
            raise Fault("there are no sizes", 'write sizes = "8..512"')
        for name, part in value.items():
            try:
                _of_one_name(name, part)
            except Fault as fault:
                raise Fault(fault.message, fault.hint, (name,)) from None
        return
    texts = [value] if isinstance(value, str) else value
    if isinstance(texts, list) and texts and all(isinstance(part, str) for part in texts):
        plan(texts)
    else:
        _numbers(value)


def _of_one_name(name: str, part: Any) -> None:
    if isinstance(part, str):
        _bare(lambda: plan(f"{name}={part}"))
    else:
        _numbers(part)
        _bare(lambda: plan({name: part}))


def _bare(read: Callable[[], object], *key: str) -> None:
    try:
        read()
    except CallError as fault:
        raise Fault(_as_key(fault.message), _as_key(fault.hint), key) from None


def _numbers(value: Any) -> None:
    whole = isinstance(value, list) and all(type(x) is int for x in value)
    if not whole:
        raise Fault(
            f"{one_line(repr(value), 60)} is not a list of sizes",
            'write sizes = "8..512" or sizes = [8, 16, 32]',
        )
    _bare(lambda: plan(value))


def sizes_of(value: Any) -> Any:
    """Give sizes of the configuration as `steplaw.study.make_study` takes them.

    Parameters
    ----------
    value : str, list or mapping
        As checked.
    """
    if not isinstance(value, Mapping):
        return value
    parts = []
    for name, part in value.items():
        listed = part if isinstance(part, str) else ",".join(str(x) for x in part)
        parts.append(f"{name}={listed}")
    return parts


def _costs(value: Any, root: Path) -> None:
    if not isinstance(value, str):
        raise Fault(f"a text is needed, not {value!r}", 'write costs = "weights.toml"')
    read_costs(str(root / value))


_READERS: dict[str, Callable[[Any, Path], object]] = {
    "subject": _text('subject = "path/to/file.py:name"', parse),
    "feed": _text('feed = "[rng.random() for _ in range(n)]"', parse_feed),
    "every": _text('every = "(list(p) for p in permutations(range(n)))"', parse_every),
    "sizes": _sizes,
    "only_sizes": _flag("only_sizes = true"),
    "draws": _number("draws = 5", True),
    "figure": _text('figure = "comparison"', check_figure),
    "costs": _costs,
    "clock": _flag("clock = false"),
    "limit_seconds": _number("limit_seconds = 60", False),
    "limit_memory": _number("limit_memory = 4096", True),
    "tolerance": lambda value, root: read_tolerance(value),
}
