"""The choice among exact forms: found on some sizes, tested on others, shortest account wins."""

from __future__ import annotations

import re
from collections.abc import Iterable, Sequence
from dataclasses import dataclass
from fractions import Fraction
from functools import lru_cache
from math import log2

from steplaw.law.exactmath import PRIME, Relations, bits, bits_together, relations, residue, solve
from steplaw.law.terms import Form, Term

LEAST_CHECKS = 3
MARGIN = 4.0
TOKEN_BITS = 2.5


@dataclass(frozen=True, slots=True)
class Found:
    """An exact formula with the sizes that found it and those that tested it.

    Parameters
    ----------
    form : Form
        The form.
    coefficients : tuple of Fraction
        Its coefficients, term by term.
    settled, checked : tuple of int
        Positions of the sizes that settled the coefficients, and of those that tested them.
    length : float
        Length in bits of the whole account: coefficients, choice, and counts left outside.
    """

    form: Form
    coefficients: tuple[Fraction, ...]
    settled: tuple[int, ...]
    checked: tuple[int, ...]
    length: float

    @property
    def first(self) -> int:
        """Give the position of the first size that the formula gives."""
        return min(self.settled + self.checked)


class Grid:
    """The sizes of a search, with what depends on them alone worked out once."""

    def __init__(self, sizes: tuple[int, ...]) -> None:
        self.sizes = sizes
        self._columns: dict[str, tuple[int, ...]] = {}
        self._relations: dict[str, Relations | None] = {}

    def column(self, term: Term) -> tuple[int, ...]:
        """Give the residues of a term at every size (0 where it is not defined)."""
        column = self._columns.get(term.key)
        if column is None:
            column = tuple(residue(term.at(n)) if n >= term.least else 0 for n in self.sizes)
            self._columns[term.key] = column
        return column

    def relations(self, form: Form) -> Relations | None:
        """Give the relations that every value of the form obeys; None where it is not settled."""
        key = form.key
        if key not in self._relations:
            self._relations[key] = self._find(form)
        return self._relations[key]

    def _find(self, form: Form) -> Relations | None:
        start = self.start(form)
        width = len(form.terms)
        if len(self.sizes) - start < width + LEAST_CHECKS:
            return None
        columns = [self.column(term) for term in form.terms]
        rows = [[column[k] for column in columns] for k in range(start, len(self.sizes))]
        found = relations(rows)
        if len(found.pivots) < width:
            return None
        return Relations(
            tuple(k + start for k in found.pivots),
            tuple(
                (k + start, tuple(j + start for j in used), weights)
                for k, used, weights in found.dependent
            ),
        )

    def start(self, form: Form) -> int:
        """Give the position of the first size at which the form is defined."""
        least = form.least
        return next((k for k, n in enumerate(self.sizes) if n >= least), len(self.sizes))


@lru_cache(maxsize=64)
def grid(sizes: tuple[int, ...]) -> Grid:
    """Give the grid of these increasing sizes, shared by all laws of an audit."""
    return Grid(sizes)


def search(
    sizes: tuple[int, ...],
    values: Sequence[Fraction],
    forms: Iterable[Form],
    before: float = 0.0,
) -> Found | None:
    """Find the exact formula that gives the shortest account of the values.

    Parameters
    ----------
    sizes : tuple of int
        In increasing order.
    values : sequence of Fraction
        Exact values at these sizes.
    forms : iterable of Form
        Fewest coefficients first.
    before : float
        Bits that went into the choice of these forms already.

    Returns
    -------
    Found or None
        None where no form is confirmed by enough sizes that had no part in finding it.

    Notes
    -----
    The account of the values is their formula (coefficients and the choice of the form), and
    the values of the sizes before it holds, written out (minimum description length; Rissanen,
    Modeling by shortest data description, Automatica 14, 1978). A formula must also save more
    bits at the tested sizes than it costs, so that chance agreements of small numbers are not
    taken for laws.
    """
    shared = grid(sizes)
    residues = [residue(v) for v in values]
    best: Found | None = None
    for rank, form in enumerate(forms):
        if best is not None and len(form.terms) > len(best.form.terms) + 1:
            break
        first = _agreement(shared, form, residues)
        if first is None or (best is not None and _says_no_more(form, first, best)):
            continue
        found = _confirm(shared, form, values, first, before + log2(rank + 2))
        if found is None or (best is not None and found.length >= best.length):
            continue
        best = found
        if form.family == "polynomial" and not found.first:
            break
    return best


