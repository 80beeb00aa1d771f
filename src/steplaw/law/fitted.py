"""Laws fitted by least squares, chosen by how well they foretell larger sizes."""

from __future__ import annotations

import math
from collections.abc import Sequence
from dataclasses import dataclass, replace
from functools import lru_cache
from typing import TYPE_CHECKING, Any

from steplaw.law.fitbases import Basis, FitTerm, bases
from steplaw.law.growth import Vector, compare
from steplaw.law.leading import leading_term
from steplaw.law.leastsquares import least_squares, student
from steplaw.law.model import Law, Observation
from steplaw.law.snap import Coefficient, plain, recognise, write

if TYPE_CHECKING:
    import numpy as np
    from numpy.typing import NDArray

    Array = NDArray[np.float64]

LEAST_SIZES = 6
ERROR_ALLOWED = 0.05
SMOOTH = 0.01
LEAD_SHARE = 0.08
#: Standard deviation of rounding to a whole number, the square root of 1/12.
ROUNDING = 0.29
WIDE = 4
CLOSE, RIVAL, SAME = 1.3, 1.8, 0.0005


@dataclass(frozen=True, slots=True)
class Data:
    """Sizes, values and their standard errors; the larger sizes are held out."""

    sizes: tuple[int, ...]
    values: Array
    noise: Array
    rounded: Array
    draws: tuple[int, ...]
    held: int

    @property
    def train(self) -> slice:
        """Give the sizes that a trial fit may see."""
        return slice(0, len(self.sizes) - self.held)

    @property
    def weights(self) -> Array:
        """Give one divided by the expected error of each value."""
        import numpy as np

        scale = np.maximum(np.abs(self.values), 1.0)
        octaves = [max(1, n).bit_length() for n in self.sizes]
        crowd = np.array([octaves.count(o) for o in octaves], dtype=float)
        error: Array = np.sqrt((self.noise**2 + self.rounded**2 + (SMOOTH * scale) ** 2) * crowd)
        return 1.0 / error

    @property
    def damping(self) -> Array:
        """Give less than one where a count is so small that being whole matters."""
        import numpy as np

        scale = np.maximum(np.abs(self.values), 1.0)
        damping: Array = 1 / np.sqrt(1 + (self.rounded / (SMOOTH * scale)) ** 2)
        return damping

    @property
    def relative_noise(self) -> float:
        """Give the standard error of the held-out values, relative to them."""
        import numpy as np

        scale = np.maximum(np.abs(self.values), 1.0)
        tail = (self.noise / scale)[-self.held :]
        return float(np.sqrt(np.mean(tail**2)))


@dataclass(frozen=True, slots=True)
class Trial:
    """A basis with its fit on the smaller sizes and its errors at the larger ones."""

    basis: Basis
    coefficients: Array
    held_error: float
    score: float


def fit(observations: Sequence[Observation], name: str, orders: Sequence[Vector] = ()) -> Law:
    """Fit a law of one size.

    Parameters
    ----------
    observations : sequence of Observation
        In increasing order of size.
    name : str
        The size name.
    orders : sequence of Vector
        Orders of growth known to occur; one of them settles a tie between orders that fit alike.

    Returns
    -------
    Law
        Graded ``fitted``, or ``open`` with a note that says why.

    Notes
    -----
    Every basis is fitted to the smaller sizes alone, weighted by the expected error of each
    mean, and judged at the larger ones. Among the bases that foretell these about equally well
    the one with fewest and plainest terms is taken. Where another order of growth does as well
    with as few terms, nothing is claimed.
    """
    data = prepare(observations)
    if data is None:
        return Law(None, None, "open", note=_too_few(observations), names=(name,))
    if not _wide_enough(data):
        return _open(data, name, "the sizes are too close together to tell orders of growth apart")
    trials = trials_of(data)
    if not trials:
        return _open(data, name, "no growth in the basis fits the values")
    best = min(trial.score for trial in trials)
    chosen = min((t for t in trials if t.score <= CLOSE * best + SAME), key=_plainness)
    allowed = ERROR_ALLOWED + 2 * data.relative_noise
    if best > allowed or chosen.held_error > 2 * allowed:
        off = 100 * max(best, chosen.held_error)
        return _open(data, name, f"nothing fits: the best formula is {off:.0f} % off")
    nearby = [t for t in trials if t.score <= RIVAL * best + SAME]
    tied = [chosen, *_rivals(chosen, nearby)]
    if len(tied) > 1:
        texts = [leading_text(t, name) for t in tied]
        known = [t for t in tied if any(compare(t.basis[0].growth, o) == 0 for o in orders)]
        if len(known) == 1:
            law = _law(data, known[0], nearby, name)
            others = ", ".join(x for t, x in zip(tied, texts, strict=True) if t is not known[0])
            why = f"{others} would fit as well; taken is the growth that exact counts here have"
            return replace(law, note=f"{law.note}; {why}" if law.note else why)
        alike = f"several orders of growth fit equally well: {', '.join(texts)}"
        law = _open(data, name, f"{alike}; larger sizes would tell them apart")
        return replace(law, details={**(law.details or {}), "undecided": texts})
    return _law(data, chosen, nearby, name)


