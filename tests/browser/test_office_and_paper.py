"""The office page in a real browser, and what the browser prints of it and of the run sheet.

Outside checks: the rules of axe-core (Deque Systems; WCAG 2.2 and its best practices); the text
of printed pages as poppler reads it.
"""

from __future__ import annotations

from collections.abc import Callable
from pathlib import Path

import pytest
from playwright.sync_api import Browser, Page

from tests.browser.paper import squeezed, text_of_pdf
from tests.browser.test_pages_in_a_browser import axe_violations
from tests.publish_helpers import HOSTILE

pytestmark = pytest.mark.browser

PHONE = (390, 844)
CAUTION = "Local law, your employer's rules and licensed practice prevail."

Open = Callable[..., Page]


@pytest.mark.parametrize("theme", ["paper", "glare", "night"])
@pytest.mark.parametrize("size", [(1400, 900), PHONE], ids=["desk", "phone"])
def test_axe_finds_nothing_on_the_office_page(
    browser: Browser, many_days: tuple[Path, ...], theme: str, size: tuple[int, int]
) -> None:
    assert axe_violations(browser, many_days[-1], size=size, theme=theme) == []


@pytest.mark.parametrize("size", [(1400, 900), PHONE, (640, 512)], ids=["desk", "phone", "zoom"])
def test_office_page_says_nothing_and_keeps_within_the_side(
    open_page: Open, many_days: tuple[Path, ...], size: tuple[int, int]
) -> None:
    page = open_page(many_days[-1], size=size)
    assert page.locator("h1").inner_text().startswith("Monday 2 March 2026")
    assert page.get_by_text(CAUTION).first.is_visible()
    assert page.locator("svg.plot[role=img]").count() == 5
    assert page.evaluate("document.documentElement.scrollWidth") <= size[0]
    small = page.locator("main a, header a, summary").evaluate_all(
        "all => all.filter(e => e.getBoundingClientRect().height < 23.9).map(e => e.outerHTML)"
    )
    assert small == []


def test_bars_are_as_long_as_their_figures(open_page: Open, many_days: tuple[Path, ...]) -> None:
    page = open_page(many_days[-1])
    ink = page.locator(".part-stages rect.ink").evaluate_all(
        "all => all.map(e => e.getBoundingClientRect().width)"
    )
    costs = page.locator(".part-stages tbody td:nth-child(2)").all_inner_texts()
    figures = [float("".join(c for c in cost if c.isdigit())) for cost in costs]
    assert len(ink) == len(figures) == 3
    for width, figure in zip(ink, figures, strict=True):
        assert width / ink[0] == pytest.approx(figure / figures[0], abs=0.005)


@pytest.mark.parametrize("width", [1400, 390])
def test_words_of_plots_do_not_lie_on_one_another(
    open_page: Open, many_days: tuple[Path, ...], width: int
) -> None:
    page = open_page(many_days[-1], size=(width, 900))
    boxes = page.locator("svg.plot > text").evaluate_all(
        """all => all.map(e => {
            const box = e.getBoundingClientRect();
            return [box.left, box.top, box.right, box.bottom, e.textContent];
        })"""
    )
    assert len(boxes) > 15
    for k, (left, top, right, bottom, text) in enumerate(boxes):
        assert right <= width, text
        for other in boxes[:k]:
            apart = right <= other[0] or other[2] <= left or bottom <= other[1] or other[3] <= top
            assert apart, f"{text} lies on {other[4]}"


def test_office_page_is_worked_by_keyboard(open_page: Open, many_days: tuple[Path, ...]) -> None:
    page = open_page(many_days[-1])
    page.keyboard.press("Tab")
    assert page.evaluate("document.activeElement.className") == "skip"
    page.keyboard.press("Enter")
    assert page.evaluate("document.activeElement.id") == "figures"
    seen = set()
    for _ in range(60):
        page.keyboard.press("Tab")
        seen.add(page.evaluate("document.activeElement.closest('section')?.classList[1] ?? ''"))
    assert {"part-left", "part-weeks", "part-balance", "part-changes"} <= seen
    page.locator("header a").press("Enter")
    assert page.locator("body.overview").count() == 1
    page.locator("header nav a").press("Enter")
    assert page.locator("body.office").count() == 1
    page.locator(".part-shape tbody a").first.press("Enter")
    assert page.locator("body.day").count() == 1


