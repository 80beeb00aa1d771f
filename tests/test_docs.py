"""The prose against the program: links, commands, Python examples, sheets, messages.

A fenced block says by its language how it is held: every `steplaw ...` line of a ``sh`` block is
parsed by the command that it names, ``python`` blocks are run as doctests, ``console`` blocks are
run and compared line by line, and a ``text`` block behind ``<!-- sheet: COMMAND -->`` must be
found, line by line and in order, in what the command prints.
"""

from __future__ import annotations

import ast
import doctest
import functools
import os
import re
import shlex
import subprocess
import sys
from collections.abc import Iterator
from pathlib import Path

import click
import pytest

from steplaw.commands import COMMANDS, run, steplaw
from steplaw.review.configuration import read
from steplaw.study import make_study

ROOT = Path(__file__).parents[1]
PAGES = sorted([*ROOT.glob("*.md"), *ROOT.glob("docs/**/*.md"), ROOT / "samples" / "README.md"])
FENCE = re.compile(
    r"(?:^<!-- (?P<mark>[^\n]*) -->\n)?^```(?P<language>\w*)\n(?P<text>.*?)^```$", re.M | re.S
)
SHOWN_ON = (3, 11)
LEFT_OUT = "…"
ENVIRONMENT = {**os.environ, "PYTHONPATH": os.pathsep.join(p for p in sys.path if p)}


def named(path: Path) -> str:
    return str(path.relative_to(ROOT))


def blocks(path: Path, language: str) -> Iterator[tuple[str, str]]:
    """Give mark and text of the fenced blocks of a language."""
    for found in FENCE.finditer(path.read_text(encoding="utf-8")):
        if found["language"] == language:
            yield found["mark"] or "", found["text"]


def prose(path: Path) -> str:
    return re.sub(r"`[^`\n]*`", "", FENCE.sub("", path.read_text(encoding="utf-8")))


def anchors(path: Path) -> set[str]:
    headings = re.findall(
        r"^#+ (.*)$", re.sub(r"^```.*?^```$", "", path.read_text(), flags=re.M | re.S), re.M
    )
    return {re.sub(r"[^\w\- ]", "", h.lower()).strip().replace(" ", "-") for h in headings}


@pytest.mark.parametrize("page", PAGES, ids=named)
def test_links_lead_somewhere(page: Path) -> None:
    for target in re.findall(r"\]\(([^)]+)\)", prose(page)):
        if re.match(r"[a-z]+:", target):
            continue
        place, _, anchor = target.partition("#")
        file = (page.parent / place).resolve() if place else page
        assert file.exists(), f"{named(page)}: {target}"
        if anchor:
            assert anchor in anchors(file), f"{named(page)}: {target}"


def test_every_page_of_docs_is_linked() -> None:
    linked = {
        (page.parent / target.partition("#")[0]).resolve()
        for page in PAGES
        for target in re.findall(r"\]\(([^)]+)\)", prose(page))
        if not re.match(r"[a-z]+:|#", target)
    }
    assert set(ROOT.glob("docs/**/*.md")) - linked - {ROOT / "docs" / "README.md"} == set()
    assert ROOT / "docs" / "README.md" in linked


def commands_of(page: Path) -> list[str]:
    """Give the `steplaw` command lines of a page, in ``sh`` blocks and in plain ones."""
    found = []
    for language in ("sh", ""):
        for _, text in blocks(page, language):
            for line in re.sub(r"\\\n\s*", "", text).splitlines():
                found += [
                    re.sub(r"^\S*/steplaw(?= )", "steplaw", part)
                    for part in re.split(r"\s(?:&&|\|)\s", line)
                    if re.match(r"(\S*/)?steplaw ", part)
                ]
    return found


SHOWN_COMMANDS = [(named(p), c) for p in PAGES for c in commands_of(p)]


def test_pages_show_every_command_that_there_is() -> None:
    shown = {shlex.split(text)[1] for _, text in SHOWN_COMMANDS}
    assert shown >= set(COMMANDS)


