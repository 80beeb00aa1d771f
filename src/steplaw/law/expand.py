"""Formulas taken apart into asymptotic series."""

from __future__ import annotations

import ast
import math
from collections.abc import Callable
from fractions import Fraction

from steplaw.law.evaluate import CONSTANTS, FUNCTIONS, NeedSympy, evaluate, settle
from steplaw.law.growth import (
    FLAT,
    Atom,
    Coefficient,
    Growth,
    Monomial,
    Series,
    TooHard,
    Vector,
    growth_of,
    inverse,
    is_constant,
    numeric,
    raised,
)

FACTORIAL, EXPONENTIAL, POWER, LOG, LOGLOG = range(5)
ONE = Fraction(1)
Rule = Callable[[ast.expr, list[ast.expr], frozenset[str]], Series]


def unit(place: int, amount: float = 1.0) -> Vector:
    """Give the growth vector with one entry."""
    vector = [0.0] * 5
    vector[place] = amount
    return (vector[0], vector[1], vector[2], vector[3], vector[4])


def free_names(node: ast.expr) -> tuple[str, ...]:
    """Give the names in a formula that are neither functions nor constants."""
    names = {
        n.id
        for n in ast.walk(node)
        if isinstance(n, ast.Name) and n.id not in CONSTANTS and n.id not in FUNCTIONS
    }
    return tuple(sorted(names - {"floor", "ceiling"}))


def size_atom(name: str) -> Atom:
    """Give the atom of a size itself."""
    return Atom(name, ((name, unit(POWER)),))


def log_atom(name: str) -> Atom:
    """Give the atom of the logarithm of a size."""
    return Atom(f"log({name})", ((name, unit(LOG)),))


def opaque(node: ast.expr, sizes: frozenset[str], growth: Vector = FLAT) -> Series:
    """Give a factor that swings between bounds, or is too odd to take apart, as one atom."""
    text = ast.unparse(node).replace(" ** ", "**").replace(" * ", "*").replace(" / ", "/")
    names = [n for n in free_names(node) if n in sizes]
    return Series.of((Atom(text, tuple((n, growth) for n in names) or ((" ", FLAT),)), 1))


def expand(node: ast.expr, sizes: frozenset[str]) -> Series:
    """Take a formula apart into a sum of products of atoms.

    Parameters
    ----------
    node : ast.expr
        The formula.
    sizes : frozenset of str
        The names that grow without bound; every other name is a positive constant.

    Returns
    -------
    Series
        With the growth of what was left out.

    Raises
    ------
    TooHard
        Where no rule applies.
    """
    match node:
        case ast.Constant(value=int() as number):
            return Series.constant(Fraction(number))
        case ast.Constant(value=float() as real):
            return Series.constant(real)
        case ast.Name(id=name) if name in sizes:
            return Series.of((size_atom(name), 1))
        case ast.Name(id=name):
            return Series.of((Atom(name, value=CONSTANTS.get(name)), 1))
        case ast.UnaryOp(op=ast.USub(), operand=operand):
            return expand(operand, sizes).scaled(Fraction(-1))
        case ast.BinOp(left=left, op=ast.Pow(), right=right):
            return _power(node, left, right, sizes)
        case ast.BinOp(left=left, op=op, right=right):
            return _binary(op, expand(left, sizes), expand(right, sizes))
        case ast.Call(func=ast.Name(id=name), args=args):
            return _call(node, name, args, sizes)
    raise TooHard


def _binary(op: ast.operator, left: Series, right: Series) -> Series:
    match op:
        case ast.Add():
            return left + right
        case ast.Sub():
            return left + right.scaled(Fraction(-1))
        case ast.Mult():
            return left * right
        case ast.Div():
            return left * inverse(right)
    raise TooHard


def _depends(node: ast.expr, sizes: frozenset[str]) -> bool:
    return any(n in sizes for n in free_names(node))


def _constant(node: ast.expr) -> Fraction | float | None:
    if free_names(node):
        return None
    try:
        return settle(evaluate(node, {}))
    except (NeedSympy, OverflowError, ValueError):
        return None


