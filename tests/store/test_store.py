"""Finished runs are kept, and used again only where all that decides them is as it was."""

from __future__ import annotations

import json
import os
import signal
import subprocess
import sys
import time
from pathlib import Path
from typing import Any

import pytest

import steplaw
from steplaw.errors import CallError
from steplaw.host import runner
from steplaw.store import Store, open_store

SOURCE = '''\
"""The planning office's crossing tables."""

LIMIT = 3

def crossings(n: int) -> int:
    total = 0
    for i in range(n):
        total += fare(i)
    return total

def fare(i):
    return i % LIMIT

def unused(i):
    return i + 1
'''


@pytest.fixture
def place(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> Path:
    monkeypatch.setenv("STEPLAW_STORE", str(tmp_path / "store.sqlite3"))
    monkeypatch.setattr(sys, "dont_write_bytecode", True)
    (tmp_path / "tables.py").write_text(SOURCE)
    return tmp_path


@pytest.fixture
def started(monkeypatch: pytest.MonkeyPatch) -> list[str]:
    """The hosts that were started."""
    begun: list[str] = []
    start = runner.HostProcess._start

    def note(self: runner.HostProcess) -> Any:
        begun.append(self.subject)
        return start(self)

    monkeypatch.setattr(runner.HostProcess, "_start", note)
    return begun


def audit(place: Path, **settings: Any) -> Any:
    settings = {"sizes": [1, 2, 3, 5, 8], "only_sizes": True, "clock": False, **settings}
    return steplaw.audit(f"{place / 'tables.py'}:crossings", **settings)


def change(place: Path, old: str, new: str) -> None:
    text = (place / "tables.py").read_text()
    assert old in text
    (place / "tables.py").write_text(text.replace(old, new))


def test_a_second_audit_runs_nothing(place: Path, started: list[str]) -> None:
    first = audit(place, clock=True)
    assert started
    started.clear()
    second = audit(place, clock=True)
    assert started == []
    assert second.to_json() == first.to_json()


def test_fresh_runs_everything_and_keeps_nothing(place: Path, started: list[str]) -> None:
    audit(place, fresh=True)
    assert open_store().entries() == []  # type: ignore[union-attr]
    audit(place)
    started.clear()
    audit(place, fresh=True)
    assert started


def test_new_sizes_alone_are_run(place: Path) -> None:
    audit(place)
    before = sum(e.answers for e in Store(place / "store.sqlite3").entries())
    audit(place, sizes=[1, 2, 3, 5, 8, 13])
    after = sum(e.answers for e in Store(place / "store.sqlite3").entries())
    assert after - before == 2  # counted, and again in a second process


@pytest.mark.parametrize(
    ("old", "new"),
    [("return i + 1", "return i + 2"), ("def unused(i):\n", "def unused(i):  # of old\n")],
)
def test_code_that_a_run_does_not_reach_may_change(
    place: Path, started: list[str], old: str, new: str
) -> None:
    first = audit(place)
    started.clear()
    change(place, old, new)
    second = audit(place)
    assert started == []
    assert second["tallies"] == first["tallies"]


@pytest.mark.parametrize(
    ("old", "new", "differs"),
    [
        ("return i % LIMIT", "return i % LIMIT + 0", True),
        ("total += fare(i)", "total = total + fare(i) + 1", True),
        ("LIMIT = 3", "LIMIT = 4", False),
        ("LIMIT = 3\n", "LIMIT = 3\nDECK = [1]\n", False),
        ("def crossings(n: int)", "# moved down\ndef crossings(n: int)", False),
    ],
)
def test_code_that_decides_a_run_makes_it_anew(
    place: Path, started: list[str], old: str, new: str, differs: bool
) -> None:
    first = audit(place)
    started.clear()
    change(place, old, new)
    second = audit(place)
    assert started
    assert (second["laws"]["steps"] != first["laws"]["steps"]) == differs


def test_code_that_changes_back_is_known_again(place: Path, started: list[str]) -> None:
    first = audit(place)
    change(place, "return i % LIMIT", "return -i")
    audit(place)
    change(place, "return -i", "return i % LIMIT")
    started.clear()
    assert audit(place)["tallies"] == first["tallies"]
    assert started == []


def test_a_module_beside_counts_too(place: Path, started: list[str]) -> None:
    (place / "fares.py").write_text("def fare(i):\n    return i\n")
    change(place, "def fare(i):\n    return i % LIMIT\n", "from fares import fare\n")
    audit(place)
    started.clear()
    audit(place)
    assert started == []
    (place / "fares.py").write_text("def fare(i):\n    return i + 1\n")
    audit(place)
    assert started


def test_a_file_that_is_read_counts_too(place: Path, started: list[str]) -> None:
    (place / "fares.txt").write_text("3")
    change(place, "return i % LIMIT", f"return i % int(open({str(place / 'fares.txt')!r}).read())")
    audit(place)
    started.clear()
    audit(place)
    assert started == []
    (place / "fares.txt").write_text("4")
    audit(place)
    assert started


@pytest.mark.parametrize(
    "effect",
    [
        "open('log.txt', 'a').close()",
        "__import__('os').listdir('.')",
        "__import__('subprocess').run(['true'])",
    ],
)
def test_a_run_with_effects_outside_is_not_kept(
    place: Path, started: list[str], effect: str, monkeypatch: pytest.MonkeyPatch
) -> None:
    monkeypatch.chdir(place)
    change(place, "    total = 0\n", f"    total = 0\n    {effect}\n")
    audit(place)
    started.clear()
    audit(place)
    assert started


def test_runs_that_differ_from_each_other_are_not_kept(place: Path) -> None:
    change(
        place,
        "    total = 0\n",
        "    import random\n    n += random.randrange(50)\n    total = 0\n",
    )
    record = audit(place)
    assert not record["repeatable"]["holds"]
    kept = list(Store(place / "store.sqlite3").export())
    assert [k["request"]["do"] for k in kept if k["request"]["do"] != "introduce"] == []


def test_a_failure_of_the_subject_is_kept(place: Path, started: list[str]) -> None:
    change(place, "    total = 0\n", "    total = 1 // (n - 5)\n")
    first = audit(place)
    assert first["stopped"]["kind"] == "raised"
    started.clear()
    assert audit(place) == first
    assert started == []


def test_export_and_prune(place: Path) -> None:
    audit(place)
    store = Store(place / "store.sqlite3")
    requests = [answer["request"] for answer in store.export()]
    assert {"do": "count", "at": {"n": 8}, "draw": 0} in requests
    assert store.prune(1) == 0
    assert store.prune(0) == len(requests)
    assert store.entries() == []


def test_a_file_that_is_no_store_is_named(tmp_path: Path) -> None:
    (tmp_path / "store").write_text("a list of vessels, which is no store " * 40)
    with pytest.raises(CallError, match="cannot be used"):
        Store(tmp_path / "store")


#: Times to kill an audit; `STEPLAW_KILLS=50` does the fuller run.
KILLS = int(os.environ.get("STEPLAW_KILLS", "5"))


def _start(place: Path, record: Path) -> subprocess.Popen[bytes]:
    words = ["audit", f"{place / 'tables.py'}:crossings", "--no-clock", "--sizes", "1..20+1"]
    return subprocess.Popen(
        [sys.executable, "-m", "steplaw", *words, "--only-sizes", "--json", str(record)],
        env={**os.environ, "PYTHONPATH": os.pathsep.join(p for p in sys.path if p)},
        cwd=place,
        stdout=subprocess.DEVNULL,
        stderr=subprocess.PIPE,
        start_new_session=True,
    )


def _undisturbed(place: Path, monkeypatch: pytest.MonkeyPatch) -> tuple[Any, float]:
    monkeypatch.setenv("STEPLAW_STORE", "off")
    begun = time.monotonic()
    done = _start(place, place / "plain.json")
    assert done.wait() == 0
    monkeypatch.setenv("STEPLAW_STORE", str(place / "store.sqlite3"))
    return json.loads((place / "plain.json").read_text()), time.monotonic() - begun


def test_killed_audits_lose_only_the_run_in_progress(
    place: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    plain, seconds = _undisturbed(place, monkeypatch)
    for kill in range(KILLS):
        if kill % 10 == 0:
            (place / "store.sqlite3").unlink(missing_ok=True)
        process = _start(place, place / "killed.json")
        time.sleep(seconds * (kill + 1) / (KILLS + 1))
        os.killpg(process.pid, signal.SIGKILL)
        process.wait()
        if (place / "store.sqlite3").exists():
            Store(place / "store.sqlite3").entries()
    last = _start(place, place / "last.json")
    assert last.wait() == 0
    assert json.loads((place / "last.json").read_text()) == plain


def test_two_audits_at_once_on_one_store(place: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    plain, _ = _undisturbed(place, monkeypatch)
    both = [_start(place, place / f"{name}.json") for name in ("port", "starboard")]
    assert [process.wait() for process in both] == [0, 0]
    for name in ("port", "starboard"):
        assert json.loads((place / f"{name}.json").read_text()) == plain
