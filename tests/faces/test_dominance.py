"""Which term and which line dominates at which size."""

from __future__ import annotations

from fractions import Fraction

import sample_records
from hypothesis import given, settings
from hypothesis import strategies as st

from steplaw.faces import along as ways
from steplaw.faces.dominance import line_shares, term_shares
from steplaw.faces.notation import signed_terms
from steplaw.law import value


def with_law(formula: str) -> dict[str, object]:
    record = sample_records.cubic()
    record["figure"]["law"] = sample_records.law(formula)
    return record


@settings(max_examples=40, deadline=None)
@given(st.integers(1, 10**5), st.integers(1, 10**5), st.integers(1, 9))
def test_the_greatest_term_changes_where_the_terms_are_equal(
    constant: int, linear: int, square: int
) -> None:
    formula = f"{square}*n**2 - {linear}*n + {constant}"
    record = with_law(formula)
    (along,) = ways.ways(record)
    shares = term_shares(record, along)
    assert shares is not None and shares.bands[0][0] == 1
    terms = [lambda n: square * n * n, lambda n: linear * n, lambda n: constant]
    for first, part in shares.bands:
        at = [term(first) for term in terms]
        assert at[part] == max(at)
        if first > 1:
            before = [term(first - 1) for term in terms]
            assert max(before) > before[part] or before.index(max(before)) != part


def test_shares_add_up_to_one_at_every_size() -> None:
    record = sample_records.cubic()
    (along,) = ways.ways(record)
    for shares in (term_shares(record, along), line_shares(record, along)[0]):
        assert shares is not None
        assert all(abs(sum(column) - 1) < 1e-9 for column in zip(*shares.rows, strict=True))
    assert line_shares(record, along)[1] == [48]


@given(st.sampled_from(["n**3/6 - n/2 + 4", "-(n - 1)*-n/2 - -3", "-n/-2 + 2**n - 1", "-n"]))
def test_terms_add_up_to_the_formula(formula: str) -> None:
    for size in (1, 2, 7):
        parts = [value(text, {"n": size}) for text in signed_terms(formula)]
        assert sum(map(Fraction, parts)) == value(formula, {"n": size})


def test_a_grid_is_read_along_each_size_with_the_other_held() -> None:
    found = ways.ways(sample_records.grid())
    assert [(along.name, along.held, along.run) for along in found] == [
        ("n", {"m": 8}, (4, 8, 16)),
        ("m", {"n": 16}, (4, 8)),
    ]


def test_stops_rise_and_hold_both_ends() -> None:
    found = ways.stops(3, 12_345)
    assert found == sorted(set(found)) and (found[0], found[-1]) == (3, 12_345)
    assert set(range(3, 21)) <= set(found) and len(found) < 60


def test_a_line_has_its_share_of_all_steps_and_the_rest_never_leads() -> None:
    record = sample_records.cubic()
    for line in record["lines"]:
        line["steps"] = sample_records.law("n") if line["line"] in (44, 47) else None
    (along,) = ways.ways(record)
    shares, _ = line_shares(record, along)
    assert shares is not None and shares.labels[-1] == "elsewhere"
    for size, one, rest in zip(shares.sizes, shares.rows[0], shares.rows[-1], strict=True):
        assert abs(one - size / sample_records.steps_of(size)) < 1e-9
        assert abs(one * 2 + rest - 1) < 1e-9
    assert {part for _, part in shares.bands} == {0}