def _power(node: ast.expr, left: ast.expr, right: ast.expr, sizes: frozenset[str]) -> Series:
    if not _depends(right, sizes):
        exponent = _constant(right)
        if exponent is None:
            raise TooHard
        base = expand(left, sizes)
        if isinstance(exponent, Fraction):
            return raised(base, exponent)
        return _irrational_power(node, left, right, base, exponent)
    number = _constant(left)
    if number is None:
        raise TooHard
    return _exponential(node, left, float(number), right, sizes)


def _irrational_power(
    node: ast.expr, left: ast.expr, right: ast.expr, base: Series, exponent: float
) -> Series:
    """Take n**(log(3)/log(2)) and the like for atoms of their own."""
    if not isinstance(left, ast.Name) or not base.is_single():
        raise TooHard
    monomial, _ = base.single()
    text = f"{left.id}**({_tight(right)})"
    vectors = tuple((s, _times(v, exponent)) for s, v in growth_of(monomial).by_size)
    return Series.of((Atom(text, vectors), 1))


def _times(vector: Vector, by: float) -> Vector:
    a, b, c, d, e = (x * by for x in vector)
    return (a, b, c, d, e)


def _tight(node: ast.expr) -> str:
    text = ast.unparse(node)
    return text.replace(" ** ", "**").replace(" * ", "*").replace(" / ", "/")


def _exponential(
    node: ast.expr, left: ast.expr, base: float, right: ast.expr, sizes: frozenset[str]
) -> Series:
    """Take a constant to a power that depends on the size apart."""
    if base == -1:
        return opaque(node, sizes)
    if base == 0:
        raise TooHard
    exponent = expand(right, sizes)
    if exponent.errors:
        raise TooHard
    rate = math.log(abs(base))
    result = Series.constant(ONE)
    swinging = base < 0
    total: dict[str, list[float]] = {}
    for monomial, c in exponent.terms.items():
        if is_constant(monomial):
            continue
        part = _exponent_growth(monomial, c, rate)
        if part is None:
            swinging = True
            continue
        size, vector = part
        sums = total.setdefault(size, [0.0] * 5)
        for k in range(5):
            sums[k] += vector[k]
    if swinging:
        text = _tight(node)
        vectors = tuple((s, (v[0], v[1], v[2], v[3], v[4])) for s, v in total.items())
        return Series.of((Atom(text, vectors or ((" ", FLAT),)), 1))
    for monomial, c in exponent.terms.items():
        result = result * _exponential_factor(left, base, monomial, c)
    return result


def _exponent_growth(monomial: Monomial, c: Coefficient, rate: float) -> tuple[str, Vector] | None:
    """Give the growth of base**(c * monomial); None where the monomial only swings."""
    moving = [(a, e) for a, e in monomial if a.growth]
    if len(moving) != 1 or moving[0][1] != 1:
        raise TooHard
    factor = numeric(c, monomial)
    if factor is None:
        raise TooHard
    atom = moving[0][0]
    if len(atom.growth) != 1:
        raise TooHard
    size, vector = atom.growth[0]
    if atom.text == size:
        return size, unit(EXPONENTIAL, factor * rate)
    if atom.text == f"log({size})":
        return size, unit(POWER, factor * rate)
    if vector == FLAT:
        return None
    raise TooHard


def _exponential_factor(left: ast.expr, base: float, monomial: Monomial, c: Coefficient) -> Series:
    if is_constant(monomial):
        return _constant_power(left, base, monomial, c)
    part = _exponent_growth(monomial, c, math.log(base))
    assert part is not None
    size, vector = part
    if vector[POWER]:
        exponent = vector[POWER]
        if abs(exponent - round(exponent)) < 1e-12:
            return Series.of((size_atom(size), round(exponent)))
        raise TooHard
    shown = f"({_tight(left)})" if not isinstance(left, ast.Name | ast.Constant) else _tight(left)
    if isinstance(c, Fraction) and len(monomial) == 1:
        if c.denominator == 1 and base == int(base) and c > 0:
            text = f"{int(base) ** c.numerator}**{size}"
        else:
            inner = Series({monomial: c})
            text = f"{shown}**({_series_text(inner)})" if c != 1 else f"{shown}**{size}"
        return Series.of((Atom(text, ((size, vector),)), 1))
    raise TooHard


