"""Pages of plans on roads in a real browser: silent, accessible, names and cords where they belong.

Outside checks: axe-core (Deque Systems), parallels and distances by shapely (GEOS), the Web
Mercator projection of pyproj (EPSG:3857).
"""

from __future__ import annotations

from collections.abc import Callable
from datetime import UTC, datetime
from pathlib import Path

import numpy as np
import pytest
import shapely
from playwright.sync_api import Browser, Page
from pyproj import Transformer

from georoute.publishing import publish
from georoute.publishing.frame import own
from tests.browser.labels import measure_labels
from tests.browser.streets import clashes, read_streets
from tests.browser.test_pages_in_a_browser import axe_violations
from tests.publish_helpers import HOSTILE, with_late_stop
from tests.roads_pages_helpers import (
    dense_town,
    roads_plan,
    with_bay,
    with_hostile_streets,
)

pytestmark = pytest.mark.browser

Open = Callable[..., Page]
PHONE = (390, 844)
SIZES = [(1400, 900), PHONE]
AFTER = datetime(2030, 1, 1, tzinfo=UTC)
FAULTS = ("label_on_label", "leader_on_label", "outside", "on_controls", "label_on_dot")
MOST_NAMES = 90


@pytest.fixture(scope="module")
def road_day(tmp_path_factory: pytest.TempPathFactory) -> tuple[Path, ...]:
    """Overview, day page and run sheet of a day on streets, with a ferry and a late stop."""
    return publish(with_late_stop(with_bay(roads_plan())), tmp_path_factory.mktemp("road_day"))


@pytest.fixture(scope="module")
def road_week(tmp_path_factory: pytest.TempPathFactory) -> tuple[Path, ...]:
    return publish(roads_plan(days=2, people=3, stops=7), tmp_path_factory.mktemp("road_week"))


@pytest.mark.parametrize("number", [0, 1, 2], ids=["overview", "day", "sheet"])
@pytest.mark.parametrize("size", SIZES, ids=["desk", "phone"])
def test_road_page_says_nothing_and_asks_for_nothing(
    open_page: Open, road_day: tuple[Path, ...], number: int, size: tuple[int, int]
) -> None:
    page = open_page(road_day[number], size=size, now=AFTER)
    assert page.get_by_text("© OpenStreetMap contributors").first.is_visible()
    if number < 2:
        assert page.locator(".sheet polyline.cord").count() > 10
        assert page.locator("canvas.ground").count() == 1


@pytest.mark.parametrize("theme", ["paper", "glare", "night"])
@pytest.mark.parametrize("size", SIZES, ids=["desk", "phone"])
@pytest.mark.parametrize("number", [0, 1], ids=["overview", "day"])
def test_axe_finds_nothing_on_roads(
    browser: Browser, road_day: tuple[Path, ...], theme: str, size: tuple[int, int], number: int
) -> None:
    assert axe_violations(browser, road_day[number], size=size, theme=theme) == []


def test_axe_finds_nothing_on_a_sheet_on_roads(
    browser: Browser, road_day: tuple[Path, ...]
) -> None:
    assert axe_violations(browser, road_day[2], size=(1000, 1200), theme="") == []


@pytest.mark.parametrize("theme", ["paper", "glare", "night"])
@pytest.mark.parametrize("size", SIZES, ids=["desk", "phone"])
def test_street_names_are_clear_uncut_and_readable(
    open_page: Open, road_day: tuple[Path, ...], theme: str, size: tuple[int, int]
) -> None:
    page = open_page(road_day[1], size=size, now=AFTER, theme=theme)
    counts = []
    for _ in range(4):
        shown = read_streets(page)
        assert clashes(shown) == {}
        assert all(size >= 10 for size in shown["sizes"])
        assert len(shown["names"]) <= MOST_NAMES
        labels = measure_labels(page)
        assert {name: labels[name] for name in FAULTS if labels[name]} == {}
        counts.append(len(shown["names"]))
        if len(counts) == 1:
            page.locator("#stop-9 .row-open").click()
        for _ in range(1 if size == PHONE else 2):
            page.locator("[data-map=in]").click()
    assert size == PHONE or counts[0] >= 1
    assert max(counts) >= (5 if size == PHONE else 10)


def test_street_names_of_a_stop_in_hand_are_clear(
    open_page: Open, road_day: tuple[Path, ...]
) -> None:
    page = open_page(road_day[1], size=PHONE, now=AFTER)
    for number in (2, 6, 11):
        page.locator(f"#stop-{number} .row-open").click()
        shown = read_streets(page)
        assert clashes(shown) == {}
        assert len(shown["names"]) >= 2


