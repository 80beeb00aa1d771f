"""The leading (tilde) term of a formula, its order of growth, and limits of ratios."""

from __future__ import annotations

import math
from collections.abc import Sequence
from fractions import Fraction
from functools import lru_cache

from steplaw.law.evaluate import parse
from steplaw.law.expand import expand, free_names
from steplaw.law.growth import (
    FLAT,
    Atom,
    Coefficient,
    Growth,
    Monomial,
    Series,
    TooHard,
    Vector,
    compare,
    growth_of,
    numeric,
)
from steplaw.law.model import Law


def leading_term(formula: str, names: Sequence[str] | None = None) -> str:
    """Give the leading (tilde) term of a formula as all its sizes grow without bound.

    Parameters
    ----------
    formula : str
        A formula as a law states it.
    names : sequence of str, optional
        The size names; every other name is taken for a positive constant. By default every
        name in the formula is a size.

    Returns
    -------
    str
        A formula whose ratio to the given one tends to 1. With several sizes it keeps every
        term that no other one outgrows. Where the ratio to any smooth function keeps swinging
        (as with ``2**ceiling(log(n)/log(2))``), the swinging factor is kept as it is.

    Examples
    --------
    >>> leading_term("n**3/6 - n**2/2 + n/3")
    'n**3/6'
    >>> leading_term("2*(n + 1)*harmonic(n) - 4*n")
    '2*n*log(n)'
    """
    return _leading_text(formula, tuple(names) if names is not None else None)


@lru_cache(maxsize=4096)
def _leading_text(formula: str, names: tuple[str, ...] | None) -> str:
    try:
        series = _leading_series(formula, names)
        # a formula that only swings is its own leading term
        return formula if _swings_only(series) else write_series(series)
    except (TooHard, OverflowError, ZeroDivisionError):
        return _by_sympy(formula, names)


def _swings_only(series: Series) -> bool:
    flat = all(v == FLAT for key in series.terms for _, v in growth_of(key).by_size)
    return flat and any(atom.growth for key in series.terms for atom, _ in key)


@lru_cache(maxsize=4096)
def _leading_series(formula: str, names: tuple[str, ...] | None) -> Series:
    node = parse(formula)
    sizes = names if names is not None else free_names(node)
    return expand(node, frozenset(sizes)).leading()


def order(law: Law | str) -> Vector:
    """Give a key by which laws are sorted from slow to fast growth.

    Parameters
    ----------
    law : Law or str
        A law with a formula, or a formula.

    Returns
    -------
    tuple of float
        Exponents of factorial(n), e**n, n, log n and log log n; with several sizes, as all of
        them grow alike. An open law comes after every other one.
    """
    formula = law if isinstance(law, str) else law.formula
    if formula is None:
        return (math.inf,) * 5
    names = None if isinstance(law, str) else law.names
    try:
        series = _leading_series(formula, names)
    except TooHard:
        series = _leading_series(leading_term(formula, names), names)
    return max((_rounded(growth_of(key)) for key in series.terms), default=(-math.inf,) * 5)


def _rounded(growth: Growth) -> Vector:
    a, b, c, d, e = (round(x, 9) + 0.0 for x in growth.diagonal())
    return (a, b, c, d, e)


def compare_order(a: Law | str, b: Law | str) -> int:
    """Give -1, 0 or 1 as the first law grows slower than, like or faster than the second."""
    return compare(order(a), order(b))


def ratio_limit(a: Law | str, b: Law | str) -> Fraction | float | None:
    """Give the limit of the ratio of two laws as the size grows without bound.

    Parameters
    ----------
    a, b : Law or str
        Laws with formulas, or formulas, in one size or in several that grow alike.

    Returns
    -------
    Fraction or float or None
        0 or infinity where one outgrows the other; None where a law is open, or where the ratio
        keeps swinging or depends on how several sizes grow beside each other.
    """
    if order(a)[0] == math.inf or order(b)[0] == math.inf:
        return None
    sign = compare_order(a, b)
    if sign < 0:
        return Fraction(0)
    upper, lower = _single_limit(a), _single_limit(b)
    if sign > 0:
        return math.inf if upper is None or upper[1] > 0 else -math.inf
    if upper is None or lower is None or upper[0] != lower[0]:
        return None
    if isinstance(upper[1], Fraction) and isinstance(lower[1], Fraction):
        return upper[1] / lower[1]
    return float(upper[1]) / float(lower[1])


def _single_limit(law: Law | str) -> tuple[Monomial, Fraction | float] | None:
    formula = law if isinstance(law, str) else law.formula
    names = None if isinstance(law, str) else law.names
    if formula is None:
        return None
    series = _leading_series(leading_term(formula, names), names)
    groups = _by_shape(series)
    if len(groups) != 1:
        return None
    shape, members = next(iter(groups.items()))
    if len(members) == 1 and members[0][0] == shape:
        return shape, members[0][1]
    numbers = [numeric(c, key) for key, c in members]
    if None in numbers:
        return None
    return shape, math.fsum(x for x in numbers if x is not None)


