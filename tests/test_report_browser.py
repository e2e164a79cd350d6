"""The report in a browser: nothing leaves the page, designs can be chosen by mouse and keyboard.

Needs a chromium on the path; without one these tests are skipped, except in CI.
"""

import os
import shutil
from collections.abc import Iterator
from pathlib import Path
from typing import Any

import pytest

from tests.report_runs import finished, missed
from tests.search_specs import EASY

CHROMIUM = shutil.which("chromium") or shutil.which("chromium-browser")
FLAGS = [
    "--headless",
    "--no-sandbox",
    "--disable-gpu",
    "--disable-quic",
    "--no-first-run",
    "--disable-background-networking",
    "--disable-component-update",
    "--disable-sync",
]

pytestmark = pytest.mark.skipif(
    CHROMIUM is None and not os.environ.get("CI"),
    reason="no chromium on the path (apt-get install chromium)",
)


@pytest.fixture(scope="module")
def browser() -> Iterator[Any]:
    from playwright.sync_api import sync_playwright

    assert CHROMIUM is not None, "CI must have a chromium"
    with sync_playwright() as playwright:
        browser = playwright.chromium.launch(executable_path=CHROMIUM, args=FLAGS)
        yield browser
        browser.close()


@pytest.fixture(scope="module")
def folder(tmp_path_factory: pytest.TempPathFactory) -> Path:
    # Rays see the plates' size, so that every design has cuts of its own.
    return finished(tmp_path_factory.mktemp("met"), EASY.replace('"image"', '"ray"'))


class Visit:
    """A page opened, and everything it asked for or complained of."""

    def __init__(self, browser: Any, folder: Path, width: int = 1280) -> None:
        self.page = browser.new_page(viewport={"width": width, "height": 900})
        self.asked: list[str] = []
        self.told: list[str] = []
        self.page.on("request", lambda request: self.asked.append(request.url))
        self.page.on("console", lambda message: self.told.append(message.text))
        self.page.on("pageerror", lambda error: self.told.append(str(error)))
        self.page.on("dialog", lambda dialog: self.told.append(f"dialog {dialog.message}"))
        self.address = (folder / "report.html").as_uri()
        self.page.goto(self.address)
        self.page.wait_for_selector("body[data-ready=yes]")

    def curve(self, name: str) -> str:
        """Return the path of the line that shows a design in a picture, once it is drawn."""
        self.page.wait_for_timeout(150)
        selector = f"#{name} .mark-line.role-mark path[stroke='#0072b2']"
        return str(self.page.locator(selector).first.get_attribute("d"))

    def name(self) -> str:
        return str(self.page.locator("#design-name").inner_text())

    def seen(self) -> tuple[str, ...]:
        """Return what shows the design chosen: cuts, drawing, margins."""
        inside = [self.page.locator(i).inner_html() for i in ("#sketch", "#margins", "#dimensions")]
        return (self.curve("cut-h"), self.curve("polar-h"), *inside)


def test_nothing_leaves_the_page_and_nothing_complains(browser: Any, folder: Path) -> None:
    visit = Visit(browser, folder)
    assert visit.asked == [visit.address]
    assert visit.told == []
    assert visit.page.title().startswith("</script><script>alert(1)")
    visit.page.close()


@pytest.mark.parametrize("width", [320, 800, 1280])
def test_no_sideways_scrolling(browser: Any, folder: Path, width: int) -> None:
    visit = Visit(browser, folder, width)
    wide = visit.page.evaluate("() => document.documentElement.scrollWidth")
    assert wide <= width
    visit.page.close()


def test_a_click_in_the_picture_chooses_a_design(browser: Any, folder: Path) -> None:
    visit = Visit(browser, folder)
    before = visit.name(), *visit.seen()
    visit.page.locator("#front-chart svg").scroll_into_view_if_needed()
    box = visit.page.locator("#front-chart svg").bounding_box()
    assert box is not None
    # Every place in the picture belongs to the nearest design: the upper right to the largest.
    visit.page.mouse.click(box["x"] + 0.9 * box["width"], box["y"] + 0.2 * box["height"])
    visit.page.wait_for_timeout(300)
    after = visit.name(), *visit.seen()
    assert all(one != other for one, other in zip(before, after, strict=True))
    visit.page.close()


def test_the_keyboard_chooses_a_design(browser: Any, folder: Path) -> None:
    visit = Visit(browser, folder)
    before = visit.name(), visit.curve("cut-h")
    visit.page.locator("#list button").nth(1).focus()
    visit.page.keyboard.press("Tab")
    outline = "() => getComputedStyle(document.activeElement).outlineStyle"
    assert visit.page.evaluate(outline) == "solid"
    visit.page.keyboard.press("Enter")
    assert visit.name().startswith("Design 3")
    assert visit.page.locator("#list button[aria-pressed=true]").inner_text() == "3"
    assert (visit.name(), visit.curve("cut-h")) != before
    visit.page.close()


def test_axes_can_be_chosen(browser: Any, folder: Path) -> None:
    visit = Visit(browser, folder)
    visit.page.select_option("#across", "spacing_mm")
    visit.page.wait_for_timeout(300)
    assert "spacing (mm)" in visit.page.locator("#list-head").inner_text()
    assert "spacing (mm)" in visit.page.locator("#front-chart").inner_text()
    assert visit.told == []
    visit.page.close()


def test_a_box_in_the_picture_shortens_the_list(browser: Any, folder: Path) -> None:
    visit = Visit(browser, folder)
    whole = visit.page.locator("#list tr").count()
    visit.page.locator("#front-chart").scroll_into_view_if_needed()
    box = visit.page.locator("#front-chart svg").bounding_box()
    assert box is not None
    visit.page.mouse.move(box["x"] + 0.5 * box["width"], box["y"] + 0.75 * box["height"])
    visit.page.mouse.down()
    visit.page.mouse.move(box["x"] + 0.98 * box["width"], box["y"] + 0.08 * box["height"], steps=5)
    visit.page.mouse.up()
    visit.page.wait_for_timeout(300)
    assert 0 < visit.page.locator("#list tr").count() < whole
    visit.page.close()


def test_a_second_design_can_be_held_beside(browser: Any, folder: Path) -> None:
    visit = Visit(browser, folder)
    visit.page.locator("#held").select_option(index=2)
    visit.page.wait_for_timeout(200)
    assert visit.page.locator("#cut-h .mark-line.role-mark path").count() == 2
    assert visit.page.locator("#key").is_visible()
    visit.page.close()


def test_not_met_works_as_well(browser: Any, tmp_path: Path) -> None:
    visit = Visit(browser, missed(tmp_path))
    assert visit.told == []
    assert visit.name().startswith("Design 1: nearest")
    visit.page.close()
