"""Verdicts on two audits of one study."""

from __future__ import annotations

import math
from dataclasses import replace
from fractions import Fraction
from typing import Any

import pytest
from hypothesis import given
from hypothesis import strategies as st
from records import counts, law, record

from steplaw.law.evaluate import value
from steplaw.review.account import Figure
from steplaw.review.change import compare_figure
from steplaw.review.verdict import (
    BETTER,
    SAME,
    UNDECIDED,
    WORSE_COEFFICIENT,
    WORSE_ORDER,
    compare,
)


def kind(before: dict[str, Any], after: dict[str, Any], tolerance: Fraction | float = 0) -> str:
    return compare(before, after, tolerance).kind


@pytest.mark.parametrize(
    ("before", "after", "expected"),
    [
        ("3*n + 2", "3*n + 2", SAME),
        ("3*n + 2", "2 + 3*n", SAME),
        ("3*n + 2", "4*n + 2", WORSE_COEFFICIENT),
        ("3*n + 2", "2*n + 2", BETTER),
        ("3*n + 2", "3*n + 3", WORSE_COEFFICIENT),
        ("3*n + 2", "3*n + 1", BETTER),
        ("3*n + 2", "n**2", WORSE_ORDER),
        ("n**2", "1000*n", BETTER),
        ("n*floor(log(n + 1)/log(2))", "n**2", WORSE_ORDER),
        ("n**2 + 9*n", "n**2 + 4*n + 9", BETTER),
        ("2**n", "n**9", BETTER),
        ("n**9", "2**n", WORSE_ORDER),
    ],
)
def test_exact_laws_are_compared_as_formulas(before: str, after: str, expected: str) -> None:
    verdict = compare(record(before), record(after))
    assert verdict.kind == expected
    assert verdict.holds == (expected in (SAME, BETTER))


COEFFICIENTS = st.lists(st.integers(0, 9), min_size=1, max_size=4)


def polynomial(c: list[int]) -> str:
    return " + ".join(f"{a}*n**{k}" for k, a in enumerate(c))


def trimmed(c: list[int]) -> list[int]:
    while len(c) > 1 and c[-1] == 0:
        c = c[:-1]
    return c


@given(COEFFICIENTS, COEFFICIENTS, st.sampled_from([Fraction(0), Fraction(1, 10), Fraction(1, 2)]))
def test_polynomials_against_the_order_of_their_coefficients(
    a: list[int], b: list[int], tolerance: Fraction
) -> None:
    """For large n, polynomials are ordered as their coefficients are, from the highest down."""
    a, b = trimmed(a), trimmed(b)
    found = kind(record(polynomial(a)), record(polynomial(b)), tolerance)
    if a == b:
        assert found == SAME
    elif len(a) != len(b):
        assert found == (WORSE_ORDER if len(b) > len(a) else BETTER)
    elif a[-1] != b[-1]:
        expected = BETTER if b[-1] < a[-1] else WORSE_COEFFICIENT
        assert found == (SAME if a[-1] < b[-1] <= a[-1] * (1 + tolerance) else expected)
    elif tolerance == 0:
        # 64, the largest size, is beyond every crossing of coefficients of one digit.
        assert found == (BETTER if b[::-1] < a[::-1] else WORSE_COEFFICIENT)


def test_native_visits_alone_make_a_worse_order() -> None:
    verdict = compare(record("13*n + 7", "n"), record("13*n + 7", "n**2/2 - n/2"))
    assert verdict.kind == WORSE_ORDER and verdict.figure == "native"
    assert [c.kind for c in verdict.changes] == [SAME, WORSE_ORDER, WORSE_ORDER]
    beside_steps_of_that_order = compare(record("n**2", "n"), record("n**2", "n**2"))
    assert beside_steps_of_that_order.kind == WORSE_ORDER
    assert beside_steps_of_that_order.figure == "native"


def test_work_that_moves_into_c_is_no_loss() -> None:
    verdict = compare(record("8*n**2", "0"), record("5*n", "n**2"))
    assert verdict.kind == BETTER
    assert any("native rose" in note for note in verdict.notes)