@pytest.mark.parametrize(("page", "text"), SHOWN_COMMANDS)
def test_commands_parse(page: str, text: str, monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.chdir(ROOT)
    _, name, *words = shlex.split(re.sub(r"\s\d?>\s*\S+", "", text))
    command = steplaw.get_command(click.Context(steplaw), name)
    assert command is not None, f"{page}: there is no command {name}"
    if isinstance(command, click.Group):
        part = command.get_command(click.Context(command), words.pop(0))
        assert part is not None, f"{page}: {text}"
        command = part
    given = command.make_context(name, words).params
    if "project" in given and given["project"] != ".":
        configuration = read(given["project"])
        for study in given["names"] if "names" in given else (given["subject"],):
            assert study is None or configuration.study(study)
    elif name == "audit" and ":" in (given["subject"] or ""):
        taken = ("feed", "every", "only_sizes", "draws", "figure", "clock")
        study = make_study(
            given["subject"], sizes=given["sizes"] or None, **{k: given[k] for k in taken}
        )
        assert there_is(study.subject.place, study.subject.name)
        feed = re.fullmatch(r"(\S+\.py):(\w+)", given["feed"] or "")
        assert feed is None or there_is(feed[1], feed[2])


def there_is(place: str, name: str) -> bool:
    """Whether a file has a function of a name; modules are not looked into."""
    if not place.endswith(".py"):
        return True
    tree: ast.AST = ast.parse((ROOT / place).read_text(encoding="utf-8"))
    for part in name.split("."):
        inside = ast.iter_child_nodes(tree)
        kinds = (ast.FunctionDef, ast.AsyncFunctionDef, ast.ClassDef)
        tree = next(n for n in inside if isinstance(n, kinds) and n.name == part)
    return True


def documented_options(name: str) -> set[str]:
    text = (ROOT / "docs" / "reference" / "command-line.md").read_text(encoding="utf-8")
    section = re.search(rf"^## steplaw {name}\b.*?(?=^## |\Z)", text, re.M | re.S)
    assert section is not None, f"docs/reference/command-line.md has no section on {name}"
    return set(re.findall(r"--[a-z][a-z-]*", section[0]))


@pytest.mark.parametrize("name", COMMANDS)
def test_reference_has_every_option(name: str) -> None:
    command = steplaw.get_command(click.Context(steplaw), name)
    assert command is not None
    parts = command.commands.values() if isinstance(command, click.Group) else [command]
    options = [p for part in parts for p in part.params if isinstance(p, click.Option)]
    known = {o for p in options for o in [*p.opts, *p.secondary_opts] if o.startswith("--")}
    needed = {p.opts[-1] for p in options if not p.secondary_opts and p.opts[-1].startswith("--")}
    needed |= {p.secondary_opts[0] for p in options if p.secondary_opts}
    documented = documented_options(name)
    assert documented - known == set()
    assert needed - documented == set()


PYTHON_PAGES = [p for p in PAGES if any(blocks(p, "python"))]


@pytest.mark.parametrize("page", PYTHON_PAGES, ids=named)
def test_python_examples_run(page: Path, tmp_path: Path) -> None:
    text = "".join(text for _, text in blocks(page, "python"))
    test = doctest.DocTestParser().get_doctest(text, {"__name__": "examples"}, named(page), None, 0)
    assert test.examples
    (tmp_path / "samples").symlink_to(ROOT / "samples")
    # In a process of its own: examples extend the path, import samples and count.
    script = (
        "import doctest, sys; text = sys.stdin.read(); "
        "t = doctest.DocTestParser().get_doctest(text, {'__name__': 'examples'}, 'page', None, 0); "
        "f = doctest.ELLIPSIS; r = doctest.DocTestRunner(optionflags=f).run(t); "
        "sys.exit(r.failed > 0)"
    )
    done = subprocess.run(
        [sys.executable, "-c", script],
        input=text,
        capture_output=True,
        text=True,
        cwd=tmp_path,
        env=ENVIRONMENT,
    )
    assert done.returncode == 0, done.stdout + done.stderr


SHEETS = [
    (named(p), mark.removeprefix("sheet: "), text)
    for p in PAGES
    for mark, text in blocks(p, "text")
    if mark.startswith("sheet: ")
]


@functools.cache
def printed(command: str) -> str:
    """Give what an audit prints in 80 columns, its clock part left out."""
    timed = command.startswith("steplaw audit") and "--no-clock" not in command
    return ran(f"{command} --no-clock" if timed else command, ROOT)


def ran(command: str, folder: Path) -> str:
    """Run a `steplaw` command in a folder and give its standard output."""
    done = subprocess.run(
        [sys.executable, "-m", "steplaw", *shlex.split(command)[1:]],
        capture_output=True,
        text=True,
        cwd=folder,
        env={**ENVIRONMENT, "COLUMNS": "80", "PYTHONIOENCODING": "utf-8"},
    )
    assert done.returncode == 0, done.stderr
    return done.stdout


def missing(shown: str, real: str) -> list[str]:
    """Give the shown lines that are not in the real sheet, in this order.

    The clock part is left out, and what names the place, the machine or the clock's verdict.
    """
    shown = shown.partition("  Clock check ─")[0]
    lines = iter(without_clock(real.splitlines()))
    return [
        line
        for line in without_clock(shown.splitlines())
        if line.strip() not in ("", LEFT_OUT)
        and not line.startswith(("│ place", "│ python"))
        and not re.fullmatch(r" \d", line.rstrip())
        and line not in lines
    ]


def without_clock(lines: list[str]) -> list[str]:
    return [re.sub(r" · (time|TIME) .*| · no clock .*", "", line).rstrip() for line in lines]


@pytest.mark.skipif(sys.version_info[:2] != SHOWN_ON, reason="the sheets shown are of 3.11")
@pytest.mark.parametrize(
    ("page", "command", "text"), SHEETS, ids=[f"{p}:{c}" for p, c, _ in SHEETS]
)
def test_sheets_are_what_the_program_prints(page: str, command: str, text: str) -> None:
    assert missing(text, printed(command)) == [], page


def test_readme_names_a_frequency_that_holds_on_every_version() -> None:
    """Triples i < j < k of n: n(n-1)(n-2)/6, a binomial coefficient."""
    (_, command, text) = next(s for s in SHEETS if s[0] == "README.md")
    row = next(line for line in text.splitlines() if "▶" in line)
    cell = "n³/6 − n²/2 + n/3"
    assert cell in row
    assert f"if in_port[i] < leaves[j] an… {cell}" in printed(command)


CONSOLES = [(named(p), text) for p in PAGES for _, text in blocks(p, "console")]


@pytest.mark.parametrize(("page", "text"), CONSOLES, ids=[p for p, _ in CONSOLES])
def test_messages_are_what_the_program_says(
    page: str, text: str, monkeypatch: pytest.MonkeyPatch, capfd: pytest.CaptureFixture[str]
) -> None:
    monkeypatch.chdir(ROOT)
    for part in text.split("$ steplaw ")[1:]:
        line, _, expected = part.partition("\n")
        assert run(shlex.split(line)) == 2
        assert capfd.readouterr().err == expected, f"{page}: {line}"


def test_readme_commands_run(tmp_path: Path) -> None:
    (tmp_path / "samples").symlink_to(ROOT / "samples")
    section = (ROOT / "README.md").read_text(encoding="utf-8").partition("## The commands")[2]
    found = FENCE.search(section)
    assert found is not None
    outputs = {c.split()[1]: ran(c, tmp_path) for c in found["text"].splitlines()}
    assert outputs.keys() == set(COMMANDS)
    plain = [sys.executable, "-m", "calendar", "2026"]
    assert outputs["tally"] == subprocess.run(plain, capture_output=True, text=True).stdout
    # Pairs j < i of n: n(n-1)/2, a binomial coefficient; two comparisons each.
    assert "n²/2 − n/2" in outputs["show"]


def test_readme_has_the_test_command_where_ci_looks() -> None:
    script = (ROOT / ".ci" / "run").read_text(encoding="utf-8")
    line = next(x for x in script.splitlines() if x.startswith("command=$("))
    done = subprocess.run(
        ["bash", "-c", f'{line}\nprintf %s "$command"'], capture_output=True, text=True, cwd=ROOT
    )
    assert [text.strip() for mark, text in blocks(ROOT / "README.md", "sh") if mark] == [
        done.stdout
    ]
    assert "pytest" in done.stdout


def test_developers_page_names_every_module() -> None:
    package = ROOT / "src" / "steplaw"
    page = (ROOT / "DEVELOPERS.md").read_text(encoding="utf-8")
    rows = set(re.findall(r"^\| `([\w/]+\.py)` \|", page, re.M))
    modules = {p.relative_to(package).as_posix() for p in package.rglob("*.py")}
    parts = {m for m in modules if m.endswith("/__init__.py")}
    assert rows - modules == set(), "named in DEVELOPERS.md, but not there"
    assert modules - parts - rows == set(), "add a line to the layout in DEVELOPERS.md"
    assert {m.removesuffix("__init__.py") for m in parts} <= set(re.findall(r"`(\w+/)`:", page))
