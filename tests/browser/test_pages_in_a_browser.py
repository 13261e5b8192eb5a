"""Published pages in a real browser: silent, self-contained, inert, true to the plan, usable.

Outside checks: the rules of axe-core (Deque Systems; WCAG 2.2 and its best practices), the Web
Mercator projection of pyproj (EPSG:3857), target sizes of WCAG 2.2 criterion 2.5.8.
"""

from __future__ import annotations

import re
from collections.abc import Callable
from datetime import UTC, datetime
from pathlib import Path

import numpy as np
import pytest
from axe_playwright_python.sync_playwright import Axe
from playwright.sync_api import Browser, Page
from pyproj import Transformer

from tests.publish_helpers import HOSTILE, sample_plan, with_late_stop

pytestmark = pytest.mark.browser

PHONE = (390, 844)
DURING = datetime(2026, 3, 2, 13, 0, tzinfo=UTC)  # 10:00 local time, while stop 3 is being done
CAUTION = "Local law, your employer's rules and licensed practice prevail."

Open = Callable[..., Page]


@pytest.mark.parametrize("number", [0, 1, 2], ids=["overview", "day", "sheet"])
@pytest.mark.parametrize("size", [(1400, 900), PHONE], ids=["desk", "phone"])
def test_page_is_one_file_that_says_nothing(
    open_page: Open, one_day: tuple[Path, ...], number: int, size: tuple[int, int]
) -> None:
    page = open_page(one_day[number], size=size)
    # the fixture fails on any message or request; here the page must really have been drawn
    assert page.locator("h1").inner_text().startswith("Monday 2 March 2026")
    assert page.get_by_text(CAUTION).first.is_visible()
    if number < 2:
        assert page.locator(".sheet .cord").count() > 10


@pytest.mark.parametrize("number", [0, 1, 2], ids=["overview", "day", "sheet"])
def test_hostile_text_is_text(
    open_page: Open, hostile_pages: tuple[Path, ...], number: int
) -> None:
    page = open_page(hostile_pages[number])
    assert page.evaluate("window.hacked") is None
    assert page.locator("img, iframe, object, main script").count() == 0
    shown = page.locator("body").text_content() or ""
    assert HOSTILE[1] in page.title()
    for text in HOSTILE if number else (HOSTILE[0], HOSTILE[1], HOSTILE[2]):
        assert text in shown
    if number == 1:
        plates = page.locator(".labels .plate").all_text_contents()
        assert [
            text for text, plate in zip(HOSTILE, plates, strict=True) if text not in plate
        ] == []


def axe_violations(browser: Browser, path: Path, *, size: tuple[int, int], theme: str) -> list[str]:
    context = browser.new_context(
        viewport={"width": size[0], "height": size[1]}, bypass_csp=True, reduced_motion="reduce"
    )
    page = context.new_page()
    page.clock.set_fixed_time(DURING)
    page.goto(path.as_uri())
    if theme:
        page.locator(f"input[value={theme}]").check()
    results = Axe().run(page)
    found = [
        f"{rule['id']}: {[node['target'] for node in rule['nodes']][:3]} {rule['help']}"
        for rule in results.response["violations"]
    ]
    context.close()
    return found


@pytest.mark.parametrize("theme", ["paper", "glare", "night"])
@pytest.mark.parametrize("size", [(1400, 900), PHONE], ids=["desk", "phone"])
def test_axe_finds_nothing_on_the_day_page(
    browser: Browser, one_day: tuple[Path, ...], theme: str, size: tuple[int, int]
) -> None:
    assert axe_violations(browser, one_day[1], size=size, theme=theme) == []


@pytest.mark.parametrize("theme", ["paper", "glare", "night"])
@pytest.mark.parametrize("size", [(1500, 900), PHONE], ids=["desk", "phone"])
def test_axe_finds_nothing_on_the_overview(
    browser: Browser, many_days: tuple[Path, ...], theme: str, size: tuple[int, int]
) -> None:
    assert axe_violations(browser, many_days[0], size=size, theme=theme) == []


@pytest.mark.parametrize("size", [(1000, 1200), PHONE], ids=["desk", "phone"])
def test_axe_finds_nothing_on_the_run_sheet(
    browser: Browser, one_day: tuple[Path, ...], size: tuple[int, int]
) -> None:
    assert axe_violations(browser, one_day[2], size=size, theme="") == []


def test_keyboard_goes_from_row_to_plate_and_back(
    open_page: Open, one_day: tuple[Path, ...]
) -> None:
    page = open_page(one_day[1])
    page.keyboard.press("Tab")
    assert page.evaluate("document.activeElement.className") == "skip"
    page.keyboard.press("Enter")
    assert page.evaluate("document.activeElement.id") == "run-list"
    page.locator("#stop-4 button").focus()
    page.keyboard.press("Enter")
    focused = page.evaluate(
        "document.activeElement.className + ' ' + document.activeElement.innerText"
    )
    assert focused.startswith("plate plate-plain current")
    assert "4" in focused
    assert page.locator("[aria-current=true]").get_attribute("id") == "stop-4"
    page.keyboard.press("Enter")
    assert page.evaluate("document.activeElement.closest('li').id") == "stop-4"


