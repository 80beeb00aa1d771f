from __future__ import annotations

import functools
import hashlib
import importlib
import inspect
import pickle
import subprocess
import sys
from collections.abc import Iterator
from pathlib import Path

import pytest

from steplaw.errors import CallError
from steplaw.subject import (
    Subject,
    SubjectRef,
    call,
    forget,
    from_function,
    locate,
    parse,
    unread,
)

OFFICE = '''
import asyncio
import functools
from dataclasses import dataclass

HARBOUR = "Northport"


def logged(function):
    @functools.wraps(function)
    def wrapper(*args):
        return ("logged", function(*args))
    return wrapper


def sailings(n):
    """List sailings.

    By number.
    """
    return list(range(n))


@logged
def logged_sailings(n):
    return list(range(n))


@functools.cache
def berths(n):
    return n if n < 2 else berths(n - 1) + berths(n - 2)


ten_sailings = functools.partial(sailings, 10)
plus_one = lambda n: n + 1


def each_sailing(n):
    SEEN.clear()
    for i in range(n):
        SEEN.append(i)
        yield i


SEEN = []


async def radio(n):
    await asyncio.sleep(0)
    return n


async def radio_log(n):
    SEEN.clear()
    for i in range(n):
        await asyncio.sleep(0)
        SEEN.append(i)
        yield i


def lazily(n):
    return map(str, range(n))


def crews(n):
    def crew(i):
        return i
    return [crew(i) for i in range(n)]


@dataclass
class Vessel:
    name: str

    def greet(self, n):
        return [self.name] * n

    @classmethod
    def build(cls, name):
        return cls(name)

    @staticmethod
    def double(n):
        return 2 * n

    @property
    def initial(self):
        return self.name[0]

    class Deck:
        def area(self, n):
            return n * n


class Pilot(Vessel):
    pass


class Horn:
    def __call__(self, n):
        return "toot" * n


horn = Horn()


@dataclass
class Tonnes:
    weight: int
'''


@pytest.fixture(autouse=True)
def imports_undone() -> Iterator[None]:
    path, modules = list(sys.path), dict(sys.modules)
    yield
    sys.path[:] = path
    for name in set(sys.modules) - set(modules):
        del sys.modules[name]
    sys.modules.update(modules)


@pytest.fixture
def office(tmp_path: Path) -> Path:
    file = tmp_path / "office_of_tests.py"
    file.write_text(OFFICE)
    return file


def found(file: Path | str, name: str) -> Subject:
    return locate(parse(f"{file}:{name}"))


def refusal(text: str) -> str:
    with pytest.raises(CallError) as caught:
        locate(parse(text))
    line = str(caught.value)
    assert "\n" not in line
    assert caught.value.exit_status == 2
    return line


class TestParse:
    @pytest.mark.parametrize(
        ("text", "ref"),
        [
            ("src/a.py:trios", SubjectRef("src/a.py", "trios", True)),
            ("a.py:Fleet.Deck.area", SubjectRef("a.py", "Fleet.Deck.area", True)),
            ("ferry.timetable:trios", SubjectRef("ferry.timetable", "trios", False)),
            ("json:loads", SubjectRef("json", "loads", False)),
            (r"C:\ferry\a.py:trios", SubjectRef(r"C:\ferry\a.py", "trios", True)),
            (" a.py:trios ", SubjectRef("a.py", "trios", True)),
        ],
    )
    def test_forms(self, text: str, ref: SubjectRef) -> None:
        assert parse(text) == ref
        assert str(ref) == text.strip()

    @pytest.mark.parametrize(
        "text", ["", "trios", "a.py", ":trios", "a.py:", "a.py:12", "a b:c", "a.py:x..y", "a.py::x"]
    )
    def test_other_forms_are_refused_in_one_line(self, text: str) -> None:
        with pytest.raises(CallError) as caught:
            parse(text)
        assert "\n" not in str(caught.value)
        assert "write path/to/file.py:name" in str(caught.value)

    def test_file_alone_offers_its_functions(self, office: Path) -> None:
        assert f"{office}:logged" in refusal(str(office))

    def test_inner_function_is_refused(self) -> None:
        assert "cannot be called from outside" in refusal("a.py:crews.<locals>.crew")


