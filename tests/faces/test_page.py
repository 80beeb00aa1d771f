"""The page: whole, escaped, asking for nothing."""

from __future__ import annotations

import base64
import hashlib
import re
import unicodedata
from html import unescape
from html.parser import HTMLParser

import pytest
import sample_records
from hypothesis import given, settings
from hypothesis import strategies as st

from steplaw.faces import render
from steplaw.faces.page import page
from steplaw.record import AuditRecord

VOID = {"meta", "input"}
KNOWN = {"html", "head", "meta", "title", "style", "script", "body", "main", "header", "section"}
KNOWN |= {"h1", "h2", "div", "p", "span", "dl", "dt", "dd", "code", "small", "ul", "li", "caption"}
KNOWN |= {"table", "thead", "tbody", "tr", "th", "td", "figure", "figcaption", "form", "label"}
KNOWN |= {"input", "output", "svg", "path", "rect", "circle", "text", "g"}
#: Attributes that could fetch or run something.
ACTIVE = re.compile("src|href|action|data|style|srcdoc|on.*")


class Reader(HTMLParser):
    """The standard library's parser: collects text and checks that tags close in order."""

    def __init__(self) -> None:
        super().__init__()
        self.open: list[str] = []
        self.text = ""
        self.tags: set[str] = set()
        self.attributes: set[str] = set()
        self.values: dict[str, str | None] = {}
        self.order: list[str] = []

    def handle_starttag(self, tag: str, attrs: list[tuple[str, str | None]]) -> None:
        self.tags.add(tag)
        self.attributes |= {name for name, _ in attrs}
        self.values |= dict(attrs)
        self.order.append(tag)
        if tag not in VOID:
            self.open.append(tag)

    def handle_endtag(self, tag: str) -> None:
        assert self.open.pop() == tag

    def handle_data(self, data: str) -> None:
        if not {"style", "script"} & set(self.open):
            self.text += data


def reader(html: str) -> Reader:
    out = Reader()
    out.feed(html)
    out.close()
    assert not out.open
    return out


@pytest.mark.parametrize("name", sorted(sample_records.ALL))
def test_every_record_has_a_well_formed_page_of_known_tags(name: str) -> None:
    found = reader(page(AuditRecord(sample_records.fresh(name))))
    assert found.tags <= KNOWN
    assert not [name for name in found.attributes if ACTIVE.fullmatch(name)]


def test_the_page_asks_for_nothing_from_anywhere() -> None:
    html = render(AuditRecord(sample_records.cubic()), "page")
    assert not re.search(r"https?://|url\(|@import|src=|href=|fetch|XMLHttp|import\(", html)


def test_the_policy_allows_the_page_s_own_script_and_style_alone() -> None:
    html = page(sample_records.cubic())
    policy = re.search(r'Content-Security-Policy" content="([^"]*)"', html)
    assert policy is not None
    rules = dict(rule.strip().split(" ", 1) for rule in unescape(policy[1]).split(";"))
    assert rules["default-src"] == "'none'"
    for tag in ("script", "style"):
        (part,) = re.findall(rf"<{tag}>(.*?)</{tag}>", html, re.S)
        digest = base64.b64encode(hashlib.sha256(part.encode()).digest()).decode()
        assert rules[f"{tag}-src"] == f"'sha256-{digest}'"


def test_the_page_tells_law_lines_and_clock() -> None:
    text = " ".join(reader(page(sample_records.cubic())).text.split())
    assert "steps ~ 23/6 n³ (exact) · line 47 carries 93 % · time follows the steps" in text
    assert "steps = 23/6 n³ − 5/2 n² + 29/3 n + 12" in text
    assert "n(n − 1)(n − 2)/6" in text.replace("\u00a0", " ") and "7 999 372" in text
    assert "Native visits were not counted" in text
    assert "TIME DEPARTS" in reader(page(sample_records.departing())).text


def test_hostile_text_is_shown_and_does_nothing() -> None:
    html = page(sample_records.hostile())
    assert html.count("<script") == 1
    found = reader(html)
    assert "<script>alert(1)</script>" in found.text
    assert not [c for c in html if not c.isprintable() and c not in "\n\u202f\u00a0"]


@settings(max_examples=40, deadline=None)
@given(
    st.lists(st.sampled_from(sample_records.PIECES) | st.text(max_size=4), min_size=1, max_size=6)
)
def test_no_text_of_a_record_changes_the_page_s_structure(pieces: list[str]) -> None:
    text = "x" + "".join(pieces)
    plain = reader(page(sample_records.every_text(sample_records.cubic(), "x"))).order
    found = reader(page(sample_records.every_text(sample_records.cubic(), text)))
    assert found.order == plain
    assert not [name for name in found.attributes if ACTIVE.fullmatch(name)]
    assert not [c for c in found.text if unicodedata.category(c) in ("Cc", "Cf") and c != "\n"]


def test_a_formula_of_a_stored_record_is_never_run() -> None:
    record = sample_records.cubic()
    record["figure"]["law"]["formula"] = "__import__('os').abort() + n"
    html = page(record)
    assert "abort" in html and 'id="laws"' not in html


def test_a_notebook_shows_the_page_in_a_frame_of_its_own() -> None:
    html = AuditRecord(sample_records.hostile())._repr_html_()
    found = Reader()
    found.feed(html)
    assert found.tags == {"iframe"}
    assert found.values["srcdoc"] == page(sample_records.hostile())
    assert found.values["sandbox"] == "allow-scripts"
