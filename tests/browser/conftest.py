"""Browser and notebook server for the tests of this folder.

Without Chromium these tests are skipped, unless LIBTOOL_REQUIRE_BROWSER=1 is
set, as continuous integration does: then they fail.
"""

from __future__ import annotations

import os
import shutil
from collections.abc import Iterator
from pathlib import Path

import pytest
from playwright.sync_api import Browser, BrowserContext, Page, sync_playwright

from tests.browser.page import FLAGS, Traffic, watch
from tests.browser.server import Server, running_server

HERE = Path(__file__).parent
NAMES = ("/usr/bin/chromium", "chromium", "google-chrome")


def pytest_collection_modifyitems(items: list[pytest.Item]) -> None:
    for item in items:
        if HERE in item.path.parents:
            item.add_marker("browser")


@pytest.fixture(scope="session")
def chromium() -> str:
    """Path of the browser."""
    found = next(filter(None, map(shutil.which, NAMES)), None)
    if found is not None:
        return found
    reason = f"no browser found, looked for {', '.join(NAMES)}; on Debian: apt-get install chromium"
    if os.environ.get("LIBTOOL_REQUIRE_BROWSER") == "1":
        pytest.fail(reason, pytrace=False)
    pytest.skip(reason)


@pytest.fixture(scope="session")
def server(chromium: str, tmp_path_factory: pytest.TempPathFactory) -> Iterator[Server]:
    """One server for all tests; each test writes notebooks under names of its own."""
    with running_server(tmp_path_factory.mktemp("server")) as running:
        yield running


# Not for the session: Playwright keeps an event loop running in this thread, and
# tests outside this folder must not find one there.
@pytest.fixture(scope="module")
def browser(chromium: str) -> Iterator[Browser]:
    with sync_playwright() as playwright:
        launched = playwright.chromium.launch(executable_path=chromium, args=list(FLAGS))
        yield launched
        launched.close()


@pytest.fixture
def context(browser: Browser) -> Iterator[BrowserContext]:
    opened = browser.new_context(viewport={"width": 1280, "height": 900}, service_workers="block")
    yield opened
    opened.close()


@pytest.fixture
def traffic(context: BrowserContext) -> Traffic:
    """What the pages of this test asked for; foreign requests are refused."""
    return watch(context)


@pytest.fixture
def page(context: BrowserContext, traffic: Traffic) -> Page:
    """A page whose traffic is watched; needs no server."""
    return context.new_page()


@pytest.fixture
def notebook_page(page: Page, server: Server) -> Iterator[Page]:
    """A page for notebooks of `server`; their kernels end with the test."""
    yield page
    page.close()
    server.stop_kernels()
