"""Divide and conquer seen at powers of two only: n*log2(n), n**log2(3) and the like.

A recurrence T(2n) = a T(n) + polynomial has, on powers of two, a solution in powers of the size,
of a**k and of k = log2(n) (the master theorem; Akra & Bazzi, On the solution of linear
recurrence equations, Computational Optimization and Applications 10, 1998). Between the powers
of two it may be anything, so these forms are tried only where every size is one.
"""

from __future__ import annotations

from collections.abc import Callable
from functools import lru_cache

from steplaw.law.polynomial import monomial
from steplaw.law.terms import Form, Term, power, product

NOTE = "every size tried is a power of two, and the formula holds at powers of two only"


@lru_cache(maxsize=64)
def dyadic_log(exponent: int, logs: int) -> Term:
    """Give n**exponent * log2(n)**logs at powers of two."""
    if logs == 1:
        text, under = product(power(exponent), "log({n})"), "log(2)"
    else:
        text, under = product(power(exponent), f"(log({{n}})/log(2))**{logs}"), ""
    return Term(text, _dyadic_value(exponent, logs), under, least=1)


def _dyadic_value(exponent: int, logs: int) -> Callable[[int], int]:
    return lambda n: int(n**exponent * (n.bit_length() - 1) ** logs)


@lru_cache(maxsize=16)
def branching(parts: int, logs: int = 0) -> Term:
    """Give n**log2(parts), times log2(n)**logs, at powers of two: the leaves of a recursion."""
    text = f"{{n}}**(log({parts})/log(2))"
    if logs:
        return Term(
            product(text, "log({n})"),
            lambda n: int(parts ** (n.bit_length() - 1) * (n.bit_length() - 1)),
            "log(2)",
            least=1,
        )
    return Term(text, lambda n: int(parts ** (n.bit_length() - 1)), least=1)


@lru_cache(maxsize=1)
def dyadic_forms() -> tuple[Form, ...]:
    """Give the forms for sizes that are all powers of two."""
    one, n, n2, n3 = (monomial(k) for k in range(4))
    log, log2, log3 = dyadic_log(0, 1), dyadic_log(0, 2), dyadic_log(0, 3)
    nlog, nlog2, n2log = dyadic_log(1, 1), dyadic_log(1, 2), dyadic_log(2, 1)
    sets: list[tuple[Term, ...]] = [
        (log, one),
        (nlog,),
        (nlog, n),
        (n, log, one),
        (nlog, n, one),
        (nlog, n, log, one),
        (log2, log, one),
        (log3, log2, log, one),
        (n, log2, log, one),
        (nlog2, nlog, n),
        (nlog2, nlog, n, one),
        (nlog2, nlog, n, log, one),
        (n2, nlog, n, one),
        (n2, nlog, n, log, one),
        (n2, n, log, one),
        (n2log, n2, n, one),
        (n2log, n2, nlog, n, one),
        (n3, n2, nlog, n, one),
        (n3, n2, n, log, one),
    ]
    for parts in (3, 5, 6, 7):
        leaf = branching(parts)
        sets += [(leaf,), (leaf, one), (leaf, n, one), (leaf, n, log, one), (leaf, n2, n, one)]
        sets += [
            (leaf, nlog, n, one),
            (leaf, n2, nlog, n, one),
            (branching(parts, 1), leaf, n, one),
        ]
    return tuple(Form("divide and conquer", terms, note=NOTE) for terms in sets)
