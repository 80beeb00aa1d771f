"""What goes wrong is said in one line, with the right exit status, and loses nothing finished.

The real command is run each time. Exit status by the contract: 2 the call was wrong, 3 the subject
failed or ran past a limit.
"""

from __future__ import annotations

import contextlib
import json
import os
import re
import signal
import subprocess
import sys
import time
from pathlib import Path
from typing import Any

import pytest

from running import ROOT, Ended, environment, steplaw
from steplaw.record import AuditRecord

SUBJECTS = "tests/subjects"
FAILING = f"{SUBJECTS}/failing.py"
NUMBERS = ("--feed", "list(range(n))")
SIZES = ("--sizes", "2,4,8,16,32", "--only-sizes")
CUBIC = "samples/ferry/timetable.py:trios"


def audit(*words: str) -> Ended:
    return steplaw("audit", *words, "--no-clock")


@pytest.mark.parametrize(
    ("words", "message"),
    [
        (["nowhere.py:trios"], r"no such file: nowhere\.py"),
        (["samples/ferry/timetables.py:trios"], r"did you mean .*timetable\.py"),
        (["no_such_module_here:f"], "no such module: no_such_module_here"),
        (["samples/ferry/timetable.py:trois"], r"no function 'trois' .*did you mean .*:trios"),
        (["samples/ferry/timetable.py"], r"names no function; add one"),
        ([f"{FAILING}:Ledger"], r"Ledger is a class, .*failing\.py:Ledger\.total"),
        (["math:sqrt"], "math:sqrt is written in C"),
        ([f"{SUBJECTS}/needs_package.py:tides"], "harbour_masters_almanac.*not installed"),
        ([f"{FAILING}:well", "--feed", "list(range(n)"], "--feed has a syntax error at column"),
        ([f"{FAILING}:well", "--feed", "fleet(n)"], "--feed uses 'fleet', which is not defined"),
        ([f"{FAILING}:well", "--feed", "[1, 2]"], "does not use the size n"),
        ([f"{FAILING}:well", "--feed", "args(list(range(n)), 2)"], "does not fit well"),
        ([f"{FAILING}:well", "--feed", "[1 // 0] * n"], "the feed raises ZeroDivisionError"),
        ([f"{FAILING}:well", "--every", "[[1 // 0] * n]"], "the feed raises ZeroDivisionError"),
        ([f"{FAILING}:well", *NUMBERS, "--sizes=-3,4"], "negative size -3"),
        ([f"{FAILING}:well", *NUMBERS, "--sizes", ""], "--sizes is empty"),
        ([f"{FAILING}:well", *NUMBERS, "--sizes", "4,,8"], "empty part"),
        ([f"{FAILING}:well", *NUMBERS, "--sizes", "4,eight"], "'eight' is not a size"),
        ([f"{FAILING}:well", *NUMBERS, "--sizes", "64..4"], r"goes down; write 4\.\.64"),
        ([f"{FAILING}:well", *NUMBERS, "--only-sizes"], "--only-sizes needs sizes"),
        ([f"{FAILING}:well", *NUMBERS, "--draws", "0"], "--draws 0"),
        ([f"{FAILING}:well", *NUMBERS, "--figure", "haste"], "there is no figure 'haste'"),
        ([f"{FAILING}:well", *NUMBERS, *SIZES, "--figure", "line:3"], "line 3 of .* never ran"),
        ([f"{FAILING}:well", *NUMBERS, "--every", "[[n]]"], "cannot be given together"),
        ([f"{FAILING}:well", *NUMBERS, "--limit-seconds", "0"], "limit must be above 0"),
        ([f"{FAILING}:well", *NUMBERS, "--json", "/nowhere/at/all.json"], "cannot write /nowhere"),
        ([f"{FAILING}:well", *NUMBERS, "--page", "/proc/page.html"], "cannot write /proc"),
        ([f"{FAILING}:well", *NUMBERS, "--sise", "4"], "no such option"),
        ([], "no function is named"),
    ],
    ids=lambda value: value[:40] if isinstance(value, str) else None,
)
def test_a_wrong_call(words: list[str], message: str) -> None:
    done = audit(*words)
    assert re.search(message, done.message), done.message
    assert done.status == 2
    assert done.out == ""
    assert done.err.count("\n") == 1


