from __future__ import annotations

import json
import math
import random
from pathlib import Path
from typing import Any

import pytest
from stored_audits import clock, stored

from steplaw.commands import run
from steplaw.faces import render
from steplaw.forecast import forecast
from steplaw.record import read

STEPS = [1000 * 2**k for k in range(10)]


def cubic(n: int, _: random.Random) -> int:
    return n * (n - 1) * (n - 2) // 6 + 7 * n + 5


def drawn(n: int, rng: random.Random) -> int:
    return 6 * n * n + 30 * n + round(n**1.4 * rng.uniform(-1, 1))


def unruly(n: int, rng: random.Random) -> int:
    return rng.randrange(1, 10**6)


def law(formula: str | None, grade: str = "exact", **more: Any) -> dict[str, Any]:
    empty: dict[str, Any] = {
        "formula": formula,
        "leading": formula,
        "grade": grade,
        "holds_from": 0,
        "settled_by": [0, 1, 2],
        "checked_at": [3, 4],
        "error": 0.0,
        "note": "",
    }
    return empty | more


def test_an_exact_law_gives_the_number() -> None:
    foretold = forecast(stored(cubic), at=[10**7, "1e9"])
    foretold.validate()
    first, second = foretold["at"]
    assert first["figures"]["steps"]["value"] == cubic(10**7, random.Random())
    assert first["figures"]["steps"]["grade"] == "exact"
    assert first["figures"]["steps"]["interval"] is None
    assert first["beyond"] == pytest.approx(10**7 / 1024, rel=1e-4)
    assert second["figures"]["steps"]["value"] == cubic(10**9, random.Random())
    assert first["seconds"] is None
    assert first["why_no_seconds"] == "the clock check was not made"


def test_an_exact_law_of_drawn_inputs_says_what_it_cannot_know() -> None:
    (entry,) = forecast(stored(cubic, draws=3), at=10**4)["at"]
    told = entry["figures"]["steps"]
    assert (told["grade"], told["value"]) == ("exact", cubic(10**4, random.Random()))
    assert "none of them took" in told["why"]


def test_a_fitted_law_gives_an_interval() -> None:
    record = stored(drawn, draws=5)
    assert record["figure"]["law"]["grade"] == "fitted"
    (entry,) = forecast(record, at=8192)["at"]
    told = entry["figures"]["steps"]
    assert told["grade"] == "fitted"
    low, high = told["interval"]
    truth = 6 * 8192**2 + 30 * 8192
    assert low < truth < high
    assert high < 1.5 * low
    assert low <= told["mean_interval"][0] <= told["mean_interval"][1] <= high


def test_an_open_law_gives_none_but_a_proved_bound() -> None:
    record = stored(unruly)
    assert record["figure"]["law"]["grade"] == "open"
    record["laws"]["bound"] = law("10**6*n + 3", "proved")
    foretold = forecast(record, at=10**6, within="1e9steps")
    foretold.validate()
    told = foretold["at"][0]["figures"]["steps"]
    assert told["value"] is told["interval"] is None
    assert told["bound"] == 10**12 + 3
    assert told["why"].startswith("the law is open")
    assert foretold["within"][0]["sure"] is None
    assert foretold["within"][0]["why"].startswith("the law is open")


def test_what_was_counted_below_the_law_is_given_and_nothing_else() -> None:
    record = stored(lambda n, _: 99 if n == 2 else 5 * n, law=law("5*n", holds_from=4))
    told = [e["figures"]["steps"] for e in forecast(record, at=[2, 4, 5])["at"]]
    assert [t["value"] for t in told] == [99, 20, 25]
    record = stored(cubic, sizes=(0, 1, 8, 16), law=law("5*n", holds_from=4))
    (entry,) = forecast(record, at=3)["at"]
    assert entry["figures"]["steps"]["value"] is None
    assert entry["figures"]["steps"]["why"] == "the law holds from n = 4 on"


