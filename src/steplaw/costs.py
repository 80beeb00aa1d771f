"""Cost models: what a run costs, in steps, operations, elements or a team's own weights."""

from __future__ import annotations

from collections.abc import Callable, Mapping
from dataclasses import dataclass
from fractions import Fraction
from pathlib import Path
from typing import Any

from steplaw.errors import CallError
from steplaw.tally.classes import CLASSES
from steplaw.tally.model import Tally

Read = Callable[[Tally], Fraction | int]

#: Figures of all steps and of what C code does beside them.
WHOLE = ("steps", "native", "work", "elements")
_ELEMENTS = ("element_read", "element_write", "append", "unpack", "iteration")
_WEIGHED = (*CLASSES, "steps", "native")


def work(tally: Tally) -> int:
    """Give steps and native visits together: the figure `work`.

    Parameters
    ----------
    tally : Tally
        The counts of one run.
    """
    return tally.steps + (tally.native or 0)


def elements(tally: Tally) -> int:
    """Give element reads and writes, native visits included: the figure `elements`.

    Parameters
    ----------
    tally : Tally
        The counts of one run.
    """
    return sum(tally.operations.get(name, 0) for name in _ELEMENTS) + (tally.native or 0)


def reader(name: str) -> Read:
    """Give what reads a figure of the whole run.

    Parameters
    ----------
    name : str
        ``steps``, ``native``, ``work``, ``elements`` or an operation class.
    """
    known: dict[str, Read] = {
        "steps": lambda tally: tally.steps,
        "native": lambda tally: tally.native or 0,
        "work": work,
        "elements": elements,
    }
    return known.get(name) or (lambda tally: tally.operations.get(name, 0))


@dataclass(frozen=True, slots=True)
class Costs:
    """A team's own weights.

    Parameters
    ----------
    name : str
        What the costs are called.
    weights : mapping of str to Fraction
        Cost of one of each: operation classes, `native` visits, and `steps` for every step
        whatever its class.
    file : str
        Where they were read from.
    """

    name: str
    weights: Mapping[str, Fraction]
    file: str

    def of(self, tally: Tally) -> Fraction:
        """Give the cost of one run.

        Parameters
        ----------
        tally : Tally
            The counts of the run.
        """
        return sum(
            (weight * Fraction(reader(name)(tally)) for name, weight in self.weights.items()),
            Fraction(0),
        )

    def as_json(self) -> dict[str, Any]:
        """Give the weights as plain JSON values."""
        return {
            "name": self.name,
            "file": self.file,
            "weights": {name: str(weight) for name, weight in self.weights.items()},
        }


def read_costs(path: str) -> Costs:
    """Read a team's weights.

    Parameters
    ----------
    path : str
        A TOML file with a table `weights`, and a `name` where wanted.

    Returns
    -------
    Costs
        The weights, exact.

    Raises
    ------
    CallError
        If the file cannot be read or holds something else.
    """
    import tomllib

    try:
        data = tomllib.loads(Path(path).read_text(encoding="utf-8"), parse_float=Fraction)
    except (OSError, UnicodeDecodeError) as fault:
        reason = getattr(fault, "strerror", None) or fault
        raise CallError(f"cannot read {path}: {reason}", "give a TOML file of weights") from None
    except tomllib.TOMLDecodeError as fault:
        raise CallError(f"{path} is not TOML: {fault}", _EXAMPLE) from None
    weights = data.get("weights")
    if not isinstance(weights, dict) or not weights:
        raise CallError(f"{path} has no table [weights]", _EXAMPLE)
    for name, weight in weights.items():
        if name not in _WEIGHED:
            known = ", ".join(_WEIGHED)
            raise CallError(f"{path} weighs '{name}', which is not counted", f"these are: {known}")
        if isinstance(weight, bool) or not isinstance(weight, int | Fraction) or weight < 0:
            raise CallError(
                f"{path} gives '{name}' the weight {weight!r}", "a weight is a number from 0 up"
            )
    title = data.get("name", Path(path).stem)
    if not isinstance(title, str):
        raise CallError(f"{path} has a name that is no text: {title!r}", _EXAMPLE)
    return Costs(title, {name: Fraction(w) for name, w in weights.items()}, path)


_EXAMPLE = "write [weights] and under it lines such as call = 5 and native = 0.2"
