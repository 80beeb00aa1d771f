"""The plots as pictures."""

from __future__ import annotations

import xml.etree.ElementTree as ET

import pytest
import sample_records

from steplaw.errors import CallError
from steplaw.faces import render
from steplaw.faces.plot import kind_of, picture


@pytest.mark.parametrize("name", ["cubic", "grid", "departing", "random_draws"])
def test_a_record_has_a_picture_of_well_formed_svg(name: str) -> None:
    root = ET.fromstring(render(sample_records.fresh(name), "svg"))
    assert root.tag == "{http://www.w3.org/2000/svg}svg"
    assert len(root.findall(".//{http://www.w3.org/2000/svg}path")) > 20


def test_the_same_record_gives_the_same_picture() -> None:
    assert picture(sample_records.cubic(), "svg") == picture(sample_records.cubic(), "svg")
    assert picture(sample_records.cubic(), "png").startswith(b"\x89PNG\r\n\x1a\n")


def test_hostile_text_is_drawn_as_letters() -> None:
    record = sample_records.cubic()
    record["subject"]["name"] = r"$\frac{<script>alert(1)</script>" + sample_records.HOSTILE
    made = render(record, "svg")
    ET.fromstring(made)
    assert "<script" not in made


def test_a_record_without_counts_has_no_picture() -> None:
    with pytest.raises(CallError, match="nothing to draw"):
        picture(sample_records.nothing_done(), "svg")


def test_the_ending_of_the_path_says_which_kind() -> None:
    assert [kind_of(path) for path in ("a.svg", "b.PNG")] == ["svg", "png"]
    with pytest.raises(CallError, match=r"no name for a picture; give a path that ends in .svg"):
        kind_of("plot.pdf")
