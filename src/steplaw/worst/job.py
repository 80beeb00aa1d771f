"""The whole job: from a subject and a size to the worst-case record."""

from __future__ import annotations

import platform
import time
from collections.abc import Mapping, Sequence
from fractions import Fraction
from pathlib import Path
from typing import Any

from steplaw.errors import CallError
from steplaw.host.runner import Runner
from steplaw.law import find_law
from steplaw.law.model import Observation
from steplaw.record import WorstRecord
from steplaw.study import Study
from steplaw.worst.counting import Counts, Strategies, values_of
from steplaw.worst.kinds import Kind, kind_of
from steplaw.worst.search import Candidate, Found, Report, Search, law_sizes
from steplaw.worst.strategies import strategic
from steplaw.worst.whole import TrueWorst, every_input, every_order

CAUTIONS = (
    "What a search finds is the worst it met: the true worst is at least that.",
    "None of this is a worst-case execution time for a safety-related deadline; that belongs to "
    "the qualified process that the applicable standard asks for.",
)
SHOWN_MOST = 400
DRAWS = 20


def worst(
    study: Study,
    n: int,
    *,
    seed: int = 0,
    seconds: float | None = None,
    exhaust: int = 7,
    write: str | None = None,
    report: Report | None = None,
) -> WorstRecord:
    """Find the input of a size with the largest figure.

    Parameters
    ----------
    study : Study
        Subject, feed, figure and limits.
    n : int
        The size.
    seed : int
        Seeds the search.
    seconds : float, optional
        Time for the search; without, counts alone end it.
    exhaust : int
        Size up to which every order is run, where an order is all that varies.
    write : str, optional
        Where the worst inputs are written, as a feed.
    report : callable, optional
        Told what is done, at which size, and the largest figure so far.

    Returns
    -------
    WorstRecord
        The finished record, `steplaw.worst/1`.

    Raises
    ------
    CallError
        If subject, feed or size cannot be used.
    """
    if n < 1:
        raise CallError(f"--at {n} leaves nothing to search", "give a size of 1 or more")
    name = study.plan.names[0]
    if len(study.plan.names) > 1:
        raise CallError("the search grows one size", "let the feed make the others from n")
    first = {name: min(n, 4)}
    with Runner(study.subject, study.feed, (name,), study.limits, first=first) as runner:
        about = runner.load()
        counts = Counts(runner, study.figure, name)
        if study.every:
            assert study.feed is not None
            found, whole = Found(), _all(counts, study.feed.text, n, about["loaded"]["file"])
            return _finish(study, n, about, counts, found, whole, (), None, write)
        until = None if seconds is None else time.monotonic() + seconds
        try:
            kinds = _kinds(counts, n, about["feed"]["kind"] == "hints")
        except Strategies:
            found = strategic(counts, n, seed, until, report)
            return _finish(study, n, about, counts, found, [], (), None, write)
        whole = []
        if [k.name for k in kinds if k.name != "fixed"] == ["permutation"]:
            whole = every_order(counts, kinds, min(exhaust, n))
        search = Search(counts, kinds, n, seed, until, report)
        found = search.go()
        _along(search, found)
        return _finish(study, n, about, counts, found, whole, kinds, _drawn(counts, found), write)


def _all(counts: Counts, every: str, n: int, file: str) -> list[TrueWorst]:
    whole = every_input(counts, every, n, file)
    if not whole:
        raise CallError("no size has an input that ends well", f"look at {every}")
    return whole


def _kinds(counts: Counts, n: int, free: bool) -> tuple[Kind, ...]:
    at = min(n, 12)
    draws = [values_of(g) for g in counts.drawn(at, 8)]
    kinds = tuple(kind_of(values, at, free) for values in zip(*draws, strict=True))
    if all(k.name == "fixed" for k in kinds):
        raise CallError(
            f"every draw of size {at} is made alike, so there is nothing to search",
            "give a --feed that draws its input from rng: its draws show what may vary",
        )
    return kinds


def _along(search: Search, found: Found) -> None:
    """Count the worst family along the sizes, for its law."""
    if not found.family or found.ended == "interrupted":
        return
    try:
        for n in law_sizes(found.reached):
            given = search.given(found.family, n)
            figure = search.counts.of([given])[0]
            if figure is not None:
                found.values[n] = figure
    except (KeyboardInterrupt, CallError):
        pass


def _drawn(counts: Counts, found: Found) -> Fraction | None:
    """Give the mean figure of draws of the size that was reached."""
    if found.ended == "interrupted" or not found.reached:
        return None
    values = counts.of(counts.drawn(found.reached, DRAWS))
    known = [v for v in values if v is not None]
    return Fraction(sum(known), len(known)) if known else None


