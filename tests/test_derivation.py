"""`steplaw derive`: formulas from the source alone, as a record and in the terminal."""

from __future__ import annotations

import json
import sys
from pathlib import Path
from typing import Any

import pytest
import sympy

from running import steplaw
from steplaw.derivation import derive
from steplaw.errors import CallError
from steplaw.faces import render
from steplaw.record import read

ROOT = Path(__file__).parents[1]
SOURCE = '''\
"""Transfer tables of the planning office. Importing this would fail."""

import no_such_module_of_the_office


def transfers(ports, n):
    found = 0
    for i in range(len(ports)):
        for j in range(i):
            if ports[i] < ports[j]:
                found += 1
    while n > 1:
        n //= 2
        found += 1
    return found


def waits(n):
    return 1 if n < 2 else waits(n - 1) + waits(n - 2)


def drains(boats):
    while boats:
        boats.pop()


def empty(n):
    seen = 0
    for i in range(n - 5):
        seen += 1
    return seen
'''


@pytest.fixture
def place(tmp_path: Path) -> Path:
    path = tmp_path / "tables.py"
    path.write_text(SOURCE)
    return path


def line_of(record: Any, number: int) -> Any:
    return next(x for x in record["lines"] if x["line"] == number)


def same(text: str, other: str) -> bool:
    return bool(sympy.simplify(sympy.sympify(text) - sympy.sympify(other)) == 0)


def test_nothing_is_imported_or_run(place: Path) -> None:
    before = set(sys.modules)
    record = derive(f"{place}:transfers")
    assert "tables" not in set(sys.modules) - before
    assert record["total"]["formula"]


def test_frequencies_are_formulas_in_sizes_and_unknowns(place: Path) -> None:
    record = derive(f"{place}:transfers")
    frequency = line_of(record, 10)["frequency"]
    assert frequency["grade"] == "proved"
    assert same(frequency["formula"], "len_ports**2/2 - len_ports/2")
    (unknown,) = record["unknowns"]
    assert (unknown["line"], unknown["least"]) == (10, "0")
    assert same(unknown["most"], "len_ports**2/2 - len_ports/2")
    assert line_of(record, 11)["frequency"]["formula"] == unknown["name"]
    assert record["total"]["grade"] == "exact"
    assert {s["text"] for s in record["sizes"]} == {"len(ports)", "n"}


def test_halving_gives_the_floor_of_a_logarithm(place: Path) -> None:
    formula = sympy.sympify(line_of(derive(f"{place}:transfers"), 13)["frequency"]["formula"])
    n = sympy.Symbol("n")
    for size in (2, 3, 4, 7, 8, 1000):
        assert formula.subs(n, size) == size.bit_length() - 1


def test_an_empty_range_runs_no_times(place: Path) -> None:
    formula = sympy.sympify(line_of(derive(f"{place}:empty"), 30)["frequency"]["formula"])
    n = sympy.Symbol("n")
    assert [formula.subs(n, k) for k in (0, 4, 5, 6, 9)] == [0, 0, 0, 1, 4]


def test_recursion_is_stated_as_a_recurrence(place: Path) -> None:
    record = derive(f"{place}:waits")
    assert record["total"]["formula"] is None
    assert record["total"]["grade"] == "open"
    told = [r["text"] for r in record["recurrences"]]
    assert told == ["waits(n) calls waits(n - 1)", "waits(n) calls waits(n - 2)"]


def test_what_could_not_be_derived_says_why(place: Path) -> None:
    record = derive(f"{place}:drains")
    assert [s["line"] for s in record["stopped_by"]] == [24]
    assert record["total"]["grade"] != "proved"


def test_the_record_keeps_to_its_schema(place: Path, tmp_path: Path) -> None:
    path = tmp_path / "record.json"
    derive(f"{place}:transfers").write(path)
    assert read(str(path))["schema"] == "steplaw.derive/1"


@pytest.mark.parametrize(
    "name", ["timetable.py:trios", "fleet.py:vessels_in_yard", "transfers.py:quickest"]
)
def test_samples_are_derived_in_the_terminal(name: str) -> None:
    if name.endswith("quickest"):
        source = (ROOT / "samples/ferry/transfers.py").read_text()
        name = "transfers.py:" + source.partition("\ndef ")[2].partition("(")[0]
    text = render(derive(f"{ROOT}/samples/ferry/{name}"), "terminal", 80)
    assert "Loop nest" in text
    assert max(map(len, text.splitlines())) <= 80


def test_json_alone_goes_to_standard_output() -> None:
    ended = steplaw("derive", "samples/ferry/timetable.py:trios", "--json", "-")
    assert json.loads(ended.out)["schema"] == "steplaw.derive/1"
    assert "Loop nest" in ended.err


@pytest.mark.parametrize(
    ("subject", "told"),
    [
        ("samples/ferry/timetable.py:trois", "did you mean"),
        ("no_such_module_at_all:f", "no such module"),
        ("math:sqrt", "math"),
    ],
)
def test_what_is_wrong_is_said_in_one_line(subject: str, told: str) -> None:
    with pytest.raises(CallError, match=told) as error:
        derive(subject)
    assert "\n" not in str(error.value)
