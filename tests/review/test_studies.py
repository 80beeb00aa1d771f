"""`steplaw audit NAME`, `steplaw audit` and `steplaw budget` on a small project of the office."""

from __future__ import annotations

import json
import re
from collections.abc import Iterator
from pathlib import Path
from typing import Any

import pytest

from steplaw.commands import run
from steplaw.host import runner
from steplaw.review.configuration import NamedStudy

CONFIGURATION = """
[defaults]
clock = false

[studies.once]
subject = "office.py:once"
feed = "list(range(n))"
sizes = [4, 8, 16]

[studies.gone]
subject = "office.py:gone"

[studies.fails]
subject = "office.py:fails"
feed = "n"
sizes = [4, 8]
"""
ONCE = """
def once(references):
    kept = {empty}
    for reference in references:
        if reference not in kept:
            kept.{add}(reference)
    return len(kept)


def fails(n):
    if n > 3:
        raise ValueError("no such berth")
"""
BY_SET = ONCE.format(empty="set()", add="add")
BY_LIST = ONCE.format(empty="[]", add="append")


@pytest.fixture
def office(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> Path:
    monkeypatch.chdir(tmp_path)
    monkeypatch.setenv("STEPLAW_STORE", str(tmp_path / "store.sqlite3"))
    monkeypatch.setenv("COLUMNS", "100")
    monkeypatch.setattr("os.cpu_count", lambda: 1)
    monkeypatch.setattr("sys.dont_write_bytecode", True)
    (tmp_path / "office.py").write_text(BY_SET)
    (tmp_path / "steplaw.toml").write_text(CONFIGURATION)
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


def test_all_studies_are_audited_and_those_that_fail_stop_no_other(
    office: Path, started: list[str], capsys: pytest.CaptureFixture[str]
) -> None:
    assert run(["audit", "--json", "records"]) == 3
    out = capsys.readouterr().out
    rows = [line for line in out.splitlines() if line.startswith(("once", "gone", "fails"))]
    assert [row.split()[0] for row in rows] == ["once", "gone", "fails"]
    assert "steps" in rows[0] and "n (exact)" in rows[0]
    said = " ".join(out.split())
    assert "steplaw.toml:10: study gone: " in said and "no function 'gone'" in said, said
    assert re.search(r"fails raised ValueError: no such berth.* \(at n=4\)", said)
    assert "1 of 3 finished, failed: gone, fails" in " ".join(out.split())
    record = json.loads((office / "records" / "once.json").read_text())
    assert record["run_again"] == "steplaw audit once"
    assert json.loads((office / "records" / "fails.json").read_text())["stopped"]

    # A second time, a study whose code is as it was is not run at all.
    started.clear()
    assert run(["audit", "once", "--json", "-"]) == 0
    again = json.loads(capsys.readouterr().out)
    assert started == []
    assert {**again, "run_again": ""} == {**record, "run_again": ""}


def test_what_is_typed_goes_before_the_configuration(
    office: Path, capsys: pytest.CaptureFixture[str]
) -> None:
    below = office / "below"
    below.mkdir()
    words = ["audit", "once", "--project", "below", "--figure", "call", "--sizes", "2,3"]
    assert run([*words, "--only-sizes", "--json", "-"]) == 0
    record = json.loads(capsys.readouterr().out)
    assert record["figure"]["name"] == "call"
    assert record["sizes"]["plan"] == [{"n": 2}, {"n": 3}]


def test_an_interrupt_keeps_what_is_finished(
    office: Path, monkeypatch: pytest.MonkeyPatch, capsys: pytest.CaptureFixture[str]
) -> None:
    audit = NamedStudy.audit

    def interrupted(self: NamedStudy, *words: Any, **more: Any) -> Any:
        if self.name == "gone":
            raise KeyboardInterrupt
        return audit(self, *words, **more)

    monkeypatch.setattr(NamedStudy, "audit", interrupted)
    assert run(["audit", "--json", "records"]) == 3
    out = capsys.readouterr().out
    assert "interrupted before the first size" in out
    assert "1 of 3 finished, not finished: gone, fails" in " ".join(out.split())
    assert [p.name for p in (office / "records").iterdir()] == ["once.json"]


def refused(words: list[str], told: str, capsys: pytest.CaptureFixture[str]) -> None:
    assert run(words) == 2
    assert re.search(told, capsys.readouterr().err)


def test_calls_that_cannot_be_meant(office: Path, capsys: pytest.CaptureFixture[str]) -> None:
    refused(["audit", "onse"], r"no study 'onse'; did you mean once or gone\?", capsys)
    refused(["audit", "--json", "-"], "holds one record; name a study", capsys)
    refused(["audit", "office.py:once", "--project", "."], "studies by name", capsys)
    refused(["audit", "--json", "office.py"], "for all studies, give a folder", capsys)
    refused(["budget", "check", "nonce"], r"did you mean once or gone\?", capsys)
    refused(["budget", "check", "--project", "nowhere"], "no such file or folder", capsys)
    (office / "steplaw.toml").write_text("[defaults]\nclock = false\n")
    refused(["budget", "check"], "has no studies; write", capsys)
    (office / "steplaw.toml").unlink()
    refused(["audit"], r"no function is named, and neither .* has \[tool\.steplaw\]", capsys)
    refused(["audit", "once"], "'once' names no function; write path", capsys)


@pytest.fixture
def said(capsys: pytest.CaptureFixture[str]) -> Iterator[Any]:
    def words_of(*words: str) -> tuple[int, str]:
        status = run([*words])
        return status, " ".join(capsys.readouterr().out.split())

    yield words_of


def test_the_story_of_a_budget(office: Path, said: Any) -> None:
    file = office / "steplaw-budgets.toml"
    status, out = said("budget", "check", "once")
    assert status == 1 and "no budget: steplaw budget set once" in out

    status, out = said("budget", "set")
    assert status == 3 and "once new budget" in out
    assert list(_budgets(file)) == ["once"]
    assert said("budget", "check", "once")[0] == 0

    # A harmless refactor: other names, an empty line.
    (office / "office.py").write_text("\n" + BY_SET.replace("kept", "seen"))
    status, out = said("budget", "check", "once")
    assert status == 0 and "same law" in out

    # A hidden list scan: the same steps or fewer, and n(n-1)/2 visits in C code.
    (office / "office.py").write_text(BY_LIST)
    status, out = said("budget", "check", "once")
    assert status == 1 and "WORSE ORDER native was 0 (exact) native is n²/2 − n/2 (exact)" in out
    assert "look at " in out and "office.py:5: if reference not in kept:" in out

    # The team agrees on it after all: from then on the other one is better.
    status, out = said("budget", "set", "once")
    assert status == 0 and "WORSE ORDER" in out
    assert said("budget", "check", "once")[0] == 0
    (office / "office.py").write_text(BY_SET)
    status, out = said("budget", "check", "once")
    assert status == 0 and "better" in out

    # Another Python version: the file's steps are those of other instructions.
    assert said("budget", "set", "once")[0] == 0
    text = file.read_text()
    python = re.search(r'python = "([\d.]+)"', text)
    assert python is not None
    file.write_text(re.sub(r'(steps|work) = \{ law = "[^"]*"', r'\1 = { law = "2*n"', text))
    assert said("budget", "check", "once")[0] == 1
    file.write_text(file.read_text().replace(python[0], 'python = "3.10"'))
    status, out = said("budget", "check", "once")
    assert status == 0
    assert "Python was 3.10" in out and "operation classes are compared instead of steps" in out


def test_a_study_that_fails_keeps_its_budget(office: Path, said: Any) -> None:
    file = office / "steplaw-budgets.toml"
    assert said("budget", "set", "once")[0] == 0
    agreed = _budgets(file)["once"]
    text = BY_SET.replace("def once(references):", "def once(references):\n    1 / 0")
    (office / "office.py").write_text(text)
    status, out = said("budget", "set", "once")
    assert status == 3 and "the budget stays as it was" in out
    assert _budgets(file)["once"] == agreed
    status, out = said("budget", "check", "once")
    assert status == 3 and "not compared" in out and "0 of 1 hold" in out


def test_budgets_of_studies_that_are_no_more(office: Path, said: Any) -> None:
    assert said("budget", "set", "once")[0] == 0
    text = CONFIGURATION.replace("studies.once", "studies.first")
    (office / "steplaw.toml").write_text(text)
    status, out = said("budget", "check", "first")
    assert status == 1 and "with a budget, but no studies: once" in out
    status, out = said("budget", "set", "first")
    assert status == 0 and "taken out, no longer studies: once" in out
    assert list(_budgets(office / "steplaw-budgets.toml")) == ["first"]


def _budgets(file: Path) -> dict[str, Any]:
    import tomllib

    return tomllib.loads(file.read_text())