def test_a_law_seen_at_powers_of_two_is_asked_there() -> None:
    found = law("n*log(n)/log(2) + 3", settled_by=[1, 2, 4, 8], checked_at=[16, 32], holds_from=1)
    record = stored(lambda n, _: n, sizes=(1, 2, 4, 8, 16, 32), law=found)
    foretold = forecast(record, at=[1000, 1024], within="20000steps")
    between, power = (e["figures"]["steps"] for e in foretold["at"])
    assert between["value"] is None
    assert "powers of two alone: ask at n = 512 or 1024" in between["why"]
    assert power["value"] == 10243
    assert foretold["within"][0]["sure"]["at"] == {"n": 1024}


def test_the_largest_size_within_steps_is_exact() -> None:
    (entry,) = forecast(stored(cubic), within="1e12steps")["within"]
    size = entry["sure"]["at"]["n"]
    assert entry["sure"] == entry["perhaps"]
    assert cubic(size, random.Random()) <= 10**12 < cubic(size + 1, random.Random())


def test_a_fitted_law_gives_a_range_of_sizes() -> None:
    (entry,) = forecast(stored(drawn, draws=5), within="1e9steps")["within"]
    sure, perhaps = entry["sure"]["at"]["n"], entry["perhaps"]["at"]["n"]
    assert sure < math.sqrt(1e9 / 6) < perhaps < 1.5 * sure


def test_time_has_an_interval_and_a_search() -> None:
    record = stored(cubic, clock=clock([2.0] * 10, STEPS))
    foretold = forecast(record, at=300, within=["2s", "1h"])
    foretold.validate()
    low, high = foretold["at"][0]["seconds"]
    assert low < cubic(300, random.Random()) * 2e-9 < high < 2 * low
    for entry, limit in zip(foretold["within"], (2, 3600), strict=True):
        again = forecast(record, at=[entry["sure"]["at"]["n"], entry["sure"]["at"]["n"] + 1])["at"]
        assert again[0]["seconds"][1] <= limit < again[1]["seconds"][1]
        assert entry["perhaps"]["at"]["n"] > entry["sure"]["at"]["n"]


def test_native_visits_weigh_by_their_rate() -> None:
    held = clock([2.0] * 10, STEPS) | {"held": "work", "visit_rate": "1/4"}
    record = stored(lambda n, _: 10 * n, clock=held)
    record["laws"]["native"] = law("n**2", "exact")
    low, high = forecast(record, at=10**6)["at"][0]["seconds"]
    whole = (10**7 + 10**12 / 4) * 2e-9
    assert low < whole < high
    record["laws"]["native"] = law(None, "open")
    foretold = forecast(record, at=10**6, within="2s")
    assert "native visits" in foretold["at"][0]["why_no_seconds"]
    assert "native visits" in foretold["within"][0]["why"]


