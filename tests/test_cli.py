"""The command line: words in, records and exit statuses out."""

from __future__ import annotations

import json
import subprocess
import sys
from pathlib import Path

import click
import pytest

from running import ROOT, environment
from steplaw.commands import COMMANDS, run, steplaw
from steplaw.commands.helptext import FILE, rendered

CUBIC = f"{ROOT / 'samples' / 'ferry' / 'timetable.py'}:trios"


def test_help_page_is_what_click_renders() -> None:
    """If this fails after a change to the commands: python -m steplaw.commands.helptext."""
    assert FILE.read_text(encoding="utf-8") == rendered()


def test_help_imports_nothing_heavy() -> None:
    script = (
        "import sys; sys.argv = ['steplaw', '--help']\n"
        "from steplaw.cli import main\n"
        "try:\n    main()\nexcept SystemExit:\n    pass\n"
        "heavy = {'click', 'sympy', 'numpy', 'rich', 'networkx', 'jsonschema'} & set(sys.modules)\n"
        "print('heavy', sorted(heavy))\n"
    )
    done = subprocess.run(
        [sys.executable, "-c", script], env=environment(), capture_output=True, encoding="utf-8"
    )
    assert done.stdout.endswith("heavy []\n")
    assert done.stdout.startswith("Usage: steplaw")


@pytest.mark.parametrize("name", COMMANDS)
def test_every_command_has_a_help_page(name: str, capsys: pytest.CaptureFixture[str]) -> None:
    assert run([name, "--help"]) == 0
    assert "Usage: steplaw" in capsys.readouterr().out
    command = steplaw.get_command(click.Context(steplaw), name)
    assert command is not None and command.name == name


@pytest.mark.parametrize(
    ("words", "part"),
    [
        (["adit"], "there is no command 'adit'"),
        (["ferry.py:trios"], "type steplaw audit ferry.py:trios"),
        (["audit"], "no function is named, and neither"),
        (["derive"], "missing argument"),
        (["audit", CUBIC, "--draws", "x"], "'x' is not a valid integer"),
        (["audit", CUBIC, "--figure", "hops"], "there is no figure 'hops'"),
        (["audit", CUBIC, "--feed", "1", "--every", "[1]"], "cannot be given together"),
        (["tally"], "no program is named"),
        (["show", "missing.json"], "cannot read missing.json"),
    ],
)
def test_a_wrong_call_gets_one_line(
    words: list[str], part: str, capsys: pytest.CaptureFixture[str]
) -> None:
    assert run(words) == 2
    err = capsys.readouterr().err
    assert part in err
    assert err.startswith("steplaw: ") and err.count("\n") == 1


def test_show_gives_a_stored_record_again(
    tmp_path: Path, capsys: pytest.CaptureFixture[str]
) -> None:
    path = str(tmp_path / "kept.json")
    assert run(["audit", CUBIC, "--sizes", "4,8", "--no-clock", "--json", path]) == 0
    first = capsys.readouterr().out
    assert json.loads(Path(path).read_text())["schema"] == "steplaw.audit/1"
    assert run(["show", path]) == 0
    assert capsys.readouterr().out == first
    for face in ("page", "markdown"):
        assert run(["show", path, "--as", face]) == 0
        assert "trios" in capsys.readouterr().out
