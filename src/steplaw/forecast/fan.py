"""Prediction intervals of fitted laws: every model that fits about as well, carried on."""

from __future__ import annotations

import math
from collections.abc import Callable, Sequence
from dataclasses import dataclass, replace
from typing import TYPE_CHECKING, Any

from steplaw.forecast.scatter import NORMAL, Scatter, scatter
from steplaw.law import fitseveral, fitted
from steplaw.law.fitbases import Basis
from steplaw.law.leastsquares import least_squares, student
from steplaw.law.model import Observation

if TYPE_CHECKING:
    import numpy as np
    from numpy.typing import NDArray

    Array = NDArray[np.floating[Any]]

Point = tuple[int, ...]
ALIKE, SAME = 2.0, 0.001
"""A model counts where its error is at most twice the least, or hardly above it."""
MODELS_MOST = 60
BACK = 8
"""How many times a forecast is tried beyond the sizes it is made from."""
LEAST_SIZES = 6
TAIL = 0.025
GROUPS = (1, 30, 150, 400)
"""About how many bases of one, two, and three or more terms there are to choose from."""


@dataclass(frozen=True, slots=True)
class Model:
    """One basis fitted to all sizes.

    Parameters
    ----------
    basis : tuple of FitTerm
        Its terms.
    coefficients : array
        Of these.
    covariance : array
        Of the coefficients, with what the fit leaves over.
    quantile : float
        Student's 95 % point for its degrees of freedom.
    weight : float
        How well it fits for the terms that it takes, among others.
    """

    basis: Basis
    coefficients: Any
    covariance: Any
    quantile: float
    weight: float

    def at(self, point: Point) -> tuple[float, float]:
        """Give the mean at a size and half of its 95 % interval."""
        import numpy as np

        where = float(point[0]) if len(point) == 1 else point
        row = np.array([term.at(where) for term in self.basis])
        error = math.sqrt(max(0.0, float(row @ self.covariance @ row)))
        return float(row @ self.coefficients), self.quantile * error


@dataclass(frozen=True, slots=True)
class Interval:
    """Where the mean of a size lies, and where one run does, at 95 in 100.

    Parameters
    ----------
    low, high : float
        For one run.
    mean_low, mean_high : float
        For the mean over the inputs of the size.
    """

    low: float
    high: float
    mean_low: float
    mean_high: float


@dataclass(frozen=True, slots=True)
class Fan:
    """All models that fit about as well as the best, and what they have in common.

    Parameters
    ----------
    models : tuple of Model
        The best first.
    scatter : Scatter
        How far one run lies from the mean.
    unevenness : float
        Relative error that the best model leaves over at the larger sizes.
    missed : float
        Relative error of a forecast from the sizes up to an eighth of the largest.
    largest : float
        The largest size run, the geometric mean where there are several names.
    """

    models: tuple[Model, ...]
    scatter: Scatter
    unevenness: float
    missed: float
    largest: float

    def at(self, point: Point, centre: float) -> Interval:
        """Give the interval at a size.

        Parameters
        ----------
        point : tuple of int
            The size, each number from 2 on.
        centre : float
            What the law gives there; the interval holds it.

        Returns
        -------
        Interval
            No part of it below 0.

        Notes
        -----
        The mean lies where the models have it together, each with the uncertainty of its
        coefficients and by its weight (Burnham & Anderson, Model Selection and Multimodel
        Inference, 2002), widened by the error of a forecast that can be checked: the best model
        fitted to the sizes up to an eighth of the largest, held against the largest, and more so
        the farther the size is. One run adds its own scatter, independently.
        """
        low, high = _middle_part([(m.weight, *m.at(point)) for m in self.models])
        low, high = min(low, centre), max(high, centre)
        own = self.missed * abs(centre) * self._farness(point)
        mean_low = centre - math.hypot(centre - low, own)
        mean_high = centre + math.hypot(high - centre, own)
        deviation = self.scatter.deviation(max(centre, 0.0))
        uneven = 2 * self.unevenness * abs(centre)
        below = math.hypot(self.scatter.below * deviation, uneven)
        above = math.hypot(self.scatter.above * deviation, uneven)
        return Interval(
            max(0.0, centre - math.hypot(centre - mean_low, below)),
            centre + math.hypot(mean_high - centre, above),
            max(0.0, mean_low),
            mean_high,
        )

    def _farness(self, point: Point) -> float:
        """Give how far a size is in terms of the forecast that was checked: 1 at eight times."""
        extent = math.prod(point) ** (1 / len(point))
        return max(0.0, math.log(extent / self.largest) / math.log(BACK))


def fan(observations: Sequence[Observation]) -> Fan | None:
    """Fit every model anew and keep those that fit about as well as the best.

    Parameters
    ----------
    observations : sequence of Observation
        The values that the law was fitted to.

    Returns
    -------
    Fan or None
        None where nothing can be fitted.
    """
    kept = [o for o in observations if min(o.at) >= 2]
    if not kept:
        return None
    spread = scatter(kept)
    found = _of_one(kept, spread) if len(kept[0].at) == 1 else _of_several(kept, spread)
    if found is None:
        return None
    alike, points, values, noise, weights = found
    fits = [_model(basis, points, values, noise, weights) for basis in alike]
    models = [model for model in fits if model is not None]
    if not models:
        return None
    return Fan(
        tuple(models),
        spread,
        _unevenness(models[0], points, values, noise),
        _missed(alike, points, values, noise, weights),
        math.prod(points[-1]) ** (1 / len(points[-1])),
    )