def test_several_sizes_are_named_and_held() -> None:
    grid = [(n, m) for n in range(9) for m in range(9)]
    record = stored(lambda n, m, _: 5 * n * m + 3 * n + 2, grid, names=("n", "m"))
    assert record["figure"]["law"]["grade"] == "exact"
    foretold = forecast(record, at={"n": 1000, "m": 2000}, within="1e9steps", hold="m=100")
    foretold.validate()
    assert foretold["at"][0]["figures"]["steps"]["value"] == 5 * 1000 * 2000 + 3002
    assert foretold["at"][0]["beyond"] == 250
    assert foretold["within"][0]["sure"]["at"] == {"n": (10**9 - 2) // 503, "m": 100}


def test_numbers_too_long_are_told() -> None:
    foretold = forecast(stored(lambda n, _: 2**n, sizes=range(30)), at=10**7)
    foretold.validate()
    told = foretold["at"][0]["figures"]["steps"]
    assert told["value"] is None
    assert "over 1000 digits" in told["why"]
    foretold.to_json()


@pytest.fixture
def places(tmp_path: Path) -> dict[str, str]:
    made = {
        "whole": stored(cubic, clock=clock([2.0] * 10, STEPS)),
        "unclocked": stored(drawn, draws=5),
        "forecast": forecast(stored(cubic), at=5),
    }
    return {name: str(record.write(tmp_path / f"{name}.json")) for name, record in made.items()}


@pytest.mark.parametrize(
    ("words", "told"),
    [
        (["whole"], "nothing is asked for; give --at 10000000 or --within 2s"),
        (["whole", "--at", "-3"], "--at -3: a size is not below 0; give 0 or more"),
        (["whole", "--at", "x"], "'x' is no number"),
        (["whole", "--at", "m=4"], "the law has no size 'm'"),
        (["whole", "--within", "2parsecs"], "there is no unit 'parsecs'"),
        (["whole", "--within", "-1s"], "it is not above 0"),
        (["whole", "--at", "4", "--hold", "n=3"], "--hold is for --within alone"),
        (["whole", "--at", "4", "--feed", "n"], "--feed is for a subject"),
        (["whole", "--at", "4", "--json", "/no/such/folder/x.json"], "cannot write"),
        (["unclocked", "--within", "2s"], "without a clock check nothing can be said"),
        (["forecast", "--at", "4"], "is no audit but a steplaw.forecast/1 record"),
        (["missing", "--at", "4"], "cannot read"),
    ],
)
def test_bad_input_is_told_in_one_line(
    words: list[str], told: str, places: dict[str, str], capsys: pytest.CaptureFixture[str]
) -> None:
    place = places.get(words[0], "missing.json")
    assert run(["forecast", place, *words[1:]]) == 2
    out, err = capsys.readouterr()
    assert out == ""
    assert told in err
    assert err.startswith("steplaw: ")
    assert err.count("\n") == 1


def test_what_a_subject_cannot_be_asked_is_told_before_it_is_run(
    capsys: pytest.CaptureFixture[str],
) -> None:
    for words in (["--at", "m=3"], ["--within", "2s", "--no-clock"], ["--within", "2"]):
        assert run(["forecast", "samples/ferry/cargo.py:berth_fillings", *words]) == 2
        assert capsys.readouterr().err.count("\n") == 1


def test_a_record_is_read_and_shown_again(
    places: dict[str, str], tmp_path: Path, capsys: pytest.CaptureFixture[str]
) -> None:
    target = tmp_path / "out.json"
    words = ["forecast", places["whole"], "--at", "1e7", "--within", "2s", "--json", str(target)]
    assert run(words) == 0
    shown = capsys.readouterr().out
    record = read(target)
    assert record["schema"] == "steplaw.forecast/1"
    assert run(["show", str(target)]) == 0
    assert capsys.readouterr().out == shown
    assert run(["show", str(target), "--as", "markdown"]) == 0
    assert "166 666 616 666 740 000 005" in capsys.readouterr().out
    assert run(["show", str(target), "--as", "page"]) == 2
    assert "a forecast has no page face" in capsys.readouterr().err
    assert "n': 10000000" in repr(record)


def test_the_sheet_fits_and_says_what_it_must(places: dict[str, str]) -> None:
    record = read(places["unclocked"])
    foretold = forecast(record, at=[8192, 10**6], within="1e9steps")
    text = render(foretold, "terminal")
    assert max(map(len, text.splitlines())) <= 80
    for said in ("fitted", "95 in 100", "surely", "perhaps", "extrapolates", "worst-case"):
        assert said in text
    assert json.loads(render(foretold, "json")) == json.loads(foretold.to_json())


def test_hostile_text_shows_as_it_is() -> None:
    record = stored(cubic)
    record["subject"]["name"] = "\x1b[31m<script>alert(1)</script>|`x`"
    record["run_again"] = "steplaw audit `|\x1b]0;x\x07"
    foretold = forecast(record, at=10, within="5steps")
    for face in ("terminal", "markdown"):
        text = render(foretold, face)
        assert "\x1b" not in text and "\x07" not in text
    assert "<script>" not in render(foretold, "markdown")
