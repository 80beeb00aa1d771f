"""Least squares in numpy, many small problems at once, and Student's distribution."""

from __future__ import annotations

import math
from typing import Any


def least_squares(stack: Any, values: Any, weights: Any) -> Any:
    """Solve many small weighted least squares problems at once, by QR.

    Parameters
    ----------
    stack : array of shape (problems, sizes, terms)
        The columns of each problem.
    values, weights : array of shape (sizes,)
        What to fit, and one divided by the expected error of each.

    Returns
    -------
    array of shape (problems, terms)
        Not a number where the columns are dependent.
    """
    import numpy as np

    scaled = stack * weights[None, :, None]
    norms = np.linalg.norm(scaled, axis=1)
    norms[norms == 0] = 1.0
    q, r = np.linalg.qr(scaled / norms[:, None, :])
    diagonal = np.abs(np.diagonal(r, axis1=1, axis2=2)).min(axis=1)
    right = np.einsum("bnp,n->bp", q, values * weights)
    r[diagonal < 1e-9] = np.eye(stack.shape[2])
    right[diagonal < 1e-9] = np.nan
    return np.linalg.solve(r, right[:, :, None])[:, :, 0] / norms


def student(freedom: int) -> float:
    """Give the two-sided 95 % point of Student's distribution.

    Notes
    -----
    By the expansion of Abramowitz & Stegun, Handbook of Mathematical Functions, 26.7.5, with
    the exact points for one and two degrees of freedom.
    """
    if freedom <= 2:
        return {1: 12.706, 2: 4.303}.get(freedom, math.inf)
    x = 1.959963985
    g1 = (x**3 + x) / 4
    g2 = (5 * x**5 + 16 * x**3 + 3 * x) / 96
    g3 = (3 * x**7 + 19 * x**5 + 17 * x**3 - 15 * x) / 384
    g4 = (79 * x**9 + 776 * x**7 + 1482 * x**5 - 1920 * x**3 - 945 * x) / 92160
    return x + g1 / freedom + g2 / freedom**2 + g3 / freedom**3 + g4 / freedom**4
