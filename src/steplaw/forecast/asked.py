"""What a forecast is asked for: sizes, and limits with their units."""

from __future__ import annotations

import re
from collections.abc import Sequence
from dataclasses import dataclass
from fractions import Fraction

from steplaw.errors import CallError

LARGEST = 10**18
UNITS = {
    "ns": Fraction(1, 10**9),
    "us": Fraction(1, 10**6),
    "µs": Fraction(1, 10**6),
    "ms": Fraction(1, 1000),
    "s": Fraction(1),
    "min": Fraction(60),
    "h": Fraction(3600),
}
STEPS = ("step", "steps")
_NUMBER = re.compile(r"[+-]?(\d[\d_]*\.?\d*|\.\d+)([eE][+-]?\d{1,3})?")


@dataclass(frozen=True, slots=True)
class Limit:
    """What a run must stay within.

    Parameters
    ----------
    text : str
        As it was given.
    kind : {"time", "steps"}
        What is limited.
    most : Fraction
        Seconds, or steps.
    """

    text: str
    kind: str
    most: Fraction


def parse_size(text: str, names: Sequence[str], option: str = "--at") -> dict[str, int]:
    """Read one size.

    Parameters
    ----------
    text : str
        A number (``10000000``, ``10_000_000``, ``1e7``), or one for each size name
        (``n=1000,m=50``).
    names : sequence of str
        The size names of the law.
    option : str
        The option that it was given after, for the message.

    Returns
    -------
    dict
        A number for each of the size names.

    Raises
    ------
    CallError
        If a name is missing or unknown, or a number is none, is not whole, is below 0 or above
        10**18.

    Examples
    --------
    >>> parse_size("m=2e3, n=10", ["n", "m"])
    {'n': 10, 'm': 2000}
    """
    given: dict[str, int] = {}
    for part in text.split(","):
        name, equals, number = part.partition("=")
        if not equals:
            name, number = names[0], part
            if len(names) > 1:
                raise CallError(
                    f"{option} {text} names no size", f"as in {option} {_example(names)}"
                )
        name = name.strip()
        if name not in names:
            known = " and ".join(names)
            raise CallError(
                f"{option} {text}: the law has no size '{name}'",
                f"its sizes are {known}, as in {option} {_example(names)}",
            )
        if name in given:
            raise CallError(f"{option} {text} gives {name} twice", "give it once")
        given[name] = _whole(number, f"{option} {text}")
    missing = [name for name in names if name not in given]
    if missing:
        raise CallError(f"{option} {text} has no {missing[0]}", f"as in {option} {_example(names)}")
    return {name: given[name] for name in names}


def parse_held(texts: Sequence[str], names: Sequence[str]) -> dict[str, int]:
    """Read the sizes that a search holds: all of the law's names but the one searched for.

    Parameters
    ----------
    texts : sequence of str
        Such as ``m=50``.
    names : sequence of str
        The size names of the law.

    Raises
    ------
    CallError
        If not exactly one name is left to search for.
    """
    held: dict[str, int] = {}
    for text in texts:
        for part in text.split(","):
            name, equals, _ = part.partition("=")
            if not equals:
                raise CallError(f"--hold {text} names no size", f"as in --hold {names[-1]}=50")
            held |= parse_size(part, [name.strip()] if name.strip() in names else names, "--hold")
    free = [name for name in names if name not in held]
    if len(free) != 1:
        others = " ".join(f"--hold {name}=50" for name in names[1:])
        if not free:
            raise CallError("--hold leaves no size to search for", "leave one of them out")
        if len(names) > 1:
            raise CallError(
                f"--within searches for one size, and the law has {' and '.join(names)}",
                f"hold the others, as in {others}",
            )
    return held


def parse_limit(text: str) -> Limit:
    """Read what a run must stay within.

    Parameters
    ----------
    text : str
        A number and a unit: ``ns``, ``us``, ``ms``, ``s``, ``min``, ``h`` or ``steps``.

    Raises
    ------
    CallError
        If there is no such unit, or the number is none or not above 0.

    Examples
    --------
    >>> parse_limit("1.5min").most
    Fraction(90, 1)
    """
    hint = "as in --within 2s, 500ms, 5min, 1h or 1e9steps"
    found = _NUMBER.match(text.strip())
    if found is None:
        raise CallError(f"--within {text} is no number with a unit", hint)
    unit = text.strip()[found.end() :].strip()
    if not unit:
        raise CallError(f"--within {text} has no unit", hint)
    if unit not in UNITS and unit not in STEPS:
        raise CallError(f"--within {text}: there is no unit '{unit}'", hint)
    number = Fraction(found.group().replace("_", ""))
    if number <= 0:
        raise CallError(f"--within {text} leaves no room: it is not above 0", hint)
    if unit in STEPS:
        return Limit(text.strip(), "steps", number)
    return Limit(text.strip(), "time", number * UNITS[unit])


def _whole(text: str, where: str) -> int:
    text = text.strip()
    if not _NUMBER.fullmatch(text):
        raise CallError(f"{where}: '{text}' is no number", "give a size such as 10000000 or 1e7")
    number = Fraction(text.replace("_", ""))
    if number < 0:
        raise CallError(f"{where}: a size is not below 0", "give 0 or more")
    if number.denominator != 1:
        raise CallError(f"{where}: a size is a whole number", f"give {round(number)}")
    if number > LARGEST:
        raise CallError(f"{where} is too large", "give at most 1e18")
    return number.numerator


def _example(names: Sequence[str]) -> str:
    return ",".join(f"{name}=1000" for name in names) if len(names) > 1 else "1e7"
