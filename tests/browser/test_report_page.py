"""The HTML report in a browser: self-contained, accessible, readable at every width, inert."""

from collections.abc import Iterator
from contextlib import contextmanager
from dataclasses import dataclass, field
from pathlib import Path
from typing import Any

import pytest
from axe_playwright_python.sync_playwright import Axe
from playwright.sync_api import Browser, Page

from auditor.report.html import render
from tests.report.records import fixture, hostile_texts, with_text

pytestmark = pytest.mark.browser
SCHEMES = ("light", "dark")


@dataclass
class Seen:
    """What a page did while it was open."""

    page: Page
    requests: list[str] = field(default_factory=list)
    messages: list[str] = field(default_factory=list)
    dialogs: list[str] = field(default_factory=list)


@contextmanager
def opened(browser: Browser, source: str, folder: Path, **context: Any) -> Iterator[Seen]:
    """The page in a tab of its own, without a network."""
    file = folder / "report.html"
    file.write_text(source, encoding="utf-8")
    with browser.new_context(offline=True, **context) as tab:
        page = tab.new_page()
        seen = Seen(page)
        page.on("request", lambda request: seen.requests.append(request.url))
        page.on("console", lambda message: seen.messages.append(message.text))
        page.on("pageerror", lambda error: seen.messages.append(str(error)))
        page.on("dialog", lambda dialog: (seen.dialogs.append(dialog.message), dialog.dismiss()))
        page.goto(file.as_uri())
        yield seen
        assert seen.requests == [file.as_uri()]


def batched(items: list[str], size: int) -> list[list[str]]:
    """The items in lists of that size."""
    return [items[start : start + size] for start in range(0, len(items), size)]


@pytest.mark.parametrize("scheme", SCHEMES)
@pytest.mark.parametrize("name", ["harbour", "one-set", "nothing-read"])
def test_no_rule_of_accessibility_is_broken(
    browser: Browser, tmp_path: Path, name: str, scheme: str
) -> None:
    """axe finds nothing, with all that folds unfolded; nothing but the file is asked for."""
    with opened(browser, render(fixture(name)), tmp_path, color_scheme=scheme) as seen:
        seen.page.evaluate("document.querySelectorAll('details').forEach(d => { d.open = true })")
        result = Axe().run(seen.page)

        assert result.violations_count == 0, result.generate_report()
        assert seen.messages == []


def test_the_accessibility_check_can_fail(browser: Browser, tmp_path: Path) -> None:
    """A page with an unnamed picture and grey on white is found out."""
    bad = "<title></title><img><p style='color:#ccc;background:#fff'>pale"
    with opened(browser, bad, tmp_path) as seen:
        assert Axe().run(seen.page).violations_count > 0


@pytest.mark.parametrize("width", [320, 390, 768, 1200, 1920])
def test_nothing_is_wider_than_the_screen(browser: Browser, tmp_path: Path, width: int) -> None:
    """No sideways scrolling at any width (WCAG 2.2, 1.4.10), with everything unfolded."""
    size = {"width": width, "height": 900}
    with opened(browser, render(fixture("harbour")), tmp_path, viewport=size) as seen:
        seen.page.evaluate("document.querySelectorAll('details').forEach(d => { d.open = true })")

        assert seen.page.evaluate("document.documentElement.scrollWidth") <= width


def test_no_text_in_a_picture_runs_out_of_it(browser: Browser, tmp_path: Path) -> None:
    """Every line of every picture ends within its view box, on a narrow screen too."""
    script = """() => [...document.querySelectorAll('svg.picture')].flatMap(svg => {
        const box = svg.getBoundingClientRect();
        return [...svg.querySelectorAll('text')].filter(text => {
            const t = text.getBoundingClientRect();
            return t.left < box.left - 1 || t.right > box.right + 1 || t.bottom > box.bottom + 1
                || t.top < box.top - 1;
        }).map(text => text.textContent);
    })"""
    for width in (360, 1200):
        size = {"width": width, "height": 900}
        with opened(browser, render(fixture("harbour")), tmp_path, viewport=size) as seen:
            assert seen.page.locator("svg.picture").count() == 11
            assert seen.page.evaluate(script) == []


def test_hostile_text_does_nothing(browser: Browser, tmp_path: Path) -> None:
    """With the corpus in the page, ten texts at a time, no script runs and all of it is text."""
    plain = render(with_text("harmless"))
    with opened(browser, plain, tmp_path) as seen:
        elements = seen.page.evaluate("document.querySelectorAll('*').length")
    for together in batched(hostile_texts(), 10):
        with opened(browser, render(with_text(" ".join(together))), tmp_path) as seen:
            assert seen.page.evaluate("document.querySelectorAll('*').length") == elements
            assert seen.dialogs == []
            assert seen.messages == []


def test_the_content_policy_stops_a_script(browser: Browser, tmp_path: Path) -> None:
    """Were a script to get into the page, it would not run."""
    source = render(fixture("one-set")).replace(
        "</main>", "<script>document.title = 'ran'</script></main>"
    )
    with opened(browser, source, tmp_path) as seen:
        assert seen.page.title() != "ran"
        assert any("Content Security Policy" in message for message in seen.messages)


@pytest.mark.parametrize("paper", ["A4", "Letter"])
def test_it_prints(browser: Browser, tmp_path: Path, paper: str) -> None:
    """A document of pages, each of that paper, and few enough to hand in."""
    with opened(browser, render(fixture("harbour")), tmp_path) as seen:
        document = seen.page.pdf(format=paper)

    sheets = document.count(b"/Type /Page\n")
    width = {"A4": b"595.9", "Letter": b"612 "}[paper]
    assert 8 <= sheets <= 20
    assert document.count(b"/MediaBox [0 0 " + width) == sheets


def test_on_paper_the_pictures_of_a_sheet_stand_side_by_side(
    browser: Browser, tmp_path: Path
) -> None:
    """They start at one height and do not overlap; opened words have the whole width again."""
    with opened(browser, render(fixture("harbour")), tmp_path) as seen:
        seen.page.emulate_media(media="print")
        seen.page.set_viewport_size({"width": 680, "height": 900})
        pair = seen.page.locator(".pair").first
        halves = pair.locator("> div")
        left, right = halves.nth(0).bounding_box(), halves.nth(1).bounding_box()
        pair.locator("details").first.evaluate("item => item.open = true")
        opened_left = halves.nth(0).bounding_box()

    assert left is not None
    assert right is not None
    assert opened_left is not None
    assert left["y"] == right["y"]
    assert left["x"] + left["width"] < right["x"]
    assert opened_left["width"] > left["width"] + right["width"]
