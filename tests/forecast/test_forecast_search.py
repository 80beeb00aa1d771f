from __future__ import annotations

import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from steplaw.forecast.domain import Domain, domains
from steplaw.forecast.search import largest

KINDS = st.sampled_from(["every", "even", "odd", "power"])


@given(st.integers(0, 40), KINDS)
@settings(max_examples=60, deadline=None)
def test_domains_count_their_sizes(first: int, kind: str) -> None:
    domain = Domain(first, kind)
    sizes = [n for n in range(300) if domain.holds(n)]
    assert [domain.size(k) for k in range(len(sizes))] == sizes
    for n in range(300):
        assert domain.count(n) == sum(size <= n for size in sizes)
        assert bool(domain.why_not("n", n)) != domain.holds(n)


@given(
    st.integers(0, 5),
    KINDS,
    st.integers(1, 40),
    st.lists(st.integers(0, 60), min_size=1, max_size=6),
)
@settings(max_examples=60, deadline=None)
def test_the_largest_size_that_fits_is_found_where_a_law_goes_up_and_down(
    first: int, kind: str, slope: int, period: list[int]
) -> None:
    domain, budget = Domain(first, kind), 3000

    def steps(n: int) -> int:
        return slope * n + period[n % len(period)]

    fitting = [n for n in range(3200) if domain.holds(n) and steps(n) <= budget]
    assert largest(lambda n: steps(n) <= budget, domain).size == (max(fitting, default=None))


def test_the_search_is_exact_far_out() -> None:
    found = largest(lambda n: n * n * n + 7 <= 10**48, Domain(0))
    assert found.size == 10**16 - 1
    assert not found.unlimited


def test_what_never_ends_and_what_never_begins() -> None:
    assert largest(lambda n: True, Domain(3)).unlimited
    assert largest(lambda n: False, Domain(3)).size is None
    assert largest(lambda n: n <= 3, Domain(3)).size == 3


@pytest.mark.parametrize(
    ("grade", "seen", "kind"),
    [
        ("exact", [1, 2, 4, 8, 16], "power"),
        ("exact", [2, 4, 6, 8], "even"),
        ("exact", [3, 5, 9], "odd"),
        ("exact", [1, 2, 3, 4], "every"),
        ("proved", [1, 2, 4, 8, 16], "every"),
    ],
)
def test_a_law_speaks_of_sizes_like_those_it_was_found_on(
    grade: str, seen: list[int], kind: str
) -> None:
    law = {"grade": grade, "holds_from": 1, "settled_by": seen[:-1], "checked_at": seen[-1:]}
    assert domains(law, ["n"])["n"] == Domain(1, kind)
