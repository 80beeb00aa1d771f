from __future__ import annotations

import array
import collections
import dataclasses
import datetime
import enum
import inspect
import itertools
import sys
from collections.abc import Callable, Iterator
from decimal import Decimal
from fractions import Fraction
from pathlib import Path
from typing import Any

import numpy
import pytest

from steplaw.errors import CallError
from steplaw.feed import Feed, bind, parse_feed
from steplaw.subject import Subject, call, locate, parse

HEAD = """
from __future__ import annotations
import array, collections, dataclasses, datetime, decimal, enum, fractions, random, uuid
import datetime as dt
from collections import Counter, OrderedDict, defaultdict, deque
from typing import *
import numpy as np
import numpy.typing as npt
if TYPE_CHECKING:
    from nowhere import Buoy

class Tide(enum.Enum):
    LOW = 1
    HIGH = 2

class Sailing(NamedTuple):
    departure: int
    port: str
    day: dt.date
    tide: Tide
    note: str = "none"

@dataclasses.dataclass
class Cargo:
    weight: float
    lots: list[int]
    sailing: Sailing | None
    insured: bool = True

@dataclasses.dataclass(frozen=True)
class Berth:
    number: int
    quay: str

@dataclasses.dataclass
class Chain:
    length: int
    rest: Chain | None

@dataclasses.dataclass
class Endless:
    rest: Endless

class Vessel:
    def __init__(self, seats: int, crew: list[str]) -> None:
        self.seats, self.crew = seats, crew
    def board(self, parties: list[int]): return (self.seats, self.crew, parties)
    @classmethod
    def build(cls, crew: list[str]): return cls(len(crew), crew)
    @staticmethod
    def tow(loads: list[int]): return loads

class Ticket(TypedDict):
    port: str
    fare: int

class Ordered(Protocol):
    def __lt__(self, other: Any) -> bool: ...

class Sinks(Protocol):
    def sink(self) -> None: ...

Key = TypeVar("Key", bound=Ordered)
Port = NewType("Port", str)

def outer_wrapper(function):
    import functools
    @functools.wraps(function)
    def wrapper(*args, **kwargs): return function(*args, **kwargs)
    return wrapper
"""


@pytest.fixture(autouse=True)
def imports_undone() -> Iterator[None]:
    path = list(sys.path)
    yield
    sys.path[:] = path
    for name in [name for name in sys.modules if name.endswith("_of_tests")]:
        del sys.modules[name]


@pytest.fixture
def subject_of(tmp_path: Path) -> Callable[..., Subject]:
    numbers = itertools.count()

    def make(definition: str, name: str = "f") -> Subject:
        file = tmp_path / f"hinted_{next(numbers)}_of_tests.py"
        body = definition if "\n" in definition else f"def f({definition}): return locals()"
        file.write_text(f"{HEAD}\n{body}\n")
        return locate(parse(f"{file}:{name}"))

    return make


def only_value(feed: Feed, **at: int) -> Any:
    made = feed.make(at)
    assert len(made.args) == 1 and not made.kwargs
    return made.args[0]


def refusal(subject: Subject, names: tuple[str, ...] = ("n",)) -> str:
    with pytest.raises(CallError) as caught:
        bind(None, subject, names)
    line = str(caught.value)
    assert "\n" not in line
    return line


