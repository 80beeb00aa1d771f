"""Formulas as people write them."""

from __future__ import annotations

import ast
from dataclasses import dataclass

from steplaw.faces.text import clean

RAISED = str.maketrans("0123456789-n", "⁰¹²³⁴⁵⁶⁷⁸⁹⁻ⁿ")
LONGEST = 4000
SUM, PRODUCT, POWER, ATOM = range(4)


def pretty(formula: object, unicode: bool = True) -> str:
    """Write a formula of the record as people do.

    Parameters
    ----------
    formula : str or None
        A formula that `sympy.sympify` reads; None where no formula is claimed.
    unicode : bool
        Whether the place it goes to can show other than ASCII characters.

    Returns
    -------
    str
        The same formula; what cannot be read is given back as it is, made harmless.

    Examples
    --------
    >>> pretty("n**3/6 - n**2/2 + 23*n/6")
    'n³/6 − n²/2 + 23/6 n'
    >>> pretty("n*log(n)/log(2)", unicode=False)
    'n lg(n)'
    """
    if formula is None:
        return "none"
    tree = _parsed(formula)
    try:
        text = str(formula) if tree is None else _Writer(unicode).write(tree).text
    except RecursionError:
        text = str(formula)
    return clean(text, unicode)


def terms(formula: object, unicode: bool = True) -> list[str]:
    """Split a formula into its terms, each with its sign.

    Parameters
    ----------
    formula : str or None
        A formula that `sympy.sympify` reads.
    unicode : bool
        As for `pretty`.

    Returns
    -------
    list of str
        Terms in the order of the formula, such as ``['n³/6', '− n²/2']``.
    """
    tree = None if formula is None else _parsed(formula)
    if tree is None:
        return [pretty(formula, unicode)]
    writer = _Writer(unicode)
    out: list[str] = []
    try:
        for negative, node in _summands(tree):
            text = clean(writer.product(node).text, unicode)
            sign = f"{writer.minus} " if negative else "+ " if out else ""
            out.append(sign + text)
    except RecursionError:
        return [pretty(formula, unicode)]
    return out


def signed_terms(formula: object) -> list[str]:
    """Split a formula into its terms, each a formula by itself, in the order of `terms`.

    Parameters
    ----------
    formula : str or None
        A formula that `sympy.sympify` reads.

    Returns
    -------
    list of str
        Such as ``['n**3/6', '-(n**2/2)']``; nothing where the formula cannot be read.
    """
    tree = None if formula is None else _parsed(formula)
    if tree is None:
        return []
    try:
        return [_signed(negative, node) for negative, node in _summands(tree)]
    except RecursionError:
        return []


def _signed(negative: bool, node: ast.expr) -> str:
    # The sign that _summands gives counts the minus signs inside the product as well.
    return ast.unparse(node) if not negative ^ _is_negative(node) else f"-({ast.unparse(node)})"


def _parsed(formula: object) -> ast.expr | None:
    text = str(formula)
    if len(text) > LONGEST:
        return None
    try:
        return ast.parse(text.strip(), mode="eval").body
    except (SyntaxError, ValueError, RecursionError, MemoryError):
        return None


def _summands(node: ast.expr, negative: bool = False) -> list[tuple[bool, ast.expr]]:
    if isinstance(node, ast.BinOp) and isinstance(node.op, ast.Add | ast.Sub):
        right = negative ^ isinstance(node.op, ast.Sub)
        return _summands(node.left, negative) + _summands(node.right, right)
    if isinstance(node, ast.UnaryOp) and isinstance(node.op, ast.USub):
        return _summands(node.operand, not negative)
    return [(negative ^ _is_negative(node), node)]


def _is_negative(node: ast.expr) -> bool:
    """Whether the minus signs in front of a product's factors leave one over."""
    if isinstance(node, ast.BinOp) and isinstance(node.op, ast.Mult | ast.Div):
        return _is_negative(node.left) ^ _is_negative(node.right)
    if isinstance(node, ast.UnaryOp) and isinstance(node.op, ast.USub):
        return not _is_negative(node.operand)
    return False


