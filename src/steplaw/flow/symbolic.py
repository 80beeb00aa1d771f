"""Symbolic running of single instructions on the operand stack."""

from __future__ import annotations

import builtins
import dis
import inspect
from collections.abc import Callable
from types import CodeType

from steplaw.flow import isa
from steplaw.flow.calls import Calls
from steplaw.flow.decode import Decoded
from steplaw.flow.poly import ZERO, as_poly
from steplaw.flow.values import (
    NONE,
    NULL,
    Builtin,
    Cell,
    Const,
    Function,
    Method,
    Num,
    Obj,
    Slice,
    State,
    Test,
    Tup,
    Value,
)

_EFFECTS = (
    ("NOP RESUME PRECALL COPY_FREE_VARS RETURN_GENERATOR SETUP_ANNOTATIONS ASYNC_GEN_WRAP", 0, 0),
    ("POP_TOP STORE_NAME STORE_GLOBAL DELETE_ATTR POP_EXCEPT RETURN_VALUE PRINT_EXPR", 1, 0),
    ("LOAD_BUILD_CLASS LOAD_ASSERTION_ERROR LOAD_LOCALS LOAD_NAME LOAD_CLASSDEREF", 0, 1),
    ("UNARY_POSITIVE UNARY_INVERT GET_YIELD_FROM_ITER GET_AITER GET_AWAITABLE", 1, 1),
    ("FORMAT_SIMPLE CONVERT_VALUE CALL_INTRINSIC_1 LIST_TO_TUPLE", 1, 1),
    ("LOAD_FROM_DICT_OR_DEREF LOAD_FROM_DICT_OR_GLOBALS IMPORT_FROM_POP", 1, 1),
    ("CALL_INTRINSIC_2 FORMAT_WITH_SPEC IMPORT_NAME PREP_RERAISE_STAR", 2, 1),
    ("IMPORT_FROM GET_ANEXT MATCH_MAPPING MATCH_SEQUENCE PUSH_EXC_INFO", 1, 2),
    ("BEFORE_WITH BEFORE_ASYNC_WITH", 1, 2),
    ("CHECK_EXC_MATCH CHECK_EG_MATCH", 2, 2),
    ("MATCH_KEYS", 2, 3),
    ("MATCH_CLASS", 3, 1),
    ("DELETE_NAME DELETE_GLOBAL DELETE_DEREF JUMP_FORWARD JUMP_BACKWARD", 0, 0),
    ("JUMP_BACKWARD_NO_INTERRUPT RETURN_CONST", 0, 0),
    ("WITH_EXCEPT_START", 0, 1),
    ("END_SEND", 2, 1),
    ("SEND", 2, 2),
    ("YIELD_VALUE", 1, 1),
)
_PLAIN = {
    isa.OPMAP[name]: (takes, gives)
    for names, takes, gives in _EFFECTS
    for name in names.split()
    if name in isa.OPMAP
}
_ADD, _FLOOR, _TIMES, _REMAINDER, _POWER, _SHIFT, _MINUS = 0, 2, 5, 6, 8, 9, 10
_INPLACE = 13


class Stop(Exception):
    """What keeps a whole function from being derived."""

    def __init__(self, reason: str, line: int) -> None:
        super().__init__(reason)
        self.reason, self.line = reason, line


class Machine(Calls):
    """Runs instructions on symbolic states.

    Attributes
    ----------
    decoded : Decoded
        The code object at hand.
    """

    decoded: Decoded

    def step(self, state: State, k: int) -> None:
        """Run one instruction that is no jump."""
        op = self.decoded.ops[k]
        self.at = k
        self.line = self.decoded.lines[k] or self.line
        plain = _PLAIN.get(op)
        if plain is not None:
            self._plain(state, *plain)
            return
        handler = _HANDLERS.get(op)
        if handler is None:
            raise Stop(f"the instruction {isa.OPNAME[op]} is not known to it", self.line)
        handler(self, state, self.decoded.args[k])

    def _plain(self, state: State, takes: int, gives: int) -> None:
        if takes:
            for value in state.stack[-takes:]:
                self.loosen(state, value, read_only=True)
            del state.stack[-takes:]
        state.stack.extend(self.other(state, "") for _ in range(gives))

    def enter(self, state: State, function: Function) -> None:
        """Put the free variables of a function in their places."""
        code = function.code
        first = code.co_nlocals + sum(1 for v in code.co_cellvars if v not in code.co_varnames)
        for place, cell in enumerate(function.closure):
            state.local[first + place] = cell

    def slot(self, place: int) -> str:
        """Give the name of a local variable."""
        return str(self.decoded.code._varname_from_oparg(place))  # type: ignore[attr-defined]

    def load(self, state: State, place: int) -> Value:
        """Give the value of a local variable."""
        value = state.local.get(place)
        if value is None:
            value = state.local[place] = self.other(state, self.slot(place))
        return value


