"""The sheet in the terminal."""

from __future__ import annotations

import io
import re
import unicodedata

import pytest
import sample_records
from hypothesis import given, settings
from hypothesis import strategies as st
from rich.cells import cell_len
from rich.console import Console

from steplaw.errors import CallError
from steplaw.faces import render
from steplaw.faces.terminal import show
from steplaw.faces.terminal_tally import show_tally
from steplaw.record import AuditRecord

CODES = re.compile(r"\x1b\[[0-9;]*m")


def sheet(name: str, width: int = 80) -> str:
    return render(AuditRecord(sample_records.fresh(name)), "terminal", width)


@pytest.mark.parametrize("width", [40, 60, 80, 100, 200])
@pytest.mark.parametrize("name", sorted(sample_records.ALL))
def test_every_record_fits_its_width(name: str, width: int) -> None:
    lines = sheet(name, width).splitlines()
    # The command to run again is one line, so that it can be copied.
    assert all(cell_len(line) <= width for line in lines if not line.startswith(" again:"))
    assert all(line == line.rstrip() for line in lines)


def test_the_cubic_sheet_tells_the_whole_story_in_two_screens() -> None:
    text = sheet("cubic")
    assert "steps ~ 23/6 n³ (exact) · line 47 carries 93 % · time follows the steps" in text
    assert "= 23/6 n³ − 5/2 n² + 29/3 n + 12" in text
    assert re.search(r"settled by +n = 0\.\.4", text)
    assert re.search(r"checked at +n = 5\.\.8, 16, 32, 64", text)
    assert re.search(r"▶ +47 +if apart\(.* n\(n − 1\)\(n − 2\)/6 .* 93 %", text)
    assert re.search(r"64 +995 276 +8\.067", text)
    assert re.search(r"128 +7 999 372 +168 ms +21 +3\.01 +3\.01", text)
    assert "worst-case execution time" in text
    assert "again: steplaw audit samples/ferry/planning.py:trios_of_sailings --feed" in text
    assert re.search(r"top term +12 \(n = 1\), 23/6 n³ \(from n = 2 on\)", text)
    assert len(text.splitlines()) <= 80


def test_a_clock_that_departs_is_loud_and_points_at_hidden_work() -> None:
    text = sheet("departing")
    assert "TIME DEPARTS FROM THE STEPS" in text
    assert "time grows faster than the steps" in text
    assert "inside C code" in text


def test_a_fitted_law_is_no_equation_and_shows_its_parts() -> None:
    text = sheet("random_draws")
    assert re.search(r"steps +~ 3\.913 n³", text) and "= 3.913" not in text
    assert re.search(r"exact part +7/2 n³ − 5/2 n² \+ 12 \(exact\)", text)
    assert re.search(r"data part +~ 0\.4127 n³ \(fitted\)", text)
    assert re.search(r"variance +no law claimed \(open\)", text)
    assert "995 212 to 995 468" in text
    assert "at most 2.1 %" in text


def test_an_open_law_claims_no_formula() -> None:
    text = sheet("stopped")
    assert "steps: no law claimed (open)" in text and "STOPPED EARLY" in text
    assert "at n = 2: IndexError: list index out of range" in text
    assert "Clock check" not in text


def test_lines_that_differ_between_runs_are_named() -> None:
    text = sheet("unrepeatable")
    assert "COUNTS DIFFER FROM RUN TO RUN" in text
    assert re.search(r"planning\.py:47 +56 +61", text)


def test_two_size_names_have_both_in_every_place() -> None:
    text = sheet("grid")
    assert "3n·m + 5n + 4" in text and "n, m" in text
    assert "(n = 4, m = 8)" in text


def console(**options: object) -> Console:
    settings = {"file": io.StringIO(), "width": 80, "force_terminal": True, **options}
    return Console(**settings)  # type: ignore[arg-type]


def printed(screen: Console) -> str:
    assert isinstance(screen.file, io.StringIO)
    return screen.file.getvalue()


