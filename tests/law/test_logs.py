from __future__ import annotations

from math import isqrt

import pytest
from law_helpers import FROM_ONE, gives, observe

from steplaw.law import find_law, value
from steplaw.law.logs import ceiling_log, floor_log

LONG = (*range(1, 14), 16, 21, 32, 50, 64, 100, 128, 243, 256, 999, 1000, 1001, 10000, 12345)


@pytest.mark.parametrize("base", [2, 3, 4, 5, 10])
def test_rounded_logs_by_their_definition(base):
    for n in (*range(1, 300), base**9 - 1, base**9, base**9 + 1):
        k = floor_log(n, base)
        assert base**k <= n < base ** (k + 1)
        c = ceiling_log(n, base)
        assert base**c >= n and (c == 0 or base ** (c - 1) < n)


@pytest.mark.parametrize(
    ("name", "function"),
    [
        ("halvings", lambda n: n.bit_length()),
        ("doublings", lambda n: (n - 1).bit_length()),
        ("halvings beside a loop", lambda n: 3 * n + 7 * n.bit_length()),
        ("n halvings", lambda n: n * n.bit_length() + 2),
        ("sum of halvings", lambda n: sum(k.bit_length() for k in range(1, n + 1))),
        ("copies of a doubled table", lambda n: 2 ** (n - 1).bit_length() - 1),
        ("nested halvings", lambda n: n.bit_length() * (n.bit_length() - 1) // 2),
        ("a square and halvings", lambda n: n * n + 5 * n.bit_length() + 1),
        ("half and halvings", lambda n: n // 2 + 4 * n.bit_length()),
    ],
)
def test_halving_loops(name, function):
    law = find_law(observe(function, FROM_ONE))
    assert law.grade == "exact", name
    assert gives(law, function, [*FROM_ONE, 511, 512, 513, 1000])


def test_merge_sort_recurrence():
    """T(n) = T(floor(n/2)) + T(ceil(n/2)) + n - 1 has n ceil(lg n) - 2**ceil(lg n) + 1.

    Knuth, The Art of Computer Programming, vol. 3, 5.3.1 (3).
    """
    known = {1: 0}

    def function(n):
        if n not in known:
            known[n] = function(n // 2) + function(n - n // 2) + n - 1
        return known[n]

    law = find_law(observe(function, FROM_ONE))
    assert law.formula == "n*ceiling(log(n)/log(2)) - 2**ceiling(log(n)/log(2)) + 1"
    assert law.leading == "n*log(n)/log(2)"
    assert value(law, 2**40) == 40 * 2**40 - 2**40 + 1


@pytest.mark.parametrize(
    "function",
    [
        lambda n: isqrt(n) + 2,
        lambda n: n * isqrt(n),
        lambda n: sum(isqrt(k) for k in range(1, n + 1)),
        lambda n: 3 * n + isqrt(n) - 1,
    ],
)
def test_square_roots(function):
    law = find_law(observe(function, FROM_ONE))
    assert law.grade == "exact"
    assert gives(law, function, [*FROM_ONE, 399, 400, 401])


def test_digits_need_sizes_with_several_numbers_of_digits():
    assert find_law(observe(lambda n: len(str(n)), FROM_ONE)).grade == "open"
    law = find_law(observe(lambda n: len(str(n)), LONG))
    assert law.formula == "floor(log(n)/log(10)) + 1"
    assert value(law, 10**30) == 31
    assert value(law, 10**30 - 1) == 30
