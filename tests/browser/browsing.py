"""Headless Chromium for the tests of the page."""

from __future__ import annotations

import os
import shutil
from collections.abc import Iterator
from contextlib import contextmanager
from pathlib import Path

import pytest
from playwright.sync_api import Browser, Page, sync_playwright

ALONE = (
    "--no-sandbox",
    "--disable-gpu",
    "--disable-quic",
    "--no-first-run",
    "--disable-background-networking",
    "--disable-component-update",
    "--disable-sync",
)


def chromium() -> str:
    """The browser of the system; a missing one fails continuous integration alone."""
    found = shutil.which("chromium")
    if found is not None:
        return found
    if os.environ.get("CI"):
        pytest.fail("chromium is missing: install it")
    pytest.skip("chromium is not installed")


@contextmanager
def running_browser() -> Iterator[Browser]:
    """A browser with an empty profile that speaks to nobody."""
    program = chromium()
    with sync_playwright() as driver:
        browser = driver.chromium.launch(executable_path=program, args=ALONE)
        yield browser
        browser.close()


@contextmanager
def opened(browser: Browser, path: Path, width: int = 1440, scheme: str = "light") -> Iterator[Page]:
    """A file as a page; what the browser complains of on its console, or of its program, fails the test."""
    complaints: list[str] = []
    dark = scheme == "dark"
    page = browser.new_page(
        viewport={"width": width, "height": 900}, color_scheme="dark" if dark else "light", offline=True
    )
    page.on("console", lambda message: complaints.append(message.text))
    page.on("pageerror", lambda error: complaints.append(str(error)))
    page.goto(path.as_uri())
    yield page
    page.wait_for_timeout(50)
    page.close()
    assert complaints == []
