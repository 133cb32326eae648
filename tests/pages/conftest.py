"""A browser without a window, for pages opened from the disk."""

import shutil
from pathlib import Path

import pytest
from playwright.sync_api import sync_playwright

from support.many_runs import run_rows, write_front

CHROMIUM = shutil.which("chromium")


@pytest.fixture(scope="module")
def chromium():
    """Debian's Chromium; one for the tests of a module.

    It keeps an event loop running, which the signing of other modules' tests cannot do with.
    """
    with sync_playwright() as play:
        browser = play.chromium.launch(executable_path=CHROMIUM)
        yield browser
        browser.close()


@pytest.fixture
def tab(chromium):
    """A new tab that fails the test for anything a page complains about or fetches from elsewhere."""
    context = chromium.new_context(viewport={"width": 1360, "height": 900})
    page = context.new_page()
    heard: list[str] = []
    page.on("console", lambda message: heard.append(f"{message.type}: {message.text}"))
    page.on("pageerror", lambda error: heard.append(f"error: {error}"))
    page.on("dialog", lambda dialog: (heard.append(f"dialog: {dialog.message}"), dialog.dismiss()))
    page.on("requestfailed", lambda request: heard.append(f"failed: {request.url}"))
    page.on("request", lambda request: request.url.startswith("file:") or heard.append(request.url))
    yield page
    context.close()
    assert heard == []


@pytest.fixture(scope="session")
def many(tmp_path_factory) -> Path:
    """The first page of a register of 50,000 runs."""
    return write_front(tmp_path_factory.mktemp("many"), run_rows(50_000))


@pytest.fixture(scope="session")
def some(tmp_path_factory) -> Path:
    """The first page of a register of 1,234 runs."""
    return write_front(tmp_path_factory.mktemp("some"), run_rows(1_234))
