"""Formulas as people write them mean what the record's formulas mean."""

from __future__ import annotations

import pytest
import sympy
from hypothesis import given, settings
from hypothesis import strategies as st
from sympy.parsing.sympy_parser import (
    convert_xor,
    implicit_multiplication,
    parse_expr,
    standard_transformations,
)

from steplaw.faces.notation import pretty, terms

# Left side: as sympy writes it. Right side: common practice in print.
SHOWN = {
    "n**3/6 - n**2/2": "n³/6 − n²/2",
    "23*n**3/6": "23/6 n³",
    "-n**2/2 + n": "−n²/2 + n",
    "2*(n + 1)*harmonic(n) - 4*n": "2(n + 1)·H(n) − 4n",
    "n*ceiling(log(n)/log(2)) - 2**ceiling(log(n)/log(2)) + 1": "n⌈lg n⌉ − 2^⌈lg n⌉ + 1",
    "floor(log(n)/log(2)) + 1": "⌊lg n⌋ + 1",
    "n*log(n)/log(2)": "n lg n",
    "n*log(n)**2": "n(ln n)²",
    "2**n - 1": "2ⁿ − 1",
    "(-1)**n/4": "(−1)ⁿ/4",
    "2*3**n": "2·3ⁿ",
    "n**(log(3)/log(2))": "n^(lg 3)",
    "n*(n - 1)*(n - 2)/6": "n(n − 1)(n − 2)/6",
    "n*m/2": "n·m/2",
    "factorial(n)": "n!",
    "binomial(n, 2)": "C(n, 2)",
    "n*Mod(n, 2)": "n(n mod 2)",
    "3.14159*n**1.585": "3.142 n^1.585",
    "n*(-m)": "−n·m",
    "16 + 3/(2*n)": "16 + 3/(2n)",
    "log(n)/(2*n)": "ln n/(2n)",
    "5/(n*log(n))": "5/(n ln n)",
    "3*n/(2*m)": "3/2 n/m",
    "1/n": "1/n",
    "n*-2": "−2n",
    "n - (n - 1)": "n − n + 1",
    "0": "0",
}


@pytest.mark.parametrize(("formula", "shown"), SHOWN.items())
def test_formulas_are_shown_as_in_print(formula: str, shown: str) -> None:
    assert pretty(formula) == shown
    assert pretty(formula, unicode=False).isascii()


def test_terms_join_to_the_formula() -> None:
    formula = "-23*n**3/6 - 5*n**2/2 + 29*n/3 + 12"
    assert terms(formula) == ["− 23/6 n³", "− 5/2 n²", "+ 29/3 n", "+ 12"]
    assert terms("n**2") == ["n²"]
    assert terms(None) == ["none"]


@pytest.mark.parametrize(
    "text",
    ["", "n +", "import os", "((((", "x" * 5000, "-" * 3500 + "n", "n**" * 900 + "n", "\x00", "1e"],
)
def test_what_is_no_formula_is_shown_as_it_is(text: str) -> None:
    assert "\x00" not in pretty(text)
    assert isinstance(terms(text), list)
    if text == "import os":
        assert pretty(text) == text


def test_hostile_names_are_made_harmless() -> None:
    assert "\x1b" not in pretty("n\x1b[2J") and "‮" not in pretty("n*‮m")


n, m = sympy.symbols("n m")
PARSING = (*standard_transformations, implicit_multiplication, convert_xor)
NAMES = {
    "n": n,
    "m": m,
    "lg": lambda x: sympy.log(x) / sympy.log(2),
    "ln": sympy.log,
    "ceil": sympy.ceiling,
    "floor": sympy.floor,
    "H": sympy.harmonic,
    "C": sympy.binomial,
}
fractions = st.fractions(-9, 9, max_denominator=9)
atoms = st.one_of(
    st.just(n), st.just(m), fractions.map(lambda f: sympy.Rational(f.numerator, f.denominator))
)


def wider(inner: st.SearchStrategy[sympy.Expr]) -> st.SearchStrategy[sympy.Expr]:
    pairs = st.tuples(inner, inner)
    return st.one_of(
        pairs.map(lambda p: p[0] + p[1]),
        pairs.map(lambda p: p[0] - p[1]),
        pairs.map(lambda p: p[0] * p[1]),
        st.tuples(inner, st.integers(1, 3)).map(lambda p: p[0] ** p[1]),
        inner.map(sympy.floor),
        inner.map(lambda x: sympy.log(x * x + 2) / sympy.log(2)),
        inner.map(lambda x: sympy.log(x * x + 3) ** 2),
        inner.map(lambda x: x / (n + m + 1)),
        st.sampled_from([2**n, 2 ** (n + m), 3**n / 2, (-1) ** n]),
        st.sampled_from([sympy.harmonic(n), sympy.binomial(n, 2), sympy.ceiling(n / 3)]),
    )


@settings(max_examples=250, deadline=None)
@given(st.recursive(atoms, wider, max_leaves=5))
def test_what_is_shown_means_what_the_record_says(expression: sympy.Expr) -> None:
    # The reference is sympy's own parser, reading both texts.
    text = str(expression)
    shown = parse_expr(pretty(text, unicode=False), local_dict=NAMES, transformations=PARSING)
    at = {n: sympy.Integer(7), m: sympy.Rational(5, 2)}
    names = {"n": n, "m": m}
    wanted = complex(sympy.sympify(text, locals=names).subs(at).evalf(30))
    got = complex(sympy.sympify(shown).subs(at).evalf(30))
    assert got == pytest.approx(wanted, rel=1e-9, abs=1e-9)
