"""A browser for the tests of pages: skipped with the reason where there is none, failing under CI."""

import os
import shutil
from collections.abc import Iterator
from contextlib import contextmanager
from typing import TYPE_CHECKING

import pytest

if TYPE_CHECKING:
    from playwright.sync_api import Browser, Page

_OPTIONS = [
    "--headless", "--no-sandbox", "--disable-gpu", "--disable-quic", "--no-first-run",
    "--disable-background-networking", "--disable-component-update", "--disable-sync",
]  # fmt: skip


def _missing() -> str | None:
    """Why there is no browser to test with."""
    try:
        import axe_playwright_python
        import playwright
    except ImportError as error:
        return str(error)
    del axe_playwright_python, playwright
    return None if shutil.which("chromium") else "no chromium on the path"


def require_browser(what: str) -> None:
    """Skip the module that calls this where there is no browser; fail instead under CI."""
    missing = _missing()
    if missing and os.environ.get("CORNERWISE_CI") != "1":
        pytest.skip(f"{what} not tried in a browser: {missing}", allow_module_level=True)
    assert missing is None, f"{what} to be tried in a browser here: {missing}"


@contextmanager
def launched() -> "Iterator[Browser]":
    """Debian's Chromium."""
    from playwright.sync_api import sync_playwright

    with sync_playwright() as driver:
        browser = driver.chromium.launch(executable_path=shutil.which("chromium"), args=_OPTIONS)
        yield browser
        browser.close()


@contextmanager
def watched(browser: "Browser", address: str, **options: object) -> "Iterator[Page]":
    """A page; it is a fault if it complains, calls out or asks the user anything."""
    context = browser.new_context(**options)
    page = context.new_page()
    complaints: list[str] = []
    page.on("console", lambda message: complaints.append(message.text))
    page.on("pageerror", lambda error: complaints.append(str(error)))
    page.on("dialog", lambda dialog: complaints.append(dialog.message))
    page.on("request", lambda sent: complaints.append(sent.url) if sent.url != address else None)
    page.goto(address)
    yield page
    context.close()
    assert complaints == []


def violations(page: "Page") -> dict[str, list[str]]:
    """What an accessibility pass finds fault with, and where."""
    from axe_playwright_python.sync_playwright import Axe

    found = Axe().run(page).response["violations"]
    return {one["id"]: [node["html"][:200] for node in one["nodes"][:3]] for one in found}