def prepare(observations: Sequence[Observation]) -> Data | None:
    """Give what a fit works on; None where there are too few sizes or numbers beyond floats."""
    import numpy as np

    for least in (4, 2):
        kept = [o for o in observations if o.at[0] >= least]
        if len(kept) >= LEAST_SIZES:
            break
    else:
        return None
    sizes = tuple(o.at[0] for o in kept)
    values = np.array([_float(o.value) for o in kept])
    if not np.all(np.isfinite(values)):
        return None
    noise = np.array(
        [0.0 if o.whole else math.sqrt(_float(o.variance) / max(1, o.draws)) for o in kept]
    )
    draws = tuple(o.draws for o in kept)
    held = min(max(2, round(0.3 * len(kept))), len(kept) - 4)
    rounded = np.array([ROUNDING if o.value.denominator == 1 else 0.0 for o in kept])
    return Data(sizes, values, noise, rounded, draws, held)


def _float(number: Any) -> float:
    try:
        return float(number)
    except OverflowError:
        return math.inf


def _too_few(observations: Sequence[Observation]) -> str:
    return f"too few sizes: {len(observations)} seen, a fit needs at least {LEAST_SIZES} from 2 on"


@lru_cache(maxsize=64)
def _design(sizes: tuple[int, ...], exponential: bool) -> list[tuple[list[Basis], Any]]:
    """Give the bases by number of terms, each group with its stacked columns."""
    import numpy as np

    columns: dict[str, Any] = {}

    def column(term: FitTerm) -> Any:
        if term.text not in columns:
            columns[term.text] = np.array([term.at(float(n)) for n in sizes])
        return columns[term.text]

    groups: dict[int, list[Basis]] = {}
    for basis in bases(exponential):
        groups.setdefault(len(basis), []).append(basis)
    return [
        (group, np.stack([np.stack([column(t) for t in b], axis=1) for b in group]))
        for _, group in sorted(groups.items())
    ]


def trials_of(data: Data) -> list[Trial]:
    """Fit every basis to the smaller sizes and judge it at the larger ones."""
    import numpy as np

    exponential = _exponential(data)
    weights, scale = data.weights, np.maximum(np.abs(data.values), 1.0)
    trials: list[Trial] = []
    for group, stack in _design(data.sizes, exponential):
        width = stack.shape[2]
        if len(data.sizes) - data.held < width + 2:
            continue
        coefficients = least_squares(
            stack[:, data.train], data.values[data.train], weights[data.train]
        )
        guess = np.einsum("bnp,bp->bn", stack, coefficients)
        error = np.abs(guess - data.values) / scale
        held = error[:, -data.held :]
        damped = error * data.damping
        rms_held = np.sqrt(np.mean(damped[:, -data.held :] ** 2, axis=1))
        inside = np.sqrt(np.average(damped[:, data.train] ** 2, axis=1, weights=_octave(data)))
        score = np.sqrt((2 * rms_held**2 + inside**2) / 3)
        share = coefficients[:, 0] * stack[:, -1, 0] / scale[-1]
        for k, basis in enumerate(group):
            if share[k] >= LEAD_SHARE and math.isfinite(score[k]):
                errors = float(held[k].max()), float(score[k])
                trials.append(Trial(basis, coefficients[k], *errors))
    return trials


def _exponential(data: Data) -> bool:
    """Say whether the values are large enough for powers of a constant."""
    largest = data.sizes[-1]
    return largest <= 64 and math.log2(1 + abs(data.values[-1])) >= 0.35 * largest


