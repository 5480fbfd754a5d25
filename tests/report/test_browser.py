"""The HTML report in a real browser: accessible, silent, usable by keyboard, narrow and without JavaScript.

Runs where playwright (with a chromium on the machine) and axe-core are at hand: see README.md beside this file.
"""

from __future__ import annotations

import os
import shutil
from collections.abc import Iterator
from pathlib import Path
from typing import Any

import pytest

playwright = pytest.importorskip("playwright.sync_api", reason="playwright is not installed")
CHROMIUM = shutil.which("chromium") or shutil.which("chromium-browser") or shutil.which("google-chrome")
AXE = Path(os.environ.get("AXE_CORE", Path(__file__).parents[2] / "node_modules" / "axe-core" / "axe.min.js"))
ARGUMENTS = [
    "--no-sandbox",
    "--disable-gpu",
    "--no-first-run",
    "--disable-background-networking",
    "--disable-component-update",
    "--disable-sync",
]
STANDARDS = ["wcag2a", "wcag2aa", "wcag21a", "wcag21aa", "wcag22aa", "best-practice"]

pytestmark = pytest.mark.skipif(CHROMIUM is None, reason="chromium is not on this machine")


@pytest.fixture(scope="module")
def browser() -> Iterator[Any]:
    with playwright.sync_playwright() as running:
        opened = running.chromium.launch(executable_path=CHROMIUM, headless=True, args=ARGUMENTS)
        yield opened
        opened.close()


@pytest.fixture(scope="module")
def file(sample_html: str, tmp_path_factory: pytest.TempPathFactory) -> Path:
    path: Path = tmp_path_factory.mktemp("html") / "report.html"
    path.write_text(sample_html, encoding="utf-8")
    return path


def opened(browser: Any, file: Path, **options: Any) -> Any:
    """A page on the report, and on it everything that it said or asked for."""
    page = browser.new_context(**options).new_page()
    page.said = []
    page.on("console", lambda message: page.said.append(message.text))
    page.on("pageerror", lambda error: page.said.append(str(error)))
    page.on("request", lambda request: None if request.url == file.as_uri() else page.said.append(request.url[:60]))
    page.goto(file.as_uri())
    return page


@pytest.mark.skipif(not AXE.is_file(), reason="axe-core is not at hand")
@pytest.mark.parametrize("scheme", ["light", "dark"])
def test_it_is_accessible(browser: Any, file: Path, scheme: str) -> None:
    page = opened(browser, file, color_scheme=scheme)
    page.evaluate(AXE.read_text(encoding="utf-8") + ";0")
    found = page.evaluate("tags => axe.run(document, {runOnly: tags})", STANDARDS)
    assert [(rule["id"], rule["nodes"][0]["html"][:120]) for rule in found["violations"]] == []
    assert len(found["passes"]) > 20


def test_it_is_silent_and_loads_nothing_but_its_own_fonts(browser: Any, file: Path) -> None:
    page = opened(browser, file)
    page.wait_for_function("document.fonts.ready")
    assert [said for said in page.said if not said.startswith("data:font/woff2")] == []
    assert page.evaluate("document.fonts.check(`12px 'DejaVu Sans Mono'`)")


def test_the_keyboard_reaches_the_report_and_the_filter(browser: Any, file: Path) -> None:
    page = opened(browser, file)
    page.keyboard.press("Tab")
    assert page.evaluate("document.activeElement.className") == "skip"
    page.keyboard.press("Enter")
    assert page.evaluate("document.activeElement.id") == "main"
    page.locator("input[name=verdict][value=compliant]").focus()
    page.keyboard.press("Space")
    assert page.locator("#shown").inner_text() == "7 of 10 requirements shown"
    assert not page.locator("#row-BD-SYS-15").is_visible()
    assert not page.locator("#basis-BD-SYS-12").is_visible()
    page.get_by_role("button", name="Show all").click()
    page.wait_for_function("document.getElementById('shown').textContent.startsWith('10 of 10')")
    page.locator("select[name=loop]").select_option("fan_speed")
    assert page.locator("#shown").inner_text() == "3 of 10 requirements shown"
    page.locator("select[name=owner]").select_option("Controls")
    assert page.locator("#shown").inner_text() == "1 of 10 requirements shown"


def test_a_plot_answers_the_keyboard_and_the_pointer(browser: Any, file: Path) -> None:
    page = opened(browser, file)
    response = page.locator("[id='response-duct_pressure~2e~follow']")
    slider = response.get_by_role("slider")
    slider.focus()
    page.keyboard.press("End")
    said = response.locator("output").inner_text()
    assert said == "t = 9 s, pressure = 398.361 Pa"
    assert slider.get_attribute("aria-valuetext") == said
    box = response.locator("svg").bounding_box()
    page.mouse.move(box["x"] + box["width"] / 2, box["y"] + box["height"] / 2)
    moved = response.locator("output").inner_text()
    assert moved != said
    assert 3.5 < float(moved.split()[2]) < 5.5


def test_nothing_is_wider_than_a_narrow_screen(browser: Any, file: Path) -> None:
    page = opened(browser, file, viewport={"width": 320, "height": 800})
    assert page.evaluate("document.documentElement.scrollWidth") <= 320


def test_all_of_it_can_be_read_without_javascript(browser: Any, file: Path) -> None:
    page = opened(browser, file, java_script_enabled=False)
    assert page.locator("tbody.requirement").count() == 10
    assert page.locator("#row-BD-SYS-11").is_visible()
    assert not page.locator("#filter").is_visible()
    page.get_by_role("link", name="Settling time").first.click()
    assert page.url.endswith("#basis-BD-SYS-11")


def test_it_prints(browser: Any, file: Path) -> None:
    page = opened(browser, file)
    page.emulate_media(media="print")
    assert not page.locator("nav").first.is_visible()
    assert not page.locator("#filter").is_visible()
    assert page.locator("#row-BD-SYS-11").is_visible()
    assert len(page.pdf(tagged=True)) > 50_000
