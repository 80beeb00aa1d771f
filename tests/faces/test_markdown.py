"""The review comment, read back by a CommonMark parser."""

from __future__ import annotations

import re

import pytest
import sample_records
from hypothesis import given, settings
from hypothesis import strategies as st
from markdown_it import MarkdownIt
from markdown_it.token import Token

from steplaw.faces.markdown import code, comment, escape
from steplaw.faces.text import clean
from steplaw.record import AuditRecord

# The reference reader: markdown-it-py, CommonMark with tables.
READER = MarkdownIt("commonmark").enable("table").enable("strikethrough")


def flat(tokens: list[Token]) -> list[Token]:
    out = []
    for token in tokens:
        out += [token, *flat(token.children or [])]
    return out


def shown(text: str) -> str:
    kinds = ("text", "code_inline", "text_special")
    return "".join(t.content for t in flat(READER.parse(text)) if t.type in kinds)


@pytest.mark.parametrize("name", sorted(sample_records.ALL))
def test_every_comment_is_two_small_tables_without_html_links_or_images(name: str) -> None:
    tokens = flat(READER.parse(comment(AuditRecord(sample_records.fresh(name)))))
    kinds = {token.type for token in tokens}
    assert not kinds & {"html_block", "html_inline", "link_open", "image", "heading_open", "fence"}
    assert "table_open" in kinds
    assert len(comment(sample_records.fresh(name))) < 20_000


def test_rows_keep_their_columns_whatever_the_source_holds() -> None:
    html = READER.render(comment(sample_records.hostile()))
    rows = html.split("<tr>")[1:]
    assert {len(re.findall(r"<t[dh][ >]", row)) for row in rows} == {2, 4}
    assert "<script>" not in html and "&lt;script&gt;alert(1)" in html


def test_the_comment_tells_law_line_and_clock() -> None:
    text = shown(comment(sample_records.cubic()))
    assert "steps ~ 23/6 n³ (exact) · line 47 carries 93 % · time follows the steps" in text
    assert "23/6 n³ − 5/2 n² + 29/3 n + 12" in text
    assert "TIME DEPARTS" in shown(comment(sample_records.departing()))
    assert "Stopped early: IndexError" in shown(comment(sample_records.stopped()))
    assert "planning.py:47" in shown(comment(sample_records.unrepeatable()))


@settings(max_examples=30, deadline=None)
@given(st.lists(st.sampled_from(sample_records.PIECES) | st.text(max_size=4), max_size=6))
def test_no_text_of_a_record_changes_the_comment_s_structure(pieces: list[str]) -> None:
    def kinds(text: str) -> list[str]:
        record = sample_records.every_text(sample_records.cubic(), text)
        found = [token.type for token in flat(READER.parse(comment(record)))]
        return [kind for kind in found if kind not in ("text", "text_special")]

    assert kinds("x" + "".join(pieces) + "x") == kinds("x")


@given(st.text(max_size=60))
def test_escaped_text_shows_as_it_is(text: str) -> None:
    wanted = " ".join(clean(text).split())
    got = shown("x " + escape(text) + " x")[1:-1].replace("\u2060", "")
    assert " ".join(got.split()) == wanted


@given(st.text(alphabet=st.sampled_from("`|a \\<&@*\n"), max_size=30))
def test_a_code_span_holds_its_text(text: str) -> None:
    spans = [t for t in flat(READER.parse("x " + code(text) + " x")) if t.type == "code_inline"]
    assert len(spans) == 1
    assert spans[0].content.strip() == clean(text).strip()


def test_nobody_is_called_and_no_issue_is_linked() -> None:
    text = escape("@harbour see #12 at https://ferry.example or www.ferry.example")
    assert "@" not in text and "://" not in text and "www" not in text
    assert "#12" not in text
