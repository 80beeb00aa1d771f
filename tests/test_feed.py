from __future__ import annotations

import hashlib
import math
import pickle
import random
import subprocess
import sys
from collections.abc import Iterator
from pathlib import Path

import pytest

from steplaw.errors import CallError
from steplaw.feed import (
    Args,
    FeedError,
    FeedSpec,
    args,
    bind,
    from_callable,
    parse_every,
    parse_feed,
    seed,
    size_text,
)
from steplaw.subject import Subject, call, locate, parse

SUBJECTS = """
import math as m
from collections import deque

floor = "the subject's own floor"


def port(n):
    return f"port {n}"


def one(x):
    return x


def two(x, y, *, key=None):
    return x, y, key
"""

FEEDS = """
def ports(n): return [f"port {i}" for i in range(n)]
def grid(m, n): return [[0] * m for _ in range(n)]
def drawn(n, rng): return [rng.random() for _ in range(n)]
def by_place(rng, n, /): return rng.sample(range(n), n)
def with_default(n, kind="ferry"): return kind * n
def several(n, *rest, **more): return [n, rest, more]
def stranger(n, tide): return tide
def constant(): return 1
def failing(n): raise KeyError("no\\nport")
def leaving(n): raise SystemExit(3)
async def slow(n): return n
def every_order(n):
    from itertools import permutations
    return (list(p) for p in permutations(range(n)))
"""


@pytest.fixture(autouse=True)
def imports_undone() -> Iterator[None]:
    path, modules = list(sys.path), dict(sys.modules)
    state = random.getstate()
    yield
    random.setstate(state)
    sys.path[:] = path
    for name in set(sys.modules) - set(modules):
        if name.endswith("_of_tests"):
            del sys.modules[name]


@pytest.fixture
def folder(tmp_path: Path) -> Path:
    (tmp_path / "subjects_of_tests.py").write_text(SUBJECTS)
    (tmp_path / "feeds_of_tests.py").write_text(FEEDS)
    return tmp_path


@pytest.fixture
def one(folder: Path) -> Subject:
    return locate(parse(f"{folder / 'subjects_of_tests.py'}:one"))


@pytest.fixture
def two(folder: Path) -> Subject:
    return locate(parse(f"{folder / 'subjects_of_tests.py'}:two"))


def value(subject: Subject, text: str, draw: int = 0, **at: int) -> object:
    made = bind(parse_feed(text), subject, tuple(at)).make(at, draw)
    return call(subject, made.args, made.kwargs)


def refusal(make: object, *given: object) -> str:
    with pytest.raises(CallError) as caught:
        make(*given)  # type: ignore[operator]
    line = str(caught.value)
    assert "\n" not in line and caught.value.exit_status == 2
    return line