SIZED = {
    "n: int": lambda v: v == 5,
    "x: list[int]": lambda v: sorted(v) == list(range(5)),
    "x: list[float]": lambda v: len(v) == 5 and all(0 <= x < 1 for x in v),
    "x: list[str]": lambda v: len(v) == 5 and all(x.isalpha() for x in v),
    "x: list[bool]": lambda v: len(v) == 5 and {type(x) for x in v} == {bool},
    "x: list[complex]": lambda v: len(v) == 5 and type(v[0]) is complex,
    "x: list[None]": lambda v: v == [None] * 5,
    "x: list[tuple[int, int]]": lambda v: [len(x) for x in v] == [2] * 5,
    "x: list[bytes]": lambda v: [type(x) for x in v] == [bytes] * 5,
    "x: Sequence[int]": lambda v: len(v) == 5,
    "x: Iterable[str]": lambda v: len(v) == 5,
    "x: Iterator[int]": lambda v: sorted(v) == list(range(5)) and iter(v) is v,
    "x: Generator[int, None, None]": lambda v: len(list(v)) == 5,
    "x: List": lambda v: len(v) == 5,
    "x: Dict": lambda v: len(v) == 5,
    "x: Tuple": lambda v: len(v) == 5,
    "x: Collection": lambda v: len(v) == 5,
    "x: tuple[float, ...]": lambda v: type(v) is tuple and len(v) == 5,
    "x: tuple[int, list[int]]": lambda v: v[0] == 5 and len(v[1]) == 5,
    "x: str": lambda v: len(v) == 5 and v.isalpha() and v.islower(),
    "x: bytes": lambda v: type(v) is bytes and len(v) == 5,
    "x: bytearray": lambda v: type(v) is bytearray and len(v) == 5,
    "x: dict[str, int]": lambda v: len(v) == 5 and all(type(k) is str for k in v),
    "x: dict[int, list[int]]": lambda v: sorted(v) == list(range(5)) and len(v[0]) == 5,
    "x: Mapping[tuple[str, int], float]": lambda v: len(v) == 5,
    "x: dict[dt.date, int]": lambda v: len(v) == 5,
    "x: set[int]": lambda v: type(v) is set and len(v) == 5,
    "x: set[str]": lambda v: len(v) == 5 and all(type(k) is str for k in v),
    "x: frozenset[Berth]": lambda v: type(v) is frozenset and len(v) == 5,
    "x: set[fractions.Fraction]": lambda v: len(v) == 5 and {type(x) for x in v} == {Fraction},
    "x: deque[int]": lambda v: type(v) is collections.deque and len(v) == 5,
    "x: deque": lambda v: type(v) is collections.deque and len(v) == 5,
    "x: Counter[str]": lambda v: type(v) is collections.Counter and len(v) == 5,
    "x: OrderedDict[str, int]": lambda v: type(v) is collections.OrderedDict and len(v) == 5,
    "x: defaultdict[str, list[int]]": lambda v: v["nowhere"] == [] and len(v) == 6,
    "x: array.array": lambda v: type(v) is array.array and len(v) == 5 and v.typecode == "q",
    "x: np.ndarray": lambda v: v.shape == (5,) and v.dtype == numpy.float64,
    "x: npt.NDArray[np.float64]": lambda v: v.shape == (5,) and v.dtype == numpy.float64,
    "x: npt.NDArray[np.int64]": lambda v: v.shape == (5,) and v.dtype == numpy.int64,
    "x: list[list[int]]": lambda v: [len(row) for row in v] == [5] * 5,
    "x: list[list[list[float]]]": lambda v: numpy.array(v).shape == (5, 5, 5),
    "x: list[set[int]]": lambda v: [len(row) for row in v] == [5] * 5,
    "x: list": lambda v: len(v) == 5,
    "x: dict": lambda v: len(v) == 5,
    "x: tuple": lambda v: len(v) == 5,
    "x: set": lambda v: len(v) == 5,
    "x: Optional[list[int]]": lambda v: len(v) == 5,
    "x: None | str": lambda v: len(v) == 5,
    "x: list[int] | tuple[int, ...]": lambda v: type(v) is list,
    "x: Annotated[list[int], 'sorted']": lambda v: len(v) == 5,
    "x: list[Key]": lambda v: sorted(v) == list(range(5)),
    "x: list[Ordered]": lambda v: len(v) == 5,
    "x: list[Port]": lambda v: len(v) == 5 and type(v[0]) is str,
    "x: list[Literal['a', 'b']]": lambda v: len(v) == 5 and set(v) <= {"a", "b"},
    "x: list[Tide]": lambda v: len(v) == 5 and all(isinstance(x, enum.Enum) for x in v),
    "x: list[datetime.datetime]": lambda v: [x.year for x in v] == [2026] * 5,
    "x: list[dt.date]": lambda v: [x.year for x in v] == [2026] * 5,
    "x: list[dt.time]": lambda v: {type(x) for x in v} == {datetime.time},
    "x: list[dt.timedelta]": lambda v: {type(x) for x in v} == {datetime.timedelta},
    "x: list[decimal.Decimal]": lambda v: {type(x) for x in v} == {Decimal},
    "x: list[uuid.UUID]": lambda v: len(set(v)) == 5,
    "x: list[Ticket]": lambda v: [set(t) for t in v] == [{"port", "fare"}] * 5,
    "x: list[Sailing]": lambda v: len(v) == 5 and v[0].note == "none" and v[0].departure < 5,
    "x: Cargo": lambda v: len(v.lots) == 5 and v.insured and v.sailing.departure == 5,
    "x: list[Chain]": lambda v: [c.rest for c in v] == [None] * 5,
    "x: list[Vessel]": lambda v: [len(b.crew) for b in v] == [5] * 5,
    "x: 'list[int]'": lambda v: len(v) == 5,
    "x: list[int], limit: Buoy = 3": lambda v: len(v) == 5,
}