@pytest.mark.parametrize(
    ("name", "options", "kind", "message"),
    [
        ("raises", (), "raised", r"raised ValueError: too many sums at \S+failing\.py:\d+"),
        ("raises_its_own", (), "raised", r"raised Storm: out at sea at \S+failing\.py:\d+"),
        ("recurs", (), "raised", r"raised RecursionError: .* at \S+failing\.py:\d+"),
        ("never_ends", ("--limit-seconds", "1"), "time", "ran past the limit of 1 s"),
        (
            "takes_all_at_once",
            ("--limit-memory", "200"),
            "memory",
            "needs more than 200 MB of memory",
        ),
        (
            "takes_more_and_more",
            ("--limit-memory", "200"),
            "memory",
            "needs more than 200 MB of memory",
        ),
        ("leaves", (), "exit", r"called sys\.exit\('no more today'\)"),
        ("leaves_at_once", (), "exit", r"left the process without a result \(status 7\)"),
        ("crashes", (), "crash", r"crashed the interpreter \(SIG(SEGV|BUS)\)"),
    ],
)
def test_a_subject_that_fails_at_some_size(
    name: str, options: tuple[str, ...], kind: str, message: str
) -> None:
    done = audit(f"{FAILING}:{name}", *NUMBERS, *SIZES, *options, "--json", "-")
    assert done.status == 3
    assert re.search(rf"{name} {message} .*\(at n=16\)$", done.message), done.message
    record = AuditRecord.from_json(done.out)
    assert record.stopped.kind == kind
    assert record.stopped.at == {"n": 16}
    assert [run.at.n for run in record.tallies] == [2, 4, 8]
    assert "Stopped" in done.err  # the sheet


def test_what_was_finished_is_shown_and_kept(tmp_path: Path) -> None:
    kept = tmp_path / "kept.json"
    done = audit(f"{FAILING}:raises", *NUMBERS, "--json", str(kept))
    assert done.status == 3
    assert done.err.splitlines() == [f"steplaw: {done.message}"]
    record = AuditRecord.from_json(kept.read_text())
    assert [v.at.n for v in record.figure["values"]] == list(range(13))
    assert record.laws.steps.grade == "exact"
    assert "(exact)" in done.out and "STOPPED EARLY" in done.out


def test_a_subject_that_fails_at_every_size() -> None:
    done = audit(f"{FAILING}:raises_always", *NUMBERS, *SIZES, "--json", "-")
    assert done.status == 3
    assert "raised KeyError" in done.message and done.message.endswith("(at n=2)")
    assert done.record["tallies"] == []
    assert done.record["laws"]["steps"]["grade"] == "open"
    assert done.record["repeatable"] is None


def test_an_empty_input_that_nobody_asked_for_is_passed_over() -> None:
    done = audit(f"{FAILING}:raises_when_empty", *NUMBERS, "--sizes", "8,16", "--json", "-")
    assert done.status == 0
    notes = " ".join(done.record["notes"])
    assert "Left out n=0: there the subject raised IndexError" in notes
    assert done.record["stopped"] is None
    law = done.record["laws"]["steps"]
    assert (law["grade"], law["holds_from"]) == ("proved", 1)


def test_a_feed_that_raises_at_some_size() -> None:
    feed = "list(range(n)) if n != 16 else [][n]"
    done = audit(f"{FAILING}:well", "--feed", feed, *SIZES, "--json", "-")
    assert done.status == 2
    assert done.message.startswith("the feed raises IndexError")
    assert "at n=16" in done.message
    assert done.record["stopped"]["kind"] == "feed"
    assert [run["at"]["n"] for run in done.record["tallies"]] == [2, 4, 8]


def test_one_input_of_all_that_the_subject_cannot_take() -> None:
    every = "([x] * 13 if n == 4 and x == 2 else [x] for x in range(n))"
    done = audit(f"{FAILING}:raises", "--every", every, "--sizes", "2,3,4", "--only-sizes")
    assert done.status == 3
    assert "on input [2, 2, 2" in done.message
    assert done.message.endswith("(at n=4)")


