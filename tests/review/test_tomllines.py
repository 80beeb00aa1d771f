"""Lines of keys: for any table, the line found holds the key's name."""

from __future__ import annotations

import tomllib

from hypothesis import given
from hypothesis import strategies as st

from steplaw.review.tomllines import line_of, lines_of_keys

NAMES = st.sampled_from(["a", "b-1", "sizes", '"x y"', '"q.r"'])
VALUES = st.sampled_from(
    [
        "1",
        "'t'",
        '"""\none\n[not.a.table]\nb = 2\n"""',
        "[\n 1,\n 2, # ]\n]",
        "{ k = 1 }",
        "'''\n'''",
    ]
)


@given(
    st.lists(
        st.tuples(NAMES, st.lists(st.tuples(NAMES, VALUES), unique_by=lambda kv: kv[0])),
        unique_by=lambda table: table[0],
        max_size=4,
    )
)
def test_each_key_is_found_on_the_line_that_it_was_written_on(
    tables: list[tuple[str, list[tuple[str, str]]]],
) -> None:
    lines: list[str] = []
    expected = {}
    for table, keys in tables:
        lines += ["", "# comment", f"[tool.{table}]"]
        expected["tool", table.strip('"')] = len(lines)
        for key, value in keys:
            expected["tool", table.strip('"'), key.strip('"')] = len(lines) + 1
            lines += f"{key} = {value}".split("\n")
    text = "\n".join(lines)
    tomllib.loads(text)
    found = lines_of_keys(text)
    assert {path: found[path] for path in expected} == expected
    for path, number in expected.items():
        assert line_of(found, [*path, "no such key"]) == found.get((*path, "no such key"), number)


def test_dotted_keys_and_tables_in_lines() -> None:
    text = "a.b.c = 1\na.b.d = 2\nx = { y = { z = 1 } }\n[[t]]\nu = 1\n[[t]]\nu = 2\n"
    found = lines_of_keys(text)
    assert found["a", "b"] == 1 and found["a", "b", "d"] == 2
    assert found["x", "y", "z"] == 3
    assert found["t",] == 4 and found["t", "u"] == 5
    assert line_of(found, ["none"]) == 1