@pytest.mark.parametrize("where", [".labels .plate .plate-number", ".run .row-open .plate"])
def test_focus_order_is_the_order_of_stops(
    open_page: Open, one_day: tuple[Path, ...], where: str
) -> None:
    page = open_page(one_day[1])
    numbers = page.locator(where).all_text_contents()
    assert numbers == [str(number) for number in range(1, 16)]
    # tabbing through the list reaches its rows in the same order
    page.locator("#run-list").focus()
    seen = []
    for _ in range(40):
        page.keyboard.press("Tab")
        at = page.evaluate("document.activeElement.closest('[data-stop]')?.dataset.stop ?? ''")
        if at and at not in seen:
            seen.append(at)
    assert seen == numbers


def test_phone_opens_on_the_next_stop(open_page: Open, one_day: tuple[Path, ...]) -> None:
    page = open_page(one_day[1], size=PHONE, now=DURING)
    row = page.locator("#stop-3")
    assert row.get_attribute("aria-current") == "true"
    assert row.locator(".next-mark").inner_text() == "next stop"
    frame = page.locator(".map-frame").bounding_box()
    box = row.bounding_box()
    assert frame is not None
    assert box is not None
    assert frame["height"] <= 0.45 * PHONE[1]
    assert frame["y"] + frame["height"] - 1 <= box["y"] <= 0.6 * PHONE[1]
    assert page.locator("details.totals").get_attribute("open") is None


def test_no_stop_is_next_after_the_day(open_page: Open, one_day: tuple[Path, ...]) -> None:
    page = open_page(one_day[1], size=PHONE, now=datetime(2026, 3, 5, tzinfo=UTC))
    assert page.locator(".next-stop").count() == 0


def test_map_is_true_to_the_coordinates(open_page: Open, one_day: tuple[Path, ...]) -> None:
    page = open_page(one_day[1])
    dots = page.locator(".sheet circle.dot").evaluate_all(
        "all => all.map(dot => [+dot.getAttribute('cx'), +dot.getAttribute('cy')])"
    )
    plan = sample_plan()
    mercator = Transformer.from_crs("EPSG:4326", "EPSG:3857", always_xy=True)
    east, north = mercator.transform(
        [site.lon_deg for site in plan.sites], [site.lat_deg for site in plan.sites]
    )
    east, south = np.array(east), -np.array(north)
    x, y = np.array(dots).T
    scale = np.ptp(x) / np.ptp(east)
    assert np.abs((x - x[0]) - scale * (east - east[0])).max() < 1.5
    assert np.abs((y - y[0]) - scale * (south - south[0])).max() < 1.5


@pytest.mark.parametrize("size", [(1400, 900), PHONE], ids=["desk", "phone"])
def test_plates_lie_clear_of_each_other_and_in_view(
    open_page: Open, one_day: tuple[Path, ...], size: tuple[int, int]
) -> None:
    page = open_page(one_day[1], size=size, now=datetime(2026, 3, 5, tzinfo=UTC))
    frame = page.locator(".map-frame").bounding_box()
    assert frame is not None
    boxes = [plate.bounding_box() for plate in page.locator(".labels > *:not(.away)").all()]
    assert len(boxes) == 16
    for k, a in enumerate(boxes):
        assert a is not None
        assert a["x"] >= frame["x"]
        assert a["x"] + a["width"] <= frame["x"] + frame["width"]
        for b in boxes[:k]:
            assert b is not None
            apart_x = a["x"] + a["width"] <= b["x"] or b["x"] + b["width"] <= a["x"]
            apart_y = a["y"] + a["height"] <= b["y"] or b["y"] + b["height"] <= a["y"]
            assert apart_x or apart_y


def test_states_of_stops_are_told_by_shape_and_words(
    open_page: Open, one_day: tuple[Path, ...]
) -> None:
    page = open_page(one_day[1])
    late = page.locator(".labels .plate-late")
    assert re.sub(r"\s+", " ", late.inner_text()).startswith("8 12:")
    assert "late 22 min" in late.inner_text()
    assert "polygon" in late.evaluate("plate => getComputedStyle(plate).clipPath")
    wait = page.locator(".labels .plate-wait").first
    assert wait.evaluate("plate => getComputedStyle(plate).borderTopStyle") == "dashed"
    assert "wait 76 min" in wait.inner_text()