@dataclass(frozen=True, slots=True)
class _Piece:
    text: str
    rank: int


class _Writer:
    def __init__(self, unicode: bool) -> None:
        self.unicode = unicode
        self.minus = "−" if unicode else "-"
        self.times = "·" if unicode else "*"

    def write(self, node: ast.expr) -> _Piece:
        parts = _summands(node)
        if len(parts) == 1 and not parts[0][0]:
            return self.product(parts[0][1])
        out = ""
        for place, (negative, part) in enumerate(parts):
            text = self.product(part).text
            if place:
                out += f" {self.minus if negative else '+'} {text}"
            else:
                out += f"{self.minus}{text}" if negative else text
        return _Piece(out, SUM)

    def product(self, node: ast.expr) -> _Piece:
        over: list[ast.expr] = []
        under: list[ast.expr] = []
        _factors(node, over, under)
        if len(over) == 1 and not under:
            return self.single(over[0])
        binary = self._take_binary_logarithm(over, under)
        numbers = [f for f in over if _is_number(f)]
        others = [f for f in over if not _is_number(f)]
        below_numbers = [f for f in under if _is_number(f)]
        below = [f for f in under if not _is_number(f)]
        head = self.times.join(self.group(f) for f in numbers if not _is_one(f))
        divisor = self.times.join(self.group(f) for f in below_numbers)
        body = self._join([self.group(f) for f in others] + binary)
        if below and not (head and body):
            bottom = self._join([self.group(f) for f in below])
            bottom = divisor + self.gap(divisor, bottom) + bottom if divisor else bottom
            closed = _closed(bottom, len(below_numbers + below))
            return _Piece(f"{head or body or '1'}/{closed}", PRODUCT)
        closed = f"/{_closed(divisor, len(below_numbers))}" if divisor else ""
        if head and closed and body:
            text = head + closed + self.gap(head + closed, body) + body
        elif head:
            text = head + self.gap(head, body) + body + closed
        else:
            text = (body or "1") + closed
        if below:
            bottom = self._join([self.group(f) for f in below])
            text += f"/{_closed(bottom, len(below))}"
        return _Piece(text, PRODUCT)

    def _take_binary_logarithm(self, over: list[ast.expr], under: list[ast.expr]) -> list[str]:
        """Take ``log(x)`` over ``log(2)`` out of a product: it is the binary logarithm."""
        out = []
        for bottom in [f for f in under if _is_call(f, "log") and _is_two(_argument(f))]:
            top = next((f for f in over if _is_call(f, "log")), None)
            if top is None:
                break
            over.remove(top)
            under.remove(bottom)
            out.append(self._named("lg", [_argument(top)]))
        return out

    def gap(self, head: str, body: str) -> str:
        """Give what stands between a number and what it multiplies, as in 4n and 23/6 n."""
        if body and body[0].isdigit():
            return self.times
        plain = head.isdecimal() and not (body[:1].isalpha() and body[1:2].isalpha())
        return "" if plain or not body else " "

    def _join(self, texts: list[str]) -> str:
        out = ""
        for text in texts:
            simple = text[0].isalnum() and out and (out[-1].isalnum() or out[-1] == ")")
            gap = " " if text.startswith(("lg", "ln")) else (self.times if out and simple else "")
            out += (gap if out else "") + text
        return out

    def single(self, node: ast.expr) -> _Piece:
        if isinstance(node, ast.Constant):
            value = node.value
            text = f"{value:.4g}" if isinstance(value, float) else str(value)
            return _Piece(text, ATOM)
        if isinstance(node, ast.Name):
            return _Piece(node.id, ATOM)
        if isinstance(node, ast.UnaryOp) and isinstance(node.op, ast.USub):
            return _Piece(self.minus + self.group(node.operand), SUM)
        if isinstance(node, ast.BinOp):
            if isinstance(node.op, ast.Pow):
                return self.power(node)
            if isinstance(node.op, ast.Add | ast.Sub):
                return self.write(node)
            if isinstance(node.op, ast.Mult | ast.Div):
                return self.product(node)
            if isinstance(node.op, ast.Mod):
                return _Piece(f"{self.group(node.left)} mod {self.group(node.right)}", SUM)
        if isinstance(node, ast.Call) and isinstance(node.func, ast.Name) and not node.keywords:
            return self.call(node.func.id, node.args)
        return _Piece(ast.unparse(node), SUM)

    def group(self, node: ast.expr) -> str:
        piece = self.write(node)
        return piece.text if piece.rank > PRODUCT else f"({piece.text})"

    def power(self, node: ast.BinOp) -> _Piece:
        base = self.write(node.left)
        below = base.text if base.rank == ATOM else f"({base.text})"
        above = self.write(node.right)
        plain = above.text.replace("−", "-")
        if self.unicode and (plain == "n" or plain.removeprefix("-").isdecimal()):
            return _Piece(below + plain.translate(RAISED), POWER)
        closed = above.text if above.rank == ATOM else f"({above.text})"
        return _Piece(f"{below}^{closed}", POWER)

    def call(self, name: str, args: list[ast.expr]) -> _Piece:
        if len(args) == 1:
            inner = self.write(args[0]).text
            if name == "floor" and self.unicode:
                return _Piece(f"⌊{inner}⌋", ATOM)
            if name == "ceiling":
                return _Piece(f"⌈{inner}⌉" if self.unicode else f"ceil({inner})", ATOM)
            if name == "factorial":
                return _Piece(f"{_atomic(inner)}!", ATOM)
            if name == "sqrt" and self.unicode:
                return _Piece(f"√{_atomic(inner)}", ATOM)
        if name == "Mod" and len(args) == 2:
            return _Piece(f"{self.group(args[0])} mod {self.group(args[1])}", SUM)
        shown = {"log": "ln", "harmonic": "H", "binomial": "C"}.get(name, name)
        text = self._named(shown, args)
        return _Piece(text, ATOM if text.endswith(")") else POWER)

    def _named(self, name: str, args: list[ast.expr]) -> str:
        inner = ", ".join(self.write(arg).text for arg in args)
        if self.unicode and name in ("lg", "ln") and inner.isalnum():
            return f"{name} {inner}"
        return f"{name}({inner})"


