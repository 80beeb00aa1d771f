"""Operation classes: kinds of step that mean the same on every Python version.

An operation is one of the source language, and each version compiles it to other instructions.
So an instruction is charged to the operations that it stands for: none for what a compiler needs
for itself (moves on the stack, jumps, constants, variables, a comprehension's own function), two
where one instruction does what two do elsewhere (LOAD_SUPER_ATTR of 3.12 on). The counts of a
source by class are equal on all versions; its steps are not.
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
    "comparison": """COMPARE_OP IS_OP CONTAINS_OP POP_JUMP_IF_NONE POP_JUMP_IF_NOT_NONE
        POP_JUMP_FORWARD_IF_NONE POP_JUMP_FORWARD_IF_NOT_NONE
        POP_JUMP_BACKWARD_IF_NONE POP_JUMP_BACKWARD_IF_NOT_NONE""",
    "element_read": "BINARY_SUBSCR BINARY_SLICE",
    "element_write": "STORE_SUBSCR STORE_SLICE DELETE_SUBSCR",
    "attribute": "LOAD_ATTR LOAD_METHOD STORE_ATTR DELETE_ATTR LOAD_SUPER_ATTR",
    "call": "CALL CALL_KW CALL_FUNCTION_EX LOAD_SUPER_ATTR",
    "build": "BUILD_TUPLE BUILD_LIST BUILD_SET BUILD_MAP BUILD_STRING BUILD_CONST_KEY_MAP",
    "append": "LIST_APPEND SET_ADD MAP_ADD LIST_EXTEND SET_UPDATE DICT_UPDATE DICT_MERGE",
    "iteration": "FOR_ITER GET_ANEXT",
    "unpack": "UNPACK_SEQUENCE UNPACK_EX",
    "raise": "RAISE_VARARGS",
    "yield": "YIELD_VALUE",
    "import": "IMPORT_NAME IMPORT_FROM",
}


def _classes_of_opcodes() -> dict[int, tuple[str, ...]]:
    table: dict[int, tuple[str, ...]] = {}
    for operation, names in _BY_NAME.items():
        for name in names.split():
            if name in isa.OPMAP:
                op = isa.OPMAP[name]
                table[op] = (*table.get(op, ()), operation)
    return table


_CLASSES_OF = _classes_of_opcodes()


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
            for operation in classes_of(decoded, k):
                yield operation, n


def classes_of(decoded: Decoded, k: int) -> tuple[str, ...]:
    """Give the operation classes that an instruction is charged to.

    Parameters
    ----------
    decoded : Decoded
        A code object.
    k : int
        Index of the instruction.
    """
    op = decoded.ops[k]
    if op == _INTRINSIC:
        return ("arithmetic",) if decoded.args[k] == _POSITIVE else ()
    found = _CLASSES_OF.get(op, ())
    return () if found and _of_the_compiler(decoded, k) else found


def _of_the_compiler(decoded: Decoded, k: int) -> bool:
    """Whether an instruction stands for nothing in the source."""
    ops = decoded.ops
    op = ops[k]
    if op == _CALL:
        return _calls_comprehension(decoded, k)
    if op == _BUILD_TUPLE:
        return k + 2 < len(ops) and ops[k + 2] == _MAKE_FUNCTION
    if op == _BUILD_STRING:
        return not decoded.args[k]  # an empty format, as in f"{a:}", up to 3.12
    if op == isa.YIELD_VALUE:
        return k > 3 and ops[k - 3] == _GET_AWAITABLE and _calls_comprehension(decoded, k - 4)
    if op in _NONE_TESTS:
        return k > 1 and ops[k - 1] == _COPY and ops[k - 2] in _GIVES_NONE
    return False


def _calls_comprehension(decoded: Decoded, k: int) -> bool:
    """Whether a comprehension or generator expression is called, which is a function of its own.

    From 3.12 on, comprehensions are mostly made without one.
    """
    ops = decoded.ops
    if ops[k] != _CALL or decoded.args[k] != 0:
        return False
    before = k - 2 if isa.PRECALL >= 0 else k - 1
    return before >= 0 and ops[before] in _ITERATED


def _named(*names: str) -> frozenset[int]:
    return frozenset(isa.OPMAP[name] for name in names if name in isa.OPMAP)


_CALL, _BUILD_TUPLE, _BUILD_STRING, _MAKE_FUNCTION, _COPY, _GET_AWAITABLE = (
    isa.OPMAP[name]
    for name in (
        "CALL",
        "BUILD_TUPLE",
        "BUILD_STRING",
        "MAKE_FUNCTION",
        "COPY",
        "GET_AWAITABLE",
    )
)
_ITERATED = _named("GET_ITER", "GET_AITER")
_NONE_TESTS = frozenset(
    op for name, op in isa.OPMAP.items() if name.endswith(("_IF_NONE", "_IF_NOT_NONE"))
)
#: What `match` and `except*` ask whether it gave None.
_GIVES_NONE = _named(
    "CHECK_EG_MATCH", "PREP_RERAISE_STAR", "CALL_INTRINSIC_2", "MATCH_CLASS", "MATCH_KEYS"
)
#: Unary plus, an intrinsic from 3.12 on (Include/internal/pycore_intrinsics.h).
_INTRINSIC, _POSITIVE = isa.OPMAP.get("CALL_INTRINSIC_1", -1), 5
