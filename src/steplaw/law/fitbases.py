"""The bases that least squares chooses from."""

from __future__ import annotations

import math
from collections.abc import Callable
from dataclasses import dataclass
from functools import lru_cache
from typing import Any

from steplaw.law.growth import FLAT, Vector
from steplaw.law.special import harmonic

LOG2_3 = math.log2(3)
LOG2_7 = math.log2(7)


@dataclass(frozen=True, slots=True)
class FitTerm:
    """One term of a fitted formula.

    Parameters
    ----------
    text : str
        How it is written, with ``{n}`` for the size; empty for the constant 1.
    at : callable
        Its value at a size from 2 on, or at a tuple of sizes.
    growth : Vector
        Its order of growth.
    oddity : int
        How unusual it is for a step count: 0 for whole powers, more for rarer forms.
    """

    text: str
    at: Callable[[Any], float]
    growth: Vector
    oddity: int


Basis = tuple[FitTerm, ...]


def _power_text(exponent: float) -> str:
    if exponent == 0:
        return ""
    if exponent == 0.5:
        return "sqrt({n})"
    if exponent == int(exponent):
        return "{n}" if exponent == 1 else f"{{n}}**{int(exponent)}"
    return f"{{n}}**({int(2 * exponent)}/2)"


def power_log(exponent: float, logs: int) -> FitTerm:
    """Give the term n**exponent * log(n)**logs."""
    parts = [_power_text(exponent), "" if logs <= 0 else "log({n})"]
    if logs > 1:
        parts[1] += f"**{logs}"
    text = "*".join(p for p in parts if p)
    if logs < 0:
        text += "/log({n})"
    oddity = (0 if exponent == int(exponent) else 2) + (0, 1, 3, 3)[logs]
    return FitTerm(
        text, _power_log_value(exponent, logs), (0.0, 0.0, exponent, float(logs), 0.0), oddity
    )


def _power_log_value(exponent: float, logs: int) -> Callable[[float], float]:
    return lambda n: n**exponent * math.log(n) ** logs


def _exponential(base: int, power: int) -> FitTerm:
    text = f"{base}**{{n}}" if not power else f"{{n}}*{base}**{{n}}"
    growth = (0.0, math.log(base), float(power), 0.0, 0.0)
    return FitTerm(text, lambda n: n**power * float(base) ** n, growth, 2 + power)


def _harmonic(n: float) -> float:
    return float(harmonic(int(n)))


N_LOG_LOG = FitTerm(
    "{n}*log(log({n}))", lambda n: n * math.log(math.log(n)), (0.0, 0.0, 1.0, 0.0, 1.0), 3
)


@lru_cache(maxsize=2)
def leads(exponential: bool) -> tuple[FitTerm, ...]:
    """Give the terms that may lead, slowest first.

    Parameters
    ----------
    exponential : bool
        Whether powers of constants and factorials are worth trying.
    """
    terms = [power_log(a / 2, b) for a in range(9) for b in (0, 1, 2)]
    terms += [power_log(1, -1), power_log(2, -1)]
    terms.append(N_LOG_LOG)
    for exponent, text in ((LOG2_3, "log(3)/log(2)"), (LOG2_7, "log(7)/log(2)")):
        terms.append(
            FitTerm(
                f"{{n}}**({text})", _power_log_value(exponent, 0), (0.0, 0.0, exponent, 0.0, 0.0), 2
            )
        )
    terms.append(FitTerm("harmonic({n})", _harmonic, (0.0, 0.0, 0.0, 1.0, 0.0), 1))
    terms.append(
        FitTerm(
            "({n} + 1)*harmonic({n})",
            lambda n: (n + 1) * _harmonic(n),
            (0.0, 0.0, 1.0, 1.0, 0.0),
            1,
        )
    )
    if exponential:
        terms += [_exponential(b, p) for b in (2, 3, 4) for p in (0, 1)]
        golden = (1 + math.sqrt(5)) / 2
        terms.append(
            FitTerm(
                "GoldenRatio**{n}", lambda n: golden**n, (0.0, math.log(golden), 0.0, 0.0, 0.0), 2
            )
        )
        terms.append(
            FitTerm("factorial({n})", lambda n: math.gamma(n + 1), (1.0, 0.0, 0.0, 0.0, 0.0), 2)
        )
    return tuple(sorted(terms, key=lambda t: t.growth))


CONSTANT = power_log(0, 0)
NATURAL = (
    CONSTANT, power_log(0, 1), power_log(0.5, 0), power_log(1, 0), power_log(1, 1),
    power_log(2, 0), power_log(3, 0),
)  # fmt: skip
RECIPROCAL = FitTerm("1/{n}", lambda n: 1 / n, (0.0, 0.0, -1.0, 0.0, 0.0), 1)


@lru_cache(maxsize=2)
def bases(exponential: bool) -> tuple[Basis, ...]:
    """Give all bases, those with fewest terms first."""
    out: list[Basis] = []
    for lead in leads(exponential):
        lower = [t for t in NATURAL if t.growth < lead.growth]
        if lead.growth == FLAT:
            lower = [RECIPROCAL]
        out.append((lead,))
        out += [(lead, t) for t in lower]
        out += [(lead, t, s) for t in lower for s in lower if s.growth < t.growth]
    one, log, _, n, nlog, n2, n3 = NATURAL
    out += [(nlog, n, log, one), (n2, nlog, n, one), (n2, n, log, one), (n3, n2, n, one)]
    return tuple(sorted(out, key=lambda b: (len(b), sum(t.oddity for t in b))))