def _load_fast(m: Machine, s: State, arg: int) -> None:
    s.stack.append(m.load(s, arg))


def _load_fast_load_fast(m: Machine, s: State, arg: int) -> None:
    s.stack += [m.load(s, arg >> 4), m.load(s, arg & 15)]


def _load_and_clear(m: Machine, s: State, arg: int) -> None:
    s.stack.append(s.local.pop(arg, NULL))


def _store_fast(m: Machine, s: State, arg: int) -> None:
    value = s.stack.pop()
    if value is NULL:
        s.local.pop(arg, None)
    else:
        s.local[arg] = m.named(value, m.slot(arg))


def _store_store(m: Machine, s: State, arg: int) -> None:
    _store_fast(m, s, arg >> 4)
    _store_fast(m, s, arg & 15)


def _store_load(m: Machine, s: State, arg: int) -> None:
    _store_fast(m, s, arg >> 4)
    _load_fast(m, s, arg & 15)


def _delete_fast(m: Machine, s: State, arg: int) -> None:
    s.local.pop(arg, None)


def _make_cell(m: Machine, s: State, arg: int) -> None:
    key = m.fresh("cell")
    value = s.local.get(arg)
    if value is not None:
        s.cells[key] = value
    s.local[arg] = Cell(key)


def _load_deref(m: Machine, s: State, arg: int) -> None:
    cell = m.load(s, arg)
    name = m.slot(arg)
    if not isinstance(cell, Cell):
        s.stack.append(m.other(s, name))
        return
    value = None if cell.key in m.shared else s.cells.get(cell.key)
    s.stack.append(m.other(s, name) if value is None else value)


def _store_deref(m: Machine, s: State, arg: int) -> None:
    value, cell = s.stack.pop(), m.load(s, arg)
    if isinstance(cell, Cell):
        s.cells[cell.key] = m.named(value, m.slot(arg))
    else:
        m.loosen(s, value)


def _load_const(m: Machine, s: State, arg: int) -> None:
    s.stack.append(m.constant(m.decoded.code.co_consts[arg]))


def _load_global(m: Machine, s: State, arg: int) -> None:
    value = m.global_value(s, m.decoded.code.co_names[arg >> 1])
    if not arg & 1:
        s.stack.append(value)
    elif isa.VERSION >= (3, 13):
        s.stack += [value, NULL]
    else:
        s.stack += [NULL, value]


def _push_null(m: Machine, s: State, arg: int) -> None:
    s.stack.append(NULL)


def _load_attr(m: Machine, s: State, arg: int) -> None:
    method = bool(arg & 1) and isa.VERSION >= (3, 12)
    name = m.decoded.code.co_names[arg >> 1 if isa.VERSION >= (3, 12) else arg]
    owner = s.stack.pop()
    if method:
        s.stack += [Method(owner, name), owner]
    else:
        s.stack.append(m.attribute(s, owner, name))


def _load_method(m: Machine, s: State, arg: int) -> None:
    owner = s.stack.pop()
    s.stack += [Method(owner, m.decoded.code.co_names[arg]), owner]


def _load_super(m: Machine, s: State, arg: int) -> None:
    del s.stack[-3:]
    name = m.decoded.code.co_names[arg >> 2]
    s.stack.append(m.other(s, f"super().{name}"))
    if arg & 1:
        s.stack.append(NULL)


