"""A headless browser for the tests that look at a page as a reader does.

The browser is Debian's ``chromium``. Where it or its driver is missing these tests fail: a page
that nobody looked at is not a page that passed.
"""

import shutil
from collections.abc import Iterator

import pytest
from playwright.sync_api import Browser, sync_playwright

FLAGS = [
    "--no-sandbox",
    "--disable-gpu",
    "--disable-background-networking",
    "--disable-component-update",
    "--disable-sync",
    "--no-first-run",
    "--disable-quic",
]


@pytest.fixture(scope="session")
def browser() -> Iterator[Browser]:
    """The browser, with a fresh profile."""
    program = shutil.which("chromium")
    if program is None:
        raise RuntimeError("the browser tests need the program 'chromium' on the path")
    with sync_playwright() as driver:
        launched = driver.chromium.launch(executable_path=program, headless=True, args=FLAGS)
        yield launched
        launched.close()