def _wide_enough(data: Data) -> bool:
    largest = data.sizes[-1]
    wide = largest >= WIDE * data.sizes[0]
    return (wide and largest >= 4 * WIDE) or (_exponential(data) and largest >= 10)


def _octave(data: Data) -> Array:
    import numpy as np

    octaves = [max(1, n).bit_length() for n in data.sizes[data.train]]
    return np.array([1.0 / octaves.count(o) for o in octaves])


def _plainness(trial: Trial) -> tuple[float, float]:
    return _cost(trial), trial.score


def _cost(trial: Trial) -> float:
    """Give the number of terms, a rarer form counting as half a term more or so."""
    return len(trial.basis) + sum(t.oddity for t in trial.basis) / 2


def _rivals(chosen: Trial, close: Sequence[Trial]) -> list[Trial]:
    """Give the best trial of every other order that does about as well and is about as plain."""
    by_order: dict[str, Trial] = {}
    for trial in sorted(close, key=lambda t: t.score):
        other = trial.basis[0]
        if other.growth != chosen.basis[0].growth and _cost(trial) <= _cost(chosen) + 0.5:
            by_order.setdefault(other.text, trial)
    return list(by_order.values())[:4]


def leading_text(trial: Trial, name: str) -> str:
    """Write the leading term of a trial without its coefficient."""
    return trial.basis[0].text.format(n=name) or "a constant"


def _open(data: Data, name: str, why: str) -> Law:
    note = f"{why} (sizes {data.sizes[0]} to {data.sizes[-1]})"
    return Law(None, None, "open", note=note, names=(name,), details={"data": _evidence(data)})


def _evidence(data: Data) -> dict[str, Any]:
    return {
        "sizes": len(data.sizes),
        "held_out": data.held,
        "draws": sum(data.draws),
        "relative_noise": data.relative_noise,
    }


def _law(data: Data, chosen: Trial, nearby: Sequence[Trial], name: str) -> Law:
    found = _intervals(data, chosen)
    found[0] = _widened(found[0], nearby)
    found = recognise(found, data, chosen.held_error)
    formula = write(found, name)
    note = (
        f"fitted on sizes {data.sizes[0]} to {data.sizes[-1 - data.held]}, "
        f"tested up to {name} = {data.sizes[-1]}"
    )
    if all(n & (n - 1) == 0 for n in data.sizes):
        note += "; every size is a power of two"
    return Law(
        formula,
        leading_term(formula, (name,)),
        "fitted",
        holds_from=data.sizes[0],
        settled_by=data.sizes[: -data.held],
        checked_at=data.sizes[-data.held :],
        error=chosen.held_error,
        note=note,
        details={"terms": [plain(c, name) for c in found], "data": _evidence(data)},
        names=(name,),
    )


def _intervals(data: Data, chosen: Trial) -> list[Coefficient]:
    """Fit the chosen basis to all sizes; the interval also spans the fit on the smaller ones."""
    import numpy as np

    matrix = np.stack([[t.at(float(n)) for t in chosen.basis] for n in data.sizes])
    weights = data.weights
    solved = least_squares(matrix[None], data.values, weights)[0]
    rest = (matrix @ solved - data.values) * weights
    freedom = len(data.sizes) - len(chosen.basis)
    variance = float(rest @ rest) / freedom
    floor = _noise_floor(data)
    scaled = matrix * weights[:, None]
    spread = np.linalg.pinv(scaled.T @ scaled)
    quantile = student(freedom)
    out = []
    for k, term in enumerate(chosen.basis):
        half = quantile * math.sqrt(max(variance, floor) * max(0.0, float(spread[k, k])))
        low = min(float(solved[k]) - half, float(chosen.coefficients[k]))
        high = max(float(solved[k]) + half, float(chosen.coefficients[k]))
        out.append(Coefficient(term, float(solved[k]), low, high))
    return out


def _widened(first: Coefficient, nearby: Sequence[Trial]) -> Coefficient:
    """Let the leading interval span what other lower terms, about as good, make of it."""
    others = [float(t.coefficients[0]) for t in nearby if t.basis[0].text == first.term.text]
    low, high = min(first.low, *others), max(first.high, *others)
    return replace(first, low=low, high=high)


def _noise_floor(data: Data) -> float:
    """Give the residual variance that the spread of the draws alone would cause."""
    import numpy as np

    return float(np.mean((data.noise * data.weights) ** 2))
