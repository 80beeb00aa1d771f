from __future__ import annotations

import json
import subprocess
import sys
from fractions import Fraction

import pytest
import sympy
from law_helpers import PLAN, harmonic, observe

from steplaw.law import Observation, find_law


def test_importing_the_engine_loads_no_heavy_library():
    code = "import sys, steplaw.law; print([m for m in ('numpy', 'sympy') if m in sys.modules])"
    out = subprocess.run([sys.executable, "-c", code], capture_output=True, text=True, check=True)
    assert out.stdout.strip() == "[]"


def test_nothing_observed():
    assert find_law([]).grade == "open"


def test_the_order_of_observations_does_not_matter():
    data = observe(lambda n: n * n // 4)
    assert find_law(data[::-1]) == find_law(data)


def test_observations_of_one_size_are_pooled():
    data = observe(lambda n: 3 * n)
    assert find_law([*data, *data]) == find_law(data)
    differing = Observation((PLAN[5],), Fraction(99))
    assert find_law([*data, differing]).grade != "exact"


def test_whole_means_may_be_exact_although_the_counts_vary():
    def mean(n):
        return 2 * (n + 1) * harmonic(n) - 4 * n

    whole = [Observation((n,), mean(n), 24, Fraction(n), 0, n * n, whole=True) for n in range(9)]
    assert find_law(whole).grade == "exact"
    drawn = [Observation((n,), mean(n), 24, Fraction(n), 0, n * n) for n in range(9)]
    assert find_law(drawn).grade != "exact"


def test_the_size_has_the_name_it_was_given():
    law = find_law(observe(lambda n: n * (n // 2) + 3 * n), ("rows",))
    assert law.formula == "rows*floor(rows/2) + 3*rows"
    assert law.leading == "rows**2/2"
    assert "rows = 256" in law.note


@pytest.mark.parametrize(
    "function",
    [
        lambda n: n**3 - n,
        lambda n: n * n // 4,
        lambda n: n * n.bit_length(),
        lambda n: sum(n // k for k in range(1, n + 1)),
        lambda n: 7,
    ],
)
def test_a_law_is_plain_json_and_sympy_reads_it(function):
    law = find_law(observe(function))
    again = json.loads(json.dumps(law.as_json()))
    assert again["grade"] == law.grade
    for text in (law.formula, law.leading):
        assert sympy.sympify(text).free_symbols <= {sympy.Symbol("n")}


def test_values_too_large_for_floats():
    law = find_law(observe(lambda n: 3**n + n, range(80)))
    assert law.formula == "3**n + n"
    assert find_law(observe(lambda n: 10 ** (n * n), range(40))).grade == "open"
