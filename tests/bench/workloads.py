"""Open pure-Python programs as workloads, from the data files of the `pyperformance` package.

They are used as programs to count and to time, no more. They import `pyperf`, of which they need
little here; a module with that alone stands in for it.
"""

from __future__ import annotations

import importlib.util
import io
import itertools
import sys
import types
from collections.abc import Callable
from dataclasses import dataclass
from pathlib import Path
from typing import Any

from bench.affine import NESTS

Call = Callable[[], Any]


@dataclass(frozen=True)
class Workload:
    """A program to run.

    Parameters
    ----------
    name, group : str
        'open' for a program of the package, 'affine' for a loop nest.
    make : callable
        Gives, for a scale, the call to run.
    full, small : object
        Scale of half a second or so, and one that the referee can count.
    """

    name: str
    group: str
    make: Callable[[Any], Call]
    full: Any
    small: Any


def programs_folder() -> Path | None:
    """Give the folder of the programs, None where `pyperformance` is not installed."""
    spec = importlib.util.find_spec("pyperformance")
    if spec is None or not spec.submodule_search_locations:
        return None
    folder = Path(spec.submodule_search_locations[0]) / "data-files" / "benchmarks"
    return folder if folder.is_dir() else None


def _load(name: str) -> Any:
    if "pyperf" not in sys.modules:
        clock = types.ModuleType("pyperf")
        # The programs return the time they took; a clock that stands still keeps that the same.
        clock.perf_counter = itertools.repeat(0.0).__next__  # type: ignore[attr-defined]
        clock.python_implementation = lambda: "cpython"  # type: ignore[attr-defined]
        sys.modules["pyperf"] = clock
    folder = programs_folder()
    assert folder is not None
    path = folder / f"bm_{name}" / "run_benchmark.py"
    spec = importlib.util.spec_from_file_location(f"bm_{name}", path)
    assert spec is not None and spec.loader is not None
    module = importlib.util.module_from_spec(spec)
    sys.modules[spec.name] = module
    spec.loader.exec_module(module)
    return module


def _plain(name: str, function: str) -> Callable[[Any], Call]:
    """Give the maker for a function that takes its scale as arguments."""

    def make(scale: Any) -> Call:
        called = getattr(_load(name), function)
        given = scale if isinstance(scale, tuple) else (scale,)
        return lambda: called(*given)

    return make


def _nbody(iterations: int) -> Call:
    module = _load("nbody")
    return lambda: module.bench_nbody(1, "sun", iterations)


def _nqueens(count: int) -> Call:
    module = _load("nqueens")
    return lambda: module.bench_n_queens(count)


def _richards(name: str) -> Callable[[Any], Call]:
    def make(scale: tuple[int, int]) -> Call:
        module = _load(name)
        rounds, turns = scale

        class Idle(module.IdleTaskRec):  # type: ignore[misc, name-defined]
            def __init__(self) -> None:
                super().__init__()
                self.count = turns

        module.IdleTaskRec = Idle
        return lambda: module.Richards().run(rounds)

    return make


def _chaos(scale: tuple[int, int, int]) -> Call:
    module = _load("chaos")
    vector, spline = module.GVector, module.Spline
    splines = [
        spline(
            [
                vector(1.597350, 3.304460, 0.0),
                vector(1.575810, 4.123260, 0.0),
                vector(1.313210, 5.288350, 0.0),
                vector(1.618900, 5.329910, 0.0),
                vector(2.889940, 5.502700, 0.0),
                vector(2.373060, 4.381830, 0.0),
                vector(1.662000, 4.360280, 0.0),
            ],
            3,
            [0, 0, 0, 1, 1, 1, 2, 2, 2],
        ),
        spline(
            [
                vector(2.804500, 4.017350, 0.0),
                vector(2.550500, 3.525230, 0.0),
                vector(1.979010, 2.620360, 0.0),
                vector(1.979010, 2.620360, 0.0),
            ],
            3,
            [0, 0, 0, 1, 1, 1],
        ),
    ]
    width, height, iterations = scale
    game = module.Chaosgame(splines, 0.25)
    return lambda: game.create_image_chaos(width, height, iterations, None, 1234)


def _go(games: int) -> Call:
    module = _load("go")
    module.GAMES = games
    return lambda: module.versus_cpu()