class TestLocate:
    def test_function_of_a_file(self, office: Path) -> None:
        subject = found(office, "sailings")
        assert subject.function(3) == [0, 1, 2]
        assert (subject.name, subject.file, subject.kind) == ("sailings", str(office), "function")
        assert subject.source_lines[subject.line - 1] == "def sailings(n):"
        assert subject.digest == hashlib.sha256(office.read_bytes()).hexdigest()
        assert subject.doc == "List sailings."
        assert subject.module.HARBOUR == "Northport"

    def test_pickles_by_name(self, office: Path) -> None:
        subject = found(office, "Vessel.build")
        vessel = subject.function("Heron")
        assert pickle.loads(pickle.dumps(vessel)) == vessel

    def test_file_finds_its_neighbours_like_a_script(self, tmp_path: Path) -> None:
        (tmp_path / "ports_of_tests.py").write_text("PORTS = ['Eastport']\n")
        file = tmp_path / "lines_of_tests.py"
        file.write_text("from ports_of_tests import PORTS\ndef ports(): return PORTS\n")
        assert found(file, "ports").function() == ["Eastport"]
        assert sys.path[0] == str(tmp_path)

    def test_file_of_a_package_is_imported_as_its_module(self, tmp_path: Path) -> None:
        inner = tmp_path / "line_of_tests" / "quay"
        inner.mkdir(parents=True)
        (tmp_path / "line_of_tests" / "__init__.py").write_text("BERTHS = 7\n")
        (inner / "__init__.py").write_text("")
        (inner / "plan.py").write_text("from .. import BERTHS\ndef berths(): return BERTHS\n")
        subject = found(inner / "plan.py", "berths")
        assert subject.function() == 7
        assert subject.function.__module__ == "line_of_tests.quay.plan"
        assert subject.file == str(inner / "plan.py")

    def test_module_by_name_from_the_current_folder(
        self, office: Path, monkeypatch: pytest.MonkeyPatch
    ) -> None:
        monkeypatch.chdir(office.parent)
        monkeypatch.setattr(sys, "path", [p for p in sys.path if p])
        assert found("office_of_tests", "sailings").function(2) == [0, 1]

    def test_standard_library(self) -> None:
        subject = found("textwrap", "wrap")
        assert subject.function("a b", 1) == ["a", "b"]
        assert subject.file == inspect.getsourcefile(importlib.import_module("textwrap"))
        by_file = found(subject.file, "wrap")
        assert by_file.function is subject.function

    def test_frozen_module_of_the_standard_library(self) -> None:
        subject = found("posixpath", "join")
        assert subject.source_lines[subject.line - 1].startswith("def join(")

    def test_name_of_a_standard_module_does_not_replace_it(self, tmp_path: Path) -> None:
        import statistics

        file = tmp_path / "statistics.py"
        file.write_text("def mean(n): return 'ours'\n")
        assert found(file, "mean").function(1) == "ours"
        assert found(file, "mean").module is found(file, "mean").module
        assert sys.modules["statistics"] is statistics

    def test_stem_that_is_no_identifier(self, tmp_path: Path) -> None:
        file = tmp_path / "day-plan.py"
        file.write_text("def plan(n): return n\n")
        assert found(file, "plan").function(3) == 3

    def test_two_files_of_one_stem(self, tmp_path: Path) -> None:
        for folder in ("north", "south"):
            (tmp_path / folder).mkdir()
            (tmp_path / folder / "port_of_tests.py").write_text(f"def port(): return '{folder}'\n")
        assert found(tmp_path / "north" / "port_of_tests.py", "port").function() == "north"
        assert found(tmp_path / "south" / "port_of_tests.py", "port").function() == "south"

    def test_package_of_one_name_elsewhere_is_named(self, tmp_path: Path) -> None:
        for folder in ("north", "south"):
            package = tmp_path / folder / "twin_of_tests"
            package.mkdir(parents=True)
            (package / "__init__.py").write_text("")
            (package / "plan.py").write_text("def plan(): return 1\n")
        found(tmp_path / "north" / "twin_of_tests" / "plan.py", "plan")
        line = refusal(f"{tmp_path / 'south' / 'twin_of_tests' / 'plan.py'}:plan")
        assert "is taken by" in line and "north" in line


