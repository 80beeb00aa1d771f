"""The page in a browser: what it shows, what it asks for, what its slider gives."""

from __future__ import annotations

import json
import re
from collections.abc import Iterator
from fractions import Fraction
from pathlib import Path
from typing import TYPE_CHECKING, Any

import browser as chrome
import pytest
import sample_records

import steplaw
from steplaw.faces.page import page
from steplaw.faces.tree import tree
from steplaw.law import value

if TYPE_CHECKING:
    from selenium.webdriver import Chrome

SAMPLES = Path(__file__).parents[2] / "samples"
#: Subject, feed and sizes: a polynomial, halvings, the golden ratio.
AUDITS: dict[str, dict[str, Any]] = {
    "timetable.py:trios": {"feed": f"{SAMPLES}/feeds.py:even_sailings", "sizes": [8, 16]},
    "fleet.py:relief_points": {"feed": "n", "sizes": [8, 32, 128]},
    "cargo.py:berth_fillings": {"feed": "n", "sizes": "0..14+1"},
}


@pytest.fixture(scope="module")
def chromium(tmp_path_factory: pytest.TempPathFactory) -> Iterator[Chrome]:
    with chrome.chromium(tmp_path_factory.mktemp("profile")) as browser:
        yield browser


def written(folder: Path, record: Any) -> Path:
    path = folder / "sheet.html"
    path.write_text(page(record), encoding="utf-8")
    return path


@pytest.mark.parametrize("name", ["cubic", "grid", "random_draws", "stopped", "hostile"])
def test_a_page_opens_from_a_file_and_asks_for_nothing(
    chromium: Chrome, tmp_path: Path, name: str
) -> None:
    path = written(tmp_path, sample_records.fresh(name))
    for width in (1280, 360):
        chrome.open_page(chromium, path, width=width)
        assert chrome.requests(chromium) == [path.as_uri()]
        assert chromium.get_log("browser") == []
        across = "return document.documentElement.scrollWidth"
        assert chromium.execute_script(across) <= width


@pytest.mark.parametrize("dark", [False, True])
@pytest.mark.parametrize("name", ["cubic", "grid", "departing", "unrepeatable"])
def test_axe_finds_no_serious_fault(
    chromium: Chrome, tmp_path: Path, name: str, dark: bool
) -> None:
    chrome.open_page(chromium, written(tmp_path, sample_records.fresh(name)), dark=dark)
    found = chrome.faults(chromium)
    assert not [fault for fault in found if fault[0] in ("serious", "critical")]


def test_every_plot_is_there(chromium: Chrome, tmp_path: Path) -> None:
    chrome.open_page(chromium, written(tmp_path, sample_records.cubic()))
    heights = chromium.execute_script(
        "return [...document.querySelectorAll('svg.plot')].map((plot) => [plot.classList[1], "
        "plot.getBoundingClientRect().height, plot.querySelectorAll('path, circle').length])"
    )
    assert [kind for kind, _, _ in heights] == ["growth", "shares", "shares"]
    assert all(height > 100 and marks > 8 for _, height, marks in heights)
    bands = "return document.querySelectorAll('svg.shares path.band').length"
    # Four terms; six parts by lines with a band each, and one for what is left.
    assert chromium.execute_script(bands) == 4 + 7
    assert chromium.execute_script("return document.querySelectorAll('circle.count').length") > 10
    assert chromium.execute_script("return document.querySelectorAll('path.time').length") > 4


def set_size(chromium: Chrome, place: int, size: int) -> None:
    chromium.execute_script(
        "const box = document.getElementById('size-' + arguments[0]); box.value = arguments[1];"
        "box.dispatchEvent(new Event('input'))",
        place,
        size,
    )


def text(chromium: Chrome, selector: str) -> str:
    found = chromium.execute_script(
        "return document.querySelector(arguments[0]).textContent", selector
    )
    return str(found).replace("\u202f", "")


@pytest.mark.parametrize("name", [*sorted(AUDITS), "two sizes"])
def test_the_slider_shows_what_the_law_gives(chromium: Chrome, tmp_path: Path, name: str) -> None:
    record = (
        steplaw.audit(f"{SAMPLES}/ferry/{name}", clock=False, **AUDITS[name])
        if name in AUDITS
        else steplaw.record.AuditRecord(sample_records.grid())
    )
    law, names = record.figure.law, record.sizes.names
    assert law.grade in ("exact", "proved")
    chrome.open_page(chromium, written(tmp_path, record))
    for size in (9, 23, 100, 1000):
        for place, _ in enumerate(names):
            set_size(chromium, place, size + place)
        at = {name: size + place for place, name in enumerate(names)}
        wanted = value(law.formula, at)
        shown = text(chromium, "#live-figure")
        if isinstance(wanted, Fraction) and wanted.denominator == 1 and wanted < 10**24:
            assert shown == str(wanted)
        else:
            digits = re.match(r"(\d\.\d+) × 10", shown)
            assert digits is not None and str(wanted).startswith(digits[1].replace(".", ""))
        for place, line in enumerate(record.lines):
            found = text(chromium, f"tr[data-line='{place}'] td.live")
            if line.frequency.formula is not None:
                runs = value(line.frequency.formula, at)
                assert "×" in found or float(found) == pytest.approx(float(runs), rel=1e-4, abs=0.5)


