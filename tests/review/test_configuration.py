"""Studies in the configuration: what is read, and one clear line for each way to get it wrong."""

from __future__ import annotations

from fractions import Fraction
from pathlib import Path

import pytest

from steplaw.errors import CallError
from steplaw.review.configuration import Configuration, find, read

SAMPLES = Path(__file__).parents[2] / "samples"
SUBJECT = 'subject = "ferry/timetable.py:clashes"\n'


def written(folder: Path, text: str, name: str = "steplaw.toml") -> Path:
    file = folder / name
    file.write_text(text, encoding="utf-8")
    return file


def test_studies_are_read_in_the_order_of_the_file(tmp_path: Path) -> None:
    file = written(
        tmp_path,
        """
[project]
name = "ferry"

[tool.steplaw]
budgets = "laws/agreed.toml"

[tool.steplaw.defaults]
clock = false
every = "[[1]]"

[tool.steplaw.studies.zebra]
subject = "ferry/timetable.py:clashes"
feed = "feeds.py:even_sailings"
sizes = "8..64"
tolerance = "2 %"

[tool.steplaw.studies]
stretch = { subject = "ferry/bookings.py:busiest_stretch", sizes = { n = [4, 8], m = "2..4" } }
cheapest = "ferry/transfers.py:cheapest"
""",
        "pyproject.toml",
    )
    found = read(file)
    assert [s.name for s in found.studies] == ["zebra", "stretch", "cheapest"]
    assert found.budgets == tmp_path / "laws" / "agreed.toml"
    zebra, stretch, cheapest = found.studies
    assert zebra.settings == {
        "clock": False,
        "subject": "ferry/timetable.py:clashes",
        "feed": "feeds.py:even_sailings",
        "sizes": "8..64",
    }
    assert zebra.tolerance == Fraction(1, 50) and cheapest.tolerance == 0
    assert stretch.study().plan.names == ("n", "m")
    assert [zebra.line, zebra.where["sizes"], stretch.line] == [12, 15, 19]
    assert cheapest.settings["every"] == "[[1]]"
    assert not cheapest.study().clock


def test_the_nearest_configuration_above_is_taken(tmp_path: Path) -> None:
    written(tmp_path, f"[studies.one]\n{SUBJECT}")
    inner = tmp_path / "a" / "b"
    inner.mkdir(parents=True)
    written(inner, '[project]\nname = "steplaw-user"\n', "pyproject.toml")
    assert find(inner) == tmp_path / "steplaw.toml"
    assert read(inner).root == tmp_path


