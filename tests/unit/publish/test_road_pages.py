"""What pages of plans on roads say, thank, weigh and let through.

Outside check: pages are read by the standard library's HTML parser; sizes are those of files.
"""

from __future__ import annotations

import html
import re
from dataclasses import replace
from html.parser import HTMLParser

import pytest

from georoute.domain.plan import Leg, Plan
from georoute.domain.roads import RoadPoint
from georoute.publishing.figures import Figures
from georoute.publishing.page_budget import AIM_BYTES, MOST_BYTES
from georoute.publishing.pages import pages_of
from georoute.publishing.road_words import last_metres, way_words
from georoute.publishing.words import words_for
from tests.publish_helpers import HOSTILE, sample_plan
from tests.roads_pages_helpers import dense_town, roads_plan, with_bay, with_hostile_streets

CREDIT = "© OpenStreetMap contributors"
STRAIGHT = "Straight lines, not along roads"
ALONG = "Along roads of the map data"
MIXED = "thin broken lines are straight, not along roads"
TAGS = re.compile(r"(?s)<(script|style)\b.*?</\1>|<[^>]+>")


def kinds(plan: Plan, language: str = "en") -> dict[str, str]:
    """Return overview, first day page and first sheet by kind."""
    pages = pages_of(plan, issued=None, language=language)
    found = {name.split("_")[0].removesuffix(".html"): page for name, page in pages.items()}
    return {kind: page.decode("utf-8") for kind, page in found.items()}


def said(page: str) -> str:
    return " ".join(html.unescape(TAGS.sub(" ", page)).split())


def figures(language: str = "en") -> Figures:
    return Figures.of(sample_plan(), words_for(language))


def leg_on(*roads: tuple[str, float], ferry: bool = False) -> Leg:
    leg = sample_plan().tours[0].legs[0]
    return replace(leg, path=((-29.9, -71.2), (-29.91, -71.2)), roads=roads, ferry=ferry)


@pytest.mark.parametrize("kind", ["index", "day", "sheet"])
def test_pages_say_what_their_lines_are_and_whom_to_thank(kind: str) -> None:
    straight, roads = said(kinds(sample_plan())[kind]), said(kinds(roads_plan())[kind])
    assert STRAIGHT in straight
    assert CREDIT not in straight
    assert ALONG in roads
    assert CREDIT in roads
    assert "all times are estimates" in roads
    assert "speeds by class of road" in roads
    assert STRAIGHT not in roads
    assert "not measured on roads" not in roads
    assert MIXED not in roads


@pytest.mark.parametrize("kind", ["index", "day", "sheet"])
def test_a_leg_without_roads_among_others_is_told(kind: str) -> None:
    plan = roads_plan()
    first = plan.tours[0]
    legs = (replace(first.legs[0], path=(), roads=()), *first.legs[1:])
    assert MIXED in said(kinds(replace(plan, tours=(replace(first, legs=legs),)))[kind])


def test_roads_of_a_leg_are_told_in_the_order_driven() -> None:
    leg = leg_on(
        ("Los Olivos", 180.0),
        ("", 20.0),
        ("Los Olivos", 105.0),
        ("Corta", 40.0),
        ("Ruta 5 Norte", 3120.0),
        ("Balmaceda", 700.0),
        ("El Santo", 250.0),
        ("Brasil", 120.0),
    )
    assert way_words(leg, figures()).roads == (
        "By Los Olivos 300 m, then Ruta 5 Norte 3.1 km, then Balmaceda 700 m, then El Santo 250 m; "
        "and 1 more road."
    )
    assert way_words(leg, figures("es")).roads == (
        "Por Los Olivos 300 m, luego Ruta 5 Norte 3,1 km, luego Balmaceda 700 m, luego El Santo "
        "250 m; y 1 calle más."
    )


def test_two_parts_of_a_road_are_told_as_one() -> None:
    leg = leg_on(("Ruta 5", 1200.0), ("", 300.0), ("Salida", 40.0), ("Ruta 5", 8000.0))
    assert way_words(leg, figures()).roads == "By Ruta 5 9.2 km."


def test_legs_without_names_and_without_roads() -> None:
    assert "no name" in way_words(leg_on(("", 900.0)), figures()).roads
    straight = sample_plan().tours[0].legs[0]
    assert way_words(straight, figures()).roads == ""
    # just below a kilometre is never "1000 m"
    assert "1.0 km" in way_words(leg_on(("Ancha", 996.0)), figures()).roads


def test_ferries_and_last_metres_are_told() -> None:
    assert "ask for its sailings" in way_words(leg_on(("", 5.0), ferry=True), figures()).ferry
    assert way_words(leg_on(("", 5.0)), figures()).ferry == ""
    point = RoadPoint(
        place_id="S", lat_deg=0, lon_deg=0, distance_m=84, road="Ancha", stretch=0, offset_m=0
    )
    assert last_metres(point, figures()) == "80 m from Ancha: driving ends there"
    assert "from the road" in last_metres(replace(point, road=""), figures())
    assert last_metres(replace(point, distance_m=30), figures()) == ""
    assert last_metres(None, figures()) == ""


@pytest.mark.parametrize("kind", ["day", "sheet"])
def test_run_list_and_sheet_name_roads_ferry_and_last_metres(kind: str) -> None:
    plan = with_bay(roads_plan())
    far = tuple(replace(point, distance_m=64.0) for point in plan.road_points)
    page = said(kinds(replace(plan, road_points=far))[kind])
    figure = figures()
    for leg in plan.tours[0].legs:
        assert way_words(leg, figure).roads in page
    assert page.count("ask for its sailings") == 1
    assert page.count("driving ends there") == len(plan.tours[0].stops)
    assert "consulte sus salidas" in said(kinds(plan, "es")[kind])


def test_pages_stay_within_their_bytes() -> None:
    dense = kinds(dense_town(roads_plan()))
    usual = kinds(with_bay(roads_plan()))
    for pages, most in ((dense, AIM_BYTES), (usual, AIM_BYTES)):
        for page in pages.values():
            assert len(page.encode()) <= most <= MOST_BYTES
    # the dense town fills its room and gives up local roads before others
    assert len(dense["day"].encode()) > 0.75 * AIM_BYTES
    assert '"main":' in dense["day"]
    many = kinds(dense_town(roads_plan(stops=60)))
    assert all(len(page.encode()) <= MOST_BYTES for page in many.values())


class Tags(HTMLParser):
    """Collects names of elements."""

    def __init__(self, page: str) -> None:
        super().__init__()
        self.found: set[str] = set()
        self.feed(page)

    def handle_starttag(self, tag: str, attrs: list[tuple[str, str | None]]) -> None:  # type: ignore[explicit-override]  # typing.override is of Python 3.12
        del attrs
        self.found.add(tag)


@pytest.mark.parametrize("kind", ["index", "day", "sheet"])
def test_hostile_street_names_are_text(kind: str) -> None:
    plain = with_bay(roads_plan(stops=6))
    evil = with_hostile_streets(plain)
    assert Tags(kinds(evil)[kind]).found <= Tags(kinds(plain)[kind]).found
    page = kinds(evil)[kind]
    for text in HOSTILE[:3]:
        assert text not in page


def test_same_plan_gives_the_same_bytes() -> None:
    plan = with_bay(roads_plan(stops=5))
    assert kinds(plan) == kinds(plan)