def _store_attr(m: Machine, s: State, arg: int) -> None:
    owner = s.stack.pop()
    m.loosen(s, s.stack.pop())
    m.attributes_changed(s, owner)


def _subscript(m: Machine, s: State, arg: int) -> None:
    place = s.stack.pop()
    s.stack.append(m.item(s, s.stack.pop(), place))


def _binary_slice(m: Machine, s: State, arg: int) -> None:
    stop, start = s.stack.pop(), s.stack.pop()
    s.stack.append(m.item(s, s.stack.pop(), Slice(start, stop, NONE)))


def _build_slice(m: Machine, s: State, arg: int) -> None:
    step = s.stack.pop() if arg == 3 else NONE
    stop, start = s.stack.pop(), s.stack.pop()
    s.stack.append(Slice(start, stop, step))


def _store_subscript(m: Machine, s: State, arg: int) -> None:
    place, owner = s.stack.pop(), s.stack.pop()
    m.loosen(s, s.stack.pop())
    m.item_stored(s, owner, place)


def _store_slice(m: Machine, s: State, arg: int) -> None:
    del s.stack[-2:]
    owner = s.stack.pop()
    m.loosen(s, s.stack.pop())
    m.changed(s, owner)


def _delete_subscript(m: Machine, s: State, arg: int) -> None:
    s.stack.pop()
    m.changed(s, s.stack.pop())


def _build(kind: str) -> Callable[[Machine, State, int], None]:
    def build(m: Machine, s: State, arg: int) -> None:
        items = s.stack[len(s.stack) - arg :]
        del s.stack[len(s.stack) - arg :]
        if kind == "tuple":
            s.stack.append(Tup(tuple(items)))
            return
        for item in items:
            m.loosen(s, item)
        exact = kind == "list" or (kind == "set" and arg < 2)
        s.stack.append(m.made(s, kind, as_poly(arg) if exact else None))

    return build


def _build_map(m: Machine, s: State, arg: int) -> None:
    for item in s.stack[len(s.stack) - 2 * arg :]:
        m.loosen(s, item)
    del s.stack[len(s.stack) - 2 * arg :]
    s.stack.append(m.made(s, "dict", as_poly(arg) if arg < 2 else None))


def _build_const_map(m: Machine, s: State, arg: int) -> None:
    keys = s.stack.pop()
    for item in s.stack[len(s.stack) - arg :]:
        m.loosen(s, item)
    del s.stack[len(s.stack) - arg :]
    count = None
    if isinstance(keys, Tup):
        count = len(set(map(repr, keys.items)))
    s.stack.append(m.made(s, "dict", None if count is None else as_poly(count)))


def _build_string(m: Machine, s: State, arg: int) -> None:
    del s.stack[len(s.stack) - arg :]
    s.stack.append(m.other(s, ""))


def _format_value(m: Machine, s: State, arg: int) -> None:
    del s.stack[-2 if arg & 4 else -1 :]
    s.stack.append(m.other(s, ""))


def _list_append(m: Machine, s: State, arg: int) -> None:
    m.loosen(s, s.stack.pop())
    m.grown(s, s.stack[-arg], as_poly(1))


def _set_add(m: Machine, s: State, arg: int) -> None:
    m.loosen(s, s.stack.pop())
    m.changed(s, s.stack[-arg])


def _map_add(m: Machine, s: State, arg: int) -> None:
    m.loosen(s, s.stack.pop())
    m.loosen(s, s.stack.pop())
    m.changed(s, s.stack[-arg])


def _list_extend(m: Machine, s: State, arg: int) -> None:
    value = s.stack.pop()
    m.extended(s, s.stack[-arg], value)


def _update(m: Machine, s: State, arg: int) -> None:
    m.consume(s, s.stack.pop())
    m.changed(s, s.stack[-arg])


def _compare(m: Machine, s: State, arg: int) -> None:
    right, left = s.stack.pop(), s.stack.pop()
    shift = {(3, 11): 0, (3, 12): 4}.get(isa.VERSION, 5)
    s.stack.append(m.compared(s, dis.cmp_op[arg >> shift], left, right))


