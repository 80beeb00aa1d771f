"""Terms of a formula, forms made of them, and how a formula is written."""

from __future__ import annotations

from collections.abc import Callable, Sequence
from dataclasses import dataclass
from fractions import Fraction

Exact = int | Fraction


@dataclass(frozen=True, slots=True, eq=False)
class Term:
    """One function of the size, to be multiplied by a coefficient.

    Parameters
    ----------
    text : str
        How it is written, with ``{n}`` for the size; empty for the constant 1.
    at : callable
        Its exact value at a size.
    under : str
        What it is divided by, written the same way.
    least : int
        Smallest size at which it is defined as written.
    """

    text: str
    at: Callable[[int], Exact]
    under: str = ""
    least: int = 0

    @property
    def key(self) -> str:
        """Give the text that tells this term from every other one."""
        return f"{self.text}/{self.under}"


Writer = Callable[[Sequence[Fraction], str], str]


@dataclass(frozen=True, slots=True, eq=False)
class Form:
    """A formula with free coefficients.

    Parameters
    ----------
    family : str
        The family it belongs to, for the note and the details of a law.
    terms : tuple of Term
        Greatest first, in the order of writing.
    write : callable, optional
        A better way of writing it, from the coefficients and the size name.
    growth : {"slow", "exponential", "rational", "harmonic", "shrinking"}
        Where it is worth trying: everywhere; where values grow exponentially; where some value
        is not whole; the same with small sizes; the same with terms that vanish exponentially.
    levels : callable, optional
        A step function of the size; the form is trusted only where it took several values.
    note : str
        What a reader of such a law must know.
    """

    family: str
    terms: tuple[Term, ...]
    write: Writer | None = None
    growth: str = "slow"
    levels: Callable[[int], int] | None = None
    note: str = ""

    @property
    def key(self) -> str:
        """Give the text that tells this form from every other one."""
        return " ".join(term.key for term in self.terms)

    @property
    def least(self) -> int:
        """Give the smallest size at which every term is defined."""
        return max(term.least for term in self.terms)

    def formula(self, coefficients: Sequence[Fraction], name: str) -> str:
        """Write the formula with these coefficients in the size `name`."""
        if self.write is not None:
            return self.write(coefficients, name)
        pairs = zip(coefficients, self.terms, strict=True)
        return write_sum([(c, t.text.format(n=name), t.under.format(n=name)) for c, t in pairs])


def power(exponent: int, name: str = "{n}") -> str:
    """Write a power of the size; empty for the power 0."""
    if exponent == 0:
        return ""
    return name if exponent == 1 else f"{name}**{exponent}"


def product(*factors: str) -> str:
    """Write a product, leaving out the factors that are 1 (empty)."""
    return "*".join(factor for factor in factors if factor)


def times_power(term: Term, exponent: int) -> Term:
    """Give a term times a power of the size."""
    text = product(power(exponent), term.text)
    return Term(text, lambda n: n**exponent * term.at(n), term.under, term.least)


def over(term: Term, exponent: int) -> Term:
    """Give a term divided by a power of the size."""
    under = product(power(exponent), term.under)
    return Term(term.text, lambda n: Fraction(term.at(n)) / n**exponent, under, max(1, term.least))


def divided(term: Term, by: Term) -> Term:
    """Give a term divided by another one."""
    under = product(term.under, by.text)
    least = max(term.least, by.least)
    return Term(term.text, lambda n: Fraction(term.at(n)) / by.at(n), under, least)


def write_sum(parts: Sequence[tuple[Fraction, str, str]]) -> str:
    """Write a sum of coefficient, term and divisor in the usual form, leaving zeros out."""
    out = ""
    for coefficient, text, under in parts:
        if not coefficient:
            continue
        body = write_product(abs(coefficient), text, under)
        if not out:
            out = f"-{body}" if coefficient < 0 else body
        else:
            out += f" - {body}" if coefficient < 0 else f" + {body}"
    return out or "0"


def write_product(coefficient: Fraction, text: str, under: str = "") -> str:
    """Write a positive coefficient times a term, as in ``3*n**2/4`` or ``1/(2*n)``."""
    top = "" if coefficient.numerator == 1 and text else str(coefficient.numerator)
    bottom = product("" if coefficient.denominator == 1 else str(coefficient.denominator), under)
    upper = product(top, text)
    if not bottom:
        return upper
    factors = "*" in bottom.replace("**", "")
    return f"{upper}/({bottom})" if factors else f"{upper}/{bottom}"