@pytest.mark.parametrize("name", ["asks_the_system", "draws_unseeded", "waits"])
def test_a_tally_that_changes_from_run_to_run(name: str) -> None:
    done = audit(f"{FAILING}:{name}", *NUMBERS, "--sizes", "32,64,128", "--only-sizes", "--json=-")
    assert done.status == 3
    found = re.search(r"changes from run to run, at (.*)$", done.message)
    assert found, done.message
    source = (ROOT / FAILING).read_text().splitlines()
    said = [source[int(place.rpartition(":")[2]) - 1] for place in found[1].split(", ")]
    assert {"heads += 1", "rounds += 1"} & {line.strip() for line in said}
    record = done.record
    assert record["repeatable"]["holds"] is False
    assert record["laws"]["steps"]["grade"] == "open"
    assert record["laws"]["steps"]["formula"] is None
    assert record["figure"]["law"]["note"] == "the count changes between equal runs"
    for line in record["repeatable"]["lines"]:
        assert line["counts"][0] != line["counts"][1]


def test_lines_that_do_not_change_keep_their_law() -> None:
    done = audit(f"{FAILING}:asks_the_system", *NUMBERS, "--json", "-")
    by_source = {line["source"].strip(): line for line in done.record["lines"]}
    assert by_source["heads += 1"]["frequency"]["grade"] == "open"
    assert by_source["for _ in sums:"]["frequency"]["formula"] == "n + 1"


def test_an_import_that_crashes_the_interpreter() -> None:
    done = audit(f"{SUBJECTS}/crashes_on_import.py:never_reached")
    assert done.status == 3
    assert re.search(r"ended without an answer \(SIG(SEGV|BUS)\)", done.message)


@pytest.mark.parametrize("json_to", ["-", "file"])
def test_an_interrupt_keeps_and_shows_what_is_finished(json_to: str, tmp_path: Path) -> None:
    path = tmp_path / "kept.json"
    to = "-" if json_to == "-" else str(path)
    process = start("audit", f"{FAILING}:sleeps", *NUMBERS, *SIZES, "--json", to, "--no-clock")
    wait_for_a_run_at_16(process)
    process.send_signal(signal.SIGINT)
    out, err = process.communicate(timeout=30)
    done = Ended(process.returncode, out, err)
    assert done.message == "the audit was interrupted from the keyboard (at n=16)"
    assert done.status == 3
    record: dict[str, Any] = json.loads(out if json_to == "-" else path.read_text())
    AuditRecord(record).validate()
    assert record["stopped"]["kind"] == "interrupted"
    assert [run["at"]["n"] for run in record["tallies"]] == [2, 4, 8]
    assert "STOPPED EARLY" in (err if json_to == "-" else out)


def test_an_interrupt_before_anything_is_finished() -> None:
    words = ("audit", f"{FAILING}:sleeps", *NUMBERS, "--sizes", "16,32", "--only-sizes")
    process = start(*words)
    wait_for_a_run_at_16(process)
    process.send_signal(signal.SIGINT)
    out, err = process.communicate(timeout=30)
    assert (process.returncode, out, err.strip()) == (130, "", "steplaw: interrupted")


def start(*words: str) -> subprocess.Popen[str]:
    return subprocess.Popen(
        [sys.executable, "-m", "steplaw", *words],
        cwd=ROOT,
        env=environment(),
        stdout=subprocess.PIPE,
        stderr=subprocess.PIPE,
        encoding="utf-8",
    )


def wait_for_a_run_at_16(process: subprocess.Popen[str]) -> None:
    """Wait until some process of the command sleeps in `time.sleep`, as the subject does at 16."""
    end = time.monotonic() + 60
    while time.monotonic() < end and process.poll() is None:
        if any(wakes_at_a_clock(pid) for pid in below(process.pid)):
            return
        time.sleep(0.05)
    raise AssertionError(f"no run was seen to sleep; status {process.poll()}")


