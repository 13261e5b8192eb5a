"""The pages by keyboard alone, at double zoom, and in colours that the system forces.

Outside checks: the rules of axe-core (WCAG 2.2); success criteria 1.4.4, 1.4.10, 2.1.1 and 2.4.3.
"""

from __future__ import annotations

from collections.abc import Callable
from pathlib import Path

import pytest
from axe_playwright_python.sync_playwright import Axe
from playwright.sync_api import Browser, Page

from tests.browser.conftest import DAY_BEFORE

pytestmark = pytest.mark.browser

Open = Callable[..., Page]
ZOOMED = (640, 380)
"""A window of 1280 x 760 at 200 % zoom, in CSS pixels."""


def focus_walk(page: Page, ask: str, *, most: int = 400) -> list[str]:
    """Tab on from where the focus is and return the different answers, empty ones left out."""
    seen: list[str] = []
    for _ in range(most):
        page.keyboard.press("Tab")
        answer = page.evaluate(f"(() => {{ const e = document.activeElement; return {ask}; }})()")
        if answer is None:
            break
        if answer and answer not in seen:
            seen.append(answer)
    return seen


def test_a_stop_is_opened_by_enter_and_closed_by_escape(
    open_page: Open, one_day: tuple[Path, ...]
) -> None:
    page = open_page(one_day[1])
    page.locator("#stop-9 button").focus()
    page.keyboard.press("Enter")
    assert page.locator("[aria-current=true]").get_attribute("id") == "stop-9"
    assert page.evaluate("document.activeElement.className").startswith("plate")
    page.keyboard.press("Escape")
    assert page.locator("[aria-current=true]").count() == 0
    assert page.evaluate("document.activeElement.closest('li').id") == "stop-9"
    # the whole tour is in view again
    assert page.locator(".labels > .away").count() == 0


def test_focus_goes_through_the_tours_in_the_order_of_the_table(
    open_page: Open, many_days: tuple[Path, ...]
) -> None:
    page = open_page(many_days[0], size=(1500, 900))
    page.locator("#tours").focus()
    rows = focus_walk(page, "e === document.body ? null : (e.closest('tbody')?.id ?? '')")
    assert rows == [f"tour-{number}" for number in range(1, 16)]
    shown = page.locator(".labels .tag:not(.away)")
    page.locator("#tours").focus()
    walked = focus_walk(page, "e === document.body ? null : e.matches('.tag') ? e.textContent : ''")
    assert walked == shown.all_text_contents()
    shown.nth(2).focus()
    page.keyboard.press("Enter")
    assert page.locator("tbody.chosen").count() == 1
    assert page.evaluate("document.activeElement.tagName") == "A"
    page.keyboard.press("Escape")
    assert page.locator("tbody.chosen").count() == 0
    page.locator("#n3").press("Enter")
    page.locator("body.day").wait_for()
    assert page.locator("h1").inner_text().startswith("Monday 2 March 2026")


def test_a_tour_is_hidden_by_the_space_bar(open_page: Open, many_days: tuple[Path, ...]) -> None:
    page = open_page(many_days[0], size=(1500, 900))
    page.locator("#tour-2 input").focus()
    page.keyboard.press("Space")
    assert not page.locator("#tour-2 input").is_checked()
    assert page.locator(".labels .tag[hidden]").count() == 1


@pytest.mark.parametrize("number", [0, 1, 2, -1], ids=["overview", "day", "sheet", "office"])
def test_double_zoom_loses_nothing(
    open_page: Open, many_days: tuple[Path, ...], number: int
) -> None:
    page = open_page(many_days[number], size=ZOOMED)
    assert page.evaluate("document.documentElement.scrollWidth") <= ZOOMED[0]
    if number != 2:
        # no text is cut off by its own box, and everything can be scrolled to
        cut = page.locator("h1, h2, p, dt, dd, th, td, summary").evaluate_all(
            """all => all.filter(e => e.checkVisibility() && e.scrollWidth > e.clientWidth + 1
                && getComputedStyle(e).overflowX === "hidden" && !e.closest(".caution")
                && !e.matches(".unseen") && !e.closest(".unseen, thead")).map(e => e.outerHTML)"""
        )
        assert cut == []
    if number == 1:
        page.locator("#stop-2 button").focus()
        page.keyboard.press("Enter")
        assert page.locator("#stop-2[aria-current=true]").count() == 1


FORCED_MARKS = {
    "day": [".sheet .cord-edge.way", ".sheet .cord-edge.home", ".sheet .dot", ".rule rect.work"],
    "overview": [".sheet .cord-edge.way", ".sheet .mark", ".bar .bar-work"],
    "office": [".plot .piece.ink", ".plot .mark", ".plot .strip-line"],
}


@pytest.mark.parametrize("scheme", ["light", "dark"])
@pytest.mark.parametrize("number", [0, 1, -1], ids=["overview", "day", "office"])
def test_forced_colours_keep_every_mark(
    browser: Browser, many_days: tuple[Path, ...], number: int, scheme: str
) -> None:
    context = browser.new_context(
        viewport={"width": 1400, "height": 900},
        forced_colors="active",
        color_scheme="dark" if scheme == "dark" else "light",
        bypass_csp=True,
    )
    page = context.new_page()
    page.clock.set_fixed_time(DAY_BEFORE)
    page.goto(many_days[number].as_uri())
    assert page.evaluate("matchMedia('(forced-colors: active)').matches")
    canvas = page.evaluate("getComputedStyle(document.body).backgroundColor")
    for place in FORCED_MARKS[{0: "overview", 1: "day", -1: "office"}[number]]:
        paints = page.locator(place).first.evaluate(
            "e => { const s = getComputedStyle(e); return [s.fill, s.stroke]; }"
        )
        # a mark is outlined or filled in something that the canvas is not
        assert any(paint not in {"none", canvas} for paint in paints), place
    if number == 0:
        # weekdays by dash and glyph: as many as there are days
        dashes = page.locator(".sheet .cord-edge.way").evaluate_all(
            "all => [...new Set(all.map(e => e.getAttribute('stroke-dasharray')))].length"
        )
        assert dashes == 5
    found = [
        rule["id"]
        for rule in Axe().run(page).response["violations"]
        if rule["id"] != "color-contrast"  # the system's own colours
    ]
    context.close()
    assert found == []
