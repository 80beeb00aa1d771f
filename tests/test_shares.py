"""Shares of lines as the size grows without bound, against limits that sympy takes itself."""

from __future__ import annotations

from fractions import Fraction
from pathlib import Path
from typing import Any

import pytest
import sympy

import steplaw
from steplaw.dominance import dominance, share_limit
from steplaw.faces.reading import dominance as told
from steplaw.law.model import Law, Observation

ROOT = Path(__file__).parents[1]
n = sympy.Symbol("n")


def law(formula: str | None, grade: Any = "exact") -> Law:
    return Law(formula, formula, grade if formula else "open")


@pytest.mark.parametrize(
    ("part", "whole"),
    [("8*n**3/3 - n", "23*n**3/6 + 7"), ("n**2", "n**3"), ("3*n*log(n)", "4*n*log(n) + n")],
)
def test_a_share_in_the_limit_is_the_one_that_sympy_takes(part: str, whole: str) -> None:
    limit = sympy.limit(sympy.sympify(part) / sympy.sympify(whole), n, sympy.oo)
    assert Fraction(share_limit(law(part), law(whole)) or 0) == Fraction(str(limit))


def test_what_is_not_known_has_no_share() -> None:
    assert share_limit(law(None), law("n")) is None
    assert share_limit(law("n"), law(None)) is None
    assert isinstance(share_limit(law("2.5*n", "fitted"), law("5*n")), float)


def observed(values: list[int]) -> list[Observation]:
    return [Observation((k,), Fraction(v)) for k, v in enumerate(values, 1)]


def test_the_line_that_leads_in_the_end_and_from_where() -> None:
    steps = {("f", 1): observed([9, 9, 9, 9]), ("f", 2): observed([1, 4, 9, 16])}
    found = dominance({("f", 1): 0, ("f", 2): "2/3"}, steps)
    assert found == {"file": "f", "line": 2, "share": "2/3", "from": 3}
    later = dominance({("f", 1): "2/3", ("f", 2): 0}, steps)
    assert later is not None
    assert later["from"] is None
    assert dominance({("f", 1): "1/2", ("f", 2): "1/2"}, steps) is None
    assert dominance({("f", 1): None, ("f", 2): 1}, steps) is None


def test_the_triple_loops_inner_line_tends_to_its_share() -> None:
    record = steplaw.audit(
        f"{ROOT / 'samples/ferry/timetable.py'}:trios",
        feed=f"{ROOT / 'samples/feeds.py'}:even_sailings",
        clock=False,
    )
    expected = {
        x["line"]: sympy.limit(
            sympy.sympify(x["steps"]["formula"]) / sympy.sympify(record.laws.steps.formula),
            n,
            sympy.oo,
        )
        for x in record["lines"]
    }
    for x in record["lines"]:
        assert Fraction(x["share_limit"]) == Fraction(str(expected[x["line"]]))
    assert record.dominance.line == 29
    assert f"line 29 tends to {round(100 * float(expected[29]))} %" in told(record)