class TestExpression:
    def test_value_is_the_one_argument(self, one: Subject) -> None:
        assert value(one, "list(range(n))", n=3) == [0, 1, 2]
        assert value(one, "(n, n)", n=3) == (3, 3)

    def test_args_gives_several(self, two: Subject) -> None:
        assert value(two, "args([n], n + 1, key='x')", n=3) == ([3], 4, "x")
        assert args(1, key=2) == Args((1,), {"key": 2})

    def test_several_sizes(self, one: Subject) -> None:
        assert value(one, "[[0] * m for _ in range(n)]", n=2, m=3) == [[0, 0, 0], [0, 0, 0]]

    @pytest.mark.parametrize(
        ("text", "expected"),
        [
            ("[port(i) for i in range(n)]", ["port 0", "port 1"]),
            ("deque(range(n), maxlen=n)[0]", 0),
            ("[floor] * n", ["the subject's own floor"] * 2),
            ("(m.pi, ceil(n / 4))", (math.pi, 1)),
            ("list(permutations(range(n)))", [(0, 1), (1, 0)]),
            ("fractions.Fraction(1, n)", 0.5),
            ("collections.Counter('ab' * n)['a']", 2),
            ("pow(n, 3, 5)", 3),
            ("sum((lambda k: k * n)(j) for j in range(3))", 6),
            ("[y := n, y + 1]", [2, 3]),
            ("{p: q for p, q in zip(range(n), 'xyz')}", {0: "x", 1: "y"}),
        ],
    )
    def test_names(self, one: Subject, text: str, expected: object) -> None:
        assert value(one, text, n=2) == expected

    def test_sizes_hide_the_subjects_names(self, one: Subject) -> None:
        assert value(one, "[0] * m", m=2) == [0, 0]

    def test_every_input_is_fresh(self, one: Subject) -> None:
        feed = bind(parse_feed("[0] * n"), one)
        first = only_argument(feed.make({"n": 2}))
        assert isinstance(first, list)
        first.append(1)
        assert only_argument(feed.make({"n": 2})) == [0, 0]

    @pytest.mark.parametrize(
        ("text", "parts"),
        [
            ("", ["--feed is empty"]),
            ("[1, 2", ["column 1", "'[' was never closed", "▸ [1, 2"]),
            ("n + + ", ["column", "n + +"]),
            ("x = [n]", ["one expression, not a statement"]),
            ("import os", ["one expression, not a statement"]),
            ("[n\n for]", ["line 2, column"]),
            ("n\0", ["--feed"]),
            ("(" * 300 + "n", ["--feed"]),
        ],
    )
    def test_syntax_error_shows_the_place(self, text: str, parts: list[str]) -> None:
        line = refusal(parse_feed, text)
        assert all(part in line for part in parts), line

    @pytest.mark.parametrize(
        ("text", "parts"),
        [
            ("[range(n), k]", ["'k', which is not defined", "--sizes 'n=4..64 k=4..64'"]),
            ("[rgn.random() for _ in range(n)]", ["did you mean rng"]),
            ("prot(n)", ["or port"]),
            ("np.zeros(n)", ["write numpy"]),
            ("[zzqx_of_tests for _ in range(n)]", ["'zzqx_of_tests'"]),
            ("nx.path_graph(n)", ["write networkx"]),
            ("[1, 2, 3]", ["does not use the size n"]),
        ],
    )
    def test_names_that_are_not_defined(self, one: Subject, text: str, parts: list[str]) -> None:
        line = refusal(bind, parse_feed(text), one)
        assert all(part in line for part in parts), line

    def test_size_without_a_part(self, one: Subject) -> None:
        line = refusal(bind, parse_feed("[0] * n"), one, ("n", "m"))
        assert "does not use the size m" in line

    def test_feed_that_raises(self, one: Subject) -> None:
        feed = bind(parse_feed("[1 / (n - 4)] * n"), one)
        feed.make({"n": 3})
        line = refusal(feed.make, {"n": 4})
        assert "ZeroDivisionError" in line and "at n=4" in line and "[1 / (n - 4)] * n" in line
        with pytest.raises(FeedError) as caught:
            feed.make({"n": 4})
        assert caught.value.at == {"n": 4}

    def test_feed_that_does_not_fit(self, two: Subject) -> None:
        line = refusal(bind(parse_feed("[n]"), two).make, {"n": 1})
        assert "does not fit two(x, y, key)" in line and "args(a, b, key=c)" in line


def only_argument(made: object) -> object:
    return made.args[0]  # type: ignore[attr-defined]


class TestChance:
    def test_same_draw_gives_the_same(self, one: Subject) -> None:
        text = "[rng.random() for _ in range(n)]"
        assert value(one, text, 1, n=5) == value(one, text, 1, n=5)
        assert value(one, text, 1, n=5) != value(one, text, 2, n=5)

    def test_every_process_and_version_draws_the_same(self) -> None:
        key = seed({"n": 4, "m": 3}, 0)
        assert key == seed({"m": 3, "n": 4}, 0) == "steplaw m=3 n=4 draw=0"
        # How a string seeds: CPython, Lib/random.py, Random.seed, version 2. random() then repeats
        # on every version: Python documentation of random, "Notes on Reproducibility".
        text = key.encode()
        by_hand = random.Random(int.from_bytes(text + hashlib.sha512(text).digest()))
        assert random.Random(key).random() == by_hand.random()

    def test_another_process_draws_the_same(self, one: Subject) -> None:
        text = "[rng.random() for _ in range(n)]"
        code = (
            "from steplaw.feed import *; from steplaw.subject import *; "
            f"s = locate(parse({str(one.ref)!r})); "
            f"print(bind(parse_feed({text!r}), s).make({{'n': 5}}, 1).args[0])"
        )
        out = subprocess.run([sys.executable, "-c", code], capture_output=True, text=True)
        assert out.stdout.strip() == str(value(one, text, 1, n=5)), out.stderr

    @pytest.mark.parametrize(
        ("text", "drew"),
        [
            ("list(range(n))", False),
            ("rng.sample(range(n), n)", True),
            ("random.sample(range(n), n)", True),
            ("args([n])", False),
        ],
    )
    def test_use_of_chance_is_noticed(self, one: Subject, text: str, drew: bool) -> None:
        assert bind(parse_feed(text), one).make({"n": 5}).random is drew

    def test_chance_during_the_run_is_noticed(self, two: Subject) -> None:
        made = bind(parse_feed("args((rng.random() for _ in range(n)), rng)"), two).make({"n": 5})
        assert made.random is False
        next(made.args[0])
        assert made.random is True

    def test_module_level_generator_repeats(self, one: Subject) -> None:
        text = "[random.random() for _ in range(n)]"
        assert value(one, text, n=5) == value(one, text, n=5)

    def test_inputs_travel(self, one: Subject) -> None:
        made = bind(parse_feed("[rng.random()] * n"), one).make({"n": 2})
        again = pickle.loads(pickle.dumps(made))
        assert again.args == made.args and again.random


