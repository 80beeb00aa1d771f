"""The tally against the interpreter's own instruction events, digit for digit.

The reference is CPython itself: opcode events of `sys.settrace` (3.11), INSTRUCTION events of
`sys.monitoring` (3.12 on), on the untouched function. Every comparison is of each instruction, of
opcodes, lines, functions and their calls, and of what the program returns, raises and shows in its
traceback.

`STEPLAW_PROGRAMS=2000` compares that many generated programs instead of the share run by default.
"""

from __future__ import annotations

import contextlib
import importlib.util
import os
from collections.abc import Callable, Iterator
from pathlib import Path

import pytest
from hypothesis import HealthCheck, Phase, given, settings

from programs import picked
from programs.strategy import programs
from programs.worker import Worker
from referee import referee
from steplaw.tally import count, counting

pytestmark = pytest.mark.skipif(not hasattr(os, "fork"), reason="each program runs in a fork")

KEPT = Path(picked.__file__).parent / "kept"
SHARE = int(os.environ.get("STEPLAW_PROGRAMS", "60"))
Workers = Callable[[str], Worker]


@pytest.fixture(scope="module")
def workers() -> Iterator[Workers]:
    """One worker for each package that picked calls need, and one for the standard library."""
    started: dict[str, Worker] = {}

    def worker(package: str) -> Worker:
        if package not in started:
            calls = [n for n in picked.names() if picked.NEEDS.get(n, "") == package]
            started[package] = Worker(*calls).__enter__()
        return started[package]

    yield worker
    for one in started.values():
        one.__exit__(None, None, None)


@pytest.mark.parametrize("name", picked.names())
def test_picked_call(name: str, workers: Workers) -> None:
    package = picked.NEEDS.get(name, "")
    if package and importlib.util.find_spec(package) is None:
        pytest.skip(f"{package} is not installed")
    if package == "sympy" and SHARE <= 60:
        pytest.skip("takes long to rewrite: runs when STEPLAW_PROGRAMS asks for more")
    assert workers(package).differences(picked=name) == []


@pytest.fixture(scope="module")
def plain_worker() -> Iterator[Worker]:
    with Worker() as worker:
        yield worker


@settings(
    max_examples=SHARE,
    derandomize=SHARE <= 100,
    database=None,
    deadline=None,
    suppress_health_check=list(HealthCheck),
    phases=(Phase.explicit, Phase.generate, Phase.shrink),
)
@given(source=programs())
def test_generated_program(plain_worker: Worker, source: str) -> None:
    assert plain_worker.differences(source=source) == []


@pytest.mark.parametrize("kept", sorted(KEPT.glob("*.txt")), ids=lambda path: path.stem)
def test_program_that_once_differed(plain_worker: Worker, kept: Path) -> None:
    assert plain_worker.differences(source=kept.read_text()) == []


def test_a_wrong_count_is_noticed() -> None:
    """The comparison itself: counts of different work do not pass for equal."""
    from programs.compare import _by_instruction, _by_tally

    def work(n: int) -> int:
        return sum(k for k in range(n))

    reported = referee(work, 3)
    with counting() as counter:
        work(4)
    assert _by_instruction(reported, counter.instructions())
    assert _by_tally(reported, counter.tally)


def test_referee_by_hand() -> None:
    """Counts worked out from the disassembly: 3 rounds of a loop whose line has k steps each."""

    def work(n: int) -> int:
        total = 0
        for k in range(n):
            total = k
        return total

    for n in (0, 1, 7):
        counts = referee(work, n)
        names = counts.opcodes
        assert counts.result == max(n - 1, 0)
        assert names["FOR_ITER"] == n + 1
        assert names["JUMP_BACKWARD"] == n
        assert names["STORE_FAST"] == 1 + 2 * n
        assert "RESUME" not in names and "END_FOR" not in names and "EXTENDED_ARG" not in names


def _reached(n: int = 0) -> int:
    try:
        return _reached(n + 1)
    except RecursionError:
        return n


def test_recursion_goes_as_deep_under_probes() -> None:
    plain = _reached()
    with counting():
        probed = _reached()
    assert probed == plain


def test_exception_of_the_call_is_raised_and_counted() -> None:
    def work() -> None:
        raise LookupError("no berth")

    reported = referee(work)
    with pytest.raises(LookupError, match="no berth"):
        count(work)
    with counting() as counter, contextlib.suppress(LookupError):
        work()
    own = [f for f in counter.tally.functions if f.name.endswith("work")]
    assert [f.steps for f in own] == [reported.total]