def test_time_rule_keeps_the_hours(open_page: Open, one_day: tuple[Path, ...]) -> None:
    page = open_page(one_day[1])
    stops = with_late_stop(sample_plan()).tours[0].stops
    blocks = page.locator(".rule rect.work, .rule rect.late").evaluate_all(
        "all => all.map(block => block.getBoundingClientRect().left)"
    )
    hours = page.locator(".rule line.hour").evaluate_all(
        "all => all.map(line => line.getBoundingClientRect().left)"
    )
    per_hour = (hours[-1] - hours[0]) / (len(hours) - 1)
    assert len(blocks) == len(stops)
    for left, stop in zip(blocks, stops, strict=True):
        since_eight = (
            stop.start - stops[0].start.replace(hour=8, minute=0, second=0)
        ).total_seconds()
        assert left - hours[0] == pytest.approx(since_eight / 3600 * per_hour, abs=1.5)


def test_choice_of_theme_lasts(open_page: Open, one_day: tuple[Path, ...]) -> None:
    page = open_page(one_day[1], theme="night")
    dark = page.evaluate("getComputedStyle(document.body).backgroundColor")
    page.reload()
    assert page.locator("html").get_attribute("data-theme") == "night"
    assert page.evaluate("getComputedStyle(document.body).backgroundColor") == dark
    page.locator("input[value=glare]").check()
    assert page.evaluate("getComputedStyle(document.body).backgroundColor") == "rgb(255, 255, 255)"


def test_scripts_leave_no_names_behind(open_page: Open, one_day: tuple[Path, ...]) -> None:
    blank = one_day[1].with_name("blank.txt")
    blank.write_text("")
    before = set(open_page(blank).evaluate("Object.getOwnPropertyNames(window)"))
    after = set(open_page(one_day[1]).evaluate("Object.getOwnPropertyNames(window)"))
    names = {name for name in after - before if not name.isdigit()}
    ids = set(
        open_page(one_day[1]).evaluate("[...document.querySelectorAll('[id]')].map(e => e.id)")
    )
    assert names - ids == {"L", "leaflet", "_leaflet_events"}  # Leaflet's own


@pytest.mark.parametrize("which", ["day", "overview", "phone"])
def test_targets_are_large_enough(
    open_page: Open, one_day: tuple[Path, ...], many_days: tuple[Path, ...], which: str
) -> None:
    path = many_days[0] if which == "overview" else one_day[1]
    page = open_page(path, size=PHONE if which == "phone" else (1500, 900))
    small = page.evaluate(
        """() => [...document.querySelectorAll("a, button, input, summary, label")]
        .filter(e => e.checkVisibility() && !e.classList.contains("skip") && !e.closest(".away"))
        .filter(e => !(e.matches("input[type=checkbox]") && e.closest("label")))
        .map(e => [e.outerHTML.slice(0, 80), e.getBoundingClientRect()])
        .filter(([, box]) => box.height < 23.9 || box.width < 23.9)
        .map(([text, box]) => `${text} ${box.width} x ${box.height}`)"""
    )
    assert small == []


def test_nothing_runs_off_the_side_at_double_zoom(
    open_page: Open, one_day: tuple[Path, ...], many_days: tuple[Path, ...]
) -> None:
    # 200 % zoom of 1280 x 1024 is a window of 640 x 512 CSS pixels (WCAG 2.2, 1.4.4 and 1.4.10)
    for path in (one_day[1], many_days[0]):
        page = open_page(path, size=(640, 512))
        assert page.evaluate("document.documentElement.scrollWidth") <= 640


def test_forced_colours_keep_cords_and_states(open_page: Open, one_day: tuple[Path, ...]) -> None:
    page = open_page(one_day[1])
    page.emulate_media(forced_colors="active")
    late = page.locator(".labels .plate-late").evaluate(
        "e => [getComputedStyle(e).backgroundColor, getComputedStyle(e).color]"
    )
    assert late[0] != late[1]
    canvas = page.evaluate("getComputedStyle(document.body).backgroundColor")
    assert late[0] != canvas
    cord = page.locator(".sheet .cord-edge.way").first
    assert cord.evaluate("e => getComputedStyle(e).stroke") not in ("none", canvas)


def test_overview_hides_and_shows_tours(open_page: Open, many_days: tuple[Path, ...]) -> None:
    page = open_page(many_days[0], size=(1500, 900))
    assert page.locator(".labels .tag:visible").count() == 15
    page.locator("#tour-1 input").uncheck()
    assert page.locator(".labels .tag:visible").count() == 14
    page.locator(".labels .tag").nth(3).click()
    assert page.locator("tbody.chosen").get_attribute("id") == "tour-4"
    assert page.evaluate("document.activeElement.closest('tbody').id") == "tour-4"
    page.locator("#n4").click()
    assert page.locator("h1").inner_text().startswith("Tuesday 3 March 2026")


def test_unplaced_visits_come_first(open_page: Open, many_days: tuple[Path, ...]) -> None:
    page = open_page(many_days[0], size=(1500, 900))
    assert page.locator("main h2").first.inner_text().lower() == "not placed: 3"
    assert "3 of 138 visits are not placed" in page.locator("header").inner_text()
    assert page.locator(".unplaced").get_by_text("too far for a shift").is_visible()
