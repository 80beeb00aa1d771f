"""Operation classes: kinds of step that mean the same on every Python version.

An instruction is charged to the classes it stands for; one that joins two (such as
STORE_FAST_LOAD_FAST of 3.13) to both. What differs between versions for no reason of the program
(stack moves, jumps, constants, the call of a comprehension's own function on 3.11) belongs to no
class and shows only in `opcodes`.
"""

from __future__ import annotations

from collections.abc import Iterator

from steplaw.flow import isa
from steplaw.flow.decode import Decoded
from steplaw.tally.snapshot import CodeCounts

CLASSES = (
    "arithmetic",
    "comparison",
    "element_read",
    "element_write",
    "attribute",
    "call",
    "build",
    "append",
    "iteration",
    "unpack",
    "raise",
    "yield",
    "import",
)

_BY_NAME = {
    "arithmetic": "BINARY_OP UNARY_NEGATIVE UNARY_INVERT UNARY_POSITIVE",
    "comparison": "COMPARE_OP IS_OP CONTAINS_OP",
    "element_read": "BINARY_SUBSCR BINARY_SLICE",
    "element_write": "STORE_SUBSCR STORE_SLICE DELETE_SUBSCR",
    "attribute": "LOAD_ATTR LOAD_METHOD STORE_ATTR DELETE_ATTR LOAD_SUPER_ATTR",
    "call": "CALL CALL_KW CALL_FUNCTION_EX",
    "build": "BUILD_TUPLE BUILD_LIST BUILD_SET BUILD_MAP BUILD_STRING BUILD_CONST_KEY_MAP",
    "append": "LIST_APPEND SET_ADD MAP_ADD LIST_EXTEND SET_UPDATE DICT_UPDATE DICT_MERGE",
    "iteration": "FOR_ITER",
    "unpack": "UNPACK_SEQUENCE UNPACK_EX",
    "raise": "RAISE_VARARGS",
    "yield": "YIELD_VALUE",
    "import": "IMPORT_NAME IMPORT_FROM",
}

CLASS_OF: dict[int, str] = {
    isa.OPMAP[name]: operation
    for operation, names in _BY_NAME.items()
    for name in names.split()
    if name in isa.OPMAP
}


def operations(counts: CodeCounts) -> Iterator[tuple[str, int]]:
    """Give the operation classes of a code object's steps.

    Parameters
    ----------
    counts : CodeCounts
        Exact counts of one code object.

    Yields
    ------
    tuple of (str, int)
        Operation class and count, a class more than once where several instructions belong.
    """
    decoded = counts.probed.graph.decoded
    for k, n in enumerate(counts.instructions):
        if n:
            operation = class_of(decoded, k)
            if operation is not None:
                yield operation, n


def class_of(decoded: Decoded, k: int) -> str | None:
    """Give the operation class of an instruction.

    Parameters
    ----------
    decoded : Decoded
        A code object.
    k : int
        Index of the instruction.
    """
    operation = CLASS_OF.get(decoded.ops[k])
    return None if operation is None or _of_the_compiler(decoded, k) else operation


def _of_the_compiler(decoded: Decoded, k: int) -> bool:
    """Whether a call or tuple is there only because a function is made on the spot.

    Comprehensions are called on 3.11 and inlined from 3.12 on, closures likewise.
    """
    ops = decoded.ops
    if ops[k] == _CALL and decoded.args[k] == 0:
        before = k - 2 if isa.PRECALL >= 0 else k - 1
        return before >= 0 and ops[before] in _ITERATED
    if ops[k] == _BUILD_TUPLE:
        return k + 2 < len(ops) and ops[k + 2] == _MAKE_FUNCTION
    return False


_CALL, _BUILD_TUPLE, _MAKE_FUNCTION = (
    isa.OPMAP[name] for name in ("CALL", "BUILD_TUPLE", "MAKE_FUNCTION")
)
_ITERATED = (isa.OPMAP["GET_ITER"], isa.OPMAP["GET_AITER"])
