"""Blocks and edges of real code objects."""

from __future__ import annotations

import argparse
import difflib
import dis
import fractions
import textwrap
import types
from collections.abc import Iterator
from pathlib import Path

import pytest

from steplaw.flow import isa
from steplaw.flow.blocks import OUTSIDE, Blocks
from steplaw.flow.decode import Decoded, exception_entries
from steplaw.flow.effects import depths

MODULES = (argparse, difflib, fractions, textwrap)


def codes(module: types.ModuleType) -> Iterator[types.CodeType]:
    assert module.__file__ is not None
    with Path(module.__file__).open(encoding="utf-8") as file:
        todo = [compile(file.read(), module.__file__, "exec")]
    while todo:
        code = todo.pop()
        yield code
        todo += [c for c in code.co_consts if isinstance(c, types.CodeType)]


@pytest.mark.parametrize("module", MODULES)
def test_instructions_are_those_of_dis(module: types.ModuleType) -> None:
    """The reference is the standard library's own disassembler."""
    for code in codes(module):
        decoded = Decoded(code)
        expected = [
            (i.offset, i.opcode, i.arg or 0)
            for i in dis.get_instructions(code)
            if i.opname not in ("EXTENDED_ARG", "CACHE")
        ]
        found = [
            (2 * offset, op, arg if op >= dis.HAVE_ARGUMENT or op in dis.hasarg else 0)
            if hasattr(dis, "hasarg")
            else (2 * offset, op, arg if op >= dis.HAVE_ARGUMENT else 0)
            for offset, op, arg in zip(decoded.offsets, decoded.ops, decoded.args, strict=True)
        ]
        assert found == expected


@pytest.mark.parametrize("module", MODULES)
def test_jump_targets_are_those_of_dis(module: types.ModuleType) -> None:
    for code in codes(module):
        decoded = Decoded(code)
        jumps = {i.offset: i.argval for i in dis.get_instructions(code) if i.opcode in dis.hasjrel}
        found = {
            2 * decoded.offsets[k]: 2 * decoded.starts[target]
            for k, target in enumerate(decoded.targets)
            if target >= 0
        }
        assert found == jumps


@pytest.mark.parametrize("module", MODULES)
def test_exception_table_is_that_of_dis(module: types.ModuleType) -> None:
    for code in codes(module):
        expected = [
            (e.start, e.end, e.target, e.depth, e.lasti)
            for e in dis._parse_exception_table(code)  # type: ignore[attr-defined]
        ]
        found = [
            (2 * start, 2 * (start + length), 2 * target, packed >> 1, bool(packed & 1))
            for start, length, target, packed in exception_entries(code.co_exceptiontable)
        ]
        assert found == expected


@pytest.mark.parametrize("module", MODULES)
def test_blocks_cover_every_instruction_once(module: types.ModuleType) -> None:
    for code in codes(module):
        graph = Blocks(Decoded(code))
        at = [k for block in graph.blocks for k in range(block.first, block.last + 1)]
        assert at == list(range(len(graph.decoded)))
        for edge in graph.edges:
            if edge.source != OUTSIDE:
                last = graph.decoded.ops[graph.blocks[edge.source].last]
                assert (edge.kind == "branch") <= (last in isa.BRANCH)


@pytest.mark.parametrize("module", MODULES)
def test_stack_depth_never_exceeds_what_the_code_declares(module: types.ModuleType) -> None:
    for code in codes(module):
        graph = Blocks(Decoded(code))
        assert all(d is None or 0 <= d <= code.co_stacksize for d in depths(graph))
