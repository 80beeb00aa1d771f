"""Comparisons of audits: what is claimed, and that runs on both sides of a crossing bear it out."""

from __future__ import annotations

import json
import random
import subprocess
import sys
from pathlib import Path
from typing import Any

import pytest

import steplaw
from steplaw.commands import run
from steplaw.faces import render
from steplaw.record import AuditRecord, read
from steplaw.versus import versus

ROOT = Path(__file__).parents[2]
CUBIC, FAST = (f"{ROOT}/samples/ferry/timetable.py:{name}" for name in ("trios", "trios_fast"))
FEED = f"{ROOT}/samples/feeds.py:even_sailings"


@pytest.fixture(scope="module")
def audits() -> tuple[AuditRecord, AuditRecord]:
    """Give the cubic sample and its faster version, audited on one feed."""
    given: dict[str, Any] = {"feed": FEED, "sizes": "8,16,32", "clock": False, "processes": 1}
    return steplaw.audit(CUBIC, **given), steplaw.audit(FAST, **given)


COUNT = """
import json, sys
sys.path.insert(0, sys.argv[1])
import steplaw
from feeds import even_sailings
from ferry.timetable import trios, trios_fast
print(json.dumps({
    size: [steplaw.count(f, even_sailings(size)).steps for f in (trios, trios_fast)]
    for size in json.loads(sys.argv[2])
}))
"""


def counted(sizes: set[int]) -> dict[int, list[int]]:
    """Count both at some sizes, in a process with little else in it to be rewritten."""
    argv = [sys.executable, "-c", COUNT, str(ROOT / "samples"), json.dumps(sorted(sizes))]
    out = subprocess.run(argv, capture_output=True, text=True, check=True).stdout
    return {int(size): steps for size, steps in json.loads(out).items()}


@pytest.fixture
def stored(audits: tuple[AuditRecord, AuditRecord], tmp_path: Path) -> tuple[Path, Path]:
    paths = tmp_path / "cubic.json", tmp_path / "fast.json"
    for record, path in zip(audits, paths, strict=True):
        record.write(path)
    return paths


def changed(record: AuditRecord, **law: Any) -> AuditRecord:
    """Give the audit with another law for its figure."""
    copy = json.loads(record.to_json())
    copy["figure"]["law"] |= law
    return AuditRecord(copy)


def test_runs_just_below_and_just_above_each_crossing_bear_it_out(
    audits: tuple[AuditRecord, AuditRecord],
) -> None:
    compared = versus(*audits)
    compared.validate()
    told = compared["figures"]["steps"]
    assert told["grade"] == "exact"
    assert told["searched_to"] is None
    assert len(told["crossings"]) == 2
    steps = counted({c[key] for c in told["crossings"] for key in ("after", "at")})
    for crossing in told["crossings"]:
        assert crossing["sharp"]
        assert not crossing["extrapolates"]
        for size, less in ((crossing["after"], None), (crossing["at"], crossing["less"])):
            a, b = steps[size]
            assert ("a" if a < b else "b") == (less or {"a": "b", "b": "a"}[crossing["less"]])


def test_the_ratio_of_the_leading_terms(audits: tuple[AuditRecord, AuditRecord]) -> None:
    one, other = (changed(r, grade="exact") for r in audits)
    one["figure"]["law"] |= {"formula": "3*n**2 + n", "leading": "3*n**2"}
    other["figure"]["law"] |= {"formula": "6*n**2 + 9", "leading": "6*n**2"}
    assert versus(one, other)["figures"]["steps"]["ratio"] == {"formula": "1/2", "limit": "1/2"}
    ratio = versus(*audits)["figures"]["steps"]["ratio"]
    assert ratio["limit"] == "oo"


def test_an_open_law_gives_no_crossing(audits: tuple[AuditRecord, AuditRecord]) -> None:
    unknown = changed(audits[0], grade="open", formula=None, leading=None)
    told = versus(unknown, audits[1])["figures"]["steps"]
    assert told["crossings"] == told["spans"] == []
    assert "open" in told["why"]
    assert told["ratio"] is None


def test_a_crossing_beyond_the_runs_extrapolates(audits: tuple[AuditRecord, AuditRecord]) -> None:
    slow = changed(audits[1], formula="500000*n", leading="500000*n", grade="proved")
    compared = versus(audits[0], slow)
    (crossing,) = [c for c in compared["figures"]["steps"]["crossings"] if c["at"] > 100]
    assert crossing["extrapolates"]
    assert "extrapolates: both were run to n = 32" in " ".join(render(compared, "terminal").split())


def test_a_fitted_law_gives_sizes_between_which_it_lies() -> None:
    from stored_comparison import drawn_audit

    def slow(n: int, rng: random.Random) -> int:
        return round(n * n * rng.uniform(0.9, 1.1) + n**1.3)

    def fast(n: int, rng: random.Random) -> int:
        return 60 * n + 7

    compared = versus(drawn_audit(slow, draws=5), drawn_audit(fast))
    told = compared["figures"]["steps"]
    assert told["grade"] == "fitted"
    (crossing,) = told["crossings"]
    assert crossing["less"] == "b"
    assert not crossing["sharp"]
    assert crossing["after"] < 57 < crossing["at"] < 120
    compared.validate()


def test_what_was_not_audited_alike_is_refused(
    audits: tuple[AuditRecord, AuditRecord], stored: tuple[Path, Path], tmp_path: Path, capfd: Any
) -> None:
    other = json.loads(stored[1].read_text())
    other["feed"]["text"] = "list(range(n))"
    path = tmp_path / "other.json"
    path.write_text(json.dumps(other))
    assert run(["versus", str(stored[0]), str(path)]) == 2
    error = capfd.readouterr().err
    assert "fed differently" in error
    assert "audit both with one --feed" in error
    assert run(["versus", str(stored[0]), CUBIC]) == 2
    assert "give two subjects, or two records" in capfd.readouterr().err


def test_every_face_shows_it(stored: tuple[Path, Path], tmp_path: Path, capfd: Any) -> None:
    path = tmp_path / "versus.json"
    assert run(["versus", *map(str, stored), "--json", str(path)]) == 0
    sheet = capfd.readouterr().out
    assert "B trios_fast overtakes A trios at n = 3" in sheet
    assert max(map(len, sheet.splitlines())) <= 80
    record = read(path)
    assert render(record, "terminal") == sheet
    assert "overtakes A trios at n = 3" in render(record, "markdown")
    assert run(["show", str(path)]) == 0
    assert capfd.readouterr().out == sheet
    assert "fewer steps from 3 on: trios_fast" in repr(record)


def test_hostile_names_stay_text(audits: tuple[AuditRecord, AuditRecord]) -> None:
    hostile = json.loads(audits[0].to_json())
    hostile["subject"]["name"] = "<script>\x1b[31m|x"
    compared = versus(AuditRecord(hostile), audits[1])
    for face in ("terminal", "markdown"):
        assert "\x1b" not in render(compared, face)
    assert "<script>" not in render(compared, "markdown")
