"""Cost over a life: each operation on one structure, the largest, and the running mean.

The amortised cost of an operation is the mean over a whole life (Tarjan, Amortized Computational
Complexity, SIAM J. Algebraic Discrete Methods 6, 1985): single operations may be dear, as long as
they are rare.
"""

from __future__ import annotations

import platform
from fractions import Fraction
from typing import Any

from steplaw.errors import CallError, SubjectError
from steplaw.host.asking import RunFailed
from steplaw.host.runner import Runner
from steplaw.law import leading_term
from steplaw.record import LifeRecord
from steplaw.study import Study
from steplaw.worst.counting import Counts
from steplaw.worst.job import law_of
from steplaw.worst.search import Report

SIZES = (*range(1, 34), 48, 63, 64, 65, 100, 127, 128, 129, 200, 255, 256, 257, 384, 511, 512)
#: Sizes that are powers of two, from as many of which on a law of theirs is looked for.
POWERS_LEAST = 8
NOTE = "A life is one sequence of operations: another may cost more."


def life(study: Study, report: Report | None = None) -> LifeRecord:
    """Count each operation of a life, at each size.

    Parameters
    ----------
    study : Study
        The subject gives the operations: an iterable of callables, or of tuples of a callable and
        its arguments, called one after the other.
    report : callable, optional
        Told what is done, at which size, and the largest figure of one operation.

    Returns
    -------
    LifeRecord
        The finished record, `steplaw.life/1`.

    Raises
    ------
    SubjectError
        If the subject gives no operations, or one of them fails.
    CallError
        If subject or feed cannot be used.
    """
    from steplaw import __version__

    if study.every or len(study.plan.names) > 1:
        raise CallError("a life has one size and one input at each", "give --feed instead")
    name = study.plan.names[0]
    asked = [at[name] for at in study.asked]
    sizes = sorted({n for n in asked or SIZES if n > 0})
    lives: dict[int, list[int]] = {}
    with Runner(study.subject, study.feed, (name,), study.limits, first={name: 3}) as runner:
        about = runner.load()
        counts = Counts(runner, study.figure, name)
        for n in sizes:
            try:
                values = counts.life(n)
            except RunFailed as error:
                raise SubjectError(f"{study.subject} {error.failure.message} at n={n}") from None
            if values:
                lives[n] = values
                if report is not None:
                    report("counting", n, max(values))
    if study.figure.startswith("line:") and not any(sum(v) for v in lives.values()):
        line = study.figure[5:]
        raise CallError(f"line {line} runs in no operation", "give a line of an operation's code")
    if not lives:
        raise SubjectError(f"{study.subject} gives no operation at any size")
    return LifeRecord(
        {
            "schema": "steplaw.life/1",
            "steplaw": __version__,
            "python": platform.python_version(),
            "subject": {k: about["loaded"][k] for k in ("name", "file", "line")},
            "figure": study.figure,
            "feed": about["feed"],
            "sizes": [_row(n, values) for n, values in lives.items()],
            "operations": lives[max(lives)],
            "laws": _laws(lives),
            "bound": _bound(lives[max(lives)]),
            "notes": [NOTE],
            "run_again": study.again,
        }
    )


def _laws(lives: dict[int, list[int]]) -> dict[str, Any]:
    total = law_of({n: sum(v) for n, v in lives.items()})
    return {
        "total": total,
        "largest": law_of({n: max(v) for n, v in lives.items()}),
        "mean": _mean(lives),
        "total_at_powers": None if total["grade"] == "exact" else _at_powers(lives),
    }


def _at_powers(lives: dict[int, list[int]]) -> dict[str, Any] | None:
    """Give the law of the total at powers of two, where one is exact.

    What carries over like the digits of a counter is irregular in between and plain there.
    """
    totals = {n: sum(v) for n, v in lives.items() if n.bit_count() == 1}
    if len(totals) < POWERS_LEAST:
        return None
    law = law_of(totals)
    if law["grade"] != "exact":
        return None
    return {**law, "note": "held against the sizes that are powers of two, and claimed of no other"}


def _mean(lives: dict[int, list[int]]) -> dict[str, Any]:
    """Give the law of the mean: its own, or else that of the total by the number of operations."""
    own = law_of({n: Fraction(sum(v), len(v)) for n, v in lives.items()})
    total = law_of({n: sum(v) for n, v in lives.items()})
    number = law_of({n: len(v) for n, v in lives.items()})
    if own["grade"] == "exact" or total["grade"] == "open" or number["grade"] != "exact":
        return own
    formula = f"({total['formula']})/({number['formula']})"
    holds = max(total["holds_from"] or 1, number["holds_from"] or 1)
    note = "the law of the total, by the number of operations"
    leading = leading_term(formula, ("n",))
    return {**total, "formula": formula, "leading": leading, "holds_from": holds, "note": note}


def _row(n: int, values: list[int]) -> dict[str, Any]:
    return {
        "n": n,
        "operations": len(values),
        "total": sum(values),
        "largest": max(values),
        "mean": str(Fraction(sum(values), len(values))),
    }


def _bound(values: list[int]) -> dict[str, Any]:
    """Give the largest running mean of the longest life, and after how many operations it was."""
    total, most, at = 0, Fraction(-1), 0
    for k, value in enumerate(values, 1):
        total += value
        mean = Fraction(total, k)
        if mean > most:
            most, at = mean, k
    return {"most_mean": str(most), "at": at}