def test_names_of_a_dense_town_keep_to_their_number(open_page: Open, tmp_path: Path) -> None:
    day = publish(dense_town(roads_plan()), tmp_path)[1]
    page = open_page(day, size=(1900, 1300), now=AFTER)
    counts = []
    for _ in range(4):
        page.locator("[data-map=in]").click()
        shown = read_streets(page)
        counts.append(len(shown["names"]))
        assert clashes(shown) == {}
    assert 20 <= max(counts) <= MOST_NAMES


def test_cords_follow_their_roads_on_the_driving_side(
    open_page: Open, road_day: tuple[Path, ...]
) -> None:
    page = open_page(road_day[1], now=AFTER)
    shown = read_streets(page)
    plan = with_bay(roads_plan())
    mercator = Transformer.from_crs("EPSG:4326", "EPSG:3857", always_xy=True)
    dots = page.locator(".sheet circle.dot").evaluate_all(
        "all => all.map(dot => { const b = dot.getBoundingClientRect();"
        " return [b.left + b.width / 2, b.top + b.height / 2]; })"
    )
    sites = np.array([(site.lon_deg, site.lat_deg) for site in plan.sites])
    there = np.column_stack(mercator.transform(*sites.T))
    scale = np.ptp(np.array(dots)[:, 1]) / np.ptp(there[:, 1])
    lines = []
    for leg in plan.tours[0].legs:
        lat, lon = np.array(leg.path).T
        x, y = mercator.transform(lon, lat)
        lines.append(
            np.column_stack(
                [
                    dots[0][0] + (np.array(x) - there[0, 0]) * scale,
                    dots[0][1] - (np.array(y) - there[0, 1]) * scale,
                ]
            )
        )
    roads = shapely.union_all([shapely.LineString(line) for line in lines])
    points = np.vstack([np.array(points) for points in shown["cords"]])
    # 3 px aside, at a corner up to 1.42 times as far, thinned by 0.7, dots whole pixels
    assert shapely.distance(roads, shapely.points(points)).max() < 3 * 1.42 + 0.7 + 1.5
    # the long way home is a straight enough road: its cord lies right of it as seen by the driver
    home, cord = lines[-1], np.array(shown["cords"][-1])
    side = shapely.LineString(home).buffer(6, single_sided=True)  # left in these upright axes
    on_right = [side.buffer(0.01).contains(shapely.Point(p)) for p in cord[2:-2]]
    assert np.mean(on_right) > 0.8


def test_scripts_move_lines_aside_as_geos_does(browser: Browser) -> None:
    source = own("cords.js").split("const CORD_ASIDE")[0]
    context = browser.new_context()
    page = context.new_page()

    def moved(line: np.ndarray, by: float) -> np.ndarray:
        return np.array(
            page.evaluate(
                f"([line, by]) => {{ {source}\nreturn offsetLine(line, by); }}", [line.tolist(), by]
            )
        )

    x = np.linspace(0, 400, 60)
    gentle = np.column_stack([x, 30 * np.sin(x / 40)])
    twin = shapely.offset_curve(shapely.LineString(gentle), 4.0, join_style="mitre")
    assert shapely.hausdorff_distance(shapely.LineString(moved(gentle, 4.0)), twin) < 0.05
    rng = np.random.default_rng(8)
    for _ in range(30):
        turns = np.cumsum(rng.choice([0.1, 0.8, 1.6, 2.7, np.pi], 30) * rng.choice([-1, 1], 30))
        steps = np.column_stack([np.cos(turns), np.sin(turns)]) * rng.choice([0.5, 3, 30], (30, 1))
        line = np.cumsum(steps, axis=0)
        for by in (3.0, -3.0):
            off = shapely.distance(shapely.LineString(line), shapely.points(moved(line, by)))
            assert off.max() <= 3 * np.sqrt(2) + 1e-6
    context.close()


def test_ferry_and_last_metres_are_drawn(open_page: Open, road_day: tuple[Path, ...]) -> None:
    page = open_page(road_day[1], now=AFTER)
    assert page.locator(".sheet .ferry-leg").count() == 1
    assert page.locator(".sheet").get_by_text("ferry", exact=True).count() == 1
    far = [p for p in with_bay(roads_plan()).road_points if p.distance_m >= 15]
    assert page.locator(".sheet .off-line").count() == len(far) > 3
    assert page.locator(".legend").get_by_text("by ferry").is_visible()


