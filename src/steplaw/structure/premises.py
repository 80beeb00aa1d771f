"""A derivation beside the runs of an audit: whether what it rests on held in them.

A derivation speaks of sizes of arguments (``len(sailings)``), takes some things for granted, and
follows the code of one file. Each of these is held against the runs; where one does not hold, or
cannot be checked, nothing is called proved.
"""

from __future__ import annotations

import re
from collections.abc import Iterator, Mapping, Sequence
from dataclasses import dataclass
from fractions import Fraction
from typing import TYPE_CHECKING

from steplaw.errors import SteplawError
from steplaw.reference import SubjectRef

if TYPE_CHECKING:
    from types import CodeType

    from steplaw.flow.derive import Derived
    from steplaw.flow.poly import Poly
    from steplaw.host.asking import Run
    from steplaw.sweep import Sweep

#: What is taken for granted, and what has to be seen in every run instead.
_NUMBER = re.compile(r"(\w+) is a whole number and not negative")
_ITEMS = re.compile(r"(\w+) gives len\((\w+)\) items each time it is gone over")
_VIEW = re.compile(r"(\w+)\.(?:items|keys|values|copy)(?:\(\))? gives one item for each of the .*")
_IN_PLACE = re.compile(r"putting an item of (\w+) in its place adds none")
_APART = "what is got from a call or as an item is none of the containers that are looped over"
_FIXED_LENGTH = ("list", "bytearray")


@dataclass(frozen=True, slots=True)
class Plan:
    """A derivation that the runs of an audit may confirm.

    Parameters
    ----------
    derived : Derived
        What was derived from the source.
    file : str
        The source file.
    """

    derived: Derived
    file: str


def plan_for(ref: SubjectRef) -> Plan | str:
    """Derive a subject from its source.

    Parameters
    ----------
    ref : SubjectRef
        The subject.

    Returns
    -------
    Plan or str
        Why there is none, as a text.
    """
    from steplaw.derivation import compiled, find
    from steplaw.flow.derive import derive

    try:
        source = find(str(ref))
        module = compiled(source)
    except SteplawError as error:
        return error.message
    code, node = module.find(ref.name), module.node(ref.name)
    if code is None or node is None:
        return f"{ref.name} is not defined in {source.file}"
    if node.decorator_list:
        return f"{ref.name} is decorated"
    derived = derive(code, module)
    if derived.failed is not None:
        return f"line {derived.failed.line}: {derived.failed.reason}"
    if derived.ledger.unsure or derived.recursive:
        return "; ".join(str(r["text"]) for r in derived.recursive) or "not all calls are followed"
    return Plan(derived, source.file)


def objection(plan: Plan, swept: Sweep) -> str:
    """Say what keeps the derivation from speaking for these runs, nothing if all of it holds.

    Parameters
    ----------
    plan : Plan
        The derivation.
    swept : Sweep
        The runs.
    """
    derived = plan.derived
    if swept.stopped is not None and swept.stopped.kind in ("raised", "exit", "crash"):
        return f"the subject {swept.stopped.message}"
    runs = [run for many in swept.runs.values() for run in many]
    caught = next(_caught(derived), 0)
    if caught:
        return f"line {caught}: an exception may be caught"
    stray = next(_not_derived(derived, runs), None)
    if stray is not None:
        return f"{stray} ran as well, which is not derived"
    for assumed, line in derived.assumed.items():
        if not _was_seen(assumed, runs):
            return f"line {line}: {assumed}, which is not known of every run"
    return ""


def _caught(derived: Derived) -> Iterator[int]:
    """Give lines whose exceptions the code may catch."""
    from steplaw.flow.blocks import OUTSIDE
    from steplaw.flow.walk import nest_of

    for code in derived.ledger.codes:
        nest = nest_of(code)
        graph = nest.graph
        for k, line in enumerate(graph.decoded.lines):
            handler = graph.handler_block(k)
            if handler != OUTSIDE and handler not in nest.raising:
                yield line


def _not_derived(derived: Derived, runs: Sequence[Run]) -> Iterator[str]:
    known = {_place(code) for code in derived.ledger.codes}
    for run in runs:
        for f in run.tally.functions:
            if (f.file, f.name, f.line) not in known:
                yield f.name