def _constant_power(left: ast.expr, base: float, monomial: Monomial, c: Coefficient) -> Series:
    if monomial:
        raise TooHard
    number = _constant(left)
    if isinstance(number, Fraction) and isinstance(c, Fraction) and c.denominator == 1:
        return Series.constant(number**c.numerator)
    if isinstance(left, ast.Name) and isinstance(c, Fraction):
        return Series.of((Atom(left.id, value=base), c))
    return Series.constant(base ** float(c))


def _series_text(series: Series) -> str:
    from steplaw.law.leading import write_series

    return write_series(series)


def _call(node: ast.expr, name: str, args: list[ast.expr], sizes: frozenset[str]) -> Series:
    if not _depends(node, sizes):
        return _constant_call(node)
    rule = RULES.get(name)
    if rule is None:
        raise TooHard
    return rule(node, args, sizes)


def _constant_call(node: ast.expr) -> Series:
    number = _constant(node)
    if isinstance(number, Fraction):
        return Series.constant(number)
    return Series.of((Atom(_tight(node), value=number), 1))


def _rounding(node: ast.expr, args: list[ast.expr], sizes: frozenset[str]) -> Series:
    """Give floor(x) as x less a fraction between 0 and 1, which is an atom of its own."""
    inner = expand(args[0], sizes)
    if not inner.terms or all(_flat(growth_of(key)) for key in inner.terms):
        return opaque(node, sizes)
    gap = ast.BinOp(node, ast.Sub(), args[0])
    text = f"({_tight(gap)})"
    atom = Atom(text, tuple((n, FLAT) for n in free_names(node) if n in sizes))
    return inner + Series.of((atom, 1))


def _flat(growth: Growth) -> bool:
    return all(v <= FLAT for _, v in growth.by_size)


def _logarithm(node: ast.expr, args: list[ast.expr], sizes: frozenset[str]) -> Series:
    if len(args) == 2:
        base = _constant_call(ast.Call(ast.Name("log"), [args[1]], []))
        return _logarithm(node, args[:1], sizes) * inverse(base)
    inner = expand(args[0], sizes)
    first = inner.leading()
    if len(first.terms) != 1:
        raise TooHard
    monomial, c = first.single()
    result = _log_number(c)
    for atom, exponent in monomial:
        result = result + _log_of_atom(atom).scaled(exponent)
    if inner.is_single():
        return result
    lost = tuple((s, (0.0, 0.0, -1.0, 0.0, 0.0)) for s, _ in growth_of(monomial).by_size)
    smaller = [growth_of(k) for k in inner.terms if k != monomial] + list(inner.errors)
    close = all(compare_power(growth_of(monomial), g) for g in smaller)
    flat = tuple((s, FLAT) for s, _ in lost)
    return Series(result.terms, (Growth(lost if close else flat),))


def compare_power(a: Growth, b: Growth) -> bool:
    """Say whether the first outgrows the second by a full power in one size."""
    if len(a.by_size) != 1:
        return False
    size, vector = a.by_size[0]
    return vector[POWER] - b.vector(size)[POWER] >= 1 and vector[:2] == b.vector(size)[:2]


def _log_number(c: Coefficient) -> Series:
    if c <= 0:
        raise TooHard
    if c == 1:
        return Series({})
    return Series.of((Atom(f"log({c})", value=math.log(c)), 1))


def _log_of_atom(atom: Atom) -> Series:
    if not atom.growth:
        value = None if atom.value is None else math.log(atom.value)
        return Series.of((Atom(f"log({atom.text})", value=value), 1))
    if len(atom.growth) != 1:
        raise TooHard
    size, vector = atom.growth[0]
    if atom.text == size:
        return Series.of((log_atom(size), 1))
    if atom.text == f"log({size})":
        return Series.of((Atom(f"log(log({size}))", ((size, unit(LOGLOG)),)), 1))
    base, mark, exponent = atom.text.partition("**")
    if mark and exponent == size and vector[FACTORIAL] == 0:
        number = Atom(f"log({base})", value=vector[EXPONENTIAL])
        return Series.of((number, 1), (size_atom(size), 1))
    raise TooHard


def _root(node: ast.expr, args: list[ast.expr], sizes: frozenset[str]) -> Series:
    return raised(expand(args[0], sizes), Fraction(1, 2))