def test_ground_has_other_inks_in_each_theme(open_page: Open, road_day: tuple[Path, ...]) -> None:
    inks = set()
    for theme in ("paper", "glare", "night"):
        page = open_page(road_day[1], now=AFTER, theme=theme)
        page.locator("#stop-9 .row-open").click()
        for _ in range(6):  # roads near by are wider than a pixel
            page.locator("[data-map=in]").click()
        colours = page.evaluate(
            """() => {
              const canvas = document.querySelector("canvas.ground");
              const { width, height } = canvas;
              const all = canvas.getContext("2d").getImageData(0, 0, width, height).data;
              const seen = new Set();
              for (let k = 0; k < all.length; k += 4) {
                if (all[k + 3] === 255) seen.add(`${all[k]} ${all[k + 1]} ${all[k + 2]}`);
              }
              return [...["main", "minor", "local", "water"].map(kind => {
                const { stroke, fill } = getComputedStyle(document.querySelector(`.ink-${kind}`));
                const ink = (kind === "water" ? fill : stroke).match(/\\d+/g).join(" ");
                return [ink, seen.has(ink)];
              })];
            }"""
        )
        assert all(drawn for _, drawn in colours), colours
        inks.add(tuple(ink for ink, _ in colours))
    assert len(inks) == 3


def test_forced_colours_keep_the_ground(open_page: Open, road_day: tuple[Path, ...]) -> None:
    page = open_page(road_day[1], now=AFTER)
    page.emulate_media(forced_colors="active")
    road = page.locator(".ink-main").evaluate("e => getComputedStyle(e).stroke")
    canvas = page.evaluate("getComputedStyle(document.body).backgroundColor")
    assert road not in ("none", canvas)


@pytest.mark.parametrize("size", SIZES, ids=["desk", "phone"])
def test_overview_draws_strands_along_roads(
    open_page: Open, road_week: tuple[Path, ...], size: tuple[int, int]
) -> None:
    page = open_page(road_week[0], size=size, now=AFTER)
    assert page.locator(".sheet line.cord").count() == 0
    assert page.locator(".sheet polyline.cord").count() == 6 * 8
    shown = read_streets(page)
    assert clashes(shown) == {}
    labels = measure_labels(page)
    assert {name: labels[name] for name in FAULTS[:4] if labels[name]} == {}


@pytest.mark.parametrize("number", [0, 1, 2], ids=["overview", "day", "sheet"])
def test_hostile_street_names_are_shown_as_text(
    open_page: Open, tmp_path: Path, number: int
) -> None:
    path = publish(with_hostile_streets(with_bay(roads_plan(stops=6))), tmp_path)[number]
    page = open_page(path, now=AFTER)
    for _ in range(5 if number < 2 else 0):
        page.locator("[data-map=in]").click()
    assert page.evaluate("window.hacked") is None
    assert page.locator("img, iframe, object, main script").count() == 0
    if number == 1:
        shown = {name for name, _ in read_streets(page)["names"]}
        assert shown
        assert shown <= {" ".join(text.split()) for text in HOSTILE} | set(HOSTILE)


def test_names_of_a_sketch_are_clear_on_paper(open_page: Open, road_week: tuple[Path, ...]) -> None:
    found = 0
    for path in (path for path in road_week if path.name.startswith("sheet")):
        page = open_page(path, size=(1000, 1200))
        boxes = page.evaluate(
            """() => {
              const corners = text => {
                const b = text.getBBox();
                const m = text.getScreenCTM();
                return [[b.x, b.y], [b.x + b.width, b.y], [b.x + b.width, b.y + b.height],
                  [b.x, b.y + b.height]]
                  .map(([x, y]) => [m.a * x + m.c * y + m.e, m.b * x + m.d * y + m.f]);
              };
              const box = e => {
                const b = e.getBoundingClientRect();
                return [b.left, b.top, b.right, b.bottom];
              };
              const sketch = document.querySelector(".sketch");
              return {
                names: [...sketch.querySelectorAll("g[transform] text:not([aria-hidden])")]
                  .map(corners),
                plates: [...sketch.querySelectorAll("rect, circle")].map(box),
                frame: box(sketch),
              };
            }"""
        )
        names = [shapely.Polygon(corners).buffer(-0.8) for corners in boxes["names"]]
        plates = [shapely.box(*box) for box in boxes["plates"]]
        frame = shapely.box(*boxes["frame"])
        assert all(frame.contains(name) for name in names)
        assert not any(a.intersects(b) for k, a in enumerate(names) for b in names[:k])
        assert not any(name.intersects(plate) for name in names for plate in plates)
        found += len(names)
    assert found >= 12
