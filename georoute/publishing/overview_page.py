"""The overview page: what is not placed, all tours on one map, and their table."""

from __future__ import annotations

from typing import TYPE_CHECKING

from georoute.publishing.frame import DataLayer, Page, SurveyMap
from georoute.publishing.overview_view import overview_view

if TYPE_CHECKING:
    from georoute.domain.plan import DayTour
    from georoute.publishing.overview_view import OverviewView, TourRow
    from georoute.publishing.page_values import Edition

__all__ = ["overview_page"]

_SCRIPTS = ("base.js", "labels.js", "map.js", "overview.js")
_STYLES = ("page.css", "overview.css")


def _places(edition: Edition) -> dict[str, tuple[float, float]]:
    """Return latitude and longitude of bases and of the sites of all tours, by id."""
    index = edition.index
    places = {
        base.base_id: (round(base.lat_deg, 5), edition.lon(base.lon_deg))
        for base in index.bases.values()
    }
    for tour in edition.plan.tours:
        for stop in tour.stops:
            site = index.sites[stop.site_id]
            # a site with the id of a base is another place; the prefix keeps them apart
            key = f"site|{site.site_id}"
            places[key] = (round(site.lat_deg, 5), edition.lon(site.lon_deg))
    return places


def _outermost(tour: DayTour, places: dict[str, tuple[float, float]]) -> list[str]:
    """Return the stops where the tag of a tour may hang: the farthest one each way."""
    keys = [f"site|{stop.site_id}" for stop in tour.stops]
    south_to_north = sorted(keys, key=lambda key: places[key][0])
    west_to_east = sorted(keys, key=lambda key: places[key][1])
    chosen = [line[end] for line in (south_to_north, west_to_east) for end in (0, -1)]
    return list(dict.fromkeys(chosen))


def _short_name(name: str) -> str:
    """Return a name with its first word shortened: ``R. Tapia``."""
    parts = name.split()
    return f"{parts[0][0]}. {parts[-1]}" if len(parts) > 1 else name


def _island(edition: Edition, view: OverviewView) -> dict[str, object]:
    words, places = edition.figures.words, _places(edition)
    numbers = {key: number for number, key in enumerate(places)}

    def strand(row: TourRow) -> dict[str, object]:
        tour = row.tour
        way = [tour.start_base_id, *(f"site|{s.site_id}" for s in tour.stops), tour.end_base_id]
        way_numbers = [numbers[key] for key in way]
        count = len(tour.stops)
        tag = words("tag_one" if count == 1 else "tag", date=row.date_short, count=count)
        return {
            "hue": row.look.hue,
            "outlined": row.look.outlined,
            "dash": row.look.dash,
            "mark": row.look.mark,
            "tag": tag,
            "inspector": _short_name(row.inspector),
            "tag_places": [numbers[key] for key in _outermost(tour, places)],
            "way": way_numbers,
        }

    return {
        "words": words.for_scripts(),
        "places": list(places.values()),
        "bases": [
            {"name": base.name, "place": numbers[base.base_id]}
            for base in edition.plan.programme.bases
        ],
        "tours": [strand(row) for row in view.rows],
    }


def overview_page(edition: Edition) -> str:
    """Return the overview page as HTML."""
    words = edition.figures.words
    view = overview_view(edition.plan, edition.index, edition.slugs, edition.figures)
    page = Page(template="overview.html", scripts=_SCRIPTS, styles=_STYLES)
    survey_map = SurveyMap("map_overview_name")
    survey_map.add_child(DataLayer("drawOverview"))
    page.add_child(survey_map)
    values = {
        **edition.common(),
        "title": view.title,
        "view": view,
        "about": [*edition.about(), words("library")],
    }
    return page.page_text(_island(edition, view), values)