class TestCallables:
    def test_wraps_is_called_with_its_wrapper_and_named_by_its_function(self, office: Path) -> None:
        subject = found(office, "logged_sailings")
        assert subject.function(1) == ("logged", [0])
        assert subject.code.__name__ == "logged_sailings"
        assert subject.source_lines[subject.line - 1] == "@logged"

    def test_cache_is_kept_and_can_be_forgotten(self, office: Path) -> None:
        subject = found(office, "berths")
        assert subject.function(10) == 55
        assert subject.function.cache_info().currsize == 11
        assert any("forgotten before each run" in note for note in subject.notes)
        forget(found(office, "sailings"))
        assert subject.function.cache_info().currsize == 0

    def test_partial_and_lambda(self, office: Path) -> None:
        assert found(office, "ten_sailings").function() == list(range(10))
        assert found(office, "ten_sailings").code.__name__ == "sailings"
        assert found(office, "plus_one").function(1) == 2

    def test_methods(self, office: Path) -> None:
        vessel = found(office, "Vessel.build").function("Heron")
        assert found(office, "Vessel.greet").function(vessel, 2) == ["Heron", "Heron"]
        assert found(office, "Pilot.greet").function(vessel, 1) == ["Heron"]
        assert found(office, "Vessel.double").function(4) == 8
        assert found(office, "Vessel.initial").function(vessel) == "H"
        assert found(office, "Vessel.Deck.area").function(None, 3) == 9
        assert type(found(office, "Pilot.build").function("Tern")).__name__ == "Pilot"

    def test_callable_object(self, office: Path) -> None:
        subject = found(office, "horn")
        assert subject.function(2) == "toottoot"
        assert subject.code.__qualname__ == "Horn.__call__"

    def test_generator_is_run_to_its_end(self, office: Path) -> None:
        subject = found(office, "each_sailing")
        assert subject.kind == "generator" and subject.notes
        assert call(subject, (4,)) is None
        assert subject.module.SEEN == [0, 1, 2, 3]

    def test_coroutine_is_run_to_its_end(self, office: Path) -> None:
        subject = found(office, "radio")
        assert (subject.kind, call(subject, (), {"n": 4})) == ("coroutine", 4)

    def test_async_generator_is_run_to_its_end(self, office: Path) -> None:
        subject = found(office, "radio_log")
        assert subject.kind == "async generator"
        call(subject, (3,))
        assert subject.module.SEEN == [0, 1, 2]

    def test_unread_iterator_is_noticed(self, office: Path) -> None:
        subject = found(office, "lazily")
        assert "returns a map that is not run" in str(unread(call(subject, (3,))))
        assert unread([1]) is None