def _is_op(m: Machine, s: State, arg: int) -> None:
    right, left = s.stack.pop(), s.stack.pop()
    s.stack.append(m.identical(s, left, right, bool(arg)))


def _contains(m: Machine, s: State, arg: int) -> None:
    where = s.stack.pop()
    s.stack.pop()
    m.consume(s, where, whole=False)
    s.stack.append(m.other(s, ""))


def _unary_not(m: Machine, s: State, arg: int) -> None:
    test = m.truth(s, s.stack.pop())
    s.stack.append(Test(test.false, test.true) if test else m.other(s, ""))


def _to_bool(m: Machine, s: State, arg: int) -> None:
    value = s.stack.pop()
    s.stack.append(m.truth(s, value) or m.other(s, ""))


def _unary_negative(m: Machine, s: State, arg: int) -> None:
    value = s.stack.pop()
    s.stack.append(m.combined(s, _MINUS, Num(ZERO), value, False))


def _binary_op(m: Machine, s: State, arg: int) -> None:
    right, left = s.stack.pop(), s.stack.pop()
    inplace, arg = arg >= _INPLACE, arg % _INPLACE
    s.stack.append(m.combined(s, arg, left, right, inplace))


def _get_iter(m: Machine, s: State, arg: int) -> None:
    s.stack.append(m.iterator(s, s.stack.pop()))


def _get_len(m: Machine, s: State, arg: int) -> None:
    s.stack.append(m.length_of(s, s.stack[-1]))


def _unpack(m: Machine, s: State, arg: int) -> None:
    value = s.stack.pop()
    if isinstance(value, Tup) and len(value.items) == arg:
        s.stack.extend(reversed(value.items))
        return
    m.consume(s, value)
    s.stack.extend(m.other(s, "") for _ in range(arg))


def _unpack_ex(m: Machine, s: State, arg: int) -> None:
    m.consume(s, s.stack.pop())
    before, behind = arg & 255, arg >> 8
    s.stack.extend(m.other(s, "") for _ in range(behind))
    s.stack.append(m.made(s, "list", None))
    s.stack.extend(m.other(s, "") for _ in range(before))


def _copy(m: Machine, s: State, arg: int) -> None:
    s.stack.append(s.stack[-arg])


def _swap(m: Machine, s: State, arg: int) -> None:
    s.stack[-arg], s.stack[-1] = s.stack[-1], s.stack[-arg]


def _kw_names(m: Machine, s: State, arg: int) -> None:
    m.keywords = m.decoded.code.co_consts[arg]


def _call(m: Machine, s: State, arg: int) -> None:
    names, m.keywords = m.keywords, ()
    _call_with(m, s, arg, names)


def _call_kw(m: Machine, s: State, arg: int) -> None:
    names = s.stack.pop()
    keys: tuple[str, ...] = ()
    if isinstance(names, Tup):
        keys = tuple(str(x.value) for x in names.items if isinstance(x, Const))
    _call_with(m, s, arg, keys)


def _call_with(m: Machine, s: State, arg: int, keys: tuple[str, ...]) -> None:
    args = s.stack[len(s.stack) - arg :]
    del s.stack[len(s.stack) - arg :]
    second, first = s.stack.pop(), s.stack.pop()
    if isa.VERSION >= (3, 13):
        function, own = first, second
    else:
        function, own = (second, NULL) if first is NULL else (first, second)
    if own is not NULL and not isinstance(function, Method):
        args = [own, *args]
    split = len(args) - len(keys)
    s.stack.append(m.call(s, function, args[:split], dict(zip(keys, args[split:], strict=True))))


def _call_ex(m: Machine, s: State, arg: int) -> None:
    values = s.stack[-1 - (arg & 1) :]
    del s.stack[-1 - (arg & 1) :]
    second, first = s.stack.pop(), s.stack.pop()
    function = first if isa.VERSION >= (3, 13) else second
    s.stack.append(m.call_unseen(s, function, values))


