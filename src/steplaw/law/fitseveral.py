"""Fitted laws in several sizes."""

from __future__ import annotations

import math
from collections.abc import Callable, Sequence
from functools import lru_cache
from itertools import combinations, product
from math import prod
from typing import Any

from steplaw.law.fitbases import Basis, FitTerm
from steplaw.law.growth import FLAT
from steplaw.law.leading import leading_term
from steplaw.law.leastsquares import least_squares, student
from steplaw.law.model import Law, Observation
from steplaw.law.snap import Coefficient, plain, write

LEAST_POINTS = 9
ERROR_ALLOWED = 0.05
CLOSE, RIVAL, SAME = 1.3, 1.8, 0.0005
SMOOTH = 0.01
LEAD_SHARE = 0.08


def fit_several(observations: Sequence[Observation], names: tuple[str, ...]) -> Law:
    """Fit a law in several sizes, as `fit` does in one.

    Parameters
    ----------
    observations : sequence of Observation
        One for each point.
    names : tuple of str
        The size names.

    Returns
    -------
    Law
        Graded ``fitted``, or ``open`` with a note that says why.
    """
    import numpy as np

    kept = sorted((o for o in observations if min(o.at) >= 2), key=lambda o: prod(o.at))
    if len(kept) < LEAST_POINTS:
        note = f"too few points: {len(kept)} with every size from 2 on, {LEAST_POINTS} are needed"
        return Law(None, None, "open", note=note, names=names)
    held = max(3, len(kept) // 4)
    values = np.array([float(o.value) for o in kept])
    scale = np.maximum(np.abs(values), 1.0)
    noise = np.array(
        [0.0 if o.whole else math.sqrt(float(o.variance) / max(1, o.draws)) for o in kept]
    )
    weights = 1.0 / np.sqrt(noise**2 + (SMOOTH * scale) ** 2)
    points = tuple(o.at for o in kept)
    trials = trials_of(points, names, values, weights, held)
    quiet = float(np.sqrt(np.mean((noise / scale)[-held:] ** 2)))
    if not trials or trials[0][0] > ERROR_ALLOWED + 2 * quiet:
        off = f": the best formula is {100 * trials[0][0]:.1f} % off" if trials else ""
        return Law(None, None, "open", note=f"nothing fits{off} at the larger points", names=names)
    best = trials[0][0]
    chosen = min(
        (t for t in trials if t[0] <= CLOSE * best + SAME), key=lambda t: (_cost(t[1]), t[0])
    )
    rivals = _rivals(chosen, [t for t in trials if t[0] <= RIVAL * best + SAME], names)
    if rivals:
        note = "several orders of growth fit equally well: " + ", ".join(rivals)
        return Law(None, None, "open", note=note, names=names)
    return _law(kept, names, values, weights, held, chosen)


Trial = tuple[float, Basis, float, Any]


def _cost(basis: Basis) -> float:
    return len(basis) + sum(t.oddity for t in basis) / 2


def trials_of(
    points: tuple[tuple[int, ...], ...],
    names: tuple[str, ...],
    values: Any,
    weights: Any,
    held: int,
) -> list[Trial]:
    """Fit every basis to the smaller points and judge it at the larger ones, the best first."""
    import numpy as np

    scale = np.maximum(np.abs(values), 1.0)
    out: list[Trial] = []
    for group in _bases(names):
        width = len(group[0])
        if len(points) - held < width + 2:
            continue
        stack = _stack(points, names, width)
        solved = least_squares(stack[:, :-held], values[:-held], weights[:-held])
        error = np.abs(np.einsum("bnp,bp->bn", stack, solved) - values) / scale
        rms = np.sqrt(np.mean(error[:, -held:] ** 2, axis=1))
        inside = np.sqrt(np.mean(error[:, :-held] ** 2, axis=1))
        score = np.sqrt((2 * rms**2 + inside**2) / 3)
        share = (solved[:, :, None] * stack.transpose(0, 2, 1) / scale).max(axis=2)
        for k in np.flatnonzero(np.isfinite(score) & (score < 0.5)):
            if share[k, 0] >= LEAD_SHARE and solved[k, 0] > 0:
                largest = float(error[k, -held:].max())
                out.append((float(score[k]), group[k], largest, solved[k]))
    return sorted(out, key=lambda t: t[0])


@lru_cache(maxsize=64)
def _stack(points: tuple[tuple[int, ...], ...], names: tuple[str, ...], width: int) -> Any:
    import numpy as np

    group = _bases(names)[width - 1]
    columns = {t.text: _column(t, points) for t in _pool(names)}
    return np.stack([np.stack([columns[t.text] for t in b], axis=1) for b in group])


def _column(term: FitTerm, points: tuple[tuple[int, ...], ...]) -> Any:
    import numpy as np

    return np.array([term.at(p) for p in points])


@lru_cache(maxsize=8)
def _pool(names: tuple[str, ...]) -> tuple[FitTerm, ...]:
    terms = []
    for halves in product(range(7), repeat=len(names)):
        powers = tuple(h / 2 for h in halves)
        odd = sum(h % 2 for h in halves)
        if sum(halves) > 8 or odd > 1 or (odd and len(names) > 2):
            continue
        for log in (None,) if odd else (None, *range(len(names))):
            if log is None or any(halves):
                terms.append(_term(names, powers, log))
    return tuple(sorted(terms, key=lambda t: t.growth))


def _term(names: tuple[str, ...], powers: tuple[float, ...], log: int | None) -> FitTerm:
    texts = [_power_text(n, p) for n, p in zip(names, powers, strict=True) if p]
    if log is not None:
        texts.append(f"log({names[log]})")
    growth = (0.0, 0.0, float(sum(powers)), 0.0 if log is None else 1.0, 0.0)
    oddity = (2 if any(p % 1 for p in powers) else 0) + (0 if log is None else 1)
    return FitTerm("*".join(texts), _value(powers, log), growth, oddity)


def _power_text(name: str, power: float) -> str:
    if power == 1:
        return name
    if power == 0.5:
        return f"sqrt({name})"
    return f"{name}**({int(2 * power)}/2)" if power % 1 else f"{name}**{int(power)}"


def _value(powers: tuple[float, ...], log: int | None) -> Callable[[Any], float]:
    def at(point: Any) -> float:
        number = float(prod(float(n) ** p for n, p in zip(point, powers, strict=True)))
        return number if log is None else number * math.log(point[log])

    return at


@lru_cache(maxsize=8)
def _bases(names: tuple[str, ...]) -> tuple[list[Basis], ...]:
    pool = _pool(names)
    simple = [t for t in pool if t.oddity == 0 or (t.oddity == 1 and t.growth[2] <= 2)]
    pairs = [(b, a) for a, b in combinations(pool, 2) if b.growth > FLAT]
    few = simple if len(names) == 2 else [t for t in simple if t.growth[2] <= 2]
    triples = [(c, b, a) for a, b, c in combinations(few, 3) if c.growth > FLAT]
    return [(t,) for t in pool], list(pairs), list(triples)


def _rivals(chosen: Trial, close: Sequence[Trial], names: tuple[str, ...]) -> list[str]:
    own = _order_text(chosen, names)
    others = []
    for trial in close:
        if _cost(trial[1]) <= _cost(chosen[1]):
            text = _order_text(trial, names)
            if text != own and text not in others:
                others.append(text)
    return [own, *others[:4]] if others else []


def _order_text(trial: Trial, names: tuple[str, ...]) -> str:
    plain_sum = " + ".join(t.text or "1" for t, c in zip(trial[1], trial[3], strict=True) if c)
    return leading_term(plain_sum, names)


def _law(
    kept: Sequence[Observation],
    names: tuple[str, ...],
    values: Any,
    weights: Any,
    held: int,
    chosen: Trial,
) -> Law:
    import numpy as np

    _, basis, error, trained = chosen
    points = tuple(o.at for o in kept)
    matrix = np.stack([_column(t, points) for t in basis], axis=1)
    solved = least_squares(matrix[None], values, weights)[0]
    rest = (matrix @ solved - values) * weights
    freedom = len(kept) - len(basis)
    scaled = matrix * weights[:, None]
    spread = np.linalg.pinv(scaled.T @ scaled) * float(rest @ rest) / freedom
    found = []
    for k, term in enumerate(basis):
        half = student(freedom) * math.sqrt(max(0.0, float(spread[k, k])))
        low = min(float(solved[k]) - half, float(trained[k]))
        high = max(float(solved[k]) + half, float(trained[k]))
        found.append(Coefficient(term, float(solved[k]), low, high))
    formula = write(found, "")
    return Law(
        formula,
        leading_term(formula, names),
        "fitted",
        holds_from=[min(o.at[k] for o in kept) for k in range(len(names))],
        settled_by=tuple(o.at for o in kept[:-held]),
        checked_at=tuple(o.at for o in kept[-held:]),
        error=error,
        note=f"fitted on {len(kept) - held} points, tested on the {held} largest",
        details={
            "terms": [plain(c, "") for c in found],
            "data": {"sizes": len(kept), "held_out": held, "draws": sum(o.draws for o in kept)},
        },
        names=names,
    )