def test_arrow_keys_move_the_slider_and_the_mark_in_the_plot(
    chromium: Chrome, tmp_path: Path
) -> None:
    from selenium.webdriver.common.keys import Keys

    chrome.open_page(chromium, written(tmp_path, sample_records.cubic()))
    slider = chromium.find_element("id", "slide-0")
    before = text(chromium, "#live-figure")
    mark = chromium.find_element("css selector", "path.mark").get_attribute("transform")
    slider.send_keys(Keys.ARROW_LEFT)
    size = int(str(chromium.find_element("id", "size-0").get_attribute("value")))
    assert size < 64
    assert text(chromium, "#live-figure") == str(sample_records.steps_of(size)) != before
    assert slider.get_attribute("aria-valuetext") == f"n = {size}"
    moved = chromium.find_element("css selector", "path.mark").get_attribute("transform")
    assert moved != mark
    assert "extrapolated" not in text(chromium, "#live-where")
    set_size(chromium, 0, 640)
    assert text(chromium, "#live-where") == "extrapolated: 10 times the largest size run"
    assert re.fullmatch(r"[\d.]+ s to [\d.]+ s", text(chromium, "#live-time"))


FORMULAS = (
    "23*n**3/6 - 11*n**2/2 + 86*n/3 + 42",
    "n*ceiling(log(n + 1)/log(2)) - 2**ceiling(log(n + 1)/log(2)) + 1",
    "2*(n + 1)*harmonic(n) - 4*n",
    "n*harmonic(n, 2)",
    "n**(log(3)/log(2))",
    "floor(sqrt(n)) + ceiling(log(n + 1)/log(3)/2)",
    "factorial(n)/2 + binomial(n, 3) + catalan(n)",
    "fibonacci(n + 2) + lucas(n) + tribonacci(n) + subfactorial(n)",
    "(-1)**n*n/4 + Mod(n, 3) + n % 4",
    "floor(E*factorial(n))",
    "((1 + sqrt(5))**n - (1 - sqrt(5))**n)/(2**n*sqrt(5))",
    "GoldenRatio**n + exp(-n)",
    "Max(n, 10) + Min(n, 5) + Abs(n - 7)",
    "Piecewise((n, n > 3), (n**2, True))",
    "3.913*n**3 + log(n + 1)**2*n",
    "floor(n/2)*ceiling(n/3)",
)


@pytest.mark.parametrize("formula", FORMULAS)
def test_the_page_works_formulas_out_as_the_program_does(
    chromium: Chrome, tmp_path: Path, formula: str
) -> None:
    if chromium.current_url == "about:blank" or "sheet.html" not in chromium.current_url:
        chrome.open_page(chromium, written(tmp_path, sample_records.cubic()))
    sizes = [0, 1, 2, 3, 4, 7, 8, 9, 26, 27, 31, 32, 33, 64, 81, 100, 128, 999, 1500]
    found = json.loads(
        chromium.execute_script(
            "return JSON.stringify(arguments[1].map((n) => Law.value(arguments[0], {n})),"
            "(key, x) => typeof x === 'bigint' ? String(x) : x)",
            tree(formula, ["n"]),
            sizes,
        )
    )
    for size, got in zip(sizes, found, strict=True):
        wanted = value(formula, {"n": size})
        if isinstance(wanted, Fraction):
            assert (got["num"], got["den"]) == (str(wanted.numerator), str(wanted.denominator))
        elif wanted < float("inf"):
            assert got["float"] == pytest.approx(wanted, rel=1e-12)


def test_hostile_text_does_nothing_in_a_browser(chromium: Chrome, tmp_path: Path) -> None:
    attack = "<script>document.title = 'owned'</script><img src=x onerror=alert(1)>"
    attack += "</title></style></script><svg onload=alert(1)>\"'--><!--\u202e\x1b[2J"
    record = sample_records.cubic()
    record["subject"] |= {"name": attack, "file": attack, "doc": attack}
    record |= {"run_again": attack, "notes": [attack]}
    for line in record["lines"]:
        line |= {"source": attack, "file": attack}
    record["clock"]["reason"] = attack
    chrome.open_page(chromium, written(tmp_path, record))
    assert chromium.title.startswith("Step law of <script>")
    count = "return [document.images.length, document.scripts.length, document.forms.length]"
    assert chromium.execute_script(count) == [0, 2, 1]
    assert chromium.get_log("browser") == []
    assert attack.split("\u202e")[0] in text(chromium, "h1")


def test_in_a_notebook_s_frame_the_slider_works_too(chromium: Chrome, tmp_path: Path) -> None:
    from steplaw.record import AuditRecord

    path = tmp_path / "notebook.html"
    cell = AuditRecord(sample_records.cubic())._repr_html_()
    path.write_text(f"<!doctype html><title>notebook</title>{cell}", encoding="utf-8")
    chrome.open_page(chromium, path)
    chromium.switch_to.frame(0)
    assert text(chromium, "#live-figure") == str(sample_records.steps_of(64))
    chromium.switch_to.default_content()
