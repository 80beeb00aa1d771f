"""The standard library's own tests end under probes as they do without.

A share is run here; `python tests/tally/own_tests.py` runs all of them.
"""

from __future__ import annotations

import pytest

from tally import own_tests

#: Quick ones that between them raise, suspend, close, sort and format much.
SHARE = ["difflib", "heapq", "textwrap", "fractions", "contextlib", "except_star", "yield_from"]


@pytest.mark.parametrize("module", SHARE)
def test_own_tests_end_alike(module: str) -> None:
    found = own_tests.compare(module)
    if found.missing:
        pytest.skip(f"this interpreter ships no test.test_{module}")
    assert found.differences == []
    assert found.tests > 0
    assert found.steps > 0


def test_a_test_that_ends_otherwise_is_told() -> None:
    told = own_tests._differences(
        {"berth": [["passed", ""]], "deck": [["passed", ""]]},
        {"berth": [["failed", "Traceback\nAssertionError: 3 != 4"]], "deck": [["passed", ""]]},
    )
    assert told == ["berth: passed, under probes failed AssertionError: 3 != 4"]
