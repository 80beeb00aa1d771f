"""Whole programs under probes: what they do is unchanged, what they run is counted."""

from __future__ import annotations

import json
import subprocess
import sys
from pathlib import Path

import pytest

from referee import referee
from running import ROOT, environment
from steplaw.record import read

SCRIPTS = {
    "plain": "import sys\nprint(sys.argv[1:], __name__, __file__, sys.path[0])\n",
    "raises": (
        "def port(n):\n    if not n:\n        raise ValueError('no berth')\n    port(n - 1)\n"
        "try:\n    port(1)\nexcept ValueError as error:\n"
        "    raise RuntimeError('late') from error\n"
    ),
    "exits_with_a_number": "import sys\nprint('out')\nsys.exit(7)\n",
    "exits_with_a_text": "raise SystemExit('closed for winter')\n",
    "atexit": "import atexit\natexit.register(print, 'last')\nprint('first')\n",
    "threads": (
        "import threading\nfound = []\n"
        "crew = [threading.Thread(target=found.append, args=(k,)) for k in range(4)]\n"
        "[t.start() for t in crew]\n[t.join() for t in crew]\nprint(sorted(found))\n"
    ),
    "reads": "import sys\nprint(sys.stdin.read().upper())\n",
    "interrupted": "import os, signal\nos.kill(os.getpid(), signal.SIGINT)\nprint('never')\n",
    "exec_and_frames": (
        "import sys, traceback\n"
        "def outer():\n    exec('import sys; print(sys._getframe(1).f_code.co_name)')\n"
        "outer()\n"
        "try:\n    eval('1 // 0')\nexcept ZeroDivisionError:\n    traceback.print_exc()\n"
    ),
    "dataclass": (
        "from dataclasses import dataclass\n@dataclass(order=True)\nclass Lot:\n    tons: int = 3\n"
        "print(sorted([Lot(2), Lot(1)]), Lot.__init__.__code__.co_name)\n"
    ),
}


def _run(*command: str, cwd: Path) -> tuple[int, str, str]:
    done = subprocess.run(
        [sys.executable, *command],
        cwd=cwd,
        env=environment(),
        input="ahoy",
        capture_output=True,
        encoding="utf-8",
        timeout=120,
    )
    return done.returncode, done.stdout, done.stderr


def _sheet_removed(err: str, plain: str) -> str:
    return err[: len(plain)]


@pytest.mark.parametrize("name", SCRIPTS)
def test_a_program_does_what_it_does(name: str, tmp_path: Path) -> None:
    (tmp_path / "script.py").write_text(SCRIPTS[name])
    words = ("script.py", "a", "--json", "b c")
    plain = _run(*words, cwd=tmp_path)
    status, out, err = _run("-m", "steplaw", "tally", "--json", "record.json", *words, cwd=tmp_path)
    assert out == plain[1]
    assert _sheet_removed(err, plain[2]) == plain[2]
    assert status == (plain[0] if plain[0] >= 0 else 128 - plain[0])
    record = read(tmp_path / "record.json")
    assert record["schema"] == "steplaw.tally/1"
    record.validate()
    assert record["exit_status"] == plain[0]
    assert record["steps"] == sum(f["steps"] for f in record["functions"])
    assert record["steps"] == sum(record["opcodes"].values())


def test_a_module_with_relative_imports(tmp_path: Path) -> None:
    package = tmp_path / "office"
    package.mkdir()
    (package / "__init__.py").write_text("")
    (package / "plan.py").write_text("def day():\n    return 'Monday'\n")
    (package / "__main__.py").write_text(
        "import sys\nfrom .plan import day\nprint(day(), sys.argv[1:], __package__)\n"
    )
    plain = _run("-m", "office", "x", cwd=tmp_path)
    status, out, _ = _run("-m", "steplaw", "tally", "-m", "office", "x", cwd=tmp_path)
    assert (status, out) == (0, plain[1])


def test_no_such_script(tmp_path: Path) -> None:
    status, out, err = _run("-m", "steplaw", "tally", "missing.py", cwd=tmp_path)
    assert (status, out) == (2, "")
    assert err.startswith("steplaw: there is no script missing.py")
    assert err.count("\n") == 1


def test_record_alone_on_standard_output(tmp_path: Path) -> None:
    (tmp_path / "quiet.py").write_text("total = sum(k for k in range(10))\n")
    status, out, _ = _run("-m", "steplaw", "tally", "--json", "-", "quiet.py", cwd=tmp_path)
    assert status == 0
    assert json.loads(out)["steps"] > 10


def test_counts_are_those_of_the_referee(tmp_path: Path) -> None:
    """The interpreter's own instruction events on the same code, run by hand."""
    source = (
        "def pairs(n):\n    return [(i, j) for i in range(n) for j in range(i)]\n"
        "def main():\n    return len(pairs(12)) + sum(k * k for k in range(9))\n"
        "main()\n"
    )
    (tmp_path / "counted.py").write_text(source)
    _run("-m", "steplaw", "tally", "--json", "record.json", "counted.py", cwd=tmp_path)
    record = read(tmp_path / "record.json")
    code = compile(source, "counted.py", "exec")

    def module() -> None:
        exec(code, {"__name__": "__main__"})

    counts = referee(module)
    expected = sum(
        sum(offsets.values()) for key, offsets in counts.instructions.items() if key[0] != __file__
    )
    own = [f for f in record["functions"] if f["file"].endswith("counted.py")]
    assert sum(f["steps"] for f in own) == expected
    assert (ROOT / "src").is_dir()