def test_constant_native_visits_are_no_other_order_than_none() -> None:
    assert kind(record("n", "0"), record("n", "5")) == WORSE_COEFFICIENT
    assert kind(record("n", "5"), record("n", "0")) == BETTER
    assert kind(record("n", "0"), record("n", "n")) == WORSE_ORDER


def test_a_tolerance_forgives_a_coefficient_and_no_order() -> None:
    assert kind(record("100*n"), record("102*n"), Fraction(1, 50)) == SAME
    assert kind(record("100*n"), record("103*n"), 0.02) == WORSE_COEFFICIENT
    assert kind(record("100*n"), record("n**2"), Fraction(1, 2)) == WORSE_ORDER


def fitted(coefficient: float, term: str, spread: float = 0.02) -> dict[str, Any]:
    low, high = coefficient * (1 - spread), coefficient * (1 + spread)
    terms = [{"term": term, "coefficient": coefficient, "low": low, "high": high}]
    return law(f"{coefficient}*{term}", "fitted", details={"terms": terms})


def noisy(formula: str, sign: int, share: float = 0.01) -> Any:
    count = counts(formula)
    return lambda n: count(n) + (sign * (-1) ** n.bit_length()) * int(count(n) * share)


def test_statistical_laws_on_equal_inputs() -> None:
    before = record((fitted(6.0, "n**2"), noisy("6*n**2", 1)))
    again = record((fitted(6.1, "n**2"), noisy("6*n**2", 1)))
    assert compare(before, again).changes[0].why == "every count is the same"
    slightly = record((fitted(6.0, "n**2"), lambda n: noisy("6*n**2", 1)(n) + n))
    assert kind(before, slightly) == WORSE_COEFFICIENT
    assert kind(before, slightly, Fraction(1, 10)) == SAME
    shaken = record((fitted(6.0, "n**2"), noisy("6*n**2", -1)))
    verdict = compare(before, shaken)
    assert verdict.changes[0].kind == SAME and "overlap" in verdict.changes[0].why
    far = record((fitted(7.0, "n**2"), noisy("6*n**2", -1)))
    assert compare(before, far).changes[0].kind == WORSE_COEFFICIENT


def test_a_fitted_order_counts_only_where_the_counts_drift_as_well() -> None:
    before = record((fitted(6.0, "n**2"), noisy("6*n**2", 1)))
    other_fit = record((fitted(1.5, "n**2*log(n)"), lambda n: noisy("6*n**2", 1)(n) + 1))
    assert compare(before, other_fit).changes[0].kind == WORSE_COEFFICIENT
    grown = record((fitted(1.0, "n**2*log(n)"), lambda n: int(n * n * 6 * math.log(n + 2))))
    assert compare(before, grown).changes[0].kind == WORSE_ORDER
    assert compare(grown, before).changes[0].kind == BETTER


def test_open_laws_are_judged_by_counts() -> None:
    before = record((law(None), counts("6*n**2")))
    assert kind(before, record((law(None), counts("6*n**2")))) == SAME
    assert kind(before, record((law(None), counts("7*n**2")))) == WORSE_COEFFICIENT
    assert kind(before, record((law(None), counts("5*n**2")))) == BETTER
    assert kind(before, record((law(None), counts("n**3")))) == WORSE_ORDER
    between = law(None, details={"undecided": ["n**3", "n**3*log(n)"]})
    assert kind(before, record((between, counts("n**3")))) == WORSE_ORDER
    assert kind(record("6*n**2"), record((between, counts("n**3")))) == WORSE_ORDER


def test_open_laws_without_a_size_in_both_are_undecided() -> None:
    before = record((law(None), counts("6*n**2")), sizes=(10, 20))
    after = record((law(None), counts("6*n**2")), sizes=(11, 21))
    verdict = compare(before, after)
    assert verdict.changes[0].kind == UNDECIDED and not verdict.holds


