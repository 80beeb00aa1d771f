"""A headless Chromium for the page's tests, where this machine has one."""

from __future__ import annotations

import json
import os
import shutil
from collections.abc import Iterator
from contextlib import contextmanager
from pathlib import Path
from typing import TYPE_CHECKING, Any

import pytest

if TYPE_CHECKING:
    from selenium.webdriver import Chrome

SWITCHES = (
    "--headless",
    "--no-sandbox",
    "--disable-gpu",
    "--no-first-run",
    "--disable-background-networking",
    "--disable-component-update",
    "--disable-sync",
    "--disable-dev-shm-usage",
)


@contextmanager
def chromium(folder: Path) -> Iterator[Chrome]:
    """Open a browser with a fresh profile; skip the test where there is none."""
    program = shutil.which("chromium") or shutil.which("google-chrome")
    driver = shutil.which("chromedriver")
    if program is None or driver is None:
        pytest.skip("no Chromium with its driver here: apt-get install chromium chromium-driver")
    from selenium import webdriver
    from selenium.webdriver.chrome.service import Service

    options = webdriver.ChromeOptions()
    options.binary_location = program
    for switch in (*SWITCHES, f"--user-data-dir={folder}"):
        options.add_argument(switch)
    options.set_capability("goog:loggingPrefs", {"browser": "ALL", "performance": "ALL"})
    browser = webdriver.Chrome(options=options, service=Service(driver))
    try:
        browser.get("about:blank")
        yield browser
    finally:
        browser.quit()


def open_page(browser: Chrome, path: Path, *, width: int = 1280, dark: bool = False) -> None:
    """Open a file at a width and in a colour scheme, with the logs emptied before."""
    size = {"width": width, "height": 900, "deviceScaleFactor": 1, "mobile": False}
    browser.execute_cdp_cmd("Emulation.setDeviceMetricsOverride", size)
    scheme = {"name": "prefers-color-scheme", "value": "dark" if dark else "light"}
    browser.execute_cdp_cmd("Emulation.setEmulatedMedia", {"features": [scheme]})
    for log in ("browser", "performance"):
        browser.get_log(log)
    browser.get(path.as_uri())


def requests(browser: Chrome) -> list[str]:
    """Give the addresses asked for since the page was opened."""
    events = [json.loads(entry["message"])["message"] for entry in browser.get_log("performance")]
    return [
        event["params"]["request"]["url"]
        for event in events
        if event["method"] == "Network.requestWillBeSent"
    ]


def faults(browser: Chrome) -> list[tuple[str, str, str]]:
    """Run axe-core on the page: impact, rule and first place of each fault it finds."""
    path = os.environ.get("STEPLAW_AXE")
    if not path or not Path(path).is_file():
        pytest.skip("no axe-core here: npm install axe-core, STEPLAW_AXE=.../axe.min.js")
    browser.execute_script(Path(path).read_text(encoding="utf-8"))
    found: list[Any] = browser.execute_async_script(
        "const done = arguments[0]; axe.run().then((found) => done(found.violations.map("
        "(fault) => [fault.impact, fault.id, fault.nodes[0].html.slice(0, 120)])));"
    )
    return [(str(impact), str(rule), str(place)) for impact, rule, place in found]