def _make_function(m: Machine, s: State, arg: int) -> None:
    code = s.stack.pop()
    if isa.VERSION >= (3, 13):
        s.stack.append(m.function(s, code, (), (), False))
        return
    closure = s.stack.pop() if arg & 8 else Tup(())
    if arg & 4:
        s.stack.pop()
    if arg & 2:
        s.stack.pop()
    defaults = s.stack.pop() if arg & 1 else Tup(())
    s.stack.append(m.function(s, code, _items(closure), _items(defaults), bool(arg & 2)))


def _set_function_attribute(m: Machine, s: State, arg: int) -> None:
    function, value = s.stack.pop(), s.stack.pop()
    if isinstance(function, Function):
        closure = _items(value) if arg == 8 else function.closure
        defaults = _items(value) if arg == 1 else function.defaults
        function = m.function(
            s, Const(function.code), closure, defaults, function.kwdefaults or arg == 2
        )
    s.stack.append(function)


def _items(value: Value) -> tuple[Value, ...]:
    if isinstance(value, Tup):
        return value.items
    return ()


_HANDLERS: dict[int, Callable[[Machine, State, int], None]] = {
    isa.OPMAP[name]: handler
    for names, handler in (
        ("LOAD_FAST LOAD_FAST_CHECK LOAD_CLOSURE", _load_fast),
        ("LOAD_FAST_LOAD_FAST", _load_fast_load_fast),
        ("LOAD_FAST_AND_CLEAR", _load_and_clear),
        ("STORE_FAST", _store_fast),
        ("STORE_FAST_STORE_FAST", _store_store),
        ("STORE_FAST_LOAD_FAST", _store_load),
        ("DELETE_FAST", _delete_fast),
        ("MAKE_CELL", _make_cell),
        ("LOAD_DEREF", _load_deref),
        ("STORE_DEREF", _store_deref),
        ("LOAD_CONST", _load_const),
        ("LOAD_GLOBAL", _load_global),
        ("PUSH_NULL", _push_null),
        ("LOAD_ATTR", _load_attr),
        ("LOAD_METHOD", _load_method),
        ("LOAD_SUPER_ATTR", _load_super),
        ("STORE_ATTR", _store_attr),
        ("BINARY_SUBSCR", _subscript),
        ("BINARY_SLICE", _binary_slice),
        ("BUILD_SLICE", _build_slice),
        ("STORE_SUBSCR", _store_subscript),
        ("STORE_SLICE", _store_slice),
        ("DELETE_SUBSCR", _delete_subscript),
        ("BUILD_TUPLE", _build("tuple")),
        ("BUILD_LIST", _build("list")),
        ("BUILD_SET", _build("set")),
        ("BUILD_MAP", _build_map),
        ("BUILD_CONST_KEY_MAP", _build_const_map),
        ("BUILD_STRING", _build_string),
        ("FORMAT_VALUE", _format_value),
        ("LIST_APPEND", _list_append),
        ("SET_ADD", _set_add),
        ("MAP_ADD", _map_add),
        ("LIST_EXTEND", _list_extend),
        ("SET_UPDATE DICT_UPDATE DICT_MERGE", _update),
        ("COMPARE_OP", _compare),
        ("IS_OP", _is_op),
        ("CONTAINS_OP", _contains),
        ("UNARY_NOT", _unary_not),
        ("UNARY_NEGATIVE", _unary_negative),
        ("TO_BOOL", _to_bool),
        ("BINARY_OP", _binary_op),
        ("GET_ITER", _get_iter),
        ("GET_LEN", _get_len),
        ("UNPACK_SEQUENCE", _unpack),
        ("UNPACK_EX", _unpack_ex),
        ("COPY", _copy),
        ("SWAP", _swap),
        ("KW_NAMES", _kw_names),
        ("CALL", _call),
        ("CALL_KW", _call_kw),
        ("CALL_FUNCTION_EX", _call_ex),
        ("MAKE_FUNCTION", _make_function),
        ("SET_FUNCTION_ATTRIBUTE", _set_function_attribute),
    )
    for name in names.split()
    if name in isa.OPMAP
}

__all__ = ["ZERO", "Builtin", "CodeType", "Machine", "Obj", "Stop", "builtins", "inspect"]