def _hexiom(scale: tuple[int, int]) -> Call:
    module = _load("hexiom")
    loops, level = scale
    return lambda: module.main(loops, level)


def _pyflate(part: float) -> Call:
    """Decompress the package's own file, or for the referee a small one made here."""
    module = _load("pyflate")
    folder = programs_folder()
    assert folder is not None
    if part == 1:
        data = (folder / "bm_pyflate" / "data" / "interpreter.tar.bz2").read_bytes()
    else:
        import bz2

        data = bz2.compress(b"sailings and transfers " * 12, 1)

    def call() -> int:
        field = module.RBitfield(io.BytesIO(data))
        field.readbits(16)
        return len(module.bzip2_main(field))

    return call


def _raytrace(side: int) -> Call:
    module = _load("raytrace")
    return lambda: module.bench_raytrace(1, side, side, None)


def _spectral_norm(order: int) -> Call:
    module = _load("spectral_norm")
    module.DEFAULT_N = order
    return lambda: module.bench_spectral_norm(1)


def _scimark(part: str) -> Callable[[Any], Call]:
    def make(scale: tuple[Any, ...]) -> Call:
        called = _load("scimark").BENCHMARKS[part][0]
        return lambda: called(*scale)

    return make


def _sor(scale: tuple[int, int]) -> Call:
    module = _load("scimark")
    side, rounds = scale
    return lambda: module.bench_SOR(1, side, rounds * 10, module.Array2D)


def _mdp(scale: tuple[float, bool]) -> Call:
    """Solve the whole battle, or for the referee one line of play in it."""
    module = _load("mdp")
    tolerance, whole = scale
    if not whole:
        order = module.topoSort
        module.topoSort = lambda roots, parents: order(roots, lambda state: parents(state)[-1:])
    return lambda: module.Battle().evaluate(tolerance)


def _generators(leaves: int) -> Call:
    module = _load("generators")
    tree = module.tree(range(leaves))
    return lambda: sum(1 for _ in tree)


def _coroutines(n: int) -> Call:
    module = _load("coroutines")

    def call() -> int:
        try:
            module.fibonacci(n).send(None)
        except StopIteration as end:
            return int(end.value)
        return -1

    return call


def _async_generators(leaves: int) -> Call:
    module = _load("async_generators")

    async def walk() -> int:
        seen = 0
        async for _ in module.tree(range(leaves)):
            seen += 1
        return seen

    def call() -> int:
        try:
            walk().send(None)
        except StopIteration as end:
            return int(end.value)
        return -1

    return call


def _pickle(function: str) -> Callable[[int], Call]:
    def make(loops: int) -> Call:
        module = _load("pickle")
        import pickle

        plain = types.SimpleNamespace(
            dumps=lambda obj, protocol: pickle._dumps(obj, protocol),  # type: ignore[attr-defined]
            loads=pickle._loads,  # type: ignore[attr-defined]
        )
        options = types.SimpleNamespace(protocol=4)
        called = getattr(module, function)
        return lambda: called(loops, plain, options)

    return make


def _meteor(scale: tuple[int, int]) -> Call:
    depth, rounds = scale
    module = _load("meteor_contest")
    board, cti, pieces = module.get_puzzle(module.WIDTH, module.HEIGHT)
    prints = module.get_footprints(board, cti, pieces)
    senh = module.get_senh(board, cti)

    def call() -> int:
        solutions: list[Any] = []
        for _ in range(rounds):
            free, taken, left = frozenset(range(50)), [-1] * 50, list(range(len(pieces)))
            solutions.clear()
            module.solve(depth, 0, free, taken, left, solutions, prints, senh)
        return len(solutions)

    return call


def _regex_compile(patterns: int) -> Call:
    module = _load("regex_compile")
    kinds = [r"(?P<a{0}>[a-z]+{0}|b*?)(?:x{{1,{0}}}|[^y-z])", r"^\s*(\w+)=({0}|'[^']*')$"]
    regexes = [(kind.format(k), 0) for k in range(1, patterns + 1) for kind in kinds]
    return lambda: module.bench_regex_compile(1, regexes)


def _pformat(items: int) -> Call:
    module = _load("pprint")
    data = module.printable[:items]
    return lambda: len(module.p.pformat(data))


