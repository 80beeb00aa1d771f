"""What the structure of the code proves about the form of a figure's law."""

from __future__ import annotations

from dataclasses import dataclass


@dataclass(frozen=True, slots=True)
class Shape:
    """The form that a derivation from the code fixes, before anything is counted.

    Parameters
    ----------
    degree : int or tuple of int
        Largest degree: the total degree, or the degree in each size where there are several.
    period : int
        Period of the coefficients (1 for a polynomial).
    holds_from : int or tuple of int
        Size from which the form holds, by size name where there are several.
    reason : str
        What in the code fixes the form, in one line for the reader.

    Notes
    -----
    A block in a nest of loops over ranges with affine bounds runs a number of times that is a
    quasi-polynomial whose period divides the least common multiple of the strides (Ehrhart;
    Clauss, Counting solutions to linear and nonlinear constraints through Ehrhart polynomials,
    ICS 1996).
    """

    degree: int | tuple[int, ...]
    period: int = 1
    holds_from: int | tuple[int, ...] = 0
    reason: str = ""

    def sizes(self, further: int = 3) -> tuple[int, ...]:
        """Give the smallest sizes that prove a law of one size, with `further` ones to test it.

        Parameters
        ----------
        further : int
            Counts beyond those that settle the coefficients.

        Returns
        -------
        tuple of int
            Consecutive sizes from `holds_from` on.
        """
        degree = self.degree if isinstance(self.degree, int) else sum(self.degree)
        first = self.holds_from if isinstance(self.holds_from, int) else max(self.holds_from)
        return tuple(range(first, first + (degree + 1) * self.period + further))
