"""Random nests of loops: derived frequencies against counts at sizes that had no part in them.

`STEPLAW_NESTS=500` does that many nests instead of the share run by default. The counts are those
of the probes, which the tests of `tally` hold against the interpreter's own events; that a block
of such a nest runs a quasi-polynomial number of times is Ehrhart's theorem (Clauss, ICS 1996).
"""

from __future__ import annotations

import os
import sys
from collections.abc import Callable
from fractions import Fraction
from pathlib import Path
from types import CodeType
from typing import Any

import pytest

sys.path.insert(0, str(Path(__file__).parent))

from confirm import _with_values
from nests import Nests

from steplaw.flow.derive import Derived, derive
from steplaw.flow.module import Module, all_codes
from steplaw.tally.registry import Registry
from steplaw.tally.snapshot import Snapshot, counts_between

SHARE = int(os.environ.get("STEPLAW_NESTS", "60"))
SIZES = (0, 1, 2, 3, 4, 5, 6, 7, 8, 10)


def function_of(source: str) -> Callable[..., Any]:
    space: dict[str, Any] = {}
    exec(compile(source, "<nest>", "exec", dont_inherit=True), space)
    found: Callable[..., Any] = space["subject"]
    return found


def derivation_of(source: str) -> Derived:
    module = Module(source, "<nest>")
    (code,) = (c for c in all_codes(module.code) if c.co_name == "subject")
    return derive(code, module)


def differences(found: Derived, function: Callable[..., Any], n: int) -> list[str]:
    """Compare the frequency of every instruction at one size."""
    registry = Registry()
    original: CodeType = function.__code__
    function.__code__ = registry.rewrite(original)
    before = Snapshot(registry)
    function(n)
    counted = {c.probed.original: c for c in counts_between(before, Snapshot(registry))}
    function.__code__ = original
    names = found.ledger.names
    values = {name: Fraction(n) for name, known in names.known.items() if known.kind == "size"}
    out = []
    for code, frequencies in found.ledger.codes.items():
        instructions = counted[code].instructions if code in counted else None
        for b, block in enumerate(frequencies.graph.blocks):
            poly = _with_values(found, frequencies.blocks[b], values)
            derived = None if poly is None else poly.constant
            for k in range(block.first + block.setup, block.last + 1):
                count = instructions[k] if instructions else 0
                if derived != count:
                    out.append(f"n = {n}, instruction {k}: derived {derived}, counted {count}")
    return out


@pytest.mark.parametrize("seed", range(SHARE))
def test_derived_frequencies_are_those_counted(seed: int) -> None:
    source = Nests(seed).source()
    found = derivation_of(source)
    assert found.failed is None
    assert found.ledger.stopped == []
    assert found.ledger.unknowns == []
    function = function_of(source)
    wrong = [d for n in SIZES for d in differences(found, function, n)]
    assert wrong == [], source


def test_a_wrong_derivation_is_noticed() -> None:
    found = derivation_of("def subject(n):\n    for i in range(n):\n        n += 0\n")
    other = function_of("def subject(n):\n    for i in range(n + 1):\n        n += 0\n")
    found.ledger.codes[other.__code__] = found.ledger.codes.pop(found.code)
    assert differences(found, other, 4)
