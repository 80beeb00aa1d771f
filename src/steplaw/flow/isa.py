"""What this interpreter's instruction set means for control flow.

Read from the interpreter's own `opcode` tables, so that each supported version (3.11 to 3.13)
describes itself; the few facts that the tables do not hold are named here.
"""

from __future__ import annotations

import opcode
import sys

OPNAME: list[str] = list(opcode.opname)
OPMAP: dict[str, int] = dict(opcode.opmap)
VERSION = sys.version_info[:2]


def _cache_units() -> list[int]:
    entries = opcode._inline_cache_entries  # type: ignore[attr-defined]
    if isinstance(entries, dict):
        return [entries.get(name, 0) for name in OPNAME]
    return [entries[i] if i < len(entries) else 0 for i in range(len(OPNAME))]


CACHES: list[int] = _cache_units()
JUMPS = frozenset(opcode.hasjrel)
BACKWARD = frozenset(op for op in JUMPS if "BACKWARD" in OPNAME[op])


def _ops(*names: str) -> frozenset[int]:
    return frozenset(OPMAP[n] for n in names if n in OPMAP)


EXTENDED_ARG = OPMAP["EXTENDED_ARG"]
RESUME = OPMAP["RESUME"]
SEND = OPMAP["SEND"]
FOR_ITER = OPMAP["FOR_ITER"]
YIELD_VALUE = OPMAP["YIELD_VALUE"]
RETURN_GENERATOR = OPMAP["RETURN_GENERATOR"]
#: 3.11: its specialised forms make the whole call, so that what CALL raises leaves from it.
PRECALL = OPMAP.get("PRECALL", -1)
END_FOR = OPMAP.get("END_FOR", -1)

GOTO = _ops("JUMP_FORWARD", "JUMP_BACKWARD", "JUMP_BACKWARD_NO_INTERRUPT")
RETURN = _ops("RETURN_VALUE", "RETURN_CONST")
SUSPEND = _ops("YIELD_VALUE", "RETURN_GENERATOR")
ALWAYS_RAISE = _ops("RAISE_VARARGS", "RERAISE")
#: Either go on or re-raise what they hold, without a new traceback entry.
MAY_RERAISE = _ops("END_ASYNC_FOR", "CLEANUP_THROW")
#: Where a suspended frame stands when an exception is thrown into it. (On 3.11 a throw that ends
#: the inner iterator of a `yield from` moves the frame on to the jump behind it first.)
SUSPENDED = _ops("YIELD_VALUE", "JUMP_BACKWARD_NO_INTERRUPT")
BRANCH = JUMPS - GOTO
#: Jumps at which pending signals are handled and threads are switched.
CHECKED_JUMPS = BACKWARD - _ops("JUMP_BACKWARD_NO_INTERRUPT")
#: Before 3.13 that is done after the jump: an exception is looked up right before its target.
CHECKS_BEHIND_JUMP = VERSION < (3, 13)
ENDS_BLOCK = GOTO | RETURN | SUSPEND | ALWAYS_RAISE | MAY_RERAISE | BRANCH

#: Instructions that an exhausted FOR_ITER passes over at its target.
FOR_ITER_SKIPS = {(3, 11): 0, (3, 12): 1, (3, 13): 2}.get(VERSION, 2)
#: On 3.11 a throw that ends a `yield from` goes on at the target of SEND without running it.
THROW_JUMPS_SEND = VERSION == (3, 11)
