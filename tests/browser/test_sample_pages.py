"""The demo's pages kept in ``maps/demo`` as a sample: whole, silent, with caution and credit."""

from __future__ import annotations

import re
from collections.abc import Callable
from pathlib import Path

import pytest
from playwright.sync_api import Page

from tests.sample_pages import MOST_PICTURE_BYTES, PICTURES, SAMPLE

PAGES = sorted(SAMPLE.glob("*.html"))
PICTURE_FILES = sorted(SAMPLE.glob("*.png"))
CAUTION = "Read or change the plan only while parked."
LAW = "Local law, your employer's rules and licensed practice prevail."
CREDIT = "© OpenStreetMap contributors (ODbL)"

if not PAGES:  # a release may leave the sample out
    pytestmark = pytest.mark.skip(reason="maps/demo holds no sample pages")


def words_of(path: Path) -> str:
    text = re.sub(r"(?s)<(script|style)\b.*?</\1>", " ", path.read_text("utf-8"))
    text = re.sub(r"<[^>]+>", "", text).replace("&#39;", "'")
    return " ".join(text.split())


@pytest.mark.parametrize("path", PAGES, ids=lambda path: path.stem)
def test_sample_page_carries_caution_and_credit(path: Path) -> None:
    words = words_of(path)
    for sentence in (CAUTION, LAW, CREDIT):
        assert sentence in words
    assert path.stat().st_size <= 300_000


def test_sample_is_whole_and_its_links_lead_to_its_pages() -> None:
    names = {path.name for path in PAGES}
    assert {"index.html", "office.html"} <= names
    for path in PAGES:
        links = re.findall(r'href="([\w-]+\.html)"', path.read_text("utf-8"))
        assert links
        assert set(links) <= names


def test_sample_tells_no_folder_of_the_machine_that_made_it() -> None:
    for path in PAGES:
        assert "Register register.csv" in words_of(path) or path.name == "office.html"


def test_pictures_are_small() -> None:
    assert {path.name for path in PICTURE_FILES} == set(PICTURES)
    assert all(path.stat().st_size <= MOST_PICTURE_BYTES for path in PICTURE_FILES)


@pytest.mark.browser
@pytest.mark.parametrize("kind", ["index", "office", "day", "sheet"])
def test_sample_page_asks_for_nothing_and_says_nothing(
    open_page: Callable[..., Page], kind: str
) -> None:
    # the fixture fails on any request but the page itself, and on any message
    path = next(path for path in PAGES if path.name.startswith(kind))
    page = open_page(path)
    assert "2027" in page.locator("h1").inner_text()
