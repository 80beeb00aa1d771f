"""Numbers a + b*sqrt(d), kept exact."""

from __future__ import annotations

import math
from dataclasses import dataclass
from fractions import Fraction
from typing import Any


@dataclass(frozen=True, slots=True)
class Surd:
    """The number ``whole + part * sqrt(under)`` with rational parts."""

    whole: Fraction
    part: Fraction
    under: int

    def settled(self) -> Fraction | float:
        """Give a fraction where the root has dropped out, else a float."""
        if not self.part:
            return self.whole
        # a sum of opposite signs loses digits as floats; the conjugate keeps them
        if self.whole and (self.whole > 0) != (self.part > 0):
            norm = self.whole**2 - self.part**2 * self.under
            return float(norm) / (float(self.whole) - float(self.part) * math.sqrt(self.under))
        return float(self.whole) + float(self.part) * math.sqrt(self.under)

    def __float__(self) -> float:
        return float(self.settled())

    def _as_surd(self, other: Any) -> Surd | None:
        if isinstance(other, int | Fraction):
            return Surd(Fraction(other), Fraction(0), self.under)
        if isinstance(other, Surd) and other.under == self.under:
            return other
        return None

    def __add__(self, other: Any) -> Any:
        same = self._as_surd(other)
        if same is None:
            return float(self) + float(other)
        return Surd(self.whole + same.whole, self.part + same.part, self.under)

    __radd__ = __add__

    def __neg__(self) -> Surd:
        return Surd(-self.whole, -self.part, self.under)

    def __sub__(self, other: Any) -> Any:
        return self + (-other)

    def __rsub__(self, other: Any) -> Any:
        return -self + other

    def __mul__(self, other: Any) -> Any:
        same = self._as_surd(other)
        if same is None:
            return float(self) * float(other)
        return Surd(
            self.whole * same.whole + self.part * same.part * self.under,
            self.whole * same.part + self.part * same.whole,
            self.under,
        )

    __rmul__ = __mul__

    def inverse(self) -> Surd:
        """Give 1 divided by this number."""
        norm = self.whole**2 - self.part**2 * self.under
        return Surd(self.whole / norm, -self.part / norm, self.under)

    def __truediv__(self, other: Any) -> Any:
        if isinstance(other, int | Fraction):
            return Surd(self.whole / other, self.part / other, self.under)
        same = self._as_surd(other)
        return float(self) / float(other) if same is None else self * same.inverse()

    def __rtruediv__(self, other: Any) -> Any:
        return self.inverse() * other

    def __pow__(self, exponent: Any) -> Any:
        if not isinstance(exponent, int):
            return float(self) ** float(exponent)
        if exponent < 0:
            return self.inverse() ** -exponent
        if exponent * math.log2(max(2.0, abs(float(self)))) > 200_000:
            raise OverflowError
        result = Surd(Fraction(1), Fraction(0), self.under)
        base = self
        while exponent:
            if exponent & 1:
                result = result * base
            base = base * base
            exponent >>= 1
        return result

    def __floor__(self) -> int:
        # floor((a + b sqrt d)/c) with whole numbers: the root is taken of b*b*d, exactly
        common = math.lcm(self.whole.denominator, self.part.denominator)
        a, b = int(self.whole * common), int(self.part * common)
        root = math.isqrt(b * b * self.under)
        if b < 0:
            root = -root - (1 if root * root != b * b * self.under else 0)
        return (a + root) // common

    def __ceil__(self) -> int:
        return -math.floor(-self)


def square_root(number: Any) -> Any:
    """Give the square root, exactly where the number is rational and not negative."""
    if not isinstance(number, int | Fraction) or number < 0:
        return math.sqrt(float(number))
    number = Fraction(number)
    under = number.numerator * number.denominator
    root = math.isqrt(under)
    if root * root == under:
        return Fraction(root, number.denominator)
    return Surd(Fraction(0), Fraction(1, number.denominator), under)
