"""Tolls of str, bytes and bytearray, and of regular expressions."""

from __future__ import annotations

import re
from typing import Any

from steplaw.toll import kinds
from steplaw.toll.call import Call, Rule
from steplaw.toll.charges import own_and_result, own_length, result_length
from steplaw.toll.hidden import hidden

TEXTS = (str, bytes, bytearray)


@hidden
def _find(call: Call) -> Any:
    """Charge what is passed over, the text that was looked for included, at most."""
    size, sought = kinds.length(call.owner) or 0, kinds.length(call.argument(0)) or 1
    first = call.argument(1)
    low = slice(first, None).indices(size)[0] if type(first) is int else 0
    call.at_most(size - low)
    found = call.run()
    if type(found) is int and found >= 0:
        call.at_most(min(found - low + sought, size - low))
    return found


@hidden
def _find_back(call: Call) -> Any:
    size, sought = kinds.length(call.owner) or 0, kinds.length(call.argument(0)) or 1
    call.at_most(size)
    found = call.run()
    if type(found) is int and found >= 0 and len(call.args) == 1:
        call.at_most(min(size - found, size) if sought else 1)
    return found


@hidden
def _starts(call: Call) -> Any:
    given = call.argument(0)
    options = given if type(given) is tuple else (given,)
    size = kinds.length(call.owner) or 0
    call.at_most(sum(min(kinds.length(x) or 0, size) for x in options))
    return call.run()


@hidden
def _split(call: Call) -> Any:
    call.visits = kinds.length(call.owner) or 0
    if call.argument(1, "maxsplit", -1) != -1:
        call.exact = False
    return call.run()


@hidden
def _join(call: Call) -> Any:
    read = call.items(0)
    try:
        result = call.run()
    except BaseException:
        call.visits = read()
        raise
    call.visits = kinds.length(result) or 0
    return result


@hidden
def _strip(call: Call) -> Any:
    result = call.run()
    size = kinds.length(call.owner) or 0
    call.at_most(size)
    return result


@hidden
def _of(call: Call) -> Any:
    """Charge bytes made from items or copied."""
    if type(call.argument(0)) is int:
        result = call.run()
        call.visits = kinds.length(result) or 0
        return result
    read = call.items(0)
    try:
        return call.run()
    finally:
        call.visits = read()


@hidden
def _match(call: Call) -> Any:
    """Charge the text up to the end of what matched; going back over it is not seen."""
    subject = call.argument(0, "string")
    size, first = kinds.length(subject) or 0, call.argument(1, "pos", 0)
    call.at_most(max(size - (first if type(first) is int else 0), 0))
    found = call.run()
    if found is not None:
        call.at_most(max(found.end() - (first if type(first) is int else 0), 0))
    return found


@hidden
def _scan_text(call: Call) -> Any:
    number = 1 if call.function.__name__ in ("sub", "subn") else 0
    call.at_most(kinds.length(call.argument(number, "string")) or 0)
    return call.run()


_SEARCHED = {
    "find": _find,
    "index": _find,
    "rfind": _find_back,
    "rindex": _find_back,
    "count": _find,
    "replace": own_and_result,
    "split": _split,
    "rsplit": _split,
    "splitlines": own_length,
    "partition": own_length,
    "rpartition": own_length,
    "join": _join,
    "startswith": _starts,
    "endswith": _starts,
    "removeprefix": result_length,
    "removesuffix": result_length,
    "strip": _strip,
    "lstrip": _strip,
    "rstrip": _strip,
    "translate": own_and_result,
    "expandtabs": own_and_result,
    "center": result_length,
    "ljust": result_length,
    "rjust": result_length,
    "zfill": result_length,
    "format": result_length,
    "format_map": result_length,
    "encode": own_and_result,
    "decode": own_and_result,
    "hex": result_length,
    "extend": own_length,
    "maketrans": result_length,
}
_WHOLE = [
    "upper",
    "lower",
    "title",
    "swapcase",
    "capitalize",
    "casefold",
    "isalpha",
    "isdigit",
    "isdecimal",
    "isnumeric",
    "isalnum",
    "isspace",
    "isupper",
    "islower",
    "istitle",
    "isidentifier",
    "isprintable",
    "isascii",
    "copy",
]


@hidden
def _count(call: Call) -> Any:
    call.at_most(kinds.length(call.owner) or 0)
    return call.run()


@hidden
def _extend(call: Call) -> Any:
    read = call.items(0)
    try:
        return call.run()
    finally:
        call.visits = read()


@hidden
def _text_insert(call: Call) -> Any:
    call.at_most(kinds.length(call.owner) or 0)
    return call.run()


RULES: dict[Any, Rule] = {
    bytes: Rule("bytes of", _of, 1),
    bytearray: Rule("bytearray of", _of, 1),
}
for _kind in TEXTS:
    for _method, _charge in _SEARCHED.items():
        if hasattr(_kind, _method):
            RULES[_kind, _method] = Rule(f"{_kind.__name__}.{_method}", _charge)
    for _method in _WHOLE:
        if hasattr(_kind, _method):
            RULES[_kind, _method] = Rule(f"{_kind.__name__}.{_method}", own_length)
    RULES[_kind, "count"] = Rule(f"{_kind.__name__}.count", _count)
RULES |= {
    (bytearray, "extend"): Rule("bytearray.extend", _extend),
    (bytearray, "insert"): Rule("bytearray.insert", _text_insert),
    (bytearray, "remove"): Rule("bytearray.remove", _text_insert),
    (bytearray, "pop"): Rule("bytearray.pop", _text_insert, 1),
    (bytearray, "reverse"): Rule("bytearray.reverse", own_length),
    (memoryview, "tobytes"): Rule("memoryview.tobytes", own_length),
    (memoryview, "tolist"): Rule("memoryview.tolist", own_length),
    (re.Pattern, "match"): Rule("re match", _match),
    (re.Pattern, "fullmatch"): Rule("re fullmatch", _match),
    (re.Pattern, "search"): Rule("re search", _match),
    (re.Pattern, "sub"): Rule("re sub", _scan_text),
    (re.Pattern, "subn"): Rule("re subn", _scan_text),
    (re.Pattern, "split"): Rule("re split", _scan_text),
    (re.Pattern, "findall"): Rule("re findall", _scan_text),
    (re.Pattern, "finditer"): Rule("re finditer", _scan_text),
}
