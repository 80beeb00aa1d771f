"""Logarithms of whole numbers kept exact, so that their ratios can be rounded safely."""

from __future__ import annotations

import math
from dataclasses import dataclass
from fractions import Fraction
from typing import Any


@dataclass(frozen=True, slots=True)
class Log:
    """A rational multiple of the natural logarithm of a whole number."""

    factor: Fraction
    of: int

    def settled(self) -> Fraction | float:
        """Give 0 exactly, any other logarithm as a float."""
        if self.of == 1 or not self.factor:
            return Fraction(0)
        return float(self.factor) * math.log(self.of)

    def __float__(self) -> float:
        return float(self.settled())

    def __mul__(self, other: Any) -> Any:
        if isinstance(other, int | Fraction):
            return Log(self.factor * other, self.of)
        return float(self) * float(other)

    __rmul__ = __mul__

    def __truediv__(self, other: Any) -> Any:
        if isinstance(other, int | Fraction):
            return Log(self.factor / other, self.of)
        if isinstance(other, Log):
            return ratio(self.factor / other.factor, self.of, other.of)
        return float(self) / float(other)

    def __rtruediv__(self, other: Any) -> Any:
        return float(other) / float(self)

    def __add__(self, other: Any) -> Any:
        if isinstance(other, Log) and other.of == self.of:
            return Log(self.factor + other.factor, self.of)
        return float(self) + float(other)

    __radd__ = __add__

    def __neg__(self) -> Log:
        return Log(-self.factor, self.of)

    def __sub__(self, other: Any) -> Any:
        return self + (-other)

    def __rsub__(self, other: Any) -> Any:
        return -self + other

    def __pow__(self, other: Any) -> float:
        return float(float(self) ** other)


@dataclass(frozen=True, slots=True)
class LogRatio:
    """A rational multiple of log(of)/log(base) that is no rational number."""

    factor: Fraction
    of: int
    base: int

    def settled(self) -> float:
        """Give it as a float."""
        return float(self.factor) * math.log(self.of) / math.log(self.base)

    __float__ = settled

    def __floor__(self) -> int:
        # r = floor(p/q * log_b a) is the largest r with b**(q r) <= a**p
        p, q = self.factor.numerator, self.factor.denominator
        if p < 0:
            return -math.ceil(-self)
        power = self.of**p
        guess = max(0, math.floor(self.settled()) - 1)
        while self.base ** (q * (guess + 1)) <= power:
            guess += 1
        return guess

    def __ceil__(self) -> int:
        # an irrational number is never whole
        return math.floor(self) + 1 if self.factor > 0 else -math.floor(-self)

    def power_of(self, number: Any) -> Any:
        """Raise a number to this exponent, exactly where both share a base."""
        if isinstance(number, int) and number >= 1:
            shared = rational_ratio(number, self.base)
            if shared is not None:
                exponent = shared * self.factor
                if exponent.denominator == 1:
                    return Fraction(self.of) ** exponent.numerator
        return float(number) ** self.settled()

    def __mul__(self, other: Any) -> Any:
        if isinstance(other, int | Fraction):
            return LogRatio(self.factor * other, self.of, self.base) if other else Fraction(0)
        return self.settled() * float(other)

    __rmul__ = __mul__

    def __truediv__(self, other: Any) -> Any:
        if isinstance(other, int | Fraction):
            return LogRatio(self.factor / other, self.of, self.base)
        return self.settled() / float(other)

    def __rtruediv__(self, other: Any) -> float:
        return float(other) / self.settled()

    def __neg__(self) -> LogRatio:
        return LogRatio(-self.factor, self.of, self.base)

    def __add__(self, other: Any) -> float:
        return self.settled() + float(other)

    __radd__ = __add__

    def __sub__(self, other: Any) -> float:
        return self.settled() - float(other)

    def __rsub__(self, other: Any) -> float:
        return float(other) - self.settled()

    def __pow__(self, other: Any) -> float:
        return float(self.settled() ** other)


def ratio(factor: Fraction, of: int, base: int) -> Fraction | LogRatio:
    """Give factor * log(of)/log(base), as a fraction where it is one."""
    if of == 1 or not factor:
        return Fraction(0)
    shared = rational_ratio(of, base)
    return LogRatio(factor, of, base) if shared is None else factor * shared


def rational_ratio(of: int, base: int) -> Fraction | None:
    """Give log(of)/log(base) where both are powers of one whole number, else None."""
    root, exponent = _root(base)
    count, rest = 0, of
    while rest % root == 0:
        rest //= root
        count += 1
    return Fraction(count, exponent) if rest == 1 else None


def _root(number: int) -> tuple[int, int]:
    """Write a whole number as the smallest root to a power."""
    for exponent in range(number.bit_length(), 1, -1):
        root = round(number ** (1 / exponent))
        for near in (root - 1, root, root + 1):
            if near > 1 and near**exponent == number:
                return near, exponent
    return number, 1