def test_another_feed_takes_counts_out_of_the_comparison() -> None:
    before = record((law(None), counts("6*n**2")))
    verdict = compare(before, record((law(None), counts("6*n**2")), feed="2*n"))
    assert verdict.kind == UNDECIDED
    assert "the feed is another one than before" in verdict.notes
    assert compare(record("n"), record("n", feed="2*n")).kind == SAME


def test_another_python_version_is_told_apart_from_other_code() -> None:
    classes = {"comparison": "n", "call": "2*n", "iteration": "n + 1"}
    before = record("13*n + 7", "n", operations=classes)
    upgraded = record("11*n + 5", "n", operations=classes, python="3.13.1")
    verdict = compare(before, upgraded)
    assert verdict.kind == SAME
    assert {c.figure for c in verdict.changes} == {*classes, "native", "operations"}
    assert verdict.about_python is not None and "3.11 and is 3.13" in verdict.about_python
    patched = record("13*n + 7", "n", operations=classes, python="3.11.9")
    assert compare(before, patched).changes[0].figure == "steps"

    slower = {**classes, "comparison": "n**2"}
    worse = compare(before, record("9*n", "n", operations=slower, python="3.12.0"))
    assert worse.kind == WORSE_ORDER and worse.figure == "comparison"
    scan = compare(before, record("9*n", "n**2/2 - n/2", operations=classes, python="3.12.0"))
    assert scan.kind == WORSE_ORDER and scan.figure == "native"
    new = compare(before, record("9*n", "n", operations={**classes, "build": "n"}, python="3.12.0"))
    assert new.kind == WORSE_ORDER and new.figure == "build"
    traded = {"comparison": "n", "call": "n", "iteration": "n + 1", "build": "1"}
    gain = compare(before, record("9*n", "n", operations=traded, python="3.12.0"))
    assert gain.kind == BETTER and "build rose" in gain.notes[-1]


def test_a_verdict_is_plain_json() -> None:
    import json

    found = compare(record("3*n"), record("4*n + 2")).as_json()
    assert json.loads(json.dumps(found, allow_nan=False)) == found
    assert found["changes"][0]["ratio"] == "4/3"
    assert found["changes"][0]["counted"] == {"at": {"n": 64}, "before": 192, "after": 258}
    assert compare(record("n"), record("n**2")).as_json()["changes"][0]["ratio"] is None


def in_two_sizes(formula: str) -> Figure:
    grid = [(("n", n), ("m", m)) for n in (0, 1, 2, 4, 8) for m in (0, 1, 2, 4, 8)]
    counted = {size: Fraction(value(formula, dict(size))) for size in grid}
    evidence = [[x for _, x in size] for size in grid]
    own = law(formula, settled_by=evidence, checked_at=[], holds_from=[0, 0])
    return Figure(own, counted, ("n", "m"))


@pytest.mark.parametrize(
    ("before", "after", "expected"),
    [
        ("3*m*n + 2*n", "2*n + 3*n*m", SAME),
        ("3*m*n + 2*n", "3*m**2*n + 2*n", WORSE_ORDER),
        ("n**2", "m*n", WORSE_ORDER),
        ("n**2", "n**2 + m*n", WORSE_ORDER),
        ("n**2 + m*n", "n**2", BETTER),
        ("3*m*n", "4*m*n", WORSE_COEFFICIENT),
        ("m + n", "m + 2*n", WORSE_COEFFICIENT),
        ("m + 2*n", "m + n", BETTER),
    ],
)
def test_each_of_several_sizes_is_looked_at(before: str, after: str, expected: str) -> None:
    change = compare_figure("steps", in_two_sizes(before), in_two_sizes(after), Fraction(0))
    assert change.kind == expected, change.why


def test_other_size_names_are_not_compared() -> None:
    change = compare_figure(
        "steps", in_two_sizes("n"), replace(in_two_sizes("n"), names=("n", "k")), Fraction(0)
    )
    assert change.kind == UNDECIDED and change.why == "sizes were n and m, now n and k"
