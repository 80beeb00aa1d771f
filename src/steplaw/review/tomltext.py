"""Plain values written as TOML."""

from __future__ import annotations

import json
import re
from collections.abc import Mapping
from typing import Any


def key_text(key: str) -> str:
    """Give a key, quoted where it must be.

    Parameters
    ----------
    key : str
        The key.

    Examples
    --------
    >>> key_text("n=64"), key_text("next-sailing")
    ('"n=64"', 'next-sailing')
    """
    return key if re.fullmatch(r"[A-Za-z0-9_-]+", key) else value_text(key)


def value_text(value: Any) -> str:
    """Give a text, number, flag, list or mapping on one line.

    Parameters
    ----------
    value : str, int, float, bool, list, tuple or mapping
        What to write.
    """
    if isinstance(value, str):
        # The escapes of JSON are those of TOML; what TOML forbids in a text, JSON may leave.
        return json.dumps(value, ensure_ascii=False).replace("\x7f", "\\u007f")
    if isinstance(value, bool):
        return "true" if value else "false"
    if isinstance(value, list | tuple):
        return f"[{', '.join(value_text(part) for part in value)}]"
    if isinstance(value, Mapping):
        return inline(value)
    return repr(value)


def inline(table: Mapping[str, Any]) -> str:
    """Give a table on one line.

    Parameters
    ----------
    table : mapping
        Keys and values.
    """
    inside = ", ".join(f"{key_text(key)} = {value_text(value)}" for key, value in table.items())
    return f"{{ {inside} }}" if inside else "{}"
