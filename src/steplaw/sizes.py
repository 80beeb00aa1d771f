"""The plan of sizes: small consecutive ones, growing ones, and some off the grid to test on."""

from __future__ import annotations

import itertools
import keyword
import math
import re
from collections.abc import Iterable, Mapping, Sequence
from dataclasses import dataclass

from steplaw.errors import CallError

EXAMPLE = "write a list 4,8,15, a doubling 8..4096 or equal steps 10..100+10"
MOST_POINTS = 10_000
DIGITS = 18
LARGEST_SMALL = 12
LARGEST = 4096

_NUMBER = r"-?\d[\d_]*"
_RANGE = re.compile(rf"({_NUMBER})\.\.({_NUMBER})(?:\+({_NUMBER}))?")


@dataclass(frozen=True, slots=True)
class SizePlan:
    """The sizes to run, in the order to run them.

    Parameters
    ----------
    names : tuple of str
        The size names.
    points : tuple of dict
        All sizes, the least work first; a run may stop anywhere along it.
    held_out : tuple of dict
        Those of them that lie off the grid, to test a law on.
    given : bool
        Whether a person named sizes.
    """

    names: tuple[str, ...]
    points: tuple[dict[str, int], ...]
    held_out: tuple[dict[str, int], ...]
    given: bool


def plan(
    sizes: str | Sequence[str] | Iterable[int] | Mapping[str, Iterable[int]] | None = None,
    only_sizes: bool = False,
) -> SizePlan:
    """Make the plan of sizes.

    Parameters
    ----------
    sizes : str, sequence of str or of int, mapping of str to ints, or None
        What ``--sizes`` was given, once or several times, or the numbers themselves. A name
        without numbers (``n m``) gets the default sizes.
    only_sizes : bool
        Run the given sizes alone.

    Returns
    -------
    SizePlan
        The plan.

    Raises
    ------
    CallError
        If a size is negative, empty, not a number, descending, or there are far too many.
    """
    wanted = _wanted(sizes)
    names = tuple(wanted) or ("n",)
    given = {name: values for name, values in wanted.items() if values}
    if not given:
        if only_sizes:
            raise CallError("--only-sizes needs sizes", f"add --sizes: {EXAMPLE}")
        return _default(names)
    if len(given) < len(names):
        bare = next(name for name in names if name not in given)
        raise CallError(f"--sizes has no values for '{bare}'", f"as in --sizes '{bare}=4..64'")
    return _with_more(given, only_sizes)


def parse_sizes(spec: str) -> tuple[int, ...]:
    """Read one list of sizes.

    Parameters
    ----------
    spec : str
        ``4,8,15``, ``8..4096`` (doubling), ``10..100+10`` (equal steps), or parts of these
        joined by commas.

    Returns
    -------
    tuple of int
        The sizes, ascending, each once.

    Raises
    ------
    CallError
        If it has none of these forms.

    Examples
    --------
    >>> parse_sizes("3,8..64,10..14+2")
    (3, 8, 10, 12, 14, 16, 32, 64)
    """
    values: set[int] = set()
    for part in spec.split(","):
        values.update(_part(part, spec))
        if len(values) > MOST_POINTS:
            raise CallError(f"--sizes '{spec}' gives over {MOST_POINTS} sizes", "take larger steps")
    return tuple(sorted(values))


def _part(part: str, spec: str) -> Iterable[int]:
    if not part:
        raise CallError(
            f"--sizes '{spec}' is empty" if not spec else f"--sizes '{spec}' has an empty part",
            EXAMPLE,
        )
    if re.fullmatch(_NUMBER, part):
        return (_size(part, spec),)
    found = _RANGE.fullmatch(part)
    if not found:
        raise CallError(f"--sizes: '{part}' is not a size", EXAMPLE)
    first, last = _size(found[1], spec), _size(found[2], spec)
    if first > last:
        raise CallError(
            f"--sizes: {part} goes down",
            f"write {last}..{first}{'+' + found[3] if found[3] else ''}",
        )
    if found[3] is None:
        return _doubling(first, last)
    step = int(found[3][: DIGITS + 1])
    if step <= 0:
        raise CallError(f"--sizes: {part} has a step of {step}", f"write {first}..{last}+1")
    if (last - first) // step > MOST_POINTS:
        raise CallError(f"--sizes: {part} gives over {MOST_POINTS} sizes", "take larger steps")
    return range(first, last + 1, step)


def _size(text: str, spec: str) -> int:
    if len(text) > DIGITS:
        raise CallError(f"--sizes: {text[:8]}… has over {DIGITS} digits", EXAMPLE)
    value = int(text)
    if value < 0:
        raise CallError(
            f"--sizes '{spec}' has a negative size {value}", f"sizes start at 0: {EXAMPLE}"
        )
    return value


def _doubling(first: int, last: int) -> list[int]:
    values = [first]
    while max(1, values[-1] * 2) <= last:
        values.append(max(1, values[-1] * 2))
    return values