def test_hostile_text_is_text_on_the_office_page(
    open_page: Open, hostile_pages: tuple[Path, ...]
) -> None:
    page = open_page(hostile_pages[-1])
    assert page.evaluate("window.hacked") is None
    assert page.locator("img, iframe, object, main script").count() == 0
    # the inspector's name stands in the drawing of the balance, the register's in the origin
    named = page.locator(".part-balance svg.plot text").all_text_contents()
    assert any(text.startswith(HOSTILE[3]) for text in named)
    shown = page.locator("body").text_content() or ""
    for number in (0, 1, 3, 4):
        assert HOSTILE[number] in shown


def test_hostile_text_is_text_in_the_sketch(
    open_page: Open, hostile_pages: tuple[Path, ...]
) -> None:
    page = open_page(hostile_pages[2])
    assert HOSTILE[1] in page.locator("svg.sketch text").all_text_contents()
    assert page.locator("svg script, svg foreignObject, svg image").count() == 0


@pytest.mark.parametrize("number", [2, -1], ids=["sheet", "office"])
def test_hostile_text_is_text_on_paper(
    open_page: Open, hostile_pages: tuple[Path, ...], tmp_path: Path, number: int
) -> None:
    page = open_page(hostile_pages[number])
    printed = squeezed("".join(text_of_pdf(page, tmp_path)))
    names = HOSTILE if number == 2 else (HOSTILE[1], HOSTILE[3])
    missing = [text for text in names if squeezed(text) not in printed]
    assert missing == []


def test_every_sheet_of_a_run_sheet_names_its_day_and_carries_the_caution(
    open_page: Open, many_days: tuple[Path, ...], one_day: tuple[Path, ...], tmp_path: Path
) -> None:
    sheets = text_of_pdf(open_page(one_day[2]), tmp_path)
    assert len(sheets) >= 2
    for number, sheet in enumerate(sheets, start=1):
        text = squeezed(sheet)
        assert squeezed("Read or change the plan only while parked.") in text
        assert squeezed("Monday 2 March 2026 · Rosa Tapia") in text or number == len(sheets)
        assert f"{number}/{len(sheets)}" in text
    everything = squeezed("".join(sheets))
    for stop in range(1, 16):
        assert squeezed(f"S00-{stop - 1:02d}") in everything
    assert len(text_of_pdf(open_page(many_days[2]), tmp_path)) <= 2


@pytest.mark.parametrize("number", [0, 1, -1], ids=["overview", "day", "office"])
def test_a_page_printed_at_night_is_ink_on_paper(
    open_page: Open, many_days: tuple[Path, ...], tmp_path: Path, number: int
) -> None:
    page = open_page(many_days[number], theme="night")
    page.emulate_media(media="print")
    colours = page.evaluate(
        "[getComputedStyle(document.body).backgroundColor, getComputedStyle(document.body).color]"
    )
    assert colours == ["rgb(255, 255, 255)", "rgb(30, 30, 30)"]
    assert not page.locator(".map-frame").first.is_visible() or number == -1
    first = squeezed(text_of_pdf(page, tmp_path)[0])
    assert first.startswith(squeezed("Caution").upper()) or "CAUTION" in first[:40]
    assert squeezed(CAUTION) in first


@pytest.mark.parametrize("width", [1280, 1400, 1920, 390])
def test_no_column_of_the_tours_is_cut(
    open_page: Open, many_days: tuple[Path, ...], width: int
) -> None:
    page = open_page(many_days[0], size=(width, 900))
    scroll = page.locator(".tours .scroll")
    assert scroll.evaluate("e => e.scrollWidth - e.clientWidth") <= 0
    side = page.locator(".words-side").bounding_box()
    assert side is not None
    for bar in page.locator(".tours .bar").all():
        box = bar.bounding_box()
        assert box is not None
        assert box["x"] >= side["x"]
        assert box["x"] + box["width"] <= side["x"] + side["width"]
        assert box["width"] > 240
    cells = page.locator("#tour-1 tr:first-child td").all_inner_texts()
    assert [cell.rpartition(" ")[2] for cell in cells[2:]] == ["h", "km", "h", "h", "h", "CLP"]


def test_bars_of_a_phone_carry_their_own_hours(
    open_page: Open, many_days: tuple[Path, ...]
) -> None:
    desk = open_page(many_days[0])
    assert desk.locator(".own-hours").first.is_hidden()
    phone = open_page(many_days[0], size=PHONE)
    assert phone.locator(".own-hours").first.is_visible()
    word = (
        phone.locator("#tour-1 td").nth(2).evaluate("e => getComputedStyle(e, '::before').content")
    )
    assert word == '"Drive"'
