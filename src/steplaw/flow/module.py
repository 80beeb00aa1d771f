"""What a module's source binds, read without running it."""

from __future__ import annotations

import ast
import builtins
import dis
from collections import Counter
from collections.abc import Iterator
from functools import lru_cache
from types import CodeType

from steplaw.flow.values import Const, Function, Num, Tup, Value

_STORES = frozenset(("STORE_DEREF", "DELETE_DEREF"))
_GLOBAL_STORES = frozenset(("STORE_GLOBAL", "DELETE_GLOBAL"))


class Module:
    """A module's source.

    Parameters
    ----------
    source : str
        Its text.
    file : str
        Its file name.

    Attributes
    ----------
    code : CodeType
        Its code object, never run.
    bound : frozenset of str
        Names that it binds anywhere at its top level or by ``global``.
    functions : dict of str to Function
        Functions at its top level that are bound once and not decorated.
    """

    def __init__(self, source: str, file: str) -> None:
        self.tree = ast.parse(source, file)
        self.code = compile(source, file, "exec", dont_inherit=True)
        counts = Counter(_bound_names(self.code))
        for code in all_codes(self.code):
            counts.update(_names_of(code, _GLOBAL_STORES))
        self.has_star = any(
            isinstance(node, ast.ImportFrom) and node.names[0].name == "*"
            for node in ast.walk(self.tree)
        )
        self.bound = frozenset(counts) | (frozenset(dir(builtins)) if self.has_star else set())
        self.functions = self._functions(counts)

    def _functions(self, counts: Counter[str]) -> dict[str, Function]:
        nodes = {
            node.name: node
            for node in self.tree.body
            if isinstance(node, ast.FunctionDef) and not node.decorator_list
        }
        codes = {
            c.co_name: c
            for c in self.code.co_consts
            if isinstance(c, CodeType) and c.co_name in nodes
        }
        return {
            name: Function(codes[name], (), _defaults(node), bool(node.args.kwonlyargs))
            for name, node in nodes.items()
            if counts[name] == 1 and name in codes and _defaults_known(node)
        }

    def find(self, name: str) -> CodeType | None:
        """Give the code object of a qualified name, None where there is none."""
        found = None
        for code in all_codes(self.code):
            if code.co_qualname == name:
                found = code
        return found

    def node(self, name: str) -> ast.FunctionDef | ast.AsyncFunctionDef | None:
        """Give the syntax tree of a qualified name."""
        body: list[ast.stmt] = self.tree.body
        found: ast.stmt | None = None
        for part in name.split("."):
            found = next(
                (
                    x
                    for x in reversed(list(_statements(body)))
                    if isinstance(x, ast.FunctionDef | ast.AsyncFunctionDef | ast.ClassDef)
                    and x.name == part
                ),
                None,
            )
            if found is None:
                return None
            body = found.body
        return found if isinstance(found, ast.FunctionDef | ast.AsyncFunctionDef) else None


def _statements(body: list[ast.stmt]) -> Iterator[ast.stmt]:
    """Give statements, those under ``if`` and ``try`` included."""
    for statement in body:
        yield statement
        for part in ("body", "orelse", "finalbody"):
            if isinstance(statement, ast.If | ast.Try):
                yield from _statements(getattr(statement, part, []))


def all_codes(code: CodeType) -> Iterator[CodeType]:
    """Give a code object and all those inside it."""
    yield code
    for inner in code.co_consts:
        if isinstance(inner, CodeType):
            yield from all_codes(inner)


def _bound_names(code: CodeType) -> Iterator[str]:
    for instruction in dis.get_instructions(code):
        if instruction.opname in ("STORE_NAME", "DELETE_NAME", "STORE_GLOBAL"):
            yield str(instruction.argval)


def _names_of(code: CodeType, opnames: frozenset[str]) -> Iterator[str]:
    for instruction in dis.get_instructions(code):
        if instruction.opname in opnames:
            yield str(instruction.argval)


@lru_cache(maxsize=1024)
def stored_names(code: CodeType) -> frozenset[str]:
    """Give the variables of outer functions that a function or one inside it may rebind."""
    return frozenset(
        name
        for inner in all_codes(code)
        for name in _names_of(inner, _STORES)
        if name in inner.co_freevars
    )


def _defaults_known(node: ast.FunctionDef) -> bool:
    return all(_constant(d) is not None for d in node.args.defaults)


def _defaults(node: ast.FunctionDef) -> tuple[Value, ...]:
    return tuple(v for v in map(_constant, node.args.defaults) if v is not None)


def _constant(node: ast.expr) -> Value | None:
    from steplaw.flow.poly import as_poly

    try:
        value = ast.literal_eval(node)
    except (ValueError, TypeError, SyntaxError):
        return None
    if isinstance(value, int) and not isinstance(value, bool):
        return Num(as_poly(value))
    if value is None or isinstance(value, bool | str | bytes | float):
        return Const(value)
    return Tup(()) if value == () else None
