"""The fixture ``law_of``, in test runs of its own."""

from __future__ import annotations

import importlib
import pkgutil
import re
import tomllib
from importlib.metadata import entry_points
from pathlib import Path

import pytest

import steplaw

pytest_plugins = ["pytester"]

# After each test `pytester` forgets the modules that it imported. Those of steplaw that stay would
# then hold other classes than those imported anew, so all of them are imported before.
for _found in pkgutil.walk_packages(steplaw.__path__, "steplaw."):
    if not _found.name.endswith("__main__"):
        importlib.import_module(_found.name)
for _name in ("numpy", "sympy", "rich.console"):
    importlib.import_module(_name)

PLUGIN = "steplaw.review.pytest_plugin"
# Where the package is installed, pytest finds the plugin by itself.
WORDS = [] if any(e.value == PLUGIN for e in entry_points(group="pytest11")) else ["-p", PLUGIN]
SAMPLES = Path(__file__).parents[2] / "samples"
CONFIGURATION = """
[studies.once]
subject = "bookings.py:without_repeats_fast"
feed = "list(range(n))"
sizes = [4, 8, 16]
"""
TESTS = """
import bookings
import pytest
from steplaw.errors import CallError

def test_the_scan(law_of):
    law = law_of(bookings.without_repeats, feed="list(range(n))", sizes=[4, 8, 16])
    law.grows_at_most("n**2")["steps"].grows_at_most("n").stays_within("20*n + 40")
    law["native"].is_exactly("n*(n - 1)/2").grows_at_most("n**2")
    law["line:20"].grows_at_most("n")
    assert law["native"].formula == "n**2/2 - n/2"
    for ask in FAULTS:
        with pytest.raises((AssertionError, CallError)) as raised:
            ask(law)
        print("SAID", *str(raised.value).split())

FAULTS = [
    lambda law: law.grows_at_most("n*log(n)"),
    lambda law: law["native"].stays_within("n**2/4"),
    lambda law: law["native"].stays_within("n**2/2 - 4"),
    lambda law: law["native"].is_exactly("n**2/2"),
    lambda law: law["nativ"],
    lambda law: law.grows_at_most("m"),
    lambda law: law.grows_at_most("n*"),
    lambda law: law.is_as_agreed(),
    lambda law: law.is_as_agreed("once"),
]

def test_fails(law_of):
    law_of(bookings.without_repeats, feed="list(range(n))", sizes=[4, 8]).grows_at_most("n")
"""


@pytest.fixture
def project(pytester: pytest.Pytester, monkeypatch: pytest.MonkeyPatch) -> pytest.Pytester:
    monkeypatch.setenv("STEPLAW_STORE", str(pytester.path / "store.sqlite3"))
    source = (SAMPLES / "ferry" / "bookings.py").read_text()
    (pytester.path / "bookings.py").write_text(source)
    (pytester.path / "steplaw.toml").write_text(CONFIGURATION)
    monkeypatch.syspath_prepend(pytester.path)
    return pytester


def test_assertions_and_their_messages(project: pytest.Pytester) -> None:
    project.makepyfile(test_laws=TESTS)
    ended = project.runpytest(*WORDS, "-p", "no:xdist", "-p", "no:cacheprovider", "-s")
    ended.assert_outcomes(passed=1, failed=1)
    said = re.findall(r"SAID (.*)", ended.stdout.str())
    look = f"look at {project.path / 'bookings.py'}:20: if reference not in seen:"
    law = "n²/2 − n/2 (exact)"
    assert said == [
        "without_repeats: faster growth of work found: work = n²/2 + 25/2 n + 7 (exact) "
        f"asked: to grow at most like n*log(n) {look}",
        "without_repeats: 3 counted at n = 3, where 2.25 is allowed, of native found: native = "
        f"{law} asked: to stay within n**2/4 {look}",
        "without_repeats: 0 counted at n = 0, where -4 is allowed, of native found: native = "
        f"{law} asked: to stay within n**2/2 - 4 {look}",
        "without_repeats: 0 counted at n = 1 instead of 0.5, of native found: native = "
        f"{law} asked: to be exactly n**2/2 {look}",
        "the audit has no figure 'nativ'; did you mean native?",
        "'m' speaks of m; the sizes of this audit are n",
        "'n*' is no formula: invalid syntax; write one such as n*log(n)",
        "the audited function is no study; name one: is_as_agreed('clashes')",
        "no law is agreed on for once: run steplaw budget set once",
    ]
    # The failure is the message, at the line of the test; nothing of steplaw's own code.
    ended.stdout.fnmatch_lines(["E*AssertionError: without_repeats: faster growth of work"])
    assert "assertions.py" not in ended.stdout.str()


STUDY = """
import pytest

@pytest.mark.parametrize("figure", ["steps", "native"])
def test_as_agreed(law_of, figure):
    law_of("once")[figure].is_as_agreed()

def test_no_study(law_of):
    law_of("onse")

def test_it_fails(law_of):
    law_of("bookings.py:seats_by_sailing", feed="[1] * n", sizes=[4])
"""


def test_the_budget_under_xdist(project: pytest.Pytester) -> None:
    from steplaw.commands import run

    assert run(["budget", "set"]) == 0
    project.makepyfile(test_laws=STUDY)
    ended = project.runpytest_subprocess(*WORDS, "-p", "no:cacheprovider", "-n", "2")
    ended.assert_outcomes(passed=2, failed=2)
    out = ended.stdout.str()
    assert "steplaw.toml has no study 'onse'; did you mean once?" in out
    assert "seats_by_sailing raised AttributeError" in out

    file = project.path / "bookings.py"
    slow = file.read_text().replace("seen: set[int] = set()", "seen: list[int] = []")
    slow = slow.replace("seen.add(", "seen.append(")
    assert slow != file.read_text()
    file.write_text(slow)
    ended = project.runpytest_subprocess(*WORDS, "-p", "no:cacheprovider", "-k", "agreed", "-n0")
    ended.assert_outcomes(failed=2)
    out = ended.stdout.str()
    assert "once: worse order" in out and "native was 0 (exact)" in out
    assert "native is n²/2 − n/2 (exact)" in out and "not in seen:" in out


def test_pytest_finds_the_plugin_by_its_entry_point() -> None:
    text = (SAMPLES.parent / "pyproject.toml").read_text()
    points = tomllib.loads(text)["project"]["entry-points"]["pytest11"]
    assert points == {"steplaw": PLUGIN}
    assert importlib.import_module(PLUGIN).law_of is not None


def test_the_hook_of_pre_commit_is_a_command_that_there_is() -> None:
    import click

    from steplaw.commands import steplaw

    lines = (SAMPLES.parent / ".pre-commit-hooks.yaml").read_text().splitlines()
    hook = dict(re.findall(r"^(?:- |  )(\w+): (.*)$", "\n".join(lines), re.M))
    assert set(hook) >= {"id", "name", "entry", "language"} and hook["pass_filenames"] == "false"
    first, name, part = hook["entry"].split()
    group = steplaw.get_command(click.Context(steplaw), name)
    assert first == "steplaw" and isinstance(group, click.Group)
    assert group.get_command(click.Context(group), part) is not None
    assert hook["id"] in (SAMPLES.parent / "docs" / "guide" / "ci.md").read_text()