class TestRefusals:
    def test_no_such_file(self, office: Path) -> None:
        line = refusal(f"{office.parent / 'ofice_of_tests.py'}:sailings")
        assert line.startswith("no such file") and f"did you mean {office}?" in line

    def test_no_such_folder(self, office: Path) -> None:
        wrong = office.parent.parent / (office.parent.name + "x") / "a.py"
        assert f"did you mean {office.parent}" in refusal(f"{wrong}:sailings")

    def test_suffix_left_out(self, office: Path) -> None:
        assert f"did you mean {office}?" in refusal(f"{office.with_suffix('')}:sailings")

    def test_folder(self, office: Path) -> None:
        line = refusal(f"{office.parent}:sailings")
        assert "is a folder" in line and office.name in line

    def test_other_kind_of_file(self, tmp_path: Path) -> None:
        (tmp_path / "notes.txt").write_text("x")
        assert "is not a Python source file" in refusal(f"{tmp_path / 'notes.txt'}:x")

    @pytest.mark.parametrize(
        ("name", "offer"),
        [
            ("sailing", "did you mean"),
            ("zzz", "there is logged, sailings, logged_sailings, berths"),
            ("Vessel.great", "Vessel.greet"),
            ("crews.crew", "only functions at the top"),
        ],
    )
    def test_no_such_function(self, office: Path, name: str, offer: str) -> None:
        assert offer in refusal(f"{office}:{name}")

    def test_class(self, office: Path) -> None:
        line = refusal(f"{office}:Vessel")
        assert "is a class, not a function" in line and f"{office}:Vessel.greet" in line
        assert "it defines no methods" in refusal(f"{office}:Tonnes")

    @pytest.mark.parametrize("text", ["math:sqrt", "heapq:heappop", "builtins:len"])
    def test_c_function(self, text: str) -> None:
        assert "no Python bytecode to count" in refusal(text)

    def test_not_callable(self, office: Path) -> None:
        line = refusal(f"{office}:HARBOUR")
        assert "is a str, not a function" in line and "sailings" in line
        assert "is a module, not a function" in refusal(f"{office}:functools")

    @pytest.mark.parametrize(
        ("text", "offer"),
        [
            ("jsn:loads", "did you mean json"),
            ("json.decodr:x", "did you mean json.decoder"),
            ("textwrap.wrap:x", "a function of it is written textwrap:wrap"),
            ("zzqx_of_the_office:x", "a file is written path/to/file.py:name"),
        ],
    )
    def test_no_such_module(self, text: str, offer: str) -> None:
        line = refusal(text)
        assert "no such module" in line and offer in line

    @pytest.mark.parametrize(
        ("source", "parts"),
        [
            (
                "import os\nimport zzqx\n",
                ["needs the package 'zzqx'", "pip install zzqx", "line 2"],
            ),
            ("import zzqx.deep\n", ["pip install zzqx"]),
            ("import json.zzqx\n", ["'json.zzqx'", "the installed 'json' does not have"]),
            ("def f(:\n", ["line 1 does not compile under Python", "broken_of_tests.py"]),
            ("x = 1\nprint(x / 0)\n", ["ZeroDivisionError: division by zero", "line 2"]),
            (
                "import sys\nsys.exit('no\\nport')\n",
                ["sys.exit('no\\nport')", "line 2", "__main__"],
            ),
            ("import sys\nsys.exit()\n", ["calls sys.exit()"]),
            ("from . import quay\n", ["ImportError", "package.module:name"]),
            ("from json import zzqx\n", ["cannot import name 'zzqx'", "line 1"]),
            ("raise BaseException('a\\nb')\n", ["BaseException: a b"]),
            ("class Q(BaseException): pass\nraise Q\n", ["raises Q while it is imported"]),
            ("x = '\0'\n", ["null bytes"]),
            ("raise ValueError('\\ud800\\x1b[2J')\n", ["ValueError: \\ud800\\x1b[2J"]),
            (
                "class Q(Exception):\n  def __str__(self): 1 / 0\nraise Q\n",
                ["raises Q while it is imported"],
            ),
        ],
    )
    def test_source_that_cannot_be_imported(
        self, tmp_path: Path, source: str, parts: list[str]
    ) -> None:
        file = tmp_path / "broken_of_tests.py"
        file.write_text(source)
        line = refusal(f"{file}:f")
        assert all(part in line for part in parts), line
        assert "broken_of_tests" not in sys.modules

    def test_package_that_goes_by_another_name(
        self, tmp_path: Path, monkeypatch: pytest.MonkeyPatch
    ) -> None:
        # PyPI's package for `import yaml` is PyYAML (common practice).
        monkeypatch.setitem(sys.modules, "yaml", None)
        file = tmp_path / "settings_of_tests.py"
        file.write_text("import yaml\n")
        assert "pip install PyYAML" in refusal(f"{file}:f")

    def test_module_in_a_folder_above_is_pointed_out(self, tmp_path: Path) -> None:
        package = tmp_path / "src" / "zzqx_line"
        package.mkdir(parents=True)
        (package / "__init__.py").write_text("")
        (tmp_path / "tools").mkdir()
        file = tmp_path / "tools" / "tool_of_tests.py"
        file.write_text("import zzqx_line\n")
        assert f"set PYTHONPATH={tmp_path / 'src'}" in refusal(f"{file}:f")

    def test_argument_parser_at_import(
        self, tmp_path: Path, monkeypatch: pytest.MonkeyPatch
    ) -> None:
        file = tmp_path / "tool_of_tests.py"
        file.write_text(
            "import argparse\np = argparse.ArgumentParser()\np.add_argument('x')\np.parse_args()\n"
        )
        monkeypatch.setattr(sys, "argv", ["steplaw"])
        line = refusal(f"{file}:f")
        assert "sys.exit(2)" in line and "tool_of_tests.py, line 4" in line


