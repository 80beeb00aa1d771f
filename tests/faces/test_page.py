"""The page: whole, escaped, asking for nothing."""

from __future__ import annotations

import re
from html.parser import HTMLParser

import pytest
import sample_records

from steplaw.faces import render
from steplaw.faces.page import page
from steplaw.record import AuditRecord

VOID = {"meta"}
KNOWN = {"html", "head", "meta", "title", "style", "body", "main", "article", "header"}
KNOWN |= {"h1", "h2", "div", "b", "p", "span", "dl", "dt", "dd", "code", "small", "ul", "li"}
KNOWN |= {"table", "thead", "tbody", "tr", "th", "td"}


class Reader(HTMLParser):
    """The standard library's parser: collects text and checks that tags close in order."""

    def __init__(self) -> None:
        super().__init__()
        self.open: list[str] = []
        self.text = ""
        self.tags: set[str] = set()
        self.attributes: set[str] = set()

    def handle_starttag(self, tag: str, attrs: list[tuple[str, str | None]]) -> None:
        self.tags.add(tag)
        self.attributes |= {name for name, _ in attrs}
        if tag not in VOID:
            self.open.append(tag)

    def handle_endtag(self, tag: str) -> None:
        assert self.open.pop() == tag

    def handle_data(self, data: str) -> None:
        if "style" not in self.open:
            self.text += data


def reader(html: str) -> Reader:
    out = Reader()
    out.feed(html)
    out.close()
    assert not out.open
    return out


@pytest.mark.parametrize("whole", [True, False])
@pytest.mark.parametrize("name", sorted(sample_records.ALL))
def test_every_record_has_a_well_formed_page_of_known_tags(name: str, whole: bool) -> None:
    found = reader(page(AuditRecord(sample_records.fresh(name)), whole))
    assert found.tags <= KNOWN
    assert found.attributes <= {"class", "lang", "charset", "name", "content", "tabindex", "scope"}


def test_the_page_asks_for_nothing_from_anywhere() -> None:
    html = render(AuditRecord(sample_records.cubic()), "page")
    assert not re.search(r"https?://|url\(|@import|src=|href=", html)


def test_the_page_tells_law_lines_and_clock() -> None:
    text = reader(page(sample_records.cubic())).text
    assert "steps ~ 23/6 n³ (exact) · line 47 carries 93 % · time follows the steps" in text
    assert "steps = 23/6 n³ − 5/2 n² + 29/3 n + 12" in text
    assert "n(n − 1)(n − 2)/6" in text and "7 999 372" in text
    assert "TIME DEPARTS" in reader(page(sample_records.departing())).text


def test_hostile_text_is_shown_and_does_nothing() -> None:
    html = page(sample_records.hostile())
    assert "<script" not in html
    found = reader(html)
    assert "<script>alert(1)</script>" in found.text
    assert not [c for c in html if not c.isprintable() and c != "\n"]