class TestFunctionFeed:
    @pytest.mark.parametrize(
        ("name", "at", "expected"),
        [
            ("ports", {"n": 2}, ["port 0", "port 1"]),
            ("grid", {"n": 1, "m": 2}, [[0, 0]]),
            ("with_default", {"n": 2}, "ferryferry"),
            ("several", {"n": 2}, [2, (), {}]),
        ],
    )
    def test_parameters_by_name(
        self, folder: Path, one: Subject, name: str, at: dict[str, int], expected: object
    ) -> None:
        spec = parse_feed(f"{folder / 'feeds_of_tests.py'}:{name}")
        assert spec.kind == "function"
        made = bind(spec, one, tuple(at)).make(at)
        assert made.args == (expected,) and not made.random

    @pytest.mark.parametrize("name", ["drawn", "by_place"])
    def test_generator_is_handed_over(self, folder: Path, one: Subject, name: str) -> None:
        feed = bind(parse_feed(f"{folder / 'feeds_of_tests.py'}:{name}"), one)
        assert feed.make({"n": 4}).random
        assert feed.make({"n": 4}).args == feed.make({"n": 4}).args

    @pytest.mark.parametrize(
        ("name", "part"),
        [
            ("stranger", "asks for 'tide', which is neither a size (n) nor rng"),
            ("constant", "does not use the size n"),
            ("slow", "is asynchronous"),
            ("prots", "did you mean"),
        ],
    )
    def test_refusals(self, folder: Path, one: Subject, name: str, part: str) -> None:
        spec = parse_feed(f"{folder / 'feeds_of_tests.py'}:{name}")
        assert part in refusal(bind, spec, one)

    def test_no_such_file(self, one: Subject) -> None:
        assert "no such file: nowhere.py" in refusal(bind, parse_feed("nowhere.py:ports"), one)

    @pytest.mark.parametrize(
        ("name", "part"), [("failing", "KeyError: 'no\\nport'"), ("leaving", "SystemExit: 3")]
    )
    def test_that_raises(self, folder: Path, one: Subject, name: str, part: str) -> None:
        feed = bind(parse_feed(f"{folder / 'feeds_of_tests.py'}:{name}"), one)
        line = refusal(feed.make, {"n": 7})
        assert part in line and "at n=7" in line


def at_hand(n: int) -> list[int]:
    return [n]


class TestPythonFeed:
    def test_function_that_can_be_imported(self, one: Subject) -> None:
        spec = from_callable(at_hand)
        assert (spec.kind, spec.text) == ("function", f"{__file__}:at_hand")
        assert bind(spec, one).make({"n": 3}).args == ([3],)

    def test_lambda(self, one: Subject) -> None:
        spec = from_callable(lambda n, rng: rng.sample(range(n), n))
        assert spec.kind == "python"
        assert bind(spec, one).make({"n": 3}).random


class TestEvery:
    def test_all_orders(self, one: Subject) -> None:
        feed = bind(parse_every("(list(p) for p in permutations(range(n)))"), one)
        for n in range(5):
            inputs = list(feed.every({"n": n}))
            assert len({tuple(i.args[0]) for i in inputs}) == math.factorial(n) == len(inputs)
            assert not any(i.random for i in inputs)

    def test_function_of_a_file(self, folder: Path, one: Subject) -> None:
        feed = bind(parse_every(f"{folder / 'feeds_of_tests.py'}:every_order"), one)
        assert [i.args[0] for i in feed.every({"n": 2})] == [[0, 1], [1, 0]]

    def test_values_are_a_feeds(self, two: Subject) -> None:
        feed = bind(parse_every("(args(a, b, key=n) for a in range(n) for b in range(n))"), two)
        assert [call(two, i.args, i.kwargs) for i in feed.every({"n": 2})] == [
            (0, 0, 2),
            (0, 1, 2),
            (1, 0, 2),
            (1, 1, 2),
        ]

    @pytest.mark.parametrize(
        ("text", "part"),
        [
            ("[rng.random()] * n", "--every lists all inputs of a size, so it draws nothing"),
            ("permutation(range(n))", "did you mean permutations"),
        ],
    )
    def test_refused_when_bound(self, one: Subject, text: str, part: str) -> None:
        assert part in refusal(bind, parse_every(text), one)

    @pytest.mark.parametrize(
        ("text", "part"),
        [
            ("n", "must give an iterable of inputs, not int, at n=3"),
            ("args([n])", "must give an iterable of inputs, not Args"),
            ("(1 // (2 - i) for i in range(n))", "ZeroDivisionError"),
        ],
    )
    def test_refused_when_run(self, one: Subject, text: str, part: str) -> None:
        feed = bind(parse_every(text), one)
        assert part in refusal(lambda: list(feed.every({"n": 3})))


def test_spec_and_size_as_text() -> None:
    assert parse_feed(" [n] ") == FeedSpec("expression", "[n]")
    assert size_text({"n": 4, "m": 8}) == "n=4, m=8"
