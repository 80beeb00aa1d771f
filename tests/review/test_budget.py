"""Budgets as they are written and read back."""

from __future__ import annotations

import tomllib
from fractions import Fraction
from pathlib import Path
from typing import Any

import pytest
from hypothesis import given
from hypothesis import strategies as st
from records import counts, law, record

from steplaw.errors import CallError
from steplaw.review.account import account_of
from steplaw.review.budget import Budgets, entry_of, read_budgets, write_budgets
from steplaw.review.configuration import Configuration, NamedStudy
from steplaw.review.tomltext import key_text, value_text
from steplaw.review.verdict import SAME, WORSE_ORDER, compare_accounts

VALUES = st.recursive(
    st.text() | st.integers(-(2**62), 2**62) | st.booleans() | st.floats(allow_nan=False),
    lambda inner: st.lists(inner, max_size=3) | st.dictionaries(st.text(), inner, max_size=3),
    max_leaves=6,
)


@given(st.text(), VALUES)
def test_values_are_written_as_toml_reads_them(key: str, value: Any) -> None:
    assert tomllib.loads(f"{key_text(key)} = {value_text(value)}") == {key: value}


def named(name: str = "pairs") -> NamedStudy:
    settings = {"subject": "ferry/timetable.py:clashes", "sizes": "8..64"}
    return NamedStudy(name, settings, Fraction(0), Path("steplaw.toml"), Path())


def project(folder: Path) -> Configuration:
    return Configuration(folder / "steplaw.toml", folder, (named(),), folder / "laws.toml")


FITTED = law(
    "6.1*n**2",
    "fitted",
    details={"terms": [{"term": "n**2", "coefficient": 6.1, "low": 6.0, "high": 6.2}]},
)
OPEN = law(None, details={"undecided": ["n**2", "n**2*log(n)"]})


@pytest.mark.parametrize(
    "steps", ["3*n**2 - n/1 + 4", (FITTED, counts("6*n**2")), (OPEN, counts("6*n**2"))]
)
def test_a_budget_read_back_is_the_same_law(steps: Any, tmp_path: Path) -> None:
    classes = {"comparison": "n", "call": "2*n"}
    found = record(steps, "n", operations=classes)
    configuration = project(tmp_path)
    write_budgets(Budgets(configuration.budgets, {"pairs": entry_of(named(), found)}), ["pairs"])
    agreed = read_budgets(configuration).account("pairs")
    assert agreed is not None
    verdict = compare_accounts(agreed, account_of(found), Fraction(0))
    assert {c.kind for c in verdict.changes} == {SAME}
    assert {c.figure for c in verdict.changes} == {"steps", "native", "work"}
    upgraded = record(steps, "n", operations=classes, python="3.12.1")
    across = compare_accounts(agreed, account_of(upgraded), Fraction(0))
    assert {c.kind for c in across.changes} == {SAME} and across.figure == "comparison"
    scan = record(steps, "n**3", operations=classes)
    assert compare_accounts(agreed, account_of(scan), Fraction(0)).kind == WORSE_ORDER


def test_the_file_has_a_line_for_each_figure_in_a_fixed_order(tmp_path: Path) -> None:
    configuration = project(tmp_path)
    entry = entry_of(named(), record("3*n", "n", operations={"call": "2*n", "comparison": "n"}))
    entries = {"late": entry, "pairs": entry, "early": entry}
    write_budgets(Budgets(configuration.budgets, entries), ["early", "pairs"])
    text = configuration.budgets.read_text()
    assert list(tomllib.loads(text)) == ["early", "pairs", "late"]
    assert text.split("\n\n")[1:5] == [
        '[early]\nsubject = "ferry/timetable.py:clashes"\nsizes = "8..64"\nfeed = "n"\n'
        'figure = "steps"\npython = "3.11"\nlargest = { n = 64 }',
        '[early.laws]\nsteps = { law = "3*n", leading = "3*n", grade = "exact" }\n'
        'native = { law = "n", leading = "n", grade = "exact" }\n'
        'work = { law = "(3*n) + (n)", leading = "4*n", grade = "exact" }',
        '[early.classes]\ncomparison = { law = "n", leading = "n", grade = "exact" }\n'
        'call = { law = "2*n", leading = "2*n", grade = "exact" }',
        '[pairs]\nsubject = "ferry/timetable.py:clashes"\nsizes = "8..64"\nfeed = "n"\n'
        'figure = "steps"\npython = "3.11"\nlargest = { n = 64 }',
    ]


@pytest.mark.parametrize(
    ("text", "told"),
    [
        ("[pairs", "is not TOML"),
        ("pairs = 3\n", "pairs is no budget of a study"),
        ("[pairs]\nfeed = 'n'\n", "the budget of pairs cannot be read"),
        ("[pairs]\nlargest = 3\nlaws = 4\nclasses = {}\n", "the budget of pairs cannot be read"),
    ],
)
def test_a_broken_file_is_told_in_one_line(text: str, told: str, tmp_path: Path) -> None:
    configuration = project(tmp_path)
    assert read_budgets(configuration).account("pairs") is None
    configuration.budgets.write_text(text)
    with pytest.raises(CallError) as raised:
        read_budgets(configuration).account("pairs")
    assert told in str(raised.value) and "steplaw budget set" in str(raised.value)