@pytest.mark.parametrize("parameters", SIZED)
def test_one_parameter(subject_of: Callable[..., Subject], parameters: str) -> None:
    subject = subject_of(parameters)
    feed = bind(None, subject)
    assert feed.kind == "hints"
    value = only_value(feed, n=5)
    assert SIZED[parameters](value), value
    call(subject, feed.make({"n": 0}).args)


@pytest.mark.parametrize("parameters", SIZED)
def test_text_is_a_feed_of_its_own(subject_of: Callable[..., Subject], parameters: str) -> None:
    subject = subject_of(parameters)
    feed = bind(None, subject)
    again = bind(parse_feed(feed.text), subject)
    assert repr_of(again.make({"n": 4}, 2).args) == repr_of(feed.make({"n": 4}, 2).args)


def repr_of(values: Any) -> str:
    def plain(x: Any) -> Any:
        if hasattr(x, "crew"):
            return (x.seats, x.crew)
        return list(x) if isinstance(x, Iterator) else x

    return repr([[plain(y) for y in v] if isinstance(v, list) else plain(v) for v in values])


class TestSeveralParameters:
    def test_all_take_the_size(self, subject_of: Callable[..., Subject]) -> None:
        feed = bind(None, subject_of("loads: list[int], room: int, tide: bool"))
        loads, room, tide = feed.make({"n": 6}).args
        assert len(loads) == room == 6 and type(tide) is bool

    def test_kinds_of_parameters(self, subject_of: Callable[..., Subject]) -> None:
        feed = bind(
            None, subject_of("a: int, /, *rest: int, name: str, late: bool = False, **k: int")
        )
        made = feed.make({"n": 3})
        assert made.args[0] == 3 and sorted(made.args[1:]) == [0, 1, 2]
        assert set(made.kwargs) == {"name"} and len(made.kwargs["name"]) == 3

    def test_sizes_by_name_and_in_turn(self, subject_of: Callable[..., Subject]) -> None:
        subject = subject_of("m: int, table: list[list[int]], n: int, names: list[str]")
        m, table, n, names = bind(None, subject, ("n", "m")).make({"n": 2, "m": 3}).args
        assert (m, n) == (3, 2) and len(table) in (2, 3) and len(names) in (2, 3)
        subject = subject_of("names: list[str], loads: list[int]")
        names, loads = bind(None, subject, ("n", "m")).make({"n": 2, "m": 3}).args
        assert (len(names), len(loads)) == (2, 3)

    def test_table_of_two_sizes(self, subject_of: Callable[..., Subject]) -> None:
        feed = bind(None, subject_of("table: list[list[float]]"), ("n", "m"))
        assert numpy.array(only_value(feed, n=2, m=3)).shape == (2, 3)

    def test_decorated(self, subject_of: Callable[..., Subject]) -> None:
        subject = subject_of("@outer_wrapper\ndef f(x: list[int]): return x\n")
        assert len(only_value(bind(None, subject), n=4)) == 4

    def test_methods(self, subject_of: Callable[..., Subject]) -> None:
        subject = subject_of("x: int", "Vessel.board")
        made = bind(None, subject).make({"n": 3})
        seats, crew, parties = call(subject, made.args)
        assert seats == len(crew) == len(parties) == 3
        assert bind(None, subject_of("x: int", "Vessel.tow")).text == "rng.sample(range(n), n)"
        assert "choices" in bind(None, subject_of("x: int", "Vessel.build")).text

    def test_value_is_that_of_the_draw(self, subject_of: Callable[..., Subject]) -> None:
        feed = bind(None, subject_of("x: list[float]"))
        assert feed.make({"n": 4}, 1).args == feed.make({"n": 4}, 1).args
        assert feed.make({"n": 4}, 1).args != feed.make({"n": 4}, 2).args
        assert feed.make({"n": 4}).random
        assert not bind(None, subject_of("n: int")).make({"n": 4}).random


