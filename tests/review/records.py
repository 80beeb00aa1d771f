"""Records made by hand: the parts that verdicts and budgets read."""

from __future__ import annotations

from collections.abc import Callable, Mapping
from typing import Any

SIZES = (0, 1, 2, 3, 4, 8, 16, 32, 64)
Count = Callable[[int], int]


def law(formula: str | None, grade: str = "exact", **more: Any) -> dict[str, Any]:
    from steplaw.law.leading import leading_term

    return {
        "formula": formula,
        "leading": None if formula is None else leading_term(formula),
        "grade": "open" if formula is None else grade,
        "holds_from": 0,
        "settled_by": list(SIZES[:4]),
        "checked_at": list(SIZES[4:]),
        "error": 0.0,
        "note": "",
        **more,
    }


def counts(formula: str | Count) -> Count:
    from steplaw.law.evaluate import value

    if callable(formula):
        return formula
    return lambda n: int(value(formula, {"n": n}))


def record(
    steps: str | tuple[Mapping[str, Any], Count],
    native: str = "0",
    *,
    operations: Mapping[str, str] | None = None,
    python: str = "3.11.7",
    sizes: tuple[int, ...] = SIZES,
    feed: str = "n",
) -> dict[str, Any]:
    """Give a record whose steps follow a formula, or a law and counts that differ from it."""
    own, count = (law(steps), counts(steps)) if isinstance(steps, str) else steps
    visits = counts(native)
    classes = {name: counts(f) for name, f in (operations or {}).items()}
    work = law(f"({steps}) + ({native})" if isinstance(steps, str) else None)
    return {
        "subject": {"name": "f", "file": "f.py", "line": 1, "digest": "0", "doc": None},
        "python": python,
        "sizes": {"names": ["n"], "plan": [{"n": n} for n in sizes]},
        "feed": {"kind": "expression", "text": feed, "varies": False, "draws": 1},
        "figure": {
            "name": "steps",
            "law": own,
            "values": [{"at": {"n": n}, "draws": 1, "mean": count(n)} for n in sizes],
        },
        "tallies": [
            {
                "at": {"n": n},
                "draw": 0,
                "steps": count(n),
                "native": visits(n),
                "operations": {name: read(n) for name, read in classes.items() if read(n)},
            }
            for n in sizes
        ],
        "laws": {
            "steps": own,
            "native": law(native),
            "work": work,
            "operations": {name: law(f) for name, f in (operations or {}).items()},
        },
    }