def _factors(node: ast.expr, over: list[ast.expr], under: list[ast.expr]) -> None:
    if isinstance(node, ast.BinOp) and isinstance(node.op, ast.Mult | ast.Div):
        _factors(node.left, over, under)
        turned = isinstance(node.op, ast.Div)
        _factors(node.right, under if turned else over, over if turned else under)
    elif isinstance(node, ast.UnaryOp) and isinstance(node.op, ast.USub):
        # The sign itself was counted by _is_negative.
        _factors(node.operand, over, under)
    else:
        over.append(node)


def _is_number(node: ast.expr) -> bool:
    return isinstance(node, ast.Constant) and isinstance(node.value, int | float)


def _is_one(node: ast.expr) -> bool:
    return isinstance(node, ast.Constant) and node.value == 1


def _is_two(node: ast.expr) -> bool:
    return isinstance(node, ast.Constant) and node.value == 2


def _is_call(node: ast.expr, name: str) -> bool:
    named = isinstance(node, ast.Call) and isinstance(node.func, ast.Name) and node.func.id == name
    return named and isinstance(node, ast.Call) and len(node.args) == 1


def _argument(node: ast.expr) -> ast.expr:
    assert isinstance(node, ast.Call)
    return node.args[0]


def _closed(text: str, count: int) -> str:
    return f"({text})" if count > 1 else text


def _atomic(text: str) -> str:
    return text if text.isalnum() else f"({text})"
