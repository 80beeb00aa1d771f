"""Derived formulas held against counts: sizes read off the arguments, unknowns off the counts."""

from __future__ import annotations

import gc
import inspect
from collections.abc import Callable, Mapping
from dataclasses import dataclass
from fractions import Fraction
from pathlib import Path
from types import FunctionType
from typing import Any

from steplaw.flow.derive import Derived, derive
from steplaw.flow.lineflow import line_frequencies
from steplaw.flow.module import Module, all_codes
from steplaw.flow.pieces import Pieces
from steplaw.flow.poly import Monomial, Poly, var
from steplaw.tally.lines import line_counts
from steplaw.tally.registry import Registry
from steplaw.tally.snapshot import CodeCounts, Snapshot, counts_between

Equation = tuple[str, Pieces, int]


@dataclass(frozen=True)
class Confirmed:
    """How formulas and counts compare.

    Parameters
    ----------
    equations : int
        Frequencies that were compared.
    solved : int
        Unknowns and sizes of results that were read off counts, which takes so many equations.
    unsettled : int
        Frequencies whose cases could not be told apart by what is known.
    faults : list of str
        What does not agree.
    """

    equations: int
    solved: int
    unsettled: int
    faults: list[str]


def module_of(function: Callable[..., Any]) -> Module:
    """Read the module of a function."""
    file = inspect.getsourcefile(function) or ""
    if file.startswith("<frozen"):
        file = function.__globals__["__file__"]
    return Module(Path(file).read_text(encoding="utf-8"), function.__code__.co_filename)


def derived(function: Callable[..., Any], module: Module) -> Derived:
    """Derive a function by its qualified name."""
    code = function.__code__
    found = next(
        c
        for c in all_codes(module.code)
        if c.co_qualname == code.co_qualname and c.co_firstlineno == code.co_firstlineno
    )
    assert found.co_code == code.co_code
    return derive(found, module)


def run(
    function: Callable[..., Any], args: tuple[Any, ...], kwargs: Mapping[str, Any]
) -> list[CodeCounts]:
    """Run a call with the functions of its file under probes, a generator to its end."""
    file, registry = function.__code__.co_filename, Registry()
    changed = [
        (x, x.__code__)
        for x in gc.get_objects()
        if type(x) is FunctionType and x.__code__.co_filename == file
    ]
    for x, code in changed:
        x.__code__ = registry.rewrite(code)
    before = Snapshot(registry)
    try:
        result = function(*args, **kwargs)
        if inspect.isgenerator(result):
            for _ in result:
                pass
    finally:
        after = Snapshot(registry)
        for x, code in changed:
            x.__code__ = code
    assert not after.unsettled
    return list(counts_between(before, after))


def confirm(
    found: Derived, function: Callable[..., Any], args: tuple[Any, ...], kwargs: Mapping[str, Any]
) -> Confirmed:
    """Run a call and compare every derived frequency with its count."""
    bound = inspect.signature(function).bind(*args, **kwargs)
    bound.apply_defaults()
    values = _sizes(found, dict(bound.arguments))
    counter = run(function, args, kwargs)
    equations = _equations(found, counter)
    before = len(values)
    faults = _solve(found, equations, values)
    unsettled = sum(1 for _, p, _ in equations if _with_values(found, p, values) is None)
    if not faults:
        faults = _lines(found, counter, values)
    for u in found.ledger.unknowns:
        value = values.get(u.name)
        most = None if u.most is None else _value(found, u.most, values)
        if value is not None and (value < 0 or (most is not None and value > most)):
            faults.append(f"{u.name} at line {u.line} is {value}, not within 0 and {most}")
    return Confirmed(len(equations), len(values) - before, unsettled, faults)


def _sizes(found: Derived, arguments: dict[str, Any]) -> dict[str, Fraction]:
    values = {}
    for name, known in found.ledger.names.known.items():
        if known.kind == "size" and known.text in found.sizes:
            try:
                size = eval(known.text, {"len": _length}, arguments)
            except (AttributeError, TypeError, KeyError, IndexError):
                continue
            if isinstance(size, int):
                values[name] = Fraction(size)
    return values


def _length(thing: Any) -> int:
    return len(thing) if hasattr(thing, "__len__") else sum(1 for _ in thing)


