"""Plates and tags keep clear of each other, of dots and of the edge: measured, page by page."""

from __future__ import annotations

from collections.abc import Callable
from datetime import UTC, datetime
from pathlib import Path

import pytest
from playwright.sync_api import Page

from georoute.publishing import publish
from tests.browser.labels import measure_labels
from tests.publish_helpers import sample_plan, with_late_stop
from tests.sample_pages import SAMPLE

pytestmark = pytest.mark.browser

Open = Callable[..., Page]
SIZES = [(1400, 900), (1280, 760), (390, 844)]
AFTER = datetime(2030, 1, 1, tzinfo=UTC)
"""No stop is next any more, so that the whole tour is in view on a phone too."""
FAULTS = ("label_on_label", "leader_on_label", "outside", "on_controls")


@pytest.fixture(scope="module")
def sixty_stops(tmp_path_factory: pytest.TempPathFactory) -> Path:
    plan = with_late_stop(sample_plan(stops=60))
    return publish(plan, tmp_path_factory.mktemp("sixty"))[1]


def faults(counts: dict[str, int]) -> dict[str, int]:
    return {name: counts[name] for name in (*FAULTS, "label_on_dot") if counts[name]}


@pytest.mark.parametrize("size", SIZES, ids=str)
def test_all_plates_of_a_day_are_clear(
    open_page: Open, one_day: tuple[Path, ...], size: tuple[int, int]
) -> None:
    counts = measure_labels(open_page(one_day[1], size=size, now=AFTER))
    assert faults(counts) == {}
    assert counts["labels"] == counts["all"] == 16
    assert counts["leader_on_leader"] <= 1


@pytest.mark.parametrize("size", SIZES, ids=str)
def test_plates_of_a_dense_day_are_clear_and_those_without_room_are_counted(
    open_page: Open, sixty_stops: Path, size: tuple[int, int]
) -> None:
    page = open_page(sixty_stops, size=size, now=AFTER)
    counts = measure_labels(page)
    assert faults(counts) == {}
    left = counts["all"] - counts["labels"]
    assert (
        page.locator("#map-fold").inner_text() == f"No room here for {left} of the labels: zoom in."
    )
    # a leader crosses no more than one other
    assert counts["leader_on_leader"] <= counts["labels"] // 2
    assert counts["labels"] >= 20
    # every dot stays, and the late stop keeps its plate
    assert page.locator(".sheet circle.dot").count() == 60
    assert page.locator(".labels .plate-late:not(.away)").count() == 1
    for _ in range(12):
        page.locator("[data-map=in]").click()
    near = measure_labels(page)
    assert faults(near) == {}


@pytest.mark.parametrize("theme", ["glare", "night"])
def test_plates_find_new_places_when_letters_grow(
    open_page: Open, one_day: tuple[Path, ...], theme: str
) -> None:
    page = open_page(one_day[1], size=(1280, 760), now=AFTER, theme=theme)
    assert faults(measure_labels(page)) == {}


@pytest.mark.parametrize("size", SIZES, ids=str)
def test_tags_of_the_overview_are_clear(
    open_page: Open, tmp_path: Path, size: tuple[int, int]
) -> None:
    pages = publish(sample_plan(days=4, people=3, stops=9), tmp_path)
    page = open_page(pages[0], size=size)
    counts = measure_labels(page)
    assert {name: counts[name] for name in FAULTS if counts[name]} == {}
    left = counts["all"] - counts["labels"]
    told = page.locator("#map-fold").inner_text() if left else ""
    assert told == (f"No room here for {left} of the labels: zoom in." if left else "")
    assert counts["labels"] >= (14 if size[0] > 900 else 6)


@pytest.mark.skipif(not SAMPLE.exists(), reason="maps/demo holds no sample pages")
@pytest.mark.parametrize("size", SIZES[1:], ids=str)
def test_labels_of_the_demo_are_clear(open_page: Open, size: tuple[int, int]) -> None:
    shown = crossed = 0
    for path in sorted(SAMPLE.glob("day_*.html")):
        counts = measure_labels(open_page(path, size=size, now=AFTER))
        assert faults(counts) == {}, path.name
        shown += counts["labels"] - counts["all"]
        crossed += counts["leader_on_leader"]
    assert shown >= -2  # two plates at most find no room
    assert crossed <= 4