def law_of(values: Mapping[int, int | Fraction], whole: bool = False) -> dict[str, Any]:
    """Find the law of exact values by size, as the LAW object of a record."""
    seen = [
        Observation((n,), Fraction(v), least=Fraction(v), most=Fraction(v), whole=whole)
        for n, v in values.items()
    ]
    return find_law(seen, ("n",), exhaustive=True).as_json()


def _finish(
    study: Study,
    n: int,
    about: Mapping[str, Any],
    counts: Counts,
    found: Found,
    whole: Sequence[TrueWorst],
    kinds: Sequence[Kind],
    mean: Fraction | None,
    write: str | None,
) -> WorstRecord:
    from steplaw import __version__

    loaded = about["loaded"]
    true = bool(whole) and whole[-1].n == n
    best = _best(found, whole if true or not found.reached else [], mean)
    if best is None:
        raise CallError(
            "no input that was tried ended well", "see that the feed's own draws do: steplaw audit"
        )
    if study.figure.startswith("line:") and not best["value"]:
        raise CallError(
            f"line {study.figure[5:]} of {loaded['file']} ran on no input that was tried",
            "give a line that runs",
        )
    written = _write(write, study, found, whole, best, counts.name) if write is not None else []
    return WorstRecord(
        {
            "schema": "steplaw.worst/1",
            "steplaw": __version__,
            "python": platform.python_version(),
            "subject": {k: loaded[k] for k in ("name", "file", "line")},
            "figure": study.figure,
            "feed": about["feed"],
            "asked": n,
            "kinds": [k.name for k in kinds],
            "best": {**best, "true": true or not found.reached},
            "family": _family(found),
            "whole": _whole(whole, study),
            "search": {"runs": counts.runs, "ended": found.ended},
            "file": None if write is None else {"path": write, "sizes": written},
            "notes": list(CAUTIONS),
            "run_again": study.again,
        }
    )


def _best(found: Found, whole: Sequence[TrueWorst], mean: Fraction | None) -> dict[str, Any] | None:
    if whole:
        last = whole[-1]
        return {
            "at": last.n,
            "value": last.value,
            "input": _short(last.text),
            "mean": None,
            "times_mean": None,
        }
    if found.best is None:
        return None
    return {
        "at": found.reached,
        "value": found.value,
        "input": _short(found.best.text),
        "mean": None if mean is None else str(mean),
        "times_mean": None if not mean else round(float(found.value / mean), 2),
    }


def _family(found: Found) -> dict[str, Any] | None:
    if not found.values:
        return None
    return {
        "text": family_text(found.family),
        "law": law_of(found.values),
        "values": [{"n": n, "value": v} for n, v in found.values.items()],
    }


def family_text(family: Candidate) -> str:
    """Say a family in words, argument by argument."""
    return "; ".join(str(f) for f in family)


def _whole(whole: Sequence[TrueWorst], study: Study) -> dict[str, Any] | None:
    if not whole:
        return None
    domain = "every order of the elements that the feed draws"
    if study.every and study.feed is not None:
        domain = study.feed.text
    return {
        "domain": domain,
        "law": law_of({w.n: w.value for w in whole}, whole=True),
        "sizes": [
            {"n": w.n, "inputs": w.inputs, "value": w.value, "input": _short(w.text)} for w in whole
        ],
    }


def _short(text: str) -> str:
    return text if len(text) <= SHOWN_MOST else text[: SHOWN_MOST - 1] + "…"


def _write(
    path: str,
    study: Study,
    found: Found,
    whole: Sequence[TrueWorst],
    best: Mapping[str, Any],
    name: str,
) -> list[int]:
    """Write the worst inputs as a feed, and give the sizes that it has."""
    inputs = {w.n: w.feed for w in whole}
    if found.best is not None:
        inputs[found.reached] = found.best.text
    rows = "\n".join(f"    if {name} == {n}:\n        return {t}" for n, t in inputs.items())
    sizes = ", ".join(map(str, inputs))
    text = (
        f'"""The worst inputs found for {study.subject}, by {study.figure}."""\n\n'
        "from itertools import *\nfrom math import *\n\nfrom steplaw import args\n\n\n"
        f"def worst({name}, rng):\n"
        f'    """Give the worst input known of a size: {sizes}."""\n'
        f"{rows}\n"
        f'    raise ValueError(f"no worst input of size {{{name}}} is known")\n'
    )
    try:
        Path(path).write_text(text, encoding="utf-8")
    except OSError as error:
        hint = "give a path in a folder that can be written"
        raise CallError(f"cannot write {path}: {error.strerror or error}", hint) from None
    return list(inputs)
