"""Loops over `range`, of constants above all: every way in and out of them, by the referee."""

from __future__ import annotations

import os
from collections.abc import Iterator

import pytest
from hypothesis import HealthCheck, Phase, given, settings
from hypothesis import strategies as st

from bench.affine import short_rows
from programs.worker import Worker
from steplaw.flow.blocks import Blocks
from steplaw.flow.decode import Decoded
from steplaw.flow.ranges import range_loops
from steplaw.tally import counting
from steplaw.tally.registry import Registry

pytestmark = pytest.mark.skipif(not hasattr(os, "fork"), reason="each program runs in a fork")

SHARE = int(os.environ.get("STEPLAW_PROGRAMS", "60"))
RANGES = (
    "range(4)",
    "range(0)",
    "range(1, 8, 3)",
    "range(6, -3, -2)",
    "range(n)",
    "range(1, n + 1)",
)
#: What `range` is in the program: itself, or something that is called in its place.
OTHERS = (
    "",
    "def range(*given):\n    yield from given\n    yield 7",
    "def range(*given):\n    return [2, *given] if len(given) != 1 else 1 // (given[0] - 4)",
    "class range:\n    def __init__(self, *given):\n        self.at = max(given)\n"
    "    def __iter__(self):\n        return self\n"
    "    def __next__(self):\n        self.at -= 1\n        if self.at < 0:\n"
    "            raise StopIteration\n        if self.at == 5:\n            raise Full\n"
    "        return self.at",
)


@st.composite
def statements(draw: st.DrawFn, depth: int, loop: int) -> list[str]:
    """Lines of code, some with loops over a range, some of which may raise."""
    kinds = (
        ["add", "divide", "catch", "choose", "loop", "loop", "while"]
        if depth
        else ["add", "divide"]
    )
    if loop:
        kinds += ["continue", "raise"] + (
            ["break", "return"] if draw(st.integers(0, 4)) == 0 else []
        )
    lines: list[str] = []
    for _ in range(draw(st.integers(1, 2))):
        kind = draw(st.sampled_from(kinds))
        inner = [f"    {line}" for line in draw(statements(depth - 1, loop))] if depth else []
        match kind:
            case "add":
                lines.append(f"t += {draw(st.integers(0, 9))}")
            case "divide":
                lines.append(f"t += 12 // (t % {draw(st.integers(2, 5))} - 1)")
            case "catch":
                after = draw(
                    st.sampled_from(
                        ["except ZeroDivisionError:", "except Full as full:", "finally:"]
                    )
                )
                lines += ["try:", *inner, after, "    t += 2"]
            case "choose":
                lines += [f"if t % {draw(st.integers(2, 4))}:", *inner]
                if draw(st.booleans()):
                    lines += ["else:", *(f"    {x}" for x in draw(statements(depth - 1, loop)))]
            case "while":
                name = f"w{depth}"
                lines += [f"{name} = 3", f"while {name}:", f"    {name} -= 1", *inner]
            case "loop":
                body = [f"    {line}" for line in draw(statements(depth - 1, loop + 1))]
                lines += [f"for i{depth} in {draw(st.sampled_from(RANGES))}:", *body]
                if draw(st.integers(0, 3)) == 0:
                    lines += ["else:", "    t += 1"]
            case "return":
                lines += ["if t % 7 == 3:", "    return t"]
            case "raise":
                lines += ["if t % 11 == 5:", "    raise Full"]
            case _:
                lines += ["if t % 3 == 1:", f"    {kind}"]
    return lines


@st.composite
def sources(draw: st.DrawFn) -> str:
    """A program that calls one such function a few times."""
    yields = draw(st.integers(0, 4)) == 0
    body = draw(statements(3, 0))
    lines = [
        "class Full(Exception):",
        "    pass",
        draw(st.sampled_from(OTHERS)),
        "def work(n, t):",
        *(f"    {line}" for line in body),
        "    yield t" if yields else "    return t",
        "def main():",
        "    for q in (0, 1, 4):",
        "        try:",
        "            list(work(q, q))" if yields else "            work(q, q)",
        "        except (Full, ArithmeticError, TypeError):",
        "            pass",
    ]
    return "\n".join(lines) + "\n"


@pytest.fixture(scope="module")
def worker() -> Iterator[Worker]:
    with Worker() as one:
        yield one


@settings(
    max_examples=SHARE,
    derandomize=SHARE <= 100,
    database=None,
    deadline=None,
    suppress_health_check=list(HealthCheck),
    phases=(Phase.explicit, Phase.generate, Phase.shrink),
)
@given(source=sources())
def test_loops_in_every_way_in_and_out(worker: Worker, source: str) -> None:
    assert worker.differences(source=source) == []


def test_a_range_of_constants_is_made_once_and_counted_by_its_entries() -> None:
    with counting() as counter:
        assert short_rows(10) == 6 * 45
    probed = next(c.probed for c in counter.codes if c.probed.original.co_name == "short_rows")
    assert range(4) in probed.code.co_consts
    assert [length for length, _ in probed.lengths.each.values()] == [4]
    assert sum(c.passes for c in counter.codes) == 1


@pytest.mark.parametrize(
    ("call", "constant"),
    [
        ("range(4)", range(4)),
        ("range(2, 9, 3)", range(2, 9, 3)),
        ("range(5, -5, -2)", range(5, -5, -2)),
        ("range(0)", range(0)),
        ("range(1, 2, 0)", None),
        ("range(True)", None),
        ("range('4')", None),
        ("range(n)", None),
        ("range(2, n)", None),
        (f"range({10**30})", None),
    ],
)
def test_which_ranges_are_constant(call: str, constant: range | None) -> None:
    code = compile(f"def work(n):\n    for i in {call}:\n        print(i)\n", "<work>", "exec")
    work = next(c for c in code.co_consts if hasattr(c, "co_code"))
    assert [loop.constant for loop in range_loops(Blocks(Decoded(work)))] == [constant]


def test_code_under_probes_has_a_hash_as_its_original_has() -> None:
    code = Registry().rewrite(short_rows.__code__)
    assert hash(code) == hash(code.replace())