def _equations(found: Derived, counter: list[CodeCounts]) -> list[Equation]:
    counted = {item.probed.original: item.instructions for item in counter}
    out = []
    for code, frequencies in found.ledger.codes.items():
        if code in found.ledger.unsure:
            continue
        graph = frequencies.graph
        counts = counted.get(code, [0] * len(graph.decoded))
        for b, block in enumerate(graph.blocks):
            for k in range(block.first + block.setup, block.last + 1):
                what = f"{code.co_name}, line {graph.decoded.lines[k]}"
                out.append((what, frequencies.blocks[b], counts[k]))
    return out


def _solve(found: Derived, equations: list[Equation], values: dict[str, Fraction]) -> list[str]:
    """Settle what is not known by the counts; give the equations that contradict each other."""
    while True:
        system = Linear()
        for what, pieces, count in equations:
            poly = _with_values(found, pieces, values)
            if poly is not None:
                system.add(what, poly - count)
        new = {n: v for n, v in system.settled().items() if n not in values}
        values.update(new)
        if not new or system.faults:
            return system.faults


def _with_values(found: Derived, pieces: Pieces, values: Mapping[str, Fraction]) -> Poly | None:
    """Put in what is known; None where it is not known which cases apply."""
    names = found.ledger.names
    total = Poly({})
    for part in pieces.parts:
        if names.roots(part.when) - values.keys():
            return None
        if all(names.value_of(c, values) >= 0 for c in part.when):  # type: ignore[arg-type]
            known = {
                n: Poly({(): names.value(n, values)})  # type: ignore[arg-type]
                for n in part.poly.names
                if not names.roots([var(n)]) - values.keys()
            }
            total = total + part.poly.put(known)
    return total


class Linear:
    """Equations ``poly = 0``, each product of names taken for an unknown of its own."""

    def __init__(self) -> None:
        self.rows: dict[Monomial, Poly] = {}
        self.faults: list[str] = []

    def add(self, what: str, poly: Poly) -> None:
        """Add an equation; note it where it contradicts those before."""
        for pivot, row in self.rows.items():
            factor = poly.terms.get(pivot)
            if factor:
                poly = poly - row * factor
        if poly.constant is not None:
            if poly.constant:
                self.faults.append(f"{what}: differs by {-poly.constant} from what was counted")
            return
        pivot = next(m for m in sorted(poly.terms) if m)
        poly = poly * (1 / poly.terms[pivot])
        self.rows = {
            p: row - poly * row.terms.get(pivot, Fraction(0)) for p, row in self.rows.items()
        }
        self.rows[pivot] = poly

    def settled(self) -> dict[str, Fraction]:
        """Give the names that the equations leave one value."""
        return {
            pivot[0][0]: -row.free
            for pivot, row in self.rows.items()
            if len(pivot) == 1
            and pivot[0][1] == 1
            and (row - var(pivot[0][0])).constant is not None
        }


def _value(found: Derived, pieces: Pieces, values: Mapping[str, Fraction]) -> Fraction | None:
    poly = _with_values(found, pieces, values)
    return None if poly is None else poly.constant


def _lines(found: Derived, counter: list[CodeCounts], values: Mapping[str, Fraction]) -> list[str]:
    """Compare frequency and steps by line with what the tally says."""
    expected: dict[int, list[int]] = {}
    for item in counter:
        if item.probed.original in found.ledger.codes.keys() - found.ledger.unsure:
            for line, pair in line_counts(item).items():
                kept = expected.setdefault(line, [0, 0])
                kept[0], kept[1] = kept[0] + pair[0], kept[1] + pair[1]
    got: dict[int, list[Fraction | None]] = {}
    for code, frequencies in found.ledger.codes.items():
        if code in found.ledger.unsure:
            continue
        for line, parts in line_frequencies(frequencies).items():
            sums = got.setdefault(line, [Fraction(0), Fraction(0)])
            for place, part in enumerate(parts):
                value, sofar = _value(found, part, values), sums[place]
                sums[place] = None if value is None or sofar is None else sofar + value
    return [
        f"line {line}: derived {ours}, counted {theirs}"
        for line in sorted(got.keys() | expected.keys())
        for ours, theirs in zip(
            got.get(line, [Fraction(0)] * 2), expected.get(line, [0, 0]), strict=True
        )
        if ours is not None and ours != theirs
    ]
