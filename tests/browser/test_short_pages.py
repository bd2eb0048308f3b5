"""The pages of ``ask`` and ``compare`` in a browser: accessible, readable at every width, inert."""

from pathlib import Path

import pytest
from axe_playwright_python.sync_playwright import Axe
from playwright.sync_api import Browser

from auditor.report import asking_html, comparing_html
from tests.browser.test_report_page import SCHEMES, batched, opened
from tests.report import test_asking, test_comparing
from tests.report.records import hostile_texts

pytestmark = pytest.mark.browser
PAGES = {
    "asking": lambda text: asking_html.render(test_asking.with_text(text)),
    "comparing": lambda text: comparing_html.render(test_comparing.hostile(text)),
}
UNFOLD = "document.querySelectorAll('details').forEach(d => { d.open = true })"


@pytest.mark.parametrize("scheme", SCHEMES)
@pytest.mark.parametrize("name", PAGES)
def test_no_rule_of_accessibility_is_broken(
    browser: Browser, tmp_path: Path, name: str, scheme: str
) -> None:
    """axe finds nothing, with all that folds unfolded; nothing but the file is asked for."""
    with opened(browser, PAGES[name]("harmless"), tmp_path, color_scheme=scheme) as seen:
        seen.page.evaluate(UNFOLD)
        result = Axe().run(seen.page)

        assert result.violations_count == 0, result.generate_report()
        assert seen.messages == []


@pytest.mark.parametrize("width", [320, 390, 768, 1200])
@pytest.mark.parametrize("name", PAGES)
def test_nothing_is_wider_than_the_screen(
    browser: Browser, tmp_path: Path, name: str, width: int
) -> None:
    """No sideways scrolling at any width (WCAG 2.2, 1.4.10), with everything unfolded."""
    size = {"width": width, "height": 900}
    with opened(browser, PAGES[name]("harmless"), tmp_path, viewport=size) as seen:
        seen.page.evaluate(UNFOLD)

        assert seen.page.evaluate("document.documentElement.scrollWidth") <= width


@pytest.mark.parametrize("name", PAGES)
def test_hostile_text_does_nothing(browser: Browser, tmp_path: Path, name: str) -> None:
    """With the corpus in the page, ten texts at a time, no script runs and all of it is text."""
    count = "document.querySelectorAll('*').length"
    with opened(browser, PAGES[name]("harmless"), tmp_path) as seen:
        elements = seen.page.evaluate(count)
    for together in batched(hostile_texts(), 10):
        with opened(browser, PAGES[name](" ".join(together)), tmp_path) as seen:
            assert seen.page.evaluate(count) == elements
            assert seen.dialogs == []
            assert seen.messages == []