Found = tuple[list[Basis], list[Point], "Array", "Array", "Array"]


def _noise(observations: Sequence[Observation], spread: Scatter) -> list[float]:
    """Give the standard error of each mean; that of the scatter, for few draws tell their own."""
    return [
        0.0 if o.whole else spread.likeliest(float(o.value)) / math.sqrt(max(1, o.draws))
        for o in observations
    ]


def _of_one(observations: Sequence[Observation], spread: Scatter) -> Found | None:
    import numpy as np

    data = fitted.prepare(observations)
    if data is None:
        return None
    kept = [o for o in observations if o.at[0] in data.sizes]
    data = replace(data, noise=np.array(_noise(kept, spread)))
    trials = sorted(fitted.trials_of(data), key=lambda t: t.score)
    alike = [t.basis for t in trials if t.score <= ALIKE * trials[0].score + SAME][:MODELS_MOST]
    return alike, [(n,) for n in data.sizes], data.values, data.noise, data.weights


def _of_several(observations: Sequence[Observation], spread: Scatter) -> Found | None:
    import numpy as np

    kept = sorted(observations, key=lambda o: math.prod(o.at))
    if len(kept) < fitseveral.LEAST_POINTS:
        return None
    values = np.array([float(o.value) for o in kept])
    noise = np.array(_noise(kept, spread))
    scale = np.maximum(np.abs(values), 1.0)
    weights = 1.0 / np.sqrt(noise**2 + (fitseveral.SMOOTH * scale) ** 2)
    points = [o.at for o in kept]
    names = tuple(f"n{k}" for k in range(len(points[0])))
    held = max(3, len(kept) // 4)
    trials = fitseveral.trials_of(tuple(points), names, values, weights, held)
    alike = [basis for score, basis, *_ in trials if score <= ALIKE * trials[0][0] + SAME]
    return alike[:MODELS_MOST], points, values, noise, weights


def _middle_part(parts: Sequence[tuple[float, float, float]]) -> tuple[float, float]:
    """Give the 95 % interval of a mixture: weight, mean and half interval of each part."""
    total = math.fsum(weight for weight, _, _ in parts)

    def below(x: float) -> float:
        return math.fsum(
            weight / total * 0.5 * math.erfc((mean - x) / (half or 1e-12) * NORMAL / math.sqrt(2))
            for weight, mean, half in parts
        )

    first = min(mean - 2 * half for _, mean, half in parts)
    last = max(mean + 2 * half for _, mean, half in parts)
    return _where(below, TAIL, first, last), _where(below, 1 - TAIL, first, last)


def _where(rises: Callable[[float], float], to: float, low: float, high: float) -> float:
    for _ in range(40):
        middle = (low + high) / 2
        if rises(middle) < to:
            low = middle
        else:
            high = middle
    return (low + high) / 2


def _matrix(basis: Basis, points: Sequence[Point]) -> Array:
    import numpy as np

    single = len(points[0]) == 1
    return np.array([[t.at(float(p[0]) if single else p) for t in basis] for p in points])


def _model(
    basis: Basis, points: Sequence[Point], values: Array, noise: Array, weights: Array
) -> Model | None:
    import numpy as np

    freedom = len(points) - len(basis)
    if freedom < 1:
        return None
    matrix = _matrix(basis, points)
    solved = least_squares(matrix[None], values, weights)[0]
    if not np.all(np.isfinite(solved)):
        return None
    rest = (matrix @ solved - values) * weights
    cost = len(basis) + sum(term.oddity for term in basis) / 2
    weight = math.exp(-min(600.0, float(rest @ rest) / 2 + cost)) / GROUPS[min(3, len(basis))]
    scaled = matrix * weights[:, None]
    variance = max(float(rest @ rest) / freedom, float(np.mean((noise * weights) ** 2)))
    covariance = np.linalg.pinv(scaled.T @ scaled) * variance
    return Model(basis, solved, covariance, student(freedom), weight)


def _unevenness(model: Model, points: Sequence[Point], values: Array, noise: Array) -> float:
    """Give the relative error left over in the upper half, beyond that of the draws."""
    upper = range(len(points) // 2, len(points))
    rest = [(values[k] - model.at(points[k])[0], noise[k], max(1.0, abs(values[k]))) for k in upper]
    squares = sum((left / scale) ** 2 for left, _, scale in rest) / len(rest)
    own = sum((error / scale) ** 2 for _, error, scale in rest) / len(rest)
    return math.sqrt(max(0.0, float(squares - own)))


def _missed(
    alike: Sequence[Basis],
    points: Sequence[Point],
    values: Array,
    noise: Array,
    weights: Array,
) -> float:
    """Give the error of a forecast at the largest size from those up to an eighth of it.

    Of the models that the early sizes can tell nothing of, the best on all sizes is taken; what
    the draws' own noise explains is taken off.
    """
    top = len(points) - 1
    reach = BACK ** len(points[0])
    early = [k for k in range(top) if math.prod(points[k]) * reach <= math.prod(points[top])]
    if len(early) < LEAST_SIZES:
        return 0.0
    basis = alike[0]
    model = _model(basis, [points[k] for k in early], values[early], noise[early], weights[early])
    if model is None:
        return 0.0
    guess, half = model.at(points[top])
    scale = max(1.0, abs(float(values[top])))
    excess = abs(float(values[top]) - guess) - math.hypot(half, 2 * float(noise[top]))
    return float(max(0.0, excess / scale))