def _place(code: CodeType) -> tuple[str, str, int]:
    return code.co_filename, code.co_qualname, code.co_firstlineno


def _was_seen(assumed: str, runs: Sequence[Run]) -> bool:
    if assumed == _APART:
        return True  # of containers inside containers, which the guide names as a premise
    number, items = _NUMBER.fullmatch(assumed), _ITEMS.fullmatch(assumed)
    view, in_place = _VIEW.fullmatch(assumed), _IN_PLACE.fullmatch(assumed)
    found = number or items or view or in_place
    if found is None:
        return False
    for run in runs:
        kind, size = run.measured.get(found[1], ("", 0))
        if (
            not kind
            or (number and (kind != "int" or size < 0))
            or ((items or view) and kind == "int")
            or (in_place and kind not in _FIXED_LENGTH)
        ):
            return False
    return True


def sizes_by_name(plan: Plan, swept: Sweep) -> dict[str, tuple[Fraction, ...]]:
    """Tell how sizes of arguments follow from the sizes of the study.

    Parameters
    ----------
    plan : Plan
        The derivation.
    swept : Sweep
        The runs.

    Returns
    -------
    dict of str to tuple of Fraction
        By name in the derivation: a factor for each size of the study, and a constant, which
        give the size in every run. Those that follow no such rule are left out.
    """
    out = {}
    for name, known in plan.derived.ledger.names.known.items():
        if known.kind != "size" or known.text not in plan.derived.sizes:
            continue
        values = _values(known.text, swept)
        rule = None if values is None else _affine(values, len(swept.names))
        if rule is not None:
            out[name] = rule
    return out


def _values(text: str, swept: Sweep) -> dict[tuple[int, ...], int] | None:
    """Give the value of a size at each size of the study, None where it is not one known value."""
    inside = re.fullmatch(r"len\((\w+)\)", text)
    parameter = inside[1] if inside else text
    out: dict[tuple[int, ...], int] = {}
    for point, runs in swept.runs.items():
        for run in runs:
            kind, size = run.measured.get(parameter, ("", 0))
            if not kind or (kind == "int") == bool(inside) or out.setdefault(point, size) != size:
                return None
    return out


def _affine(values: Mapping[tuple[int, ...], int], count: int) -> tuple[Fraction, ...] | None:
    """Give the factors and the constant that give all values, None where there are none."""
    from steplaw.law.exactmath import solve

    rows = [[Fraction(x) for x in point] + [Fraction(1)] for point in values]
    solved = solve(rows, [Fraction(v) for v in values.values()])
    if solved is None:
        return None
    rule = tuple(solved[0])
    agrees = all(
        sum(c * x for c, x in zip(rule, row, strict=True)) == v
        for row, v in zip(rows, values.values(), strict=True)
    )
    whole = all(c.denominator == 1 for c in rule)
    return rule if agrees and whole and len(values) > count + 1 else None


def told(plan: Plan, rules: Mapping[str, tuple[Fraction, ...]], names: Sequence[str]) -> str:
    """Say how the sizes of arguments went with those of the study."""
    known = plan.derived.ledger.names.known
    texts = []
    for name, rule in rules.items():
        shown = _rule_text(rule, names)
        if shown != known[name].text:
            texts.append(f"{known[name].text} = {shown}")
    return ", ".join(texts)


def _rule_text(rule: tuple[Fraction, ...], names: Sequence[str]) -> str:
    *factors, constant = rule
    text = ""
    for factor, name in zip(factors, names, strict=True):
        if factor:
            text += (" + " if text else "") + (name if factor == 1 else f"{factor}*{name}")
    if constant or not text:
        text += (
            f" + {constant}"
            if text and constant > 0
            else f" - {-constant}"
            if text
            else str(constant)
        )
    return text


def polynomials(rules: Mapping[str, tuple[Fraction, ...]], keys: Sequence[str]) -> dict[str, Poly]:
    """Give the sizes of arguments as polynomials in those of the study."""
    from steplaw.flow.poly import Poly, total, var

    return {
        name: total([*(var(k) * c for k, c in zip(keys, rule, strict=False)), Poly({(): rule[-1]})])
        for name, rule in rules.items()
    }