def _logging(loops: int) -> Call:
    module = _load("logging")
    import logging

    stream = io.StringIO()
    logger = logging.Logger("bench", logging.WARNING)
    logger.addHandler(logging.StreamHandler(stream))
    return lambda: module.bench_formatted_output(loops, logger, stream)


def _barnes_hut(scale: tuple[int, int]) -> Call:
    module = _load("barnes_hut")
    particles, iterations = scale
    return lambda: module.bench_quadtree_nbody(1, particles, iterations, 0.5)


def _bpe(characters: int) -> Call:
    module = _load("bpe_tokeniser")
    folder = programs_folder()
    assert folder is not None
    path = folder / "bm_bpe_tokeniser" / "data" / "frankenstein_intro.txt"
    text = path.read_text("utf8")[:characters]
    size = 1024 if characters > 1000 else 270
    pattern = r" ?[a-zA-Z]+| ?\d+| ?[^\sa-zA-Z\d]+|\s+(?!\S)|\s+"

    def call() -> Any:
        made = module.SimpleBytePairEncoding.train(text, vocab_size=size, pat_str=pattern)
        return made.decode(made.encode("the mate"))

    return call


OPEN = (
    ("deltablue", _plain("deltablue", "delta_blue"), 12_000, 10),
    ("richards", _richards("richards"), (15, 10_000), (1, 60)),
    ("richards_super", _richards("richards_super"), (12, 10_000), (1, 60)),
    ("nbody", _nbody, 110_000, 20),
    ("nqueens", _nqueens, 9, 4),
    ("chaos", _chaos, (256, 256, 40_000), (16, 16, 30)),
    ("go", _go, 600, 1),
    ("hexiom", _hexiom, (60, 25), (1, 2)),
    ("pyflate", _pyflate, 1, 0),
    ("raytrace", _raytrace, 120, 3),
    ("spectral_norm", _spectral_norm, 260, 6),
    ("scimark_sor", _sor, (60, 10), (5, 1)),
    ("scimark_sparse", _scimark("sparse_mat_mult"), (140, 1000, 50_000), (2, 20, 100)),
    ("scimark_monte_carlo", _scimark("monte_carlo"), (8, 100_000), (1, 30)),
    ("scimark_lu", _scimark("lu"), (6, 100), (1, 7)),
    ("scimark_fft", _scimark("fft"), (1, 1024, 60), (1, 16, 1)),
    ("unpack_sequence", _plain("unpack_sequence", "bench_all"), 60_000, 3),
    ("fannkuch", _plain("fannkuch", "fannkuch"), 9, 5),
    ("float", _plain("float", "benchmark"), 400_000, 100),
    ("mdp", _mdp, (0.192, True), (1.0, False)),
    ("deepcopy", _plain("deepcopy", "benchmark"), 1200, 1),
    ("generators", _generators, 1_000_000, 200),
    ("coroutines", _coroutines, 31, 8),
    ("async_generators", _async_generators, 100_000, 100),
    ("pickle_in_python", _pickle("bench_pickle"), 90, 1),
    ("unpickle_in_python", _pickle("bench_unpickle"), 140, 1),
    ("meteor_contest", _meteor, (60, 5), (1, 1)),
    ("regex_compile", _regex_compile, 2000, 2),
    ("pprint", _pformat, 24_000, 5),
    ("logging", _logging, 6000, 2),
    ("barnes_hut", _barnes_hut, (200, 60), (6, 1)),
    ("bpe_tokeniser", _bpe, 6000, 200),
)


def workloads() -> list[Workload]:
    """Give all workloads that can run here."""
    nests = [Workload(n, "affine", _nest(f), full, small) for n, f, full, small in NESTS]
    if programs_folder() is None:
        return nests
    return [Workload(n, "open", make, full, small) for n, make, full, small in OPEN] + nests


def _nest(function: Callable[[int], Any]) -> Callable[[int], Call]:
    return lambda n: lambda: function(n)


def find(name: str) -> Workload:
    """Give the workload of a name."""
    return next(w for w in workloads() if w.name == name)


def small_call(name: str) -> Call:
    """Give a workload's call at the referee's scale."""
    workload = find(name)
    return workload.make(workload.small)