def _says_no_more(form: Form, first: int, best: Found) -> bool:
    """Say whether a form can only give the formula again that is known already."""
    if first < best.first:
        return False
    keys = {term.key for term in form.terms}
    pairs = zip(best.coefficients, best.form.terms, strict=True)
    return all(term.key in keys for c, term in pairs if c)


def _agreement(shared: Grid, form: Form, residues: Sequence[int]) -> int | None:
    """Give the first position from which the values obey the relations of the form."""
    found = shared.relations(form)
    if found is None:
        return None
    first = shared.start(form)
    tested: set[int] = set()
    checks = 0
    for low, used, weights in found.dependent:
        if sum(w * residues[k] for k, w in zip(used, weights, strict=True)) % PRIME:
            first = low + 1
            break
        checks += 1
        tested.update(used)
    if checks < LEAST_CHECKS or any(k < first or k not in tested for k in found.pivots):
        return None
    return first


def _confirm(
    shared: Grid, form: Form, values: Sequence[Fraction], first: int, choice: float
) -> Found | None:
    positions = range(first, len(shared.sizes))
    rows = [[term.at(shared.sizes[k]) for term in form.terms] for k in positions]
    solved = solve(rows, [values[k] for k in positions])
    if solved is None:
        return None
    coefficients, chosen = solved
    settled = tuple(first + k for k in chosen)
    checked = tuple(k for k in positions if k not in settled)
    for k in checked:
        row = rows[k - first]
        if (
            sum((c * x for c, x in zip(coefficients, row, strict=True) if c), Fraction(0))
            != values[k]
        ):
            return None
    outside = range(shared.start(form), first)
    cost = bits_together(coefficients) + choice
    if form.write is not None:
        cost = min(cost, text_bits(form.formula(coefficients, "n")))
    surprise = _length_at if form.family == "polynomial" else _surprise
    gain = sum(surprise(values, k) for k in checked)
    if not _enough(shared, form, coefficients, settled, checked, len(outside)):
        return None
    lost = sum(bits(values[k]) for k in outside)
    if (outside or len(form.terms) > 1) and gain - cost < MARGIN + lost:
        return None
    length = cost + sum(4 + 2 * bits(values[k]) for k in outside)
    return Found(form, tuple(coefficients), settled, checked, length)


def text_bits(formula: str) -> float:
    """Give the length in bits of a formula, token by token.

    Many coefficients can come to one short formula, as those of ``floor(n**2/12)`` do.
    """
    tokens = re.findall(r"\d+|[A-Za-z]\w*|\*\*|[-+*/]", formula)
    return sum(bits(int(t)) if t.isdigit() else TOKEN_BITS for t in tokens)


def _surprise(values: Sequence[Fraction], k: int) -> float:
    """Give the bits that a value would take by itself, or a whole one as a step from the last."""
    step = values[k] - values[k - 1] if k else values[k]
    whole = values[k].denominator == step.denominator == 1
    return min(_length(values[k]), _length(step)) if whole else _length(values[k])


def _length_at(values: Sequence[Fraction], k: int) -> float:
    return _length(values[k])


def _length(value: Fraction) -> float:
    return bits(value) - 0.5 if value else 0.75


def _enough(
    shared: Grid,
    form: Form,
    coefficients: Sequence[Fraction],
    settled: tuple[int, ...],
    checked: tuple[int, ...],
    outside: int,
) -> bool:
    """Say whether the tests carry the formula: their number, their reach, their levels."""
    free = len(form.terms)
    if len(checked) < max(LEAST_CHECKS, (free + 1) // 2):
        return False
    sizes = shared.sizes
    if max(checked) < max(settled):
        return False
    if outside:
        first = sizes[min(settled + checked)]
        counted = len(settled) + len(checked)
        if outside > max(1, (counted + outside) // 3) or sizes[-1] < 4 * max(first, 1):
            return False
        if len(checked) < LEAST_CHECKS + outside:
            return False
    if form.levels is not None:
        known = {form.levels(sizes[k]) for k in settled}
        return len({form.levels(sizes[k]) for k in checked} - known) >= 2
    return True
