"""Location and exception tables written anew, read back by the interpreter itself."""

from __future__ import annotations

import argparse
import difflib
import types
from itertools import groupby
from pathlib import Path

import pytest

from steplaw.flow.decode import exception_entries
from steplaw.tally.registry import Registry
from steplaw.tally.tables import exception_table, location_table


def _codes(module: types.ModuleType) -> list[types.CodeType]:
    assert module.__file__ is not None
    with Path(module.__file__).open(encoding="utf-8") as file:
        todo = [compile(file.read(), module.__file__, "exec")]
    found = []
    while todo:
        code = todo.pop()
        found.append(code)
        todo += [c for c in code.co_consts if isinstance(c, types.CodeType)]
    return found


@pytest.mark.parametrize("module", [argparse, difflib])
def test_location_table_reads_back(module: types.ModuleType) -> None:
    for code in _codes(module):
        positions = list(code.co_positions())
        runs = [(p, len(list(group))) for p, group in groupby(positions)]
        written = code.replace(co_linetable=location_table(runs, code.co_firstlineno))
        assert list(written.co_positions()) == positions


@pytest.mark.parametrize("module", [argparse, difflib])
def test_exception_table_reads_back(module: types.ModuleType) -> None:
    for code in _codes(module):
        entries = list(exception_entries(code.co_exceptiontable))
        assert exception_table(entries) == code.co_exceptiontable


@pytest.mark.parametrize("module", [argparse, difflib])
def test_probed_code_keeps_lines_and_columns(module: types.ModuleType) -> None:
    registry = Registry()
    for code in _codes(module):
        registry.rewrite(code)
    assert registry.probed
    for probed in registry.probed:
        old, new = list(probed.original.co_positions()), list(probed.code.co_positions())
        starts = probed.graph.decoded.starts
        for unit, origin in enumerate(probed.origins):
            assert new[unit] == (old[starts[origin]] if origin >= 0 else (None,) * 4)