def below(pid: int) -> list[int]:
    if not Path(f"/proc/self/task/{os.getpid()}/children").exists():
        pytest.skip("this system does not tell a process's children")
    children = []
    with contextlib.suppress(OSError):
        for path in Path(f"/proc/{pid}/task").glob("*/children"):
            children += [int(word) for word in path.read_text().split()]
    return children + [x for child in children for x in below(child)]


def wakes_at_a_clock(pid: int) -> bool:
    try:
        channel = Path(f"/proc/{pid}/wchan").read_text()
    except OSError:
        return False
    return "nanosleep" in channel


@pytest.mark.parametrize(
    ("content", "message"),
    [
        ("{not json", "is not JSON"),
        ("[1, 2]", "holds no JSON object"),
        ("{}", "is no record of steplaw"),
        ('{"schema": "steplaw.audit/1"}', r"does not follow steplaw\.audit/1"),
        (None, "cannot read"),
    ],
)
def test_a_file_that_holds_no_record(content: str | None, message: str, tmp_path: Path) -> None:
    path = tmp_path / "stored.json"
    if content is not None:
        path.write_text(content)
    done = steplaw("show", str(path))
    assert re.search(message, done.message), done.message
    assert (done.status, done.out) == (2, "")


def test_a_path_is_not_left_behind_by_looking_whether_it_can_be_written(tmp_path: Path) -> None:
    path = tmp_path / "record.json"
    assert audit(f"{FAILING}:nothing_there", "--json", str(path)).status == 2
    assert not path.exists()


def test_a_record_that_is_there_is_kept_when_the_call_is_wrong(tmp_path: Path) -> None:
    path = tmp_path / "record.json"
    path.write_text("old")
    assert audit(f"{FAILING}:nothing_there", "--json", str(path)).status == 2
    assert path.read_text() == "old"


@pytest.mark.parametrize("to", ["-", "kept.json"])
def test_a_reader_that_stops_reading(to: str, tmp_path: Path) -> None:
    path = to if to == "-" else str(tmp_path / to)
    words = ["audit", f"{FAILING}:raises", *NUMBERS, *SIZES, "--no-clock", "--json", path]
    reading, writing = os.pipe()
    os.close(reading)
    process = subprocess.Popen(
        [sys.executable, "-m", "steplaw", *words],
        cwd=ROOT,
        env=environment(),
        stdout=writing,
        stderr=subprocess.PIPE,
        encoding="utf-8",
    )
    os.close(writing)
    _, err = process.communicate(timeout=60)
    # The audit's own outcome, whether anyone reads of it or not.
    assert Ended(process.returncode, "", err).message.endswith("(at n=16)")
    assert process.returncode == 3
    if to != "-":
        assert len(json.loads(Path(path).read_text())["tallies"]) == 3


def test_a_page_that_nobody_reads(tmp_path: Path) -> None:
    kept = str(tmp_path / "kept.json")
    assert audit(f"{FAILING}:well", *NUMBERS, *SIZES, "--json", kept).status == 0
    command = f"{sys.executable} -m steplaw show {kept} --as page | true; exit ${{PIPESTATUS[0]}}"
    done = subprocess.run(
        ["bash", "-c", command], env=environment(), capture_output=True, encoding="utf-8"
    )
    assert (done.returncode, done.stderr) == (0, "")


def test_an_output_that_cannot_show_all_characters() -> None:
    done = steplaw("audit", CUBIC, "--sizes", "4,8", "--no-clock", PYTHONIOENCODING="ascii")
    assert (done.status, done.err) == (0, "")
    assert done.out.isascii() and "trios" in done.out


def test_no_process_is_left_behind() -> None:
    marker = f"left-{os.getpid()}-{time.monotonic_ns()}"
    words = ("audit", f"{FAILING}:never_ends", *NUMBERS, *SIZES, "--limit-seconds", "1")
    assert steplaw(*words, "--no-clock", STEPLAW_TEST_MARKER=marker).status == 3
    left = []
    for entry in Path("/proc").glob("[0-9]*/environ"):
        try:
            if marker.encode() in entry.read_bytes():
                left.append(entry.parent.name)
        except OSError:
            continue
    assert left == []
