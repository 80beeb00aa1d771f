"""Coefficients of fitted laws: intervals, known constants, and how they are written."""

from __future__ import annotations

import math
from collections.abc import Sequence
from dataclasses import dataclass, replace
from typing import TYPE_CHECKING, Any

from steplaw.law.constants import known_constant, simple_fraction
from steplaw.law.evaluate import value
from steplaw.law.fitbases import FitTerm
from steplaw.law.terms import product

if TYPE_CHECKING:
    from steplaw.law.fitted import Data


@dataclass(frozen=True, slots=True)
class Coefficient:
    """A coefficient of a fitted term with its interval.

    Parameters
    ----------
    term : FitTerm
        The term.
    number, low, high : float
        Estimate and 95 % interval.
    known : str
        The constant it was recognised as, if any.
    """

    term: FitTerm
    number: float
    low: float
    high: float
    known: str = ""


def plain(c: Coefficient, name: str) -> dict[str, Any]:
    """Give a coefficient as plain JSON values."""
    out: dict[str, Any] = {
        "term": c.term.text.format(n=name) or "1",
        "coefficient": c.number,
        "low": c.low,
        "high": c.high,
    }
    if c.known:
        out["known"] = c.known
    return out


def recognise(found: Sequence[Coefficient], data: Data, error: float) -> list[Coefficient]:
    """Recognise the leading coefficient as a known constant where the data settle it.

    Parameters
    ----------
    found : sequence of Coefficient
        The fitted coefficients, leading one first.
    data : Data
        What they were fitted to.
    error : float
        Largest relative error at the held-out sizes before.

    Returns
    -------
    list of Coefficient
        With the constant in place and the other coefficients fitted again, or as they were
        where no constant stands out or the fit gets worse by it.
    """
    first = found[0]
    fraction = simple_fraction(first.low, first.high)
    text = str(fraction) if fraction is not None else None
    if text is None:
        text = known_constant(first.low, first.high, "log" in first.term.text)
    if text is None:
        return list(found)
    number = float(value(text, {}))
    snapped = [replace(first, number=number, known=text), *_refit(found, data, number)]
    return snapped if _error(snapped, data) <= 1.1 * _error(found, data) + 1e-4 else list(found)


def _refit(found: Sequence[Coefficient], data: Data, number: float) -> list[Coefficient]:
    import numpy as np

    if len(found) == 1:
        return []
    lead = np.array([found[0].term.at(float(n)) for n in data.sizes])
    matrix = np.stack([[c.term.at(float(n)) for c in found[1:]] for n in data.sizes])
    weights = data.weights
    left = matrix * weights[:, None]
    solved = np.linalg.lstsq(left, (data.values - number * lead) * weights, rcond=None)[0]
    return [replace(c, number=float(x)) for c, x in zip(found[1:], solved, strict=True)]


def _error(found: Sequence[Coefficient], data: Data) -> float:
    import numpy as np

    guess = np.array([sum(c.number * c.term.at(float(n)) for c in found) for n in data.sizes])
    return float(np.sqrt(np.mean(((guess - data.values) * data.weights) ** 2))) * 0.01


def write(found: Sequence[Coefficient], name: str) -> str:
    """Write a fitted formula, each coefficient with as many digits as its interval bears."""
    out = ""
    for c in found:
        text = c.term.text.format(n=name)
        if not c.number:
            continue
        if c.known:
            body = _known_product(c.known, text)
        else:
            body = product(digits(abs(c.number), c.high - c.low), text)
        negative = c.number < 0
        if not out:
            out = f"-{body}" if negative else body
        else:
            out += f" - {body}" if negative else f" + {body}"
    return out or "0"


def _known_product(known: str, text: str) -> str:
    known = known.lstrip("-")
    if not text:
        return known
    if "/" not in known:
        return text if known == "1" else f"{known}*{text}"
    top, _, bottom = known.partition("/")
    upper = text if top == "1" else f"{top}*{text}"
    return f"{upper}/{bottom}"


def digits(number: float, width: float) -> str:
    """Write a positive number to a hundredth of its interval's width, 4 to 9 digits."""
    if number == 0:
        return "0"
    scale = math.log10(number / width) if width > 0 else 7.0
    count = min(9, max(4, math.ceil(scale) + 2))
    return f"{number:.{count}g}"
