"""Whether linear inequalities over whole numbers contradict each other."""

from __future__ import annotations

from collections.abc import Iterable
from math import gcd

from steplaw.flow.poly import ONE, Monomial, Poly

#: More inequalities than that are not looked at: then nothing is claimed.
MOST_ROWS = 160

Row = dict[Monomial, int]


def contradictory(given: Iterable[Poly]) -> bool:
    """Whether polynomials cannot all be >= 0, each monomial taken for a number of its own.

    Parameters
    ----------
    given : iterable of Poly
        Left sides of ``... >= 0``.

    Returns
    -------
    bool
        True is a proof; False means that none was found.

    Notes
    -----
    Fourier-Motzkin elimination; every inequality is divided by the common factor of its
    coefficients and its constant rounded down, which keeps all whole solutions (Williams,
    Fourier-Motzkin elimination extension to integer programming problems, J. Comb. Theory A 21,
    1976).
    """
    rows = {_key(row): row for row in map(_row, given)}
    while True:
        if any(len(row) == 1 and row.get(ONE, 0) < 0 for row in rows.values()):
            return True
        column = _cheapest(rows.values())
        if column is None:
            return False
        low = [r for r in rows.values() if r.get(column, 0) > 0]
        high = [r for r in rows.values() if r.get(column, 0) < 0]
        rows = {k: r for k, r in rows.items() if column not in r}
        if len(rows) + len(low) * len(high) > MOST_ROWS:
            return False
        for a in low:
            for b in high:
                row = _joined(a, b, column)
                rows[_key(row)] = row


def _key(row: Row) -> tuple[tuple[Monomial, int], ...]:
    return tuple(sorted(row.items()))


def _row(poly: Poly) -> Row:
    tight = poly.tightened()
    return _with_constant(tight.whole)


def _joined(a: Row, b: Row, column: Monomial) -> Row:
    up, down = -b[column], a[column]
    out = {m: c * up for m, c in a.items()}
    for m, c in b.items():
        out[m] = out.get(m, 0) + c * down
    common = gcd(*(c for m, c in out.items() if m))
    if common > 1:
        out = {m: c // common for m, c in out.items()}  # the constant is rounded down
    return _with_constant({m: c for m, c in out.items() if c})


def _with_constant(row: Row) -> Row:
    return row if ONE in row else {**row, ONE: 0}


def _cheapest(rows: Iterable[Row]) -> Monomial | None:
    """Give the monomial whose elimination makes the fewest new rows."""
    low: dict[Monomial, int] = {}
    high: dict[Monomial, int] = {}
    for row in rows:
        for m, c in row.items():
            if m:
                side = low if c > 0 else high
                side[m] = side.get(m, 0) + 1
    columns = low.keys() | high.keys()
    return min(columns, key=lambda m: (low.get(m, 0) * high.get(m, 0), m), default=None)