def _linear(node: ast.expr, sizes: frozenset[str]) -> tuple[str, Fraction, Fraction] | None:
    """Read an argument as slope * size + shift."""
    series = expand(node, sizes)
    size, slope, shift = "", Fraction(0), Fraction(0)
    for monomial, c in series.terms.items():
        if not isinstance(c, Fraction):
            return None
        if not monomial:
            shift = c
        elif len(monomial) == 1 and monomial[0][1] == 1 and monomial[0][0].text in sizes:
            if size:
                return None
            size, slope = monomial[0][0].text, c
        else:
            return None
    return (size, slope, shift) if size and slope > 0 and not series.errors else None


def _below(size: str, power: float) -> Growth:
    return Growth(((size, unit(POWER, power)),))


def _harmonic(node: ast.expr, args: list[ast.expr], sizes: frozenset[str]) -> Series:
    rank = _constant(args[1]) if len(args) > 1 else ONE
    inner = expand(args[0], sizes)
    if len(inner.terms) == 0 or not isinstance(rank, Fraction):
        raise TooHard
    if rank == 1:
        logarithm = _logarithm(node, args[:1], sizes)
        gamma = Atom("EulerGamma", value=CONSTANTS["EulerGamma"])
        monomial, _ = inner.leading().single()
        lost = tuple((s, (0.0, 0.0, -v[POWER], 0.0, 0.0)) for s, v in growth_of(monomial).by_size)
        out = logarithm + Series.of((gamma, 1))
        return Series(out.terms, (*out.errors, Growth(lost)))
    if rank == 2:
        first = Series.of((Atom("pi", value=math.pi), 2), times=Fraction(1, 6))
    else:
        first = Series.of((Atom(f"zeta({rank})"), 1))
    monomial, _ = inner.leading().single()
    drop = float(rank) - 1
    lost = tuple(
        (s, (0.0, 0.0, -v[POWER] * drop, 0.0, 0.0)) for s, v in growth_of(monomial).by_size
    )
    return Series(first.terms, (Growth(lost),))


def _factorial(node: ast.expr, args: list[ast.expr], sizes: frozenset[str]) -> Series:
    line = _linear(args[0], sizes)
    if line is None:
        raise TooHard
    size, slope, shift = line
    if slope == 1 and shift.denominator == 1:
        atom = Atom(f"factorial({size})", ((size, unit(FACTORIAL)),))
        out = Series.of((atom, 1))
        steps = range(1, shift.numerator + 1) if shift > 0 else range(0, shift.numerator, -1)
        for k in steps:
            factor = Series.of((size_atom(size), 1)) + Series.constant(Fraction(k))
            out = out * (factor if shift > 0 else inverse(factor))
        return out
    c = float(slope)
    # (c n + k)! by Stirling beside n!**c
    growth = (c, c * math.log(c), float(shift) + (1 - c) / 2, 0.0, 0.0)
    return Series.of((Atom(_tight(node), ((size, growth),)), 1))


def _subfactorial(node: ast.expr, args: list[ast.expr], sizes: frozenset[str]) -> Series:
    out = _factorial(node, args, sizes) * Series.of((Atom("E", value=math.e), -1))
    key, _ = out.leading().single()
    return Series(
        out.terms, (*out.errors, Growth(tuple((s, FLAT) for s, _ in growth_of(key).by_size)))
    )


def _binomial(node: ast.expr, args: list[ast.expr], sizes: frozenset[str]) -> Series:
    lower = _constant(args[1])
    if isinstance(lower, Fraction) and lower.denominator == 1 and 0 <= lower <= 12:
        out, top = Series.constant(ONE), expand(args[0], sizes)
        for k in range(lower.numerator):
            out = (out * (top + Series.constant(Fraction(-k)))).scaled(Fraction(1, k + 1))
        return out
    top_line = _linear(args[0], sizes)
    if top_line is None:
        raise TooHard
    size, slope, shift = top_line
    half = f"floor({size}/2)" in _tight(args[1]) or f"ceiling({size}/2)" in _tight(args[1])
    pi = (Atom("pi", value=math.pi), Fraction(-1, 2))
    root = (size_atom(size), Fraction(-1, 2))
    if slope == 1 and shift == 0 and half:
        exponential = Atom(f"2**{size}", ((size, unit(EXPONENTIAL, math.log(2))),))
        two = (Atom("sqrt(2)", value=math.sqrt(2)), 1)
        out = Series.of((exponential, 1), two, pi, root)
    elif _linear(args[1], sizes) == (size, ONE, Fraction(0)) and slope == 2 and shift == 0:
        exponential = Atom(f"4**{size}", ((size, unit(EXPONENTIAL, math.log(4))),))
        out = Series.of((exponential, 1), pi, root)
    else:
        raise TooHard
    key, _ = out.single()
    lost = growth_of((*key, (size_atom(size), Fraction(-1))))
    return Series(out.terms, (lost,))