def test_a_study_is_audited_in_its_folder(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    (tmp_path / "ferry").symlink_to(SAMPLES / "ferry")
    (tmp_path / "feeds.py").symlink_to(SAMPLES / "feeds.py")
    text = f'[studies.pairs]\n{SUBJECT}feed = "feeds.py:even_sailings"\nsizes = "4..32"\n'
    file = written(tmp_path, text + "clock = false\nfigure = 'comparison'\n")
    monkeypatch.chdir(tmp_path.parent)
    record = read(file).study("pairs").audit(processes=1)
    assert record["figure"]["law"]["formula"] == "n**2 - n"
    assert record["run_again"] == "steplaw audit pairs"
    assert Path.cwd() == tmp_path.parent


def test_what_cannot_be_run_is_told_with_file_line_and_study(
    tmp_path: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    monkeypatch.chdir(tmp_path)
    file = written(tmp_path, '# ours\n[studies.pairs]\nsubject = "ferry/timtable.py:clashes"\n')
    with pytest.raises(CallError, match=r"^steplaw\.toml:2: study pairs: no such file"):
        read(file).study("pairs").audit(clock=False, processes=1)


def test_an_unknown_study_is_answered_with_the_near_ones(tmp_path: Path) -> None:
    found = read(written(tmp_path, f"[studies.clashes]\n{SUBJECT}"))
    with pytest.raises(CallError, match=r"no study 'clahses'; did you mean clashes\?"):
        found.study("clahses")
    with pytest.raises(CallError, match="has clashes"):
        found.study("q")
    empty = Configuration(found.file, found.root, (), found.budgets)
    with pytest.raises(CallError, match=r"write \[tool\.steplaw\.studies\.clashes\]"):
        empty.study("q")


def study(lines: str) -> str:
    return f"[studies.a]\n{SUBJECT}{lines}\n"


# Each: what is broken, the text, the line that is named, the key, and what the message holds.
BROKEN = [
    ("no TOML", "[studies.a\n", 1, "", "this is not TOML: expected ']'"),
    ("text without quotes", "[studies.a]\nsubject = a.py:f\n", 2, "", "texts stand in quotes"),
    ("key given twice", study("draws = 1\ndraws = 2"), 4, "", "cannot overwrite a value"),
    ("unclosed text", '[studies.a]\nsubject = """a\n', 2, "", "this is not TOML"),
    ("misspelt table", "[studys.a]\n" + SUBJECT, 1, "studys", "did you mean studies?"),
    ("study at the top", "[clashes]\n" + SUBJECT, 1, "clashes", "did you mean studies.clashes?"),
    ("studies no table", "studies = 3\n", 1, "studies", "studies are tables"),
    ("study no table", "[studies]\na = 3\n", 2, "studies.a", "a table is needed here, not 3"),
    ("no subject", "[studies.a]\nclock = false\n", 1, "studies.a", 'add subject = "path'),
    ("name with a colon", '[studies."a:b"]\n' + SUBJECT, 1, "studies.a:b", "such as a-b"),
    ("name with a space", '[studies."two words"]\n' + SUBJECT, 1, "two words", "two-words"),
    ("misspelt setting", study("limit-second = 3"), 3, "limit-second", "mean limit_seconds?"),
    (
        "other word",
        "[studies.a]\nfunction = 'x.py:f'\nsubject='x.py:f'",
        2,
        "a.function",
        "subject?",
    ),
    ("unknown setting", study("colour = 'red'"), 3, "studies.a.colour", "settings are subject,"),
    ("subject a number", "[studies.a]\nsubject = 3\n", 2, "a.subject", "a text is needed, not 3"),
    ("no function", "[studies.a]\nsubject = 'x.py'\n", 2, "subject", "'x.py' names no function"),
    ("local function", "[studies.a]\nsubject = 'x:f.<locals>.g'\n", 2, "subject", "is made while"),
    ("module's name", "[studies.a]\nsubject = 'x-y:f'\n", 2, "subject", "nor a module's name"),
    ("feed a list", study("feed = [1, 2]"), 3, "a.feed", "a text is needed, not [1, 2]"),
    (
        "feed no Python",
        study("feed = 'list(range(n)'"),
        3,
        "a.feed",
        "has a syntax error at column 5",
    ),
    ("feed and every", study("feed = 'n'\nevery = '[n]'"), 4, "a.every", "cannot be given togeth"),
    ("every no Python", study("every = 'for x in y'"), 3, "a.every", "for x in y"),
    ("sizes no sizes", study("sizes = 'many few=1..4'"), 3, "a.sizes", "no values for 'many'"),
    ("sizes a number", study("sizes = 64"), 3, "a.sizes", "64 is not a list of sizes"),
    ("sizes mixed", study("sizes = [\n  4,\n  '8',\n]"), 3, "a.sizes", "is not a list of sizes"),
    ("sizes negative", study("sizes = [-4, 8]"), 3, "a.sizes", "negative size -4"),
    ("sizes go down", study("sizes = '64..8'"), 3, "a.sizes", "write 8..64"),
    ("sizes empty", study("sizes = []"), 3, "a.sizes", "sizes is empty"),
    ("sizes by name", study("sizes.n = '4..8'\nsizes.m = '8..x'"), 4, "sizes.m", "not a size"),
    ("bad size name", study("sizes = { rng = '4..8' }"), 3, "sizes.rng", "meaning of its own"),
    ("no size names", study("sizes = {}"), 3, "a.sizes", "there are no sizes"),
    ("flag a text", study("clock = 'no'"), 3, "a.clock", "'no' is neither true nor false"),
    ("only no sizes", study("only_sizes = true"), 1, "studies.a", "only_sizes needs sizes"),
    ("draws a text", study("draws = '5'"), 3, "a.draws", "a whole number is needed, not '5'"),
    ("draws nought", study("draws = 0"), 3, "a.draws", "0 is not above 0"),
    ("draws a half", study("draws = 2.5"), 3, "a.draws", "a whole number is needed, not 2.5"),
    ("no figure", study("figure = 'speed'"), 3, "a.figure", "there is no figure 'speed'"),
    ("limit endless", study("limit_seconds = inf"), 3, "limit_seconds", "inf is not above 0"),
    ("limit negative", study("limit_memory = -1"), 3, "limit_memory", "-1 is not above 0"),
    ("no such costs", study("costs = 'gone.toml'"), 3, "a.costs", "No such file"),
    ("costs and figure", study("figure='call'\ncosts='w.toml'"), 4, "a.costs", "together"),
    ("tolerance too much", study("tolerance = 2"), 3, "a.tolerance", 'tolerance = "2 %"'),
    ("tolerance below 0", study("tolerance = -0.1"), 3, "a.tolerance", "-0.1 is below 0"),
    ("tolerance a word", study("tolerance = 'some'"), 3, "a.tolerance", "'some' is not a share"),
    ("subject for all", "[defaults]\n" + SUBJECT, 2, "defaults.subject", "subject of its own"),
    ("broken defaults", "[defaults]\n\nclok = false\n", 3, "defaults.clok", "did you mean clock?"),
    ("budgets elsewhere", "budgets = 'laws.json'\n", 1, "budgets", "is not a file of budgets"),
    ("array of tables", "[[studies.a]]\n" + SUBJECT, 1, "studies.a", "a table is needed here"),
]


@pytest.mark.parametrize(
    ("text", "line", "key", "told"), [b[1:] for b in BROKEN], ids=[b[0] for b in BROKEN]
)
@pytest.mark.parametrize("name", ["steplaw.toml", "pyproject.toml"])
def test_each_fault_is_one_line_with_file_line_and_key(
    text: str,
    line: int,
    key: str,
    told: str,
    name: str,
    tmp_path: Path,
    monkeypatch: pytest.MonkeyPatch,
) -> None:
    monkeypatch.chdir(tmp_path)
    (tmp_path / "w.toml").write_text("[weights]\ncall = 2\n")
    if name == "pyproject.toml":
        text = "[tool.steplaw]\n" + text.replace("[studies", "[tool.steplaw.studies")
        for table in ("defaults", "studys", "clashes"):
            text = text.replace(f"[{table}", f"[tool.steplaw.{table}")
        line += 1
    with pytest.raises(CallError) as raised:
        read(written(tmp_path, text, name))
    message = str(raised.value)
    assert message.startswith(f"{name}:{line}: "), message
    assert "\n" not in message and "--" not in message
    assert key in message.split(": ")[1] and told in message
    assert raised.value.hint, message


def test_both_files_in_one_folder_are_refused(tmp_path: Path) -> None:
    written(tmp_path, f"[studies.one]\n{SUBJECT}")
    written(tmp_path, f"[tool.steplaw.studies.one]\n{SUBJECT}", "pyproject.toml")
    with pytest.raises(CallError, match=r"has both .*keep one"):
        read(tmp_path)


def test_a_file_without_studies_of_steplaw_says_what_to_write(tmp_path: Path) -> None:
    file = written(tmp_path, '[project]\nname = "ferry"\n', "pyproject.toml")
    with pytest.raises(CallError, match=r"has no \[tool\.steplaw\]; write \[tool"):
        read(file)
    with pytest.raises(CallError, match="no such file or folder: "):
        read(tmp_path / "gone.toml")
    file.write_bytes(b"\xff\xfe")
    with pytest.raises(CallError, match="is not UTF-8"):
        read(file)