class TestRefusals:
    @pytest.mark.parametrize(
        ("parameters", "parts"),
        [
            (
                "ports, links: Mapping[Any, Any]",
                [
                    "'ports' (it has no type hint)",
                    "Any cannot be a key",
                    "--feed 'args(ports=[... for _ in range(n)], "
                    "links={...: ... for _ in range(n)})'",
                ],
            ),
            ("b: Buoy, x: list[int]", ["Buoy is not defined", "args(b=..., x=rng.sample("]),
            ("f: Callable[[int], int]", ["'f'", "not among the types"]),
            ("x: list[Sinks]", ["Sinks is not among the types", "x=[... for _ in range(n)]"]),
            ("x: list[Endless]", ["Endless holds another of its own kind"]),
            ("x: dict[Tide, int]", ["Tide cannot be a key of which there are any number"]),
            ("x: float", ["no argument that grows with n", "args(x=rng.random())"]),
            ("x: int = 3", ["no parameter without a default", "args(x=...)"]),
            ("", ["no parameter without a default", "takes its input as an argument"]),
            ("x: object", ["object says nothing of what it is"]),
        ],
    )
    def test_shows_a_feed_to_start_from(
        self, subject_of: Callable[..., Subject], parameters: str, parts: list[str]
    ) -> None:
        line = refusal(subject_of(parameters))
        assert all(part in line for part in parts), line

    def test_start_is_a_feed(self, subject_of: Callable[..., Subject]) -> None:
        subject = subject_of("ports, links: dict[str, int], key: str")
        with pytest.raises(CallError) as caught:
            bind(None, subject)
        hint = str(caught.value.hint)
        text = hint.removeprefix("start from --feed '").removesuffix("'")
        made = bind(parse_feed(text), subject).make({"n": 3})
        assert inspect.signature(subject.function).bind(*made.args, **made.kwargs)

    def test_a_size_that_nothing_takes(self, subject_of: Callable[..., Subject]) -> None:
        assert "grows with m" in refusal(subject_of("x: list[int]"), ("n", "m"))


def test_names_imported_for_type_checkers_only(tmp_path: Path) -> None:
    file = tmp_path / "checked_of_tests.py"
    file.write_text(
        "from __future__ import annotations\n"
        "from typing import TYPE_CHECKING\n"
        "if TYPE_CHECKING:\n    from collections.abc import Sequence\n"
        "def f(x: Sequence[int]): return x\n"
    )
    assert len(only_value(bind(None, locate(parse(f"{file}:f"))), n=4)) == 4


def test_new_style_aliases(subject_of: Callable[..., Subject]) -> None:
    if sys.version_info < (3, 12):
        pytest.skip("type statements came with 3.12")
    definition = "type Row[T] = list[T]\ntype Table = list[Row[int]]\ndef f(x: Table): return x\n"
    assert [len(r) for r in only_value(bind(None, subject_of(definition)), n=3)] == [3] * 3
    definition = "def f[T](x: list[T]): return x\n"
    assert len(only_value(bind(None, subject_of(definition)), n=3)) == 3


def test_distinct_orders_are_the_usual_model(subject_of: Callable[..., Subject]) -> None:
    # Random permutations as the model of inputs to sorting: Knuth, TAOCP vol. 3, 5.1.1.
    # Their inversions number n(n-1)/4 in the mean with variance n(n-1)(2n+5)/72.
    feed = bind(None, subject_of("x: list[int]"))
    n, draws = 12, 400
    counts = []
    for draw in range(draws):
        x = feed.make({"n": n}, draw).args[0]
        counts.append(sum(x[i] > x[j] for i in range(n) for j in range(i + 1, n)))
    mean, spread = n * (n - 1) / 4, (n * (n - 1) * (2 * n + 5) / 72 / draws) ** 0.5
    assert abs(sum(counts) / draws - mean) < 4 * spread


def test_dataclass_fields_are_read_where_they_were_made(
    subject_of: Callable[..., Subject],
) -> None:
    subject = subject_of("x: list[Cargo]")
    value = only_value(bind(None, subject), n=2)
    assert all(dataclasses.is_dataclass(cargo) for cargo in value)
