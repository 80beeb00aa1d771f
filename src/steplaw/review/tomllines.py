"""Lines of a TOML file: where each key stands, which `tomllib` does not tell."""

from __future__ import annotations

import tomllib
from collections.abc import Iterator, Mapping, Sequence
from typing import Any

Path = tuple[str, ...]


def lines_of_keys(text: str) -> dict[Path, int]:
    """Give the line on which each key and each table first stands.

    Parameters
    ----------
    text : str
        A whole TOML file that `tomllib` reads.

    Returns
    -------
    dict of tuple of str to int
        Line numbers from 1, by the names that lead to the key.

    Examples
    --------
    >>> lines_of_keys("[tool.steplaw]\\nbudgets = 'laws.toml'\\n")[("tool", "steplaw", "budgets")]
    2
    """
    found: dict[Path, int] = {}
    table: Path = ()
    for number, statement in _statements(text.splitlines()):
        if statement.lstrip().startswith("["):
            table = _deepest(tomllib.loads(statement))
            paths = [table]
        else:
            paths = [(*table, *path) for path in _paths(tomllib.loads(statement))]
        for path in paths:
            for end in range(1, len(path) + 1):
                found.setdefault(path[:end], number)
    return found


def line_of(lines: Mapping[Path, int], path: Sequence[str]) -> int:
    """Give the line of a key, or of the nearest table around it that has one.

    Parameters
    ----------
    lines : mapping
        What `lines_of_keys` gave.
    path : sequence of str
        The names that lead to the key.
    """
    for end in range(len(path), 0, -1):
        if tuple(path[:end]) in lines:
            return lines[tuple(path[:end])]
    return 1


def _statements(lines: Sequence[str]) -> Iterator[tuple[int, str]]:
    """Give each table header and each key with its value, with the number of its first line.

    A value ends on the first line with which it can be read: strings and lists that go over
    several lines cannot be read before they are closed.
    """
    first, pending = 1, ""
    for number, line in enumerate(lines, 1):
        if not pending and line.strip()[:1] in ("", "#"):
            continue
        if not pending:
            first = number
        pending += line + "\n"
        try:
            tomllib.loads(pending)
        except tomllib.TOMLDecodeError:
            continue
        yield first, pending
        pending = ""


def _deepest(data: Any) -> Path:
    path: list[str] = []
    while isinstance(data, list | dict) and data:
        if isinstance(data, list):
            data = data[-1]
        else:
            (key,) = data
            path.append(key)
            data = data[key]
    return tuple(path)


def _paths(data: Any) -> Iterator[Path]:
    if isinstance(data, dict) and data:
        for key, value in data.items():
            yield from ((key, *rest) for rest in _paths(value))
    else:
        yield ()