def _wanted(
    sizes: str | Sequence[str] | Iterable[int] | Mapping[str, Iterable[int]] | None,
) -> dict[str, tuple[int, ...]]:
    if sizes is None:
        return {}
    if isinstance(sizes, str):
        return _from_text([sizes])
    if isinstance(sizes, Mapping):
        if not sizes:
            raise CallError("sizes is empty", "as in sizes={'n': [4, 8, 16]}")
        for name in sizes:
            _check_name(name)
        return {name: _from_numbers(values) for name, values in sizes.items()}
    listed = list(sizes)
    if listed and all(isinstance(x, str) for x in listed):
        return _from_text([str(x) for x in listed])
    return {"n": _from_numbers(listed)}  # type: ignore[arg-type]


def _from_numbers(values: Iterable[int]) -> tuple[int, ...]:
    listed = list(values)
    if not listed:
        raise CallError("sizes is empty", "as in sizes=[4, 8, 16]")
    return parse_sizes(",".join(str(value) for value in listed))


def _from_text(specs: Sequence[str]) -> dict[str, tuple[int, ...]]:
    wanted: dict[str, tuple[int, ...]] = {}
    for token in [t for spec in specs for t in _tokens(spec)]:
        name, equals, values = token.partition("=")
        if not equals and not token.isidentifier():
            name, values = "n", token
        _check_name(name)
        found = parse_sizes(values) if equals or values else ()
        wanted[name] = tuple(sorted({*wanted.get(name, ()), *found}))
    return wanted


def _tokens(spec: str) -> list[str]:
    tight = re.sub(r"\s*(,|=|\.\.|\+)\s*", r"\1", spec.strip())
    if not tight:
        raise CallError("--sizes is empty", EXAMPLE)
    return tight.split()


def _check_name(name: str) -> None:
    if not name.isidentifier() or keyword.iskeyword(name):
        raise CallError(f"--sizes: '{name}' is not a size name", "as in --sizes 'n=4..64 m=4..64'")
    if name in ("rng", "args"):
        raise CallError(
            f"--sizes: '{name}' has a meaning of its own in feeds", "take another name, such as m"
        )


def _default(names: tuple[str, ...]) -> SizePlan:
    if len(names) == 1:
        grown = _doubling(16, LARGEST)
        off = [13, *_between(grown)]
        small = range(LARGEST_SMALL + 1)
        return _made(names, [(x,) for x in {*small, *grown, *off}], [(x,) for x in off], False)
    most = {2: 6, 3: 3}.get(len(names), 2)
    small_grid = itertools.product(range(most + 1), repeat=len(names))
    grown = _doubling(8, {2: 256, 3: 32}.get(len(names), 16))
    grid = itertools.product(grown, repeat=len(names))
    held_out = _off_grid([_between(grown)] * len(names))
    return _made(names, {*small_grid, *grid, *held_out}, held_out, False)


def _with_more(given: Mapping[str, tuple[int, ...]], only_sizes: bool) -> SizePlan:
    names = tuple(given)
    if math.prod(len(values) for values in given.values()) > MOST_POINTS:
        raise CallError(
            f"--sizes makes a grid of over {MOST_POINTS} points", "take fewer sizes for each name"
        )
    grid = set(itertools.product(*given.values()))
    if only_sizes:
        return _made(names, grid, [], True)
    most = {1: 8, 2: 4, 3: 2}.get(len(names), 1)
    small = itertools.product(*(range(min(most, v[-1]) + 1) for v in given.values()))
    off = [_spread(_between(v), 6) for v in given.values()]
    held_out = [p for p in _off_grid(off) if p not in grid] if all(off) else []
    return _made(names, {*grid, *small, *held_out}, held_out, True)


def _between(values: Sequence[int]) -> list[int]:
    """Give a size off the grid in each gap: 3 * 2^k - 1 between 2^(k+1) and 2^(k+2)."""
    pairs = itertools.pairwise(values)
    return [(a + b) // 2 - 1 for a, b in pairs if b - a > 3]


def _spread(values: list[int], most: int) -> list[int]:
    """Keep some of many values, evenly, the last one among them."""
    if len(values) <= most:
        return values
    last = len(values) - 1
    return [values[round(i * last / (most - 1))] for i in range(most)]


def _off_grid(axes: Sequence[Sequence[int]]) -> list[tuple[int, ...]]:
    """Pair off-grid sizes, each with itself and its neighbours, so that the axes vary apart."""
    longest = max(len(axis) for axis in axes)
    points = []
    for shift in range(2 if len(axes) > 1 else 1):
        for i in range(longest):
            points.append(tuple(axis[(i + shift * k) % len(axis)] for k, axis in enumerate(axes)))
    return list(dict.fromkeys(points))


def _made(
    names: tuple[str, ...],
    points: Iterable[tuple[int, ...]],
    held_out: Iterable[tuple[int, ...]],
    given: bool,
) -> SizePlan:
    def work(point: tuple[int, ...]) -> tuple[int, tuple[int, ...]]:
        return math.prod(value + 1 for value in point), point

    def named(chosen: Iterable[tuple[int, ...]]) -> tuple[dict[str, int], ...]:
        ordered = sorted(set(chosen), key=work)
        return tuple(dict(zip(names, point, strict=True)) for point in ordered)

    return SizePlan(names, named(points), named(held_out), given)
