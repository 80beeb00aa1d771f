"""Text for people: untrusted text made harmless, numbers, sizes and times."""

from __future__ import annotations

import math
import unicodedata
from collections.abc import Mapping, Sequence
from fractions import Fraction
from typing import Any

# Controls, format characters (bidi overrides, zero width), lone surrogates, line separators, and
# what is assigned to nothing or to nobody, which may act as any of these elsewhere.
UNSAFE = {"Cc", "Cf", "Cs", "Cn", "Co", "Zl", "Zp"}


def clean(text: object, unicode: bool = True) -> str:
    """Make untrusted text harmless on one line: what acts on the reader is spelled out.

    Parameters
    ----------
    text : object
        A name, a source line, a message.
    unicode : bool
        Whether other than ASCII characters may stay.

    Returns
    -------
    str
        Text with control, bidi and other format characters as backslash escapes.
    """
    flat = str(text).replace("\t", "    ")
    out = "".join(_escape(c) if unicodedata.category(c) in UNSAFE else c for c in flat)
    return out if unicode else out.encode("ascii", "backslashreplace").decode("ascii")


def _escape(character: str) -> str:
    code = ord(character)
    if code < 0x100:
        return f"\\x{code:02x}"
    return f"\\u{code:04x}" if code < 0x10000 else f"\\U{code:08x}"


def number(value: object) -> str:
    """Write an exact number: whole numbers in groups of three, fractions to four digits."""
    if value is None:
        return "-"
    if isinstance(value, float):
        return f"{value:.4g}"
    try:
        exact = Fraction(str(value))
    except (ValueError, ZeroDivisionError):
        return clean(value)
    if exact.denominator == 1:
        return grouped(exact.numerator)
    if abs(exact) >= 10_000:
        return grouped(round(exact))
    if abs(exact) >= 1000:
        return f"{float(exact):,.1f}".replace(",", " ")
    return f"{float(exact):.5g}"


def grouped(value: int) -> str:
    """Write a whole number in groups of three; a very long one as a power of ten."""
    if abs(value) < 10**15:
        return f"{value:,}".replace(",", " ")
    digits = math.log10(abs(value))
    power = math.floor(digits)
    return f"{'-' if value < 0 else ''}{10 ** (digits - power):.3f}e{power}"


def percent(share: float) -> str:
    """Write a share as a percentage, never 0 or 100 for what is not quite that."""
    value = 100 * share
    if 0 < value < 1:
        return "<1 %"
    if 99 < value < 100:
        return f"{math.floor(value * 10) / 10:.1f} %"
    return f"{value:.0f} %"


def duration(seconds: float, unicode: bool = True) -> str:
    """Write a time in seconds with the unit that suits it."""
    micro = "µs" if unicode else "us"
    for unit, scale in (("s", 1.0), ("ms", 1e-3), (micro, 1e-6)):
        if seconds >= scale:
            return f"{seconds / scale:.3g} {unit}"
    return f"{seconds * 1e9:.3g} ns"


def size(at: Any, names: Sequence[str] = ()) -> str:
    """Write one size, as the record gives it: by name, by order, or one number alone."""
    if isinstance(at, Mapping):
        return ", ".join(f"{clean(name)} = {value}" for name, value in at.items())
    if isinstance(at, list | tuple):
        if len(names) == len(at):
            return ", ".join(
                f"{clean(name)} = {value}" for name, value in zip(names, at, strict=True)
            )
        return "(" + ", ".join(str(value) for value in at) + ")"
    return str(at)


def sizes(entries: Sequence[Any], names: Sequence[str] = (), most: int = 16) -> str:
    """Write a row of sizes, runs of consecutive ones as a range.

    Parameters
    ----------
    entries : sequence
        Sizes by name, by order or as bare numbers.
    names : sequence of str
        The size names.
    most : int
        Ranges to write before the rest is told by its number.

    Returns
    -------
    str
        Such as ``n = 0..8, 16, 32``.
    """
    if not entries:
        return "none"
    single = [_single(entry) for entry in entries]
    if any(value is None for value in single):
        return _short([f"({size(entry, names)})" for entry in entries], most // 3, len(entries))
    runs: list[list[int]] = []
    for value in sorted({value for value in single if value is not None}):
        if runs and value == runs[-1][1] + 1:
            runs[-1][1] = value
        else:
            runs.append([value, value])
    parts = []
    for low, high in runs:
        parts += [f"{low}..{high}"] if high > low + 1 else [str(v) for v in range(low, high + 1)]
    name = clean(names[0]) if len(names) == 1 else _name_of(entries[0])
    return (f"{name} = " if name else "") + _short(parts, most, len(parts))


def _single(entry: Any) -> int | None:
    if isinstance(entry, Mapping) and len(entry) == 1:
        entry = next(iter(entry.values()))
    if isinstance(entry, list | tuple) and len(entry) == 1:
        entry = entry[0]
    return entry if isinstance(entry, int) and not isinstance(entry, bool) else None


def _name_of(entry: Any) -> str:
    return clean(next(iter(entry))) if isinstance(entry, Mapping) else ""


def _short(parts: list[str], most: int, count: int) -> str:
    if len(parts) <= most:
        return ", ".join(parts)
    head = most - 1
    return ", ".join(parts[:head]) + f", and {count - head - 1} more to {parts[-1]}"