def _by_shape(series: Series) -> dict[Monomial, list[tuple[Monomial, Coefficient]]]:
    """Group the monomials by the factors that depend on a size."""
    groups: dict[Monomial, list[tuple[Monomial, Coefficient]]] = {}
    for key, c in series.terms.items():
        groups.setdefault(tuple(f for f in key if f[0].growth), []).append((key, c))
    return groups


def write_series(series: Series) -> str:
    """Write a sum of monomials, the fastest growing first."""
    groups = _by_shape(series)
    ordered = sorted(groups.items(), key=lambda g: _rounded(growth_of(g[0])), reverse=True)
    out = ""
    for shape, members in ordered:
        sign, text = _write_group(shape, members)
        if not out:
            out = f"-{text}" if sign < 0 else text
        else:
            out += f" - {text}" if sign < 0 else f" + {text}"
    return out or "0"


def _write_group(shape: Monomial, members: list[tuple[Monomial, Coefficient]]) -> tuple[int, str]:
    if len(members) == 1:
        key, c = members[0]
        return (-1 if c < 0 else 1), _write_monomial(_positive(c), key)
    inner = ""
    for key, c in members:
        constants = tuple(f for f in key if not f[0].growth)
        text = _write_monomial(_positive(c), constants)
        inner += (" - " if c < 0 else " + ") + text if inner else ("-" if c < 0 else "") + text
    if not shape:
        return 1, inner
    return 1, _join([f"({inner})"], shape)


def _positive(c: Coefficient) -> Coefficient:
    return -c if c < 0 else c


def _write_monomial(c: Coefficient, key: Monomial) -> str:
    top, bottom = [], []
    if isinstance(c, Fraction):
        if c.numerator != 1:
            top.append(str(c.numerator))
        if c.denominator != 1:
            bottom.append(str(c.denominator))
    elif c != 1.0:
        top.append(write_float(c))
    return _join(top, key, bottom)


def write_float(number: float) -> str:
    """Write a float with six digits or so, in a way that sympy reads."""
    text = f"{number:.6g}"
    return text if "e" not in text else f"{number:.6e}" if abs(number) < 1 else f"{number:.1f}"


def _join(top: list[str], key: Monomial, bottom: Sequence[str] = ()) -> str:
    top, bottom = list(top), list(bottom)
    for atom, exponent in sorted(_merged_golden(key), key=lambda f: _display_rank(f[0])):
        (top if exponent > 0 else bottom).append(_write_power(atom, abs(exponent)))
    upper = "*".join(top) or "1"
    if not bottom:
        return upper
    lower = "*".join(bottom)
    return f"{upper}/({lower})" if len(bottom) > 1 else f"{upper}/{lower}"


def _merged_golden(key: Monomial) -> Monomial:
    """Write GoldenRatio*GoldenRatio**n as GoldenRatio**(n + 1)."""
    constants = {atom.text: (atom, e) for atom, e in key}
    golden = constants.get("GoldenRatio")
    power = next((a for a, e in key if a.text.startswith("GoldenRatio**") and e == 1), None)
    if golden is None or power is None or golden[1].denominator != 1:
        return key
    size = power.text.removeprefix("GoldenRatio**").strip("()")
    sign = "+" if golden[1] > 0 else "-"
    merged = Atom(f"GoldenRatio**({size} {sign} {abs(golden[1])})", power.growth)
    kept = [f for f in key if f[0] not in (golden[0], power)]
    return (*kept, (merged, Fraction(1)))


def _display_rank(atom: Atom) -> tuple[int, str]:
    if not atom.growth:
        return 0, atom.text
    vector = atom.growth[0][1]
    is_log = compare(vector, (0, 0, 0, 9, 9)) <= 0
    return (3 if is_log else 2 if "(" in atom.text else 1), atom.text


def _write_power(atom: Atom, exponent: Fraction) -> str:
    text = atom.text
    if exponent == 1:
        return f"({text})" if " " in text and not text.endswith(")") else text
    if exponent == Fraction(1, 2):
        return f"sqrt({text})"
    if not (text.isidentifier() or text.endswith(")")) or "**" in text:
        text = f"({text})"
    return f"{text}**{exponent}" if exponent.denominator == 1 else f"{text}**({exponent})"


def _by_sympy(formula: str, names: tuple[str, ...] | None) -> str:
    """Find the leading term of a rational function; the formula itself for anything else."""
    import sympy

    sizes = names if names is not None else free_names(parse(formula))
    symbols = {name: sympy.Symbol(name, positive=True) for name in sizes}
    expression = sympy.sympify(formula, locals=symbols)
    if len(symbols) != 1:
        return formula
    size = next(iter(symbols.values()))
    if not expression.is_rational_function(size):
        return formula
    top, bottom = (sympy.Poly(part, size) for part in sympy.fraction(sympy.cancel(expression)))
    first = top.LC() / bottom.LC() * size ** (top.degree() - bottom.degree())
    return str(first)
