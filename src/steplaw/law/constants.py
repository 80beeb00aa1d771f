"""Known constants, recognised only where an interval is narrow enough to settle them."""

from __future__ import annotations

import math
from fractions import Fraction

CHANCE = 0.03
_MULTIPLES = [Fraction(p, q) for q in (1, 2, 3, 4) for p in range(1, 13) if math.gcd(p, q) == 1]
_FACTORS = {
    "log(2)": math.log(2),
    "1/log(2)": 1 / math.log(2),
    "pi": math.pi,
    "1/pi": 1 / math.pi,
    "sqrt(pi)": math.sqrt(math.pi),
    "sqrt(2)": math.sqrt(2),
}


def simple_fraction(low: float, high: float, largest: int = 12) -> Fraction | None:
    """Give the simplest fraction in an interval, where it is unlikely to be there by chance.

    Parameters
    ----------
    low, high : float
        The interval.
    largest : int
        Largest denominator.

    Returns
    -------
    Fraction or None
        None where fractions as simple are so dense that one falls inside by chance.
    """
    for bottom in range(1, largest + 1):
        top = math.ceil(low * bottom - 1e-12)
        if top <= high * bottom and top != 0:
            density = max(1.0, 0.31 * bottom * bottom)
            return Fraction(top, bottom) if (high - low) * density < CHANCE else None
    return None


def known_constant(low: float, high: float, logarithmic: bool) -> str | None:
    """Give the text of a known constant in an interval that is too narrow for chance.

    Parameters
    ----------
    low, high : float
        The interval of a coefficient.
    logarithmic : bool
        Whether the term holds a logarithm, where only multiples of 1/log(2) are usual.

    Returns
    -------
    str or None
        None where no constant, or more than one, is near.
    """
    middle, half = (low + high) / 2, (high - low) / 2
    factors = ["1/log(2)"] if logarithmic else list(_FACTORS)
    near: list[str] = []
    crowd = 0.0
    for factor in factors:
        for multiple in _MULTIPLES:
            constant = float(multiple) * _FACTORS[factor]
            if abs(constant - middle) <= half:
                near.append(_write(multiple, factor))
            if abs(constant - middle) <= 0.25 * abs(middle):
                crowd += 1
    # constants within a quarter of the middle, spread over half of it
    if len(near) != 1 or crowd * (high - low) / (0.5 * abs(middle)) > CHANCE:
        return None
    return near[0]


def _write(multiple: Fraction, factor: str) -> str:
    top, bottom = str(multiple.numerator), str(multiple.denominator)
    name = factor.removeprefix("1/")
    if factor.startswith("1/"):
        lower = name if bottom == "1" else f"({bottom}*{name})"
        return f"{top}/{lower}"
    upper = name if top == "1" else f"{top}*{name}"
    return upper if bottom == "1" else f"{upper}/{bottom}"
