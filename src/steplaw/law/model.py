"""What a law is, and the observations it is found from."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass
from fractions import Fraction
from typing import Any, Literal

Grade = Literal["proved", "exact", "fitted", "open"]


@dataclass(frozen=True, slots=True)
class Observation:
    """One figure at one size.

    Parameters
    ----------
    at : tuple of int
        The size, one number for each size name.
    value : Fraction
        The figure, or its mean over draws.
    draws : int
        Inputs that the mean was taken over.
    variance : Fraction
        Variance over these inputs (0 where all gave the same).
    least, most : int or Fraction
        Extremes over these inputs.
    whole : bool
        Whether the inputs are all inputs of that size, so that the mean is exact.
    """

    at: tuple[int, ...]
    value: Fraction
    draws: int = 1
    variance: Fraction = Fraction(0)
    least: Fraction | int = 0
    most: Fraction | int = 0
    whole: bool = False


@dataclass(frozen=True, slots=True)
class Law:
    """A formula for a figure by size, with its leading term and its grade.

    Parameters
    ----------
    formula, leading : str or None
        Read by ``sympy.sympify`` in the size names; None where the grade is open.
    grade : {"proved", "exact", "fitted", "open"}
        How the law is known.
    holds_from : int or list of int or None
        Size from which the formula holds, by size name where there are several.
    settled_by, checked_at : tuple
        Sizes that found the formula, and sizes that tested it and had no part in finding it.
    error : float or None
        Largest relative error at the tested sizes (0 for exact laws).
    note : str
        What a reader must know beside the formula.
    details : mapping
        Further evidence, such as the intervals of coefficients.
    names : tuple of str
        The size names that the formula is written in.
    """

    formula: str | None
    leading: str | None
    grade: Grade
    holds_from: int | list[int] | None = None
    settled_by: tuple[Any, ...] = ()
    checked_at: tuple[Any, ...] = ()
    error: float | None = None
    note: str = ""
    details: Mapping[str, Any] | None = None
    names: tuple[str, ...] = ("n",)

    def as_json(self) -> dict[str, Any]:
        """Give the law as the LAW object of the record."""
        out: dict[str, Any] = {
            "formula": self.formula,
            "leading": self.leading,
            "grade": self.grade,
            "holds_from": self.holds_from,
            "settled_by": list(self.settled_by),
            "checked_at": list(self.checked_at),
            "error": self.error,
            "note": self.note,
        }
        if self.details:
            out["details"] = dict(self.details)
        return out
