"""Make the pictures of docs/pictures: the sheet in the terminal, the page, and the plots.

Run with the folders src and tests/faces on PYTHONPATH, from the folder of the README. It needs
Chromium with its driver.
"""

from __future__ import annotations

import base64
import io
import tempfile
from pathlib import Path

import browser as chrome
from PIL import Image
from rich.console import Console
from rich.terminal_theme import TerminalTheme

import steplaw
from steplaw.faces.page import page
from steplaw.faces.plot import picture
from steplaw.faces.terminal import show

PICTURES = Path("docs/pictures")
DARK = [(40, 52, 51), (255, 157, 144), (116, 209, 191), (240, 180, 106), (126, 165, 208)]
DARK += [(190, 150, 205), (116, 209, 191), (226, 233, 227)]
THEME = TerminalTheme((22, 31, 30), (226, 233, 227), DARK)


def main() -> None:
    """Audit two samples and take the pictures."""
    record = steplaw.audit(
        "samples/ferry/timetable.py:trios", feed="samples/feeds.py:even_sailings"
    )
    record["subject"]["file"] = "samples/ferry/timetable.py"
    scan = steplaw.audit("samples/ferry/bookings.py:without_repeats", sizes="4..1024")
    PICTURES.mkdir(exist_ok=True)
    keep("plots.png", picture(scan, "png"))
    with tempfile.TemporaryDirectory() as folder:
        path = Path(folder) / "sheet.html"
        with chrome.chromium(Path(folder) / "profile") as browser:

            def shoot(name: str, width: int, height: int, dark: bool = False) -> None:
                chrome.open_page(browser, path, width=width, dark=dark)
                clip = {"x": 0, "y": 0, "width": width, "height": height, "scale": 1}
                given = {"captureBeyondViewport": True, "clip": clip}
                shot = browser.execute_cdp_cmd("Page.captureScreenshot", given)
                keep(name, base64.b64decode(shot["data"]))

            path.write_text(page(record), encoding="utf-8")
            shoot("page.png", 1100, 1500)
            shoot("page-dark.png", 1100, 1500, dark=True)
            shoot("page-phone.png", 360, 1100)
            path.write_text(terminal(record), encoding="utf-8")
            browser.execute_cdp_cmd("Emulation.setEmulatedMedia", {"features": []})
            shoot("terminal.png", 760, 1190)


def keep(name: str, data: bytes) -> None:
    """Write a picture with as few colours as it needs."""
    few = Image.open(io.BytesIO(data)).convert("RGB").quantize(64)
    few.save(PICTURES / name, optimize=True)


def terminal(record: steplaw.record.AuditRecord) -> str:
    """Give the sheet of the terminal as HTML in the colours of a dark terminal."""
    console = Console(
        width=80, record=True, force_terminal=True, color_system="standard", file=io.StringIO()
    )
    show(record, console)
    form = (
        "<!doctype html><meta charset=utf-8><style>{stylesheet} body {{ margin: 0; padding: 14px;"
        " background: {background}; color: {foreground}; }} pre {{ margin: 0; font: 14.5px/1.22"
        " 'DejaVu Sans Mono', monospace; }}</style><pre>{code}</pre>"
    )
    return console.export_html(theme=THEME, code_format=form)


if __name__ == "__main__":
    main()
