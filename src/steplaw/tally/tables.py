"""Writers of a code object's location table and exception table.

The formats are those of CPython's ``Objects/locations.md`` and
``Objects/exception_handling_notes.txt``.
"""

from __future__ import annotations

from collections.abc import Iterable

Position = tuple[int | None, int | None, int | None, int | None]
NOWHERE: Position = (None, None, None, None)


def _varint(out: bytearray, value: int) -> None:
    while value >= 64:
        out.append(64 | (value & 63))
        value >>= 6
    out.append(value)


def _signed(out: bytearray, value: int) -> None:
    _varint(out, ((-value) << 1) | 1 if value < 0 else value << 1)


def location_table(runs: Iterable[tuple[Position, int]], first_line: int) -> bytes:
    """Write a location table.

    Parameters
    ----------
    runs : iterable of (Position, int)
        Line, end line, column and end column, and the number of code units they hold for.
    first_line : int
        `co_firstlineno`.

    Returns
    -------
    bytes
        A `co_linetable`.
    """
    out = bytearray()
    current = first_line
    for position, units in runs:
        while units > 0:
            piece = min(units, 8)
            current = _location(out, position, piece, current)
            units -= piece
    return bytes(out)


def _location(out: bytearray, position: Position, units: int, current: int) -> int:
    line, end_line, column, end_column = position
    head = 0x80 | (units - 1)
    if line is None:
        out.append(head | 15 << 3)
        return current
    delta = line - current
    if column is None or end_column is None:
        if end_line is None or end_line == line:
            out.append(head | 13 << 3)
            _signed(out, delta)
            return line
    elif end_line == line:
        width = end_column - column
        if delta == 0 and column < 80 and 0 <= width < 16:
            out.append(head | (column >> 3) << 3)
            out.append((column & 7) << 4 | width)
            return line
        if 0 <= delta < 3 and column < 128 and end_column < 128:
            out.append(head | (10 + delta) << 3)
            out.append(column)
            out.append(end_column)
            return line
    out.append(head | 14 << 3)
    _signed(out, delta)
    _varint(out, (end_line if end_line is not None else line) - line)
    _varint(out, 0 if column is None else column + 1)
    _varint(out, 0 if end_column is None else end_column + 1)
    return line


def exception_table(entries: Iterable[tuple[int, int, int, int]]) -> bytes:
    """Write an exception table.

    Parameters
    ----------
    entries : iterable of tuple
        Start, length and target in code units, and ``depth << 1 | lasti``.

    Returns
    -------
    bytes
        A `co_exceptiontable`.
    """
    out = bytearray()
    for entry in entries:
        mark = 128
        for value in entry:
            shift = 0
            while value >> shift >= 64:
                shift += 6
            while shift > 0:
                out.append(mark | 64 | (value >> shift) & 63)
                mark = 0
                shift -= 6
            out.append(mark | value & 63)
            mark = 0
    return bytes(out)