def _catalan(node: ast.expr, args: list[ast.expr], sizes: frozenset[str]) -> Series:
    line = _linear(args[0], sizes)
    if line is None or line[1] != 1 or line[2].denominator != 1:
        raise TooHard
    size, _, shift = line
    exponential = Atom(f"4**{size}", ((size, unit(EXPONENTIAL, math.log(4))),))
    pi = (Atom("pi", value=math.pi), Fraction(-1, 2))
    root = (size_atom(size), Fraction(-3, 2))
    out = Series.of((exponential, 1), pi, root, times=Fraction(4) ** shift.numerator)
    key, _ = out.single()
    return Series(out.terms, (growth_of((*key, (size_atom(size), Fraction(-1)))),))


def _golden(by: Fraction, root: bool) -> Rule:
    def rule(node: ast.expr, args: list[ast.expr], sizes: frozenset[str]) -> Series:
        line = _linear(args[0], sizes)
        if line is None or line[1].denominator != 1:
            raise TooHard
        size, slope, shift = line
        ratio = CONSTANTS["GoldenRatio"]
        rate = float(slope) * math.log(ratio)
        exponent = size if slope == 1 else f"({slope}*{size})"
        power = Atom(f"GoldenRatio**{exponent}", ((size, unit(EXPONENTIAL, rate)),))
        factors: list[tuple[Atom, Fraction | int]] = [(power, 1)]
        factors.append((Atom("GoldenRatio", value=ratio), shift))
        if root:
            factors.append((Atom("sqrt(5)", value=math.sqrt(5)), -1))
        out = Series.of(*factors, times=by)
        return Series(out.terms, (Growth(((size, unit(EXPONENTIAL, -rate)),)),))

    return rule


def _tribonacci(node: ast.expr, args: list[ast.expr], sizes: frozenset[str]) -> Series:
    line = _linear(args[0], sizes)
    if line is None or line[1] != 1:
        raise TooHard
    return opaque(node, sizes, unit(EXPONENTIAL, math.log(1.8392867552141612)))


def _extreme(node: ast.expr, args: list[ast.expr], sizes: frozenset[str]) -> Series:
    """Give Max or Min by the growth of the arguments; as one atom where they are alike."""
    from steplaw.law.extremes import settle_extreme

    assert isinstance(node, ast.Call) and isinstance(node.func, ast.Name)
    settled = settle_extreme(node.func.id, [expand(arg, sizes) for arg in args])
    if settled is not None:
        return settled
    names = [n for n in free_names(node) if n in sizes]
    if len(names) == 1:
        raise TooHard
    return opaque(node, sizes, unit(POWER, 1.0 / len(names)))


def _remainder(node: ast.expr, args: list[ast.expr], sizes: frozenset[str]) -> Series:
    if _depends(args[1], sizes):
        raise TooHard
    return opaque(node, sizes)


def _absolute(node: ast.expr, args: list[ast.expr], sizes: frozenset[str]) -> Series:
    inner = expand(args[0], sizes)
    first = inner.leading()
    if len(first.terms) != 1:
        raise TooHard
    key, c = first.single()
    if any(a.growth and a.text not in sizes for a, _ in key):
        raise TooHard
    return inner if c > 0 else inner.scaled(Fraction(-1))


RULES: dict[str, Rule] = {
    "floor": _rounding,
    "ceiling": _rounding,
    "log": _logarithm,
    "sqrt": _root,
    "harmonic": _harmonic,
    "factorial": _factorial,
    "binomial": _binomial,
    "catalan": _catalan,
    "fibonacci": _golden(ONE, True),
    "lucas": _golden(ONE, False),
    "subfactorial": _subfactorial,
    "tribonacci": _tribonacci,
    "Max": _extreme,
    "Min": _extreme,
    "Mod": _remainder,
    "Abs": _absolute,
}