@pytest.mark.parametrize("width", [40, 80, 200])
def test_hostile_text_cannot_reach_the_terminal(width: int) -> None:
    screen = console(width=width, color_system="truecolor")
    show(AuditRecord(sample_records.hostile()), screen)
    text = CODES.sub("", printed(screen))
    assert not [c for c in text if c != "\n" and not c.isprintable() and c != "\u00a0"]
    assert not any(line.startswith("INJECTED") for line in text.splitlines())
    # Markup is shown, not obeyed.
    assert "[bold red]" in text if width > 40 else "[bold" in text
    assert "\x1b]0;" not in printed(screen) and "\x1b[2J" not in printed(screen)


@settings(max_examples=30, deadline=None)
@given(st.lists(st.sampled_from(sample_records.PIECES) | st.text(max_size=4), max_size=6))
def test_no_text_of_a_record_reaches_the_terminal_s_controls(pieces: list[str]) -> None:
    screen = console(color_system="truecolor")
    record = sample_records.every_text(sample_records.cubic(), "x" + "".join(pieces))
    show(AuditRecord(record), screen)
    left = CODES.sub("", printed(screen))
    assert not [c for c in left if unicodedata.category(c)[0] == "C" and c != "\n"]
    # Each line of the sheet is the sheet's own: none begins with what a record holds.
    assert all(line[:1] in ("", " ", "┌", "│", "├", "└") for line in left.splitlines())


def test_hostile_text_in_a_tally_cannot_reach_the_terminal() -> None:
    record = sample_records.tally()
    record |= {"program": sample_records.HOSTILE, "notes": [sample_records.HOSTILE]}
    record["functions"][0] |= {"name": sample_records.HOSTILE, "file": sample_records.HOSTILE}
    record["opcodes"] = {sample_records.HOSTILE: 3}
    screen = console()
    show_tally(record, screen)
    text = CODES.sub("", printed(screen))
    assert not [c for c in text if c != "\n" and not c.isprintable()]


def test_no_color_has_no_colour_and_a_pipe_has_no_codes(monkeypatch: pytest.MonkeyPatch) -> None:
    # https://no-color.org: set and not empty means no colour; bold may stay.
    monkeypatch.setenv("NO_COLOR", "1")
    monkeypatch.setenv("TERM", "xterm-256color")
    screen = console(_environ=None)
    show(AuditRecord(sample_records.cubic()), screen)
    codes = {part for code in CODES.findall(printed(screen)) for part in code[2:-1].split(";")}
    assert codes <= {"", "0", "1", "2", "39", "49"}
    assert "\x1b" not in sheet("cubic")


def test_a_terminal_has_colour(monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.delenv("NO_COLOR", raising=False)
    screen = console(color_system="standard")
    show(AuditRecord(sample_records.cubic()), screen)
    assert re.search(r"\x1b\[[0-9;]*3[1-6]m", printed(screen))


class Ascii(io.StringIO):
    encoding = "ascii"


@pytest.mark.parametrize("name", sorted(sample_records.ALL))
def test_a_terminal_without_unicode_gets_ascii(name: str) -> None:
    out = Ascii()
    record = AuditRecord(sample_records.fresh(name))
    show(record, Console(file=out, width=80, force_terminal=False))
    assert out.getvalue().isascii()
    if name == "cubic":
        assert "= 23/6 n^3 - 5/2 n^2 + 29/3 n + 12" in out.getvalue()


def test_the_tally_lists_the_largest_first_and_no_more_than_asked() -> None:
    screen = console(force_terminal=False)
    show_tally(sample_records.tally(), screen, top=1)
    text = printed(screen)
    assert re.search(r"900 000 +73 % +56 000 +apart +times\.py:7", text)
    assert "<module>" not in text and "and 1 more" in text and "1 234 567" in text
    empty = sample_records.tally() | {"steps": 0, "functions": [], "opcodes": {}, "operations": {}}
    show_tally(empty, console())


def test_an_unknown_face_gives_one_line() -> None:
    with pytest.raises(CallError, match="no face 'smoke'"):
        render(sample_records.cubic(), "smoke")
    with pytest.raises(CallError, match="a tally has no page"):
        render(sample_records.tally(), "page")
    assert '"steplaw.audit/1"' in render(sample_records.cubic(), "json")
    assert "STEP TALLY" in render(sample_records.tally(), "terminal")