def shown(n: int) -> int:
    return n


shown_twice = functools.partial(shown, 2)


class Quay:
    @classmethod
    def berths(cls, n: int) -> int:
        return n

    def boats(self, n: int) -> int:
        return n


class LongQuay(Quay):
    pass


class TestFromFunction:
    def test_ref_leads_back(self) -> None:
        subject = from_function(shown)
        assert subject.function is shown
        assert subject.ref == SubjectRef(__file__, "shown", True)
        assert parse(str(subject.ref)) == subject.ref

    @pytest.mark.parametrize(
        ("function", "name"),
        [
            (Quay.berths, "Quay.berths"),
            (LongQuay.berths, "LongQuay.berths"),
            (Quay.boats, "Quay.boats"),
            (shown_twice, "shown_twice"),
        ],
    )
    def test_methods_and_partials(self, function: object, name: str) -> None:
        assert from_function(function).name == name  # type: ignore[arg-type]

    def test_another_process_finds_it(self) -> None:
        import networkx

        subject = from_function(networkx.floyd_warshall)
        code = (
            "import sys; from steplaw.subject import *; "
            f"print(locate(parse({str(subject.ref)!r})).digest)"
        )
        out = subprocess.run([sys.executable, "-c", code], capture_output=True, text=True)
        assert out.stdout.strip() == subject.digest, out.stderr

    @pytest.mark.parametrize(
        ("function", "part"),
        [
            (lambda n: n, "a lambda without a name"),
            (functools.partial(shown, 3), "a partial without a name"),
            (Quay().boats, "give Quay.boats, and the object as the feed's first argument"),
            (Quay, "is a class"),
            (len, "no Python bytecode"),
            (3, "an int is not a function"),
        ],
    )
    def test_what_cannot_be_imported_again(self, function: object, part: str) -> None:
        with pytest.raises(CallError) as caught:
            from_function(function)  # type: ignore[arg-type]
        assert part in str(caught.value) and "\n" not in str(caught.value)

    def test_inner_function(self) -> None:
        def inner(n: int) -> int:
            return n

        with pytest.raises(CallError, match="made while another function runs"):
            from_function(inner)

    @pytest.mark.parametrize("guard", ["if __name__ == '__main__':\n    ", ""])
    def test_script(self, tmp_path: Path, guard: str) -> None:
        file = tmp_path / "script_of_tests.py"
        file.write_text(
            "from steplaw.subject import from_function, locate\n"
            "def f(n): return n\n"
            f"{guard}print(locate(from_function(f).ref).ref)\n"
        )
        out = subprocess.run([sys.executable, str(file)], capture_output=True, text=True)
        if guard:
            assert out.stdout.strip() == f"{file}:f"
        else:
            assert "put that call under: if __name__ == '__main__':" in out.stderr

    def test_prompt(self) -> None:
        code = "from steplaw.subject import from_function\ndef f(n): return n\nfrom_function(f)\n"
        out = subprocess.run([sys.executable, "-"], input=code, capture_output=True, text=True)
        assert "defined at the prompt or in a notebook" in out.stderr


def test_only_the_standard_library_is_imported() -> None:
    code = (
        "import sys; known = set(sys.modules); import steplaw.feed, steplaw.hints, steplaw.sizes; "
        "new = {m.partition('.')[0] for m in set(sys.modules) - known}; "
        "print(sorted(new - set(sys.stdlib_module_names)))"
    )
    out = subprocess.run([sys.executable, "-c", code], capture_output=True, text=True, check=True)
    assert out.stdout.strip() == "['steplaw']"
