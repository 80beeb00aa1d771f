"""Numbers, sizes, times and untrusted text."""

from __future__ import annotations

import unicodedata

import pytest
from hypothesis import given
from hypothesis import strategies as st

from steplaw.faces.text import clean, duration, number, percent, size, sizes


@given(st.text())
def test_clean_text_has_no_control_and_no_format_character(text: str) -> None:
    shown = clean(text)
    assert not [c for c in shown if unicodedata.category(c) in ("Cc", "Cf", "Cs", "Zl", "Zp")]
    assert clean(text, unicode=False).isascii()
    shown.encode("utf-8")


def test_plain_text_stays() -> None:
    assert clean("naïve café — 船") == "naïve café — 船"
    # The bidi controls of "Trojan Source" (Boucher & Anderson 2021, CVE-2021-42574).
    trojan = "‪‫‬‭‮⁦⁧⁨⁩"
    assert clean(trojan) == "".join(f"\\u{ord(c):04x}" for c in trojan)


@pytest.mark.parametrize(
    ("value", "shown"),
    [
        (0, "0"),
        (1234567, "1 234 567"),
        ("23/6", "3.8333"),
        ("12765/10", "1 276.5"),
        ("1000001/10", "100 000"),
        (10**40, "1.000e40"),
        (-(10**40), "-1.000e40"),
        (None, "-"),
    ],
)
def test_numbers(value: object, shown: str) -> None:
    assert number(value) == shown


def test_shares_never_claim_all_or_nothing() -> None:
    assert [percent(x) for x in (0, 0.001, 0.5, 0.9999, 1)] == [
        "0 %",
        "<1 %",
        "50 %",
        "99.9 %",
        "100 %",
    ]


def test_times_have_the_unit_that_suits() -> None:
    assert [duration(x) for x in (2.5, 0.0123, 4.2e-5, 3e-8, 0)] == [
        "2.5 s",
        "12.3 ms",
        "42 µs",
        "30 ns",
        "0 ns",
    ]
    assert duration(4.2e-5, unicode=False) == "42 us"


def test_sizes_in_every_shape_of_the_record() -> None:
    assert sizes([0, 1, 2, 3, 8, 16], ["n"]) == "n = 0..3, 8, 16"
    assert sizes([{"n": 4}, {"n": 5}]) == "n = 4, 5"
    assert sizes([[4], [5], [6]], ["k"]) == "k = 4..6"
    assert sizes([[4, 2], [5, 2]], ["n", "m"]) == "(n = 4, m = 2), (n = 5, m = 2)"
    assert sizes([]) == "none"
    assert sizes(list(range(0, 200, 2)), ["n"]).endswith("and 84 more to 198")
    assert size({"n": 4, "m": 2}) == "n = 4, m = 2"
    assert size([4, 2]) == "(4, 2)"
