"""Formulas as small trees of plain JSON values, for a face that works them out by itself."""

from __future__ import annotations

import ast
from collections.abc import Collection
from typing import Any

LONGEST = 4000
OPERATORS = {
    ast.Add: "+",
    ast.Sub: "-",
    ast.Mult: "*",
    ast.Div: "/",
    ast.Pow: "^",
    ast.Mod: "%",
}
COMPARISONS = {
    ast.Lt: "<",
    ast.LtE: "<=",
    ast.Gt: ">",
    ast.GtE: ">=",
    ast.Eq: "==",
    ast.NotEq: "!=",
}
WORDED = {"Lt": "<", "Le": "<=", "Gt": ">", "Ge": ">=", "Eq": "==", "Ne": "!="}
CONSTANTS = ("E", "pi", "GoldenRatio", "EulerGamma")
FUNCTIONS = {
    "log": (1, 2),
    "exp": (1, 1),
    "sqrt": (1, 1),
    "floor": (1, 1),
    "ceiling": (1, 1),
    "harmonic": (1, 2),
    "factorial": (1, 1),
    "subfactorial": (1, 1),
    "binomial": (2, 2),
    "catalan": (1, 1),
    "fibonacci": (1, 1),
    "lucas": (1, 1),
    "tribonacci": (1, 1),
    "Abs": (1, 1),
    "Mod": (2, 2),
    "Max": (1, 99),
    "Min": (1, 99),
}

Tree = list[Any]


class _Unknown(Exception):
    """Something that no tree is made of."""


def tree(formula: object, names: Collection[str]) -> Tree | None:
    """Turn a formula of the record into a tree.

    Parameters
    ----------
    formula : str or None
        A formula that `sympy.sympify` reads.
    names : collection of str
        The size names.

    Returns
    -------
    list or None
        ``["q", "23", "6"]`` for an exact number, numerator and denominator as texts, which no
        reader of JSON rounds; ``["f", 3.9]`` for a rounded one, ``["v", "n"]`` for a size,
        ``["c", "pi"]`` for a constant, ``["+", left, right]`` for an operation, ``["neg", x]``,
        ``["call", "log", x]``, and ``["cases", [condition, x], ...]``. None where there is no
        formula, or it holds what a tree has no word for.

    Examples
    --------
    >>> tree("n**2/2", ["n"])
    ['/', ['^', ['v', 'n'], ['q', '2', '1']], ['q', '2', '1']]
    >>> tree("open('x')", ["n"]) is None
    True
    """
    text = str(formula)
    if formula is None or len(text) > LONGEST:
        return None
    try:
        return _made(ast.parse(text.strip(), mode="eval").body, frozenset(names))
    except (_Unknown, SyntaxError, ValueError, RecursionError, MemoryError):
        return None


def _made(node: ast.expr, names: frozenset[str]) -> Tree:
    match node:
        case ast.Constant(value=bool()):
            raise _Unknown
        case ast.Constant(value=int() as whole):
            return ["q", str(whole), "1"]
        case ast.Constant(value=float() as rounded):
            return ["f", rounded]
        case ast.Name(id=name) if name in names:
            return ["v", name]
        case ast.Name(id=name) if name in CONSTANTS:
            return ["c", name]
        case ast.UnaryOp(op=ast.USub(), operand=inner):
            return ["neg", _made(inner, names)]
        case ast.UnaryOp(op=ast.UAdd(), operand=inner):
            return _made(inner, names)
        case ast.BinOp(left=left, op=op, right=right) if type(op) in OPERATORS:
            return [OPERATORS[type(op)], _made(left, names), _made(right, names)]
        case ast.Call(func=ast.Name(id="Piecewise"), args=args, keywords=[]) if args:
            return ["cases", *(_case(arg, names) for arg in args)]
        case ast.Call(func=ast.Name(id=name), args=args, keywords=[]) if name in FUNCTIONS:
            least, most = FUNCTIONS[name]
            if least <= len(args) <= most:
                return ["call", name, *(_made(arg, names) for arg in args)]
    raise _Unknown


def _case(node: ast.expr, names: frozenset[str]) -> Tree:
    match node:
        case ast.Tuple(elts=[value, condition]):
            return [_condition(condition, names), _made(value, names)]
    raise _Unknown


def _condition(node: ast.expr, names: frozenset[str]) -> Tree:
    match node:
        case ast.Constant(value=bool() as truth):
            return ["true"] if truth else ["not", ["true"]]
        case ast.Compare(left=left, ops=[op], comparators=[right]) if type(op) in COMPARISONS:
            return [COMPARISONS[type(op)], _made(left, names), _made(right, names)]
        case ast.Call(func=ast.Name(id=name), args=[left, right]) if name in WORDED:
            return [WORDED[name], _made(left, names), _made(right, names)]
        case ast.BinOp(left=left, op=ast.BitAnd() | ast.BitOr() as op, right=right):
            word = "and" if isinstance(op, ast.BitAnd) else "or"
            return [word, _condition(left, names), _condition(right, names)]
        case ast.UnaryOp(op=ast.Invert(), operand=inner):
            return ["not", _condition(inner, names)]
        case ast.Call(func=ast.Name(id="And" | "Or" as name), args=[first, *rest]):
            out = _condition(first, names)
            for other in rest:
                out = [name.lower(), out, _condition(other, names)]
            return out
    raise _Unknown
